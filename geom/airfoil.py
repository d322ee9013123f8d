"""Airfoil sections at chord 1: from a NACA code or from a list of coordinates.

However it is given, a section first becomes one curve from the lower trailing edge round the nose to the
upper one (`_Curve`). It is then laid on the grid that all sections share, so that sections can be blended.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.polynomial import Polynomial
from numpy.typing import ArrayLike, NDArray
from scipy.interpolate import CubicHermiteSpline, CubicSpline, PPoly
from scipy.optimize import brentq

Floats = NDArray[np.float64]

N = 256  # intervals per side of the shared parameter grid

_GRID = np.arange(-N, N + 1) / N
_FEWEST = 7  # points; fewer are no section
_FEW = 20  # points; fewer leave much to guess

# In parts of the chord:
_REPEAT = 5e-5  # points closer than this are one point
_AT_ORIGIN = 1e-4  # a file whose outline passes its origin this closely ...
_ON_AXIS = 5e-4  # ... and whose trailing edge lies this close to its x axis keeps its own axes
_STAGGER = 5e-3  # ends of the two sides further apart than this: one of them stops short
_SHORT = 0.02  # a side that stops short by no more is carried on straight
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
        d = t - _GRID[i]
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


def _no_section(wanted: str, got: str) -> ValueError:
    return ValueError(f"holds no section: wanted {wanted}, got {got}")


# --- any smooth curve -> the shared grid --------------------------------------------------------------------


@dataclass(frozen=True)
class _Curve:
    """A section's outline over some parameter v that rises from the lower trailing edge to the upper one."""

    point: Callable[[Floats], Floats]  # (k,) -> (k, 2): p and q
    slope: Callable[[Floats], Floats]  # (k,) -> (k, 2): dp/dv and dq/dv
    v: Floats  # rising samples, close enough to miss no turn; they reach past p = 1 on both sides


def _lowest(v: Floats, f: Floats, slope: Callable[[Floats], Floats]) -> float:
    """Where a function, f at the samples v, has its lowest inner minimum; `slope` is its derivative."""
    df = slope(v)
    turns = np.flatnonzero((df[:-1] < 0.0) & (df[1:] >= 0.0))
    if not turns.size:
        raise _no_section("points from the trailing edge round the nose and back", "points that never turn back")
    i = turns[np.argmin(np.minimum(f[turns], f[turns + 1]))]
    return float(brentq(lambda x: float(slope(np.array([x]))[0]), v[i], v[i + 1], xtol=1e-15))


def _solve(curve: _Curve, v: Floats, p: Floats, target: Floats) -> Floats:
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


def _side(curve: _Curve, start: float, upper: bool) -> Floats:
    """Parameters (N,) of one side's grid points, from the nose at `start` aft."""
    side = "upper" if upper else "lower"
    v = np.append(start, curve.v[curve.v > start] if upper else curve.v[curve.v < start][::-1])
    p = curve.point(v)[:, 0]
    if np.max(p) < 1.0:
        wanted = f"the {side} side to reach the trailing edge"
        raise _no_section(wanted, f"one that stops more than {_SHORT} of the chord short of it")
    used = p[: int(np.argmax(p >= 1.0)) + 1]
    fold = np.maximum.accumulate(used) - used
    i = int(np.argmax(fold))
    if fold[i] > _FOLD:
        wanted = f"the {side} side to run aft all the way"
        raise _no_section(wanted, f"one that folds back by {fold[i]:.4f} of the chord at {p[i]:.3f} chord")
    return _solve(curve, v, p, p[0] + (1.0 - p[0]) * _GRID[N + 1 :] ** 2)


def _laid(curve: _Curve) -> tuple[float, Floats]:
    """Chord fraction of the foremost point, and the curve's parameters (2N + 1,) at the grid's points."""
    start = _lowest(curve.v, curve.point(curve.v)[:, 0], lambda v: curve.slope(v)[:, 0])
    sides = _side(curve, start, upper=False)[::-1], [start], _side(curve, start, upper=True)
    return float(curve.point(np.array([start]))[0, 0]), np.concatenate(sides)


def _section(name: str, nose: float, piece: PPoly, doubts: tuple[str, ...] = ()) -> Section:
    """Section of the piecewise cubic q(t) on the shared grid; sides that cross are refused or reported."""
    coef = np.ascontiguousarray(piece.c[::-1].T)
    coef.setflags(write=False)
    section = Section(name, nose, coef, doubts)
    t = _GRID[N + 1 :]
    return replace(section, doubts=doubts + _crossing(section.p(t), section.q(t) - section.q(-t)))


def _crossing(p: Floats, thickness: Floats) -> tuple[str, ...]:
    """Report a thickness that falls below nothing; refuse one that does so by much."""
    i = int(np.argmin(thickness))
    depth = -float(thickness[i])
    if depth > _CROSSED:
        got = f"it {depth:.4f} of the chord below it at {p[i]:.3f} chord"
        raise _no_section("the upper side above the lower", got)
    if depth < 1e-5:
        return ()
    where = "the trailing edge is crossed" if p[i] > 0.99 else f"the sides cross at {p[i]:.3f} chord,"
    return (f"{where} by {f'{depth:.5f}'.rstrip('0')} of the chord",)


# --- NACA codes ---------------------------------------------------------------------------------------------

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
        raise ValueError(f"wanted a NACA code of 4 or 5 digits, such as 2412 or 23012, got '{code}'")
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
        raise ValueError(f"wanted a 5-digit mean line like {known} (first digit 1 to 9), got '{code}'")
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
    nose, at = _laid(_Curve(point, slope, np.linspace(-1.1, 1.1, 2201)))
    piece = CubicHermiteSpline(_GRID, point(at)[:, 1], _rates(slope, at, nose))
    return _section(f"NACA {code}", nose, piece)


def _rates(slope: Callable[[Floats], Floats], at: Floats, nose: float) -> Floats:
    """Exact dq/dt (2N + 1,) at the shared grid's points."""
    dp, dq = slope(at).T
    with np.errstate(divide="ignore", invalid="ignore"):
        rate = dq / dp * 2.0 * (1.0 - nose) * _GRID
    # At the nose dp/dv and dp/dt both vanish, and their ratio tends to this.
    (ahead, _), (behind, _) = slope(at[N] + np.array([-1e-5, 1e-5]))
    rate[N] = dq[N] * np.sqrt(2.0 * (1.0 - nose) / ((behind - ahead) / 2e-5))
    return np.asarray(rate)


# --- points of a file ---------------------------------------------------------------------------------------


def from_points(points: ArrayLike, name: str) -> Section:
    """Section through points (k, 2) in any unit, trailing edge - top - nose - lower side - trailing edge.

    One parametric cubic spline of continuous curvature, over chord length, runs through all the points. The
    list may run the other way round; the trailing edge may be open, closed, crossed, or closed by a face.

    Where the outline passes through the file's own origin (within 1e-4 of the chord) and the middle of the
    trailing edge lies on its x axis (within 5e-4), the file's axes are kept and only scaled, which puts the
    middle of the trailing edge at chord fraction 1. Otherwise the chord line is laid from the middle of the
    trailing edge to the point farthest from it, which then is the foremost one: these become (1, 0) and
    (0, 0), and the turn is reported.

    Raises
    ------
    ValueError
        If the points are no section; one line, without the name.

    Examples
    --------
    >>> t = np.linspace(1.0, -1.0, 81)
    >>> plain = from_points(np.column_stack([400.0 * t**2, 60.0 * t * (1.0 - t**2)]), "plain")
    >>> round(float(plain.upper(0.25)), 6)
    0.05625
    """
    outline = _tidy(np.asarray(points, dtype=float))
    outline, turn = _framed(outline)
    doubts: tuple[str, ...] = ()
    if abs(turn) >= 0.01:
        how = f"turned by {abs(turn):.2f} degrees, nose {'up' if turn > 0.0 else 'down'}"
        doubts += (f"its outline is {how}, to lay its chord line from the foremost point to the trailing edge",)
    if len(outline) < _FEW:
        doubts += (f"it is given by {len(outline)} points only: its shape between them is a guess",)
    curve = _splined(outline)
    nose, at = _laid(curve)
    # Heights only: slopes of rounded figures, a hair apart at the trailing edge, are worth little.
    return _section(name, nose, CubicSpline(_GRID, curve.point(at)[:, 1]), doubts)


def _tidy(points: Floats) -> Floats:
    """Points from the lower trailing edge round the nose to the upper one, about 1 long, each once."""
    if len(points) < _FEWEST:
        raise _no_section(f"{_FEWEST} points or more", f"{len(points)}")
    if not np.all(np.isfinite(points)):
        raise _no_section("plain numbers", "nan or infinity among them")
    size = float(np.ptp(points, axis=0).max()) or 1.0
    if not 1e-9 < size < 1e9:
        raise _no_section("a chord between 1e-9 and 1e9", f"{size:.3g}")
    points = _once(points / size)
    x, y = points.T
    area = 0.5 * float(np.sum(x * np.roll(y, -1) - y * np.roll(x, -1)))
    if abs(area) < 1e-4:
        raise _no_section("an outline with some thickness", "points that lie on one line")
    if area > 0.0:
        points = points[::-1]
    points = _faceless(_faceless(points)[::-1])[::-1]
    if len(points) < _FEWEST:
        raise _no_section(f"{_FEWEST} different points or more", f"{len(points)}")
    return points


def _once(points: Floats) -> Floats:
    """Points without those that repeat the one before: a hair's breadth would set the spline's direction."""
    near = min(_REPEAT, 0.1 * float(np.median(np.hypot(*np.diff(points, axis=0).T))))
    kept = [points[0]]
    for point in points[1:]:
        if np.hypot(*(point - kept[-1])) > near:
            kept.append(point)
    return np.array(kept)


def _faceless(points: Floats) -> Floats:
    """Points without the steep short steps at their start: the face that closes a blunt trailing edge."""
    step = np.diff(points, axis=0)
    face = (np.abs(step[:, 1]) > 1.7 * np.abs(step[:, 0])) & (np.hypot(*step.T) < 0.05)
    return points[int(np.argmin(face)) :]


def _splined(points: Floats) -> _Curve:
    """C2 cubic spline through points (k, 2) over chord length, straight beyond both ends."""
    v = np.append(0.0, np.cumsum(np.hypot(*np.diff(points, axis=0).T)))
    spline = CubicSpline(v, points)
    rate = spline.derivative()

    def point(at: Floats) -> Floats:
        inner = np.clip(at, 0.0, v[-1])
        return np.asarray(spline(inner) + rate(inner) * (at - inner)[:, None])

    def slope(at: Floats) -> Floats:
        return np.asarray(rate(np.clip(at, 0.0, v[-1])))

    between = (v[:-1, None] + np.diff(v)[:, None] * np.arange(16) / 16.0).ravel()
    beyond = _SHORT * np.array([0.5, 1.0])
    return _Curve(point, slope, np.concatenate([-beyond[::-1], between, [v[-1]], v[-1] + beyond]))


def _framed(points: Floats) -> tuple[Floats, float]:
    """Tidy points in the section's axes, and by how many degrees they were turned (nose up positive)."""
    curve = _splined(points)
    outline = curve.point(curve.v)
    tail = _tail(points, curve)
    foremost = float(outline[:, 0].min())
    if _off_origin(outline) < _AT_ORIGIN and foremost > -0.05 and tail[0] > 0.5 and abs(tail[1]) < _ON_AXIS:
        ahead = max(0.0, foremost)
        return (points - [ahead, 0.0]) / (tail[0] - ahead), 0.0

    def closing(v: Floats) -> Floats:
        return np.asarray(-np.sum((curve.point(v) - tail) * curve.slope(v), axis=1))

    far = _lowest(curve.v, -np.hypot(*(outline - tail).T), closing)
    start = curve.point(np.array([far]))[0]
    chord = float(np.hypot(*(tail - start)))
    cos, sin = (tail - start) / chord
    turn = float(np.degrees(np.arctan2(sin, cos)))
    if abs(turn) > 30.0:
        raise _no_section("x running aft from the nose, within 30 degrees", f"a chord line at {abs(turn):.0f} degrees")
    return (points - start) @ np.array([[cos, -sin], [sin, cos]]) / chord, turn


def _off_origin(line: Floats) -> float:
    """Distance from the origin to a polyline (k, 2)."""
    start, step = line[:-1], np.diff(line, axis=0)
    along = np.clip(-np.sum(start * step, axis=1) / np.sum(step * step, axis=1), 0.0, 1.0)
    return float(np.min(np.hypot(*(start + along[:, None] * step).T)))


def _tail(points: Floats, curve: _Curve) -> Floats:
    """Middle (2,) of the trailing edge; a side well short of the other is first carried on straight."""
    ends = points[[0, -1]].copy()
    ahead = curve.slope(np.array([-1.0, 1e3])) * [[-1.0], [1.0]]  # directions in which the sides run out
    middle = ends.mean(axis=0)
    aft = middle - points[np.argmax(np.hypot(*(points - middle).T))]
    aft /= np.hypot(*aft)
    short = np.max(ends @ aft) - ends @ aft
    if np.max(short) > _STAGGER and np.all(ahead @ aft > 0.5):
        ends += ahead * (short / (ahead @ aft))[:, None]
    return np.asarray(ends.mean(axis=0))


# --- text of a file -----------------------------------------------------------------------------------------

_NUMBER = re.compile(r"[+-]?((\d+\.?\d*|\.\d+)([ed][+-]?\d+)?|nan|inf)", re.ASCII | re.IGNORECASE)
_LIKE_ONE = re.compile(r"[+-]?(\.?\d|nan|inf$)", re.ASCII | re.IGNORECASE)


def read(data: bytes, name: str) -> Section:
    """Section from the bytes of a coordinate file; see `parse`.

    Raises
    ------
    ValueError
        If the file is empty, no text, or holds no section; one line, without the file's name.
    """
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        text = data.decode("utf-16", errors="replace")
    else:
        try:
            text = data.decode("utf-8-sig")
        except UnicodeDecodeError:
            text = data.decode("latin-1")
    if not text.strip():
        raise _no_section("lines of x and y", "an empty file")
    odd = sum(c < " " and c not in "\t\n\r\f\v\x1a" for c in text)
    if "\0" in text or odd > 0.02 * len(text):
        raise _no_section("lines of x and y", "a file that is not text")
    return parse(text, name)


def parse(text: str, name: str) -> Section:
    """Section from the text of a coordinate file; see `from_points`.

    Two numbers a line, x and y, with decimal points, and between them blanks, tabs, commas or semicolons;
    other lines are titles. The order is trailing edge - nose - trailing edge, either way round, or each side
    by itself, with or without a line of the two sides' point counts before them.

    Raises
    ------
    ValueError
        If the text holds no section; one line, without the file's name.
    """
    pairs = _pairs(text)
    if not np.all(np.isfinite(pairs)):
        raise _no_section("plain numbers", "nan or infinity among them")
    first = None
    a, b = pairs[0]
    if a == int(a) >= 3.0 and b == int(b) >= 3.0:
        if a + b == len(pairs) - 1:
            first = int(a)
        elif a > 2.0 * np.max(np.abs(pairs[1:, 0]), initial=0.0):
            raise _no_section(f"{a:.0f} and {b:.0f} points as its first numbers say", f"{len(pairs) - 1}")
    return from_points(_in_order(pairs if first is None else pairs[1:], first), name)


def _pairs(text: str) -> Floats:
    """All lines (k, 2) of two numbers; a spoilt one among them is an error."""
    lines = text.replace("\N{MINUS SIGN}", "-").splitlines()
    rows = [re.findall(r"[^\s,;]+", line) for line in lines]
    good = {i: row for i, row in enumerate(rows) if len(row) == 2 and _numeric(row)}
    first, last = min(good, default=0), max(good, default=0)
    for i, row in enumerate(rows[first:], first):
        if i not in good and _spoilt(row, among=i < last):
            wanted = f"two numbers with decimal points in line {i + 1}"
            raise _no_section(wanted, f"'{lines[i].strip()[:40]}'")
    if len(good) < _FEWEST:
        raise _no_section(f"{_FEWEST} lines or more of two numbers, x and y", f"{len(good)}")
    return np.array([[float(word.lower().replace("d", "e")) for word in row] for row in good.values()])


def _numeric(row: list[str]) -> bool:
    return bool(row) and all(_NUMBER.fullmatch(word) for word in row)


def _spoilt(row: list[str], among: bool) -> bool:
    """Whether a line among or after the points looks like a point gone wrong rather than like words."""
    alike = [bool(_LIKE_ONE.match(word)) for word in row[:2]]
    return _numeric(row) or alike == [True, True] or (among and alike[:1] == [True])


def _in_order(pairs: Floats, first: int | None) -> Floats:
    """Pairs as one list from trailing edge to trailing edge; `first` of them are one side's, if known."""
    x = pairs[:, 0]
    middle = 0.5 * (x.min() + x.max())
    if first is None:
        if x[0] > middle and x[-1] > middle:
            return pairs
        if x[0] <= middle and x[-1] <= middle:
            wanted = "x to run aft, in a list that starts or ends at the trailing edge"
            raise _no_section(wanted, "one that starts and ends at the least x")
        first = int(np.argmax(np.abs(np.diff(x)))) + 1
    one, two = pairs[:first], pairs[first:]
    if one[0, 0] < one[-1, 0]:
        one = one[::-1]
    if two[0, 0] > two[-1, 0]:
        two = two[::-1]
    return np.vstack([one, two])
