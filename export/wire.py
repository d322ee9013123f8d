"""The wire's path for a machine: CSV, and plain RS-274 (ISO 6983).

RS-274 as far as any controller reads it: G21 or G20 (mm or inches), G90 (absolute), G0 and G1 with all four axes in
every move, F in every cut, M2 at the end. Comments stand in brackets.
"""

from __future__ import annotations

import csv
import io

import numpy as np
from numpy.typing import NDArray

from ..geom import lettering
from ..geom.drawing import Hand
from ..shop.cores import HOT_WIRE, WirePath
from ..shop.job import Job
from ..shop.units import MM_PER_INCH

Array = NDArray[np.float64]


def name(found: WirePath) -> str:
    """What the path is called: ``core-1-nose-bay-2-path``."""
    return f"{found.core.name}-bay-{found.index + 1}-path"


def to_csv(job: Job, found: WirePath, hand: Hand) -> bytes:
    """The path as a table: where each move ends, mm, at the block's two ends and on the machine's axes; mm/min.

    Returns
    -------
    bytes
        A line of names, then one line for each move: the run (empty through the air), the sync mark reached, horizontal
        and vertical place at the inner and the outer end of the block, the four axes, and F for moves through the foam.
    """
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    axes = _axes(job)
    places = [f"{end}_{way}_mm" for end in ("inner", "outer") for way in ("aft", "up")]
    writer.writerow(["run", "mark", *places, *(f"{axis}_mm" for axis in axes), "feed_mm_per_min"])
    path = found.path
    feed = _feed(job, found, hand)
    for i, planes in enumerate(_on_axes(found, hand)):
        figures = [f"{v:.4f}" for v in (*path.ends[i].ravel(), *planes)]
        mark = str(path.mark[i]) if path.mark[i] else ""
        writer.writerow([path.run[i], mark, *figures, f"{feed[i]:.2f}" if path.cutting[i] else ""])
    return out.getvalue().encode()


def to_rs274(job: Job, found: WirePath, hand: Hand) -> bytes:
    """The path as a program for a machine, in the wing file's units."""
    inches = job.record.units == "in"
    scale, digits = (1.0 / MM_PER_INCH, 5) if inches else (1.0, 4)
    axes, path = _axes(job), found.path
    feed = _feed(job, found, hand) * scale
    lines = [f"({_comment(line)})" for line in _heading(job, found, hand)]
    lines += ["G20" if inches else "G21", "G90"]
    run = ""
    for i, planes in enumerate(_on_axes(found, hand) * scale):
        if path.run[i] and path.run[i] != run:
            lines.append(f"(run {path.run[i]})")
        run = path.run[i]
        words = " ".join(f"{axis}{_tidy(v, digits)}" for axis, v in zip(axes, planes, strict=True))
        lines.append(f"G1 {words} F{_tidy(float(feed[i]), 3)}" if path.cutting[i] else f"G0 {words}")
    return ("\n".join([*lines, "M2"]) + "\n").encode("ascii")


def _axes(job: Job) -> tuple[str, ...]:
    return job.record.wire.axes if job.record.wire else ()


def _on_axes(found: WirePath, hand: Hand) -> Array:
    """(k, 4) places of the axes: a left-hand core is the right-hand one's mirror image, so its ends change places."""
    planes = found.path.planes
    return np.asarray((planes if hand == "right" else planes[:, ::-1]).reshape(-1, 4))


def _feed(job: Job, found: WirePath, hand: Hand) -> Array:
    """(k,) F for each move, mm/min."""
    ends = found.path.feed if hand == "right" else found.path.feed[:, ::-1]
    if job.record.wire and job.record.wire.feed == "all":
        return np.asarray(np.linalg.norm(ends, axis=1))
    return np.asarray(np.where(ends[:, 0] > 0.0, ends[:, 0], ends[:, 1]))


def _heading(job: Job, found: WirePath, hand: Hand) -> list[str]:
    stated, words, made = job.record.wire, job.wording, found.core
    if stated is None or stated.planes is None or stated.place is None or stated.speed is None:
        raise ValueError("the wing file states no machine")
    bay = made.bays[found.index]
    first, second = ("inner", "outer") if hand == "right" else ("outer", "inner")
    a, b, c, d = stated.axes
    near, far = stated.planes[0], stated.planes[1]
    of = "the first two axes, or the others where those stand still" if stated.feed == "first" else "all four axes"
    return [
        f"{job.record.name}, {hand} hand, revision {job.stamp}",
        f"core {made.number} {made.stated.region}, bay {found.index + 1} of {len(made.bays)}, {made.foam.name}",
        f"{a} {b}: aft and up at the {first} end; {c} {d}: at the {second} end",
        f"planes at {words.length(near)} and {words.length(far)} outwards from the block's inner end",
        f"block {words.length(bay.length)} long, ends {words.plain(bay.section[0])} x {words.length(bay.section[1])}, "
        f"outer end {words.length(float(bay.shift[0]))} aft and {words.length(float(bay.shift[1]))} up of the inner",
        f"front lower corner of the inner end {words.plain(stated.place[0])} aft, {words.length(stated.place[1])} up",
        f"wire {words.length(bay.how.wire)}, kerf {words.length(bay.ends[0].kerf)} at the inner end, "
        f"{words.length(bay.ends[1].kerf)} at the outer",
        f"slower end {words.length(stated.speed)} a second in the foam; F is the speed of {of}",
        f"{found.path.minutes:.1f} minutes in the foam; start with the wire at zero on all axes, hot",
        HOT_WIRE,
    ]


def _comment(text: str) -> str:
    """`text` in characters that may stand in a comment."""
    return lettering.plain(text).replace("(", "[").replace(")", "]").replace("°", " deg")


def _tidy(value: float, digits: int) -> str:
    text = f"{value:.{digits}f}".rstrip("0").rstrip(".")
    return "0" if text in ("", "-0") else text
