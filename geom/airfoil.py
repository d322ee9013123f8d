"""Airfoil sections at chord 1: one smooth curve each, on a grid that all of them share.

However it is given, a section first becomes one curve from the lower trailing edge round the nose to the
upper one (`Curve`). It is then laid on the grid that all sections share, so that sections can be blended.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.interpolate import PPoly
from scipy.optimize import brentq

Floats = NDArray[np.float64]

N = 256  # intervals per side of the shared parameter grid
GRID = np.arange(-N, N + 1) / N

# In parts of the chord:
SHORT = 0.02  # a side that stops short by no more is carried on straight
_FOLD = 5e-4  # a side that folds back by no more is read past the fold
_CROSSED = 0.01  # sides that cross by more are no section


@dataclass(frozen=True, eq=False)
class Section:
    """One airfoil at chord 1 as a single smooth curve over t in [-1, 1].

    t < 0 is the lower side, t = 0 the foremost point, t > 0 the upper side. The chord fraction is
    p(t) = nose + (1 - nose) t**2 on both sides; q(t), the height over the chord line, is a piecewise cubic
    of continuous slope on the uniform grid t = -1, -1 + 1/N, ... 1.

    Attributes
    ----------
    name
        What the section is called.
    nose
        Chord fraction of the foremost point: 0, or slightly less (about -8e-5 for NACA 2412) where the nose
        bulges ahead of the chord line's end.
    coef
        (2N, 4): in each interval q = c0 + c1 d + c2 d**2 + c3 d**3 with d = t - (left end of the interval).
    doubts
        Plain sentences on what is doubtful about it; empty when nothing is.

    Examples
    --------
    >>> from wrywing.geom.naca import naca
    >>> round(float(naca("0012").upper(0.3)), 5)
    0.06002
    """

    name: str
    nose: float
    coef: Floats
    doubts: tuple[str, ...] = ()

    def p(self, t: ArrayLike) -> Floats:
        """Chord fraction at t, any shape."""
        return np.asarray(self.nose + (1.0 - self.nose) * np.square(np.asarray(t, dtype=float)))

    def q(self, t: ArrayLike) -> Floats:
        """Height over the chord line at t, any shape; just outside [-1, 1] the end cubics are carried on."""
        t = np.asarray(t, dtype=float)
        i = np.clip(np.floor((t + 1.0) * N).astype(int), 0, 2 * N - 1)
        d = t - GRID[i]
        c = self.coef[i]
        return np.asarray(c[..., 0] + d * (c[..., 1] + d * (c[..., 2] + d * c[..., 3])))

    def t_of(self, p: ArrayLike, upper: bool) -> Floats:
        """Parameter t of chord fraction p on one side, any shape; p ahead of the nose counts as the nose."""
        t = np.sqrt(np.maximum(np.asarray(p, dtype=float) - self.nose, 0.0) / (1.0 - self.nose))
        return np.asarray(t if upper else -t)

    def upper(self, p: ArrayLike) -> Floats:
        """Height of the upper side at chord fraction p in [nose, 1], any shape."""
        return self.q(self.t_of(p, upper=True))

    def lower(self, p: ArrayLike) -> Floats:
        """Height of the lower side at chord fraction p in [nose, 1], any shape."""
        return self.q(self.t_of(p, upper=False))


def no_section(wanted: str, got: str) -> ValueError:
    """The error for what is not a section: one line, without its name."""
    return ValueError(f"holds no section: wanted {wanted}, got {got}")


@dataclass(frozen=True)
class Curve:
    """A section's outline over some parameter v that rises from the lower trailing edge to the upper one."""

    point: Callable[[Floats], Floats]  # (k,) -> (k, 2): p and q
    slope: Callable[[Floats], Floats]  # (k,) -> (k, 2): dp/dv and dq/dv
    v: Floats  # rising samples, close enough to miss no turn; they reach past p = 1 on both sides


def lowest(v: Floats, f: Floats, slope: Callable[[Floats], Floats]) -> float:
    """Where a function, f at the samples v, has its lowest inner minimum; `slope` is its derivative."""
    df = slope(v)
    turns = np.flatnonzero((df[:-1] < 0.0) & (df[1:] >= 0.0))
    if not turns.size:
        raise no_section("points from the trailing edge round the nose and back", "points that never turn back")
    i = turns[np.argmin(np.minimum(f[turns], f[turns + 1]))]
    return float(brentq(lambda x: float(slope(np.array([x]))[0]), v[i], v[i + 1], xtol=1e-15))


def _solve(curve: Curve, v: Floats, p: Floats, target: Floats) -> Floats:
    """Parameters where one side first reaches each chord fraction: Newton's rule, kept inside its bracket.

    v, p are the side's samples from the nose aft; the running maximum of p steps over a trifling fold.
    """
    i = np.clip(np.searchsorted(np.maximum.accumulate(p), target), 1, len(v) - 1)
    near, far = v[i - 1], v[i]  # p(near) <= target <= p(far)
    at = 0.5 * (near + far)
    for _ in range(60):
        miss = curve.point(at)[:, 0] - target
        near, far = np.where(miss < 0.0, at, near), np.where(miss < 0.0, far, at)
        with np.errstate(divide="ignore", invalid="ignore"):
            step = at - miss / curve.slope(at)[:, 0]
        inside = (step - near) * (step - far) <= 0.0
        ahead = np.where(inside, step, 0.5 * (near + far))
        if np.all(np.abs(ahead - at) < 1e-15):
            break
        at = ahead
    return np.asarray(at)


def _side(curve: Curve, start: float, upper: bool) -> Floats:
    """Parameters (N,) of one side's grid points, from the nose at `start` aft."""
    side = "upper" if upper else "lower"
    v = np.append(start, curve.v[curve.v > start] if upper else curve.v[curve.v < start][::-1])
    p = curve.point(v)[:, 0]
    if np.max(p) < 1.0:
        wanted = f"the {side} side to reach the trailing edge"
        raise no_section(wanted, f"one that stops more than {SHORT} of the chord short of it")
    used = p[: int(np.argmax(p >= 1.0)) + 1]
    fold = np.maximum.accumulate(used) - used
    i = int(np.argmax(fold))
    if fold[i] > _FOLD:
        wanted = f"the {side} side to run aft all the way"
        raise no_section(wanted, f"one that folds back by {fold[i]:.4f} of the chord at {p[i]:.3f} chord")
    return _solve(curve, v, p, p[0] + (1.0 - p[0]) * GRID[N + 1 :] ** 2)


def laid(curve: Curve) -> tuple[float, Floats]:
    """Chord fraction of the foremost point, and the curve's parameters (2N + 1,) at the grid's points."""
    start = lowest(curve.v, curve.point(curve.v)[:, 0], lambda v: curve.slope(v)[:, 0])
    sides = _side(curve, start, upper=False)[::-1], [start], _side(curve, start, upper=True)
    return float(curve.point(np.array([start]))[0, 0]), np.concatenate(sides)


def from_cubics(name: str, nose: float, piece: PPoly, doubts: tuple[str, ...] = ()) -> Section:
    """Section of the piecewise cubic q(t) on the shared grid; sides that cross are refused or reported."""
    coef = np.ascontiguousarray(piece.c[::-1].T)
    coef.setflags(write=False)
    section = Section(name, nose, coef, doubts)
    t = GRID[N + 1 :]
    return replace(section, doubts=doubts + _crossing(section.p(t), section.q(t) - section.q(-t)))


def _crossing(p: Floats, thickness: Floats) -> tuple[str, ...]:
    """Report a thickness that falls below nothing; refuse one that does so by much."""
    i = int(np.argmin(thickness))
    depth = -float(thickness[i])
    if depth > _CROSSED:
        got = f"it {depth:.4f} of the chord below it at {p[i]:.3f} chord"
        raise no_section("the upper side above the lower", got)
    if depth < 1e-5:
        return ()
    where = "the trailing edge is crossed" if p[i] > 0.99 else f"the sides cross at {p[i]:.3f} chord,"
    return (f"{where} by {f'{depth:.5f}'.rstrip('0')} of the chord",)
