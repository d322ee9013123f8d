"""NACA sections of four and five digits, by their published formulas."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.polynomial import Polynomial
from numpy.typing import ArrayLike
from scipy.interpolate import CubicHermiteSpline

from .airfoil import GRID, Curve, Floats, N, Section, from_cubics, laid

# NACA Report 537; Abbott & von Doenhoff, Theory of Wing Sections, 6.5. For a design lift coefficient of 0.3:
# mean line -> place of the change of formula (m or r), k1, k2/k1.
_FIVE_DIGIT = {
    "10": (0.0580, 361.400, 0.0),
    "20": (0.1260, 51.640, 0.0),
    "30": (0.2025, 15.957, 0.0),
    "40": (0.2900, 6.643, 0.0),
    "50": (0.3910, 3.230, 0.0),
    "21": (0.1300, 51.990, 0.000764),
    "31": (0.2170, 15.793, 0.00677),
    "41": (0.3180, 6.520, 0.0303),
    "51": (0.4410, 3.191, 0.1355),
}

_SIX_SERIES = "a section of the 6-series needs a coordinate file"


@dataclass(frozen=True)
class MeanLine:
    """A NACA mean line: one polynomial of the chord fraction ahead of `joint`, another behind it."""

    joint: float
    fore: Polynomial
    aft: Polynomial

    def __call__(self, x: ArrayLike, order: int = 0) -> Floats:
        """Height (or its derivative of that order) at chord fractions x, any shape."""
        x = np.asarray(x, dtype=float)
        fore, aft = (side.deriv(order) if order else side for side in (self.fore, self.aft))
        return np.asarray(np.where(x < self.joint, fore(x), aft(x)))


def naca_code(text: str) -> str | None:
    """Code in a name such as ``naca 2412``; None where the text names something else, such as a file.

    Examples
    --------
    >>> naca_code("NACA2412"), naca_code("naca 23012"), naca_code("naca2412.dat")
    ('2412', '23012', None)
    """
    found = re.fullmatch(r"\s*naca[\s_-]*([0-9][^./\\]*?)\s*", text, re.IGNORECASE)
    return found[1] if found else None


def mean_line(code: str) -> MeanLine:
    """Mean line of a NACA 4-digit (NACA Report 460) or 5-digit section (NACA Report 537).

    The first of five digits scales the height: the design lift coefficient is 0.15 times it, and the
    published constants are those for 0.3.

    Raises
    ------
    ValueError
        For anything but such a code.

    Examples
    --------
    >>> float(mean_line("2412")(0.4))
    0.02
    """
    if not re.fullmatch(r"[0-9]{4,5}", code):
        such = "2412 or 23012" + (f" ({_SIX_SERIES})" if code.startswith("6") else "")
        raise ValueError(f"wanted a NACA code of 4 or 5 digits, such as {such}, got '{code}'")
    if code.endswith("00"):
        raise ValueError(f"wanted a NACA code that ends in the thickness, 01 or more, got '{code}'")
    return _four_digit(code) if len(code) == 4 else _five_digit(code)


def _four_digit(code: str) -> MeanLine:
    m, p = int(code[0]) / 100.0, int(code[1]) / 10.0
    if m == 0.0:
        return MeanLine(0.5, Polynomial([0.0]), Polynomial([0.0]))
    if p == 0.0:
        raise ValueError(f"wanted a place of the camber (second digit) of 1 or more, got '{code}'")
    fore = Polynomial([0.0, 2.0 * p, -1.0]) * (m / p**2)
    aft = Polynomial([1.0 - 2.0 * p, 2.0 * p, -1.0]) * (m / (1.0 - p) ** 2)
    return MeanLine(p, fore, aft)


def _five_digit(code: str) -> MeanLine:
    if code[0] == "0" or code[1:3] not in _FIVE_DIGIT:
        known = ", ".join(f"2{line}" for line in sorted(_FIVE_DIGIT))
        hint = f"; {_SIX_SERIES}" if code[0] == "6" else ""
        raise ValueError(f"wanted a 5-digit mean line like {known} (first digit 1 to 9{hint}), got '{code}'")
    r, k1, ratio = _FIVE_DIGIT[code[1:3]]
    scale = k1 * int(code[0]) / 2.0 / 6.0
    cube = Polynomial([-r, 1.0]) ** 3
    # With k2 = 0 this is the standard line, k1/6 (x^3 - 3 m x^2 + m^2 (3 - m) x) and k1 m^3/6 (1 - x).
    rest = Polynomial([r**3, -(r**3) - ratio * (1.0 - r) ** 3])
    return MeanLine(r, (cube + rest) * scale, (ratio * cube + rest) * scale)


def naca(code: str) -> Section:
    """Section of a NACA 4- or 5-digit code: "2412", "0012", "23012", "23112" (reflexed).

    Thickness by NACA Report 460 (open trailing edge, last coefficient -0.1015), laid off square to the mean
    line; mean lines as in `mean_line`. The section's cubics stay within about 1e-8 chord of these formulas.
    Where the formulas break, at the mean line's joint, they round it off: by 1e-7 for 2412, by 2e-6 for 4424.

    Raises
    ------
    ValueError
        For anything but such a code, or one too thick and cambered to be a section.

    Examples
    --------
    >>> round(float(naca("2412").upper(0.3)), 4)
    0.0788
    """
    line = mean_line(code)
    size = 5.0 * int(code[-2:]) / 100.0

    # v = +-sqrt(x), negative on the lower side, makes both sides one curve, smooth round the nose.
    def half(v: Floats) -> Floats:
        x = v * v
        return size * v * (0.2969 - np.abs(v) * (0.1260 + x * (0.3516 + x * (-0.2843 + x * 0.1015))))

    def half_slope(v: Floats) -> Floats:
        x = v * v
        return size * (0.2969 - np.abs(v) * (0.2520 + x * (1.4064 + x * (-1.7058 + x * 0.8120))))

    def point(v: Floats) -> Floats:
        x, y, turn = v * v, half(v), np.arctan(line(v * v, 1))
        return np.column_stack([x - y * np.sin(turn), line(x) + y * np.cos(turn)])

    def slope(v: Floats) -> Floats:
        x, y, dx, dy = v * v, half(v), 2.0 * v, half_slope(v)
        rise = line(x, 1)
        sin, cos = np.sin(np.arctan(rise)), np.cos(np.arctan(rise))
        dturn = line(x, 2) / (1.0 + rise**2) * dx
        return np.column_stack([dx - dy * sin - y * cos * dturn, rise * dx + dy * cos - y * sin * dturn])

    # Past v = 1 the formulas carry on the side that ends short of p = 1.
    nose, at = laid(Curve(point, slope, np.linspace(-1.1, 1.1, 2201)))
    piece = CubicHermiteSpline(GRID, point(at)[:, 1], _rates(slope, at, nose))
    return from_cubics(f"NACA {code}", nose, piece, _doubts(code))


def _doubts(code: str) -> tuple[str, ...]:
    """What is doubtful about a code: five digits that begin with 6 are more likely meant for another series."""
    if len(code) != 5 or code[0] != "6":
        return ()
    lift = 0.15 * int(code[0])
    taken = f"it is taken for a five-digit section, mean line 2{code[1:3]} at a design lift coefficient of {lift:g}"
    return (f"{taken}; if {code[:2]}-{code[2:]} is meant: {_SIX_SERIES}",)


def _rates(slope: Callable[[Floats], Floats], at: Floats, nose: float) -> Floats:
    """Exact dq/dt (2N + 1,) at the shared grid's points."""
    dp, dq = slope(at).T
    with np.errstate(divide="ignore", invalid="ignore"):
        rate = dq / dp * 2.0 * (1.0 - nose) * GRID
    # At the nose dp/dv and dp/dt both vanish, and their ratio tends to this.
    (ahead, _), (behind, _) = slope(at[N] + np.array([-1e-5, 1e-5]))
    rate[N] = dq[N] * np.sqrt(2.0 * (1.0 - nose) / ((behind - ahead) / 2e-5))
    return np.asarray(rate)
