"""The flat pieces that are cut from sheets of stock: each a small drawing of its own, the grain running along x."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import shapely
from numpy.typing import NDArray

from ..geom.drawing import Drawing, Hand, Role, Stroke
from .job import Job
from .records.cutting import Cutting
from .sheets.joint import joint_pads
from .sheets.rib import cradle_sheets, rib_sheets
from .stock import Foam

Array = NDArray[np.float64]

_ON = 0.05  # mm beyond its outline that what belongs to a piece may reach


@dataclass(frozen=True)
class Piece:
    """One piece: its drawing, whose first stroke is the outline, what it is made of and how thick that is, mm.

    Beside it, with its name, is written what finds no room on it.
    """

    drawing: Drawing
    material: str
    thickness: float
    beside: tuple[str, ...] = ()

    @property
    def outline(self) -> Array:
        """(k, 2) closed outline."""
        return self.drawing.strokes[0].points

    @property
    def shape(self) -> shapely.Polygon:
        """What is left of it when it is cut out: its holes for lightness are not part of it."""
        inner = [s.points for s in self.drawing.strokes[1:] if s.role is Role.CUT_INSIDE and s.closed]
        return shapely.Polygon(self.outline, inner)

    def of_hand(self, hand: Hand) -> Piece:
        """The piece for either hand, given for the right one."""
        return self if hand == "right" else replace(self, drawing=self.drawing.mirrored(hand))


def other_pieces(job: Job, cutting: Cutting, hand: Hand) -> list[Piece]:
    """Pads of the joint and, where the wing file says what they are cut from, ribs and cradles."""
    out: list[Piece] = []
    pad_foam = foam_name(job, (job.record.joint.pad if job.record.joint else None) or job.record.web.foam)
    for pad, drawing in zip(job.pads, joint_pads(job, hand), strict=True):
        out.append(Piece(_part(drawing, drawing.strokes[0], None), pad_foam, pad.thickness))  # not its profile
    for drawings, stated in ((rib_sheets, cutting.ribs), (cradle_sheets, cutting.cradles)):
        if stated is not None:
            found = (d for d in drawings(job, hand) if not d.name.endswith("strip"))
            out += [Piece(part, foam_name(job, stated.material), stated.thickness) for d in found for part in parts(d)]
    return out


def foam_name(job: Job, stated: str) -> str:
    """A sheet material's name as stock spells it."""
    return job.stock.find(stated, Foam).name


def parts(drawing: Drawing) -> list[Drawing]:
    """Each outline of a drawing with the marks, holes and lettering that lie wholly inside it."""
    cuts = [s for s in drawing.strokes if s.role is Role.CUT_OUTSIDE]
    return [_part(drawing, cut, i if len(cuts) > 1 else None) for i, cut in enumerate(cuts, start=1)]


def _part(drawing: Drawing, cut: Stroke, number: int | None) -> Drawing:
    inside = shapely.Polygon(cut.points).buffer(_ON)
    shapely.prepare(inside)
    marks = (s for s in drawing.strokes if s.role is not Role.CUT_OUTSIDE)
    return replace(
        drawing,
        name=drawing.name if number is None else f"{drawing.name}-{number}",
        title=drawing.title if number is None else f"{drawing.title}, part {number}",
        strokes=(cut, *(s for s in marks if inside.contains(shapely.LineString(s.points)))),
        holes=tuple(h for h in drawing.holes if inside.contains(shapely.Point(h.x, h.y))),
        labels=tuple(t for t in drawing.labels if inside.contains(t.box())),
    )
