"""Words, crosses and bars of known length on a printed page, in mm of the print."""

from __future__ import annotations

import io
import unicodedata
from collections.abc import Iterator, Sequence

import numpy as np
from reportlab.lib.colors import Color, HexColor
from reportlab.pdfbase.pdfmetrics import stringWidth
from reportlab.pdfgen.canvas import Canvas

from ..geom import lettering
from ..geom.drawing import Anchor
from ..shop.stock import CHECK_BARS
from ..shop.units import MM_PER_INCH, Units
from .tiles import Page

CAP = 0.718  # height of Helvetica's capitals, in font sizes
TEXT = 2.3  # height of capitals, mm
BLACK, GREY, PALE = map(HexColor, ("#000000", "#505050", "#b0b0b0"))
_BARS = {"mm": (10, "100 mm"), "in": (8, "4 in")}
_POINT = MM_PER_INCH / 72.0  # PDF's unit (ISO 32000-1, 8.3.2.3), in mm


def open_file(buffer: io.BytesIO, heading: str, subject: str) -> Canvas:
    """Open a canvas for a file that says what it is and wants to be printed unscaled, on one side."""
    # not compressed: zlib's output differs from one machine to the next
    canvas = Canvas(buffer, pageCompression=0, invariant=1, lang="en")
    canvas.setTitle(heading)
    canvas.setAuthor("wrywing")
    canvas.setCreator("wrywing")
    canvas.setSubject(subject)
    canvas.setViewerPreference("PrintScaling", "None")
    canvas.setViewerPreference("Duplex", "Simplex")
    return canvas


def begin(canvas: Canvas, page: Page) -> None:
    """Start a page: from here on lengths are those that come out of the printer, in mm."""
    canvas.setPageSize((page.wide / _POINT, page.high / _POINT))
    canvas.scale(1.0 / (_POINT * page.printed[0]), 1.0 / (_POINT * page.printed[1]))
    canvas.translate(*page.inset)
    canvas.setLineCap(1)
    canvas.setLineJoin(1)


def in_type(words: str) -> str:
    """`words` in the characters of Helvetica (Latin-1: ISO 8859-1); of any other letter what lettering makes of it.

    Examples
    --------
    >>> in_type("Möwe − Łódź")
    'Möwe - Lódz'
    """
    composed = unicodedata.normalize("NFC", words)
    return "".join(c if "\u00a1" <= c <= "\u00ff" else lettering.plain(c) for c in composed)


def breadth(words: str, height: float = TEXT, *, bold: bool = False) -> float:
    """Length in mm of a line of type with capitals `height` mm tall."""
    return float(stringWidth(in_type(words), _font(bold), height / CAP))


def wrapped(words: str, room: float, height: float = TEXT) -> Iterator[str]:
    """Lines of at most `room` mm that hold `words`."""
    line = ""
    for word in words.split():
        longer = f"{line} {word}" if line else word
        if line and breadth(longer, height) > room:
            yield line
            longer = word
        line = longer
    yield line


def _font(bold: bool) -> str:
    return "Helvetica-Bold" if bold else "Helvetica"


class Marks:
    """Draws on a canvas whose unit is a millimetre."""

    def __init__(self, canvas: Canvas) -> None:
        self.canvas = canvas

    def pen(self, colour: Color, *, width: float = 0.25, dashes: Sequence[float] = ()) -> None:
        """Choose how lines look from here on."""
        self.canvas.setStrokeColor(colour)
        self.canvas.setFillColor(colour)
        self.canvas.setLineWidth(width)
        self.canvas.setDash(list(dashes))

    def cross(self, x: float, y: float, arm: float) -> None:
        """Draw a cross with arms of that length."""
        self.pen(BLACK)
        self.canvas.line(x - arm, y, x + arm, y)
        self.canvas.line(x, y - arm, x, y + arm)

    def bar(self, x: float, y: float, axis: str, units: Units, *, upright: bool = False) -> float:
        """Draw a bar of known length that starts at (x, y), name its axis, and return its length."""
        length, (parts, words) = CHECK_BARS[units], _BARS[units]
        self.pen(BLACK, width=0.25)
        self.canvas.saveState()
        self.canvas.setLineCap(0)
        along, across = ((0.0, 1.0), (-1.0, 0.0)) if upright else ((1.0, 0.0), (0.0, 1.0))
        self.canvas.transform(*along, *across, x, y)
        self.canvas.line(0.0, 0.0, length, 0.0)
        for part in range(parts + 1):
            at = length * part / parts
            self.canvas.line(at, 0.0, at, 1.5 if part % parts else 3.0)
        self.canvas.restoreState()
        end = (x, y + length + 2.0) if upright else (x + length + 2.0, y)
        self.say(f"{axis}: {words}", *end, upright=upright)
        return length

    def say(
        self,
        words: str,
        x: float,
        y: float,
        *,
        height: float = TEXT,
        anchor: Anchor = "start",
        bold: bool = False,
        upright: bool = False,
        room: float = np.inf,
    ) -> None:
        """Write one line; what is too long for `room` mm is cut short with dots."""
        words = in_type(words)
        if breadth(words, height, bold=bold) > room:
            while words and breadth(words + "...", height, bold=bold) > room:
                words = words[:-1]
            words = words.rstrip() + "..."
        self.pen(BLACK)
        self.canvas.setFont(_font(bold), height / CAP)
        self.canvas.saveState()
        self.canvas.translate(x, y)
        if upright:
            self.canvas.transform(0.0, 1.0, -1.0, 0.0, 0.0, 0.0)
        (self.canvas.drawRightString if anchor == "end" else self.canvas.drawString)(0.0, 0.0, words)
        self.canvas.restoreState()
