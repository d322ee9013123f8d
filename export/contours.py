"""Contours fit for a machine: closed, simple, the right way round, no point or line twice; and grown for a kerf."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace
from itertools import chain

import numpy as np
import shapely
from numpy.typing import NDArray

from ..geom.drawing import DIGITS, Drawing, Role, Stroke

Array = NDArray[np.float64]

NEAR = 0.02  # a point or a line this near to another says nothing new, mm
CUTS = (Role.CUT_OUTSIDE, Role.CUT_INSIDE)
_ORDER = (*CUTS, Role.FOLD, Role.ENGRAVE, Role.NOTE)  # who keeps a line that two of them claim
_DOUBLED = 25.0 * NEAR  # lines that merely cross run together for less than this, mm
_GRAZE = 1e-6  # how wide a line is when it is taken out of another, mm
_SPECK = 0.05  # area of a loop that may be dropped from a contour that crosses itself, mm^2
_MITRE = 5.0  # how far a sharp corner may run out, in offsets


class ContourError(ValueError):
    """A contour that cannot be cut as it is drawn."""


class KerfError(ValueError):
    """A kerf that a cut has no room for, in one line."""


def clean(drawing: Drawing) -> Drawing:
    """`drawing` with contours that a machine can follow.

    Outside cuts come out anticlockwise and inside cuts clockwise, so that what is kept lies on the left. Points less
    than `NEAR` from the one before go, and so do lines, or parts of lines, that run along another one.

    Raises
    ------
    ContourError
        If a cut is open, or crosses itself by more than a speck.

    Examples
    --------
    >>> ring = np.array([[0.0, 0.0], [0.0, 9.0], [9.0, 9.0], [9.0, 9.001], [9.0, 0.0]])
    >>> clean(Drawing("a", "A", "", strokes=(Stroke(ring, Role.CUT_OUTSIDE, True),))).strokes[0].points.tolist()
    [[9.0, 0.0], [9.0, 9.0], [0.0, 9.0], [0.0, 0.0]]
    """
    strokes = [made for stroke in drawing.strokes if (made := _tidy(stroke, drawing.name)) is not None]
    holes = tuple(
        replace(h, x=_round(h.x), y=_round(h.y), diameter=_round(h.diameter)) for h in dict.fromkeys(drawing.holes)
    )
    return replace(drawing, strokes=tuple(_single(strokes)), holes=holes)


def grown(drawing: Drawing, kerf: float) -> Drawing:
    """`drawing` with its cuts moved half a kerf away from what is kept: outside cuts grow, inside cuts shrink.

    Raises
    ------
    KerfError
        If a cut is too narrow for the kerf.

    Examples
    --------
    >>> ring = np.array([[0.0, 0.0], [9.0, 0.0], [9.0, 9.0], [0.0, 9.0]])
    >>> square = Drawing("a", "A", "", strokes=(Stroke(ring, Role.CUT_OUTSIDE, True),))
    >>> grown(square, 0.5).bounds()
    (-0.25, -0.25, 9.25, 9.25)
    """
    sense = {Role.CUT_OUTSIDE: 1.0, Role.CUT_INSIDE: -1.0}
    strokes = []
    for stroke in drawing.strokes:
        if stroke.role not in sense:
            strokes.append(stroke)
            continue
        by = sense[stroke.role] * kerf / 2.0
        moved = shapely.Polygon(stroke.points).buffer(by, join_style="mitre", mitre_limit=_MITRE)
        if not isinstance(moved, shapely.Polygon) or moved.is_empty or moved.interiors:
            raise KerfError(f"drawing {drawing.name}: wanted a kerf that fits into every cut, got {kerf:g} mm")
        strokes.append(replace(stroke, points=np.asarray(moved.exterior.coords)[:-1]))
    holes = [replace(h, diameter=h.diameter + sense.get(h.role, 0.0) * kerf) for h in drawing.holes]
    if any(hole.diameter <= 0.0 for hole in holes):
        least = min(hole.diameter for hole in drawing.holes)
        raise KerfError(f"drawing {drawing.name}: wanted a kerf below its {least:g} mm holes, got {kerf:g} mm")
    return clean(replace(drawing, strokes=tuple(strokes), holes=tuple(holes)))


def _round(value: float) -> float:
    return round(value, DIGITS) + 0.0


def _tidy(stroke: Stroke, name: str) -> Stroke | None:
    """One stroke, rounded, without needless points and the right way round; None if nothing is left of it."""
    if stroke.role in CUTS and not stroke.closed:
        raise ContourError(f"drawing {name}: wanted closed cuts, got one that is open")
    points = apart(np.round(stroke.points, DIGITS) + 0.0, stroke.closed)
    if len(points) < (3 if stroke.closed else 2):
        return None
    if stroke.closed:
        ring = shapely.LinearRing(points)
        if not ring.is_simple:
            points = _uncrossed(points, name)
            ring = shapely.LinearRing(points)
        if ring.is_ccw == (stroke.role is Role.CUT_INSIDE):
            points = points[::-1]
    return replace(stroke, points=points)


def apart(points: Array, closed: bool) -> Array:
    """Points (k, 2) with `NEAR` or more from each to the next, the ends of an open line kept.

    Of two that are too near the one goes that shapes the line least, whichever way the line runs: so the two hands
    stay mirror images.
    """
    while len(points) > 2:
        before, after = np.roll(points, 1, axis=0) - points, np.roll(points, -1, axis=0) - points
        near = np.hypot(*after.T) < NEAR
        if not closed:
            near[-1] = False
        crowded = near | np.roll(near, 1)
        if not closed:
            crowded[[0, -1]] = False
        if not crowded.any():
            break
        bend = np.abs(before[:, 0] * after[:, 1] - before[:, 1] * after[:, 0])
        order = np.lexsort((points[:, 1], np.abs(points[:, 0]), bend, ~crowded))
        points = np.delete(points, order[0], axis=0)
    return points


def _uncrossed(points: Array, name: str) -> Array:
    """The contour without the specks that its line encloses where it crosses itself."""
    parts = shapely.get_parts(shapely.make_valid(shapely.Polygon(points)))
    largest = max(parts, key=lambda part: part.area)
    filled = shapely.Polygon(largest.exterior)
    if sum(part.area for part in parts) - 2.0 * largest.area + filled.area > _SPECK:
        raise ContourError(f"drawing {name}: wanted contours that do not cross themselves, got one that does")
    return apart(np.asarray(filled.exterior.coords)[:-1], closed=True)


def _single(strokes: Sequence[Stroke]) -> Iterator[Stroke]:
    """Strokes in their order, without what runs along one that takes precedence."""
    lines = np.array([_line(s) for s in strokes], dtype=object)
    rank = [(_ORDER.index(s.role), i) for i, s in enumerate(strokes)]
    rivals: dict[int, list[int]] = {}
    for one, other in shapely.STRtree(lines).query(lines, predicate="dwithin", distance=NEAR).T.tolist():
        if rank[other] < rank[one]:
            rivals.setdefault(one, []).append(other)
    beside = {j: lines[j].buffer(NEAR, quad_segs=2, cap_style="flat") for j in set(chain(*rivals.values()))}
    for i, stroke in enumerate(strokes):
        cover = shapely.union_all([part for j in rivals.get(i, ()) for part in _along(lines[i], beside[j])])
        if cover.is_empty:
            yield stroke
        elif stroke.role in CUTS:
            if not cover.buffer(NEAR).covers(lines[i]):
                yield stroke  # two pieces may share a stretch of line, and each must stay closed
        else:
            for part in shapely.get_parts(shapely.line_merge(lines[i].difference(cover.buffer(_GRAZE)))):
                if part.length > NEAR:
                    yield replace(stroke, points=np.round(shapely.get_coordinates(part), DIGITS) + 0.0, closed=False)


def _line(stroke: Stroke) -> shapely.LineString:
    return (shapely.LinearRing if stroke.closed else shapely.LineString)(stroke.points)


def _along(line: shapely.LineString, beside: shapely.Polygon) -> list[shapely.Geometry]:
    """The stretches of `line` that run along another, `beside` which it lies, not those that merely cross it."""
    return [part for part in shapely.get_parts(line.intersection(beside)) if part.length > _DOUBLED]
