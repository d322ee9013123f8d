"""Places along the web: where the skin's creases cross it, and rows from mark to mark."""

from __future__ import annotations

from collections.abc import Callable
from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .loft import Loft
from .web import Plane, Side, creases

Array = NDArray[np.float64]


def crossings(
    loft: Loft,
    web: Plane,
    side: Side,
    *,
    n: Callable[[Array], Array],
    depth: Callable[[Array], Array],
    within: tuple[float, float] = (-np.inf, np.inf),
) -> Array:
    """Places s (K, M) where K creases of a surface under the skin cross lines along the web.

    Parameters
    ----------
    n, depth
        Of s (k,): where M lines stand across the web, (k, M), and how deep under the skin's inside the surface lies.
    within
        The two places s between which the web line crosses the rib planes of those that are wanted.
    """
    y = loft.breaks
    s = web.s_at_rib(y, 0.0, 0.0)
    near = (s > within[0]) & (s < within[1])
    found = creases(loft, web, y[near], n(s[near]), side, depth(s[near]))
    return np.asarray(found[~np.isnan(found).any(axis=1)])


def spread(first: ArrayLike, last: ArrayLike, corners: Array, *, longest: float, least: float = 1e-3) -> Array:
    """Rows from `first` to `last`: one at each of the corners (m, ...) between them, the others evenly between those.

    A row is a single place s, or one place for each column of a grid. A corner nearer than `least` to the one before
    it, or to either end, has no row.

    Examples
    --------
    >>> spread(0.0, 10.0, np.array([4.0, 12.0]), longest=3.0).tolist()
    [0.0, 2.0, 4.0, 7.0, 10.0]
    """
    first, last = np.asarray(first, dtype=float), np.asarray(last, dtype=float)
    marks = [first]
    for corner in sorted(corners, key=np.mean):
        if np.min(corner - marks[-1]) > least and np.min(last - corner) > least:
            marks.append(corner)
    marks.append(last)
    pieces = [
        np.linspace(a, b, max(1, int(np.ceil(np.max(b - a) / longest - 1e-9))), endpoint=False)
        for a, b in pairwise(marks)
    ]
    return np.concatenate([*pieces, last[None]])
