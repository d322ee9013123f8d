"""What stands round the window of a printed sheet: seams, check bars, and what the sheet belongs to.

Nothing here covers the drawing. The one thing inside the window is a small cross where four sheets meet, and
only where the drawing leaves it room.
"""

from __future__ import annotations

from itertools import product

import numpy as np
import shapely
from reportlab.pdfgen.canvas import Canvas

from ..shop.units import Units
from .marks import BLACK, GREY, PALE, Marks, breadth
from .tiles import OVERLAP, Layout, Shapes, Tile

EDGE = 8.0  # nothing is printed nearer to the paper's edge, mm
STRIP = 7.5  # round the window: marks, bars, what to cut and glue
FOOT = 14.0  # below that: what the page belongs to
MARGINS = (EDGE + STRIP, EDGE + FOOT + STRIP, EDGE + STRIP, EDGE + STRIP)
LEAST_WINDOW = (178.0, 140.0)  # below this the bars and words would meet

_MARK, _ARM = 4.8, 2.5  # a register mark's distance from the window, and half its size
_GAP = _ARM + 2.0  # from a register mark to the next words
_MAP = (55.0, 12.0)  # largest map
_CELL = 7.0  # largest cell of the map


class Furniture(Marks):
    """Draws one sheet's furniture; everything in mm from the lower left corner of what is usable of the paper."""

    def __init__(self, canvas: Canvas, layout: Layout, tile: Tile) -> None:
        super().__init__(canvas)
        self._layout = layout
        self._tile = tile
        x0, y0, x1, y1 = tile.window
        self._left, self._bottom = MARGINS[:2]
        self._right, self._top = self._left + x1 - x0, self._bottom + y1 - y0
        self._seam = self._right - OVERLAP, self._bottom + OVERLAP
        row, column = tile.row, tile.column
        self._before, self._after = layout.find(row, column - 1), layout.find(row, column + 1)
        self._above, self._below = layout.find(row - 1, column), layout.find(row + 1, column)

    def frame(self) -> None:
        """Draw the window's edges, dashed where they are cut."""
        left, bottom, right, top = self._left, self._bottom, self._right, self._top
        for edge, cut in (
            ((left, bottom, left, top), self._before),
            ((left, top, right, top), self._above),
            ((right, bottom, right, top), None),
            ((left, bottom, right, bottom), None),
        ):
            self.pen(BLACK if cut else PALE, width=0.25 if cut else 0.2, dashes=(3.0, 2.0) if cut else ())
            self.canvas.line(*edge)
        self.pen(BLACK)

    def register(self, shapes: Shapes) -> None:
        """Put crosses at the same places of the drawing on all sheets that meet there."""
        xs = [x for x, there in ((self._left, self._before), (self._seam[0], self._after)) if there]
        ys = [y for y, there in ((self._top, self._above), (self._seam[1], self._below)) if there]
        for x, y in product(xs, (self._bottom - _MARK, self._top + _MARK)):
            self.cross(x, y, _ARM)
        for x, y in product((self._left - _MARK, self._right + _MARK), ys):
            self.cross(x, y, _ARM)
        shift = np.array(self._tile.window[:2]) - (self._left, self._bottom)
        for x, y in product(xs, ys):
            if not shapely.dwithin(shapes, shapely.Point(x + shift[0], y + shift[1]), 2.0 * _ARM).any():
                self.cross(x, y, 2.0)

    def seams(self) -> None:
        """Say which edge is cut, which strip is glued, and to which sheet."""
        left, bottom, right, top = self._left, self._bottom, self._right, self._top
        x, y = self._seam
        if self._before:
            self.say(f"cut this edge, glue over {self._before.name}", left + _GAP, top + 2.4)
        if self._after:
            self.say(f"glue strip under {self._after.name}", x - _GAP, top + 2.4, anchor="end")
            self.canvas.rect(x + 0.6, top + 0.8, OVERLAP - 0.6, 1.0, stroke=0, fill=1)
            self.canvas.rect(x + 0.6, bottom - 1.8, OVERLAP - 0.6, 1.0, stroke=0, fill=1)
        if self._above:
            words = f"join rows last: cut top edge, glue over {self._above.name}"
            self.say(words, right + 4.7, top - _GAP, anchor="end", upright=True)
        if self._below:
            words = f"join rows last: glue strip under {self._below.name}"
            self.say(words, right + 4.7, y + _GAP, upright=True)
            self.canvas.rect(right + 0.8, bottom, 1.0, OVERLAP - 0.6, stroke=0, fill=1)
            self.canvas.rect(left - 1.8, bottom, 1.0, OVERLAP - 0.6, stroke=0, fill=1)

    def bars(self, units: Units, corrected: str) -> None:
        """Draw a bar of known length below the window and one beside it; say how to print, and what is corrected."""
        x, y = self._left + _GAP, self._bottom - 5.4
        axes = self._layout.page.axes
        start = x + self.bar(x, y, axes[0], units) + 20.0
        self.say(_advice(self._seam[0] - _GAP - start, corrected), start, y)
        self.bar(self._left - 2.4, self._bottom + OVERLAP + _GAP, axes[1], units, upright=True)

    def foot(self, heading: str, wing: str, identity: str, page: str) -> None:
        """Say what the sheet belongs to and where in the whole it lies."""
        right = self._seam[0]
        self.say(self._tile.name, right, EDGE + 5.4, height=5.0, anchor="end", bold=True)
        self.say(page, right, EDGE + 0.8, anchor="end")
        edge = self._map(right - 28.0)
        room = edge - 5.0 - self._left
        self.say(heading, self._left, EDGE + 9.6, height=3.2, bold=True, room=room)
        self.say(wing, self._left, EDGE + 5.1, room=room)
        self.say(identity, self._left, EDGE + 0.8, room=room)

    def _map(self, right: float) -> float:
        """Draw the sheets as a small grid, this one filled; return its left edge."""
        tiles = self._layout.tiles
        columns, rows = (1 + max(t.column for t in tiles)), (1 + max(t.row for t in tiles))
        x0, y0, x1, y1 = self._tile.window
        shape = (x1 - x0 - OVERLAP) / (y1 - y0 - OVERLAP)
        high = min(_MAP[1] / rows, _MAP[0] / columns / shape, _CELL, _CELL / shape)
        wide = high * shape
        left, top = right - columns * wide, EDGE + (_MAP[1] + rows * high) / 2.0 + 0.4
        for tile in tiles:
            here = tile is self._tile
            self.pen(GREY, width=0.2)
            x, y = left + tile.column * wide, top - (tile.row + 1) * high
            self.canvas.rect(x, y, wide, high, stroke=1, fill=int(here))
        return left


def _advice(room: float, corrected: str) -> str:
    """As much of what to mind in printing as there is room for."""
    least = "Print at 100 %, unscaled"
    both = "; measure both bars before cutting"
    choice = [f"{least}; {corrected}{both}", f"{least}; {corrected}"] if corrected else [f"{least}{both}"]
    return next((words for words in choice if breadth(words) < room), least)
