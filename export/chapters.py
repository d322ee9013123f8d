"""The report's chapters: which figures and tables there are, and in a sentence what to see in them.

A chapter that has nothing to show is left out.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.figure import Figure

from ..geom import washout
from ..geom.web import SIDES, Side
from ..shop.describe import core, cutting, joint, strength
from ..shop.describe.facts import panel
from ..shop.job import Job
from ..shop.verdict import saving_sentence
from ..shop.wording import CAUTIONS, degrees
from . import figures, figures_core, figures_edge, figures_load, table, table_lists, table_strength, view3d
from .plot import Shown, to_svg
from .table import Table

_CUT = {
    "square": "the black line is the square cut, and what lies between is filled",
    "set bevel": "the black bars are the saw's settings, and what lies between is filled",
    "full bevel": "each edge is planed to its line",
}


@dataclass(frozen=True)
class Chapter:
    """A part of the report: its name in the page, what it is called, and what to see in it.

    `key` says what colours stand for, no colour being a broken line; `cards` sets lists as cards on narrow screens;
    `solid` puts the 3D view in place of its figure.
    """

    name: str
    title: str
    see: str
    figures: Sequence[Shown] = ()
    tables: Sequence[Table] = ()
    facts: Sequence[tuple[str, str]] = ()
    notes: Sequence[str] = ()
    key: Sequence[tuple[str, str]] = ()
    cards: bool = False
    solid: bool = False


def chapters(job: Job) -> list[Chapter]:
    """All chapters that have something to show, in reading order; to be asked for within `plot.style`."""
    return [
        *_panel(job),
        *_solid(job),
        *_washout(job),
        *_edges(job),
        *_sections(job),
        *_trade(job),
        *_load(job),
        *_flanges(job),
        *_cores(job),
        *_lists(job),
        *_cautions(job),
    ]


def _shown(name: str, title: str, made: Figure | None) -> list[Shown]:
    return [] if made is None else [Shown(name, title, to_svg(made, name))]


def _panel(job: Job) -> Iterator[Chapter]:
    web, words = job.record.web, job.wording
    ends = f"{words.plain(web.ends[0])} to {words.length(web.ends[1])}"
    see = f"From above, root at the left: the web runs from rib {ends}."
    if job.record.caps:
        see += " A triangle stands where a layer of strips stops."
    if job.cores:
        see += " Bays of the cores are numbered from the root."
    yield Chapter(
        "panel", "The panel", see, _shown("plan", "The panel from above", figures.plan(job)), facts=panel(job)
    )


def _solid(job: Job) -> Iterator[Chapter]:
    see = "Turn it with the mouse or a finger, zoom with the wheel; at the web's ends see how skin and sheet meet."
    still = _shown("still", "The panel in three dimensions", view3d.still(job))
    yield Chapter("solid", "In three dimensions", see, still, solid=True)


def _washout(job: Job) -> Iterator[Chapter]:
    y, steep = washout.steepest(job.loft.washout)
    per, unit = (304.8, "foot") if job.record.units == "in" else (1000.0, "metre")
    see = (
        "Where the line leaves the straight twist, the angle between skin and flat web changes unevenly: fastest at "
        f"y {job.wording.length(y)}, by {abs(float(np.degrees(steep))) * per:.1f}° a {unit}."
    )
    yield Chapter("washout", "Washout", see, _shown("washout", "Washout along the span", figures.washout(job)))


def _edges(job: Job) -> Iterator[Chapter]:
    facts, words = job.facts, job.wording
    see = (
        f"The angle that the skin asks for: {degrees(facts.bevel_top[0])} to {degrees(facts.bevel_top[1])} at the top, "
        f"{degrees(facts.bevel_bottom[0])} to {degrees(facts.bevel_bottom[1])} at the bottom; "
        f"{_CUT[job.record.web.edge]}."
    )
    rows = job.rows(job.places(50.8 if job.record.units == "in" else 50.0))
    tables = [*table.bevels(job, rows), *([table.runs(job)] if job.record.web.edge == "set bevel" else [])]
    yield Chapter(
        "bevel",
        "Bevel",
        see,
        _shown("bevel", "Bevel of both edges along the web", figures_edge.bevels(job)),
        tables[2:],
    )
    see = "How high the skin stands over both faces of the sheet; below, how much further up it meets the rear one."
    shown = _shown("heights", "Heights of both faces along the web", figures_edge.heights(job))
    yield Chapter("heights", "Heights", see, shown, tables[:2])
    worst: Side = max(SIDES, key=lambda side: float(job.web.cut(side).gap.max()))
    gap = job.web.cut(worst).gap
    at = float(job.web.survey.s.ravel()[gap.argmax()])
    see = (
        f"The gap is widest at the {worst}, {words.length(float(gap.max()))} at s {words.length(at)}; both edges take "
        f"{words.mass(facts.filler)} of filler in all."
    )
    notes = (
        ["What lies beside the cap strips counts as filler too, and is not in this figure."] if job.record.caps else []
    )
    yield Chapter(
        "gap",
        "Gap and filler",
        see,
        _shown("fill", "Gap and filler along the web", figures_edge.fill(job)),
        notes=notes,
    )


def _sections(job: Job) -> Iterator[Chapter]:
    see = "Three places along the web, to scale, and both of its edges enlarged: the gap between sheet and skin."
    shown = [
        figure
        for i, s in enumerate(figures_edge.places(job))
        for figure in _shown(f"section{i + 1}", f"Section at s {job.wording.length(s)}", figures_edge.section(job, s))
    ]
    key = [*figures_edge.key(job), ("", "a square cut would stop here")]
    yield Chapter("sections", "Sections", see, shown, key=key)


def _trade(job: Job) -> Iterator[Chapter]:
    found, verdict = job.usual_candidates, job.verdict
    shown = _shown("trade", "Mass against thickness for each edge cut", figures.trade(job, found, verdict))
    tables = [table.weighed(job, found, verdict)]
    notes = [" ".join(table.WEIGHED_NOTE.split()) + ".", saving_sentence(job.saving, job)]
    yield Chapter("trade", "Thickness and edge cut", verdict.sentence, shown, tables, notes=notes)


def _load(job: Job) -> Iterator[Chapter]:
    found = job.strength
    if found is None:
        return
    tables = table_strength.tables(job)
    if job.record.caps:
        see = (
            "Bars are the layers as they are cut, the one next to the skin lowest; the line is what the load asks for."
        )
        shown = _shown("strips", "Cap strips along the web", figures_load.strips(job))
        yield Chapter("strips", "Cap strips", see, shown, tables[:1])
        tables = tables[1:]
    see = "Allowable over what is asked at ultimate load: nothing may reach down to 1."
    if found.checks:
        worst = found.worst
        at = job.wording.length(float(found.schedule.s[worst.least]))
        see += f" Least is {worst.name}, {strength.factor(float(worst.reserve.min()))} at s {at}."
    shown = _shown("reserves", "Reserve factors along the web", figures_load.reserves(job))
    notes = [f"Not checked: {what}." for what in found.unchecked]
    yield Chapter("reserves", "Load and reserves", see, shown, tables, strength.lines(job), notes)


def _flanges(job: Job) -> Iterator[Chapter]:
    facts = joint.lines(job)
    if not facts:
        return
    title, see = "Joint", "The pin, and what the web is thickened to over it."
    if job.flanges:
        title = "Flanges and joint" if job.joint else "Flanges"
        see = "The angle that each flange is sprung to along the web, from that of the bar it is laid up over."
    shown = _shown("flanges", "Angles of the flanges", figures_load.flanges(job))
    yield Chapter("flanges", title, see, shown, facts=facts)


def _cores(job: Job) -> Iterator[Chapter]:
    facts = core.lines(job)
    if not facts:
        return
    title, see = "Ribs and cradles", "Where they stand."
    if job.cores:
        title = "Cores, ribs and cradles" if job.ribs or job.cradles else "Cores"
        see = "A hot wire is straight, the skin is not: how far foam is left proud of it or falls short, bay by bay."
        see += " Dotted: the tolerance." if any(core.stated.tolerance for core in job.cores) else ""
    shown = _shown("cores", "Straight-cut error along the cores", figures_core.straight_cut(job))
    yield Chapter("cores", title, see, shown, facts=facts)


def _lists(job: Job) -> Iterator[Chapter]:
    see = "Every piece for one panel and for both, with the size it is cut from."
    yield Chapter("cut-list", "Cut list", see, tables=[table_lists.cut_list(job)], facts=cutting.lines(job), cards=True)
    see = "What to buy for the panels of both hands."
    yield Chapter("shopping", "Shopping list", see, tables=[table_lists.shopping_list(job)], cards=True)


def _cautions(job: Job) -> Iterator[Chapter]:
    doubts: Iterable[str] = (f"Doubtful: {doubt}." for doubt in job.doubts)
    notes = [*doubts, *CAUTIONS]
    yield Chapter("cautions", "What could go wrong", "Read this before cutting foam or mixing resin.", notes=notes)
