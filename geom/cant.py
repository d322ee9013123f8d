"""The cant that makes a figure of the web least, over a bounded range."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from scipy.optimize import minimize_scalar


def least(
    figure: Callable[[float], float], low: float, high: float, *, step: float, close: float, near: float = 0.0
) -> tuple[float, float]:
    """Global minimum of `figure` over angles from `low` to `high`, radians.

    A sweep no coarser than `step`, then a bounded search (Brent) about each of the three lowest hollows. A figure that
    has no value somewhere (the web would leave the section) gives infinity there.

    Parameters
    ----------
    close
        How near the angle must come, radians.
    near
        Angles of the sweep whose figure is within this of the least are as good: the one nearest to zero is taken, if
        it is nearer than the least's.

    Returns
    -------
    tuple of float
        The angle and the figure there; infinity when no angle has a value.

    Examples
    --------
    >>> angle, value = least(lambda k: abs(k - 0.1), -0.3, 0.3, step=0.05, close=1e-4)
    >>> round(angle, 3)
    0.1
    >>> angle, value = least(lambda k: abs(k - 0.1), -0.3, 0.3, step=0.05, close=1e-4, near=0.06)
    >>> round(angle, 3)
    0.05
    """
    angles = np.linspace(low, high, int(np.ceil((high - low) / step)) + 1)
    values = np.array([figure(float(k)) for k in angles])
    padded = np.concatenate([[np.inf], values, [np.inf]])
    hollows = np.flatnonzero((values <= padded[:-2]) & (values <= padded[2:]) & np.isfinite(values))
    hollows = hollows[np.argsort(values[hollows])]
    found = [(float(angles[i]), float(values[i])) for i in hollows]
    for i in hollows[:3]:
        about = (float(angles[max(i - 1, 0)]), float(angles[min(i + 1, len(angles) - 1)]))
        with np.errstate(invalid="ignore"):  # its parabola may run through infinities
            result = minimize_scalar(figure, bounds=about, method="bounded", options={"xatol": close})
        if np.isfinite(result.fun):
            found.append((float(result.x), float(result.fun)))
    best = min(found, key=lambda pair: pair[1], default=(low, float("inf")))
    good = [(float(k), float(v)) for k, v in zip(angles, values, strict=True) if v <= best[1] + near]
    return min([best, *good], key=lambda pair: abs(pair[0])) if near else best
