"""What stands on the wire templates: all that two people with a bow need to know to cut a bay from the paper alone."""

from __future__ import annotations

import numpy as np

from ...geom.block import PIN
from ...geom.drawing import Hand
from ...geom.wire import Bay, Run
from ..cores import HOT_WIRE, BuiltCore, flange_steps
from ..job import Job
from ..wording import Wording, degrees


def notes(job: Job, made: BuiltCore, index: int, hand: Hand) -> list[str]:
    """Heading and notes for one bay."""
    bay, words = made.bays[index], job.wording
    said = [
        f"core {made.number} {made.stated.region.upper()}, bay {index + 1} of {len(made.bays)}, {hand.upper()} hand",
        _block(made, bay, words),
        _pins(job, bay),
        _runs(bay),
        _calls(job, bay, words),
        f"Wire {words.length(bay.how.wire)}, kerf {words.length(bay.ends[0].kerf)} at the inner and "
        f"{words.length(bay.ends[1].kerf)} at the outer end: measure both on a scrap first. The wire rides on the "
        "boards' edges.",
        _straight(made, index, words),
    ]
    legs = flange_steps(job, made, (bay.ends[0].y, bay.ends[1].y))
    if legs:
        said.append(f"{legs[0].upper()}{legs[1:]}.")
    if made.region.kind != "nose" and min(min(end.limits.stop) for end in bay.ends) < made.region.limit - 1e-9:
        thin = words.length(made.region.least)
        said.append(f"Foam aft of END OF CORE, where it would be thinner, is cut {thin} thick: cut it off there.")
    return [*said, HOT_WIRE, f"Wing file revision {job.stamp}"]


def _block(made: BuiltCore, bay: Bay, words: Wording) -> str:
    wide, high = bay.section
    aft, up = bay.shift
    sheets = made.foam.sheets_in if words.units == "in" else made.foam.sheets_mm
    sheet = next((f" ({words.length(size)} sheet)" for size in sheets if size >= high), "")
    return (
        f"Block of {made.foam.name}: {_rough(bay.length, words)} from rib y {_rough(bay.ends[0].y, words)} to rib y "
        f"{_rough(bay.ends[1].y, words)}, ends {_rough(wide, words)} x {_rough(high, words)}{sheet}, the outer one "
        f"{_rough(abs(aft), words)} further {'aft' if aft >= 0 else 'forward'} and {_rough(abs(up), words)} "
        f"{'higher' if up >= 0 else 'lower'}. Cut square, its ends are {_rough(bay.upright[0], words)} x "
        f"{_rough(bay.upright[1], words)}."
    )


def _rough(mm: float, words: Wording) -> str:
    """Length to a tenth of a millimetre or a hundredth of an inch, with its unit."""
    return f"{words.column(mm, 2 if words.units == 'in' else 1)} {words.units}"


def _pins(job: Job, bay: Bay) -> str:
    words, at = job.wording, bay.ends[0]
    back, up = at.pins[0] - at.block[:2]
    ends = np.array([end.y for end in bay.ends])
    twist = np.degrees(job.loft.washout(ends, ends)[0])
    return (
        f"Pin each board to its end as seen from outside the block: {PIN:g} mm pins on the level line, at both ends "
        f"{_rough(up, words)} above the block's foot, {_rough(back, words)} behind its front and "
        f"{words.length(at.pins[1, 0] - at.pins[0, 0])} apart. They alone set the washout between the ends, "
        f"{degrees(twist[1] - twist[0], 2)}."
    )


def _runs(bay: Bay) -> str:
    """The runs of the wire, one after another."""
    said = []
    for number, run in enumerate(bay.runs, start=1):
        how = "straight down" if run.straight else f"IN, marks {run.marks[0][0]} to {run.marks[-1][0]}, OUT"
        said.append(f"{number} {run.name.upper()}: {how}")
    return f"Runs: {'; '.join(said)}. The block stands on battens; offcuts stay round the core, weighted."


def _calls(job: Job, bay: Bay, words: Wording) -> str:
    text = "Call the numbers: both people are at the same mark at the same moment and move evenly in between"
    speed = job.record.wire.speed if job.record.wire else None
    if speed is None:
        return f"{text}."
    beats = "; ".join(f"{run.name.upper()} {_beats(run, speed)}" for run in bay.runs if run.marks)
    return f"{text}. At {words.length(speed)} a second for the slower end, seconds to each mark: {beats}."


def _beats(run: Run, speed: float) -> str:
    """When the wire is due at each mark, counted from the first, in whole seconds."""
    way = np.linalg.norm(np.diff(run.centre, axis=1), axis=2).min(axis=0)
    passed = np.append(0.0, np.cumsum(way)) / speed
    return ", ".join(f"{passed[i] - passed[run.marks[0][1]]:.0f}" for _, i in run.marks)


def _straight(made: BuiltCore, index: int, words: Wording) -> str:
    miss = made.misses[index]
    if abs(miss.off) < 5e-4:
        return "A straight wire cuts this bay exactly."
    how = "stands proud by" if miss.off > 0 else "is short by"
    where = "beside the web" if miss.web else f"{miss.t**2:.2f} chord, {miss.side} side"
    return (
        f"As the wire is straight, foam {how} up to {words.length(abs(miss.off))}, most at rib y "
        f"{_rough(miss.y, words)}, {where}."
    )
