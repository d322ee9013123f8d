"""What is said of load and reserves: lines for the screen, a record, doubts."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import asdict
from typing import Any

import numpy as np

from ...geom.web import SIDES
from ..job import Job
from ..laminate import laminate
from ..records.caps import Load
from ..strength import STRAINED, UNLOOKED, Bent, Check, Strength
from ..strips import Schedule
from ..wording import CAUTION
from . import strips

GRAMS_PER_POUND = 453.59237
PLACES = 9
MOST = 99.0  # a larger reserve factor says no more
LIGHT = 5.0  # times the mass of both webs: an aircraft that is lighter is a slip of the unit
LOADING = 0.3, 300.0  # kg/m^2 of wing loading beyond which the aircraft's mass is doubtful
PACKED = 0.65  # share of the volume that the fibre of a cloth can take up, common practice


def lines(job: Job) -> list[tuple[str, str]]:
    """Load, strips and allowables as a builder reads them: (what, figures); nothing without a load."""
    found, load, caps = job.strength, job.record.load, job.record.caps
    if found is None or load is None:
        return []
    out = [("load", _load(job, load)), ("", _inner(job, found.schedule))]
    if caps is not None:
        out.append(("strips", strips.line(job, caps, found.schedule)))
        out += [("bent", _bent(job, bent)) for bent in found.bent]
    out.append(("reckoned", f"shear flow: {found.schedule.carried.flow_formula}"))
    out += [("reckoned", f"{check.name}: {check.formula}") for check in found.checks]
    out += [("allowed", "; ".join(allowables(job)))]
    return [*out, ("caution", f"{CAUTION}; {UNLOOKED}")]


def _load(job: Job, load: Load) -> str:
    if load.span_load is None:
        what = "bending moments" if load.moments is not None else "cap forces"
        return f"{what} as tabled at limit load; ultimate is {load.ultimate_factor:g} x limit"
    shape = load.span_load if isinstance(load.span_load, str) else "tabled"
    span = job.wording.length(load.semi_span or 0.0)
    factor = f"{load.load_factor:g} g at limit, {load.ultimate_factor:g} times that at ultimate load"
    return f"{shape} span load over a semi-span of {span}, {_heavy(job, load.mass or 0.0)} at {factor}"


def _heavy(job: Job, grams: float) -> str:
    return f"{grams / GRAMS_PER_POUND:.5g} lb" if job.record.units == "in" else f"{grams / 1e3:.5g} kg"


def _inner(job: Job, found: Schedule) -> str:
    words = job.wording
    return (
        f"at the inner end, ultimate: shear {words.force(found.shear[0])}, "
        f"bending moment {words.moment(found.moment[0])}, "
        f"cap force {words.force(found.force[0])} with the cap centroids {words.length(found.apart[0])} apart"
    )


def _bent(job: Job, bent: Bent) -> str:
    text = f"{bent.side} strips to {_percent(bent.bend)} by the edge's curve at s {job.wording.length(bent.bend_at)}"
    if bent.twist > 0.0:
        text += f", twisted to {_percent(bent.twist)} in shear at s {job.wording.length(bent.twist_at)}"
    return text


def _percent(strain: float) -> str:
    return f"{100.0 * strain:.3f} %"


def factor(reserve: float) -> str:
    """A reserve factor in words.

    >>> factor(1.416), factor(250.0), factor(float("inf"))
    ('1.42', '>99', '>99')
    """
    return f">{MOST:g}" if reserve > MOST else f"{reserve:.2f}"


def allowables(job: Job) -> list[str]:
    """Every allowable with where it comes from."""
    found, words = job.strength, job.wording
    if found is None:
        return []
    return [
        *strips.allowables(job),
        *(
            f"{check.name} {words.stress(float(check.allowed.max()))} ({check.origin})"
            for check in found.checks
            if check.unit == "MPa" and check.name != "strip bond"
        ),
    ]


def doubts(job: Job) -> list[str]:
    """Reserves below 1, what could not be checked, slips in what is stated, strips bent too far."""
    found = job.strength
    if found is None:
        return []
    said = [*_reserve_doubts(job, found), *(f"not checked, {what}" for what in found.unchecked)]
    said += [*_mass_doubts(job), *_lighter_doubts(job), *_dry_doubts(job)]
    for bent in found.bent:
        if max(bent.bend, bent.twist) > STRAINED:
            said.append(f"{_bent(job, bent)}: more than {_percent(STRAINED)}, think of thinner strips")
    return said


def _reserve_doubts(job: Job, found: Strength) -> Iterator[str]:
    words = job.wording
    for check in found.checks:
        i = check.least
        if check.reserve[i] < 1.0:
            s, y = (words.length(v[i]) for v in (found.schedule.s, found.schedule.y))
            yield f"{check.name}: reserve factor {check.reserve[i]:.2f}, below 1, at s {s} (rib y {y})"
    if idle := [check.name for check in found.checks if math.isinf(check.reserve.min())]:
        yield f"the load as stated asks nothing of: {', '.join(idle)}"


def _mass_doubts(job: Job) -> Iterator[str]:
    """An aircraft lighter than its webs make likely, or too light or too heavy for its wing: grams for kilograms."""
    mass = job.record.load.mass if job.record.load else None
    if mass is None:
        return
    text, ask = f"load.mass, {_heavy(job, mass)}, is", "is that the unit that is meant? A bare mass is in grams"
    webs, loading = 2.0 * job.masses.total, _wing_loading(job, mass)
    if mass < LIGHT * webs:
        yield f"{text} less than {LIGHT:g} times the two webs', {_heavy(job, webs)}: {ask}"
    elif not LOADING[0] <= loading <= LOADING[1]:
        yield f"{text} {loading:.3g} kg/m² of the wing: {ask}"


def _wing_loading(job: Job, grams: float) -> float:
    """kg/m^2 of a wing as wide as the panel's root between the two panels."""
    load, loft = job.record.load, job.loft
    inner = 0.0 if load is None or load.semi_span is None else max(load.semi_span - float(np.ptp(loft.y)), 0.0)
    area = loft.area() + inner * job.record.wing.stations[0].chord
    return grams / 1e3 / (2.0 * area / 1e6)


def _lighter_doubts(job: Job) -> Iterator[str]:
    """Materials stated lighter than stock's strengths are for."""
    web, caps = job.record.web, job.record.caps
    cloth = web.facing.cloth if web.facing else None
    for name in dict.fromkeys(filter(None, (web.foam, web.adhesive, cloth, caps.strip if caps else None))):
        if (found := job.stock.lighter(name)) is not None:
            left = "are left out" if name == web.foam else "are taken all the same"
            yield (
                f"{name} is stated at {found.own:g} kg/m³, but stock's strengths are for {found.usual:g} and {left}: "
                f'state its {", ".join(found.strengths)} under [materials."{name}"]'
            )


def _dry_doubts(job: Job) -> Iterator[str]:
    """A facing with less resin than its cloth can hold together."""
    web = job.record.web
    fibre = laminate(web.facing, job.stock, web.adhesive).fibre if web.facing else None
    if fibre is not None and fibre > PACKED:
        yield (
            f"web.facing would be {100.0 * fibre:.0f} % fibre by volume, more than cloth can be packed to: too dry to "
            "bear what is reckoned"
        )


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
        "allowable": float(check.allowed[i]),
        "from": check.origin,
    }
