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
from .loft import Loft, unit
from .places import crossings, spread
from .seat import Along
from .web import Plane, Side, edge

Array = NDArray[np.float64]

_FINE = 400  # places along a leg where the room for it is in doubt
_TURN = 1e-9  # 1 - cos of the least turn of a line that is a kink


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
    places, fold
        (k,) places s, one wherever skin or face has a kink, and (k, 2) the fold line there in the pattern.
    s, angle, towards
        (2 k,) the same places, each twice; the angle that web and skin ask for just before and just after; and (2 k, 2)
        the direction across the fold to the skin leg.
    outline
        (m, 2) the trimmed pattern, first point not repeated.
    """

    side: Side
    face: FaceName
    shape: Shape
    places: Array
    fold: Array
    s: Array
    angle: Array
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
            np.array([np.interp(s, at, v[:, i]) for i in range(2)])
            for at, v in ((self.places, self.fold), (self.s, self.towards))
        )
        return np.asarray(point + np.array(reach)[:, None] * across)


class TooWide(ValueError):
    """A skin leg, `leg` mm wide at `s`, that has only `room` mm before the section closes."""

    def __init__(self, s: float, leg: float, room: float) -> None:
        super().__init__(f"a leg of {leg:.2f} mm with room for {room:.2f} mm at s = {s:.0f} mm")
        self.s, self.leg, self.room = s, leg, room


def lay(
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
    kinks = crossings(loft, web, side, n=lambda s: n(s)[:, None], depth=np.zeros_like)
    s = spread(*ends, np.concatenate([n.s, kinks[:, 0]]), longest=longest)
    found = edge(loft, web, s, n(s), side)
    rib = web.point(s, found.h, n(s))[:, 1]
    bay = _either_side((rib[1:] + rib[:-1]) / 2.0)
    corner = _Corner(
        web,
        side,
        face,
        s=s,
        h=found.h,
        n=n(s),
        slope=_either_side(np.diff(n(s)) / np.diff(s)),
        outward=_inside_normal(loft, found.t, found.y, bay),
    )
    return _Pattern(corner, shape).flange()


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
    s = spread(*ends, np.concatenate([n.s, web.s_at_rib(loft.breaks, 0.0, 0.0)]), longest=40.0)
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


def _either_side(between: Array) -> Array:
    """(2, k) what holds just before and just after k places, of what holds between them (k - 1,)."""
    return np.stack([np.append(between[:1], between), np.append(between, between[-1:])])


def _inside_normal(loft: Loft, t: Array, y: Array, at: Array) -> Array:
    """(..., 3) unit normals of the skin's inside, towards the skin, in the bays that hold `at`.

    The outer surface's own, tilted where the skin's thickness changes along the span: by the gradient of the thickness
    over the surface.
    """
    _, by_t, by_y = loft.outer(t, y, at)
    aside = unit(by_t)
    out = by_y - _dot(by_y, aside) * aside
    gradient = out * loft.skin(np.broadcast_to(y, at.shape), at)[1][..., None] / _dot(out, out)
    return unit(loft.normal(t, y, at) + gradient)


def _dot(a: Array, b: Array) -> Array:
    """Products (..., 1) of vectors (..., m)."""
    return np.asarray(np.sum(a * b, axis=-1, keepdims=True))


def _mitre(v: Array) -> Array:
    """(k, m) what lies as far off as unit vectors `v` (2, k, m), one each side of a kink, from both of its sides."""
    return np.asarray((v[0] + v[1]) / (1.0 + _dot(v[0], v[1])))


@dataclass(frozen=True)
class _Corner:
    """The corner between web and skin. What is (2, k) holds just before and just after each of the k places.

    Attributes
    ----------
    s, h, n
        (k,) where it runs.
    slope
        (2, k) how the face leans, dn/ds.
    outward
        (2, k, 3) normals of the skin's inside, towards the skin.
    """

    web: Plane
    side: Side
    face: FaceName
    s: Array
    h: Array
    n: Array
    slope: Array
    outward: Array

    @cached_property
    def along_face(self) -> Array:
        """(2, k, 3) directions along the face, square to h."""
        return unit(self.web.s + self.slope[..., None] * self.web.n)

    @cached_property
    def face_normal(self) -> Array:
        """(2, k, 3) normals out of the face."""
        out = unit(self.web.n - self.slope[..., None] * self.web.s)
        return out if self.face == "rear" else -out

    @property
    def angle(self) -> Array:
        """(2, k) between face and skin."""
        return np.arccos(_dot(self.outward, self.face_normal)[..., 0])

    @cached_property
    def unrolled(self) -> Array:
        """(k, 2) the corner in the unrolled face: along it, and h."""
        along = np.cumsum(np.hypot(np.diff(self.s), np.diff(self.n)))
        return np.column_stack([np.append(0.0, along), self.h])

    @cached_property
    def tangent(self) -> Array:
        """(2, k, 2) directions of that line: in the face and square to the skin's normal."""
        up, along = self.outward @ self.web.h, _dot(self.outward, self.along_face)[..., 0]
        return unit(np.stack([up, -along], axis=-1) * np.sign(up)[..., None])

    @cached_property
    def down(self) -> Array:
        """(2, k, 2) directions across it, into the web leg."""
        return self.tangent[..., ::-1] * ([1.0, -1.0] if self.side == "top" else [-1.0, 1.0])

    def folded(self, v: Array) -> Array:
        """(2, k, 3) directions `v` (2, k, 2) in the unrolled face, in wing axes."""
        return v[..., :1] * self.along_face + v[..., 1:] * self.web.h

    @cached_property
    def skin(self) -> Array:
        """(2, k, 3) directions across it along the skin, away from the web."""
        across = np.cross(self.outward, self.folded(self.tangent))
        return across * np.sign(_dot(across, self.face_normal))


class _Pattern:
    """A corner's flange unrolled with the face it runs on.

    The unrolled face is the web leg itself; the skin leg is turned into its plane about the corner. Everything is
    carried straight on beyond both ends, as on a swept web the rib planes trim the two legs at different places.
    """

    def __init__(self, corner: _Corner, shape: Shape) -> None:
        self.corner, self.shape = corner, shape
        self.half = shape.allowance / 2.0
        self.down = _mitre(corner.down)
        # of the folded flange only how far out along the span each place lies is wanted
        self.y = corner.web.point(corner.s, corner.h, corner.n)[:, 1]
        self.y_along = corner.folded(corner.tangent)[..., 1]
        self.y_leg, self.y_skin = _mitre(corner.folded(corner.down))[:, 1], _mitre(corner.skin)[:, 1]

    def flange(self) -> Flange:
        """The flange, its pattern turned so that the fold line's ends stand level."""
        corner, shape = self.corner, self.shape
        web_trim = np.full_like(corner.s, shape.setback - self.half - shape.web_leg)
        skin_trim = shape.skin_leg(corner.s) - shape.setback + self.half
        skin = [self.half + share * (skin_trim - self.half) for share in (0.0, 0.5, 1.0)]
        lines = [self._line(v) for v in (web_trim, np.full_like(corner.s, -self.half), *skin)]
        fold = self._line(np.zeros_like(corner.s))
        ends = [np.array([line[i] for line in lines]) for i in (0, -1)]
        outline = np.concatenate([lines[0], ends[1][1:-1], lines[-1][::-1], ends[0][-2:0:-1]])
        start, chord = fold[0], fold[-1] - fold[0]
        turn = np.array([[chord[0], -chord[1]], [chord[1], chord[0]]]) / np.hypot(*chord)
        return Flange(
            corner.side,
            corner.face,
            shape,
            places=corner.s,
            fold=(self._flat(np.zeros_like(corner.s)) - start) @ turn,
            s=np.repeat(corner.s, 2),
            angle=corner.angle.T.ravel(),
            towards=-corner.down.swapaxes(0, 1).reshape(-1, 2) @ turn,
            outline=(outline - start) @ turn,
        )

    def _flat(self, v: Array) -> Array:
        """(k, 2) places `v` (k,) from the fold line towards the skin leg, on the unrolled face."""
        return self.corner.unrolled + (self.shape.setback - self.half - v)[:, None] * self.down

    def _span(self, v: Array) -> Array:
        """(k,) how far out along the span they lie once the flange is folded and in its place."""
        on_web = self.y + self.y_leg * (self.shape.setback - self.half - v)
        on_skin = self.y + self.y_skin * (self.shape.setback - self.half + v)
        return np.asarray(on_web + np.clip(v / (2.0 * self.half) + 0.5, 0.0, 1.0) * (on_skin - on_web))

    def _line(self, v: Array) -> Array:
        """(places + ends, 2) the line at `v` (k,) across the fold, from rib plane to rib plane."""
        flat, span = self._flat(v), self._span(v)
        kept = self._kept(flat)
        spare = 10.0 + 2.0 * float(np.abs(v).max()) / self.y_along.min()
        first, last = self.corner.tangent[0, 0], self.corner.tangent[1, -1]
        flat = np.concatenate([flat[:1] - spare * first, flat[kept], flat[-1:] + spare * last])
        beyond = spare * self.y_along[[0, 1], [0, -1]]
        span = np.concatenate([span[:1] - beyond[0], span[kept], span[-1:] + beyond[1]])
        inside = flat[(span > self.corner.web.ends[0] + 1e-6) & (span < self.corner.web.ends[1] - 1e-6)]
        ends = (np.array([np.interp(y, span, flat[:, i]) for i in range(2)]) for y in self.corner.web.ends)
        return np.stack([next(ends), *inside, next(ends)])

    def _kept(self, flat: Array) -> NDArray[np.bool_]:
        """Which points of a line are not cut off on the hollow side of a sharper kink near by."""
        before, after = self.corner.tangent
        turn = 1.0 - np.sum(before * after, axis=1)
        kinks, places = np.flatnonzero(turn > _TURN)[:, None], np.arange(len(flat))
        step = flat - flat[kinks]
        ahead, behind = (np.sum(step * v[kinks], axis=-1) for v in (after, -before))
        back = np.where(places > kinks, ahead, behind) <= 0.0
        return np.asarray(~(back & (turn[kinks] > turn)).any(axis=0))
