"""Pieces laid out on sheets of stock: which size to buy, how many, and what is wasted."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

from ..geom import nest
from ..geom.drawing import Hand
from ..geom.nest import Laid
from .job import Job
from .pieces import Piece, foam_name, other_pieces
from .records.cutting import Cutting, StockSheet
from .web_pieces import TooShort, web_pieces
from .wingfile import WingError

HANDS: tuple[Hand, Hand] = ("right", "left")


@dataclass(frozen=True)
class Nesting:
    """All pieces of one material and thickness, laid out on sheets of one size.

    Attributes
    ----------
    material, thickness, size
        Of the sheets; length along grain or roll and width, mm.
    pieces
        What is laid out.
    sheets
        For each sheet which of them lie on it, and where.
    """

    material: str
    thickness: float
    size: tuple[float, float]
    pieces: tuple[Piece, ...]
    sheets: tuple[tuple[Laid, ...], ...]

    @property
    def bought(self) -> float:
        """Area of the sheets, mm^2."""
        return len(self.sheets) * self.size[0] * self.size[1]

    @cached_property
    def waste(self) -> float:
        """What is not used of the sheets, as a share of them."""
        return 1.0 - sum(piece.shape.area for piece in self.pieces) / self.bought


def nestings(job: Job, hands: Sequence[Hand] = HANDS) -> list[Nesting]:
    """Every piece for the hands given on sheets, material by material; none without a table [cutting].

    Of several sizes that are stated for a material the one is taken of which least area has to be bought. Pieces of a
    material for which no size is stated are left out.

    Raises
    ------
    WingError
        If a piece fits no sheet, or a scarf finds no place.
    """
    cutting = job.record.cutting
    if cutting is None or not cutting.sheets:
        return []
    web = foam_name(job, job.record.web.foam), job.web.plain
    others = [piece for hand in hands for piece in other_pieces(job, cutting, hand)]
    found = []
    kinds = sorted({web, *((p.material, p.thickness) for p in others)}, key=lambda kind: (kind != web, kind))
    for kind in kinds:
        own = [p for p in others if (p.material, p.thickness) == kind]
        tries: list[Nesting] = []
        faults: list[WingError] = []
        for i, size in _sizes(job, *kind):
            try:
                tries.append(_laid_out(job, cutting, i, size, own, kind, hands if kind == web else ()))
            except WingError as fault:
                faults.append(fault)
        if tries:
            found.append(min(tries, key=lambda n: n.bought))
        elif faults:
            raise faults[0]
    return found


def without_sheet(job: Job) -> list[tuple[str, float]]:
    """Materials and thicknesses that pieces are cut from and for which [cutting] states no size of sheet."""
    cutting, joint = job.record.cutting, job.record.joint
    if cutting is None or not cutting.sheets:
        return []
    kinds = {(job.record.web.foam, job.web.plain)}
    kinds |= {((joint.pad if joint else None) or job.record.web.foam, pad.thickness) for pad in job.pads}
    kinds |= {(cut.material, cut.thickness) for cut in (cutting.ribs, cutting.cradles) if cut is not None}
    return sorted(kind for kind in kinds if not _sizes(job, *kind))


def _sizes(job: Job, material: str, thickness: float) -> list[tuple[int, StockSheet]]:
    """The stated sheets that a material comes in at a thickness, with their place in the file."""
    cutting = job.record.cutting or Cutting()
    return [
        (i, sheet)
        for i, sheet in enumerate(cutting.sheets, start=1)
        if foam_name(job, sheet.material) == foam_name(job, material)
        and (sheet.thickness is None or abs(sheet.thickness - thickness) < 0.005)
    ]


def _laid_out(
    job: Job,
    cutting: Cutting,
    number: int,
    sheet: StockSheet,
    others: Sequence[Piece],
    kind: tuple[str, float],
    web_hands: Sequence[Hand],
) -> Nesting:
    words, key = job.wording, f"cutting.sheets[{number}].size"
    room = tuple(v - 2.0 * cutting.margin for v in sheet.size)
    if min(room) <= 0.0:
        got = " x ".join(words.plain(v) for v in sheet.size)
        raise job.error(key, f"wanted a sheet larger than its margins, {words.length(cutting.margin)}, got {got}")
    try:
        pieces = [piece for hand in web_hands for piece in web_pieces(job, cutting, room[0], hand)]
    except TooShort as fault:
        where = f"s = {words.plain(fault.low)} and {words.length(fault.high)}"
        text = f"wanted a place for a scarf, {words.length(fault.length)} long, between {where}, got none that is clear"
        scarfed = f"{cutting.scarf:g} times the sheet's {words.length(kind[1])}"
        room_for = f"{words.length(room[0])} between the margins of a sheet {words.length(sheet.size[0])} long"
        why = f"a scarf is {scarfed}, and needed as the web is {words.length(fault.web)} long and there are {room_for}"
        raise job.error("cutting.scarf", f"{text} of strip ends, pins and changes of the saw; {why}") from None
    pieces += others
    outlines = [piece.outline for piece in pieces]
    try:
        laid = nest.nest(outlines, sheet.size, margin=cutting.margin, apart=cutting.apart, turn=cutting.turn)
    except nest.TooLarge as fault:
        piece = pieces[fault.piece]
        x0, y0, x1, y1 = piece.shape.bounds
        needs = f"{words.plain(x1 - x0)} x {words.length(y1 - y0)}"
        got = f"{words.plain(room[0])} x {words.length(room[1])} between its margins"
        raise job.error(key, f"wanted a sheet that takes the {piece.drawing.title}, {needs}, got {got}") from None
    return Nesting(*kind, sheet.size, tuple(pieces), tuple(tuple(on) for on in laid))
