"""The joint end of the web: thickened over a pin in its tube, and tapered down to the sheet.

The plain sheet keeps its middle at n = 0; what thickens it is laid on both faces or on one. A joint at the outer end
is that at the inner one, measured from the other end. mm and radians.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
import shapely
from numpy.typing import NDArray

from .blank import Face, FaceName, layer
from .loft import Loft
from .places import crossings, spread
from .seat import Along, Cut, lobatto, sheet_volume
from .web import SIDES, OffSection, Plane, Side, edge

Array = NDArray[np.float64]
End = Literal["inner", "outer"]
Faces = Literal["both", "front", "rear"]

_OVER = np.radians(np.arange(-90.0, 91.0, 10.0))  # angles over a tube along the web, from one side to the other
_ABOUT = np.radians(np.arange(-10.0, 361.0, 10.0))  # and all the way round an upright one, overlapping
_APART = 8.0  # mm between the rings over a tube along the web at which its room is looked at
_SHARES = np.linspace(0.0, 1.0, 5)[:, None]  # of its radius: the rings on the ends of an upright one


def across(pin: float, *, wall: float, overwrap: float) -> float:
    """Diameter of a pin in its tube with the overwrap: ``pin + 2 (wall + overwrap)``.

    Examples
    --------
    >>> across(8.0, wall=0.75, overwrap=0.5)
    10.5
    """
    return pin + 2.0 * (wall + overwrap)


def area(pin: float) -> float:
    """Cross-section of a solid pin, mm^2."""
    return float(np.pi / 4.0 * pin**2)


def section_modulus(pin: float) -> float:
    """``pi d^3 / 32`` of a solid pin, mm^3: what its bending moment is divided by for the stress at its surface."""
    return float(np.pi / 32.0 * pin**3)


@dataclass(frozen=True)
class Thickening:
    """A web that is thicker at one end.

    Attributes
    ----------
    thickness
        Of the whole web at that end.
    full, taper
        How far from the end of the web line it stays that thick, and over what length it comes down to the sheet.
    length
        Of the web line.
    end
        Which end.
    faces
        What is laid on the sheet is laid on ``both`` faces, half on each, or on one.
    """

    thickness: float
    full: float
    taper: float
    length: float
    end: End = "inner"
    faces: Faces = "both"

    def place(self, from_end: float) -> float:
        """Place s at a distance from the joint's end of the web line."""
        return from_end if self.end == "inner" else self.length - from_end

    def pad(self, sheet: float, face: FaceName) -> float:
        """What is laid on one face of a sheet where the web is thickest; 0 where nothing is."""
        more = self.thickness - sheet
        if self.faces == "both":
            return more / 2.0
        return more if self.faces == face else 0.0

    def over(self, sheet: float) -> tuple[Along, Along]:
        """Thickness of the web over a sheet, and where its middle stands along n.

        Examples
        --------
        >>> end = Thickening(12.0, full=80.0, taper=40.0, length=900.0, faces="rear")
        >>> thickness, middle = end.over(8.0)
        >>> float(thickness(100.0)), float(middle(100.0))
        (10.0, 1.0)
        """
        aside = (self.pad(sheet, "rear") - self.pad(sheet, "front")) / 2.0
        s = [self.place(self.full), self.place(self.full + self.taper)]
        thick, middle = [self.thickness, sheet], [aside, 0.0]
        turn = slice(None, None, 1 if self.end == "inner" else -1)
        places = np.array(s[turn])
        return Along(places, np.array(thick[turn])), Along(places, np.array(middle[turn]))


@dataclass(frozen=True)
class Pad:
    """What is laid on one face of the sheet.

    Attributes
    ----------
    face
        Which face of the sheet it lies on.
    thickness
        Where it is thickest.
    glued, outer
        The outlines (k, 2) in (s, h) of its side on the sheet and of its outer side.
    plan
        The outline (k, 2) that holds both, first point not repeated.
    """

    face: FaceName
    thickness: float
    glued: Array
    outer: Array
    plan: Array


def pad(web: Plane, top: Cut, bottom: Cut, end: Thickening, sheet: float, face: FaceName) -> Pad:
    """The pad on one face, its long edges cut as those of the web, its end at the rib plane."""
    n = top.survey.n
    sign = -1.0 if face == "front" else 1.0
    glued = layer(web, top, bottom, np.full_like(top.survey.s, sign * sheet / 2.0), face)
    outer = layer(web, top, bottom, n[..., 0 if face == "front" else -1], face)
    stop = end.place(end.full + end.taper)
    sides = [_up_to(of, stop, end.end) for of in (glued, outer)]
    plan = _plan(sides, 0 if end.end == "inner" else -1)
    return Pad(face, end.pad(sheet, face), sides[0].outline(), sides[1].outline(), plan)


def _plan(sides: list[Face], i: int) -> Array:
    """Outline of what lies between two layers; both end at the joint with their i-th points, where they are askew."""
    corners = np.array([line[i] for of in sides for line in (of.top, of.bottom)])
    slant = shapely.MultiPoint(corners).convex_hull
    whole = (shapely.Polygon(of.outline()).buffer(0.0) for of in sides)  # no hair that a rounding left
    pieces = [*whole, slant.buffer(1e-6)]
    return np.asarray(shapely.get_coordinates(shapely.get_exterior_ring(shapely.union_all(pieces)))[:-1])


def _up_to(face: Face, s: float, end: End) -> Face:
    """The part of a face between its end at the joint and s."""

    def part(line: Array) -> Array:
        h = float(np.interp(s, *line.T))
        keep = line[line[:, 0] < s - 1e-6] if end == "inner" else line[line[:, 0] > s + 1e-6]
        return np.concatenate([keep, [[s, h]]] if end == "inner" else [[[s, h]], keep])

    return replace(face, top=part(face.top), bottom=part(face.bottom))


def pads_volume(web: Plane, top: Cut, bottom: Cut, sheet: float) -> float:
    """Volume that a web has beyond its plain sheet, mm^3."""
    n = top.survey.n
    plain = np.broadcast_to(sheet / 2.0 * lobatto(n.shape[-1])[0], n.shape)
    return sheet_volume(web, top, bottom, n) - sheet_volume(web, top, bottom, plain)


@dataclass(frozen=True)
class Tube:
    """A tube with its pin and overwrap: a straight cylinder in the middle of the thickened web, along it or upright.

    Attributes
    ----------
    start, stop
        The two ends (s, h) of its axis: at one height, or at one s.
    n
        Where its axis stands across the web.
    across
        Its diameter, overwrap included.
    """

    start: tuple[float, float]
    stop: tuple[float, float]
    n: float
    across: float

    @property
    def upright(self) -> bool:
        """Whether it stands upright."""
        return self.start[0] == self.stop[0]

    def outline(self) -> Array:
        """(4, 2) the tube with its overwrap as one looks at a face, in (s, h)."""
        a, b = np.array(self.start), np.array(self.stop)
        along = (b - a) / np.linalg.norm(b - a)
        aside = self.across / 2.0 * np.array([-along[1], along[0]])
        return np.array([a - aside, b - aside, b + aside, a + aside])


@dataclass(frozen=True)
class Fit:
    """How a tube lies between the seats: the least room in h to each (negative where it stands out), and at which s."""

    room: dict[Side, float]
    s: dict[Side, float]

    @property
    def worst(self) -> Side:
        """The edge it comes nearest to; the top where it lies midway."""
        return min(SIDES, key=lambda side: round(self.room[side], 6))


def fit(loft: Loft, web: Plane, tube: Tube, depth: dict[Side, Along]) -> Fit:
    """Room in h from a tube's outside to both seats, `depth` under the skin.

    Raises
    ------
    OffSection
        Where a seat is not over all of the tube.

    Notes
    -----
    Room is looked at on rings: over a tube that lies along the web, one wherever the seat kinks and every few mm
    between; on an end of an upright one, from the axis to the rim. The least on a ring is that of the parabola through
    its least place and the two beside it, which is where seat and tube are parallel.
    """
    room, at = {}, {}
    for side in SIDES:
        s, h, n = (_on_end if tube.upright else _over)(loft, web, tube, side, depth[side])
        seat = edge(loft, web, s, n, side, depth[side](s)).h
        free = seat - h if side == "top" else h - seat
        if np.isnan(free).any():
            raise OffSection(side, float(s[np.isnan(free)][0]))
        least = _least(free)
        ring = least.argmin()
        room[side], at[side] = float(least[ring]), float(s[ring, free[ring].argmin()])
    return Fit(room, at)


def _over(loft: Loft, web: Plane, tube: Tube, side: Side, depth: Along) -> tuple[Array, Array, Array]:
    """Places (s, h, n), each (rings, angles), on that half of a tube along the web which is nearer to a side."""
    radius = tube.across / 2.0
    n = tube.n + radius * np.sin(_OVER)
    h = tube.start[1] + radius * np.cos(_OVER) * (1.0 if side == "top" else -1.0)
    first, last = (np.full(len(n), of(tube.start[0], tube.stop[0])) for of in (min, max))
    near = first[0] - radius, last[0] + radius
    kinks = crossings(loft, web, side, n=lambda s: np.tile(n, (len(s), 1)), depth=depth, within=near)
    corners = np.concatenate([np.tile(depth.s[:, None], len(n)), kinks])
    s = spread(first, last, corners, longest=_APART)
    return s, np.broadcast_to(h, s.shape), np.broadcast_to(n, s.shape)


def _on_end(loft: Loft, web: Plane, tube: Tube, side: Side, depth: Along) -> tuple[Array, Array, Array]:
    """Places (s, h, n), each (rings, angles), on that end of an upright tube which is nearer to a side."""
    radius = tube.across / 2.0 * _SHARES
    height = (max if side == "top" else min)(tube.start[1], tube.stop[1])
    s, n = tube.start[0] + radius * np.cos(_ABOUT), tube.n + radius * np.sin(_ABOUT)
    return s, np.full_like(s, height), n


def _least(free: Array) -> Array:
    """(rings,) least of what is known at even angles on each ring (rings, angles)."""
    ring, i = np.arange(len(free)), np.clip(free.argmin(axis=1), 1, free.shape[1] - 2)
    before, here, after = (free[ring, i + k] for k in (-1, 0, 1))
    bend = before - 2.0 * here + after
    lower = (after - before) ** 2 / (8.0 * np.where(bend > 0.0, bend, np.inf))
    return np.asarray(np.minimum(here - lower, free.min(axis=1)))
