"""Ribs about a canted web, and the cradles that hold a panel at its washout.

A rib plane is y = constant; x aft and z up in mm, as one looks outwards along the span.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from .loft import Loft
from .profile import face_line, profile, symmetric
from .seat import Along
from .web import Plane

Array = NDArray[np.float64]
Outline = Literal["inner", "outer"]
Surface = Literal["lower", "upper"]

_T = symmetric(np.linspace(0.0, 1.0, 241))
_THIN = 0.5  # mm, a rib of the skin's inside stops where it gets thinner
_TALL = 1e3  # mm that a slot reaches up and down before it is cut off by the outline
_LEAST = 60.0  # mm^2, no piece of a rib or hole in it is smaller


class NoRib(ValueError):
    """Nothing is left of the rib at `y`."""

    def __init__(self, y: float) -> None:
        super().__init__(f"nothing is left of it at y = {y:.0f} mm")
        self.y = y


@dataclass(frozen=True)
class Faces:
    """The web as a rib has to make room for it: its plane, n of its two faces along s, and the ribs it runs between."""

    web: Plane
    front: Along
    rear: Along

    def beside(self, y: float) -> bool:
        """Whether the web crosses the rib plane `y`."""
        return self.web.ends[0] <= y <= self.web.ends[1]


@dataclass(frozen=True)
class Slot:
    """The room for the web in a rib.

    Attributes
    ----------
    front, rear
        (2, 2) two places on each of its sides, the lower one first.
    """

    front: Array
    rear: Array

    @property
    def width(self) -> float:
        """Level across it at the web line, mm."""
        z = float(self.front[:, 1].mean())
        front, rear = (float(np.interp(z, line[:, 1], line[:, 0])) for line in (self.front, self.rear))
        return rear - front

    def shape(self) -> shapely.Polygon:
        """The slot carried on up and down."""
        (a, b), (c, d) = self.front, self.rear
        return shapely.Polygon([a - _TALL * (b - a), b + _TALL * (b - a), d + _TALL * (d - c), c - _TALL * (d - c)])


def slot(faces: Faces, y: float, *, clearance: float = 0.0, thickness: float = 0.0) -> Slot:
    """The slot that the web makes in the rib plane `y`.

    A web of thickness t whose line is swept by an angle a takes ``t / cos(a)`` of an upright rib, and with a rib of its
    own thickness w another ``w tan(a)``, since the slot is cut square through it.

    Parameters
    ----------
    clearance
        Left on each face of the web, mm.
    thickness
        Of the rib's own sheet, half on each side of `y`.
    """
    sides = []
    for face, sign in ((faces.front, -1.0), (faces.rear, 1.0)):
        away = Along(face.s, face.value + sign * clearance)
        lines = [face_line(faces.web, away, at) for at in (y - thickness / 2.0, y + thickness / 2.0)]
        first = lines[0][:, 0].sum() < lines[1][:, 0].sum()
        sides.append(lines[0] if first == (sign < 0.0) else lines[1])
    return Slot(sides[0], sides[1])


def outline(loft: Loft, y: float, which: Outline = "inner") -> Array:
    """(k, 2) closed outline of the section at `y`: the outer surface, or the skin's inside.

    Raises
    ------
    NoRib
        If the skin leaves nothing.
    """
    if which == "outer":
        point = loft.outer(_T, y)[0][:, [0, 2]]
        return point if np.any(point[0] != point[-1]) else point[:-1]
    inside = profile(loft, y, _T)
    tail = inside.tail(_THIN)
    if tail == 0.0:
        raise NoRib(y)
    t = np.concatenate([[-tail], _T[np.abs(_T) < tail], [tail]])
    return inside.at(t)


@dataclass(frozen=True)
class Rib:
    """One rib, in as many pieces as the web leaves of it, from the nose aft.

    Attributes
    ----------
    pieces, holes
        Closed outlines (k, 2).
    chord
        (2, 2) the ends of its chord line.
    slot
        Where the web goes through; none where there is no web.
    """

    y: float
    pieces: tuple[Array, ...]
    holes: tuple[Array, ...]
    chord: Array
    slot: Slot | None


def rib(
    loft: Loft,
    y: float,
    faces: Faces | None,
    *,
    which: Outline = "inner",
    clearance: float = 0.0,
    thickness: float = 0.0,
    corner: float = 0.0,
    margin: float | None = None,
) -> Rib:
    """Lay out the rib at `y`.

    Parameters
    ----------
    corner
        Radius cut away where the web meets the outline, mm: room for caps, flanges and squeezed-out glue.
    margin
        What is left round lightening holes, mm; none are cut unless stated.

    Raises
    ------
    NoRib
        If nothing is left of it.
    """
    whole = shapely.Polygon(outline(loft, y, which))
    room = slot(faces, y, clearance=clearance, thickness=thickness) if faces and faces.beside(y) else None
    rest: BaseGeometry = whole
    if room is not None:
        gap = room.shape()
        meets = gap.exterior.intersection(whole.exterior)
        rest = whole.difference(gap).difference(meets.buffer(corner, quad_segs=16) if corner > 0.0 else shapely.Point())
    pieces = [g for g in getattr(rest, "geoms", [rest]) if g.area > _LEAST]
    if not pieces:
        raise NoRib(y)
    pieces.sort(key=lambda g: g.centroid.x)
    holes = [] if margin is None else [hole for piece in pieces for hole in _holes(piece, margin)]
    chord = np.stack([loft.chord_point(f, y)[[0, 2]] for f in (0.0, 1.0)])
    return Rib(y, tuple(_ring(g) for g in pieces), tuple(_ring(g) for g in holes), chord, room)


def _holes(piece: shapely.Polygon, margin: float) -> list[shapely.Polygon]:
    """What lies further than `margin` inside a piece, its corners rounded to the same radius."""
    inside = piece.buffer(-2.0 * margin, quad_segs=16).buffer(margin, quad_segs=16)
    return [g for g in getattr(inside, "geoms", [inside]) if g.area > _LEAST]


def _ring(shape: shapely.Polygon) -> Array:
    return np.asarray(shapely.orient_polygons(shape).exterior.coords)[:-1]


@dataclass(frozen=True)
class Cradle:
    """A saddle that holds the panel by its outer surface.

    x is aft and z up as the panel lies; on its back both are turned about. The base is at z = 0, on the bench.

    Attributes
    ----------
    outline
        (k, 2) closed.
    saddle
        (m, 2) the part of it that the panel lies in, forward end first.
    line
        x of the line on the bench that all cradles are set up by.
    web
        (2, 2) or none: where the web's two faces meet the outer surface in the saddle.
    """

    y: float
    outline: Array
    saddle: Array
    line: float
    web: Array | None


def cradles(
    loft: Loft,
    places: Array,
    faces: Faces,
    *,
    surface: Surface = "lower",
    chord: tuple[float, float] = (0.05, 0.9),
    height: float = 50.0,
    padding: float = 0.0,
) -> list[Cradle]:
    """Saddles at ribs `places`, all on one level bench.

    Parameters
    ----------
    surface
        Which side of the panel lies in them; with ``upper`` the panel lies on its back.
    chord
        Chord fractions between which they hold it.
    height
        Of the lowest place of any saddle above the bench, mm.
    padding
        Felt or film laid into the saddles, mm.
    """
    sign = -1.0 if surface == "lower" else 1.0
    t = np.linspace(np.sqrt(chord[0]), np.sqrt(chord[1]), 161)
    point, by_t, by_y = loft.outer(sign * t, np.asarray(places, dtype=float)[:, None])
    normal = np.cross(by_t, by_y)[..., [0, 2]]
    lines = point[..., [0, 2]] + padding * normal / np.linalg.norm(normal, axis=-1, keepdims=True)
    bench = lines[..., 1].min() - height if sign < 0.0 else lines[..., 1].max() + height
    out = []
    for y, line in zip(places, lines, strict=True):
        laid = np.column_stack([-sign * line[:, 0], -sign * (line[:, 1] - bench)])
        datum = -sign * float(faces.web.point(faces.web.s_at_rib(y, 0.0, 0.0), 0.0, 0.0)[0])
        base = np.array([[laid[-1, 0], 0.0], [laid[0, 0], 0.0]])
        out.append(Cradle(float(y), np.concatenate([laid, base]), laid, datum, _web_in(faces, y, line, laid)))
    return out


def _web_in(faces: Faces, y: float, line: Array, laid: Array) -> Array | None:
    """Where the web's faces cross a saddle's line, as the panel is laid."""
    if not faces.beside(y):
        return None
    cross = []
    for face in (faces.front, faces.rear):
        low, high = face_line(faces.web, face, y)
        off = (line - low) @ np.array([high[1] - low[1], low[0] - high[0]])
        turn = np.flatnonzero((off[:-1] < 0.0) & (off[1:] >= 0.0))
        if not turn.size:
            return None
        i = int(turn[0])
        cross.append(laid[i] + off[i] / (off[i] - off[i + 1]) * (laid[i + 1] - laid[i]))
    return np.array(cross)
