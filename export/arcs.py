"""Arcs in place of many short lines: a polyline as few lines and circular arcs, within a tolerance.

An arc is written as the *bulge* of the vertex where it starts: the tangent of a quarter of its angle, positive where
it runs anticlockwise, 0 for a straight line (published: the DXF reference, LWPOLYLINE, group 42).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

TOLERANCE = 0.01  # how far an arc may stray from the lines it replaces, mm
_FEWEST = 3  # lines that an arc must replace
_FLAT = 1e-3  # an arc that rises less than this over its chord is a line, mm


def fit(points: Array, closed: bool, tolerance: float = TOLERANCE) -> Array:
    """Lines and arcs for a polyline.

    Parameters
    ----------
    points
        (k, 2) in mm; a closed line does not repeat its first point.
    closed
        Whether the last point is joined to the first.
    tolerance
        In mm, both ways: no line strays further from its arc, nor an arc from its lines.

    Returns
    -------
    (m, 3) array
        x, y and the bulge of what starts there, every vertex one of `points`.

    Examples
    --------
    >>> t = np.linspace(0.0, np.pi / 2.0, 200)
    >>> fit(10.0 * np.column_stack([np.cos(t), np.sin(t)]), closed=False).round(4).tolist()
    [[10.0, 0.0, 0.4142], [0.0, 10.0, 0.0]]
    """
    if closed:
        points = np.roll(points, -_sharpest(points), axis=0)
        points = np.vstack([points, points[:1]])
    out, at = [], 0
    while at < len(points) - 1:
        stop, bulge = _longest(points, at, tolerance)
        out.append([*points[at], bulge])
        at = stop
    if not closed:
        out.append([*points[-1], 0.0])
    return np.array(out)


def mirrored(found: Array) -> Array:
    """Lines and arcs (m, 3) of the mirror image, x negated, run through the other way.

    Examples
    --------
    >>> mirrored(np.array([[0.0, 0.0, 0.5], [1.0, 0.0, 0.0], [4.0, 3.0, 0.0]])).tolist()
    [[-4.0, 3.0, 0.0], [-1.0, 0.0, 0.5], [0.0, 0.0, 0.0]]
    """
    bulges = np.append(found[:-1, 2][::-1], found[-1, 2])
    return np.column_stack([found[::-1, :2] * [-1.0, 1.0] + 0.0, bulges])


def _sharpest(points: Array) -> int:
    """Corner of a closed line at which it turns most: no arc need run over it."""
    (ax, ay), (bx, by) = (points - np.roll(points, 1, axis=0)).T, (np.roll(points, -1, axis=0) - points).T
    return int(np.argmax(np.abs(np.arctan2(ax * by - ay * bx, ax * bx + ay * by))))


def _longest(points: Array, at: int, tolerance: float) -> tuple[int, float]:
    """Where the longest arc or line from `at` ends, and its bulge: its lines are doubled while it fits, then halved."""
    best, bulge = 1, 0.0
    low, high, step = _FEWEST - 1, len(points) - at, _FEWEST
    while high - low > 1:
        found = _arc(points[at : at + step + 1], tolerance)
        if found is None:
            high = step
        else:
            low, best, bulge = step, step, found
        step = min(2 * low, high - 1) if high == len(points) - at else (low + high) // 2
    return at + best, bulge


def _arc(points: Array, tolerance: float) -> float | None:
    """Bulge of the arc from the first to the last of `points` that fits the others best; None if it strays."""
    chord = points[-1] - points[0]
    half = float(np.hypot(*chord)) / 2.0
    if half < tolerance:
        return None
    along = chord / (2.0 * half)
    fine = np.vstack([points[:1], np.stack([(points[:-1] + points[1:]) / 2.0, points[1:]], axis=1).reshape(-1, 2)])
    offset = fine - (points[0] + points[-1]) / 2.0
    u, v = offset @ along, offset @ np.array([-along[1], along[0]])
    # A circle through both ends, of curvature ~ 2 q: v = q (half^2 - u^2 - v^2), by least squares over the points.
    w = half**2 - u**2 - v**2
    q = float(v[::2] @ w[::2] / (w[::2] @ w[::2]))
    sagitta = 2.0 * q * half**2 / (1.0 + np.sqrt(1.0 + 4.0 * q**2 * half**2))
    if abs(sagitta) > half:
        return None
    # Distance from that circle to first order, in a form that stands a radius without end.
    stray = (v - q * w) / np.sqrt(1.0 + 4.0 * q**2 * half**2)
    straight = abs(sagitta) < _FLAT
    forward = np.diff(u if straight else np.sign(q) * np.arctan2(2.0 * q * u, 1.0 + 2.0 * q * v))
    if np.abs(stray).max() > tolerance or (forward <= 0.0).any():
        return None
    return 0.0 if straight else -sagitta / half
