"""Ribs about a canted web, and the cradles that hold a panel at its washout.

A rib plane is y = constant; x aft and z up in mm, as one looks outwards along the span. Both are cut square through
sheets of some thickness, and so kept clear of the panel on both faces of their sheet.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from .flange import Flange
from .loft import Loft, unit
from .profile import face_line, outside, profile, symmetric
from .slot import Cut, Faces, Slot, flange_room, largest, parts, planes, polygon, slot

Array = NDArray[np.float64]
Outline = Literal["inner", "outer"]
Surface = Literal["lower", "upper"]

_T = symmetric(np.linspace(0.0, 1.0, 241))
SLIVER = 1.0  # mm, what is nowhere wider is no piece of a rib
_THIN = 0.5  # mm, a rib of the skin's inside stops where it gets thinner
_DUST = 0.02  # mm, what is nowhere wider comes of rounding
_HOLE = 60.0  # mm^2, no hole is smaller
_BEYOND = 20.0  # mm that room for the web reaches above and below the rib
_ROUND = 16  # pieces of a quarter circle


class NoRib(ValueError):
    """Nothing is left of the rib or cradle at `y`."""

    def __init__(self, y: float) -> None:
        super().__init__(f"nothing is left of it at y = {y:.0f} mm")
        self.y = y


def outline(loft: Loft, y: float, which: Outline = "inner") -> Array:
    """(k, 2) closed outline of the section at `y`: the outer surface, or the skin's inside.

    The skin's inside stops where it gets too thin; the outer surface, should its sides cross, where they do.

    Raises
    ------
    NoRib
        If the skin leaves nothing.
    """
    of, least = (outside(loft, y, _T), 0.0) if which == "outer" else (profile(loft, y, _T), _THIN)
    tail = of.tail(least)
    if tail == 0.0:
        raise NoRib(y)
    return shapely.get_coordinates(polygon(of.ahead_of(tail)))[:-1]


@dataclass(frozen=True)
class Rib:
    """One rib, in as many pieces as the web leaves of it, from the nose aft.

    Attributes
    ----------
    pieces, holes
        Closed outlines (k, 2).
    slivers
        Closed outlines (k, 2) of what is left of it besides and is too narrow to be cut.
    chord
        (2, 2) the ends of its chord line.
    slot
        Where the web goes through; none where there is no web.
    short
        How far at most one face of its sheet stands short of the section there, as the other one touches it; mm.
    """

    y: float
    pieces: tuple[Array, ...]
    holes: tuple[Array, ...]
    slivers: tuple[Array, ...]
    chord: Array
    slot: Slot | None
    short: float


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
    flanges: Sequence[Flange] = (),
) -> Rib:
    """Lay out the rib whose sheet lies half on each side of the rib plane `y`.

    Its outline is what lies inside the section all through the sheet, its slot all that the web takes of it there.

    Parameters
    ----------
    clearance
        Left on each face of the web, and about the flanges, mm.
    thickness
        Of its sheet, mm.
    corner
        Radius cut away where the web meets the outline, mm: room for caps and squeezed-out glue.
    margin
        What is left round lightening holes, mm; none are cut unless stated.
    flanges
        What ties the web to the skin, and takes room beside it.

    Raises
    ------
    NoRib
        If nothing is left of it.
    """
    sheet = y - thickness / 2.0, y + thickness / 2.0
    sections = [polygon(outline(loft, float(at), which)) for at in planes(loft, sheet)]
    whole = largest(shapely.intersection_all(sections))
    if whole.is_empty:
        raise NoRib(y)
    room: Slot | None = None
    taken: list[BaseGeometry] = []
    if faces is not None and faces.within(sheet):
        cut = Cut(sheet, clearance, _reach(faces, y, whole))
        room = slot(faces, cut)
        meets = room.shape.exterior.intersection(whole.exterior)
        taken = [room.shape, meets.buffer(corner, quad_segs=_ROUND)]
        taken += [flange_room(loft, faces, flange, cut) for flange in flanges]
    found = [part for part in parts(whole.difference(shapely.union_all(taken))) if _wider(part, _DUST)]
    pieces = sorted((part for part in found if _wider(part, SLIVER)), key=lambda part: part.centroid.x)
    if not pieces:
        raise NoRib(y)
    return Rib(
        y,
        pieces=_rings(pieces),
        holes=() if margin is None else _rings([hole for piece in pieces for hole in _holes(piece, margin)]),
        slivers=_rings([part for part in found if not _wider(part, SLIVER)]),
        chord=np.stack([loft.chord_point(f, y)[[0, 2]] for f in (0.0, 1.0)]),
        slot=room,
        short=_short(whole, sections, whole.bounds[2]),
    )


def _reach(faces: Faces, y: float, whole: shapely.Polygon) -> float:
    """How far above and below the web line, along the web's plane, the rib at `y` goes, and a little more."""
    z = float(faces.web.point(faces.web.s_at_rib(y, 0.0, 0.0), 0.0, 0.0)[2])
    _, low, _, high = whole.bounds
    return (max(high - z, z - low) + _BEYOND) / float(faces.web.h[2])


def _short(common: shapely.Polygon, shapes: Sequence[shapely.Polygon], last: float, first: float = -np.inf) -> float:
    """How far the first or the last shape reaches out over what all have in common, for x from `first` to `last`."""
    points = shapely.get_coordinates([shapes[0], shapes[-1]])
    points = points[(points[:, 0] >= first) & (points[:, 0] <= last)]
    return float(shapely.distance(common, shapely.points(points)).max(initial=0.0))


def _wider(shape: shapely.Polygon, width: float) -> bool:
    """Whether a circle `width` across finds room in a shape."""
    return not shape.buffer(-width / 2.0).is_empty


def _holes(piece: shapely.Polygon, margin: float) -> list[shapely.Polygon]:
    """What lies further than `margin` inside a piece, its corners rounded to the same radius."""
    inside = piece.buffer(-2.0 * margin, quad_segs=_ROUND).buffer(margin, quad_segs=_ROUND)
    return [part for part in parts(inside) if part.area > _HOLE]


def _ring(shape: shapely.Polygon) -> Array:
    return np.asarray(shapely.orient_polygons(shape).exterior.coords)[:-1]


def _rings(shapes: Sequence[shapely.Polygon]) -> tuple[Array, ...]:
    return tuple(_ring(shape) for shape in shapes)


@dataclass(frozen=True)
class Cradle:
    """A saddle that holds the panel by its outer surface.

    x is aft and z up as the panel lies; on its back both are turned about. The base is at z = 0, on the bench.

    Attributes
    ----------
    y
        Where the inner face of its sheet stands.
    outline
        (k, 2) closed.
    saddle
        (m, 2) the part of it that the panel lies in, forward end first.
    line
        x of the line on the bench that all cradles are set up by.
    web
        (2, 2) or none: where the web's two faces meet the outer surface in the saddle, on the face at `y`.
    short
        How far at most one face of its sheet stands short of the panel there, as the other one touches it; mm.
    """

    y: float
    outline: Array
    saddle: Array
    line: float
    web: Array | None
    short: float


def cradles(
    loft: Loft,
    places: Sequence[float],
    faces: Faces,
    *,
    surface: Surface = "lower",
    chord: tuple[float, float] = (0.05, 0.9),
    height: float = 50.0,
    padding: float = 0.0,
    thickness: float = 0.0,
) -> list[Cradle]:
    """Saddles, the inner faces of their sheets at ribs `places`, all on one level bench.

    No saddle stands into the panel anywhere in its sheet.

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
    thickness
        Of their sheet, mm.

    Raises
    ------
    NoRib
        If nothing is left of one.
    """
    up = 1.0 if surface == "lower" else -1.0
    t = -up * np.linspace(np.sqrt(chord[0]), np.sqrt(chord[1]), 161)
    lines = [[_padded(loft, t, at, padding) for at in planes(loft, (y, y + thickness))] for y in places]
    bench = min(float((up * line[:, 1]).min()) for each in lines for line in each) - height
    out = []
    for y, each in zip(places, lines, strict=True):
        laid = [np.column_stack([up * line[:, 0], up * line[:, 1] - bench]) for line in each]
        sections = [polygon(np.concatenate([line, _base(line)])) for line in laid]
        body = largest(shapely.intersection_all(sections))
        if body.is_empty:
            raise NoRib(y)
        saddle = _saddle(body, laid[0][0])
        datum = up * float(faces.web.point(faces.web.s_at_rib(y, 0.0, 0.0), 0.0, 0.0)[0])
        web = _web_in(faces, y, each[0], laid[0])
        first, _, last, _ = body.bounds
        short = _short(body, sections, last, first)
        out.append(Cradle(float(y), np.concatenate([saddle, _base(saddle)]), saddle, datum, web, short))
    return out


def _padded(loft: Loft, t: Array, y: float, padding: float) -> Array:
    """(k, 2) a line `padding` mm off the outer surface in the rib plane `y`."""
    line, normal = loft.outer(t, y)[0][:, [0, 2]], loft.normal(t, y)[:, [0, 2]]
    return np.asarray(line + padding * unit(normal))


def _base(saddle: Array) -> Array:
    """(2, 2) the corners on the bench below the ends of a saddle, the last one's first."""
    return np.array([[saddle[-1, 0], 0.0], [saddle[0, 0], 0.0]])


def _saddle(body: shapely.Polygon, forward: Array) -> Array:
    """(k, 2) the outline of a cradle without its base, from the end that is nearer to `forward`."""
    ring = _ring(body)
    over = ring[:, 1] > _DUST
    first = int(np.flatnonzero(over & ~np.roll(over, 1))[0])
    saddle = np.roll(ring, -first, axis=0)[: np.count_nonzero(over)]
    near, far = (abs(float(end[0] - forward[0])) for end in (saddle[0], saddle[-1]))
    return saddle if near <= far else saddle[::-1]


def _web_in(faces: Faces, y: float, line: Array, laid: Array) -> Array | None:
    """Where the web's faces cross a saddle's line, as the panel is laid."""
    if not faces.within((y, y)):
        return None
    cross = []
    for face in (faces.front, faces.rear):
        trace = face_line(faces.web, face, y)
        off = line[:, 0] - np.interp(line[:, 1], trace[:, 1], trace[:, 0])
        turn = np.flatnonzero((off[:-1] < 0.0) & (off[1:] >= 0.0))
        if not turn.size:
            return None
        i = int(turn[0])
        cross.append(laid[i] + off[i] / (off[i] - off[i + 1]) * (laid[i + 1] - laid[i]))
    return np.array(cross)
