"""The drawings to be cut: one function for each part of the wing."""

from __future__ import annotations

from ..geom.drawing import Drawing, Hand
from .job import Job
from .sheets_web import web_blank


def drawings(job: Job, hand: Hand = "right") -> list[Drawing]:
    """Every drawing of a job, for one hand."""
    return web_blank(job, hand)
