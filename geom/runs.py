"""The runs of a set bevel: where the saw is set anew along an edge, and to what."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from .seat import Aim, Run, Survey
from .web import Side

Array = NDArray[np.float64]


def saw_angles(survey: Survey, side: Side, step: float) -> Array:
    """Every setting of the saw (whole multiples of `step`, radians) that an edge can ask for, square included."""
    bevel = np.arctan(survey.bevel_slope(side))
    first, last = np.floor(min(0.0, bevel.min()) / step), np.ceil(max(0.0, bevel.max()) / step)
    return np.asarray(np.arange(first, last + 1.0) * step)


def best_runs(survey: Survey, side: Side, *, runs: int, angles: Array, aim: Aim = "filler") -> tuple[Run, ...]:
    """Divide an edge into at most `runs` runs, each cut at one of `angles`, for least filler or least largest gap.

    Dynamic programming over the cells: exact for breaks at cell bounds (R. Bellman, *On the approximation of curves by
    line segments using dynamic programming*, Comm. ACM 4, 1961). Neighbours with the same angle come back as one run.

    Raises
    ------
    ValueError
        If `runs` is below 1 or above the number of cells.
    """
    count = len(survey.s)
    if not 1 <= runs <= count:
        raise ValueError(f"from 1 to {count} runs (one for each place along the edge), got {runs}")
    breaks, which = _divide(*_run_costs(_cell_costs(survey, side, angles, aim), aim), runs=runs, aim=aim)
    keep = [0, *(i for i in range(1, len(which)) if which[i] != which[i - 1])]
    bounds = [breaks[i] for i in keep] + [count]
    edges = np.append(survey.s[:, 0], survey.s[-1, 2])
    return tuple(
        Run(float(edges[a]), float(edges[b]), float(angles[which[i]]))
        for a, b, i in zip(bounds[:-1], bounds[1:], keep, strict=True)
    )


def _cell_costs(survey: Survey, side: Side, angles: Array, aim: Aim) -> Array:
    """(A, C) filler of every cell at every angle, or its largest gap."""
    values = (survey.seat[side], survey.n, survey.weight[side])
    # the few nodes across the thickness first, the many places last: numpy is several times quicker that way
    seat, n, weight = (np.ascontiguousarray(v.reshape(-1, v.shape[-1]).T)[:, None] for v in values)
    free = seat - n * np.tan(angles)[:, None]
    room = free - free.min(axis=0) if side == "top" else free.max(axis=0) - free
    places = np.einsum("map,mbp->ap", room, weight) if aim == "filler" else room.max(axis=0)
    cells = places.reshape(len(angles), *survey.s.shape)
    return np.asarray(cells.sum(axis=-1) if aim == "filler" else cells.max(axis=-1))


def _run_costs(costs: Array, aim: Aim) -> tuple[Array, NDArray[np.intp]]:
    """Least cost (C + 1, C + 1) of one run from cell bound i to bound j, and which angle gives it."""
    angles, count = costs.shape
    best = np.full((count + 1, count + 1), np.inf)
    which = np.zeros((count + 1, count + 1), dtype=np.intp)
    by_cell = np.ascontiguousarray(costs.T)
    total = np.concatenate([np.zeros((1, angles)), np.cumsum(by_cell, axis=0)])
    for first in range(count):
        ahead = by_cell[first:]
        grown = total[first + 1 :] - total[first] if aim == "filler" else np.maximum.accumulate(ahead, axis=0)
        chosen = grown.argmin(axis=1)
        which[first, first + 1 :] = chosen
        best[first, first + 1 :] = grown[np.arange(len(chosen)), chosen]
    return best, which


def _divide(best: Array, which: NDArray[np.intp], *, runs: int, aim: Aim) -> tuple[list[int], list[int]]:
    """First cells and angles of the runs that cost least together (or whose costliest costs least)."""
    count = len(best) - 1
    total, back = best[0], []
    for _ in range(runs - 1):
        joined = total[:, None] + best if aim == "filler" else np.maximum(total[:, None], best)
        joined[0] = best[0]  # a run fewer is allowed: the rest of the edge in one
        back.append(joined.argmin(axis=0))
        total = joined.min(axis=0)
    stop = count
    breaks: list[int] = []
    angles: list[int] = []
    for prior in [*reversed(back), np.zeros(count + 1, dtype=np.intp)]:
        start = int(prior[stop])
        breaks.insert(0, start)
        angles.insert(0, int(which[start, stop]))
        stop = start
        if start == 0:
            break
    return breaks, angles
