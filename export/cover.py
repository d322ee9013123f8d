"""The cover: which drawings there are, on how many pages, of which revision; what to mind when printing and cutting."""

from __future__ import annotations

import io
from collections.abc import Sequence
from dataclasses import dataclass

from reportlab.pdfgen.canvas import Canvas

from ..shop.stock import PAPERS
from ..shop.wording import CAUTIONS
from .marks import GREY, Marks, begin, breadth, open_file, wrapped
from .pdf import Print
from .style import one_line
from .tiles import Page

NAME = "cover"
_LARGEST = 432.0  # longer paper is left for the drawings, mm
_EDGE, _LINE = 15.5, 4.6  # margin, and from line to line, mm
_HEAD = 5.0  # height of the wing's name, mm
_COLUMNS = ("drawing", "hand", "size", "pages", "file")


@dataclass(frozen=True)
class Entry:
    """One drawing as the cover lists it: its title, hand, size in words, count of pages and file."""

    title: str
    hand: str
    size: str
    pages: int
    path: str

    def cells(self) -> tuple[str, ...]:
        """What stands in each column."""
        return self.title, self.hand, self.size, str(self.pages), self.path


@dataclass(frozen=True)
class Revision:
    """What the drawings are of: the wing's name, the stamp of its file, and the day stated there, if any."""

    wing: str
    stamp: str
    day: str = ""


def render(entries: Sequence[Entry], how: Print, of: Revision) -> bytes:
    """The cover as a PDF file, on the drawings' paper unless that is a roll or larger than A3 and tabloid."""
    count = 1
    while True:  # a second time if the list turns out to take more pages
        buffer = io.BytesIO()
        canvas = open_file(buffer, one_line(f"{of.wing}: cover"), f"revision {of.stamp}")
        cover = _Cover(canvas, _page(how), how, of, count)
        cover.head(entries)
        cover.printing()
        cover.cautions()
        cover.table(entries)
        cover.finish()
        canvas.save()
        if cover.number == count:
            return buffer.getvalue()
        count = cover.number


def _page(how: Print) -> Page:
    wide, high = sorted((how.paper.width, how.paper.height))
    if high <= _LARGEST:
        return Page(wide, high, "xy", how.printed)
    other = PAPERS["letter" if how.units == "in" else "a4"]
    return Page(other.width, other.height)


class _Cover(Marks):
    """Writes from the top of a page downwards, and goes on to another page when one is full."""

    def __init__(self, canvas: Canvas, page: Page, how: Print, of: Revision, count: int) -> None:
        super().__init__(canvas)
        self._page, self._how, self._wing, self._of, self._count = page, how, one_line(of.wing), of, count
        self._room = page.usable[0] - 2.0 * _EDGE
        self.number = 0
        self._y = 0.0
        self._begin()

    def _begin(self) -> None:
        begin(self.canvas, self._page)
        self.number += 1
        self._y = self._page.usable[1] - _EDGE

    def finish(self) -> None:
        """Put the foot under the page."""
        foot = f"revision {self._of.stamp}, cover, page {self.number} of {self._count}"
        self.say(foot, _EDGE + self._room, _EDGE - 6.0, anchor="end")
        self.say(self._wing, _EDGE, _EDGE - 6.0, room=self._room - breadth(foot) - 5.0)
        self.canvas.showPage()

    def _line(self, words: str, *, height: float = 2.5, bold: bool = False) -> None:
        self._y -= height
        self.say(words, _EDGE, self._y, height=height, bold=bold, room=self._room)
        self._y -= _LINE - 2.5

    def _text(self, words: str) -> None:
        for line in wrapped(words, self._room, 2.5):
            self._line(line)
        self._y -= 0.8

    def head(self, entries: Sequence[Entry]) -> None:
        """Say what this is."""
        self._line(self._wing or "wing panel", height=_HEAD, bold=True)
        self._y -= 2.0
        day = f", wing file of {self._of.day}" if self._of.day else ""
        self._line(f"Templates at full size, revision {self._of.stamp}{day}", height=3.2, bold=True)
        self._y -= 1.5
        count = sum(entry.pages for entry in entries)
        self._line(f"{len(entries)} drawings on {count} pages of {self._how.paper.name} paper, listed below")
        self._y -= 3.0

    def printing(self) -> None:
        """Say how to print true, with the bars to measure."""
        self._line("Printing", height=3.2, bold=True)
        own = {self._page.wide, self._page.high} == {self._how.paper.width, self._how.paper.height}
        where = "the bars below" if own else "the bars on the drawings"
        self._text(
            f"Print at 100 %, unscaled, on one side. Then measure {where}: x runs across the paper held upright, or "
            "across a roll, y along it. If one is off, write what both measure into the wing file, [paper] measured = "
            "[x, y], and print again: every page makes up for it, whichever way it lies on the paper."
        )
        if self._how.corrected:
            self._text(f"This print is {self._how.corrected}: its own bars should measure true now.")
        if own:
            self._y -= 8.0
            self.bar(_EDGE, self._y, "x", self._how.units)
            self.bar(_EDGE - 2.4, _EDGE, "y", self._how.units, upright=True)
            self._y -= 2.0
        self._y -= 3.0

    def cautions(self) -> None:
        """Say what can hurt."""
        self._line("Cautions", height=3.2, bold=True)
        for caution in CAUTIONS:
            self._text(caution)
        self._y -= 3.0

    def table(self, entries: Sequence[Entry]) -> None:
        """List the drawings, on further pages when this one is full."""
        rows = [entry.cells() for entry in entries]
        widths = [max(breadth(cell) for cell in column) + 5.0 for column in zip(_COLUMNS, *rows, strict=True)]
        first = self._room - sum(widths[1:])
        starts = [0.0]
        for width in (min(widths[0], first), *widths[1:-1]):
            starts.append(starts[-1] + width)
        heading = True
        for row in rows:
            if self._y < _EDGE + 2.0 * _LINE:
                self.finish()
                self._begin()
                heading = True
            if heading:
                self._row(_COLUMNS, starts, first, bold=True)
                heading = False
            self._row(row, starts, first)

    def _row(self, cells: Sequence[str], starts: Sequence[float], first: float, *, bold: bool = False) -> None:
        self._y -= 2.3
        for cell, start in zip(cells, starts, strict=True):
            room = first - 2.0 if start == 0.0 else self._room - start
            self.say(cell, _EDGE + start, self._y, bold=bold, room=room)
        self.pen(GREY, width=0.2)
        self.canvas.line(_EDGE, self._y - 1.1, _EDGE + self._room, self._y - 1.1)
        self._y -= _LINE - 2.3
