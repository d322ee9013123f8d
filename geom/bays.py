"""Dividing a core's span into bays, so that the largest straight-cut error of any of them is small.

Bounds are first chosen among about a hundred places by dynamic programming: whatever the error's shape, no other choice
among these is better. They are then moved until no small move lowers the largest error. Bounds between the places may
still be better: by a per cent or two where the washout goes to and fro. Lengths in mm.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import linprog

Array = NDArray[np.float64]
Parts = Callable[[float, float], Array]

_NONE = 1e-9  # mm, no error at all
_MOVES = 60
_PLACES = 97
_NEAR = 0.02  # mm, how near a bound is brought


class TooFew(ValueError):
    """As many bays as there may be do not hold the tolerance; they are off by `reached` mm."""

    def __init__(self, reached: float) -> None:
        super().__init__(f"off by {reached:.3f} mm")
        self.reached = reached


@dataclass(frozen=True)
class Divider:
    """A span to be divided.

    Attributes
    ----------
    ends
        (y1, y2).
    parts
        Straight-cut errors (k,) of a bay from a to b, the largest of which counts: one for each part of a bay, so that
        it is seen which of them a move of a bound makes worse.
    table
        The largest of them (k, k), roughly, for bays from each of k places to each beyond it; infinite elsewhere.
    longest
        No bay is longer.
    spread
        About as many places as one asks for, among which bounds are first chosen: closer where bays must be short, and
        wherever a bound should well stand.
    """

    ends: tuple[float, float]
    parts: Parts
    table: Callable[[Array], Array]
    spread: Callable[[int], Array]
    longest: float = float("inf")

    def into(self, count: int) -> tuple[float, ...]:
        """Bounds (count + 1) of `count` bays whose largest error is small, as told above.

        Raises
        ------
        ValueError
            If so few bays would have to be longer than `longest`.
        """
        span = self.ends[1] - self.ends[0]
        if span > count * self.longest * (1.0 + 1e-9):
            raise ValueError(f"{count} bays of at most {self.longest:g} mm do not reach over {span:g} mm")
        if count == 1:
            return self.ends
        first = self._chosen(count)
        if self._largest(first) < _NONE:
            return tuple(np.linspace(*self.ends, count + 1).tolist())
        return self._settled(first)

    def fewest(self, tolerance: float, most: int, exact: Callable[[tuple[float, ...]], float]) -> tuple[float, ...]:
        """Bounds of the fewest bays, `most` or less, that hold the tolerance.

        Parameters
        ----------
        exact
            Largest error of the bays with given bounds, which has the last word.

        Raises
        ------
        TooFew
            If `most` bays do not.
        """
        least = max(1, int(np.ceil((self.ends[1] - self.ends[0]) / self.longest - 1e-9)))
        reached = float("inf")
        for count in range(least, most + 1):
            if count < most and self._hopeless(count, tolerance):
                continue
            bounds = self.into(count)
            reached = self._largest(bounds)
            if count == most or reached < 1.01 * tolerance:
                reached = exact(bounds)
            if reached <= tolerance:
                return bounds
        raise TooFew(reached)

    def _hopeless(self, count: int, tolerance: float) -> bool:
        """Whether even bounds chosen freely could not bring the chosen ones' error down to the tolerance."""
        # a bay among the places is at most one step longer than it need be, and the error grows as its square
        slack = (1.0 + 2.0 * count / len(self._table(count)[0])) ** 2
        return self._largest(self._chosen(count)) > tolerance * slack

    def _largest(self, bounds: tuple[float, ...]) -> float:
        return float(self._errors(bounds).max())

    def _errors(self, bounds: Sequence[float] | Array) -> Array:
        """(bays, k) errors of the parts of all bays."""
        return np.stack([self.parts(float(a), float(b)) for a, b in pairwise(bounds)])

    def _table(self, count: int) -> tuple[Array, Array]:
        """Places enough for `count` bays; rough errors (k, k) from one to another, infinite where that is no bay."""
        size = _PLACES
        while size < 2 * count:
            size *= 2
        if size not in self._tables:
            y = self.spread(size)
            out = np.where(y - y[:, None] <= self.longest * (1.0 + 1e-9), self.table(y), np.inf)
            self._tables[size] = y, out
        return self._tables[size]

    @cached_property
    def _tables(self) -> dict[int, tuple[Array, Array]]:
        return {}

    def _chosen(self, count: int) -> tuple[float, ...]:
        """Bounds among the places: least largest error by dynamic programming (Bellman 1961)."""
        y, costs = self._table(count)
        total, back = costs[0], []
        for _ in range(count - 1):
            joined = np.maximum(total[:, None], costs)
            back.append(joined.argmin(axis=0))
            total = joined.min(axis=0)
        if not np.isfinite(total[-1]):  # these places leave no room for bays as long as they may be
            return tuple(np.linspace(*self.ends, count + 1).tolist())
        stop, bounds = len(y) - 1, [len(y) - 1]
        for prior in reversed(back):
            stop = int(prior[stop])
            bounds.insert(0, stop)
        return tuple(y[[0, *bounds]].tolist())

    def _settled(self, start: tuple[float, ...]) -> tuple[float, ...]:
        """Bounds moved until no small move lowers the largest error: a linear programme over ever smaller moves."""
        bounds, places = np.array(start), self._table(len(start) - 1)[0]
        reach = np.interp(bounds, places, np.gradient(places)) / 2.0
        errors = self._errors(bounds)
        for _ in range(_MOVES):
            moved = bounds + self._move(bounds, errors, reach)
            found = self._errors(moved)
            gain = errors.max() - found.max()
            if gain > 0.0:
                bounds, errors = moved, found
            if gain < 1e-3 * errors.max():
                reach = 0.4 * reach
            if reach.max() < _NEAR:
                break
        return tuple(bounds.tolist())

    def _move(self, bounds: Array, errors: Array, reach: Array) -> Array:
        """Move (count + 1,) of the bounds, within their `reach`, that lowers the largest error most, to first order."""
        count, parts = errors.shape
        slope = np.zeros((count, parts, count + 1))
        for i in range(count):
            for j in (i, i + 1):
                if 0 < j < count:
                    away = bounds[[i, i + 1]]
                    away[j - i] += 0.1 * reach[j]
                    slope[i, :, j] = (self.parts(*away.tolist()) - errors[i]) / (0.1 * reach[j])
        lengths, room = np.diff(np.eye(count + 1), axis=0), np.diff(bounds)
        level = np.column_stack([slope.reshape(-1, count + 1), -np.ones(count * parts)])
        rows, most = [level, np.pad(-lengths, ((0, 0), (0, 1)))], [-errors.ravel(), 0.9 * room]
        if np.isfinite(self.longest):
            rows.append(-rows[1])
            most.append(self.longest * (1.0 + 1e-9) - room)
        limits = [(0.0, 0.0), *((-r, r) for r in reach[1:-1].tolist()), (0.0, 0.0), (0.0, None)]
        found = linprog(
            np.eye(count + 2)[-1], A_ub=np.concatenate(rows), b_ub=np.concatenate(most), bounds=limits, method="highs"
        )
        return np.zeros(count + 1) if found.x is None else np.asarray(found.x[:-1])
