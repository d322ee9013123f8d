"""DXF (R2010): millimetres, one layer for each role, the same bytes every time."""

from __future__ import annotations

import io
from collections.abc import Iterator
from contextlib import contextmanager

import ezdxf
from ezdxf.layouts import Modelspace

from ..geom.drawing import Drawing, Hole, Label, Stroke
from .style import INKS, identity, one_line, title

_MILLIMETRES = 4  # $INSUNITS


class _DxfPen:
    """Puts each mark into the model space, on its role's layer."""

    def __init__(self, space: Modelspace) -> None:
        self._space = space

    def stroke(self, stroke: Stroke) -> None:
        on = {"layer": stroke.role.name}
        self._space.add_lwpolyline(stroke.points.tolist(), format="xy", close=stroke.closed, dxfattribs=on)

    def hole(self, hole: Hole) -> None:
        on = {"layer": hole.role.name}
        self._space.add_circle((hole.x, hole.y), hole.diameter / 2.0, dxfattribs=on)

    def label(self, label: Label) -> None:
        for line in label.strokes():
            self.stroke(Stroke(line, label.role))


def render(drawing: Drawing, *, wing: str = "") -> bytes:
    """`drawing` as a DXF file.

    Parameters
    ----------
    drawing
        What to write; its coordinates stand in the file as they are.
    wing
        The wing's name, for the file's custom properties.

    Returns
    -------
    bytes
        Outlines are LWPOLYLINEs, holes CIRCLEs; lettering is LWPOLYLINEs too, so that it needs no font.
    """
    with _fixed_dates():
        document = ezdxf.new("R2010", units=_MILLIMETRES)
        document.header["$MEASUREMENT"] = 1
        _add_layers(document)
        _describe(document, drawing, wing)
        drawing.play(_DxfPen(document.modelspace()))
        _frame(document, drawing)
        for kind in sorted(document.entitydb.dxf_types_in_use()):  # ezdxf would take them in a set's order
            document.classes.add_class(kind)
        stream = io.StringIO()
        document.write(stream)
    return document.encode(stream.getvalue())


def _frame(document: ezdxf.document.Drawing, drawing: Drawing) -> None:
    """Say how far the drawing reaches, and show all of it when the file is opened."""
    x0, y0, x1, y1 = drawing.bounds()
    low, high = (x0, y0, 0.0), (x1, y1, 0.0)
    space = document.modelspace()
    space.reset_extents(low, high)
    space.reset_limits(low[:2], high[:2])
    # ezdxf would leave out a corner at the origin
    document.header["$EXTMIN"], document.header["$EXTMAX"] = low, high
    document.set_modelspace_vport(max(y1 - y0, (x1 - x0) / 2.0), ((x0 + x1) / 2.0, (y0 + y1) / 2.0))


def _add_layers(document: ezdxf.document.Drawing) -> None:
    document.linetypes.add("FOLD", [6.0, 4.0, -2.0], description="Fold __ __ __")
    for role, ink in INKS.items():
        document.layers.add(
            role.name,
            color=ink.colour,
            lineweight=round(100 * ink.width),
            linetype="FOLD" if ink.dashes else "Continuous",
        )


def _describe(document: ezdxf.document.Drawing, drawing: Drawing, wing: str) -> None:
    properties = document.header.custom_vars
    properties.append("Title", title(drawing, wing))
    properties.append("Panel", identity(drawing))
    for number, note in enumerate(drawing.notes, start=1):
        properties.append(f"Note {number}", one_line(note))


@contextmanager
def _fixed_dates() -> Iterator[None]:
    """Keep the clock and random identifiers out of the file."""
    options = ezdxf.options
    before = options.write_fixed_meta_data_for_testing
    options.write_fixed_meta_data_for_testing = True
    try:
        yield
    finally:
        options.write_fixed_meta_data_for_testing = before
