"""What the web's edge may be cut to: the seat under the skin, the three edge cuts, gap and filler.

The web is surveyed in cells along s, three places to a cell (start, middle, end: Simpson's rule), and at Gauss-Lobatto
nodes across its thickness. A cut is a straight line across the thickness at every place, so that all three edge
treatments differ only in its slope: none, one for each run, or the seat's own. Along a cell every figure is the
quadratic through its three places.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from functools import cache, cached_property
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .loft import Loft
from .places import crossings, spread
from .web import SIDES, NothingInside, OffSection, Plane, Side, edge, end_places

Array = NDArray[np.float64]
Treatment = Literal["square", "set bevel", "full bevel"]
Aim = Literal["filler", "gap"]

_APART = 0.01  # mm between the corners that cells end at
_CLOSE = 1e-7  # mm


def quadratic(x: ArrayLike) -> Array:
    """(3, ...) what the values at a cell's start, middle and end count at shares `x` of its length.

    Examples
    --------
    >>> quadratic(0.25).tolist()
    [0.375, 0.75, -0.125]
    """
    x = np.asarray(x, dtype=float)
    return np.array([(2.0 * x - 1.0) * (x - 1.0), 4.0 * x * (1.0 - x), x * (2.0 * x - 1.0)])


def locate(s: Array, at: ArrayLike) -> tuple[NDArray[np.intp], Array]:
    """In which of the cells `s` (C, 3) places lie, the outer cells carried on, and at what share of its length."""
    cell = np.searchsorted(s[:-1, 2], at)
    return cell, (at - s[cell, 0]) / (s[cell, 2] - s[cell, 0])


@cache
def lobatto(count: int) -> tuple[Array, Array]:
    """Gauss-Lobatto nodes and weights on [-1, 1], ends included; exact to degree ``2 count - 3``.

    Abramowitz and Stegun, *Handbook of Mathematical Functions*, 25.4.32.
    """
    top = np.polynomial.legendre.Legendre.basis(count - 1)
    nodes = np.concatenate([[-1.0], np.sort(top.deriv().roots().real), [1.0]])
    weights = 2.0 / (count * (count - 1) * top(nodes) ** 2)
    nodes.flags.writeable = weights.flags.writeable = False
    return nodes, weights


@dataclass(frozen=True)
class Along:
    """A figure that runs in straight pieces along the web: `value` (k,) at `s` (k,), held beyond both ends."""

    s: Array
    value: Array

    def __call__(self, s: ArrayLike) -> Array:
        """Value at `s`."""
        return np.asarray(np.interp(np.asarray(s, dtype=float), self.s, self.value))


def constant(value: float) -> Along:
    """The same figure all along."""
    return Along(np.zeros(1), np.array([value]))


CENTRED = constant(0.0)


class Bounded:
    """Reads figures over cells `s` (C, 3), beyond places `first` and `last` (M,) as they are there.

    Attributes
    ----------
    s
        (C, 3, M) the places at which they are read.
    """

    def __init__(self, s: Array, first: Array, last: Array) -> None:
        self.ends = _beyond(s, first, last)
        cells = s[self.ends][..., None]
        self.s = np.clip(s[..., None], first, last)
        x = (self.s[self.ends] - cells[:, :1]) / (cells[:, 2:] - cells[:, :1])
        self.weights, self.off = quadratic(x), np.abs(x - 0.5) > 0.5 + 1e-9

    def __call__(self, values: Array, off: float) -> Array:
        """`values` (..., C, 3, M) so read; `off` over cells that lie beyond as a whole."""
        found = np.array(values)
        read = np.einsum("icjm,...cim->...cjm", self.weights, values[..., self.ends, :, :])
        found[..., self.ends, :, :] = np.where(self.off, off, read)
        return found


def _beyond(s: Array, first: Array, last: Array) -> NDArray[np.intp]:
    """Cells `s` (C, 3) that reach beyond any of `first` or `last`."""
    return np.flatnonzero((s[:, 0] < first.max()) | (s[:, 2] > last.min()))


@dataclass(frozen=True)
class Survey:
    """The skin's inside and the seat over a grid of the web; C cells, three places each, M nodes across.

    Attributes
    ----------
    s, thickness
        (C, 3) places and the local thickness, mm.
    n
        (C, 3, M) places across the thickness.
    skin, seat
        For each side (C, 3, M): heights of the skin's inside and of the seat.
    starts, stops
        For each side (M,): where its edge meets the rib planes at the web's two ends.
    creases
        For each side (C, 3, B): places across the thickness where creases of the seat cross it, and the seat there; the
        face that is nearer along s where they do not.
    """

    s: Array
    thickness: Array
    n: Array
    skin: Mapping[Side, Array]
    seat: Mapping[Side, Array]
    starts: Mapping[Side, Array]
    stops: Mapping[Side, Array]
    creases: Mapping[Side, tuple[Array, Array]] = field(default_factory=dict)

    @cached_property
    def weight(self) -> Mapping[Side, Array]:
        """For each side (C, 3, M): what a place counts in an integral over (s, n), mm^2.

        At every node only the part between the rib planes counts.
        """
        plan = lobatto(self.n.shape[-1])[1] * self.thickness[..., None] / 2.0
        return {side: _clipped(self.s, self.starts[side], self.stops[side]) * plan for side in SIDES}

    def thinner(self, ratio: float) -> Survey:
        """The survey of a sheet `ratio` (at most 1) times as thick, read from this one.

        Heights across the thickness are the polynomial through the nodes (degree M - 1); where a crease of the seat
        crosses it, straight lines between the nodes and the crease.
        """
        tau = lobatto(self.n.shape[-1])[0]
        read = _lagrange(tau, ratio * tau)
        n, seat, creases = self.n * ratio, {}, {}
        for side in SIDES:
            seat[side] = self.seat[side] @ read
            if side in self.creases:
                at, deep = self.creases[side]
                over = (np.abs(at) < self.n[..., -1:]).any(axis=-1)
                knots, heights = (v[over] for v in self.bearing(side))
                seat[side][over] = _straight(knots, heights, n[over])
                faces = np.where(at < 0.0, seat[side][..., :1], seat[side][..., -1:])
                on = np.abs(at) <= n[..., -1:]
                creases[side] = np.where(on, at, np.sign(at) * n[..., -1:]), np.where(on, deep, faces)
        return Survey(
            s=self.s,
            thickness=self.thickness * ratio,
            n=n,
            skin={side: seat[side] + (self.skin[side] - self.seat[side]) @ read for side in SIDES},
            seat=seat,
            starts={side: v @ read for side, v in self.starts.items()},
            stops={side: v @ read for side, v in self.stops.items()},
            creases=creases,
        )

    def bevel_slope(self, side: Side) -> Array:
        """(C, 3) slope of the seat from the front to the rear face."""
        seat = self.seat[side]
        return np.asarray((seat[..., -1] - seat[..., 0]) / self.thickness)

    def bearing(self, side: Side) -> tuple[Array, Array]:
        """Places (C, 3, M + B) across the thickness and the seat there, that a cut has to clear: nodes and creases."""
        if side not in self.creases:
            return self.n, self.seat[side]
        n, seat = (np.concatenate(v, axis=-1) for v in zip((self.n, self.seat[side]), self.creases[side], strict=True))
        return n, seat

    def on_web(self, side: Side, values: Array) -> Array:
        """`values` (..., C, 3, M), those beyond the rib planes read at the ends of the edge; 0 if a cell has none."""
        return self._bounded[side](values, 0.0)

    @cached_property
    def _bounded(self) -> Mapping[Side, Bounded]:
        return {side: Bounded(self.s, self.starts[side], self.stops[side]) for side in SIDES}

    @cached_property
    def within_ends(self) -> Bounded:
        """Where both edges are on the web over the front and the rear face."""
        starts, stops = (np.stack([v[side][[0, -1]] for side in SIDES]) for v in (self.starts, self.stops))
        return Bounded(self.s, starts.max(axis=0), stops.min(axis=0))

    def length(self) -> Array:
        """(C,) length of each cell, mm."""
        return np.asarray(self.s[:, 2] - self.s[:, 0])

    def bedding(self, side: Side, share: ArrayLike = 1.0) -> float:
        """Volume between the skin's inside and the seat (bond line, caps, cover), mm^3, or a share (C, 3) of it."""
        deep = np.abs(self.skin[side] - self.seat[side]) * self.weight[side]
        return float(np.sum(deep.sum(axis=-1) * share))


@dataclass(frozen=True)
class Run:
    """A length of edge cut at one saw setting: from `start` to `stop` along s, `angle` in radians."""

    start: float
    stop: float
    angle: float


@dataclass(frozen=True)
class Cut:
    """One edge of the web as it is cut: the line ``h = height + slope n`` across the thickness at every place.

    Attributes
    ----------
    side, treatment
        Which edge and how it is cut.
    height, slope
        (C, 3) at the survey's places.
    survey
        What it was fitted to.
    runs
        The saw's settings, for a set bevel.
    """

    side: Side
    treatment: Treatment
    height: Array
    slope: Array
    survey: Survey = field(repr=False)
    runs: tuple[Run, ...] = ()

    def at(self, n: Array) -> Array:
        """Height (C, 3) of the cut at places `n` (C, 3) across the thickness."""
        return np.asarray(self.height + self.slope * n)

    def line(self, s: Array) -> tuple[Array, Array]:
        """Height and slope (k,) of the line that is cut at any places `s` (k,)."""
        cell, x = locate(self.survey.s, s)
        height, slope = (np.einsum("ik,ki->k", quadratic(x), v[cell]) for v in (self.height, self.slope))
        return height, slope

    def layers(self, n: Array) -> Array:
        """Height (C, 3, K) of the cut in the layers `n` (C, 3, K)."""
        return np.asarray(self.height[..., None] + self.slope[..., None] * n)

    @cached_property
    def clearance(self) -> Array:
        """(C, 3, M) from the cut to the seat, never negative."""
        return clearance(self.survey.seat[self.side], self.survey.n, self.height, self.slope, self.side)

    @cached_property
    def gap(self) -> Array:
        """(C, 3) largest distance in h between seat and cut; beyond the rib planes that at the end of the edge."""
        return np.asarray(self.survey.on_web(self.side, self.clearance).max(axis=-1))

    @cached_property
    def filler(self) -> float:
        """Volume between seat and cut, mm^3."""
        return float(np.sum(self.clearance * self.survey.weight[self.side]))

    @cached_property
    def filler_area(self) -> Array:
        """(C, 3) filler for each length of edge, mm^2."""
        _, across = lobatto(self.survey.n.shape[-1])
        return np.asarray(self.clearance @ across * self.survey.thickness / 2.0)

    @cached_property
    def removed(self) -> float:
        """Foam planed off an edge first cut square at its high face, ``t^2/2 |slope|`` for each length; mm^3."""
        area = self.survey.thickness**2 / 2.0 * np.abs(self.slope)
        return float(np.sum(area @ (1.0, 4.0, 1.0) / 6.0 * self.survey.length()))


def cut_height(seat: Array, n: Array, slope: Array, side: Side) -> Array:
    """Height (C, 3) at n = 0 of the line of given slope that lies as close to the skin as the seat allows.

    Parameters
    ----------
    seat, n
        (C, 3, M) heights of the seat at places across the thickness.
    slope
        (C, 3) of the line.
    """
    free = (seat - n * slope[..., None]).T
    return np.asarray(highest_under(free).T if side == "top" else -highest_under(-free).T)


def highest_under(free: Array) -> Array:
    """The highest quadratic (..., 3, C) along each cell that stays under all of M quadratics and touches at both ends.

    Parameters
    ----------
    free
        (M, ..., 3, C) the values of those at start, middle and end of the cells.

    Notes
    -----
    Over one of the M that stands a above its start and b above its end, m above its middle, the distance at a share x
    of the cell is ``4 x (1 - x) (m + (a / x + b / (1 - x) - 2 a - 2 b) / 4)``, least against ``4 x (1 - x)`` where
    ``x = sqrt(a) / (sqrt(a) + sqrt(b))``; so m has to be ``(sqrt(a) - sqrt(b))^2 / 4`` or more.
    """
    found = free.min(axis=0)
    start, stop = (free[..., i, :] - found[..., i, :] for i in (0, 2))
    found[..., 1, :] = (free[..., 1, :] - (start + stop) / 4.0 + np.sqrt(start * stop) / 2.0).min(axis=0)
    return np.asarray(found)


def clearance(seat: Array, n: Array, height: Array, slope: Array, side: Side) -> Array:
    """Distance (..., M) in h from the cut up (top) or down (bottom) to the seat."""
    out = seat - height[..., None] - n * slope[..., None]
    return np.asarray(np.maximum(out if side == "top" else -out, 0.0))


def survey(
    loft: Loft,
    web: Plane,
    *,
    thickness: Along,
    depth: Mapping[Side, Along],
    middle: Along = CENTRED,
    longest: float = 20.0,
    every_node: bool = True,
    nodes: int = 7,
) -> Survey:
    """Find skin and seat over a grid of the web.

    Parameters
    ----------
    thickness
        Of the sheet along s.
    depth
        For each side what lies between the skin and the edge: bond line, caps, cover; measured along the skin's normal.
    middle
        Where along n the middle of the thickness stands; 0 unless one face is thickened more than the other.
    longest
        No cell is longer, mm. Cells end at every station, wherever thickness or depth has a corner, and where a crease
        of either seat crosses the two faces.
    every_node
        Whether they end where it crosses the nodes in between as well: without that a cut is a few hundredths of a
        millimetre off beside a crease.

    Raises
    ------
    OffSection
        Where a face of the web misses the inside of the section.
    """
    tau = lobatto(nodes)[0]

    def across(s: Array) -> Array:
        return np.asarray(middle(s)[..., None] + thickness(s)[..., None] / 2.0 * tau)

    starts, stops = _ends(loft, web, across)
    ridges = {side: crossings(loft, web, side, n=across, depth=depth[side]) for side in SIDES}
    kinks = (s.ravel() if every_node else s[:, [0, -1]].ravel() for s in ridges.values())
    depths = (depth[side].s for side in SIDES)
    corners = np.concatenate([web.s_at_rib(loft.knots, 0.0, 0.0), thickness.s, *depths, *kinks])
    places = _places(starts, stops, corners, longest)
    n = across(places)
    skin, seat, creased = {}, {}, {}
    for side in SIDES:
        skin[side] = edge(loft, web, places[:, None], n, side).h
        _refuse_gaps(side, skin[side], places[:, None])
        at, on = _crease_places(places, n, ridges[side])
        seat[side], deep = skin[side], np.zeros_like(at)
        if depth[side].value.any() or at.size:
            s, layers = np.append(np.repeat(places, nodes), places[on.nonzero()[0]]), np.append(n, at[on])
            h = edge(loft, web, s, layers, side, depth[side](s)).h
            _refuse_gaps(side, h, s)
            seat[side] = h[: n.size].reshape(n.shape)
            deep = np.where(at > n.mean(axis=1)[:, None], seat[side][:, -1:], seat[side][:, :1])
            deep[on] = h[n.size :]
        creased[side] = at, deep
    cell = 2 * np.arange(len(places) // 2)[:, None] + np.arange(3)
    return Survey(
        s=places[cell],
        thickness=thickness(places)[cell],
        n=n[cell],
        skin={side: h[cell] for side, h in skin.items()},
        seat={side: h[cell] for side, h in seat.items()},
        starts=starts,
        stops=stops,
        creases={side: (at[cell], h[cell]) for side, (at, h) in creased.items() if at.size},
    )


def _straight(knots: Array, values: Array, at: Array) -> Array:
    """(P, M) values at `at` (P, M) of the straight lines that join `values` at `knots` (P, K) in their order."""
    order = knots.argsort(axis=1)
    knots, values = (np.take_along_axis(v, order, axis=1) for v in (knots, values))
    after = np.clip((knots[:, None] <= at[..., None]).sum(axis=-1), 1, knots.shape[1] - 1)
    x0, x1, y0, y1 = (np.take_along_axis(v, i, axis=1) for v in (knots, values) for i in (after - 1, after))
    return np.asarray(y0 + (y1 - y0) * (at - x0) / np.maximum(x1 - x0, 1e-12))


def _lagrange(nodes: Array, x: Array) -> Array:
    """(M, ...) weights that take values at `nodes` (M,) to values at `x` (...) of the polynomial through them."""
    read = np.linalg.solve(np.vander(nodes).T, np.vander(x.ravel(), len(nodes)).T)
    return np.asarray(read.reshape(len(nodes), *x.shape))


def _refuse_gaps(side: Side, found: Array, s: ArrayLike) -> None:
    lost = np.isnan(found)
    if lost.any():
        raise OffSection(side, float(np.broadcast_to(s, found.shape)[lost][0]))


def _ends(
    loft: Loft, web: Plane, across: Callable[[Array], Array]
) -> tuple[Mapping[Side, Array], Mapping[Side, Array]]:
    """For each side (M,) where its edge starts and stops over the nodes at both ends."""
    at = [across(np.array(s)) for s in (0.0, web.length)]
    starts = {side: end_places(loft, web, at[0], side)[0] for side in SIDES}
    stops = {side: end_places(loft, web, at[1], side)[1] for side in SIDES}
    for side in SIDES:
        _refuse_gaps(side, starts[side], 0.0)
        _refuse_gaps(side, stops[side], web.length)
    return starts, stops


def _crease_places(places: Array, n: Array, ridges: Array) -> tuple[Array, NDArray[np.bool_]]:
    """Places (P, B) across the thickness of B creases, on the faces where they do not cross it; and where they do."""
    tau = lobatto(n.shape[1])[0]
    inside = (places > ridges.min(axis=1)[:, None]) & (places < ridges.max(axis=1)[:, None])
    on = inside.any(axis=1)
    order = ridges.argsort(axis=1)
    shares = [np.interp(places, ridges[i, order[i]], (1.0 + tau[order[i]]) / 2.0) for i in np.flatnonzero(on)]
    share = np.reshape(shares, (-1, len(places))).T
    return (1.0 - share) * n[:, :1] + share * n[:, -1:], inside[on].T


def _places(starts: Mapping[Side, Array], stops: Mapping[Side, Array], corners: Array, longest: float) -> Array:
    """(2 C + 1,) bounds and middles of cells that end at every corner and are not longer than `longest`."""
    low, high = (np.concatenate(list(v.values())) for v in (starts, stops))
    corners = np.append(corners, [low.max(), high.min()])
    bounds = spread(low.min(), high.max(), corners, longest=longest, least=_APART)
    places = np.empty(2 * len(bounds) - 1)
    places[::2], places[1::2] = bounds, (bounds[1:] + bounds[:-1]) / 2.0
    return places


def _clipped(s: Array, start: Array, stop: Array) -> Array:
    """Simpson weights (C, 3, M) of cells `s` (C, 3) when node m counts only from `start[m]` to `stop[m]`.

    The quadratic through a cell's three places is integrated over the part that counts.
    """
    half = (s[:, 2] - s[:, 0])[:, None] / 2.0
    weights = np.repeat((half * [1.0, 4.0, 1.0] / 3.0)[..., None], len(start), axis=-1)
    ends = _beyond(s, start, stop)
    u, v = (np.clip((end - s[ends, 1:2]) / half[ends], -1.0, 1.0) for end in (start, stop))

    def primitive(x: Array) -> Array:
        return np.stack([x**3 / 6.0 - x**2 / 4.0, x - x**3 / 3.0, x**3 / 6.0 + x**2 / 4.0], axis=1)

    weights[ends] = (primitive(v) - primitive(u)) * half[ends, None]
    return weights


def crown(heights: Array, n: Array, side: Side) -> Array:
    """How far an edge curve bulges out of the straight line between its two faces; negative where it is hollow.

    Parameters
    ----------
    heights, n
        (..., M) heights at places across the thickness, both faces included.
    """
    front, rear = heights[..., :1], heights[..., -1:]
    out = heights - (front + (rear - front) * (n - n[..., :1]) / (n[..., -1:] - n[..., :1]))
    out = out if side == "top" else -out
    return np.asarray(np.take_along_axis(out, np.abs(out).argmax(axis=-1)[..., None], axis=-1)[..., 0])


def rib_crossing(web: Plane, rib: ArrayLike, s: Array, h: Array, n: Array) -> tuple[Array, Array]:
    """Where lines of heights `h` (C, 3, K) in layers `n` (..., K) cross rib planes: places s and heights, (..., K)."""
    columns = np.broadcast_to(np.arange(n.shape[-1]), n.shape)
    at = web.s_at_rib(rib, 0.0, n)
    for _ in range(20):  # an edge hardly rises along s: each round leaves a thousandth of the miss or less
        cell, x = locate(s, at)
        here = np.einsum("i...,...i->...", quadratic(x), h[cell, :, columns])
        last, at = at, web.s_at_rib(rib, here, n)
        if np.abs(at - last).max() < _CLOSE:
            break
    return at, here


def sheet_volume(web: Plane, top: Cut, bottom: Cut, n: Array) -> float:
    """Volume of what lies between two cuts and the two rib planes, mm^3.

    For each layer the area inside its outline by Green's theorem: the two edges, and the ends that lean with the rib
    planes.

    Parameters
    ----------
    n
        (C, 3, M) Gauss-Lobatto nodes across what is measured: the survey's own, or those of a part of its thickness.
    """
    s, nodes = top.survey.s, n.shape[-1]
    lines = np.concatenate([cut.layers(n) for cut in (top, bottom)], axis=-1)
    layers = np.tile(n[[0, -1], [0, 2]], 2)
    at, heights = rib_crossing(web, np.array(web.ends)[:, None], s, lines, layers)
    under = lines * _clipped(s, *at)
    slants = heights.reshape(2, 2, nodes).mean(axis=1) * (at[:, :nodes] - at[:, nodes:])
    area = under[..., :nodes] - under[..., nodes:]
    area[0, 0] += slants[0]
    area[-1, 2] -= slants[1]
    return float(np.sum(area * (n[..., -1:] - n[..., :1]) / 2.0 * lobatto(nodes)[1]))


def refuse_crossing(top: Cut, bottom: Cut) -> None:
    """Refuse two edges that leave no sheet between them.

    Raises
    ------
    NothingInside
        Where they meet or cross, with the least height.
    """
    n, within = top.survey.n, top.survey.within_ends
    height = within(np.stack([top.at(v) - bottom.at(v) for v in (n[..., 0], n[..., -1])], axis=-1), np.inf)
    if height.min() <= 0.0:
        raise NothingInside(float(within.s.flat[height.argmin()]), float(height.min()))


def cut(survey: Survey, side: Side, treatment: Treatment, runs: tuple[Run, ...] = ()) -> Cut:
    """Cut one edge: square, at the saw angles of `runs`, or to the full changing bevel.

    A full bevel runs from the front face's seat to the rear face's, and lower where the seat would foul it.
    """
    slope = np.zeros_like(survey.s)
    if treatment == "full bevel":
        slope = survey.bevel_slope(side)
    elif treatment == "set bevel":
        slope = slope + _saw_slope(runs, survey.s[:, 1])[:, None]
    n, seat = survey.bearing(side)
    return Cut(side, treatment, cut_height(seat, n, slope, side), slope, survey, runs)


def _saw_slope(runs: tuple[Run, ...], s: Array) -> Array:
    which = np.searchsorted([run.stop for run in runs[:-1]], s)
    return np.asarray(np.tan([run.angle for run in runs])[which])
