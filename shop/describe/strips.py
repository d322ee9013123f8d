"""What is said of cap strips: their size, what each is cut to, notes for a drawing."""

from __future__ import annotations

import numpy as np

from ...geom.web import SIDES, Side
from ..job import Job
from ..records.caps import Caps
from ..strips import Layer, Schedule, bond_shear, cover_thickness, ramp
from ..units import MM_PER_INCH
from ..wording import CAUTION


def size(job: Job, caps: Caps) -> str:
    """Width and thickness of a strip."""
    return f"{job.wording.plain(caps.width)} x {job.wording.length(caps.thickness)}"


def cut_length(job: Job, layer: Layer) -> str:
    """Length to cut a strip to, in whole mm or tenths of an inch, rounded up."""
    tenth = MM_PER_INCH / 10.0
    if job.record.units == "in":
        return f"{np.ceil(layer.length / tenth - 1e-6) / 10.0:.1f} in"
    return f"{np.ceil(layer.length - 1e-6):.0f} mm"


def line(job: Job, caps: Caps, found: Schedule) -> str:
    """How many layers there are at either edge, and how they end."""
    beside = f", {caps.beside} side by side" if caps.beside > 1 else ""
    counts = ", ".join(f"{_layers(len(found.stacks[side].stops))} at the {side}" for side in SIDES)
    bonds = " and ".join(job.wording.length(found.bond[side]) for side in SIDES)
    text = f"{caps.strip} {size(job, caps)}{beside}: {counts}, the longest nearest the skin; bond lengths {bonds}, "
    text += f"ends feathered over {job.wording.length(ramp(caps))}"
    if cover := cover_thickness(job, caps):
        text += f"; cover {job.wording.length(cover)}"
    return text


def _layers(count: int) -> str:
    return f"{count} layer{'s' * (count > 1)}"


def allowables(job: Job) -> list[str]:
    """What one strip and its bond may carry, with where it comes from; nothing without strips."""
    caps, found, words = job.record.caps, job.caps, job.wording
    if caps is None or found is None:
        return []
    how: dict[Side, str] = {"top": "compression", "bottom": "tension"}
    one, bond = found.one, bond_shear(job, caps)
    out = [f"one strip {words.force(one[side].value)} in {how[side]} ({one[side].origin})" for side in SIDES]
    return [*out, f"strip bond {words.stress(bond.value)} ({bond.origin})"]


def strip_notes(job: Job) -> list[str]:
    """What a drawing of the web says of the strips that go on it."""
    caps, found = job.record.caps, job.caps
    if caps is None or found is None:
        return []
    return [
        f"Cap strips: {caps.strip} {size(job, caps)}, shortest laid first, ends feathered over "
        f"{job.wording.length(ramp(caps))}; from ROOT, cut to:",
        *(f"{side} edge: {_lengths(job, side)}" for side in SIDES),
        f"At ultimate load, allowed: {'; '.join(allowables(job))}",
        f"Counts of strips are {CAUTION}",
    ]


def _lengths(job: Job, side: Side) -> str:
    pieces = [layer for layer in reversed(job.layers) if layer.side == side]
    return ", ".join(f"{layer.count} x {cut_length(job, layer)}" for layer in pieces)
