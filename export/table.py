"""Tables and records of results: for the screen, as JSON and as CSV, all from the same figures."""

from __future__ import annotations

import csv
import io
import json
import math
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import asdict, dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from ..geom.web import SIDES
from ..shop.bevels import EdgeRow, Row
from ..shop.job import Job
from ..shop.verdict import Saving, Verdict, cautions
from ..shop.weigh import Candidate
from ..shop.wording import degrees

if TYPE_CHECKING:
    from rich.table import Table as RichTable


WEIGHED_NOTE = (
    "gap: the largest to be filled; bevel, swing: the largest angle cut, and how far it turns along\n"
    "an edge; other: what bonds the web and lies on it; limits: met, or the ones that are broken"
)
_SHORT = {"max_gap": "gap", "max_bevel": "bevel", "min_thickness": "thin", "max_mass": "heavy"}
_SHORT |= {"core in shear": "core", "facings in shear": "facing"}  # their names among the checks of strength

_SIGNS = tuple("0123456789.+-\N{MINUS SIGN}")  # what a figure may begin with


@dataclass(frozen=True)
class Table:
    """A table of texts for the screen; `marked` rows stand out."""

    title: str
    heads: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    marked: frozenset[int] = frozenset()

    def rich(self) -> RichTable:
        """Give the table as rich shows it."""
        from rich import box
        from rich.table import Table as RichTable
        from rich.text import Text

        look: dict[str, Any] = {"box": box.SIMPLE_HEAD, "pad_edge": False, "padding": (0, 1, 0, 0)}
        shown = RichTable(title=Text(self.title), title_justify="left", **look)
        for i, head in enumerate(self.heads):
            figures = any(_is_figure(row[i]) for row in self.rows)
            shown.add_column(head, justify="right" if figures else "left", no_wrap=True)
        for i, row in enumerate(self.rows):
            shown.add_row(*map(Text, row), style="bold" if i in self.marked else None)
        return shown


def _is_figure(text: str) -> bool:
    return text[:1] in _SIGNS and ", " not in text


def to_json(record: object) -> str:
    """JSON with what has no number (the figures of a web that cannot be made) as null."""
    return json.dumps(_finite(record), indent=2, ensure_ascii=False)


def _finite(value: Any) -> Any:
    if isinstance(value, Mapping):
        return {key: _finite(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [_finite(item) for item in value]
    return None if isinstance(value, float) and not math.isfinite(value) else value


def to_csv(records: Sequence[Mapping[str, Any]]) -> str:
    """CSV with a line of names; a record inside a record becomes columns ``outer_inner``."""
    flat = [dict(_flat(record)) for record in records]
    out = io.StringIO()
    writer = csv.DictWriter(out, fieldnames=list(flat[0]) if flat else [], lineterminator="\n")
    writer.writeheader()
    writer.writerows(flat)
    return out.getvalue()


def _flat(record: Mapping[str, Any], before: str = "") -> Iterable[tuple[str, Any]]:
    for key, value in record.items():
        if isinstance(value, Mapping):
            yield from _flat(value, f"{before}{key}_")
        else:
            yield f"{before}{key}", _finite(value)


def bevels(job: Job, rows: Sequence[Row]) -> list[Table]:
    """The bevel table of each edge for the screen, in the wing file's units."""
    return [_edge_table(job, rows, side) for side in SIDES]


def _edge_table(job: Job, rows: Sequence[Row], side: str) -> Table:
    put = job.wording.column
    heads = ("s", "y", "thick", "front", "rear", "bevel", "crown", "gap", "cut front", "cut rear")

    def line(row: Row) -> tuple[str, ...]:
        edge: EdgeRow = getattr(row, side)
        return (
            put(row.s, 1),
            put(row.y, 1),
            put(row.thickness),
            put(edge.front),
            put(edge.rear),
            degrees(edge.bevel, 2),
            put(edge.crown, 3),
            put(edge.gap),
            put(edge.cut_front),
            put(edge.cut_rear),
        )

    title = f"{side} edge, {job.record.web.edge} (lengths in {job.wording.length_unit})"
    return Table(title, heads, tuple(line(row) for row in rows))


def bevels_record(job: Job, rows: Sequence[Row]) -> dict[str, Any]:
    """The bevel table as a record: lengths in mm, angles in degrees."""
    web: dict[str, Any] = {
        "length": job.web.plane.length,
        "cant": float(np.degrees(job.cant)),
        "edge": job.record.web.edge,
    }
    if job.record.web.edge == "set bevel":
        web["runs"] = {side: runs_record(job, side) for side in SIDES}
        web["rounding_mm3"] = job.rounding
    return {"name": job.record.name, "stamp": job.stamp, "web": web, "rows": [asdict(row) for row in rows]}


def runs_record(job: Job, side: Any) -> list[dict[str, float]]:
    """Saw settings along an edge: mm and degrees."""
    return [
        {"start": run.start, "stop": run.stop, "angle": float(np.degrees(run.angle))} for run in job.web.cut(side).runs
    ]


def runs(job: Job) -> Table:
    """Saw settings for the screen."""
    put = job.wording.column
    rows = tuple(
        (side, put(run["start"], 1), put(run["stop"], 1), degrees(run["angle"], 2))
        for side in SIDES
        for run in runs_record(job, side)
    )
    return Table(f"saw settings (lengths in {job.wording.length_unit})", ("edge", "from s", "to s", "saw"), rows)


def weighed(job: Job, found: Sequence[Candidate], verdict: Verdict) -> Table:
    """The candidates for the screen, in the wing file's units, the chosen one marked."""
    words = job.wording
    unit = words.mass_unit
    heads = ("", "sheet", "edge", "cant", "runs", "foam", "filler", "other", "total", "gap", "bevel", "swing", "limits")
    rows: list[tuple[str, ...]] = []
    marked = set()
    for c, edge in _edges_joined(found):
        tilt = "" if math.isnan(c.cant) else degrees(c.cant)
        start = ("→" if c is verdict.chosen else "", words.plain(c.thickness), edge, tilt)
        if c.outside:
            rows.append((*start, *[""] * 8, c.refused or ""))
            continue
        if c is verdict.chosen:
            marked.add(len(rows))
        rows.append(
            (
                *start,
                str(c.runs) if c.runs else "",
                words.mass_column(c.masses.foam),
                words.mass_column(c.masses.filler),
                words.mass_column(c.masses.total - c.masses.foam - c.masses.filler),
                words.mass_column(c.masses.total),
                words.column(c.gap),
                f"{c.bevel:.1f}°",
                f"{c.swing:.1f}°",
                _verdict(job, c),
            )
        )
    title = f"{job.record.name}: what a web costs (lengths in {job.wording.length_unit}, masses in {unit})"
    return Table(title, heads, tuple(rows), frozenset(marked))


def _edges_joined(found: Sequence[Candidate]) -> Iterator[tuple[Candidate, str]]:
    """The candidates with their edges; one for "any" where a sheet at a cant is refused alike whatever its edge."""
    alike: dict[tuple[float, float | None], list[Candidate]] = {}
    for c in found:
        alike.setdefault(_sheet_and_cant(c), []).append(c)
    for c in found:
        first, *others = alike[_sheet_and_cant(c)]
        if others and c.outside and all(other.refused == first.refused for other in others):
            if c is first:
                yield c, "any"
        else:
            yield c, c.edge


def _sheet_and_cant(candidate: Candidate) -> tuple[float, float | None]:
    return candidate.thickness, None if math.isnan(candidate.cant) else candidate.cant


def _verdict(job: Job, candidate: Candidate) -> str:
    if job.record.limits is None and not candidate.misses:
        return ""
    return ", ".join(_SHORT[miss.limit] for miss in candidate.misses) or "met"


def weighed_record(job: Job, found: Sequence[Candidate], verdict: Verdict, saving: Saving | None) -> dict[str, Any]:
    """The candidates and the verdict as a record: mm, degrees, grams."""
    return {
        "name": job.record.name,
        "stamp": job.stamp,
        "candidates": candidate_records(found, verdict),
        "verdict": verdict.sentence,
        "saving": None if saving is None else asdict(saving),
    } | dict(cautions(job))


def candidate_records(found: Sequence[Candidate], verdict: Verdict) -> list[dict[str, Any]]:
    """One record for each candidate."""
    out = []
    for c in found:
        record = asdict(replace(c, misses=()))
        del record["misses"]
        weights = record.pop("masses") | {"filler": c.masses.filler, "total": c.masses.total}
        missed = {miss.limit: miss.over for miss in c.misses}
        out.append(record | {"masses": weights, "misses": missed, "fits": c.fits, "chosen": c is verdict.chosen})
    return out
