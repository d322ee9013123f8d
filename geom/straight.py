"""The straight cut: how far what a hot wire sweeps between two ribs stands off the skin's inside and the web.

A hot wire is straight. Between two rib templates it joins points at equal chord fraction, so what it cuts is a ruled
surface, and the skin's inside is none where the washout is not linear; nor is the face beside the web where that is
thickened. mm and radians.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .beside import Beside, beside
from .core import Region, kinks, limits, turns
from .loft import Loft
from .profile import Profile, inner, symmetric

Array = NDArray[np.float64]

_ROUNDS = 30
_CLOSE = 1e-9  # mm^2: what is left of a step along t, squared
_STEP = 1e-5  # of t, for a difference
_ZOOMS = 4
_FEW = 12  # rows: a bay with fewer samples is sampled anew
_PROBES = 9  # places along each side at which a table of errors looks


@dataclass(frozen=True)
class Miss:
    """How far the straight cut is off, and where; mm.

    Attributes
    ----------
    off
        Positive where foam stands proud of the skin's inside, or of the web.
    t, y
        The place: t is negative on the lower side, the chord fraction is its square.
    web
        Whether it is on the face beside the web.
    """

    off: float
    t: float
    y: float
    web: bool = False

    @property
    def side(self) -> Literal["upper", "lower", "web"]:
        """Which face of the core it is on."""
        return "web" if self.web else "upper" if self.t > 0.0 else "lower"


@dataclass(frozen=True)
class Grid:
    """The skin's inside and the face beside the web over a core's span, sampled: where straight-cut errors are read.

    Attributes
    ----------
    region
        The core.
    kinks
        Rib planes among `y` where the surface has a kink along the span.
    t, y
        (T,) and (M,) the samples.
    points, normals
        (M, T, 2) x and z of the surface in the rib planes and of its unit normals.
    inside
        (M, T) which of them belong to the core.
    bounds
        (M, B) parameters t at which the core's own limits stand: where it stops on the lower and the upper side, and
        for an aft core where it starts as well.
    face
        The face beside the web, where that is not flat.
    """

    region: Region
    kinks: Array
    t: Array
    y: Array
    points: Array
    normals: Array
    inside: NDArray[np.bool_]
    bounds: Array
    face: Beside | None = None

    @cached_property
    def _cells(self) -> tuple[NDArray[np.intp], Array]:
        """Left neighbours (M, B) of the bounds among `t`, and how far on they lie."""
        i = np.clip(np.searchsorted(self.t, self.bounds, side="right") - 1, 0, len(self.t) - 2)
        return i, (self.bounds - self.t[i]) / (self.t[i + 1] - self.t[i])

    def row(self, y: float) -> Array:
        """(T, 2) the profile at any rib plane, straight between the samples."""
        i = int(np.clip(np.searchsorted(self.y, y) - 1, 0, len(self.y) - 2))
        share = (y - self.y[i]) / (self.y[i + 1] - self.y[i])
        return np.asarray(self.points[i] + share * (self.points[i + 1] - self.points[i]))

    def rows(self, a: float, b: float) -> slice:
        """The samples between ribs a and b."""
        return slice(int(np.searchsorted(self.y, a, side="right")), int(np.searchsorted(self.y, b)))

    def off(self, a: float, b: float) -> tuple[Array, Array, Array]:
        """What a straight cut from rib a to rib b misses by, to first order: y (m,), off (m, T), and at the bounds."""
        here = self.rows(a, b)
        y = self.y[here]
        ends = self.row(a), self.row(b)
        ruled = ends[0] + ((y - a) / (b - a))[:, None, None] * (ends[1] - ends[0])
        off = np.einsum("mti,mti->mt", ruled - self.points[here], self.normals[here])
        cell, share = (v[here] for v in self._cells)
        rows = np.arange(len(y))[:, None]
        return y, off, off[rows, cell] + share * (off[rows, cell + 1] - off[rows, cell])

    def extremes(self, a: float, b: float) -> tuple[Array, Array]:
        """Ribs (m,) sampled in a bay from rib a to rib b, and how far foam stands proud and is short there, (2, m)."""
        y, off, at_bounds = self.off(a, b)
        off = np.where(self.inside[self.rows(a, b)], off, 0.0)
        beside_web = [] if self.face is None else [self.face.off(a, b, y)]
        off = np.concatenate([off, at_bounds, *beside_web], axis=1)
        return y, np.stack([off.max(axis=1, initial=0.0), -off.min(axis=1, initial=0.0)])

    def parts(self, a: float, b: float) -> Array:
        """(8,) largest straight-cut errors of a bay from rib a to rib b, mm, to first order.

        For each quarter of its length the largest in which foam stands proud, then the largest in which it is short.
        """
        y, most = self.extremes(a, b)
        out = np.zeros((4, 2))
        np.maximum.at(out, np.minimum((4.0 * (y - a) / (b - a)).astype(int), 3), most.T)
        return out.ravel()

    def error(self, a: float, b: float) -> float:
        """Largest straight-cut error of a bay from rib a to rib b, mm, to first order."""
        return float(self.parts(a, b).max())

    def spread(self, count: int) -> Array:
        """About `count` places over the span, close where the surface bends much along it, and one at each kink.

        What a straight cut misses by grows as the bend times the square of its length, so the root of the bend says how
        close places must be; they are never further apart than three times the mean distance.
        """
        step = np.diff(self.y)
        slope = np.diff(self.points, axis=0) / step[:, None, None]
        bend = np.einsum("mti,mti->mt", np.diff(slope, axis=0), self.normals[1:-1])
        bend /= (step[1:, None] + step[:-1, None]) / 2.0
        most = np.where(self.inside[1:-1], np.abs(bend), 0.0).max(axis=1)
        plain = ~np.isin(self.y[1:-1], self.kinks)
        density = np.sqrt(np.interp(self.y, self.y[1:-1][plain], most[plain]))
        mean = float(np.trapezoid(density, self.y) / np.ptp(self.y))
        density = np.maximum(density, max(mean / 3.0, 1e-12))
        passed = np.append(0.0, np.cumsum((density[1:] + density[:-1]) / 2.0 * step))
        places = np.interp(np.linspace(0.0, passed[-1], count), passed, self.y)
        return np.union1d(places, self.kinks)

    @cached_property
    def _probes(self) -> tuple[NDArray[np.intp], Array, Array, Array]:
        """Where `table` looks in every other row: left neighbours (m, C) among `t`, how far on, points and normals."""
        share = np.linspace(0.0, 1.0, _PROBES)
        first = self.bounds[::2, 2:] if self.bounds.shape[1] == 4 else np.zeros_like(self.bounds[::2])
        t = (first[..., None] + share * (self.bounds[::2, :2] - first)[..., None]).reshape(len(first), -1)
        i = np.clip(np.searchsorted(self.t, t, side="right") - 1, 0, len(self.t) - 2)
        share = ((t - self.t[i]) / (self.t[i + 1] - self.t[i]))[..., None]
        rows = np.arange(0, len(self.y), 2)[:, None]
        points, normals = (v[rows, i] + share * (v[rows, i + 1] - v[rows, i]) for v in (self.points, self.normals))
        return i, share, points, normals

    def table(self, places: Array) -> Array:
        """(k, k) `error` of bays from each of k places to each beyond it, seen in fewer samples; infinite elsewhere."""
        i, share, points, normals = self._probes
        y = self.y[::2]
        ends = np.stack([self.row(float(place)) for place in places])
        reach = np.einsum("kmci,mci->ckm", ends[:, i] + share * (ends[:, i + 1] - ends[:, i]) - points, normals)
        out = np.full((len(places), len(places)), np.inf)
        for k, a in enumerate(places[:-1]):
            here = slice(int(np.searchsorted(y, a)), None)
            first, on = reach[:, k : k + 1, here], (y[here] - a) / (places[k + 1 :, None] - a)
            off = first + on * (reach[:, k + 1 :, here] - first)
            out[k, k + 1 :] = np.abs(off, out=off).max(axis=0).max(axis=1, where=on < 1.0, initial=0.0)
        if self.face is not None:
            out = np.maximum(out, self.face.table(places))
        return out


def grid(loft: Loft, region: Region, *, rows: int = 241, columns: int = 64) -> Grid:
    """Sample the skin's inside over a core, half of the rows evenly and half where it bends most along the span.

    Parameters
    ----------
    rows
        Rib planes from end to end, to which those are added where the loft has a kink.
    columns
        Parameters t on each side.

    Raises
    ------
    NoFoam
        If the core has no foam somewhere.
    """
    even = np.union1d(np.linspace(*region.ends, (rows + 1) // 2), kinks(loft, region))
    first = _sampled(loft, region, even, max(columns // 4, 12))
    return _sampled(loft, region, np.union1d(even, first.spread(rows - len(even))), columns)


def _sampled(loft: Loft, region: Region, y: Array, columns: int) -> Grid:
    t = symmetric(np.linspace(0.0, 1.0, columns + 1))
    points, normals = (v[..., [0, 2]] for v in inner(loft, t, y[:, None]))
    turn = loft.washout(y, y)[0]
    aft = np.column_stack([np.cos(turn), np.sin(turn)])
    profiles = [Profile(float(y[i]), t, points[i], normals[i], aft[i]) for i in range(len(y))]
    found = [limits(region, of) for of in profiles]
    start, stop = (np.array([getattr(f, name) for f in found]) for name in ("start", "stop"))
    bounds = np.column_stack([-stop[:, 0], stop[:, 1]])
    if region.kind == "aft":
        bounds = np.column_stack([bounds, -start[:, 0], start[:, 1]])
    keep = (t >= bounds.min() - 0.02) & (t <= bounds.max() + 0.02)
    if region.kind == "aft":
        keep &= np.abs(t) >= start.min() - 0.02
    side = (t > 0.0).astype(int)
    inside = (np.abs(t) >= start[:, side]) & (np.abs(t) <= stop[:, side])
    kinked = np.intersect1d(y, kinks(loft, region))
    face = beside(region, turns(loft, region), profiles, found)
    points, normals, inside = points[:, keep], normals[:, keep], inside[:, keep]
    return Grid(region, kinked, t[keep], y, points, normals, inside, bounds, face)


def proud(loft: Loft, bay: tuple[float, float], t: ArrayLike, y: ArrayLike) -> Array:
    """Signed normal distance (...) from the skin's inside to the straight cut between two ribs, mm.

    The wire joins the points of equal `t` on the profiles at the bay's two ends. From its point in the rib plane `y`
    the foot of the perpendicular on the skin's inside is looked for by Newton's method; along t, where a nose is
    sharply curved, the inner surface's own tangent is taken, from a difference.
    """
    t, y = np.broadcast_arrays(np.asarray(t, dtype=float), np.asarray(y, dtype=float))
    a, b = np.moveaxis(inner(loft, t[..., None], np.array(bay))[0], -2, 0)
    cut = a + ((y - bay[0]) / (bay[1] - bay[0]))[..., None] * (b - a)
    at_t, at_y = t, y
    for _ in range(_ROUNDS):
        points, by_t, by_y = loft.under_skin(np.stack([at_t, at_t + _STEP]), at_y, 0.0, y)
        by_t, by_y, out = by_t[0], by_y[0], cut - points[0]
        inner_t = (points[1] - points[0]) / _STEP
        e, f, g, h = (_dot(u, v) for u, v in ((by_t, inner_t), (by_t, by_y), (by_y, by_y), (by_y, inner_t)))
        along_t, along_y = _dot(out, by_t), _dot(out, by_y)
        det = e * g - f * h
        step_t, step_y = (g * along_t - f * along_y) / det, (e * along_y - h * along_t) / det
        at_t, at_y = at_t + np.clip(step_t, -0.02, 0.02), at_y + step_y
        if not np.any((np.abs(step_t * along_t) > _CLOSE) | (np.abs(step_y) > 1e-4)):
            break
    normal = np.cross(by_t, by_y)
    return np.asarray(_dot(out, normal) / np.linalg.norm(normal, axis=-1))


def _dot(u: Array, v: Array) -> Array:
    return np.asarray(np.einsum("...i,...i->...", u, v))


def worst(loft: Loft, sampled: Grid, bay: tuple[float, float]) -> Miss:
    """The largest straight-cut error of a bay, closed in upon from the samples."""
    if len(sampled.y[sampled.rows(*bay)]) < _FEW:
        inside = sampled.kinks[(sampled.kinks > bay[0]) & (sampled.kinks < bay[1])]
        sampled = _sampled(loft, sampled.region, np.union1d(np.linspace(*bay, _FEW + 2), inside), 64)
    y, off, at_bounds = sampled.off(*bay)
    first = sampled.rows(*bay).start
    off = np.where(sampled.inside[first : first + len(y)], np.abs(off), 0.0)
    row, column = np.unravel_index(int(off.argmax()), off.shape)
    starts = [(float(off.max()), float(sampled.t[column]), float(y[row]))]
    row, bound = np.unravel_index(int(np.abs(at_bounds).argmax()), at_bounds.shape)
    starts.append((float(np.abs(at_bounds).max()), float(sampled.bounds[first + row, bound]), float(y[row])))
    if abs(starts[0][1] - starts[1][1]) < 0.03:  # the same place, once inside and once on the core's limit
        starts = [max(starts)]
    near = 0.9 * max(starts)[0]
    found = [_close_in(loft, sampled, bay, t, at) for off, t, at in starts if off >= near]
    if sampled.face is not None:
        found.append(_beside_web(sampled, sampled.face, bay))
    return max(found, key=lambda miss: abs(miss.off))


def _beside_web(sampled: Grid, face: Beside, bay: tuple[float, float]) -> Miss:
    """The largest error of a bay on the face beside the web."""
    y = np.union1d(np.linspace(*bay, _FEW), np.clip(face.turns, *bay))
    off = face.off(*bay, y)
    row, up = np.unravel_index(int(np.abs(off).argmax()), off.shape)
    corner = sampled.bounds[:, -2:][:, int(2 * up > off.shape[1])]
    return Miss(float(off[row, up]), float(np.interp(y[row], sampled.y, corner)), float(y[row]), web=True)


def _close_in(loft: Loft, sampled: Grid, bay: tuple[float, float], t: float, y: float) -> Miss:
    """Look ever more closely about one place of a core, never beyond its limits."""
    wide_t = float(np.diff(sampled.t).max())
    wide_y = 0.1 * (bay[1] - bay[0])
    span = np.linspace(-1.0, 1.0, 7)
    best = Miss(0.0, t, y)
    for _ in range(_ZOOMS):
        ys = np.clip(y + wide_y * span, *bay)[:, None]
        ts = _held(sampled, t + wide_t * span, ys)
        off = proud(loft, bay, ts, np.broadcast_to(ys, ts.shape))
        i = np.unravel_index(int(np.abs(off).argmax()), off.shape)
        if abs(off[i]) >= abs(best.off):
            best = Miss(float(off[i]), float(ts[i]), float(ys[i[0], 0]))
        t, y = best.t, best.y
        wide_t, wide_y = wide_t / 3.0, wide_y / 3.0
    return best


def _held(sampled: Grid, t: Array, y: Array) -> Array:
    """`t` (k,) brought within the core's limits at rib planes `y` (m, 1): (m, k)."""
    bounds = np.stack([np.interp(y[:, 0], sampled.y, column) for column in sampled.bounds.T], axis=-1)
    low, high = bounds[:, :1], bounds[:, 1:2]
    if bounds.shape[1] == 4:  # an aft core: one side or the other
        upper = t.mean() > 0.0
        low, high = (bounds[:, 3:4], high) if upper else (low, bounds[:, 2:3])
    return np.asarray(np.clip(t, low, high))
