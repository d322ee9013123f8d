"""The runs of a set bevel: where the saw is set anew along an edge, and to what."""

from __future__ import annotations

from bisect import bisect_left
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from .seat import Aim, Run, Survey, highest_under
from .web import Side

Array = NDArray[np.float64]

_SAME = 1e-9  # share of the filler by which sums of the same cells may differ


def saw_angles(survey: Survey, side: Side, step: float) -> Array:
    """Every setting of the saw (whole multiples of `step`, radians) that an edge can ask for, square included."""
    bevel = np.arctan(survey.bevel_slope(side))
    first, last = np.floor(min(0.0, bevel.min()) / step), np.ceil(max(0.0, bevel.max()) / step)
    return np.asarray(np.arange(first, last + 1.0) * step)


def best_runs(survey: Survey, side: Side, *, runs: int, angles: Array, aim: Aim = "filler") -> tuple[Run, ...]:
    """Divide an edge into at most `runs` runs, each cut at one of `angles`, for least filler or least largest gap.

    Of divisions with the same largest gap the one with least filler, and of those the one with fewest runs.

    Dynamic programming over the cells: exact for breaks at cell bounds (R. Bellman, *On the approximation of curves by
    line segments using dynamic programming*, Comm. ACM 4, 1961).

    Raises
    ------
    ValueError
        If `runs` is below 1 or above the number of cells.
    """
    count = len(survey.s)
    if not 1 <= runs <= count:
        raise ValueError(f"from 1 to {count} runs (one for each place along the edge), got {runs}")
    # the few nodes across the thickness first, the many places last: numpy is several times quicker that way
    out = 1.0 if side == "top" else -1.0
    n, seat = (np.ascontiguousarray(out * v.T)[:, None] for v in survey.bearing(side))
    free = seat - n * np.tan(angles)[:, None, None]
    cut = highest_under(free)
    total = np.cumsum(_cell_filler(survey, side, np.tan(angles), cut), axis=1)
    total = np.concatenate([np.zeros((len(angles), 1)), total], axis=1)
    reach = None
    if aim == "gap":
        gap = _cell_gaps(survey, side, free - cut)
        reach = _reach(gap <= _least_gap(gap, runs))
    edges = np.append(survey.s[:, 0], survey.s[-1, 2])
    return tuple(
        Run(float(edges[a]), float(edges[b]), float(angles[_costs(total, reach, a)[:, b - a - 1].argmin()]))
        for a, b in pairwise(_divide(total, reach, runs))
    )


def _cell_filler(survey: Survey, side: Side, slopes: Array, cut: Array) -> Array:
    """(A, C) filler of every cell under cuts (A, 3, C) at every slope, heights and slopes taken outwards."""
    weight, out = survey.weight[side], 1.0 if side == "top" else -1.0
    under, aside = ((v * weight).sum(axis=(1, 2)) for v in (survey.seat[side], survey.n))
    beneath = np.einsum("ajc,cj->ac", cut, weight.sum(axis=2))
    return np.asarray(out * (under - slopes[:, None] * aside) - beneath)


def _cell_gaps(survey: Survey, side: Side, room: Array) -> Array:
    """(A, C) largest of the distances (M, A, 3, C) to the seat in each cell, as far as it is on the web."""
    at_nodes = room[: survey.n.shape[-1]].transpose(1, 3, 2, 0)
    return np.asarray(survey.on_web(side, at_nodes).max(axis=(2, 3)))


def _least_gap(gap: Array, runs: int) -> float:
    """The least largest gap of at most `runs` runs, of all gaps (A, C) that a cell can have."""
    values = np.unique(gap)
    return float(values[bisect_left(range(len(values)), True, key=lambda i: _enough(gap <= values[i], runs))])


def _reach(fits: NDArray[np.bool_]) -> NDArray[np.intp]:
    """(A, C) up to which cell bound a run from each cell may go at each angle, of those that fit (A, C) the cells."""
    count = fits.shape[1]
    failing = np.where(fits, count, np.arange(count))
    return np.minimum.accumulate(failing[:, ::-1], axis=1)[:, ::-1]


def _enough(fits: NDArray[np.bool_], runs: int) -> bool:
    """Whether so many runs take in all cells; the longest run from each place on is as good as any."""
    at, reach = 0, [*_reach(fits).max(axis=0), fits.shape[1]]
    for _ in range(runs):
        at = int(reach[at])
    return at == len(reach) - 1


def _costs(total: Array, reach: NDArray[np.intp] | None, first: int) -> Array:
    """(A, ...) filler of a run at each angle from cell bound `first` to each further one.

    Parameters
    ----------
    total, reach
        (A, C + 1) filler up to each bound; (A, C) up to which bound a run from each cell may go, if not to the end.
    """
    grown = total[:, first + 1 :] - total[:, first, None]
    if reach is not None:
        grown[np.arange(first + 1, total.shape[1]) > reach[:, first, None]] = np.inf
    return grown


def _divide(total: Array, reach: NDArray[np.intp] | None, runs: int) -> list[int]:
    """Cell bounds of the fewest runs, `runs` at most, that need least filler together; see `_costs`."""
    last = total.shape[1] - 1
    totals, back = [np.append(np.inf, _costs(total, reach, 0).min(axis=0))], []
    further = np.full((last + 1, last + 1), np.inf)
    for first in range(1, last if runs > 1 else 0):
        further[first, first + 1 :] = _costs(total, reach, first).min(axis=0)
    for _ in range(runs - 1):
        joined = totals[-1][:, None] + further
        back.append(joined.argmin(axis=0))
        totals.append(joined.min(axis=0))
    needs = np.array([filler[last] for filler in totals])
    fewest = int(np.argmax(needs <= needs.min() + _SAME * (1.0 + needs.min())))
    bounds = [last]
    for prior in reversed(back[:fewest]):
        bounds.insert(0, int(prior[bounds[0]]))
    return [0, *bounds]
