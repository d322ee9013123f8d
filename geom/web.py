"""The flat web in the twisted skin: its plane, and where the skin's inside stands over its edges.

`s` runs along the web line from the inner end, `h` is up in the plane, `n` aft and square to both; mm and radians.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .loft import Loft

Array = NDArray[np.float64]
Side = Literal["top", "bottom"]
SIDES: tuple[Side, Side] = ("top", "bottom")

_ROUNDS = 40
_CLOSE = 1e-9  # mm
_REACH = 1.5  # depths under the skin from which a break of it is felt
_KINK = 1e-4  # least change of slope that makes a crease


@dataclass(frozen=True)
class Plane:
    """The web's middle plane.

    Attributes
    ----------
    origin
        (3,) inner end of the web line, on the chord line of rib y1.
    s, h, n
        (3,) unit vectors along the web line, up in the plane, and aft out of it.
    length
        Of the web line.
    cant
        Angle the plane is turned about the web line, top leaning aft positive.
    ends
        Rib planes (y1, y2) that cut the web off.
    line
        Chord fractions (f1, f2) of the web line there.
    """

    origin: Array
    s: Array
    h: Array
    n: Array
    length: float
    cant: float
    ends: tuple[float, float]
    line: tuple[float, float]

    def point(self, s: ArrayLike, h: ArrayLike, n: ArrayLike) -> Array:
        """Wing coordinates (..., 3) of places in the web's own."""
        s, h, n = (np.asarray(v, dtype=float)[..., None] for v in (s, h, n))
        return self.origin + s * self.s + h * self.h + n * self.n

    def s_at_rib(self, y: ArrayLike, h: ArrayLike, n: ArrayLike) -> Array:
        """Where the rib plane `y` crosses the line (h, n) of the web."""
        h, n = np.asarray(h, dtype=float), np.asarray(n, dtype=float)
        return np.asarray((y - self.origin[1] - h * self.h[1] - n * self.n[1]) / self.s[1])


class OffSection(ValueError):
    """The web stands where one side of the section has no inside: at `s`, on the given `side`."""

    def __init__(self, side: Side, s: float) -> None:
        super().__init__(f"the {side} edge leaves the section at s = {s:.0f} mm")
        self.side, self.s = side, s


class NothingInside(ValueError):
    """Top and bottom of the web meet or cross at `s`."""

    def __init__(self, s: float, height: float) -> None:
        super().__init__(f"{height:.2f} mm of height at s = {s:.0f} mm")
        self.s, self.height = s, height


@dataclass(frozen=True)
class Edge:
    """Where a surface under the skin stands over places (s, n) of the web; arrays shaped like those.

    Attributes
    ----------
    h
        Height in the web plane; NaN where the line (s, n) misses that side of the section.
    t, y
        The surface coordinates of the place it was found at.
    """

    h: Array
    t: Array
    y: Array


def plane(loft: Loft, *, ends: tuple[float, float], line: tuple[float, float], cant: float = 0.0) -> Plane:
    """The web plane through the web line, canted.

    Cant 0 holds the vertical direction as nearly as the web line allows: h is z made square to s. A cant turns h and n
    about s, the top leaning aft.
    """
    root, tip = (loft.chord_point(f, y) for f, y in zip(line, ends, strict=True))
    along = tip - root
    length = float(np.linalg.norm(along))
    s = along / length
    up = np.array([0.0, 0.0, 1.0]) - s[2] * s
    up /= np.linalg.norm(up)
    aft = np.cross(s, up) * np.sign(s[1])  # aft on a left-hand panel too, whose s runs towards -y
    c, k = np.cos(cant), np.sin(cant)
    return Plane(root, s, c * up + k * aft, c * aft - k * up, length, cant, ends, line)


def cant_square_at(loft: Loft, *, ends: tuple[float, float], line: tuple[float, float], y: float) -> float:
    """Cant with which the plane's trace in rib `y` is square to that rib's chord line.

    The trace is ``h s_y - s h_y``; with h = up cos k + aft sin k its product with the chord line's direction is
    ``A cos k + B sin k``, which is zero at ``tan k = -A / B``.
    """
    flat = plane(loft, ends=ends, line=line)
    washout = float(loft.washout(np.array(y), np.array(y))[0])
    chord = np.array([np.cos(washout), 0.0, np.sin(washout)])
    a, b = (float((v * flat.s[1] - flat.s * v[1]) @ chord) for v in (flat.h, flat.n))
    return float(np.arctan2(-a * np.sign(b), abs(b)))


def edge(loft: Loft, web: Plane, s: ArrayLike, n: ArrayLike, side: Side, depth: ArrayLike = 0.0) -> Edge:
    """Where the surface `depth` mm under the skin's inside stands over the places (s, n) of the web.

    Parameters
    ----------
    s, n, depth
        mm, any shapes that broadcast.
    side
        The web's top or bottom edge.

    Notes
    -----
    Where the skin breaks, at a station, the surfaces of the bays on both sides are carried on past it until they meet:
    the one further inside counts at an outward break, the one less far inside at an inward one. Within reach of
    several breaks the bays are taken one after the other.
    """
    s, n, depth = np.broadcast_arrays(*(np.asarray(v, dtype=float) for v in (s, n, depth)))
    found = _meet(loft, web, web.s, s, s, n, side, depth)
    if not loft.breaks.size:
        return found
    y = web.point(s, np.nan_to_num(found.h), n)[..., 1]
    reach = _REACH * (loft.skin(y, y)[0] + np.abs(depth))
    first, last = np.searchsorted(loft.breaks, y - reach), np.searchsorted(loft.breaks, y + reach)
    near = last > first
    if near.any():
        places = (v[near] for v in (s, n, depth, found.t, y, first, last))
        found.h[near] = _over_breaks(loft, web, side, *places)
    return found


def _over_breaks(
    loft: Loft, web: Plane, side: Side, s: Array, n: Array, depth: Array, t: Array, y: Array, first: Array, last: Array
) -> Array:
    """Height (k,) at places near y, t of the surface, within reach of the breaks `first` to `last` - 1."""
    bounds = np.concatenate([[-np.inf], loft.breaks, [np.inf]])
    outwards = web.s[1] > 0.0  # s runs towards the larger y, on a left-hand panel away from it
    steps = np.arange(int((last - first).max()) + 1)[:, None]
    bays = np.minimum(first + steps, last) if outwards else np.maximum(last - steps, first)
    inside = np.clip(y, bounds[bays], np.nextafter(bounds[bays + 1], -np.inf))
    h, *further = _meet(loft, web, web.s, s, s, n, side, depth, inside).h
    for before, after, beyond in zip(bays[:-1], bays[1:], further, strict=True):
        at = loft.breaks[np.minimum(np.minimum(before, after), len(loft.breaks) - 1)]
        sides = (np.nextafter(at, -np.inf), at)
        slope, next_slope = (_slope(loft, web, t, at, bay) for bay in (sides if outwards else sides[::-1]))
        nearer = np.where(next_slope < slope, np.fmin(h, beyond), np.fmax(h, beyond))
        h = np.where(before != after, nearer, h)
    return np.asarray(h)


def _slope(loft: Loft, web: Plane, t: Array, y: Array, bay: Array) -> Array:
    """dh/ds (k,) along the sheet of the inside of a bay's skin, at its own coordinates (t, y)."""
    _, by_t, by_y = loft.outer(t, y, bay)
    by_y = by_y - loft.skin(y, bay)[1][..., None] * loft.normal(t, y, bay)
    s_t, s_y, n_t, n_y = by_t @ web.s, by_y @ web.s, by_t @ web.n, by_y @ web.n
    return np.asarray(((by_t @ web.h) * n_y - (by_y @ web.h) * n_t) / (s_t * n_y - s_y * n_t))


def creases(loft: Loft, web: Plane, y: Array, n: Array, side: Side, depth: Array) -> Array:
    """Where a surface under the skin has a crease along the loft's knots `y`.

    Parameters
    ----------
    y, n, depth
        (K,) knots, (K, M) places across the web, (K,) depths.

    Returns
    -------
    (K, M) array
        Places s; NaN where the surface has no crease or does not stand over the web.

    Notes
    -----
    It is where the surfaces of both bays, carried on past the knot, cross. They part at an even rate there, so that two
    places tell where. Where they hardly part it runs as it does beside.
    """
    if not y.size:
        return n
    s = web.s_at_rib(y[:, None], 0.0, n)
    places = np.stack([[s, s], [s + 1.0, s + 1.0]])
    bays = np.zeros_like(places) + np.array([np.nextafter(y, -np.inf), y])[..., None]
    h = _meet(loft, web, web.s, places, places, n, side, depth[:, None], bays).h
    first, second = h[:, 1] - h[:, 0]
    kink = np.abs(second - first) > _KINK
    along = np.divide(first, first - second, out=np.zeros_like(s), where=kink)
    count = kink.sum(axis=1, keepdims=True)
    middle = np.divide(along.sum(axis=1, keepdims=True), count, out=np.full(count.shape, np.nan), where=count > 0)
    return s + np.where(np.isnan(first), np.nan, np.where(kink, along, middle))


def end_places(loft: Loft, web: Plane, n: ArrayLike, side: Side, depth: ArrayLike = 0.0) -> tuple[Array, Array]:
    """Where the edge over each n starts and stops: its crossings with the rib planes y1 and y2, as two arrays of s."""
    n = np.asarray(n, dtype=float)
    rib = np.array(web.ends).reshape((2,) + (1,) * n.ndim)
    out = np.array([0.0, 1.0, 0.0])
    found = _meet(loft, web, out, rib - web.origin[1], web.s_at_rib(rib, 0.0, n), n, side, depth)
    first, last = web.s_at_rib(rib, found.h, n)
    return first, last


def _meet(
    loft: Loft,
    web: Plane,
    along: Array,
    want: Array,
    s: ArrayLike,
    n: ArrayLike,
    side: Side,
    depth: ArrayLike,
    bay: Array | None = None,
) -> Edge:
    """Where, over the layer n of the web, the surface under the skin is the distance `want` off in direction `along`.

    Newton's method on the two surface coordinates with the outer surface's tangents in place of the inner one's. Each
    round leaves about depth x curvature of the error, a few parts in a thousand under a skin. The bay that a place
    belongs to is settled in the first rounds and then kept, so that a kink at a station cannot send it to and fro;
    unless `bay`, a y within it, says which.
    """
    stated = (s, n, depth, want, np.nan if bay is None else bay)
    s, n, depth, want, at = np.broadcast_arrays(*(np.asarray(v, dtype=float) for v in stated))
    share = np.clip(s / web.length, 0.0, 1.0)
    root = np.sqrt(web.line[0] + share * (web.line[1] - web.line[0]))
    t = root if side == "top" else -root
    y = web.origin[1] + s * web.s[1] + n * web.n[1]
    at = y if bay is None else at
    for turn in range(_ROUNDS):
        point, by_t, by_y = loft.under_skin(t, y, depth, at)
        out = point - web.origin
        miss_a, miss_n = out @ along - want, out @ web.n - n
        off = np.maximum(abs(miss_a), abs(miss_n))
        if turn > 3 and not np.any(off > _CLOSE):
            break
        if turn < 3 and bay is None:
            at = point[..., 1]
        a_t, a_y, n_t, n_y = by_t @ along, by_y @ along, by_t @ web.n, by_y @ web.n
        with np.errstate(divide="ignore", invalid="ignore"):
            det = a_t * n_y - a_y * n_t
            step_t = np.clip((n_y * miss_a - a_y * miss_n) / det, -0.2, 0.2)
            y = y - (a_t * miss_n - n_t * miss_a) / det
        t = np.clip(t - step_t, -1.0, 1.0)
    lost = ~(off < 1e-6) | (t <= 0.0 if side == "top" else t >= 0.0)
    return Edge(np.where(lost, np.nan, out @ web.h), t, y)


def bevel(front: ArrayLike, rear: ArrayLike, thickness: ArrayLike) -> Array:
    """Angle that an edge makes with square, radians; positive where it rises aft.

    Examples
    --------
    >>> float(np.degrees(bevel(0.0, 1.0, 1.0)).round(9))
    45.0
    """
    rise = np.asarray(rear, dtype=float) - np.asarray(front, dtype=float)
    return np.asarray(np.arctan(rise / np.asarray(thickness, dtype=float)))
