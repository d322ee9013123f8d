"""The way of a wire whose two ends a machine moves in two planes outside the block.

Machine coordinates: both ends have a horizontal axis that runs aft and a vertical one that runs up, mm, from 0 to the
machine's travel. The wire starts and ends ahead of the block, above it.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from .wire import Bay

Array = NDArray[np.float64]

_RATIO = 10.0  # an end that all but stands still does not drive the other faster than so many times the stated speed


class BetweenPlanes(ValueError):
    """The block does not lie between the planes; `plane` 0 or 1 is at fault."""

    def __init__(self, plane: int, length: float) -> None:
        super().__init__(f"the block is {length:.1f} mm long")
        self.plane, self.length = plane, length


class OffTravel(ValueError):
    """A position beyond the machine's travel: in which plane (0 or 1), along which axis (0 or 1), how far."""

    def __init__(self, plane: int, axis: int, reach: float) -> None:
        super().__init__(f"{reach:.1f} mm")
        self.plane, self.axis, self.reach = plane, axis, reach


@dataclass(frozen=True)
class Machine:
    """What moves the wire.

    Attributes
    ----------
    planes
        Where its two planes stand along the span, from the block's inner end outwards: one negative, one beyond the
        block.
    place
        Machine coordinates of the block's front lower corner at its inner end.
    travel
        How far both ends can go, horizontally and vertically.
    speed
        Of the slower end of the wire in the foam, mm/s.
    """

    planes: tuple[float, float]
    place: tuple[float, float]
    travel: tuple[float, float]
    speed: float


@dataclass(frozen=True)
class Path:
    """Moves of the wire, one after another.

    Attributes
    ----------
    run
        For each move the run it belongs to; "" for those through the air.
    mark
        (k,) number of the sync mark it ends at; 0 for none.
    ends, planes
        (k, 2, 2) where each move ends, at the block's two ends and in the machine's two planes: horizontal, vertical.
    seconds
        (k,) how long each move through the foam takes; NaN for those through the air.
    """

    run: tuple[str, ...]
    mark: NDArray[np.int64]
    ends: Array
    planes: Array
    seconds: Array

    @property
    def cutting(self) -> NDArray[np.bool_]:
        """(k,) which moves go through the foam."""
        return np.isfinite(self.seconds)

    @cached_property
    def feed(self) -> Array:
        """(k, 2) speed of the two ends in the machine's planes on each move, mm/min; NaN through the air."""
        way = np.linalg.norm(np.diff(self.planes, axis=0, prepend=self.planes[:1]), axis=2)
        return np.asarray(60.0 * way / self.seconds[:, None])

    @property
    def minutes(self) -> float:
        """Time in the foam."""
        return float(np.nansum(self.seconds)) / 60.0


def path(bay: Bay, machine: Machine) -> Path:
    """All runs of a bay as one path.

    A straight run goes down through the block and back up its own slit. Between runs the wire is lifted over the block.
    Where both ends would stand still, as where a fold of the wire's way is cut off, there is no move.

    Raises
    ------
    BetweenPlanes
        If the block does not lie between the planes.
    OffTravel
        If the machine cannot reach a position.
    """
    low, high = machine.planes
    if low > 0.0 or high < bay.length:
        raise BetweenPlanes(int(low <= 0.0), bay.length)
    corner = np.array(bay.ends[0].block[:2]) - machine.place
    over = np.array([end.block[3] + bay.how.runway for end in bay.ends]) - corner[1]
    moves: list[tuple[str, int, Array, bool]] = [("", 0, np.column_stack([np.zeros(2), over]), False)]
    for run in bay.runs:
        centre = np.moveaxis(run.centre, 1, 0) - corner  # (points, ends, 2)
        moving = np.append(True, np.any(np.diff(centre, axis=0) != 0.0, axis=(1, 2)))
        centre, stops = centre[moving], np.cumsum(moving) - 1
        marks = {int(stops[index]): number for number, index in run.marks}
        above = np.column_stack([centre[0, :, 0], over])
        moves += [("", 0, above, False), ("", 0, centre[0], False)]
        moves += [(run.name, marks.get(i, 0), place, True) for i, place in enumerate(centre[1:], start=1)]
        if run.straight:
            moves += [(run.name, 0, place, True) for place in centre[-2::-1]]
        else:
            moves.append(("", 0, np.column_stack([centre[-1, :, 0], over]), False))
    moves.append(moves[0])
    ends = np.array([move[2] for move in moves])
    share = np.array(machine.planes) / bay.length
    planes = ends[:, :1] + share[:, None] * (ends[:, 1:] - ends[:, :1])
    _refuse_far(planes, machine.travel)
    way = np.linalg.norm(np.diff(ends, axis=0, prepend=ends[:1]), axis=2)
    seconds = np.maximum(way.min(axis=1), way.max(axis=1) / _RATIO) / machine.speed
    cutting = np.array([move[3] for move in moves])
    return Path(
        tuple(move[0] for move in moves),
        np.array([move[1] for move in moves]),
        ends,
        planes,
        np.where(cutting, seconds, np.nan),
    )


def _refuse_far(planes: Array, travel: tuple[float, float]) -> None:
    beyond = np.maximum(planes - np.array(travel), -planes)
    worst = np.unravel_index(int(beyond.argmax()), beyond.shape)
    if beyond[worst] > 1e-9:
        raise OffTravel(int(worst[1]), int(worst[2]), float(planes[worst]))
