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
from .seat import Along, Cut, sheet_volume
from .web import SIDES, Plane, Side, edge

Array = NDArray[np.float64]
End = Literal["inner", "outer"]
Faces = Literal["both", "front", "rear"]

_ROUND = np.radians(np.arange(0.0, 360.0, 15.0))
_TURNS = 13  # places along a tube at which its room is looked at


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
    pieces = [*(shapely.Polygon(of.outline()) for of in sides), slant.buffer(1e-6)]
    return np.asarray(shapely.get_coordinates(shapely.get_exterior_ring(shapely.union_all(pieces)))[:-1])


def _up_to(face: Face, s: float, end: End) -> Face:
    """The part of a face between its end at the joint and s."""

    def part(line: Array) -> Array:
        h = float(np.interp(s, *line.T))
        keep = line[line[:, 0] < s - 1e-6] if end == "inner" else line[line[:, 0] > s + 1e-6]
        return np.concatenate([keep, [[s, h]]] if end == "inner" else [[[s, h]], keep])

    return replace(face, top=part(face.top), bottom=part(face.bottom))


def pads_volume(top: Cut, bottom: Cut, sheet: float) -> float:
    """Volume that a web has beyond its plain sheet, mm^3."""
    plain = top.survey.within(sheet)
    return sheet_volume(top, bottom) - sheet_volume(replace(top, survey=plain), replace(bottom, survey=plain))


@dataclass(frozen=True)
class Tube:
    """A tube with its pin and overwrap: a straight cylinder in the middle of the thickened web.

    Attributes
    ----------
    start, stop
        The two ends (s, h) of its axis.
    n
        Where its axis stands across the web.
    across
        Its diameter, overwrap included.
    """

    start: tuple[float, float]
    stop: tuple[float, float]
    n: float
    across: float

    def outline(self) -> Array:
        """(4, 2) the tube with its overwrap as one looks at a face, in (s, h)."""
        a, b = np.array(self.start), np.array(self.stop)
        along = (b - a) / np.linalg.norm(b - a)
        aside = self.across / 2.0 * np.array([-along[1], along[0]])
        return np.array([a - aside, b - aside, b + aside, a + aside])

    def surface(self) -> Array:
        """(k, 3) places (s, h, n) all over its outside, both rims included."""
        a, b = np.array(self.start), np.array(self.stop)
        along = (b - a) / np.linalg.norm(b - a)
        axis = a + np.linspace(0.0, 1.0, _TURNS)[:, None] * (b - a)
        radius = self.across / 2.0
        around = radius * np.cos(_ROUND)[:, None] * np.array([-along[1], along[0]])
        flat = (axis[:, None] + around).reshape(-1, 2)
        return np.column_stack([flat, np.tile(self.n + radius * np.sin(_ROUND), _TURNS)])


@dataclass(frozen=True)
class Fit:
    """How a tube lies between the seats: the least room in h to each (negative where it stands out), and at which s."""

    room: dict[Side, float]
    s: dict[Side, float]

    @property
    def worst(self) -> Side:
        """The edge it comes nearest to."""
        return min(SIDES, key=lambda side: self.room[side])


def fit(loft: Loft, web: Plane, tube: Tube, depth: dict[Side, Along]) -> Fit:
    """Distances from a tube's outside to both seats, `depth` under the skin."""
    s, h, n = tube.surface().T
    room, at = {}, {}
    for side in SIDES:
        seat = edge(loft, web, s, n, side, depth[side](s)).h
        free = seat - h if side == "top" else h - seat
        free = np.where(np.isnan(free), -np.inf, free)
        room[side], at[side] = float(free.min()), float(s[free.argmin()])
    return Fit(room, at)


def between(loft: Loft, web: Plane, depth: dict[Side, Along], s: Array, n: Array) -> tuple[float, float]:
    """Highest bottom seat and lowest top seat over the places (s, n), arrays that broadcast."""
    s, n = np.broadcast_arrays(s, n)
    bottom, top = (edge(loft, web, s, n, side, depth[side](s)).h for side in ("bottom", "top"))
    return float(np.nanmax(bottom)), float(np.nanmin(top))
