"""The report: one page that opens in any browser without a network, made from the template and style in `page`."""

from __future__ import annotations

import json
from collections.abc import Sequence
from dataclasses import asdict
from importlib import resources
from typing import Any

import jinja2

from .. import __version__
from ..shop.job import Job
from ..shop.steps import Step, steps
from . import plot, view3d
from .chapters import Chapter, chapters
from .table import Table

_PAGE = resources.files(__package__) / "page"
_LONG, _WIDE = 12, 8  # rows and columns: a table with more of both is folded away until it is asked for
_SEE = "What to cut, from what, how much of it, and what to look at twice; the figures below say why."


def render(job: Job) -> bytes:
    """The whole report as HTML.

    Raises
    ------
    WingError
        Where the job itself cannot be reckoned.
    """
    with plot.style():
        found = chapters(job)
    record = job.record
    page = jinja2.Environment(autoescape=True, trim_blocks=True, undefined=jinja2.StrictUndefined)
    return (
        page.from_string(_read("report.html"))
        .render(
            name=record.name,
            stamp=job.stamp,
            date=record.date.isoformat() if record.date else "",
            units=record.units,
            file=job.path.name,
            version=__version__,
            see=_SEE,
            steps=[*map(_step, steps(job)), _watch(job)],
            sections=[_section(chapter) for chapter in found],
            css=_read("report.css"),
            scene=json.dumps(view3d.scene(job), separators=(",", ":")).replace("</", "<\\/"),
            three=_read("three.min.js"),
            licence=_read("three.LICENSE.txt"),
            viewer=_read("view3d.js"),
        )
        .encode("utf-8")
    )


def _read(name: str) -> str:
    return (_PAGE / name).read_text(encoding="utf-8")


def _step(step: Step) -> dict[str, Any]:
    return asdict(step) | {"more": [_capital(line) for line in step.more], "alarm": False}


def _capital(line: str) -> str:
    return line[0].upper() + line[1:]


def _watch(job: Job) -> dict[str, Any]:
    """What could go wrong, as the last step."""
    count = len(job.doubts)
    answer = (
        "nothing doubtful found"
        if not count
        else "one thing is doubtful"
        if count == 1
        else f"{count} things are doubtful"
    )
    more = [*job.doubts, "dust, resins, hot wires and strength: read the cautions below before cutting"]
    return {"what": "Look twice", "answer": answer, "more": [_capital(line) for line in more], "alarm": bool(count)}


def _section(chapter: Chapter) -> dict[str, Any]:
    """A chapter as the template asks for it; columns of figures are set to the right."""
    return {
        "name": chapter.name,
        "title": chapter.title,
        "see": chapter.see,
        "key": chapter.key,
        "solid": chapter.solid,
        "figures": chapter.figures,
        "facts": chapter.facts,
        "tables": [_table(shown) for shown in chapter.tables],
        "cards": chapter.cards,
        "notes": chapter.notes,
    }


def _table(shown: Table) -> dict[str, Any]:
    numbers = [i for i in range(len(shown.heads)) if _figures([row[i] for row in shown.rows])]
    return asdict(shown) | {"numbers": numbers, "long": len(shown.rows) > _LONG and len(shown.heads) > _WIDE}


def _figures(column: Sequence[str]) -> bool:
    """Whether a column holds figures: it begins with one wherever it is not empty."""
    filled = [cell.lstrip("+-−>") for cell in column if cell]
    return bool(filled) and all(cell[0].isdigit() and " x " not in cell for cell in filled)
