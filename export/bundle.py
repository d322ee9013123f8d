"""Every drawing in every format asked for, and the cover: files by name, and what the manifest says of each."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, field

import shapely

from ..geom.drawing import Drawing
from ..shop.wording import Wording
from . import contours, cover, dxf, pdf, svg

FORMATS = ("dxf", "svg", "pdf")


@dataclass(frozen=True)
class Options:
    """How the formats are written: what to print on; for DXF its version, whether arcs, and a laser's kerf in mm."""

    how: pdf.Print
    version: dxf.Version = "R2010"
    arcs: bool = False
    kerf: float = 0.0


@dataclass
class Bundle:
    """Files by name; for each its path, format, drawing and hand."""

    files: dict[str, bytes] = field(default_factory=dict)
    records: list[dict[str, str]] = field(default_factory=list)

    def add(self, path: str, kind: str, drawing: str, hand: str, data: bytes) -> None:
        """Put in a file; ValueError if there is one of that name."""
        if path in self.files:
            raise ValueError(f"two files are named {path}")
        self.files[path] = data
        self.records.append({"path": path, "format": kind, "drawing": drawing, "hand": hand})


def build(drawings: Iterable[Drawing], formats: Sequence[str], options: Options, of: cover.Revision) -> Bundle:
    """Write `drawings` in each of the `formats`; with PDF comes a cover that lists them.

    Parameters
    ----------
    drawings
        Of one or both hands; one that serves either is written once.
    formats
        Any of `FORMATS`.
    options
        How they are written.
    of
        What the drawings are of.

    Raises
    ------
    KerfError
        If a cut is too narrow for the kerf.
    PaperError
        If the paper is too small.
    """
    bundle, entries = Bundle(), []
    for drawing in map(contours.clean, _each_once(drawings)):
        for kind in formats:
            path = f"{drawing.name}-{drawing.hand}.{kind}"
            if kind == "dxf":
                o = options
                data = dxf.render(drawing, wing=of.wing, version=o.version, arcs=o.arcs, kerf=o.kerf)
            elif kind == "svg":
                data = svg.render(drawing, wing=of.wing)
            else:
                data, pages = pdf.paged(drawing, options.how, wing=of.wing)
                size = _size(drawing, options.how)
                entries.append(cover.Entry(drawing.title, drawing.hand, size, pages, path))
            bundle.add(path, kind, drawing.name, drawing.hand, data)
    if entries:
        bundle.add(f"{cover.NAME}.pdf", "pdf", cover.NAME, "both", cover.render(entries, options.how, of))
    return bundle


def _each_once(drawings: Iterable[Drawing]) -> Iterator[Drawing]:
    seen = set()
    for drawing in drawings:
        if drawing.hand != "both" or drawing.name not in seen:
            yield drawing
        seen.add(drawing.name)


def _size(drawing: Drawing, how: pdf.Print) -> str:
    """How large what is cut out is."""
    words = Wording(how.units)
    cuts = [s.points for s in drawing.strokes if s.role in contours.CUTS]
    x0, y0, x1, y1 = shapely.MultiLineString(cuts).bounds if cuts else drawing.bounds()
    digits = 1 if how.units == "in" else 0
    return f"{words.column(x1 - x0, digits)} x {words.column(y1 - y0, digits)} {how.units}"
