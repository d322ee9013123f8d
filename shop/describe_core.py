"""What is said of cores, ribs and cradles: lines for the screen, doubts, and records."""

from __future__ import annotations

import math
from typing import Any

from ..geom.straight import Miss
from .cores import HOT_WIRE, BuiltCore
from .job import Job

FAR_OFF = 1.0  # mm of straight-cut error from which a core is doubtful
_FLIMSY = 3.0  # mm, a template's tail thinner than this bends under the wire


def lines(job: Job) -> list[tuple[str, str]]:
    """Cores with their bays, ribs and cradles as a builder reads them: (what, figures)."""
    out: list[tuple[str, str]] = []
    for made in job.cores:
        out.append(("core", _core(job, made)))
        out += [("bay", _bay(job, made, i)) for i in range(len(made.bays))]
    if job.cores:
        out.append(("", HOT_WIRE))
    if job.wire_paths:
        minutes = sum(found.path.minutes for found in job.wire_paths)
        out.append(("wire", f"{len(job.wire_paths)} paths for a machine, {minutes:.0f} minutes in the foam"))
    if job.ribs:
        out.append(("ribs", _ribs(job)))
    if job.cradles:
        out.append(("cradles", _cradles(job)))
    return out


def _core(job: Job, made: BuiltCore) -> str:
    words, count = job.wording, len(made.bays)
    bays = "1 bay" if count == 1 else f"{count} bays"
    return (
        f"{made.number} {made.stated.region}, y {words.plain(made.bounds[0])} to {words.plain(made.bounds[-1])}, "
        f"{made.foam.name}, {words.mass(made.mass)}: {bays}, the straight cut {miss_words(job, made.worst)}"
    )


def miss_words(job: Job, miss: Miss) -> str:
    """How far a straight cut is off, and where."""
    if abs(miss.off) < 5e-4:
        return "true"
    how = "proud by" if miss.off > 0.0 else "short by"
    side = "upper" if miss.t > 0.0 else "lower"
    fraction = f"{miss.t**2:.2f} chord"
    return f"{how} {job.wording.length(abs(miss.off))} at y {job.wording.column(miss.y, 1)}, {fraction}, {side} side"


def _bay(job: Job, made: BuiltCore, index: int) -> str:
    words, bay = job.wording, made.bays[index]
    wide, high = bay.section
    digits = 2 if words.units == "in" else 1
    block = " x ".join(words.column(v, digits) for v in (bay.length, wide, high))
    return (
        f"{index + 1}: y {words.column(bay.ends[0].y, digits)} to {words.column(bay.ends[1].y, digits)}, "
        f"block {block} {words.units}, {miss_words(job, made.misses[index])}"
    )


def _ribs(job: Job) -> str:
    words = job.wording
    widths = [rib.slot.width for rib in job.ribs if rib.slot is not None]
    ends = list(dict.fromkeys(words.plain(width) for width in (min(widths, default=0.0), max(widths, default=0.0))))
    slots = f", slots {' to '.join(ends)} {words.units} wide" if widths else ""
    return f"{len(job.ribs)} at y {', '.join(words.plain(rib.y) for rib in job.ribs)}{slots}"


def _cradles(job: Job) -> str:
    words = job.wording
    high = ", ".join(words.plain(float(cradle.outline[:, 1].max())) for cradle in job.cradles)
    return f"{len(job.cradles)} at y {', '.join(words.plain(c.y) for c in job.cradles)}, {high} {words.units} high"


def doubts(job: Job) -> list[str]:
    """What may go wrong in cutting the cores."""
    out = []
    for made in job.cores:
        where = f"core {made.number}"
        tail = made.region.least + min(made.stated.kerf) - made.bays[0].how.wire
        if made.region.kind != "nose" and made.region.to == 1.0 and made.stated.passes == "one" and tail < _FLIMSY:
            thin = job.wording.length(tail)
            out.append(f'{where}: its templates\' tails are only {thin} thick, think of passes = "separate"')
        if abs(made.worst.off) > FAR_OFF:
            miss = miss_words(job, made.worst)
            out.append(f"{where}: the straight cut is {miss}: think of more bays, or state a tolerance in their place")
        step = _step(job, made)
        if step > 0.05:
            out.append(
                f"{where}: the web's thickness changes inside a bay, so its straight face is off by up to "
                f"{job.wording.length(step)}"
            )
    return out


def _step(job: Job, made: BuiltCore) -> float:
    """How far a core's straight face beside the web is off, where the web is thickened inside a bay; mm."""
    web, face = made.region.web, made.region.face
    if web is None or face is None or len(face.s) < 2:
        return 0.0
    worst = 0.0
    for a, b in zip(made.bounds[:-1], made.bounds[1:], strict=True):
        s0, s1 = (float(web.s_at_rib(y, 0.0, 0.0)) for y in (a, b))
        ends = float(face(s0)), float(face(s1))
        inside = [s for s in face.s if s0 < s < s1]
        straight = [ends[0] + (s - s0) / (s1 - s0) * (ends[1] - ends[0]) for s in inside]
        worst = max([worst, *(abs(float(face(s)) - n) for s, n in zip(inside, straight, strict=True))])
    return worst


def core_records(job: Job) -> list[dict[str, Any]]:
    """The cores as records: mm, degrees, grams.

    `off` is positive where foam stands proud, `turn` how far the block's axes are nose down from the wing's.
    """
    return [
        {
            "region": made.stated.region,
            "ends": list(made.region.ends),
            "foam": made.foam.name,
            "volume": made.mesh.volume,
            "mass": made.mass,
            "bays": [
                {
                    "ends": [bay.ends[0].y, bay.ends[1].y],
                    "off": miss.off,
                    "off_y": miss.y,
                    "off_fraction": miss.t**2,
                    "off_side": "upper" if miss.t > 0.0 else "lower",
                    "block": [bay.length, *bay.section],
                    "shift": bay.shift.tolist(),
                    "turn": math.degrees(bay.turn),
                    "kerf": list(made.stated.kerf),
                }
                for bay, miss in zip(made.bays, made.misses, strict=True)
            ],
            "caution": HOT_WIRE,
        }
        for made in job.cores
    ]


def path_records(job: Job) -> list[dict[str, Any]]:
    """The paths of the wire as records: minutes in the foam, and how far the machine's axes reach, mm."""
    return [
        {
            "core": found.core.number,
            "bay": found.index + 1,
            "minutes": found.path.minutes,
            "reach": found.path.planes.max(axis=(0, 1)).tolist(),
        }
        for found in job.wire_paths
    ]


def rib_records(job: Job) -> list[dict[str, Any]]:
    """The ribs as records: mm."""
    return [
        {"y": rib.y, "parts": len(rib.pieces), "holes": len(rib.holes), "slot": rib.slot.width if rib.slot else None}
        for rib in job.ribs
    ]


def cradle_records(job: Job) -> list[dict[str, Any]]:
    """The cradles as records: mm; `line` is where the mark for the strip stands, aft as the panel lies."""
    return [{"y": cradle.y, "height": float(cradle.outline[:, 1].max()), "line": cradle.line} for cradle in job.cradles]
