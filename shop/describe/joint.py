"""What is said of the joint end and the flanges: lines for the screen, and records."""

from __future__ import annotations

from typing import Any

import numpy as np

from ...geom.joint import section_modulus
from ..flanges import BuiltFlange, sprung
from ..job import Job
from ..joint import JointEnd
from ..wording import CAUTION


def lines(job: Job) -> list[tuple[str, str]]:
    """Joint end, pin and flanges as a builder reads them: (what, figures)."""
    out = [("flange", _flange(job, made)) for made in job.flanges]
    if job.joint is not None:
        out += [("joint", _joint(job, job.joint)), ("pin", _pin(job, job.joint)), ("", CAUTION)]
    return out


def _joint(job: Job, end: JointEnd) -> str:
    stated, words = end.stated, job.wording
    where = "on both faces" if stated.faces == "both" else f"on the {stated.faces} face"
    return (
        f"{words.length(end.across)} at the {stated.end} end for {words.length(stated.length)}, then down to the sheet "
        f"over {words.length(stated.taper)} {where}"
    )


def _pin(job: Job, end: JointEnd) -> str:
    stated, words, found = end.stated, job.wording, end.strength
    how = "chosen from stock" if end.chosen else "as stated"
    planes = "1 plane" if found.planes == 1 else f"{found.planes} planes"
    text = (
        f"{stated.material} {words.length(end.pin)}, {how}: planes x shear strength x cross-section = "
        f"{words.force(found.carries)} in {planes} at {words.stress(found.shear)} ({found.origin})"
    )
    if found.force is not None:
        text += f", reserve factor {found.reserve:.2f} over {words.force(found.force)} ultimate"
    return f"{text}; in shear alone: its bending, the walls it bears on and the glue round its tube are not looked at"


def _flange(job: Job, made: BuiltFlange) -> str:
    flange, words = made.flange, job.wording
    low, high = (np.degrees(v) for v in (flange.angle.min(), flange.angle.max()))
    bow, at = flange.camber
    return (
        f"{flange.name}: asks for {low:.1f}° to {high:.1f}°, sprung by {sprung(flange)} from a bar of "
        f"{np.degrees(flange.shape.bar):g}° (least with {np.degrees(flange.best_bar):.1f}°), camber "
        f"{words.length(abs(bow))} at s {words.column(at, 1)}, {words.mass(made.mass)}"
    )


def doubts(job: Job) -> list[str]:
    """A pin that no force or too small a one is stated for, or one along the web that the moment would bend."""
    end, tube, found = job.joint, job.tube, job.caps
    if end is None or tube is None:
        return []
    force = end.strength.force
    if force is None:
        return ["the joint's pin is not checked: no force is stated for it"]
    if found is None:
        return []
    upright, words, said = end.stated.pin_axis == "upright", job.wording, []
    what, asked = ("cap force", found.force) if upright else ("shear", found.shear)
    ultimate = float(np.interp(tube.start[0], found.s, asked))
    if ultimate > force:
        there = words.force(ultimate)
        said.append(f"the joint's force, {words.force(force)}, is below the {what} there, {there} at ultimate load")
    if not upright:
        moment = float(np.interp(tube.start[0], found.s, found.moment))
        bent = words.stress(moment / section_modulus(end.pin))
        said.append(
            f"the joint's pin lies along the web and is looked at in shear alone: the bending moment there, "
            f"{words.moment(moment)} at ultimate load, would ask {bent} of it, moment / (pi d^3 / 32), if nothing else "
            f"carries it"
        )
    return said


def joint_record(job: Job) -> dict[str, Any] | None:
    """The joint end as a record: mm, N, MPa; None without one."""
    end, tube = job.joint, job.tube
    if end is None or tube is None:
        return None
    found = end.strength
    return {
        "pin": end.pin,
        "chosen": end.chosen,
        "thickness": end.across,
        "length": end.stated.length,
        "taper": end.stated.taper,
        "pads": {pad.face: pad.thickness for pad in job.pads},
        "axis": {"start": list(tube.start), "stop": list(tube.stop), "n": tube.n},
        "formula": "planes x shear strength x cross-section",
        "planes": found.planes,
        "shear_strength": found.shear,
        "from": found.origin,
        "carries": found.carries,
        "force": found.force,
        "reserve": found.reserve,
        "caution": CAUTION,
    }


def flange_records(job: Job) -> list[dict[str, Any]]:
    """The flanges as records: mm, degrees, grams."""
    return [_record(made) for made in job.flanges]


def _record(made: BuiltFlange) -> dict[str, Any]:
    flange, shape = made.flange, made.flange.shape
    bow, at = flange.camber
    places = np.unique(np.concatenate([flange.places[[0, -1]], np.arange(0.0, flange.places[-1], 100.0)]))
    places = places[places >= flange.places[0]]
    return {
        "name": flange.name,
        "bar": float(np.degrees(shape.bar)),
        "best_bar": float(np.degrees(flange.best_bar)),
        "thickness": shape.thickness,
        "bend_allowance": shape.allowance,
        "spring": [float(np.degrees(v)) for v in (flange.spring.min(), flange.spring.max())],
        "angles": [
            {"s": float(s), "angle": float(a)} for s, a in zip(places, np.degrees(flange.at(places)), strict=True)
        ],
        "camber": bow,
        "camber_s": at,
        "area": flange.area,
        "mass": made.mass,
    }
