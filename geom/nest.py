"""Laying pieces out on sheets of stock, along the grain, few sheets first; mm.

A piece takes its bounding rectangle, which is packed by a general library. Two long pieces that taper are first laid
head to tail where that saves room and they may be turned.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

import numpy as np
import rpack
import shapely
from numpy.typing import NDArray

Array = NDArray[np.float64]

_UNIT = 0.1  # mm, the library packs whole numbers
_LONG = 5.0  # times as long as wide: worth laying head to tail
_SAVES = 0.97  # of the room of both


@dataclass(frozen=True)
class Laid:
    """Where a piece lies: its number, whether it is turned end for end, and the lower left corner of its bounds."""

    piece: int
    turned: bool
    corner: tuple[float, float]


class TooLarge(ValueError):
    """A piece that fits no sheet."""

    def __init__(self, piece: int) -> None:
        super().__init__(f"piece {piece} fits no sheet")
        self.piece = piece


@dataclass(frozen=True)
class _Block:
    """One piece, or two head to tail, that are moved together; what they take, clearance included."""

    parts: tuple[Laid, ...]
    wide: float
    high: float

    @property
    def area(self) -> float:
        return self.wide * self.high

    @property
    def size(self) -> tuple[int, int]:
        return _whole(self.wide), _whole(self.high)


def nest(
    outlines: Sequence[Array], sheet: tuple[float, float], *, margin: float, apart: float, turn: bool
) -> list[list[Laid]]:
    """Lay pieces out on as few sheets as are found to hold them.

    Parameters
    ----------
    outlines
        (k, 2) closed outlines, the grain running along x.
    sheet
        Length along the grain, and width.
    margin, apart
        Kept free along the sheet's edges, and between pieces.
    turn
        Whether a piece may lie the other way round.

    Returns
    -------
    list of lists
        For each sheet what lies on it.

    Raises
    ------
    TooLarge
        If a piece is larger than a sheet.
    """
    shapes = [_at_origin(shapely.Polygon(outline)) for outline in outlines]
    room = tuple(int((v - 2.0 * margin + apart) / _UNIT + 1e-6) for v in sheet)
    single = [_single(i, shape, apart) for i, shape in enumerate(shapes)]
    for block in single:
        if block.size[0] > room[0] or block.size[1] > room[1]:
            raise TooLarge(block.parts[0].piece)
    tries = [single]
    if turn:
        paired = list(_paired(single, shapes, apart, room))
        tries += [paired] if len(paired) < len(single) else []
    best = min((_filled(blocks, room) for blocks in tries), key=_taken)
    return [[_moved(part, corner, margin) for block, corner in found for part in block.parts] for found in best]


_Filled = list[tuple[_Block, tuple[float, float]]]


def _filled(blocks: Sequence[_Block], room: tuple[int, ...]) -> list[_Filled]:
    """First fit, largest first: each block goes to the first sheet that can be packed again with it."""
    sheets: list[list[_Block]] = []
    places: list[list[tuple[int, int]]] = []
    for block in sorted(blocks, key=lambda b: (-b.area, b.parts[0].piece)):
        for i, there in enumerate(sheets):
            if (found := _packed([*there, block], room)) is not None:
                there.append(block)
                places[i] = found
                break
        else:
            sheets.append([block])
            places.append([(0, 0)])
    return [
        [(block, (x * _UNIT, y * _UNIT)) for block, (x, y) in zip(there, found, strict=True)]
        for there, found in zip(sheets, places, strict=True)
    ]


def _packed(blocks: Sequence[_Block], room: tuple[int, ...]) -> list[tuple[int, int]] | None:
    """Lower left corners in a sheet; None if they are not found to fit."""
    sizes = [block.size for block in blocks]
    if sum(w * h for w, h in sizes) > room[0] * room[1]:
        return None
    try:
        return list(rpack.pack(sizes, max_width=room[0], max_height=room[1]))
    except rpack.PackingImpossibleError:
        return None


def _taken(sheets: list[_Filled]) -> tuple[int, float]:
    """How many sheets, and how much of the last one: what is compared."""
    last = sheets[-1]
    reach = [(x + block.wide, y + block.high) for block, (x, y) in last]
    return len(sheets), max(x for x, _ in reach) * max(y for _, y in reach)


def _single(i: int, shape: shapely.Polygon, apart: float) -> _Block:
    _, _, x1, y1 = shape.bounds
    return _Block((Laid(i, False, (0.0, 0.0)),), x1 + apart, y1 + apart)


def _paired(
    single: Sequence[_Block], shapes: Sequence[shapely.Polygon], apart: float, room: tuple[int, ...]
) -> Iterable[_Block]:
    """The blocks, long ones of them laid two and two where that saves room, those that save most first."""
    long = [i for i, block in enumerate(single) if block.wide > _LONG * block.high]
    pairs = [
        pair
        for i in long
        for j in long
        if i < j and (pair := _head_to_tail(i, j, shapes, apart)).area < _SAVES * (single[i].area + single[j].area)
    ]
    used: set[int] = set()
    for pair in sorted(pairs, key=lambda p: p.area - sum(single[part.piece].area for part in p.parts)):
        both = {part.piece for part in pair.parts}
        if not both & used and pair.size[0] <= room[0] and pair.size[1] <= room[1]:
            used |= both
            yield pair
    yield from (block for i, block in enumerate(single) if i not in used)


def _head_to_tail(i: int, j: int, shapes: Sequence[shapely.Polygon], apart: float) -> _Block:
    """Piece j turned and laid on piece i as near as it may come."""
    below, above = shapes[i], _at_origin(shapely.affinity.rotate(shapes[j], 180.0))
    wide = max(below.bounds[2], above.bounds[2])
    best = None
    grown = below.buffer(apart, join_style="mitre")
    for shift in (0.0, below.bounds[2] - above.bounds[2]):
        up = _stacked(grown, shapely.affinity.translate(above, shift, 0.0))
        left, foot = min(0.0, shift), min(0.0, up)
        parts = (Laid(i, False, (-left, -foot)), Laid(j, True, (shift - left, up - foot)))
        block = _Block(parts, wide + apart, max(below.bounds[3], up + above.bounds[3]) - foot + apart)
        best = block if best is None or block.high < best.high else best
    assert best is not None
    return best


def _stacked(below: shapely.Polygon, above: shapely.Polygon) -> float:
    """How far `above` is to be lifted until it just lies on `below`: found at a corner of one of them."""
    rings = [np.asarray(shape.exterior.coords) for shape in (below, above)]
    low, high = max(below.bounds[0], above.bounds[0]), min(below.bounds[2], above.bounds[2])
    x = np.unique(np.clip(np.concatenate([ring[:, 0] for ring in rings]), low, high))
    return float(np.max(_highest(rings[0], x) + _highest(rings[1] * [1.0, -1.0], x)))


def _highest(ring: Array, x: Array) -> Array:
    """(m,) highest y of a ring (k, 2), its first point repeated, over places x (m,) between its ends."""
    (x0, y0), (x1, y1) = ring[:-1].T, ring[1:].T
    over = (x[:, None] >= np.minimum(x0, x1)) & (x[:, None] <= np.maximum(x0, x1))
    upright = x0 == x1
    share = (x[:, None] - x0) / np.where(upright, 1.0, x1 - x0)
    y = np.where(upright, np.maximum(y0, y1), y0 + share * (y1 - y0))
    return np.asarray(np.max(y, axis=1, where=over, initial=-np.inf))


def _moved(part: Laid, corner: tuple[float, float], margin: float) -> Laid:
    x, y = (margin + a + b for a, b in zip(part.corner, corner, strict=True))
    return replace(part, corner=(x, y))


def _at_origin(shape: shapely.Polygon) -> shapely.Polygon:
    return shapely.affinity.translate(shape, -shape.bounds[0], -shape.bounds[1])


def _whole(length: float) -> int:
    return int(np.ceil(length / _UNIT - 1e-6))
