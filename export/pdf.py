"""PDF: the drawing at full size over as many sheets of paper as it takes, to be joined true."""

from __future__ import annotations

import io
from typing import Literal

import numpy as np
import shapely
from numpy.typing import NDArray
from reportlab.pdfbase.pdfmetrics import stringWidth
from reportlab.pdfgen.canvas import Canvas

from ..geom import lettering
from ..geom.drawing import Drawing, Hole, Label, Role, Stroke
from .furniture import CAP, LEAST_WINDOW, MARGINS, Furniture
from .style import INKS, MILLIMETRES_PER_INCH, identity, one_line, title
from .tiles import Paper, Shapes, Tile, clip, plan

_POINT = MILLIMETRES_PER_INCH / 72.0  # PDF's unit (ISO 32000-1, 8.3.2.3), in mm


def render(drawing: Drawing, paper: Paper, *, wing: str = "", units: Literal["mm", "in"] = "mm") -> bytes:
    """`drawing` as a PDF file of as few pages as will hold it at full size.

    Parameters
    ----------
    drawing
        What to write.
    paper
        The sheets to print on, used upright or sideways.
    wing
        The wing's name, for the foot of every page.
    units
        Check bars of 100 mm, or of 4 in.

    Returns
    -------
    bytes
        The file asks viewers not to scale it (ISO 32000-1, 12.2) and printers to use one side only.

    Raises
    ------
    ValueError
        If the paper is too small to hold what every page needs.
    """
    pen = _PdfPen()
    drawing.play(pen)
    shapes = np.array(pen.shapes, dtype=object)
    layout = plan(shapes, paper, margins=MARGINS, least=LEAST_WINDOW)
    buffer = io.BytesIO()
    size = (layout.width / _POINT, layout.height / _POINT)
    # not compressed: zlib's output differs from one machine to the next
    canvas = Canvas(buffer, pagesize=size, pageCompression=0, invariant=1, lang="en")
    _describe(canvas, drawing, wing)
    for number, tile in enumerate(layout.tiles, start=1):
        canvas.scale(1.0 / _POINT, 1.0 / _POINT)
        canvas.setLineCap(1)
        canvas.setLineJoin(1)
        _show(canvas, tile, pen, shapes)
        page = f"page {number} of {len(layout.tiles)}"
        _furnish(Furniture(canvas, layout, tile), shapes, drawing, wing, units, page)
        canvas.showPage()
    canvas.save()
    return buffer.getvalue()


def _describe(canvas: Canvas, drawing: Drawing, wing: str) -> None:
    canvas.setTitle(title(drawing, wing))
    canvas.setAuthor("wrywing")
    canvas.setCreator("wrywing")
    canvas.setSubject(identity(drawing))
    canvas.setViewerPreference("PrintScaling", "None")
    canvas.setViewerPreference("Duplex", "Simplex")


class _PdfPen:
    """Keeps every mark as a line or ring that can be clipped, with its role."""

    def __init__(self) -> None:
        self.shapes: list[shapely.LineString] = []
        self.roles: list[Role] = []
        self.holes: dict[int, Hole] = {}
        self.labels: list[Label] = []

    def _take(self, shape: shapely.LineString, role: Role) -> None:
        self.shapes.append(shape)
        self.roles.append(role)

    def stroke(self, stroke: Stroke) -> None:
        shape = shapely.LinearRing if stroke.closed else shapely.LineString
        self._take(shape(stroke.points), stroke.role)

    def hole(self, hole: Hole) -> None:
        self.holes[len(self.shapes)] = hole
        self._take(shapely.Point(hole.x, hole.y).buffer(hole.diameter / 2.0, quad_segs=64).exterior, hole.role)

    def label(self, label: Label) -> None:
        self.labels.append(label)
        for line in label.strokes():
            self._take(shapely.LineString(line), label.role)


def _show(canvas: Canvas, tile: Tile, pen: _PdfPen, shapes: Shapes) -> None:
    """Draw what the tile's window shows, and its words again, unseen, to be searched and copied."""
    canvas.saveState()
    canvas.translate(MARGINS[0] - tile.window[0], MARGINS[1] - tile.window[1])
    for index, parts in clip(shapes, tile.window):
        ink = INKS[pen.roles[index]]
        canvas.setStrokeColor(ink.hex)
        canvas.setLineWidth(ink.width)
        canvas.setDash(list(ink.dashes))
        hole = pen.holes.get(index)
        if hole and _closed(parts[0]):
            canvas.circle(hole.x, hole.y, hole.diameter / 2.0)
            continue
        for part in parts:
            _polyline(canvas, part)
    frame = shapely.box(*tile.window)
    for label in pen.labels:
        if label.text.strip() and frame.contains(label.box().centroid):
            _unseen(canvas, label)
    canvas.restoreState()


def _closed(points: NDArray[np.float64]) -> bool:
    return len(points) > 3 and np.array_equal(points[0], points[-1])


def _polyline(canvas: Canvas, points: NDArray[np.float64]) -> None:
    closed = _closed(points)
    first, *others = (points[:-1] if closed else points).tolist()
    path = canvas.beginPath()
    path.moveTo(*first)
    for point in others:
        path.lineTo(*point)
    if closed:
        path.close()
    canvas.drawPath(path)


def _unseen(canvas: Canvas, label: Label) -> None:
    """Set the label's words in invisible type over its strokes (ISO 32000-1, 9.3.6: mode 3)."""
    words = lettering.plain(label.text)
    size = label.height / CAP
    c, s = np.cos(np.radians(label.angle)), np.sin(np.radians(label.angle))
    text = canvas.beginText()
    text.setTextTransform(c, s, -s, c, *label.place([[0.0, 0.0]])[0])
    text.setTextRenderMode(3)
    text.setFont("Helvetica", size)
    text.setHorizScale(100.0 * lettering.width(words, label.height) / stringWidth(words, "Helvetica", size))
    text.textOut(words)
    canvas.saveState()
    canvas.drawText(text)
    canvas.restoreState()


def _furnish(
    furniture: Furniture, shapes: Shapes, drawing: Drawing, wing: str, units: Literal["mm", "in"], page: str
) -> None:
    furniture.frame()
    furniture.register(shapes)
    furniture.seams()
    furniture.bars(units)
    furniture.foot(one_line(drawing.title), one_line(wing), identity(drawing), page)
