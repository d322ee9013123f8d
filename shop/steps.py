"""What to do, in a handful of steps: sheet, edge cut, filler, strips, bays of the cores, and what to buy."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from ..geom.web import SIDES, Side
from .describe.core import miss_words
from .describe.strength import factor
from .describe.strips import cut_length, size
from .job import Job
from .records.cutting import Cutting
from .stock import Filler
from .weigh import Candidate
from .wording import degrees


@dataclass(frozen=True)
class Step:
    """One thing to decide or to do: what, the answer in few words, and what belongs to it."""

    what: str
    answer: str
    more: tuple[str, ...] = ()


def steps(job: Job) -> list[Step]:
    """The steps in the order in which a panel is built."""
    return [
        _sheet(job),
        _edges(job),
        _filler(job),
        *_strips(job),
        *_joint(job),
        *_flanges(job),
        *_cores(job),
        _buy(job),
    ]


def _sheet(job: Job) -> Step:
    words, web = job.wording, job.record.web
    digits = 1 if words.units == "in" else 0
    sheets = [c for c in job.cut_list if c.piece.startswith("Web sheet")]
    sizes = " and ".join(f"{words.column(c.length, digits)} x {words.column(c.width, digits)}" for c in sheets)
    count = f"{len(sheets)} pieces, scarfed," if len(sheets) > 1 else "a piece"
    cut = f"cut from {count} {sizes} {words.units}"
    faced = ""
    if web.facing is not None:
        faced = f", {_count(web.facing.layers, 'layer')} of {web.facing.cloth or 'cloth'} on each face"
    stands = (
        f"cant {degrees(float(np.degrees(job.cant)), 2)}{faced}; the whole web weighs {words.mass(job.masses.total)}"
    )
    return Step("Sheet", f"{words.length(web.thickness)} {web.foam}", (f"{cut}, {stands}", _choice(job)))


def _count(number: int, of: str) -> str:
    return f"{number} {of}{'s' * (number != 1)}"


def _choice(job: Job) -> str:
    """Whether what the wing file states is what `weigh` would take."""
    found, words, web = job.verdict, job.wording, job.record.web
    best = found.chosen
    if best is None:
        return found.sentence
    if _same(job, best):
        tried = sum(candidate.outside is None for candidate in job.usual_candidates)
        return f"of {tried} sheets and edge cuts that can be made it is the lightest within the limits"
    less = job.masses.total - best.masses.total
    than = f"{words.mass(abs(less))} {'less' if less > 0.0 else 'more'} than {words.length(web.thickness)} {web.edge}"
    return f"{found.sentence} The first weighs {than}, as stated: change web.thickness and web.edge to take it"


def _same(job: Job, best: Candidate) -> bool:
    web = job.record.web
    return best.edge == web.edge and abs(best.thickness - web.thickness) < 1e-6


def _edges(job: Job) -> Step:
    facts, words, edge = job.facts, job.wording, job.record.web.edge
    skin = [
        f"the skin asks for {degrees(low)} to {degrees(high)} at the {side}"
        for side, (low, high) in zip(SIDES, (facts.bevel_top, facts.bevel_bottom), strict=True)
    ]
    gap = f"largest gap {words.length(job.web.gap)}"
    if edge == "square":
        return Step("Edges", "square, and filled", (*skin, gap))
    if edge == "full bevel":
        return Step("Edges", "full bevel, planed to the changing angle", (*skin, f"{gap}: check with the bevel gauges"))
    settings = [f"saw at the {side}: {', '.join(_runs(job, side))}" for side in SIDES]
    top, bottom = (len(job.web.cut(side).runs) for side in SIDES)
    return Step(
        "Edges", f"set bevel, {_count(top, 'saw setting')} at the top, {bottom} at the bottom", (*settings, gap)
    )


def _runs(job: Job, side: Side) -> Iterator[str]:
    for run in job.web.cut(side).runs:
        yield f"{degrees(float(np.degrees(run.angle)), 2)} to s {job.wording.column(run.stop, 1)}"


def _filler(job: Job) -> Step:
    words, web = job.wording, job.record.web
    grams, allowance = job.masses.filler, (job.record.cutting or Cutting()).allowance
    volume, unit = words.volume_bought(grams / job.stock.find(web.filler, Filler).density * 1e6)
    more = f"{volume:.2g} {unit} for one panel; mix {words.mass(2.0 * grams * (1.0 + allowance))} for both hands, "
    return Step("Filler", f"{words.mass(grams)} {web.filler}", (f"{more}{100.0 * allowance:.0f} % to spare",))


def _strips(job: Job) -> Iterator[Step]:
    caps = job.record.caps
    if caps is None:
        return
    total = sum(layer.count for layer in job.layers)
    more = []
    for side in SIDES:
        pieces = [f"{layer.count} x {cut_length(job, layer)}" for layer in job.layers if layer.side == side]
        more.append(f"{side} edge, from the skin inwards: {', '.join(pieces)}")
    if job.strength is not None:
        worst = job.strength.worst
        more.append(f"least reserve factor {factor(float(worst.reserve.min()))}, {worst.name}: an estimate, no proof")
    yield Step("Cap strips", f"{_count(total, 'strip')}: {caps.strip} {size(job, caps)}", tuple(more))


def _joint(job: Job) -> Iterator[Step]:
    end, words = job.joint, job.wording
    if end is None:
        return
    text = f"web {words.length(end.across)} thick for {words.length(end.stated.length)} at the {end.stated.end} end"
    yield Step("Joint", f"{end.stated.material} {words.length(end.pin)}", (text,))


def _flanges(job: Job) -> Iterator[Step]:
    if not job.flanges:
        return
    bars = (f"{made.flange.name} {np.degrees(made.flange.shape.bar):g}°" for made in job.flanges)
    yield Step("Flanges", _count(len(job.flanges), "flange"), (f"laid up over bars: {', '.join(bars)}",))


def _cores(job: Job) -> Iterator[Step]:
    if not job.cores:
        return
    total = sum(len(core.bays) for core in job.cores)
    more = tuple(
        f"core {core.number}, {core.stated.region}: {_count(len(core.bays), 'bay')} of {core.foam.name}, "
        f"the straight wire {miss_words(job, core.worst)}"
        for core in job.cores
    )
    yield Step("Cores", f"{_count(total, 'bay')} to cut with the wire", more)


def _buy(job: Job) -> Step:
    """All there is to buy in one line; blocks of one foam together, whatever their size."""
    blocks: Counter[str] = Counter()
    more = []
    for buy in job.shopping_list:
        if buy.unit == "blocks":
            blocks[buy.item] += round(buy.amount)
        else:
            amount = _count(round(buy.amount), "sheet") if buy.unit == "sheets" else f"{buy.amount:.3g} {buy.unit}"
            more.append(f"{amount} {buy.item}" + (f", {buy.size}" if buy.size else ""))
    more += [f"{_count(count, 'block')} {item} for cores" for item, count in blocks.items()]
    return Step(
        "To buy",
        f"for the panels of both hands, sizes in {job.wording.length_unit}",
        ("; ".join(more),),
    )
