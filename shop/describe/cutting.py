"""What is said of the sheets of stock: how many to buy, what is wasted, what has no sheet."""

from __future__ import annotations

from typing import Any

from ..job import Job
from ..nesting import without_sheet


def lines(job: Job) -> list[tuple[str, str]]:
    """Sheets to buy for both hands, as a builder reads them; nothing without a table [cutting]."""
    words = job.wording
    return [
        (
            "sheets" if i == 0 else "",
            f"{len(n.sheets)} x {n.material}, {words.plain(n.size[0])} x {words.plain(n.size[1])} x "
            f"{words.length(n.thickness)}, for {len(n.pieces)} pieces of both hands: {100.0 * n.waste:.0f} % waste",
        )
        for i, n in enumerate(job.nestings)
    ]


def records(job: Job) -> list[dict[str, Any]]:
    """The same in figures: mm, and the share that is wasted."""
    return [
        {
            "material": n.material,
            "thickness": n.thickness,
            "size": list(n.size),
            "sheets": len(n.sheets),
            "pieces": len(n.pieces),
            "waste": n.waste,
        }
        for n in job.nestings
    ]


def doubts(job: Job) -> list[str]:
    """What is cut from sheets whose size is not stated."""
    return [
        f"no size of sheet is stated for {material}, {job.wording.length(thickness)}: its pieces are not laid out"
        for material, thickness in without_sheet(job)
    ]
