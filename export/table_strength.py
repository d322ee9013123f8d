"""Tables of cap strips, loads and reserves for the screen."""

from __future__ import annotations

from ..shop.describe.strength import factor, places
from ..shop.describe.strips import cut_length
from ..shop.job import Job
from ..shop.strength import Check, Strength
from ..shop.strips import Layer
from .table import Table


def tables(job: Job) -> list[Table]:
    """All of them, or none without a load."""
    found = job.strength
    if found is None:
        return []
    shown = [_along(job, found), _reserves(job, found), _checks(job, found)]
    return [_layers(job), *shown] if job.record.caps else shown


def _layers(job: Job) -> Table:
    put = job.wording.column

    def line(layer: Layer) -> tuple[str, ...]:
        stop = "outer end" if layer.whole else put(layer.stop, 1)
        y = "" if layer.whole else put(layer.y, 1)
        return layer.side, str(layer.number), str(layer.count), stop, y, cut_length(job, layer), put(layer.height)

    title = f"cap strips, each from the inner end, numbered from the skin (lengths in {job.wording.length_unit})"
    heads = ("edge", "layer", "strips", "stops at s", "rib y", "cut to", "stack")
    return Table(title, heads, tuple(line(layer) for layer in job.layers))


def _along(job: Job, found: Strength) -> Table:
    put, words, at = job.wording.column, job.wording, found.schedule
    heads = ["s", "rib y", "shear", "moment", "apart", "cap force"]
    heads += [head for side in at.need for head in (side, "stack")]
    rows = []
    for i in places(found):
        row = [put(at.s[i], 1), put(at.y[i], 1), words.force(at.shear[i]), words.moment(at.moment[i])]
        row += [put(at.apart[i]), words.force(at.force[i])]
        for side, need in at.need.items():
            row += [f"{need[i]:.2f}", put(float(at.height(side)(at.s[i])))]
        rows.append(tuple(row))
    needed = "; layers needed at either edge, and the stack there" if at.need else ""
    title = f"ultimate load{needed} (lengths in {job.wording.length_unit})"
    return Table(title, tuple(heads), tuple(rows))


def _reserves(job: Job, found: Strength) -> Table:
    put, at = job.wording.column, found.schedule
    rows = tuple(
        (put(at.s[i], 1), put(at.y[i], 1), *(factor(float(check.reserve[i])) for check in found.checks))
        for i in places(found)
    )
    return Table("reserve factors at ultimate load", ("s", "rib y", *(check.name for check in found.checks)), rows)


def _checks(job: Job, found: Strength) -> Table:
    put, at = job.wording.column, found.schedule

    def line(check: Check) -> tuple[str, ...]:
        i = check.least
        say = job.wording.force if check.unit == "N" else job.wording.stress
        return (
            check.name,
            factor(float(check.reserve[i])),
            put(at.s[i], 1),
            put(at.y[i], 1),
            say(float(check.demand[i])),
            say(float(check.allowed[i])),
            check.origin,
        )

    heads = ("least reserve", "factor", "at s", "rib y", "asked", "allowed", "from")
    return Table("where each reserve is least", heads, tuple(line(check) for check in found.checks))
