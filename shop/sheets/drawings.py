"""The drawings to be cut: one function for each part of the wing."""

from __future__ import annotations

from ...geom.drawing import Drawing, Hand
from ..job import Job
from .core import core_boards
from .cut import web_cut
from .flange import flange_patterns
from .gauge import bevel_gauges
from .joint import joint_pads
from .rib import cradle_sheets, rib_sheets
from .web import web_blank


def drawings(job: Job, hand: Hand = "right") -> list[Drawing]:
    """Every drawing of a job, for one hand."""
    return [
        *web_blank(job, hand),
        *web_cut(job, hand),
        *bevel_gauges(job, hand),
        *flange_patterns(job, hand),
        *joint_pads(job, hand),
        *core_boards(job, hand),
        *rib_sheets(job, hand),
        *cradle_sheets(job, hand),
    ]
