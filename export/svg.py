"""SVG: one unit is one millimetre, one group for each role."""

from __future__ import annotations

import numpy as np
import svgwrite
from numpy.typing import NDArray
from svgwrite.container import Group

from ..geom.drawing import Drawing, Hole, Label, Role, Stroke
from .style import INKS, identity, one_line, title

_MARGIN = 5.0  # white round the drawing, mm


class _SvgPen:
    """Sorts marks into one group for each role; SVG's y runs down, the drawing's up."""

    def __init__(self, file: svgwrite.Drawing) -> None:
        self._file = file
        self.groups: dict[Role, Group] = {}

    def _group(self, role: Role) -> Group:
        if role not in self.groups:
            ink = INKS[role]
            self.groups[role] = self._file.g(
                id=role.name,
                fill="none",
                stroke=ink.hex,
                stroke_width=ink.width,
                stroke_linecap="round",
                stroke_linejoin="round",
            )
            if ink.dashes:
                self.groups[role]["stroke-dasharray"] = "{:g} {:g}".format(*ink.dashes)
        return self.groups[role]

    def stroke(self, stroke: Stroke) -> None:
        self._group(stroke.role).add(self._file.path(_path(stroke.points, stroke.closed)))

    def hole(self, hole: Hole) -> None:
        centre = (_number(hole.x), _number(-hole.y))
        self._group(hole.role).add(self._file.circle(centre, _number(hole.diameter / 2.0)))

    def label(self, label: Label) -> None:
        text = self._file.g(role="img", **{"aria-label": one_line(label.text)})
        text.add(self._file.path(" ".join(_path(line) for line in label.strokes())))
        self._group(label.role).add(text)


def render(drawing: Drawing, *, wing: str = "") -> bytes:
    """`drawing` as an SVG file.

    Parameters
    ----------
    drawing
        What to write; (x, y) of the drawing is (x, -y) in the file.
    wing
        The wing's name, for the file's title.

    Returns
    -------
    bytes
        Width and height are in mm, so it opens and prints at full size; lettering is drawn as paths, with the
        words in ``aria-label``.
    """
    x0, y0, x1, y1 = drawing.bounds()
    wide, high = x1 - x0 + 2.0 * _MARGIN, y1 - y0 + 2.0 * _MARGIN
    file = svgwrite.Drawing(
        size=(f"{_number(wide)}mm", f"{_number(high)}mm"),
        viewBox=" ".join(str(_number(v)) for v in (x0 - _MARGIN, -y1 - _MARGIN, wide, high)),
        style="background: white",
        debug=False,
    )
    words = [identity(drawing), *map(one_line, drawing.notes)]
    file.set_desc(title=title(drawing, wing), desc=". ".join(words))
    pen = _SvgPen(file)
    drawing.play(pen)
    for role in Role:
        if role in pen.groups:
            file.add(pen.groups[role])
    return f'<?xml version="1.0" encoding="utf-8"?>\n{file.tostring()}\n'.encode()


def _number(value: float) -> float:
    """`value` to the micrometre, and never -0.0."""
    return round(float(value), 3) + 0.0


def _path(points: NDArray[np.float64], closed: bool = False) -> str:
    steps = [f"{x},{y}" for x, y in (np.round(points * [1.0, -1.0], 3) + 0.0).tolist()]
    return "M" + " ".join(steps) + ("Z" if closed else "")
