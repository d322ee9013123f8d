"""DXF for routers and lasers: millimetres, one layer for each role, closed contours, the same bytes every time."""

from __future__ import annotations

import io
import logging
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import replace
from typing import Literal, get_args

import ezdxf
import numpy as np
from numpy.typing import NDArray

from ..geom.drawing import DIGITS, Drawing, Hole, Label, Stroke
from . import arcs as arc
from .contours import grown
from .style import INKS, identity, one_line, title

Array = NDArray[np.float64]
Version = Literal["R12", "R2000", "R2010"]
VERSIONS: tuple[Version, ...] = get_args(Version)
SCALE = "DXF: 1 unit is 1 mm"
_MILLIMETRES = 4  # $INSUNITS
_ENTITIES = "  2\nENTITIES\n"  # start of the section that holds them
_FIRST_HANDLE = 0x1000  # above those of the tables
_OLD_HEAD = " 66\n1\n 10\n0.0\n 20\n0.0\n 30\n0.0\n"  # vertices follow; a point that stands for the plane z = 0


class _DxfPen:
    """Writes each mark as the lines of an entity, on its role's layer; ezdxf would take five times as long."""

    def __init__(self, version: Version, arcs: bool, mirrored: bool, owner: str) -> None:
        self._old = version == "R12"
        self._arcs = arcs
        self._mirrored = mirrored
        self._owner = owner
        self.handle = _FIRST_HANDLE
        self.lines: list[str] = []

    def _begin(self, kind: str, layer: str, subclass: str) -> None:
        """Open an entity; from R2000 on each has a handle, an owner and a subclass."""
        if self._old:
            self.lines.append(f"  0\n{kind}\n  8\n{layer}\n")
            return
        self.lines.append(f"  0\n{kind}\n  5\n{self.handle:X}\n330\n{self._owner}\n100\nAcDbEntity\n  8\n{layer}\n")
        self.lines.append(f"100\n{subclass}\n")
        self.handle += 1

    def _polyline(self, points: Array, closed: bool, layer: str) -> None:
        """Write vertices (k, 3): x, y and bulge."""
        self._begin("POLYLINE" if self._old else "LWPOLYLINE", layer, "AcDbPolyline")
        self.lines.append(_OLD_HEAD if self._old else f" 90\n{len(points)}\n")
        self.lines.append(f" 70\n{int(closed)}\n")
        start, end = (f"  0\nVERTEX\n  8\n{layer}\n", " 30\n0.0\n") if self._old else ("", "")
        for x, y, bulge in points.tolist():
            self.lines.append(f"{start} 10\n{x}\n 20\n{y}\n{end}" + (f" 42\n{bulge:.12f}\n" if bulge else ""))
        if self._old:
            self.lines.append(f"  0\nSEQEND\n  8\n{layer}\n")

    def stroke(self, stroke: Stroke) -> None:
        self._polyline(self._fitted(stroke), stroke.closed, stroke.role.name)

    def _fitted(self, stroke: Stroke) -> Array:
        """Vertices (k, 3); where there are arcs, those of the left hand are the right one's, mirrored."""
        if not self._arcs or len(stroke.points) < 3:
            return _straight(stroke.points)
        if self._mirrored:
            return arc.mirrored(arc.fit(stroke.points[::-1] * [-1.0, 1.0], stroke.closed))
        return arc.fit(stroke.points, stroke.closed)

    def hole(self, hole: Hole) -> None:
        self._begin("CIRCLE", hole.role.name, "AcDbCircle")
        self.lines.append(f" 10\n{hole.x}\n 20\n{hole.y}\n 30\n0.0\n 40\n{hole.diameter / 2.0}\n")

    def label(self, label: Label) -> None:
        for line in label.strokes():
            self._polyline(_straight(line), False, label.role.name)


def _straight(points: Array) -> Array:
    return np.column_stack([points, np.zeros(len(points))])


def render(
    drawing: Drawing, *, wing: str = "", version: Version = "R2010", arcs: bool = False, kerf: float = 0.0
) -> bytes:
    """`drawing` as a DXF file.

    Parameters
    ----------
    drawing
        What to write, cleaned by `contours.clean`; its coordinates stand in the file as they are.
    wing
        The wing's name, for the file's custom properties.
    version
        R12 for old controllers. It knows no units, so that a comment says they are millimetres, as does the lettering
        below the drawing in every version.
    arcs
        Write arcs (bulges) where they replace many points, within `arcs.TOLERANCE`.
    kerf
        Width of what a laser burns away, mm: outside cuts grow by half of it, inside cuts shrink.

    Returns
    -------
    bytes
        Outlines are LWPOLYLINEs (POLYLINEs in R12), holes CIRCLEs; lettering is lines too, so that it needs no font.

    Raises
    ------
    KerfError
        If a cut is too narrow for the kerf.
    """
    if kerf:
        drawing = grown(drawing, kerf)
    drawing = replace(drawing, labels=(*drawing.labels, _scale(drawing)))
    said = _said(drawing, wing, kerf)
    with _plainly():
        document = ezdxf.new(version, units=_MILLIMETRES)
        document.header["$MEASUREMENT"] = 1
        _add_layers(document)
        for name, words in said.items():
            document.header.custom_vars.append(name, words)
        _frame(document, drawing)
        pen = _DxfPen(version, arcs, drawing.hand == "left", document.modelspace().layout_key)
        drawing.play(pen)
        document.entitydb.handles.reset(f"{pen.handle:X}")
        for kind in sorted(document.entitydb.dxf_types_in_use()):  # ezdxf would take them in a set's order
            document.classes.add_class(kind)
        stream = io.StringIO()
        if version == "R12":  # it has no custom properties: group 999 is a comment
            stream.writelines(f"999\n{name}: {words}\n" for name, words in said.items())
        document.write(stream)
    head, tail = stream.getvalue().split(_ENTITIES)
    return document.encode("".join([head, _ENTITIES, *pen.lines, tail]))


def _scale(drawing: Drawing) -> Label:
    """What a unit is, in letters that show in any program, below all else."""
    x0, y0, _, _ = drawing.bounds()
    return Label(SCALE, round(x0, DIGITS), round(y0 - 7.0, DIGITS))


def _frame(document: ezdxf.document.Drawing, drawing: Drawing) -> None:
    """Say how far the drawing reaches, and show all of it when the file is opened."""
    x0, y0, x1, y1 = (round(v, DIGITS) + 0.0 for v in drawing.bounds())
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


def _said(drawing: Drawing, wing: str, kerf: float) -> dict[str, str]:
    """What the file says of itself, beside what is drawn."""
    said = {"Title": title(drawing, wing), "Panel": identity(drawing), "Units": "millimetres"}
    if kerf:
        said["Kerf"] = f"cuts stand off by {kerf / 2.0:g} mm for a kerf of {kerf:g} mm"
    return said | {f"Note {number}": one_line(note) for number, note in enumerate(drawing.notes, start=1)}


@contextmanager
def _plainly() -> Iterator[None]:
    """Keep the clock and random identifiers out of the file, and off the screen that R12 knows no units."""
    options, logger = ezdxf.options, logging.getLogger("ezdxf")
    before = options.write_fixed_meta_data_for_testing, logger.level
    options.write_fixed_meta_data_for_testing = True
    logger.setLevel(logging.ERROR)
    try:
        yield
    finally:
        options.write_fixed_meta_data_for_testing = before[0]
        logger.setLevel(before[1])
