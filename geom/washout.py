"""How one figure runs along the span: washout laws, planform and skin thickness as functions of y.

Every law can be carried past the ends of its pieces: the argument `at` says which piece is meant, `y` where it is read.
The three-dimensional offset of the skin needs that, since a point of the inner surface just inside a station
belongs to a point of the outer surface just beyond it.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.interpolate import PchipInterpolator

Array = NDArray[np.float64]


class Law(Protocol):
    """A figure along the span."""

    @property
    def knots(self) -> Array:
        """Places y where its pieces meet, ends included."""

    def __call__(self, y: Array, at: Array) -> tuple[Array, Array]:
        """Value and slope d/dy at `y`, read from the piece that holds `at`."""


@dataclass(frozen=True)
class Piecewise:
    """Cubic pieces between knots.

    Attributes
    ----------
    knots
        (k + 1,) ascending y in mm.
    coef
        (4, k, ...) descending powers of y minus the piece's left knot; trailing axes are several figures at once.
    """

    knots: Array
    coef: Array

    def __call__(self, y: Array, at: Array) -> tuple[Array, Array]:
        """Value and slope, each shaped like `y` with the figures' axes after it."""
        piece = np.searchsorted(self.knots[1:-1], at, side="right")
        c3, c2, c1, c0 = self.coef.take(piece, axis=1)
        d = (y - self.knots[piece]).reshape(np.shape(y) + (1,) * (self.coef.ndim - 2))
        return ((c3 * d + c2) * d + c1) * d + c0, (3.0 * c3 * d + 2.0 * c2) * d + c1


@dataclass(frozen=True)
class Power:
    """``root + (tip - root) e**exponent`` with e from 0 at the first knot to 1 at the last."""

    knots: Array
    root: float
    tip: float
    exponent: float

    def __call__(self, y: Array, at: Array) -> tuple[Array, Array]:
        """Value and slope; inboard of the root the curve is point-mirrored, so that it stays smooth."""
        span = self.knots[-1] - self.knots[0]
        e = (y - self.knots[0]) / span
        rise = self.tip - self.root
        steep = np.abs(e) ** (self.exponent - 1.0)
        return self.root + rise * e * steep, rise * self.exponent * steep / span


def straight(y: ArrayLike, values: ArrayLike) -> Piecewise:
    """Straight lines through `values` (k, ...) at knots `y` (k,).

    Examples
    --------
    >>> law = straight([0.0, 100.0], [0.0, 5.0])
    >>> [float(v) for v in law(np.array(60.0), np.array(60.0))]
    [3.0, 0.05]
    """
    x, v = np.asarray(y, dtype=float), np.asarray(values, dtype=float)
    slope = np.diff(v, axis=0) / np.diff(x).reshape((-1,) + (1,) * (v.ndim - 1))
    return Piecewise(x, np.stack([np.zeros_like(slope), np.zeros_like(slope), slope, v[:-1]]))


def smooth(y: ArrayLike, values: ArrayLike) -> Piecewise:
    """Monotone cubic (PCHIP) through `values` (k, ...) at knots `y` (k,).

    No overshoot between stations; continuous in value and slope. Fritsch and Carlson, *Monotone piecewise cubic
    interpolation*, SIAM J. Numer. Anal. 17 (1980); Fritsch and Butland's weights, as scipy has them.
    """
    x, v = np.asarray(y, dtype=float), np.asarray(values, dtype=float)
    return Piecewise(x, np.asarray(PchipInterpolator(x, v, axis=0).c))


def steepest(law: Law) -> tuple[float, float]:
    """Place y in mm and slope there (per mm) of the law's steepest place."""
    y = np.unique(np.concatenate([np.linspace(a, b, 41) for a, b in zip(law.knots, law.knots[1:], strict=False)]))
    inside = np.clip(y, law.knots[0], np.nextafter(law.knots[-1], -np.inf))
    slope = law(y, inside)[1]
    i = int(np.argmax(np.abs(slope)))
    return float(y[i]), float(slope[i])


def extremes(law: Law) -> tuple[tuple[float, float], tuple[float, float]]:
    """Place y in mm and value of the law's least and of its greatest; no law exceeds its knots between them.

    Examples
    --------
    >>> extremes(smooth([0.0, 50.0, 100.0], [1.0, -1.0, 5.0]))
    ((50.0, -1.0), (100.0, 5.0))
    """
    values = law(law.knots, law.knots)[0]
    least, most = int(values.argmin()), int(values.argmax())
    return (float(law.knots[least]), float(values[least])), (float(law.knots[most]), float(values[most]))


def reverses(law: Law) -> float | None:
    """First place y where the law turns back (its slope changes sign), or None."""
    y = np.unique(np.concatenate([np.linspace(a, b, 41) for a, b in zip(law.knots, law.knots[1:], strict=False)]))
    value = law(y, y)[0]
    step = np.diff(value)
    step[np.abs(step) < 1e-9 * max(1e-12, float(np.ptp(value)))] = 0.0
    moving = np.flatnonzero(step)
    turned = np.flatnonzero(np.sign(step[moving[1:]]) != np.sign(step[moving[:-1]]))
    return float(y[moving[turned[0] + 1]]) if turned.size else None
