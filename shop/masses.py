"""What a web weighs: its sheet, what fills and bonds its edges, and all that is laid on it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from ..geom.seat import Survey
from ..geom.web import SIDES, Side
from .built import BuiltWeb
from .flanges import BuiltFlange
from .job import Job
from .laminate import laminate
from .stock import Adhesive, Filler, Foam, Strip
from .strips import cover_thickness
from .units import GRAM


@dataclass(frozen=True)
class Masses:
    """What one web weighs, grams."""

    foam: float
    filler_top: float
    filler_bottom: float
    bond: float
    facing: float
    strips: float = 0.0
    cover: float = 0.0
    pads: float = 0.0
    flanges: float = 0.0

    @property
    def filler(self) -> float:
        """Filler at both edges."""
        return self.filler_top + self.filler_bottom

    @property
    def total(self) -> float:
        """All of it."""
        laid = self.strips + self.cover + self.pads + self.flanges
        return self.foam + self.filler + self.bond + self.facing + laid


def masses(job: Job, built: BuiltWeb, flanges: Sequence[BuiltFlange] | None = None) -> Masses:
    """Masses of a web: sheet, filler, bond lines and, where stated, facings, strips, their cover, pads and flanges.

    The flanges are those of the web as stated unless others are given.
    Pads count as solid: the joint's tube, which takes the place of some of their foam, is not among the web's parts.
    """
    stated = job.record.web
    foam, filler = job.stock.find(stated.foam, Foam), job.stock.find(stated.filler, Filler)
    bond = job.stock.find(stated.adhesive, Adhesive)
    top, bottom = (bedded(job, built.survey, side) for side in SIDES)
    strips, cover = _strip_masses(job, [top, bottom])
    areal = laminate(stated.facing, job.stock, stated.adhesive).areal if stated.facing else 0.0
    return Masses(
        foam=(built.sheet - built.pads) * foam.density * GRAM,
        filler_top=(built.top.filler + top.beside) * filler.density * GRAM,
        filler_bottom=(built.bottom.filler + bottom.beside) * filler.density * GRAM,
        bond=(top.bond + bottom.bond) * bond.density * GRAM,
        facing=areal * sum(face.area() for face in built.faces) * GRAM if areal else 0.0,
        strips=strips,
        cover=cover,
        pads=built.pads * _pad_density(job) * GRAM,
        flanges=sum(made.mass for made in (job.flanges if flanges is None else flanges)),
    )


def _pad_density(job: Job) -> float:
    """Density of what thickens the sheet at the joint, kg/m^3."""
    stated = job.record.joint
    return job.stock.find((stated.pad if stated else None) or job.record.web.foam, Foam).density


@dataclass(frozen=True)
class Bedded:
    """What lies between the skin's inside and the seat at one edge, mm^3.

    `bond` is all the glue, under the skin and between the strips; `beside` the filler along the strips, as the seat is
    level under the whole sheet where that is wider than they are.
    """

    bond: float
    strips: float = 0.0
    cover: float = 0.0
    beside: float = 0.0


def bedded(job: Job, survey: Survey, side: Side) -> Bedded:
    """Divide the bed of one edge among what lies in it.

    Bond line and cover have their share of the depth at each place; what the stack's share leaves free beside strips
    and glue lines is filler.
    """
    caps = job.record.caps
    if caps is None or job.caps is None:
        return Bedded(survey.bedding(side))
    depth, cover = job.depth[side](survey.s), cover_thickness(job, caps)
    strips = sum(layer.volume for layer in job.layers if layer.side == side)
    glue = strips * caps.glue / caps.thickness
    stack = survey.bedding(side, job.caps.height(side)(survey.s) / depth)
    return Bedded(
        bond=survey.bedding(side, job.record.web.bond / depth) + glue,
        strips=strips,
        cover=survey.bedding(side, cover / depth),
        beside=max(0.0, stack - strips - glue),
    )


def _strip_masses(job: Job, edges: Sequence[Bedded]) -> tuple[float, float]:
    """Grams of strips and of their cover with its resin."""
    caps = job.record.caps
    if caps is None:
        return 0.0, 0.0
    strips = sum(edge.strips for edge in edges) * job.stock.find(caps.strip, Strip).density * GRAM
    if caps.cover is None:
        return strips, 0.0
    areal = laminate(caps.cover, job.stock, job.record.web.adhesive).areal
    return strips, areal * sum(edge.cover for edge in edges) / cover_thickness(job, caps) * GRAM


def rounding(job: Job) -> float:
    """Grams of filler that a set bevel costs because the saw has steps."""
    return job.rounding * job.stock.find(job.record.web.filler, Filler).density * GRAM
