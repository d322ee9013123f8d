"""What the web's edge may be cut to: the seat under the skin, the three edge cuts, gap and filler.

The web is surveyed in cells along s, three places to a cell (start, middle, end: Simpson's rule), and at Gauss-Lobatto
nodes across its thickness. A cut is a straight line across the thickness at every place, so that all three edge
treatments differ only in its slope: none, one for each run, or the seat's own.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cache, cached_property
from itertools import pairwise
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .loft import Loft
from .web import SIDES, NothingInside, OffSection, Plane, Side, edge, end_places

Array = NDArray[np.float64]
Treatment = Literal["square", "set bevel", "full bevel"]
Aim = Literal["filler", "gap"]


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
    """

    s: Array
    thickness: Array
    n: Array
    skin: Mapping[Side, Array]
    seat: Mapping[Side, Array]
    starts: Mapping[Side, Array]
    stops: Mapping[Side, Array]

    @cached_property
    def weight(self) -> Mapping[Side, Array]:
        """For each side (C, 3, M): what a place counts in an integral over (s, n), mm^2.

        At every node only the part between the rib planes counts.
        """
        plan = lobatto(self.n.shape[-1])[1] * self.thickness[..., None] / 2.0
        return {side: _clipped(self.s, self.starts[side], self.stops[side]) * plan for side in SIDES}

    def thinner(self, ratio: float) -> Survey:
        """The survey of a sheet `ratio` (at most 1) times as thick, read from this one.

        Heights across the thickness are the polynomial through the nodes (degree M - 1).
        """
        tau = lobatto(self.n.shape[-1])[0]
        read = _lagrange(tau, ratio * tau)

        def across(found: Mapping[Side, Array]) -> Mapping[Side, Array]:
            return {side: v @ read for side, v in found.items()}

        return Survey(
            self.s,
            self.thickness * ratio,
            self.n * ratio,
            across(self.skin),
            across(self.seat),
            across(self.starts),
            across(self.stops),
        )

    def within(self, sheet: float) -> Survey:
        """The survey of the plain sheet, `sheet` mm thick about n = 0, inside a thickened one; read as by `thinner`."""
        tau = lobatto(self.n.shape[-1])[0]
        n = np.broadcast_to(sheet / 2.0 * tau, self.n.shape)
        middle = self.n.mean(axis=-1, keepdims=True)
        read = _lagrange(tau, (n - middle) / (self.thickness[..., None] / 2.0))

        def across(found: Mapping[Side, Array]) -> Mapping[Side, Array]:
            return {side: np.einsum("...m,m...k->...k", v, read) for side, v in found.items()}

        def at_end(found: Mapping[Side, Array], place: tuple[int, int]) -> Mapping[Side, Array]:
            return {side: v @ read[:, *place] for side, v in found.items()}

        return Survey(
            self.s,
            np.full_like(self.thickness, sheet),
            n,
            across(self.skin),
            across(self.seat),
            at_end(self.starts, (0, 0)),
            at_end(self.stops, (-1, 2)),
        )

    def bevel_slope(self, side: Side) -> Array:
        """(C, 3) slope of the seat from the front to the rear face."""
        seat = self.seat[side]
        return np.asarray((seat[..., -1] - seat[..., 0]) / self.thickness)

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

    @cached_property
    def clearance(self) -> Array:
        """(C, 3, M) from the cut to the seat, never negative."""
        return clearance(self.survey.seat[self.side], self.survey.n, self.height, self.slope, self.side)

    @cached_property
    def gap(self) -> Array:
        """(C, 3) largest distance in h between seat and cut."""
        return np.asarray(self.clearance.max(axis=-1))

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


def rest(seat: Array, n: Array, slope: Array, side: Side) -> Array:
    """Height at n = 0 of the line of given slope that lies as close to the skin as the seat allows.

    Parameters
    ----------
    seat, n
        (..., M) heights of the seat at places across the thickness.
    slope
        (...) of the line.
    """
    free = seat - n * slope[..., None]
    return np.asarray(free.min(axis=-1) if side == "top" else free.max(axis=-1))


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
        No cell is longer, mm. Cells end at every station and wherever thickness or depth has a corner.

    Raises
    ------
    OffSection
        Where a face of the web misses the inside of the section.
    NothingInside
        Where no height is left between the two seats.
    """
    tau = lobatto(nodes)[0]
    starts, stops = {}, {}
    at_ends = [middle(s) + tau * thickness(s) / 2.0 for s in (0.0, web.length)]
    for side in SIDES:
        starts[side] = end_places(loft, web, at_ends[0], side)[0]
        stops[side] = end_places(loft, web, at_ends[1], side)[1]
        _refuse_gaps(side, starts[side], 0.0)
        _refuse_gaps(side, stops[side], web.length)
    low, high = np.concatenate(list(starts.values())), np.concatenate(list(stops.values()))
    kinks = [web.s_at_rib(loft.knots, 0.0, 0.0), _kinks(loft, web, thickness, middle)]
    corners = np.concatenate([*kinks, thickness.s, *(depth[side].s for side in SIDES)])
    bounds = _bounds(float(low.min()), float(low.max()), float(high.min()), float(high.max()), corners, longest)
    places = np.empty(2 * len(bounds) - 1)
    places[::2], places[1::2] = bounds, (bounds[1:] + bounds[:-1]) / 2.0
    cell = 2 * np.arange(len(bounds) - 1)[:, None] + np.arange(3)
    t = thickness(places)
    n = middle(places)[:, None] + t[:, None] / 2.0 * tau
    skin = {side: edge(loft, web, places[:, None], n, side).h for side in SIDES}
    seat = {
        side: edge(loft, web, places[:, None], n, side, depth[side](places)[:, None]).h
        if depth[side].value.any()
        else h
        for side, h in skin.items()
    }
    for side in SIDES:
        _refuse_gaps(side, seat[side] + skin[side], places[:, None])
    height = (seat["top"] - seat["bottom"]).min(axis=1)
    if height.min() <= 0.0:
        raise NothingInside(float(places[height.argmin()]), float(height.min()))
    return Survey(
        s=places[cell],
        thickness=t[cell],
        n=n[cell],
        skin={side: h[cell] for side, h in skin.items()},
        seat={side: h[cell] for side, h in seat.items()},
        starts=starts,
        stops=stops,
    )


def _lagrange(nodes: Array, x: Array) -> Array:
    """(M, ...) weights that take values at `nodes` (M,) to values at `x` (...) of the polynomial through them."""
    read = np.linalg.solve(np.vander(nodes).T, np.vander(x.ravel(), len(nodes)).T)
    return np.asarray(read.reshape(len(nodes), *x.shape))


def _refuse_gaps(side: Side, found: Array, s: ArrayLike) -> None:
    lost = np.isnan(found)
    if lost.any():
        raise OffSection(side, float(np.broadcast_to(s, found.shape)[lost][0]))


def _kinks(loft: Loft, web: Plane, thickness: Along, middle: Along) -> Array:
    """Where the web's two faces and two edges first and last cross each break of the loft.

    On a swept or canted web they cross a rib plane at different s: the kink there gets a short cell of its own.
    """
    s = web.s_at_rib(loft.breaks, 0.0, 0.0)
    n = middle(s)[:, None] + thickness(s)[:, None] * np.array([-0.5, 0.5])
    heights = np.stack([edge(loft, web, s[:, None], n, side).h for side in SIDES], axis=-1)
    crossings = web.s_at_rib(loft.breaks[:, None, None], np.nan_to_num(heights), n[..., None])
    return np.concatenate([crossings.min(axis=(1, 2)), crossings.max(axis=(1, 2))])


def _bounds(low0: float, low1: float, high0: float, high1: float, corners: Array, longest: float) -> Array:
    """Cell bounds: a cell of its own for each skewed end, corners respected, none longer than `longest`."""
    inside = corners[(corners > low1 + 1e-3) & (corners < high0 - 1e-3)]
    marks = np.unique(np.concatenate([[low0, low1], inside, [high0, high1]]))
    marks = marks[np.concatenate([[True], np.diff(marks) > 1e-6])]
    pieces = [
        np.linspace(a, b, max(1, int(np.ceil((b - a) / longest - 1e-9))), endpoint=False) for a, b in pairwise(marks)
    ]
    return np.concatenate([*pieces, marks[-1:]])


def _clipped(s: Array, start: Array, stop: Array) -> Array:
    """Simpson weights (C, 3, M) of cells `s` (C, 3) when node m counts only from `start[m]` to `stop[m]`.

    The quadratic through a cell's three places is integrated over the part that counts.
    """
    half = (s[:, 2] - s[:, 0])[:, None] / 2.0
    u, v = (np.clip((end - s[:, 1:2]) / half, -1.0, 1.0) for end in (start, stop))

    def primitive(x: Array) -> Array:
        return np.stack([x**3 / 6.0 - x**2 / 4.0, x - x**3 / 3.0, x**3 / 6.0 + x**2 / 4.0], axis=1)

    return np.asarray((primitive(v) - primitive(u)) * half[:, None])


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


def sheet_volume(top: Cut, bottom: Cut) -> float:
    """Volume of the sheet between its two cuts and the two rib planes, mm^3.

    For each layer n the area inside the outline by Green's theorem: the two edges, and the ends that lean with the rib
    planes.
    """
    survey = top.survey
    n = survey.n
    high = top.height[..., None] + top.slope[..., None] * n
    low = bottom.height[..., None] + bottom.slope[..., None] * n
    between = float(np.sum(high * survey.weight["top"]) - np.sum(low * survey.weight["bottom"]))
    across = lobatto(n.shape[-1])[1] / 2.0
    ends = 0.0
    for place, at, sign in (((0, 0), survey.starts, 1.0), ((-1, 2), survey.stops, -1.0)):
        middle = (high[place] + low[place]) / 2.0
        ends += sign * survey.thickness[place] * float(across @ (middle * (at["top"] - at["bottom"])))
    return between + ends


def cut(survey: Survey, side: Side, treatment: Treatment, runs: tuple[Run, ...] = ()) -> Cut:
    """Cut one edge: square, at the saw angles of `runs`, or to the full changing bevel.

    A full bevel runs from the front face's seat to the rear face's, and lower where the seat would foul it.
    """
    slope = np.zeros_like(survey.s)
    if treatment == "full bevel":
        slope = survey.bevel_slope(side)
    elif treatment == "set bevel":
        slope = slope + _saw_slope(runs, survey.s[:, 1])[:, None]
    return Cut(side, treatment, rest(survey.seat[side], survey.n, slope, side), slope, survey, runs)


def slope_at(of: Cut, s: Array, seat: Array, thickness: Array) -> Array:
    """Slope (k,) of a cut at any places `s` (k,), given the seat (k, M) there and the local thickness (k,)."""
    if of.treatment == "full bevel":
        return np.asarray((seat[:, -1] - seat[:, 0]) / thickness)
    return _saw_slope(of.runs, s) if of.runs else np.zeros_like(s)


def _saw_slope(runs: tuple[Run, ...], s: Array) -> Array:
    which = np.searchsorted([run.stop for run in runs[:-1]], s)
    return np.asarray(np.tan([run.angle for run in runs])[which])
