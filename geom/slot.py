"""The room that the web, with what lies on it, takes of a rib.

A rib is cut square through its sheet, so what stands in its way is a shadow: all of it that lies between the two faces
of the sheet, seen along the span. x aft and z up in mm, as one looks outwards.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise, product

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from .flange import Flange
from .loft import Loft
from .profile import profile, symmetric
from .seat import Along, constant
from .web import Plane, edge

Array = NDArray[np.float64]
Span = tuple[float, float]

_T = symmetric(np.linspace(0.0, 1.0, 241))
_FLAT = [0, 2]  # x and z of a point
_PAIRS = np.triu_indices(8, 1)
_SLICE = 1.0  # mm
_SEAM = 1e-6  # mm by which neighbouring shadows are made to overlap
_FAR = 1e4  # mm


@dataclass(frozen=True)
class Faces:
    """The web as others have to make room for it: its plane, and n of its two faces along s."""

    web: Plane
    front: Along
    rear: Along

    def within(self, sheet: Span) -> bool:
        """Whether the web stands between the rib planes `sheet`, or crosses them where they are one."""
        (low, high), (first, last) = sheet, self.web.ends
        return first < high and low < last if high > low else first <= low <= last


@dataclass(frozen=True)
class Slot:
    """The room for the web in a rib: its shape, carried on up and down, and its width, level at the web line."""

    shape: shapely.Polygon
    width: float


@dataclass(frozen=True)
class Cut:
    """How a rib makes room for what goes through it.

    Attributes
    ----------
    sheet
        The rib planes of the two faces of its sheet.
    clearance
        Left on each face of what goes through it, mm.
    reach
        How far below and above the web line room is made, mm.
    """

    sheet: Span
    clearance: float = 0.0
    reach: float = 1e3


def slot(faces: Faces, cut: Cut) -> Slot:
    """The slot that the web makes in a rib.

    A web of thickness t whose line is swept by an angle a takes ``t / cos(a)`` of an upright rib, and with a rib of its
    own thickness w another ``w tan(a)``.
    """
    web, middle = faces.web, sum(cut.sheet) / 2.0
    front, rear = (
        _sum(face, constant(by)) for face, by in ((faces.front, -cut.clearance), (faces.rear, cut.clearance))
    )
    shape = _shadow(web, cut.sheet, front, rear, (-cut.reach, cut.reach))
    z = float(web.point(web.s_at_rib(middle, 0.0, 0.0), 0.0, 0.0)[2])
    x0, _, x1, _ = shape.intersection(shapely.LineString([(-_FAR, z), (_FAR, z)])).bounds
    return Slot(shape, x1 - x0)


def flange_room(loft: Loft, faces: Faces, flange: Flange, cut: Cut) -> BaseGeometry:
    """The room that a flange takes of a rib: both legs and the round between them, with the clearance all about.

    It may reach beyond the skin's inside and into the web. The web leg lies on the face of the web; the skin leg has
    its width along n, which is a trifle more than along the skin.
    """
    web, shape, up = faces.web, flange.shape, 1.0 if flange.side == "top" else -1.0
    face = faces.front if flange.face == "front" else faces.rear
    away = -1.0 if flange.face == "front" else 1.0

    def layer(width: Along, h: Span) -> shapely.Polygon:
        outer = _sum(face, Along(width.s, away * (width.value + cut.clearance)))
        return _shadow(web, cut.sheet, *((outer, face) if away < 0.0 else (face, outer)), h)

    stop = up * min(up * _corner(loft, web, face, flange, cut.sheet)) - up * (shape.web_leg + cut.clearance)
    top = up * cut.reach
    on_web = layer(constant(shape.thickness), (min(stop, top), max(stop, top)))
    beside = layer(shape.skin_leg, (-cut.reach, cut.reach))
    on_skin = beside & _half(loft, sum(cut.sheet) / 2.0, up) - _under(loft, cut.sheet, shape.thickness + cut.clearance)
    room = on_web | on_skin
    radius = shape.inner_radius / float(np.sqrt(1.0 - web.n[1] ** 2))  # as wide as the web's sweep draws it out
    return room | room.buffer(radius).buffer(-radius)


def _corner(loft: Loft, web: Plane, face: Along, flange: Flange, sheet: Span) -> Array:
    """(2,) how high the flange's corner stands in the web's plane, where the two faces of a rib's sheet cross it."""
    h, n = np.zeros(2), np.zeros(2)
    for _ in range(4):
        s = web.s_at_rib(np.array(sheet), h, n)
        n = face(s)
        h = edge(loft, web, s, n, flange.side).h
    return h


def planes(loft: Loft, sheet: Span) -> Array:
    """Rib planes at which to look at a section to know it all through a sheet: both faces, and slices between them.

    What reaches furthest may do so between the faces: round as it is on a cradle, or where the skin has a kink, whose
    inside is not in the same plane. What of the sheet stands out over the panel's ends is left out.
    """
    low, high = np.clip(sheet, loft.y[0], loft.y[-1])
    knots = loft.knots[(loft.knots > low) & (loft.knots < high)]
    return np.union1d(knots, np.linspace(low, high, 2 + int((high - low) / _SLICE)))


def polygon(points: Array) -> shapely.Polygon:
    """What a closed line (k, 2), k of 3 or more, encloses: the largest part of it, should the line cross itself."""
    shape = shapely.Polygon(points)
    return shape if shape.is_valid else largest(shapely.make_valid(shape))


def parts(shape: BaseGeometry) -> list[shapely.Polygon]:
    """The polygons of a shape."""
    return [part for part in shapely.get_parts(shape) if isinstance(part, shapely.Polygon) and not part.is_empty]


def largest(shape: BaseGeometry) -> shapely.Polygon:
    """The largest of its polygons; an empty one if it has none."""
    return max(parts(shape), key=lambda part: part.area, default=shapely.Polygon())


def _under(loft: Loft, sheet: Span, depth: float) -> BaseGeometry:
    """What lies further than `depth` under the skin's inside, all through a sheet."""
    inner = [profile(loft, float(y), _T, depth) for y in planes(loft, sheet)]
    return shapely.intersection_all([polygon(of.ahead_of(of.tail(0.0))) for of in inner])


def _half(loft: Loft, y: float, up: float) -> shapely.Polygon:
    """All that lies above (1) or below (-1) the line midway between the skins."""
    of = profile(loft, y, _T)
    middle = ((of.points + of.points[::-1]) / 2.0)[len(_T) // 2 :]
    away = up * _FAR * of.up
    return polygon(np.concatenate([middle, [middle[-1] + away, middle[0] + away]]))


def _sum(a: Along, b: Along) -> Along:
    s = np.union1d(a.s, b.s)
    return Along(s, a(s) + b(s))


def _shadow(web: Plane, sheet: Span, front: Along, rear: Along, h: Span) -> shapely.Polygon:
    """What of a layer of the web, from n `front` to `rear` and between two heights, lies within a sheet."""
    n = np.concatenate([front.value, rear.value])
    far = web.s_at_rib(*np.array(list(product(sheet, h, (n.min(), n.max())))).T)
    knots = np.union1d(front.s, rear.s)
    first, last = float(far.min()) - 1.0, float(far.max()) + 1.0
    s = np.concatenate([[first], knots[(knots > first) & (knots < last)], [last]])
    hulls = [hull for pair in pairwise(s) for hull in parts(_hull(web, pair, front, rear, h, sheet))]
    if len(hulls) == 1:
        return hulls[0]
    seamed = [hull.buffer(_SEAM, join_style="mitre") for hull in hulls]
    return largest(shapely.union_all(seamed).buffer(-_SEAM, join_style="mitre"))


def _hull(web: Plane, s: Span, front: Along, rear: Along, h: Span, sheet: Span) -> BaseGeometry:
    """The shadow of a straight, and so convex, piece of a layer: the hull of its corners and its edges' crossings."""
    places = np.array([(at, up, face(at)) for at, up, face in product(s, h, (front, rear))], dtype=float)
    corner = web.point(*places.T)
    a, b = (corner[i] for i in _PAIRS)
    inside = (corner[:, 1] >= sheet[0]) & (corner[:, 1] <= sheet[1])
    found = [corner[inside]]
    for y in sheet:
        across = (a[:, 1] - y) * (b[:, 1] - y) < 0.0
        share = (y - a[across, 1]) / (b[across, 1] - a[across, 1])
        found.append(a[across] + share[:, None] * (b[across] - a[across]))
    return shapely.MultiPoint(np.concatenate(found)[:, _FLAT]).convex_hull
