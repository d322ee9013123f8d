"""What is said of load, cap strips and reserves: lines for the screen, a record, doubts, notes for a drawing."""

from __future__ import annotations

from dataclasses import asdict
from typing import Any

import numpy as np

from ..geom.web import SIDES, Side
from .job import Job
from .records_caps import Caps, Load
from .strength import STRAINED, UNLOOKED, Bent, Check, Strength
from .strips import Layer, Schedule, bond_shear, cover_thickness, ramp
from .units import MM_PER_INCH
from .wording import CAUTION

GRAMS_PER_POUND = 453.59237
PLACES = 9


def lines(job: Job) -> list[tuple[str, str]]:
    """Load, strips and allowables as a builder reads them: (what, figures); nothing without a load."""
    found, load, caps = job.strength, job.record.load, job.record.caps
    if found is None or load is None:
        return []
    out = [("load", _load(job, load)), ("", _inner(job, found.schedule))]
    if caps is not None:
        out += [("strips", _strips(job, caps, found.schedule)), *(("bent", _bent(job, bent)) for bent in found.bent)]
    out += [("reckoned", f"{check.name}: {check.formula}") for check in found.checks]
    out += [("allowed", "; ".join(allowables(job)))]
    return [*out, ("caution", f"{CAUTION}; {UNLOOKED}")]


def _load(job: Job, load: Load) -> str:
    if load.span_load is None:
        what = "bending moments" if load.moments is not None else "cap forces"
        return f"{what} as tabled at limit load; ultimate is {load.ultimate_factor:g} x limit"
    shape = load.span_load if isinstance(load.span_load, str) else "tabled"
    mass = load.mass or 0.0
    heavy = f"{mass / GRAMS_PER_POUND:.5g} lb" if job.record.units == "in" else f"{mass / 1e3:.5g} kg"
    span = job.wording.length(load.semi_span or 0.0)
    factor = f"{load.load_factor:g} g at limit, {load.ultimate_factor:g} times that at ultimate load"
    return f"{shape} span load over a semi-span of {span}, {heavy} at {factor}"


def _inner(job: Job, found: Schedule) -> str:
    words = job.wording
    return (
        f"at the inner end, ultimate: shear {words.force(found.shear[0])}, "
        f"bending moment {words.moment(found.moment[0])}, "
        f"cap force {words.force(found.force[0])} with the cap centroids {words.length(found.apart[0])} apart"
    )


def size(job: Job, caps: Caps) -> str:
    """Width and thickness of a strip."""
    return f"{job.wording.plain(caps.width)} x {job.wording.length(caps.thickness)}"


def _strips(job: Job, caps: Caps, found: Schedule) -> str:
    beside = f", {caps.beside} side by side" if caps.beside > 1 else ""
    counts = ", ".join(f"{len(found.stacks[side].stops)} layers at the {side}" for side in SIDES)
    bonds = " and ".join(job.wording.length(found.bond[side]) for side in SIDES)
    text = f"{caps.strip} {size(job, caps)}{beside}: {counts}, the longest nearest the skin; bond lengths {bonds}, "
    text += f"ends feathered over {job.wording.length(ramp(caps))}"
    if cover := cover_thickness(job, caps):
        text += f"; cover {job.wording.length(cover)}"
    return text


def _bent(job: Job, bent: Bent) -> str:
    text = f"{bent.side} strips to {_percent(bent.bend)} by the edge's curve at s {job.wording.length(bent.bend_at)}"
    if bent.twist > 0.0:
        text += f", twisted to {_percent(bent.twist)} in shear at s {job.wording.length(bent.twist_at)}"
    return text


def _percent(strain: float) -> str:
    return f"{100.0 * strain:.3f} %"


def allowables(job: Job) -> list[str]:
    """Every allowable with where it comes from."""
    found, caps, words = job.strength, job.record.caps, job.wording
    if found is None:
        return []
    out = []
    if caps is not None:
        how: dict[Side, str] = {"top": "compression", "bottom": "tension"}
        one = found.schedule.one
        out = [f"one strip {words.force(one[side].value)} in {how[side]} ({one[side].origin})" for side in SIDES]
        bond = bond_shear(job, caps)
        out.append(f"strip bond {words.stress(bond.value)} ({bond.origin})")
    for check in found.checks:
        if check.unit == "MPa" and check.name != "strip bond":
            out.append(f"{check.name} {words.stress(float(np.max(check.allowable)))} ({check.origin})")
    return out


def doubts(job: Job) -> list[str]:
    """Reserves below 1, what could not be checked, strips bent too far."""
    found, words = job.strength, job.wording
    if found is None:
        return []
    said = []
    for check in found.checks:
        i = check.least
        if check.reserve[i] < 1.0:
            s, y = (words.length(v[i]) for v in (found.schedule.s, found.schedule.y))
            said.append(f"{check.name}: reserve factor {check.reserve[i]:.2f}, below 1, at s {s} (rib y {y})")
    said += [f"not checked, {what}" for what in found.unchecked]
    for bent in found.bent:
        if max(bent.bend, bent.twist) > STRAINED:
            said.append(f"{_bent(job, bent)}: more than {_percent(STRAINED)}, think of thinner strips")
    return said


def places(found: Strength) -> list[int]:
    """Indices of the places that are shown: evenly spread from end to end."""
    s = found.schedule.s
    return [int(np.abs(s - at).argmin()) for at in np.linspace(0.0, s[-1], PLACES)]


def record(job: Job) -> dict[str, Any] | None:
    """Load, strips and reserves as a record: mm, N, N mm, MPa; None without a load."""
    found = job.strength
    if found is None:
        return None
    at = found.schedule
    return {
        "caution": f"{CAUTION}; {UNLOOKED}",
        "allowables": allowables(job),
        "layers": [asdict(layer) for layer in job.layers],
        "bent": [asdict(bent) for bent in found.bent],
        "checks": [_check(found, check) for check in found.checks],
        "unchecked": list(found.unchecked),
        "places": [
            {
                "s": float(at.s[i]),
                "y": float(at.y[i]),
                "shear": float(at.shear[i]),
                "moment": float(at.moment[i]),
                "apart": float(at.apart[i]),
                "cap_force": float(at.force[i]),
                "layers_needed": {side: float(need[i]) for side, need in at.need.items()},
                "stack": {side: float(at.height(side)(at.s[i])) for side in SIDES},
                "reserve": {check.name: float(check.reserve[i]) for check in found.checks},
            }
            for i in places(found)
        ],
    }


def _check(found: Strength, check: Check) -> dict[str, Any]:
    i = check.least
    return {
        "name": check.name,
        "formula": check.formula,
        "unit": check.unit,
        "reserve": float(check.reserve[i]),
        "s": float(found.schedule.s[i]),
        "demand": float(check.demand[i]),
        "allowable": float(np.broadcast_to(check.allowable, check.demand.shape)[i]),
        "from": check.origin,
    }


def strip_notes(job: Job) -> list[str]:
    """What a drawing of the web says of the strips that go on it."""
    caps, found = job.record.caps, job.caps
    if caps is None or found is None:
        return []
    return [
        f"Cap strips: {caps.strip} {size(job, caps)}, shortest laid first, ends feathered over "
        f"{job.wording.length(ramp(caps))}; from ROOT, cut to:",
        *(f"{side} edge: {_lengths(job, side)}" for side in SIDES),
        f"At ultimate load, allowed: {'; '.join(allowables(job)[:3])}",
        f"Counts of strips are {CAUTION}",
    ]


def _lengths(job: Job, side: Side) -> str:
    pieces = [layer for layer in reversed(job.layers) if layer.side == side]
    return ", ".join(f"{layer.count} x {cut_length(job, layer)}" for layer in pieces)


def cut_length(job: Job, layer: Layer) -> str:
    """Length to cut a strip to, in whole mm or tenths of an inch, rounded up."""
    tenth = MM_PER_INCH / 10.0
    if job.record.units == "in":
        return f"{np.ceil(layer.length / tenth - 1e-6) / 10.0:.1f} in"
    return f"{np.ceil(layer.length - 1e-6):.0f} mm"
