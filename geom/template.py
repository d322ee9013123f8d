"""The templates that guide a hot wire by hand: boards whose edge lies one radius of the wire inside its middle's way.

A wire rides on the edge, so the foam ends up smaller than the board by half the kerf less the wire's radius; the ways
of the wire's middle (`wire.Run`) already lie half the kerf outside the foam. Both are square to what the wire cuts:
as it crosses the boards aslant, it touches their edge with an ellipse (`wire.aslant`). x and z in mm, as one looks
outwards along the span.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import NDArray

from .block import PIN
from .wire import Bay, Run

Array = NDArray[np.float64]

_BOARD = 12.0  # mm of board left round a pin's hole


class FoldedWay(ValueError):
    """The wire's way crosses itself, so no board can guide it; `y` is the rib plane."""

    def __init__(self, y: float) -> None:
        super().__init__(f"the wire's way crosses itself at rib y = {y:.0f} mm")
        self.y = y


@dataclass(frozen=True)
class Mark:
    """A sync mark: its number, where it stands on the board's edge, and the way into the board."""

    number: int
    place: Array
    inwards: Array


@dataclass(frozen=True)
class Board:
    """One board for one end of a bay.

    Attributes
    ----------
    name
        ``skins``, ``upper``, ``lower``, ``web`` or ``tail``.
    outline
        (k, 2) closed.
    runs
        The runs it guides.
    marks
        Along its edges.
    """

    name: str
    outline: Array
    runs: tuple[Run, ...]
    marks: tuple[Mark, ...]


def boards(bay: Bay, end: int) -> list[Board]:
    """The boards for the inner (0) or outer (1) end of a bay, in the order in which they are used.

    Raises
    ------
    FoldedWay
        If a way of the wire crosses itself.
    """
    made = [_straight(bay, end, run) for run in bay.runs if run.straight]
    skins = [run for run in bay.runs if not run.straight]
    if len(skins) == 2 and bay.region.kind == "aft" and bay.how.passes == "one":
        return [*made, _board(bay, end, "skins", skins, np.concatenate([_way(bay, end, run) for run in skins]))]
    for run in skins:
        way = _way(bay, end, run)
        if run.name != "skins":
            block = bay.ends[end].block
            z = (
                min(block[1], way[:, 1].min() - _BOARD)
                if run.name == "upper"
                else max(block[3], way[:, 1].max() + _BOARD)
            )
            way = np.concatenate([way, [[way[-1, 0], z], [way[0, 0], z]]])
        made.append(_board(bay, end, run.name, [run], way))
    return made


def _way(bay: Bay, end: int, run: Run) -> Array:
    """(k, 2) the way of the middle of a wire square to the board that rides on the same edge as the one aslant."""
    return np.asarray(run.centre[end] - bay.how.wire / 2.0 * (bay.aside(run, end) - run.normals[end]))


def _board(bay: Bay, end: int, name: str, runs: list[Run], ring: Array) -> Board:
    """The board inside a closed way of the middle of a wire square to it."""
    shape, radius = shapely.Polygon(ring), bay.how.wire / 2.0
    if not shape.is_valid:
        raise FoldedWay(bay.ends[end].y)
    inside = shape.buffer(-radius, quad_segs=16)
    if not isinstance(inside, shapely.Polygon) or inside.is_empty:
        raise FoldedWay(bay.ends[end].y)
    marks = [
        Mark(number, edge[i], -run.normals[end][i])
        for run in runs
        for edge in [run.centre[end] - radius * bay.aside(run, end)]
        for number, i in run.marks
    ]
    return Board(name, np.asarray(inside.exterior.coords)[:-1], tuple(runs), tuple(marks))


def _straight(bay: Bay, end: int, run: Run) -> Board:
    """A board with one straight edge, large enough for both pins."""
    edge = run.centre[end] - bay.how.wire / 2.0 * bay.aside(run, end)
    pins = shapely.MultiPoint(bay.ends[end].pins).buffer(_BOARD + PIN / 2.0)
    inwards = edge[[0, -1]] - 2.0 * _BOARD * run.normals[end][[0, -1]]
    shape = shapely.union(pins, shapely.Polygon([edge[0], edge[-1], inwards[1], inwards[0]])).convex_hull
    beyond = edge[[0, -1]] + 1e3 * run.normals[end][[0, -1]]
    kept = shape.difference(shapely.Polygon([*_longer(edge[[0, -1]]), *_longer(beyond[::-1])])).simplify(1e-6)
    return Board(run.name, shapely.get_coordinates(kept)[:-1], (run,), ())


def _longer(line: Array) -> Array:
    """A line (2, 2) carried on a long way at both ends."""
    way = 1e3 * (line[1] - line[0]) / np.linalg.norm(line[1] - line[0])
    return np.stack([line[0] - way, line[1] + way])
