"""The closed meshes of a job: web blank, filler, cap strips and cores, for either hand."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from ..geom import solid
from ..geom.core import Mesh
from ..geom.drawing import Hand
from ..geom.seat import Along, constant
from ..geom.web import SIDES
from .job import Job
from .records.caps import Caps
from .strips import Layer, ramp, rise, under

Part = Literal["web", "filler", "strip", "core"]


@dataclass(frozen=True)
class Solid:
    """One closed mesh in wing axes, mm.

    Attributes
    ----------
    name
        Short, unique in a job, fit for a file name: ``filler-top``.
    title
        What the builder reads.
    part, material
        What it is and what it is made of.
    """

    name: str
    title: str
    part: Part
    material: str
    mesh: Mesh
    hand: Hand = "right"

    def mirrored(self) -> Solid:
        """The same for the left-hand panel."""
        return replace(self, mesh=solid.mirrored(self.mesh), hand="left")


def solids(job: Job, hand: Hand = "right") -> list[Solid]:
    """Every mesh of a job for one hand, each a body of its own.

    An edge whose gap is less than a hundredth of a millimetre on the average has no filler among them.
    """
    return [body.mirrored() for body in job.solids] if hand == "left" else job.solids


def built(job: Job) -> list[Solid]:
    """Every mesh of the right-hand panel."""
    made = [_web(job), *_fillers(job), *_strips(job), *_cores(job)]
    return [replace(body, mesh=solid.welded(body.mesh)) for body in made]


def _web(job: Job) -> Solid:
    web = job.web
    mesh = solid.web_blank(web.plane, web.top, web.bottom)
    title = "Web blank, with what thickens it at the joint" if job.pads else "Web blank"
    return Solid("web-blank", title, "web", job.record.web.foam, mesh)


def _fillers(job: Job) -> list[Solid]:
    meshes = {side: solid.filler(job.web.plane, job.web.cut(side)) for side in SIDES}
    filler = job.record.web.filler
    return [
        Solid(f"filler-{side}", f"Filler, {side} edge", "filler", filler, mesh)
        for side, mesh in meshes.items()
        if mesh is not None
    ]


def _strips(job: Job) -> list[Solid]:
    caps = job.record.caps
    return [] if caps is None else [_strip(job, caps, layer) for layer in job.layers]


def _strip(job: Job, caps: Caps, layer: Layer) -> Solid:
    """One layer, all its strips side by side; its end is feathered on the side of the foam, glue line and all."""
    near = under(job) + layer.height - rise(caps)
    outer, inner, stop = constant(near + caps.glue), constant(near + rise(caps)), None
    if not layer.whole:
        stop = layer.stop + ramp(caps)
        s = np.array([layer.stop, stop])
        outer, inner = (Along(s, np.array([float(depth(0.0)), near])) for depth in (outer, inner))
    mesh = solid.strip(
        job.loft, job.web.plane, layer.side, width=caps.beside * caps.width, outer=outer, inner=inner, stop=stop
    )
    title = f"Cap strip, {layer.side} edge, layer {layer.number} from the skin"
    return Solid(f"strip-{layer.side}-{layer.number}", title, "strip", caps.strip, mesh)


def _cores(job: Job) -> list[Solid]:
    return [
        Solid(core.name, f"Foam core {core.number}, {core.stated.region}", "core", core.foam.name, core.mesh)
        for core in job.cores
    ]
