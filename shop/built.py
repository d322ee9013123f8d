"""A web as it would be cut, stated or tried."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from ..geom import blank, joint, seat
from ..geom.seat import Cut, Survey
from ..geom.web import Plane, Side


@dataclass(frozen=True)
class BuiltWeb:
    """A web as it would be cut: its plane, the survey of skin and seat over it, and its two edges.

    Raises
    ------
    NothingInside
        If the edges leave no sheet between them.
    """

    plane: Plane
    survey: Survey
    top: Cut
    bottom: Cut

    def __post_init__(self) -> None:
        seat.refuse_crossing(self.top, self.bottom)

    def cut(self, side: Side) -> Cut:
        """The cut of one edge."""
        return self.top if side == "top" else self.bottom

    @cached_property
    def plain(self) -> float:
        """Thickness of the plain sheet, mm: the web's own, where no joint thickens it."""
        return float(self.survey.thickness.min())

    @cached_property
    def pads(self) -> float:
        """Volume of what thickens the sheet at the joint, mm^3."""
        if not np.ptp(self.survey.thickness):
            return 0.0
        return joint.pads_volume(self.plane, self.top, self.bottom, self.plain)

    @cached_property
    def filler(self) -> float:
        """Filler at both edges, mm^3."""
        return self.top.filler + self.bottom.filler

    @cached_property
    def gap(self) -> float:
        """Largest gap at either edge, mm."""
        return float(max(self.top.gap.max(), self.bottom.gap.max()))

    @cached_property
    def sheet(self) -> float:
        """Volume of the sheet with the pads on it, mm^3."""
        return seat.sheet_volume(self.plane, self.top, self.bottom, self.survey.n)

    @cached_property
    def faces(self) -> tuple[blank.Face, blank.Face]:
        """Front and rear face of the blank."""
        front, rear = (blank.face(self.plane, self.top, self.bottom, name) for name in blank.FACES)
        return front, rear

    def cut_bevels(self) -> tuple[float, float]:
        """Largest angle that is cut, and how far the cut turns along the edge where it turns most; degrees."""
        angles = [np.degrees(np.arctan(c.slope)) for c in (self.top, self.bottom)]
        return float(max(np.abs(a).max() for a in angles)), float(max(np.ptp(a) for a in angles))
