"""The skin's inside as a rib plane cuts it.

The inner surface lies one skin thickness under the outer one along the three-dimensional normal, so what a rib plane
y = constant shows of it is not the rib's own section moved inwards: its points are looked for. x and z in mm, as one
looks outwards along the span.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .loft import Loft, unit
from .seat import Along
from .web import Plane

Array = NDArray[np.float64]

_ROUNDS = 20
_CLOSE = 1e-6  # mm, before a last straight step
_NOTHING = 1e-6  # mm
_FLAT = [0, 2]  # x and z of a point
_REACH = 80  # points to either side of a fold among which its two ends are looked for


def inner(loft: Loft, t: ArrayLike, y: ArrayLike, depth: float = 0.0) -> tuple[Array, Array]:
    """Points `depth` mm under the skin's inside in rib planes, and the outward unit normals there; each (..., 3).

    Parameters
    ----------
    t
        The section's parameter of the outer surface's point that the inner one lies under.
    y
        Rib planes, mm; broadcasts with `t`.

    Notes
    -----
    The rib y' of the point above is found by repeating ``y' += y - inner(t, y')_y``, which shrinks the miss to a few
    ten-thousandths each round: the normal's lean along the span hardly changes over so short a way.
    """
    t, y = np.broadcast_arrays(np.asarray(t, dtype=float), np.asarray(y, dtype=float))
    above = y
    for _ in range(_ROUNDS):
        point, by_t, by_y = loft.under_skin(t, above, depth, y)
        miss = y - point[..., 1]
        if not np.any(np.abs(miss) > _CLOSE):
            break
        above = above + miss
    point = point + miss[..., None] * by_y  # what is left, along the surface
    return point, unit(np.cross(by_t, by_y))


@dataclass(frozen=True)
class Profile:
    """A closed-nosed curve in a rib plane, from the lower trailing edge round the nose to the upper one.

    Attributes
    ----------
    y
        The rib plane.
    t
        (2k + 1,) the sections' parameter, ascending and symmetric about 0: equal t is equal chord fraction.
    points, normals
        (2k + 1, 2) places in (x, z) and outward unit normals in the plane; at a kink longer, so that the two lines
        offset from it meet.
    aft
        (2,) unit vector along the twisted chord line.
    """

    y: float
    t: Array
    points: Array
    normals: Array
    aft: Array

    @property
    def up(self) -> Array:
        """(2,) unit vector square to the chord line."""
        return np.array([-self.aft[1], self.aft[0]])

    def turned(self, angle: float) -> Profile:
        """The same in axes turned nose down by `angle`, radians."""
        points, normals, aft = (turned(v, angle) for v in (self.points, self.normals, self.aft))
        return replace(self, points=points, normals=normals, aft=aft)

    def at(self, t: ArrayLike) -> Array:
        """Points (..., 2) at any t, straight between the profile's own."""
        places = np.asarray(t, dtype=float)
        return np.stack([np.interp(places, self.t, v) for v in self.points.T], axis=-1)

    def depth(self) -> Array:
        """(k + 1,) how far the upper side stands over the lower, square to the chord line, for t from 0 on."""
        middle = len(self.t) // 2
        return np.asarray((self.points - self.points[::-1]) @ self.up)[middle:]

    def tail(self, least: float) -> float:
        """Largest t up to which there is `least` mm between the two sides, seen from the thickest place aft; 0 if none.

        Examples
        --------
        >>> t = np.linspace(-1.0, 1.0, 401)
        >>> wedge = np.column_stack([100.0 * t**2, 10.0 * np.sign(t) * (1.0 - t**2)])
        >>> round(Profile(0.0, t, wedge, wedge, np.array([1.0, 0.0])).tail(2.0) ** 2, 6)
        0.9
        """
        t, depth = self.t[len(self.t) // 2 :], self.depth()
        thick = int(depth.argmax())
        if depth[thick] < least:
            return 0.0
        thin = np.flatnonzero(depth[thick:] < least)
        if not thin.size:
            return float(t[-1])
        i = thick + int(thin[0])
        # x, not t, is what a wedge is straight in
        share = (depth[i - 1] - least) / (depth[i - 1] - depth[i])
        return float(np.sqrt(t[i - 1] ** 2 + share * (t[i] ** 2 - t[i - 1] ** 2)))

    def ahead_of(self, t: float) -> Array:
        """(k, 2) closed outline of what lies ahead of a parameter t above 0, straight across there."""
        return self.at(np.concatenate([[-t], self.t[np.abs(self.t) < t], [t]]))

    def padded(self, least: float) -> Profile:
        """The same with its two sides held `least` mm apart from `tail` on, about the line midway between them."""
        start = self.tail(least)
        depth = self.depth()
        short = np.where((self.t[len(self.t) // 2 :] > start) & (least - depth > _NOTHING), least - depth, 0.0)
        if not short.any():
            return self
        half = np.concatenate([-short[:0:-1], short]) / 2.0
        points, normals = self.points + half[:, None] * self.up, self.normals.copy()
        kink = len(self.t) - 1 - int(np.count_nonzero(short))
        for line in (slice(kink, None), slice(len(self.t) - 1 - kink, None, -1)):
            sense = 1.0 if line.step is None else -1.0
            here = sense * _normals(points[line])
            before = normals[line.start].copy()
            normals[line] = here
            normals[line.start] = (before + here[0]) / (1.0 + before @ here[0])
        return replace(self, points=points, normals=normals)

    def offset(self, by: float) -> Array:
        """(2k + 1, 2) the curve moved outwards by `by` mm; where that folds it, the fold is cut off."""
        along = np.column_stack([self.normals[:, 1], -self.normals[:, 0]])
        return unfolded(self.points + by * self.normals, along)


def profile(loft: Loft, y: float, t: Array, depth: float = 0.0) -> Profile:
    """What lies `depth` mm under the skin's inside in the rib plane `y`.

    At parameters `t` (2k + 1,), ascending and symmetric about 0. Where skin and depth are more than the nose's radius
    the line folds over itself; the fold is cut off, and its points stand where the two sides meet.
    """
    point, normal = inner(loft, t, y, depth)
    flat = unit(normal[:, _FLAT])
    along = np.column_stack([flat[:, 1], -flat[:, 0]])
    return Profile(y, t, unfolded(point[:, _FLAT], along), flat, _aft(loft, y))


def outside(loft: Loft, y: float, t: Array) -> Profile:
    """The outer surface in the rib plane `y`, at parameters `t` (2k + 1,), ascending and symmetric about 0."""
    return Profile(y, t, loft.outer(t, y)[0][:, _FLAT], unit(loft.normal(t, y)[:, _FLAT]), _aft(loft, y))


def _aft(loft: Loft, y: float) -> Array:
    washout = float(loft.washout(np.array(y), np.array(y))[0])
    return np.array([np.cos(washout), np.sin(washout)])


def tail(loft: Loft, of: Profile, least: float) -> float:
    """What `Profile.tail` says, closed in upon between its points."""
    t = of.tail(least)
    if t in (0.0, of.t[-1]):
        return t
    slope = float(np.interp(t, of.t[len(of.t) // 2 :], np.gradient(of.depth(), of.t[len(of.t) // 2 :])))
    for _ in range(4):
        low, high = inner(loft, np.array([-t, t]), of.y)[0][:, _FLAT]
        t += (least - float((high - low) @ of.up)) / slope
    return float(t)


def turned(points: Array, angle: float) -> Array:
    """Places or directions (..., 2) in axes turned nose down by `angle`, radians.

    >>> turned(np.array([1.0, 1.0]), np.pi / 4.0).round(3).tolist()
    [1.414, 0.0]
    """
    c, s = np.cos(angle), np.sin(angle)
    return np.asarray(points @ np.array([[c, -s], [s, c]]))


def unfolded(points: Array, along: Array) -> Array:
    """A polyline (k, 2) without folds: the points of one stand where the line crosses itself.

    Parameters
    ----------
    along
        (k, 2) the way the line should run at each point; where it runs the other way, it is folded.
    """
    step = np.diff(points, axis=0)
    back = np.einsum("ki,ki->k", step, along[1:] + along[:-1]) < 0.0
    if not back.any():
        return points
    points = points.copy()
    edges = np.flatnonzero(np.diff(np.concatenate([[False], back, [False]]).astype(int)))
    for first, after in edges.reshape(-1, 2):
        before = np.arange(max(0, first - _REACH), first)
        beyond = np.arange(after, min(len(step), after + _REACH))
        hit = _crossing(points, before, beyond)
        if hit is not None:
            points[hit[0] + 1 : hit[1] + 1] = hit[2]
    return points


def _crossing(points: Array, before: NDArray[np.intp], beyond: NDArray[np.intp]) -> tuple[int, int, Array] | None:
    """The pair of segments, one of each list, that cross, and where."""
    if not before.size or not beyond.size:
        return None
    a, u = points[before][:, None], (points[before + 1] - points[before])[:, None]
    b, v = points[beyond][None], (points[beyond + 1] - points[beyond])[None]
    cross = u[..., 0] * v[..., 1] - u[..., 1] * v[..., 0]
    gap = b - a
    with np.errstate(divide="ignore", invalid="ignore"):
        on_u = (gap[..., 0] * v[..., 1] - gap[..., 1] * v[..., 0]) / cross
        on_v = (gap[..., 0] * u[..., 1] - gap[..., 1] * u[..., 0]) / cross
    found = np.argwhere((on_u >= 0.0) & (on_u <= 1.0) & (on_v >= 0.0) & (on_v <= 1.0))
    if not found.size:
        return None
    i, j = found[0]
    return int(before[i]), int(beyond[j]), np.asarray(a[i, 0] + on_u[i, j] * u[i, 0])


def _normals(points: Array) -> Array:
    """Unit normals (k, 2) to the left of a curve given by points, from the two steps at each."""
    step = unit(np.gradient(points, axis=0))
    return np.column_stack([-step[:, 1], step[:, 0]])


def symmetric(t: ArrayLike) -> Array:
    """Parameters 0 and up mirrored into an ascending list about 0.

    >>> symmetric([0.0, 0.5, 1.0]).tolist()
    [-1.0, -0.5, 0.0, 0.5, 1.0]
    """
    t = np.unique(np.round(np.append(np.asarray(t, dtype=float), 0.0), 12))  # no two a hair apart
    return np.concatenate([-t[:0:-1], t])


def face_line(web: Plane, face: Along, y: float, reach: float = 1e3) -> Array:
    """(k, 2) the line (x, z), lower end first, in which a face of the web crosses the rib plane `y`.

    It is straight but for a corner wherever it passes one of `face`. Where a face turns so steeply that the rib plane
    crosses it three times at one height, the crossing where the web is thicker counts.

    Parameters
    ----------
    face
        n of the face along s, level beyond its ends; not so where the web is thickened.
    reach
        How far below and above the web line it goes, mm.

    Notes
    -----
    On the rib plane ``s s_y + n(s) n_y - (y - o_y) = -h h_y``. The left side runs straight between the corners of n(s)
    and rises with s, so it is read backwards.
    """
    out = float(np.sign(web.s[1]))
    far = (abs(y - web.origin[1]) + reach) / abs(web.s[1]) + 1.0
    s = np.concatenate([[face.s[0] - far], face.s, [face.s[-1] + far]])
    left = out * (s * web.s[1] + face(s) * web.n[1] - (y - web.origin[1]))
    if abs(face.value[0]) > abs(face.value[-1]):
        rising = np.maximum.accumulate(left)
    else:
        rising = np.minimum.accumulate(left[::-1])[::-1]
    turns = np.diff(np.diff(face(s)) / np.diff(s)) != 0.0
    s = s + (rising - left) / abs(web.s[1])
    by_h = -out * float(web.h[1])
    corner = np.flatnonzero(turns & (np.abs(rising[1:-1]) < abs(by_h) * reach))[:: 1 if by_h > 0.0 else -1] + 1
    ends = np.array([-reach, reach])
    first, last = np.interp(by_h * ends, rising, s)
    s = np.concatenate([[first], s[corner], [last]])
    h = np.concatenate([ends[:1], rising[corner] / by_h, ends[1:]])
    line = web.point(s, h, face(s))[:, _FLAT]
    line[:, 1] = np.maximum.accumulate(line[:, 1])  # across such a step it may fall by a hair
    return np.asarray(line)
