"""What is said of cores, ribs and cradles: lines for the screen, doubts, and records."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

from ...geom.rib import Cradle, Rib
from ...geom.straight import Miss
from ..cores import HOT_WIRE, BuiltCore, flange_steps
from ..job import Job
from ..ribs import cradle_sheet, facing, left_out, rib_sheet

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
    where = "beside the web" if miss.web else f"{miss.t**2:.2f} chord, {miss.side} side"
    return f"{how} {job.wording.length(abs(miss.off))} at y {job.wording.column(miss.y, 1)}, {where}"


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
    sheet, inner = rib_sheet(job), job.record.ribs is not None and job.record.ribs.outline == "inner"
    what = "the skin's inside" if inner else "the outer surface"
    square = f"; cut square from {words.length(sheet)}, {_short(job, job.ribs)} {what}" if sheet else ""
    return f"{len(job.ribs)} at y {', '.join(words.plain(rib.y) for rib in job.ribs)}{slots}{square}"


def _cradles(job: Job) -> str:
    words = job.wording
    high = ", ".join(words.plain(float(cradle.outline[:, 1].max())) for cradle in job.cradles)
    places = ", ".join(words.plain(c.y) for c in job.cradles)
    square = f"; cut square from {words.length(cradle_sheet(job))}, {_short(job, job.cradles)} the panel"
    return f"{len(job.cradles)} at y {places}, {high} {words.units} high{square}"


def _short(job: Job, made: Sequence[Rib | Cradle]) -> str:
    """How far pieces that are cut square stand off what they touch, in words."""
    return f"one face up to {job.wording.length(max(piece.short for piece in made))} short of"


def doubts(job: Job) -> list[str]:
    """What may go wrong in cutting the cores and the ribs."""
    out = _rib_doubts(job)
    for made in job.cores:
        where = f"core {made.number}"
        tail = made.region.least + min(made.stated.kerf) - made.bays[0].how.wire
        if made.region.kind != "nose" and made.region.to == 1.0 and made.stated.passes == "one" and tail < _FLIMSY:
            thin = job.wording.length(tail)
            out.append(f'{where}: its templates\' tails are only {thin} thick, think of passes = "separate"')
        if abs(made.worst.off) > FAR_OFF:
            miss = miss_words(job, made.worst)
            out.append(f"{where}: the straight cut is {miss}: think of more bays, or state a tolerance in their place")
        legs = flange_steps(job, made, made.region.ends)
        if legs:
            out.append(f"{where}: {legs}")
        if made.region.web is not None and facing(job) is None:
            out.append(
                f"{where}: its face leaves no room for the web's facing: no cloth in stock tells its thickness; add it "
                f"to cores[{made.number}].bond"
            )
    return out


def _rib_doubts(job: Job) -> list[str]:
    """Ribs of which something is left out, or that are drawn for another web or sheet than will be there."""
    words, cutting, out = job.wording, job.record.cutting, []
    for i, rib in enumerate(job.ribs, start=1):
        if rib.slivers:
            where = f"rib {i}, y {words.length(rib.y)}"
            out.append(f"{where}: {left_out(job, rib)}")
    if job.ribs and facing(job) is None:
        out.append(
            "the ribs' slots leave no room for the web's facings: no cloth in stock tells their thickness; add it to "
            "ribs.clearance"
        )
    for key, stated, cut in (
        ("ribs", rib_sheet(job) if job.ribs else 0.0, cutting.ribs if cutting else None),
        ("cradles", cradle_sheet(job) if job.cradles else 0.0, cutting.cradles if cutting else None),
    ):
        if stated and cut is not None and abs(stated - cut.thickness) > 1e-6:
            sheets = f"{words.length(stated)}, but cut from {words.length(cut.thickness)}"
            out.append(
                f"{key} are laid out for a sheet of {sheets}: {key}.thickness and cutting.{key}.thickness differ"
            )
    return out


def core_records(job: Job) -> list[dict[str, Any]]:
    """The cores as records: mm, degrees, grams.

    `off` is positive where foam stands proud, on the upper or lower side or beside the web; `turn` is how far the
    block's axes are nose down from the wing's.
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
                    "off_side": miss.side,
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
    """The ribs as records: mm; `short` is how far one face of the sheet stands off the section, cut square."""
    return [
        {
            "y": rib.y,
            "sheet": rib_sheet(job),
            "short": rib.short,
            "parts": len(rib.pieces),
            "left_out": len(rib.slivers),
            "holes": len(rib.holes),
            "slot": rib.slot.width if rib.slot else None,
        }
        for rib in job.ribs
    ]


def cradle_records(job: Job) -> list[dict[str, Any]]:
    """The cradles as records: mm; `line` is where the mark for the strip stands, aft as the panel lies.

    `short` is how far one face of the sheet stands off the panel, cut square.
    """
    return [
        {
            "y": cradle.y,
            "sheet": cradle_sheet(job),
            "short": cradle.short,
            "height": float(cradle.outline[:, 1].max()),
            "line": cradle.line,
        }
        for cradle in job.cradles
    ]
