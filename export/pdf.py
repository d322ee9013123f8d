"""PDF: the drawing at full size over as many sheets of paper as it takes, to be joined true."""

from __future__ import annotations

import io
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
import shapely
from reportlab.pdfbase.pdfmetrics import stringWidth
from reportlab.pdfgen.canvas import Canvas
from reportlab.pdfgen.pathobject import PDFPathObject

from ..geom import lettering
from ..geom.drawing import DIGITS, Drawing, Hole, Label, Role, Stroke
from ..shop.stock import CHECK_BARS
from ..shop.units import MM_PER_INCH, Units
from .furniture import LEAST_WINDOW, MARGINS, Furniture
from .marks import CAP, begin, in_type, open_file
from .room import Room, own_pages, paragraphs
from .style import INKS, identity, one_line, title
from .tiles import Box, Layout, Paper, Shapes, Tile, clip, plan

_ROUND = 20.0  # sides of a quarter of a hole of radius 1 mm, four times as many for 16: within a thousandth of a mm


@dataclass(frozen=True)
class Print:
    """How drawings are printed.

    Attributes
    ----------
    paper
        The sheets to print on, used upright or sideways, or a roll.
    units
        Check bars of 100 mm, or of 4 in.
    printed
        How long the printer makes what should be 1 mm, across the sheet and along it; every page makes up for it.
    """

    paper: Paper
    units: Units = "mm"
    printed: tuple[float, float] = (1.0, 1.0)

    @property
    def corrected(self) -> str:
        """What the pages say of a correction; nothing without one."""
        if self.printed == (1.0, 1.0):
            return ""
        bar, digits = CHECK_BARS[self.units], 3 if self.units == "in" else 2
        scale = MM_PER_INCH if self.units == "in" else 1.0
        x, y = (f"{bar * p / scale:.{digits}f}".rstrip("0").rstrip(".") for p in self.printed)
        return f"corrected for bars of x {x}, y {y} {self.units}"


def render(drawing: Drawing, how: Print, *, wing: str = "") -> bytes:
    """`drawing` as a PDF file; see `paged`."""
    return paged(drawing, how, wing=wing)[0]


def paged(drawing: Drawing, how: Print, *, wing: str = "") -> tuple[bytes, int]:
    """`drawing` as a PDF file of as few pages as will hold it at full size, and how many these are.

    Its title and notes go where these pages have room for them, on one page, else on a page of their own.

    Parameters
    ----------
    drawing
        What to write, cleaned by `contours.clean`.
    how
        Paper, units and the printer's error.
    wing
        The wing's name, for the foot of every page.

    Returns
    -------
    bytes, int
        The file asks viewers not to scale it (ISO 32000-1, 12.2) and printers to use one side only.

    Raises
    ------
    PaperError
        If the paper is too small to hold what every page needs.
    """
    pen = _PdfPen()
    replace(drawing, labels=tuple(label for label in drawing.labels if not label.paragraph)).play(pen)
    layout, notes, apart = _laid_out(drawing, pen, how)
    for label in notes:
        pen.label(label)
    sheets = [(layout, tile, pen) for tile in layout.tiles] + apart
    buffer = io.BytesIO()
    canvas = open_file(buffer, title(drawing, wing), identity(drawing))
    who = identity(drawing) + (", print corrected" if how.corrected else "")
    for number, (belongs, tile, what) in enumerate(sheets, start=1):
        begin(canvas, layout.page)
        shapes = np.array(what.shapes, dtype=object)
        _show(canvas, tile, what, shapes)
        furniture = Furniture(canvas, belongs, tile)
        furniture.frame()
        furniture.register(shapes)
        furniture.seams()
        furniture.bars(how.units, how.corrected)
        furniture.foot(one_line(drawing.title), one_line(wing), who, f"page {number} of {len(sheets)}")
        canvas.showPage()
    canvas.save()
    return buffer.getvalue(), len(sheets)


def _laid_out(
    drawing: Drawing, pen: _PdfPen, how: Print
) -> tuple[Layout, Sequence[Label], list[tuple[Layout, Tile, _PdfPen]]]:
    """The sheets for what the pen holds, the lines of title and notes on them, and pages for notes that are apart."""
    said, texts = [label for label in drawing.labels if label.paragraph], paragraphs(drawing.labels)
    layouts = _plan(pen, how)
    if not said:
        return layouts[0], (), []
    found = Room(pen.marks(), layouts).find(texts)
    if found is not None:
        return *found, []
    both = _PdfPen()
    drawing.play(both)
    for layout in _plan(both, how):  # as it stands in the drawing, if that needs no more: off a roll
        if len(layout.tiles) <= len(layouts[0].tiles) and _on_one(layout, said):
            return layout, said, []
    layout, apart = layouts[0], []
    x0, y0, x1, y1 = layout.tiles[0].window
    for labels in own_pages(texts, x1 - x0, y1 - y0):
        tile = Tile(0, 0, (0.0, y0 - y1, x1 - x0, 0.0), "notes")
        alone = _PdfPen()
        for label in labels:
            alone.label(label)
        apart.append((Layout(layout.page, (tile,)), tile, alone))
    return layout, (), apart


def _plan(pen: _PdfPen, how: Print) -> list[Layout]:
    return plan(pen.marks(), how.paper, margins=MARGINS, least=LEAST_WINDOW, printed=how.printed, texts=pen.boxes)


def _on_one(layout: Layout, labels: Sequence[Label]) -> bool:
    """Whether one sheet alone shows all of the labels."""
    x0, y0, x1, y1 = shapely.union_all([label.box() for label in labels]).bounds
    alone = map(layout.alone, layout.tiles)
    return any(a <= x0 and b <= y0 and x1 <= c and y1 <= d for a, b, c, d in alone)


class _PdfPen:
    """Keeps every mark as a line or ring that can be clipped, with its role."""

    def __init__(self) -> None:
        self.shapes: list[shapely.LineString] = []
        self.roles: list[Role] = []
        self.frames: list[bool] = []
        self.labels: list[Label] = []
        self.boxes: list[Box] = []
        self.middles: list[tuple[float, float]] = []

    def _take(self, shape: shapely.LineString, role: Role, frame: bool) -> None:
        self.shapes.append(shape)
        self.roles.append(role)
        self.frames.append(frame)

    def marks(self) -> Shapes:
        """All that asks for paper: not the frames."""
        return np.array(
            [shape for shape, frame in zip(self.shapes, self.frames, strict=True) if not frame], dtype=object
        )

    def stroke(self, stroke: Stroke) -> None:
        shape = shapely.LinearRing if stroke.closed else shapely.LineString
        self._take(shape(np.round(stroke.points, DIGITS) + 0.0), stroke.role, stroke.frame)  # PDF knows no exponents

    def hole(self, hole: Hole) -> None:
        radius = hole.diameter / 2.0
        turn = np.linspace(0.0, 2.0 * np.pi, 4 * int(np.ceil(_ROUND * np.sqrt(radius))), endpoint=False)
        ring = [hole.x, hole.y] + radius * np.column_stack([np.cos(turn), np.sin(turn)])
        self.stroke(Stroke(ring, hole.role, closed=True))

    def label(self, label: Label) -> None:
        self.labels.append(label)
        x0, y0, x1, y1 = box = label.box().bounds
        self.boxes.append(box)
        self.middles.append(((x0 + x1) / 2.0, (y0 + y1) / 2.0))
        lines = label.strokes()
        if lines:
            of = np.repeat(np.arange(len(lines)), [len(line) for line in lines])
            self.shapes += list(np.asarray(shapely.linestrings(np.concatenate(lines), indices=of)))
            self.roles += [label.role] * len(lines)
            self.frames += [False] * len(lines)


def _show(canvas: Canvas, tile: Tile, pen: _PdfPen, shapes: Shapes) -> None:
    """Draw what the tile's window shows, and its words again, unseen, to be searched and copied."""
    canvas.saveState()
    canvas.translate(MARGINS[0] - tile.window[0], MARGINS[1] - tile.window[1])
    paths: dict[Role, list[str]] = {role: [] for role in Role}
    for index, parts in clip(shapes, tile.window):
        for part in parts:
            paths[pen.roles[index]] += _polyline(part.tolist())
    for role, path in paths.items():
        if path:
            ink = INKS[role]
            canvas.setStrokeColor(ink.hex)
            canvas.setLineWidth(ink.width)
            canvas.setDash(list(ink.dashes))
            canvas.drawPath(PDFPathObject(path))
    x0, y0, x1, y1 = tile.window
    for label, (x, y) in zip(pen.labels, pen.middles, strict=True):
        if x0 <= x < x1 and y0 <= y < y1 and label.text.strip():
            _unseen(canvas, label)
    canvas.restoreState()


def _polyline(points: list[list[float]]) -> list[str]:
    """Operators of a path (ISO 32000-1, 8.5.2)."""
    closed = len(points) > 3 and points[0] == points[-1]
    steps = [f"{x} {y} l" for x, y in (points[:-1] if closed else points)]
    return [f"{steps[0][:-1]}m", *steps[1:], *["h"] * closed]


def _unseen(canvas: Canvas, label: Label) -> None:
    """Set the label's words in invisible type over its strokes (ISO 32000-1, 9.3.6: mode 3)."""
    words = in_type(label.text)
    size = label.height / CAP
    c, s = np.cos(np.radians(label.angle)), np.sin(np.radians(label.angle))
    text = canvas.beginText()
    text.setTextTransform(c, s, -s, c, *np.round(label.place([[0.0, 0.0]])[0], DIGITS).tolist())
    text.setTextRenderMode(3)
    text.setFont("Helvetica", size)
    text.setHorizScale(100.0 * lettering.width(words, label.height) / stringWidth(words, "Helvetica", size))
    text.textOut(words)
    canvas.saveState()
    canvas.drawText(text)
    canvas.restoreState()
