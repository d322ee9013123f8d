"""Flanges: strips laid up over a bar, that tie a face of the web to the skin's inside along one edge.

A flange has two legs. The web leg lies flat on the web's face, the skin leg on the skin's inside, away from the web;
their outer sides meet in the *corner*, where the skin's inside stands over that face. Angles are those between the
legs, radians: a flange over a square bar has pi/2. mm.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .blank import FaceName
from .loft import Loft
from .seat import Along
from .web import Edge, Plane, Side, edge

Array = NDArray[np.float64]

_FINE = 400  # places along a leg where the room for it is in doubt
_NEAR = 1e-6  # mm either side of a place, to tell the slopes of a face before and after a corner


def bend_allowance(bend: float, inner_radius: float, thickness: float, k: float = 0.5) -> float:
    """Width of flat strip that a bend takes: ``bend (inner radius + k thickness)``, mm.

    The formula of *Machinery's Handbook*, sheet metal bending; k = 0.5 for a laid-up laminate, whose middle keeps its
    length.

    Parameters
    ----------
    bend
        Angle the strip is turned through, radians.

    Examples
    --------
    >>> round(bend_allowance(np.pi / 2, 2.0, 1.0), 4)
    3.927
    """
    return bend * (inner_radius + k * thickness)


@dataclass(frozen=True)
class Shape:
    """A flange as it is laid up.

    Attributes
    ----------
    bar
        Angle between the legs over the bar, radians.
    web_leg
        Width of the leg on the web, from the corner.
    skin_leg
        Width of the leg on the skin, from the corner, along s.
    thickness, inner_radius
        Of the laminate, and of the bar's rounded edge that it is laid over.
    """

    bar: float
    web_leg: float
    skin_leg: Along
    thickness: float
    inner_radius: float

    @property
    def allowance(self) -> float:
        """Width of flat strip in the bend, mm."""
        return bend_allowance(np.pi - self.bar, self.inner_radius, self.thickness)

    @property
    def setback(self) -> float:
        """How far from the corner each leg's flat part begins: ``tan(bend / 2) (inner radius + thickness)``."""
        return float(np.tan((np.pi - self.bar) / 2.0) * (self.inner_radius + self.thickness))


@dataclass(frozen=True)
class Flange:
    """A flange in its place and as a flat pattern.

    The pattern is seen from the side that the skin leg is folded towards; x runs along the web's face with s, from one
    end of the fold line to the other, and y is up.

    Attributes
    ----------
    side, face, shape
        Which edge and face, and how it is laid up.
    s, angle
        (2 k,) places, each twice, and the angle that web and skin ask for just before and just after.
    places, fold, towards
        (k,) places s, (k, 2) the fold line there in the pattern, and (k, 2) the direction across it to the skin leg.
    outline
        (m, 2) the trimmed pattern, first point not repeated.
    """

    side: Side
    face: FaceName
    shape: Shape
    s: Array
    angle: Array
    places: Array
    fold: Array
    towards: Array
    outline: Array

    @property
    def name(self) -> str:
        """Face and edge: ``front top``."""
        return f"{self.face} {self.side}"

    @cached_property
    def area(self) -> float:
        """Of the flat pattern, mm^2."""
        x, y = self.outline.T
        return abs(float(x @ np.roll(y, -1) - y @ np.roll(x, -1))) / 2.0

    @property
    def best_bar(self) -> float:
        """The bar that leaves least to spring: the middle of the range of angles asked for."""
        return float(self.angle.min() + self.angle.max()) / 2.0

    @property
    def spring(self) -> Array:
        """(2 k,) how far it is sprung from the angle it was laid up at: open positive, closed negative."""
        return self.angle - self.shape.bar

    @property
    def camber(self) -> tuple[float, float]:
        """How far the fold line bows out of the straight line between its ends, upwards positive, and at which s."""
        i = int(np.abs(self.fold[:, 1]).argmax())
        return float(self.fold[i, 1]), float(self.places[i])

    def at(self, s: ArrayLike) -> Array:
        """Angle asked for at places s."""
        return np.asarray(np.interp(np.asarray(s, dtype=float), self.s, self.angle))

    def mark(self, s: float, reach: tuple[float, float]) -> Array:
        """(2, 2) a line across the fold at s, from and to a distance on the skin leg's side (negative: the web's)."""
        point, across = (
            np.array([np.interp(s, self.places, v[:, i]) for i in range(2)]) for v in (self.fold, self.towards)
        )
        return np.asarray(point + np.array(reach)[:, None] * across)


class TooWide(ValueError):
    """A skin leg, `leg` mm wide at `s`, that has only `room` mm before the section closes."""

    def __init__(self, s: float, leg: float, room: float) -> None:
        super().__init__(f"a leg of {leg:.2f} mm with room for {room:.2f} mm at s = {s:.0f} mm")
        self.s, self.leg, self.room = s, leg, room


def flange(
    loft: Loft,
    web: Plane,
    side: Side,
    face: FaceName,
    *,
    n: Along,
    ends: tuple[float, float],
    shape: Shape,
    longest: float = 20.0,
) -> Flange:
    """Lay a flange along one edge of one face, from rib plane to rib plane.

    Parameters
    ----------
    n
        Where the face stands across the web, along s.
    ends
        Places s where the corner meets the rib planes.
    longest
        Greatest distance between places, mm.
    """
    s = _places(n, ends, longest)
    corner = edge(loft, web, s, n(s), side)
    slopes = np.stack([(n(s + d) - n(s + d - _NEAR)) / _NEAR for d in (0.0, _NEAR)])
    outward = _inside_normal(loft, corner)
    angle = np.arccos([np.einsum("ki,ki->k", outward, _face_normal(web, slope, face)) for slope in slopes])
    lay = _Lay(web, side, shape, s, corner.h, n(s), outward, slopes.mean(axis=0), face)
    return lay.flange(angle.T.ravel())


def require_room(
    loft: Loft, web: Plane, side: Side, face: FaceName, *, n: Along, ends: tuple[float, float], shape: Shape
) -> None:
    """Check that the skin leg finds room under the skin before the section closes towards its nose or trailing edge.

    Room is measured along the skin's inside at constant s, to where upper and lower inside come as near to each other
    as the flange is thick. (The plane square to the edge differs from that by the edge's small slope.)

    Raises
    ------
    TooWide
        At the place where most is missing.
    """
    s = _places(n, ends, 40.0)
    leg = shape.skin_leg(s)
    out = -1.0 if face == "front" else 1.0

    def inside(where: NDArray[np.intp], share: Array) -> tuple[NDArray[np.bool_], Array]:
        layer = n(s[where])[:, None] + out * leg[where][:, None] * share
        top, bottom = (edge(loft, web, s[where][:, None], layer, of).h for of in ("top", "bottom"))
        free = np.logical_and.accumulate(top - bottom > shape.thickness, axis=1)  # a place that has no skin is not free
        return np.asarray(free), top if side == "top" else bottom

    everywhere = np.arange(len(s))
    tight = everywhere[~inside(everywhere, np.array([0.5, 1.0]))[0].all(axis=1)]
    if not tight.size:
        return
    share = np.linspace(0.0, 1.0, _FINE)
    free, h = inside(tight, share)
    step = np.hypot(np.diff(h), leg[tight][:, None] * np.diff(share))
    room = np.sum(step, axis=1, where=free[:, 1:])
    short = leg[tight] - room
    i = int(short.argmax())
    if short[i] > 0.0:
        raise TooWide(float(s[tight[i]]), float(leg[tight[i]]), float(room[i]))


def _places(n: Along, ends: tuple[float, float], longest: float) -> Array:
    start, stop = ends
    inner = n.s[(n.s > start + 1e-3) & (n.s < stop - 1e-3)]
    return np.unique(np.concatenate([np.linspace(start, stop, int(np.ceil((stop - start) / longest)) + 1), inner]))


def _face_normal(web: Plane, slope: Array, face: FaceName) -> Array:
    """(k, 3) unit normals out of a face that leans by `slope` (dn/ds)."""
    out = _unit(web.n - slope[:, None] * web.s)
    return out if face == "rear" else -out


def _inside_normal(loft: Loft, at: Edge) -> Array:
    """(k, 3) unit normals of the skin's inside, towards the skin.

    The outer surface's own, tilted where the skin's thickness changes along the span: by the gradient of the thickness
    over the surface.
    """
    _, by_t, by_y = loft.outer(at.t, at.y)
    normal = _unit(np.cross(by_t, by_y))
    aside = _unit(by_t)
    out = by_y - np.einsum("ki,ki->k", by_y, aside)[:, None] * aside
    gradient = out * (loft.skin(at.y, at.y)[1] / np.einsum("ki,ki->k", out, out))[:, None]
    return _unit(normal + gradient)


def _unit(v: Array) -> Array:
    return np.asarray(v / np.linalg.norm(v, axis=-1, keepdims=True))


class _Lay:
    """A flange's corner line, unrolled with the face it runs on, and what lies across it.

    The unrolled face is the web leg itself; the skin leg is turned into its plane about the corner. Everything is
    carried straight on beyond both ends, as on a swept web the rib planes trim the two legs at different places.
    """

    def __init__(
        self,
        web: Plane,
        side: Side,
        shape: Shape,
        s: Array,
        h: Array,
        n: Array,
        outward: Array,
        slope: Array,
        face: FaceName,
    ) -> None:
        self.web, self.side, self.shape, self.s, self.face = web, side, shape, s, face
        x = np.concatenate([[0.0], np.cumsum(np.hypot(np.diff(s), np.diff(n)))])
        self.corner = np.column_stack([x, h])
        tangent = _unit(np.gradient(self.corner, x, axis=0))
        self.down = tangent[:, ::-1] * ([1.0, -1.0] if side == "top" else [-1.0, 1.0])  # into the web leg
        along_face = _unit(web.s + slope[:, None] * web.n)
        point = web.point(s, h, n)
        along = tangent[:, :1] * along_face + tangent[:, 1:] * web.h
        skin = np.cross(outward, along)
        away = np.sign(np.einsum("ki,ki->k", skin, _face_normal(web, slope, face)))[:, None]
        leg = self.down[:, :1] * along_face + self.down[:, 1:] * web.h
        # only how far out along the span each place lies is wanted from here on
        self.y, self.y_along, self.y_leg, self.y_skin = (v[:, 1] for v in (point, along, leg, _unit(skin * away)))
        self.tangent = tangent

    def flange(self, angle: Array) -> Flange:
        """The flange, its pattern turned so that the fold line's ends stand level."""
        half = self.shape.allowance / 2.0
        web_trim = np.full_like(self.s, self.shape.setback - half - self.shape.web_leg)
        skin_trim = self.shape.skin_leg(self.s) - self.shape.setback + half
        skin = [half + share * (skin_trim - half) for share in (0.0, 0.5, 1.0)]
        lines = [self._line(v) for v in (web_trim, np.full_like(self.s, -half), *skin)]
        fold = self._line(np.zeros_like(self.s))
        ends = [np.array([line[i] for line in lines]) for i in (0, -1)]
        outline = np.concatenate([lines[0], ends[1][1:-1], lines[-1][::-1], ends[0][-2:0:-1]])
        start, chord = fold[0], fold[-1] - fold[0]
        turn = np.array([[chord[0], -chord[1]], [chord[1], chord[0]]]) / np.hypot(*chord)
        return Flange(
            self.side,
            self.face,
            self.shape,
            np.repeat(self.s, 2),
            angle,
            self.s,
            (self._flat(np.zeros_like(self.s)) - start) @ turn,
            -self.down @ turn,
            (outline - start) @ turn,
        )

    def _flat(self, v: Array) -> Array:
        """(k, 2) places `v` (k,) from the fold line towards the skin leg, on the unrolled face."""
        return np.asarray(self.corner + (self.shape.setback - self.shape.allowance / 2.0 - v)[:, None] * self.down)

    def _span(self, v: Array) -> Array:
        """(k,) how far out along the span they lie once the flange is folded and in its place."""
        half = self.shape.allowance / 2.0
        on_web = self.y + self.y_leg * (self.shape.setback - half - v)
        on_skin = self.y + self.y_skin * (self.shape.setback - half + v)
        return np.asarray(on_web + np.clip(v / (2.0 * half) + 0.5, 0.0, 1.0) * (on_skin - on_web))

    def _line(self, v: Array) -> Array:
        """(k + ends, 2) the line at `v` (k,) across the fold, from rib plane to rib plane."""
        flat, span = self._flat(v), self._span(v)
        spare = 10.0 + 2.0 * float(np.abs(v).max()) / self.y_along.min()
        flat = np.concatenate(
            [flat[:1] - spare * self.tangent[:1], flat, flat[-1:] + spare * self.tangent[-1:]], axis=0
        )
        span = np.concatenate([span[:1] - spare * self.y_along[:1], span, span[-1:] + spare * self.y_along[-1:]])
        inside = flat[(span > self.web.ends[0] + 1e-6) & (span < self.web.ends[1] - 1e-6)]
        first, last = (np.array([np.interp(y, span, flat[:, i]) for i in range(2)]) for y in self.web.ends)
        return np.concatenate([[first], inside, [last]])
