"""Sections from coordinates: points in any unit, and the text files that hold them."""

from __future__ import annotations

import re
from collections.abc import Sequence

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.interpolate import CubicSpline

from .airfoil import GRID, SHORT, Curve, Floats, Section, from_cubics, laid, lowest, no_section

Indices = NDArray[np.intp]

_FEWEST = 7  # points; fewer are no section
_FEW = 20  # points; fewer leave much to guess

# In parts of the chord:
_REPEAT = 5e-5  # points closer than this are one point
_AT_ORIGIN = 1e-4  # a file whose outline passes its origin this closely ...
_ON_AXIS = 5e-4  # ... and whose trailing edge lies this close to its x axis keeps its own axes
_STAGGER = 5e-3  # ends of the two sides further apart than this: one of them stops short
_ASTRAY = 1e-3  # a point that stands out of the line of its neighbours by more is doubtful ...
_ROUNDED = 1.5  # ... unless that is no more than so many steps that the figures are rounded to
_ALIKE = 0.5  # least distance over greatest, of a point out of line from the lines that its neighbours make

_NUMBER = re.compile(r"[+-]?((\d+\.?\d*|\.\d+)([ed][+-]?\d+)?|nan|inf)", re.ASCII | re.IGNORECASE)
_LIKE_ONE = re.compile(r"[+-]?(\.?\d|nan|inf$)", re.ASCII | re.IGNORECASE)


def from_points(points: ArrayLike, name: str, lines: Sequence[int] | None = None) -> Section:
    """Section through points (k, 2) in any unit, trailing edge - top - nose - lower side - trailing edge.

    One parametric cubic spline of continuous curvature, over chord length, runs through all the points. The
    list may run the other way round; the trailing edge may be open, closed, crossed, or closed by a face.

    Where the outline passes through the file's own origin (within 1e-4 of the chord) and the middle of the
    trailing edge lies on its x axis (within 5e-4), the file's axes are kept and only scaled, which puts the
    middle of the trailing edge at chord fraction 1. Otherwise the chord line is laid from the middle of the
    trailing edge to the point farthest from it, which then is the foremost one: these become (1, 0) and
    (0, 0), and the turn is reported.

    Parameters
    ----------
    lines
        For each point the line of the file that it stands in, for what is said of it.

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
    points = np.asarray(points, dtype=float)
    outline, which = _tidy(points)
    outline, turn = _framed(outline)
    doubts: tuple[str, ...] = ()
    if abs(turn) >= 0.01:
        how = f"turned by {abs(turn):.2f} degrees, nose {'up' if turn > 0.0 else 'down'}"
        doubts += (f"its outline is {how}, to lay its chord line from the foremost point to the trailing edge",)
    if len(outline) < _FEW:
        doubts += (f"it is given by {len(outline)} points only: its shape between them is a guess",)
    step = _step(points[:, 1]) / float(np.ptp(points, axis=0).max())
    doubts += _astray(outline, max(_ASTRAY, _ROUNDED * step), None if lines is None else np.asarray(lines)[which])
    curve = _splined(outline)
    nose, at = laid(curve)
    # Heights only: slopes of rounded figures, a hair apart at the trailing edge, are worth little.
    return from_cubics(name, nose, CubicSpline(GRID, curve.point(at)[:, 1]), doubts)


def _tidy(points: Floats) -> tuple[Floats, Indices]:
    """Points from lower trailing edge round the nose to the upper one, about 1 long, each once; and which they are."""
    if len(points) < _FEWEST:
        raise no_section(f"{_FEWEST} points or more", f"{len(points)}")
    if not np.all(np.isfinite(points)):
        raise no_section("plain numbers", "nan or infinity among them")
    size = float(np.ptp(points, axis=0).max()) or 1.0
    if not 1e-9 < size < 1e9:
        raise no_section("a chord between 1e-9 and 1e9", f"{size:.3g}")
    points = points / size
    which = _once(points)
    x, y = points[which].T
    area = 0.5 * float(np.sum(x * np.roll(y, -1) - y * np.roll(x, -1)))
    if abs(area) < 1e-4:
        raise no_section("an outline with some thickness", "points that lie on one line")
    if area > 0.0:
        which = which[::-1]
    for _ in range(2):  # at either end
        which = which[_face(points[which]) :][::-1]
    if len(which) < _FEWEST:
        raise no_section(f"{_FEWEST} different points or more", f"{len(which)}")
    return points[which], which


def _once(points: Floats) -> Indices:
    """Which points do not repeat the one before: a hair's breadth would set the spline's direction."""
    near = min(_REPEAT, 0.1 * float(np.median(np.hypot(*np.diff(points, axis=0).T))))
    kept = [0]
    for i, point in enumerate(points):
        if np.hypot(*(point - points[kept[-1]])) > near:
            kept.append(i)
    return np.array(kept)


def _face(points: Floats) -> int:
    """How many steep short steps points begin with: the face that closes a blunt trailing edge."""
    step = np.diff(points, axis=0)
    face = (np.abs(step[:, 1]) > 1.7 * np.abs(step[:, 0])) & (np.hypot(*step.T) < 0.05)
    return int(np.argmin(face))


def _step(values: Floats) -> float:
    """The power of ten, down to 1e-6, that all figures are multiples of; 0 if none."""
    steps = (10.0**-digits for digits in range(7))
    return next((step for step in steps if np.all(np.abs(values / step - np.rint(values / step)) < 1e-6)), 0.0)


def _astray(points: Floats, least: float, lines: Indices | None) -> tuple[str, ...]:
    """Report the point that stands furthest out of the line of its neighbours, and how many more stand out."""
    off = _out_of_line(points)
    i, count = int(off.argmax()), int(np.sum(off > least))
    if not count:
        return ()
    line = "" if lines is None else f" in line {lines[i]}"
    side = "upper" if i > points[:, 0].argmin() else "lower"
    more = "" if count == 1 else f", and {count - 1} more {'stands' if count == 2 else 'stand'} out so"
    where = f"the point{line}, at {points[i, 0]:.3f} chord on the {side} side, stands"
    return (f"{where} {off[i]:.2g} of the chord or more out of the line of its neighbours{more}: is a figure wrong?",)


def _out_of_line(points: Floats) -> Floats:
    """How far (k,) each point alone stands out of the line that its neighbours make; 0 where it does not.

    The outline turns one way at a stray point and the other way at the points before and after it, which it does
    neither along a smooth curve nor at a kink, however the points are spaced. The point then lies off the chord of its
    neighbours, and off the lines through the two before it and the two after it, by much the same; the least of the
    three counts.
    """
    edge = np.diff(points, axis=0)
    turn = np.sign(_cross(edge[:-1], edge[1:]))
    at, before, after = points[2:-2], points[1:-3], points[3:-1]
    apart = [_apart(at, *line) for line in ((before, after), (points[:-4], before), (after, points[4:]))]
    nearest, furthest = np.min(apart, axis=0), np.max(apart, axis=0)
    alone = (turn[:-2] * turn[1:-1] < 0.0) & (turn[1:-1] * turn[2:] < 0.0) & (nearest > _ALIKE * furthest)
    return np.pad(np.where(alone, nearest, 0.0), 2)


def _apart(points: Floats, a: Floats, b: Floats) -> Floats:
    """Distances (k,) from points to the lines through `a` and `b`, all (k, 2)."""
    return np.asarray(np.abs(_cross(b - a, points - a)) / np.hypot(*(b - a).T))


def _cross(a: Floats, b: Floats) -> Floats:
    return np.asarray(a[:, 0] * b[:, 1] - a[:, 1] * b[:, 0])


def _splined(points: Floats) -> Curve:
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
    beyond = SHORT * np.array([0.5, 1.0])
    return Curve(point, slope, np.concatenate([-beyond[::-1], between, [v[-1]], v[-1] + beyond]))


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

    far = lowest(curve.v, -np.hypot(*(outline - tail).T), closing)
    start = curve.point(np.array([far]))[0]
    chord = float(np.hypot(*(tail - start)))
    cos, sin = (tail - start) / chord
    turn = float(np.degrees(np.arctan2(sin, cos)))
    if abs(turn) > 30.0:
        raise no_section("x running aft from the nose, within 30 degrees", f"a chord line at {abs(turn):.0f} degrees")
    return (points - start) @ np.array([[cos, -sin], [sin, cos]]) / chord, turn


def _off_origin(line: Floats) -> float:
    """Distance from the origin to a polyline (k, 2)."""
    start, step = line[:-1], np.diff(line, axis=0)
    along = np.clip(-np.sum(start * step, axis=1) / np.sum(step * step, axis=1), 0.0, 1.0)
    return float(np.min(np.hypot(*(start + along[:, None] * step).T)))


def _tail(points: Floats, curve: Curve) -> Floats:
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
        raise no_section("lines of x and y", "an empty file")
    odd = sum(c < " " and c not in "\t\n\r\f\v\x1a" for c in text)
    if "\0" in text or odd > 0.02 * len(text):
        raise no_section("lines of x and y", "a file that is not text")
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
        raise no_section("plain numbers", "nan or infinity among them")
    first = None
    a, b, _ = pairs[0]
    if a == int(a) >= 3.0 and b == int(b) >= 3.0:
        if a + b == len(pairs) - 1:
            first = int(a)
        elif a > 2.0 * np.max(np.abs(pairs[1:, 0]), initial=0.0):
            raise no_section(f"{a:.0f} and {b:.0f} points as its first numbers say", f"{len(pairs) - 1}")
    pairs = _in_order(pairs if first is None else pairs[1:], first)
    return from_points(pairs[:, :2], name, pairs[:, 2].astype(int).tolist())


def _pairs(text: str) -> Floats:
    """All lines of two numbers, (k, 3) with the line's own number; a spoilt one among them is an error."""
    lines = text.replace("\N{MINUS SIGN}", "-").splitlines()
    rows = [re.findall(r"[^\s,;]+", line) for line in lines]
    good = {i: row for i, row in enumerate(rows) if len(row) == 2 and _numeric(row)}
    first, last = min(good, default=0), max(good, default=0)
    for i, row in enumerate(rows[first:], first):
        if i not in good and _spoilt(row, among=i < last):
            wanted = f"two numbers with decimal points in line {i + 1}"
            raise no_section(wanted, f"'{lines[i].strip()[:40]}'")
    if len(good) < _FEWEST:
        raise no_section(f"{_FEWEST} lines or more of two numbers, x and y", f"{len(good)}")
    return np.array([[*(float(word.lower().replace("d", "e")) for word in row), i + 1] for i, row in good.items()])


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
            raise no_section(wanted, "one that starts and ends at the least x")
        first = int(np.argmax(np.abs(np.diff(x)))) + 1
    one, two = pairs[:first], pairs[first:]
    if one[0, 0] < one[-1, 0]:
        one = one[::-1]
    if two[0, 0] > two[-1, 0]:
        two = two[::-1]
    return np.vstack([one, two])
