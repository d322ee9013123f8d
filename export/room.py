"""Room for a drawing's title and notes on the sheets that its shape takes anyway, off the seams and clear of marks."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import groupby, pairwise, product

import numpy as np
import shapely
from numpy.typing import NDArray
from scipy import ndimage

from ..geom import lettering
from ..geom.drawing import Label
from ..shop.sheets.layout import BETWEEN, LEADING, wrapped
from .tiles import Layout, Shapes

Cell = Sequence[int]  # column and row
Sheet = tuple[Cell, Cell]  # first and last cell of what no other sheet shows
Paragraph = tuple[str, float]  # text, height of lettering
Line = tuple[str, float, float, int]  # text, height, how far its foot lies under the top of the block, paragraph

_CELL = 2.5  # mm
_WIDTHS = (160.0, 240.0, 145.0, 115.0, 90.0)  # mm that lines are wrapped to, as they are tried
_SMALL = 0.8  # of their lettering, where it is tight
_CUTS = 3  # places near the middle where they may be parted
_LAYOUTS = 6  # of those that take as little paper, the first of which are looked through
_AIR = 2.0  # mm from the edges of what a sheet shows


def paragraphs(labels: Sequence[Label]) -> list[Paragraph]:
    """Title and notes as they were before they were wrapped."""
    found = groupby((label for label in labels if label.paragraph), key=lambda label: label.paragraph)
    lines = (list(group) for _, group in found)
    return [(" ".join(label.text for label in group), group[0].height) for group in lines]


class Block:
    """Some paragraphs, wrapped."""

    def __init__(self, texts: Sequence[tuple[int, Paragraph]], wide: float, scale: float = 1.0) -> None:
        self.lines: list[Line] = []
        self.wide = self.high = 0.0
        for number, (text, full) in texts:
            height = scale * full
            for line in wrapped(text, height, wide):
                self.high += LEADING * height
                self.lines.append((line, height, self.high, number))
                self.wide = max(self.wide, lettering.width(line, height))
            self.high += BETWEEN * height
        self.high -= BETWEEN * height

    @property
    def cells(self) -> tuple[int, int]:
        """Cells up and across that it covers."""
        up, across = (int(np.ceil(size / _CELL)) for size in (self.high, self.wide))
        return up, across

    def at(self, x: float, y: float) -> list[Label]:
        """Its lines with their upper left corner in (x, y)."""
        return [Label(text, x, y - down, height, paragraph=number) for text, height, down, number in self.lines]


class Room:
    """What the marks of a drawing (shapes) leave free on the sheets of its layouts."""

    def __init__(self, shapes: Shapes, layouts: Sequence[Layout]) -> None:
        alone = [(layout, layout.alone(tile)) for layout in layouts[:_LAYOUTS] for tile in layout.tiles]
        windows = np.array([window for _, window in alone])
        self._corner = windows[:, :2].min(axis=0) - _AIR
        low = np.ceil((windows[:, :2] + _AIR - self._corner) / _CELL).astype(int)
        high = np.floor((windows[:, 2:] - _AIR - self._corner) / _CELL).astype(int)
        self._sheets = [(layout, (a, b)) for (layout, _), a, b in zip(alone, low.tolist(), high.tolist(), strict=True)]
        inked = np.zeros(high.max(axis=0)[::-1] + 1, dtype=bool)
        near = shapely.get_coordinates(shapely.segmentize(shapes, _CELL))
        column, row = ((near - self._corner) / _CELL).astype(int).T
        on = (column >= 0) & (column < inked.shape[1]) & (row >= 0) & (row < inked.shape[0])
        inked[row[on], column[on]] = True
        self._inked = ndimage.binary_dilation(inked, np.ones((3, 3), dtype=bool))

    def find(self, texts: Sequence[Paragraph]) -> tuple[Layout, list[Label]] | None:
        """A layout with room for all paragraphs, and their lines where they go; None if there is none.

        Beside the pieces, else within them, in one block; else in two, on one sheet or on one and the next.
        """
        whole, halves = list(_wholes(texts)), list(_halves(texts))
        one = [(layout, (sheet, sheet)) for layout, sheet in self._sheets]
        two = [(layout, (a, b)) for (layout, a), (other, b) in pairwise(self._sheets) if layout is other]
        tries: tuple[tuple[NDArray[np.bool_], list[list[Block]], list[tuple[Layout, tuple[Sheet, Sheet]]]], ...] = (
            (ndimage.binary_fill_holes(self._inked), whole, one),
            (self._inked, whole, one),
            (self._inked, halves, one),
            (self._inked, halves, two),
        )
        for taken, ways, places in tries:
            sums = np.pad(taken.cumsum(axis=0).cumsum(axis=1), ((1, 0), (1, 0)))
            for blocks, (layout, sheets) in product(ways, places):
                if corners := self._corners(sums, sheets, blocks):
                    lines = (block.at(x, y) for block, (x, y) in zip(blocks, corners, strict=True))
                    return layout, [label for some in lines for label in some]
        return None

    def _corners(
        self, sums: NDArray[np.intp], sheets: Sequence[Sheet], blocks: Sequence[Block]
    ) -> list[tuple[float, float]]:
        """Upper left corners of the blocks on a sheet each, as high as they go; none if they do not fit."""
        found: list[tuple[int, int, int, int]] = []
        for block, (low, high) in zip(blocks, sheets, strict=False):
            up, across = block.cells
            rows, columns = high[1] - low[1] - up + 1, high[0] - low[0] - across + 1
            if min(rows, columns) < 1:
                return []
            y, x = slice(low[1], low[1] + rows), slice(low[0], low[0] + columns)
            above, right = slice(y.start + up, y.stop + up), slice(x.start + across, x.stop + across)
            free = sums[above, right] - sums[above, x] - sums[y, right] + sums[y, x] == 0
            if not free.any():
                return []
            at = np.argwhere(free) + low[::-1]
            for row, column, tall, wide in found:  # further down, or to the right and no higher
                at = at[(at[:, 0] + up <= row) | ((at[:, 1] >= column + wide) & (at[:, 0] + up <= row + tall))]
            if not len(at):
                return []
            row, column = at[np.lexsort((at[:, 1], -at[:, 0]))[0]].tolist()
            found.append((row, column, up, across))
        x0, y0 = self._corner.tolist()
        return [(x0 + column * _CELL, y0 + (row + tall) * _CELL) for row, column, tall, _ in found]


def _wholes(texts: Sequence[Paragraph]) -> Iterator[list[Block]]:
    """All paragraphs in one block, in full and in smaller lettering, in several widths."""
    numbered = list(enumerate(texts, start=1))
    for scale, wide in product((1.0, _SMALL), _WIDTHS):
        yield [Block(numbered, wide, scale)]


def _halves(texts: Sequence[Paragraph]) -> Iterator[list[Block]]:
    """The same in two blocks."""
    numbered = list(enumerate(texts, start=1))
    cuts = sorted(range(1, len(texts)), key=lambda cut: abs(2 * cut - len(texts)))[:_CUTS]
    for scale, wide, cut in product((1.0, _SMALL), _WIDTHS[:3], cuts):
        yield [Block(numbered[:cut], wide, scale), Block(numbered[cut:], wide, scale)]


def own_pages(texts: Sequence[Paragraph], wide: float, high: float) -> Iterator[list[Label]]:
    """Title and notes for pages of their own: lines with the upper left corner of what a page shows in (0, 0)."""
    numbered = list(enumerate(texts, start=1))
    while numbered:
        count = len(numbered)
        while count > 1 and Block(numbered[:count], wide - 2.0 * _AIR).high > high - 2.0 * _AIR:
            count -= 1
        yield Block(numbered[:count], wide - 2.0 * _AIR).at(_AIR, -_AIR)
        numbered = numbered[count:]
