"""The shopping list: what has to be bought for the panels of both hands."""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from .cutlist import NOT_STATED, Cut, cloth_name, cut_list
from .describe.strips import cut_length
from .job import Job
from .masses import Masses
from .nesting import Nesting, nestings
from .records.cutting import Cutting
from .stock import Adhesive, Cloth, Filler, Strip
from .units import GRAM, MM_PER_INCH


@dataclass(frozen=True)
class Buy:
    """One line of the shopping list: how much of what, in which unit; grams where its material says what it weighs."""

    item: str
    size: str
    amount: float
    unit: str
    mass: float | None
    note: str


def shopping_list(job: Job, laid: Sequence[Nesting] | None = None, cuts: Sequence[Cut] | None = None) -> list[Buy]:
    """What to buy; in metres, square metres and cubic centimetres, or feet, square feet and cubic inches.

    Parameters
    ----------
    laid, cuts
        How pieces lie on sheets of stock for both hands, and the cut list, if they are known already.
    """
    laid = nestings(job) if laid is None else laid
    cuts = cut_list(job, laid) if cuts is None else cuts
    weights = job.masses
    return [
        *_sheets(job, laid, cuts),
        *_strips(job, cuts),
        *_pastes(job, weights),
        *_cloths(job, weights),
        *_blocks(cuts),
        *_joint(job, cuts),
    ]


def _sheets(job: Job, laid: Sequence[Nesting], cuts: Sequence[Cut]) -> Iterator[Buy]:
    """Sheets of stock; where no size is stated, the area that the pieces' rectangles take."""
    words = job.wording
    for n in laid:
        size = f"{words.plain(n.size[0])} x {words.plain(n.size[1])} x {words.length(n.thickness)}"
        note = f"{len(n.pieces)} pieces, {100.0 * n.waste:.0f} % waste"
        yield Buy(n.material, size, float(len(n.sheets)), "sheets", None, note)
    known = {(n.material, round(n.thickness, 3)) for n in laid}
    area: defaultdict[tuple[str, float], float] = defaultdict(float)
    for cut in cuts:
        kind = cut.material, cut.thickness
        if cut.kind == "sheet" and kind not in known:
            area[kind] += cut.both_hands * cut.length * cut.width
    for (material, thickness), mm2 in area.items():
        size = words.length(thickness) if thickness else ""
        sheet = f"sheet for ribs and cradles, {NOT_STATED}" if material == NOT_STATED else material
        yield Buy(
            sheet,
            size,
            *_rounded(words.area_bought(mm2)),
            None,
            "rectangles round the pieces; no sheet is stated for it",
        )


def _strips(job: Job, cuts: Sequence[Cut]) -> Iterator[Buy]:
    caps = job.record.caps
    if caps is None:
        return
    found = [cut for cut in cuts if cut.kind == "strip"]
    size = f"{job.wording.plain(caps.width)} x {job.wording.length(caps.thickness)}"
    total, longest = sum(c.both_hands * c.length for c in found), max(job.layers, key=lambda layer: layer.length)
    mass = total * caps.width * caps.thickness * job.stock.find(caps.strip, Strip).density * GRAM
    note = f"{sum(c.both_hands for c in found)} pieces, the longest {cut_length(job, longest)}"
    yield Buy(caps.strip, size, *_long(job, total), _round(mass), note)


def _pastes(job: Job, weights: Masses) -> Iterator[Buy]:
    """Filler and resin for both hands, with the stated allowance."""
    web, allowance = job.record.web, (job.record.cutting or Cutting()).allowance
    resin = weights.bond + sum(areal - dry for areal, dry in _laminates(job, weights))
    filler, glue = job.stock.find(web.filler, Filler), job.stock.find(web.adhesive, Adhesive)
    pastes = (
        (web.filler, filler.density, weights.filler, "gaps"),
        (web.adhesive, glue.density, resin, "bond lines and laminates"),
    )
    for name, density, grams, use in pastes:
        mass = 2.0 * grams * (1.0 + allowance)
        note = f"for {use}, {100.0 * allowance:.0f} % more than needed"
        yield Buy(name, "", *_rounded(job.wording.volume_bought(mass / density * 1e6)), _round(mass), note)


def _plies(job: Job, weights: Masses) -> Iterator[tuple[str, float, float, float]]:
    """Every laminate of one panel: its cloth, the cloth's dry areal weight, the resin's share, and all it weighs."""
    caps, flanges = job.record.caps, job.record.flanges
    for of, mass in ((job.record.web.facing, weights.facing), (caps.cover if caps else None, weights.cover)):
        if of is not None:
            dry = job.stock.find(of.cloth, Cloth).areal_weight if of.cloth else of.areal_weight or 0.0
            yield cloth_name(of), dry, of.resin_fraction, mass
    if flanges is not None and flanges.cloth is not None:
        dry = job.stock.find(flanges.cloth, Cloth).areal_weight
        yield flanges.cloth, dry, flanges.resin_fraction, weights.flanges


def _laminates(job: Job, weights: Masses) -> Iterator[tuple[float, float]]:
    """Grams of each laminate of one panel, with and without its resin."""
    for _, _, resin, mass in _plies(job, weights):
        yield mass, mass * (1.0 - resin)


def _cloths(job: Job, weights: Masses) -> Iterator[Buy]:
    area: defaultdict[str, float] = defaultdict(float)
    grams: defaultdict[str, float] = defaultdict(float)
    for name, dry, resin, mass in _plies(job, weights):
        grams[name] += 2.0 * mass * (1.0 - resin)
        area[name] += 2.0 * mass * (1.0 - resin) / dry
    for name, m2 in area.items():
        yield Buy(
            name,
            "",
            *_rounded(job.wording.area_bought(m2 * 1e6)),
            _round(grams[name]),
            "as laid, before what is cut off",
        )


def _blocks(cuts: Sequence[Cut]) -> Iterator[Buy]:
    """Blocks of foam for the cores, equal ones together."""
    blocks = [cut for cut in cuts if cut.kind == "block"]
    counts = Counter({(c.material, c.size): 0 for c in blocks})
    for cut in blocks:
        counts[cut.material, cut.size] += cut.both_hands
    for (material, size), count in counts.items():
        yield Buy(material, size, float(count), "blocks", None, "for cores")


def _joint(job: Job, cuts: Sequence[Cut]) -> Iterator[Buy]:
    end = job.joint
    for cut in cuts:
        if end is not None and cut.kind == "tube":
            yield Buy(cut.piece, cut.size, float(cut.both_hands), "pieces", None, "as long as it lies in the web")
            pin = f"{job.wording.length(end.pin)} across"
            length = _long(job, cut.both_hands * cut.length)
            yield Buy(end.stated.material, pin, *length, None, "what lies in the webs, without the fittings")


def _rounded(bought: tuple[float, str]) -> tuple[float, str]:
    return _round(bought[0]), bought[1]


def _long(job: Job, mm: float) -> tuple[float, str]:
    """A length to buy, and its unit: metres, or feet for a wing file in inches."""
    return (_round(mm / (12.0 * MM_PER_INCH)), "ft") if job.record.units == "in" else (_round(mm * 1e-3), "m")


def _round(value: float) -> float:
    return round(value, 3)
