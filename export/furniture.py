"""What stands round the window of a printed sheet: seams, check bars, and what the sheet belongs to.

Nothing here covers the drawing. The one thing inside the window is a small cross where four sheets meet, and
only where the drawing leaves it room.
"""

from __future__ import annotations

from itertools import product
from typing import Literal

import numpy as np
import shapely
from reportlab.pdfbase.pdfmetrics import stringWidth
from reportlab.pdfgen.canvas import Canvas

from ..geom import lettering
from ..geom.drawing import Anchor
from .style import MILLIMETRES_PER_INCH
from .tiles import OVERLAP, Layout, Shapes, Tile

EDGE = 8.0  # nothing is printed nearer to the paper's edge, mm
STRIP = 7.5  # round the window: marks, bars, what to cut and glue
FOOT = 14.0  # below that: what the page belongs to
MARGINS = (EDGE + STRIP, EDGE + FOOT + STRIP, EDGE + STRIP, EDGE + STRIP)
LEAST_WINDOW = (178.0, 140.0)  # below this the bars and words would meet
CAP = 0.718  # height of Helvetica's capitals, in font sizes

_TEXT = 2.3  # height of capitals, mm
_MARK, _ARM = 4.8, 2.5  # a register mark's distance from the window, and half its size
_GAP = _ARM + 2.0  # from a register mark to the next words
_MAP = (55.0, 12.0)  # largest map
_CELL = 7.0  # largest cell of the map
_BLACK, _GREY, _PALE = "#000000", "#505050", "#b0b0b0"
_BARS = {"mm": (100.0, 10, "100 mm"), "in": (4.0 * MILLIMETRES_PER_INCH, 8, "4 in")}


class Furniture:
    """Draws one sheet's furniture; everything in mm from the lower left corner of the paper."""

    def __init__(self, canvas: Canvas, layout: Layout, tile: Tile) -> None:
        self._canvas = canvas
        self._layout = layout
        self._tile = tile
        self._left, self._bottom = MARGINS[:2]
        self._right, self._top = layout.width - MARGINS[2], layout.height - MARGINS[3]
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
            self._pen(_BLACK if cut else _PALE, width=0.25 if cut else 0.2, dashes=(3.0, 2.0) if cut else ())
            self._canvas.line(*edge)
        self._pen(_BLACK)

    def register(self, shapes: Shapes) -> None:
        """Put crosses at the same places of the drawing on all sheets that meet there."""
        xs = [x for x, there in ((self._left, self._before), (self._seam[0], self._after)) if there]
        ys = [y for y, there in ((self._top, self._above), (self._seam[1], self._below)) if there]
        for x, y in product(xs, (self._bottom - _MARK, self._top + _MARK)):
            self._cross(x, y, _ARM)
        for x, y in product((self._left - _MARK, self._right + _MARK), ys):
            self._cross(x, y, _ARM)
        shift = np.array(self._tile.window[:2]) - (self._left, self._bottom)
        for x, y in product(xs, ys):
            if not shapely.dwithin(shapes, shapely.Point(x + shift[0], y + shift[1]), 2.0 * _ARM).any():
                self._cross(x, y, 2.0)

    def seams(self) -> None:
        """Say which edge is cut, which strip is glued, and to which sheet."""
        left, bottom, right, top = self._left, self._bottom, self._right, self._top
        x, y = self._seam
        if self._before:
            self._say(f"cut this edge, glue over {self._before.name}", left + _GAP, top + 2.4)
        if self._after:
            self._say(f"glue strip under {self._after.name}", x - _GAP, top + 2.4, anchor="end")
            self._canvas.rect(x + 0.6, top + 0.8, OVERLAP - 0.6, 1.0, stroke=0, fill=1)
            self._canvas.rect(x + 0.6, bottom - 1.8, OVERLAP - 0.6, 1.0, stroke=0, fill=1)
        if self._above:
            words = f"join rows last: cut top edge, glue over {self._above.name}"
            self._say(words, right + 4.7, top - _GAP, anchor="end", upright=True)
        if self._below:
            words = f"join rows last: glue strip under {self._below.name}"
            self._say(words, right + 4.7, y + _GAP, upright=True)
            self._canvas.rect(right + 0.8, bottom, 1.0, OVERLAP - 0.6, stroke=0, fill=1)
            self._canvas.rect(left - 1.8, bottom, 1.0, OVERLAP - 0.6, stroke=0, fill=1)

    def bars(self, units: Literal["mm", "in"]) -> None:
        """Draw a bar of known length below the window and one beside it."""
        length, parts, words = _BARS[units]
        x, y = self._left + _GAP, self._bottom - 5.4
        self._bar(x, y, length, parts, words)
        self._say(self._advice(self._seam[0] - _GAP - (start := x + length + 18.0)), start, y)
        self._bar(self._left - 2.4, self._bottom + OVERLAP + _GAP, length, parts, words, upright=True)

    def _advice(self, room: float) -> str:
        short, more = "Print at 100 %, unscaled", "; measure both bars before cutting"
        return short + more if stringWidth(short + more, "Helvetica", _TEXT / CAP) < room else short

    def foot(self, heading: str, wing: str, identity: str, page: str) -> None:
        """Say what the sheet belongs to and where in the whole it lies."""
        right = self._seam[0]
        self._say(self._tile.name, right, EDGE + 5.4, height=5.0, anchor="end", bold=True)
        self._say(page, right, EDGE + 0.8, anchor="end")
        edge = self._map(right - 28.0)
        room = edge - 5.0 - self._left
        self._say(heading, self._left, EDGE + 9.6, height=3.2, bold=True, room=room)
        self._say(wing, self._left, EDGE + 5.1, room=room)
        self._say(identity, self._left, EDGE + 0.8, room=room)

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
            self._pen(_GREY, width=0.2)
            x, y = left + tile.column * wide, top - (tile.row + 1) * high
            self._canvas.rect(x, y, wide, high, stroke=1, fill=int(here))
        return left

    def _pen(self, colour: str, *, width: float = 0.25, dashes: tuple[float, ...] = ()) -> None:
        self._canvas.setStrokeColor(colour)
        self._canvas.setFillColor(colour)
        self._canvas.setLineWidth(width)
        self._canvas.setDash(list(dashes))

    def _cross(self, x: float, y: float, arm: float) -> None:
        self._pen(_BLACK)
        self._canvas.line(x - arm, y, x + arm, y)
        self._canvas.line(x, y - arm, x, y + arm)

    def _bar(self, x: float, y: float, length: float, parts: int, words: str, *, upright: bool = False) -> None:
        self._pen(_BLACK, width=0.25)
        self._canvas.saveState()
        self._canvas.setLineCap(0)
        along, across = ((0.0, 1.0), (-1.0, 0.0)) if upright else ((1.0, 0.0), (0.0, 1.0))
        self._canvas.transform(*along, *across, x, y)
        self._canvas.line(0.0, 0.0, length, 0.0)
        for part in range(parts + 1):
            at = length * part / parts
            self._canvas.line(at, 0.0, at, 1.5 if part % parts else 3.0)
        self._canvas.restoreState()
        end = (x, y + length + 2.0) if upright else (x + length + 2.0, y)
        self._say(words, *end, upright=upright)

    def _say(
        self,
        words: str,
        x: float,
        y: float,
        *,
        height: float = _TEXT,
        anchor: Anchor = "start",
        bold: bool = False,
        upright: bool = False,
        room: float = np.inf,
    ) -> None:
        """Write one line; what is too long for `room` mm is cut short with dots."""
        font, size = ("Helvetica-Bold" if bold else "Helvetica"), height / CAP
        words = lettering.plain(words)
        if stringWidth(words, font, size) > room:
            while words and stringWidth(words + "...", font, size) > room:
                words = words[:-1]
            words = words.rstrip() + "..."
        self._pen(_BLACK)
        self._canvas.setFont(font, size)
        self._canvas.saveState()
        self._canvas.translate(x, y)
        if upright:
            self._canvas.transform(0.0, 1.0, -1.0, 0.0, 0.0, 0.0)
        (self._canvas.drawRightString if anchor == "end" else self._canvas.drawString)(0.0, 0.0, words)
        self._canvas.restoreState()
