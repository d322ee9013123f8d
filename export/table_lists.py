"""Cut list and shopping list as tables of texts."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict
from typing import Any

from ..shop.cutlist import Cut
from ..shop.job import Job
from ..shop.shopping import Buy
from .table import Table

_UNITS = {"length": "mm", "width": "mm", "thickness": "mm", "mass": "g", "mass_both": "g"}


def records(rows: Sequence[Cut] | Sequence[Buy]) -> list[dict[str, Any]]:
    """Lines of either list as rows of a CSV file, whose heads name the unit: ``length_mm``, ``mass_g``."""
    heads = {key: f"{key}_{unit}" for key, unit in _UNITS.items()}
    return [{heads.get(key, key): value for key, value in asdict(row).items()} for row in rows]


def cut_list(job: Job) -> Table:
    """Every piece: what it is made of, its size, how many for one hand and for both, what all of them weigh."""
    words = job.wording
    rows = tuple(
        (
            cut.piece,
            cut.material,
            cut.size,
            str(cut.each_hand),
            str(cut.both_hands),
            "" if cut.mass_both is None else words.mass_column(cut.mass_both),
        )
        for cut in job.cut_list
    )
    heads = ("piece", "material", "size", "one hand", "both", f"{words.mass_unit} for both")
    return Table(f"cut list (sizes in {job.wording.length_unit}: length x width x thickness)", heads, rows)


def shopping_list(job: Job) -> Table:
    """What to buy: how much of what, and what it weighs."""
    words = job.wording
    rows = tuple(
        (
            buy.item,
            buy.size,
            f"{buy.amount:g} {buy.unit}",
            "" if buy.mass is None else words.mass_column(buy.mass),
            buy.note,
        )
        for buy in job.shopping_list
    )
    return Table("to buy for both hands", ("item", "size", "how much", words.mass_unit, "note"), rows)
