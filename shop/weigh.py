"""What each sheet thickness, edge cut and cant costs, and which one to take."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, fields, replace
from functools import cache, partial
from itertools import product
from typing import get_args

import numpy as np

from ..geom.seat import Survey, Treatment
from ..geom.web import SIDES, NothingInside, OffSection, Side
from .built import BuiltWeb
from .flanges import BuiltFlange
from .job import Job
from .laminate import laminate
from .records import Limits
from .stock import Adhesive, Filler, Foam, Strip
from .strength import UNLOOKED, core_checks
from .strips import cover_thickness
from .values import KeyedError
from .wording import CAUTION

TREATMENTS: tuple[Treatment, ...] = get_args(Treatment)
_GRAM = 1e-6  # g per mm^3 at 1 kg/m^3


@dataclass(frozen=True)
class Masses:
    """What one web weighs, grams."""

    foam: float
    filler_top: float
    filler_bottom: float
    bond: float
    facing: float
    strips: float = 0.0
    cover: float = 0.0
    pads: float = 0.0
    flanges: float = 0.0

    @property
    def filler(self) -> float:
        """Filler at both edges."""
        return self.filler_top + self.filler_bottom

    @property
    def total(self) -> float:
        """All of it."""
        laid = self.strips + self.cover + self.pads + self.flanges
        return self.foam + self.filler + self.bond + self.facing + laid


@dataclass(frozen=True)
class Miss:
    """A limit that a candidate breaks, and by how much (mm, degrees, grams; a share of what the core can bear)."""

    limit: str
    over: float


@dataclass(frozen=True)
class Candidate:
    """One way to make the web: mm, degrees, grams.

    `bevel` is the largest angle that has to be cut, `swing` how far the cut turns along the edge that turns most;
    both are zero for square edges. `outside` says why the web cannot be made at all, and `refused` says it in a word or
    two; figures are then NaN.
    """

    thickness: float
    edge: Treatment
    cant: float
    runs: int
    masses: Masses
    gap: float
    bevel: float
    swing: float
    misses: tuple[Miss, ...] = ()
    outside: str | None = None
    refused: str | None = None

    @property
    def fits(self) -> bool:
        """Whether it can be made within the limits."""
        return self.outside is None and not self.misses


@dataclass(frozen=True)
class Verdict:
    """Which candidate to take: the chosen one, or, where none meets the limits, the one that comes nearest."""

    chosen: Candidate | None
    nearest: Candidate | None
    sentence: str


@dataclass(frozen=True)
class Saving:
    """What the best cant would save over the stated one, for the stated sheet and edge: degrees and grams."""

    stated: float
    best: float
    filler_stated: float
    filler_best: float


def masses(job: Job, built: BuiltWeb, flanges: Sequence[BuiltFlange] | None = None) -> Masses:
    """Masses of a web: sheet, filler, bond lines and, where stated, facings, strips, their cover, pads and flanges.

    The flanges are those of the web as stated unless others are given.
    Pads count as solid: the joint's tube, which takes the place of some of their foam, is not among the web's parts.
    """
    stated = job.record.web
    foam, filler = job.stock.find(stated.foam, Foam), job.stock.find(stated.filler, Filler)
    bond = job.stock.find(stated.adhesive, Adhesive)
    top, bottom = (bedded(job, built.survey, side) for side in SIDES)
    strips, cover = _strip_masses(job, [top, bottom])
    areal = laminate(stated.facing, job.stock, stated.adhesive).areal if stated.facing else 0.0
    return Masses(
        foam=(built.sheet - built.pads) * foam.density * _GRAM,
        filler_top=(built.top.filler + top.beside) * filler.density * _GRAM,
        filler_bottom=(built.bottom.filler + bottom.beside) * filler.density * _GRAM,
        bond=(top.bond + bottom.bond) * bond.density * _GRAM,
        facing=areal * sum(face.area() for face in built.faces) * 1e-6 if areal else 0.0,
        strips=strips,
        cover=cover,
        pads=built.pads * _pad_density(job) * _GRAM,
        flanges=sum(made.mass for made in (job.flanges if flanges is None else flanges)),
    )


def _pad_density(job: Job) -> float:
    """Density of what thickens the sheet at the joint, kg/m^3."""
    stated = job.record.joint
    return job.stock.find((stated.pad if stated else None) or job.record.web.foam, Foam).density


@dataclass(frozen=True)
class Bedded:
    """What lies between the skin's inside and the seat at one edge, mm^3.

    `bond` is all the glue, under the skin and between the strips; `beside` the filler along the strips, as the seat is
    level under the whole sheet where that is wider than they are.
    """

    bond: float
    strips: float = 0.0
    cover: float = 0.0
    beside: float = 0.0


def bedded(job: Job, survey: Survey, side: Side) -> Bedded:
    """Divide the bed of one edge among what lies in it.

    Bond line and cover have their share of the depth at each place; what the stack's share leaves free beside strips
    and glue lines is filler.
    """
    caps = job.record.caps
    if caps is None or job.caps is None:
        return Bedded(survey.bedding(side))
    depth, cover = job.depth[side](survey.s), cover_thickness(job, caps)
    strips = sum(layer.volume for layer in job.layers if layer.side == side)
    glue = strips * caps.glue / caps.thickness
    stack = survey.bedding(side, job.caps.height(side)(survey.s) / depth)
    return Bedded(
        bond=survey.bedding(side, job.record.web.bond / depth) + glue,
        strips=strips,
        cover=survey.bedding(side, cover / depth),
        beside=max(0.0, stack - strips - glue),
    )


def _strip_masses(job: Job, edges: Sequence[Bedded]) -> tuple[float, float]:
    """Grams of strips and of their cover with its resin."""
    caps = job.record.caps
    if caps is None:
        return 0.0, 0.0
    strips = sum(edge.strips for edge in edges) * job.stock.find(caps.strip, Strip).density * _GRAM
    if caps.cover is None:
        return strips, 0.0
    areal = laminate(caps.cover, job.stock, job.record.web.adhesive).areal
    return strips, areal * sum(edge.cover for edge in edges) / cover_thickness(job, caps) * 1e-6


def candidates(
    job: Job, thicknesses: Sequence[float], edges: Sequence[Treatment], cants: Sequence[float | str]
) -> Iterator[Candidate]:
    """Every combination, in order of cant, thickness and edge.

    Parameters
    ----------
    thicknesses
        mm.
    cants
        Degrees, or ``least filler`` and ``least gap`` to be found for each thickness and edge.
    """
    swept = cache(partial(_surveys, job.trial_survey, job, max(thicknesses)))
    for stated in cants:
        if isinstance(stated, str):
            for thickness, edge in product(thicknesses, edges):
                found = partial(_thinner, swept, thickness)
                angle = job.best_cant("gap" if stated == "least gap" else "filler", thickness, edge, found)[0]
                yield _candidate(job, angle, thickness, edge, partial(job.survey, angle))
        else:
            angle = float(np.radians(stated))
            surveys = cache(_surveys(job.survey, job, max(thicknesses), angle))
            for thickness, edge in product(thicknesses, edges):
                yield _candidate(job, angle, thickness, edge, surveys)


_Surveyor = Callable[[float, float | None], Survey]


def _surveys(survey: _Surveyor, job: Job, widest: float, angle: float) -> Callable[[float], Survey]:
    """Surveys by thickness: all read from the widest sheet's, or, where that does not hold them, made one by one."""
    if job.joint is not None:
        return partial(survey, angle)
    try:
        wide = survey(angle, widest)
    except (OffSection, NothingInside):
        return partial(survey, angle)
    return lambda thickness: wide.thinner(thickness / widest)


def _thinner(surveys: Callable[[float], Callable[[float], Survey]], thickness: float, angle: float) -> Survey:
    return surveys(angle)(thickness)


def _candidate(
    job: Job, angle: float, thickness: float, edge: Treatment, surveys: Callable[[float], Survey]
) -> Candidate:
    cant = float(np.degrees(angle))
    try:
        _refuse_narrow(job, thickness)
        _refuse_thick(job, thickness)
        built = job.fit(angle, surveys(thickness), edge)
        job.laid_tube(built)
        weights = masses(job, built, job.laid_flanges(built))
    except (OffSection, NothingInside, Narrow, Thick, KeyedError) as fault:
        none = float("nan")
        nothing = Candidate(thickness, edge, cant, 0, Masses(*[none] * len(fields(Masses))), none, none, none)
        if isinstance(fault, KeyedError):
            return replace(nothing, outside=".".join(map(str, fault.where)) + f": {fault}", refused=str(fault.where[0]))
        return replace(nothing, outside=str(fault), refused=_REFUSED[type(fault)])
    bevel, swing = built.cut_bevels()
    runs = max(len(built.top.runs), len(built.bottom.runs))
    misses = _misses(job, thickness, built.gap, bevel, weights.total)
    return Candidate(thickness, edge, cant, runs, weights, built.gap, bevel, swing, misses)


class Narrow(ValueError):
    """A sheet thinner than the strips that lie on it are wide."""


class Thick(ValueError):
    """A sheet thicker than the joint makes the web."""


_REFUSED: dict[type[Exception], str] = {
    OffSection: "no room",
    NothingInside: "no room",
    Narrow: "too thin",
    Thick: "too thick",
}
_WHY = {
    "no room": "leaves the section",
    "too thin": "is thinner than its strips",
    "too thick": "is thicker than its joint",
    "joint": "leaves no room for the joint's pin",
    "flanges": "does not suit its flanges",
}


def _refuse_narrow(job: Job, thickness: float) -> None:
    caps = job.record.caps
    if caps is not None and thickness < caps.beside * caps.width * (1.0 - 1e-9):
        wide = job.wording.length(caps.beside * caps.width)
        raise Narrow(f"a sheet of {job.wording.length(thickness)} is thinner than its strips, {wide}")


def _refuse_thick(job: Job, thickness: float) -> None:
    if job.joint is not None and thickness > job.joint.across * (1.0 + 1e-9):
        most = job.wording.length(job.joint.across)
        raise Thick(f"a sheet of {job.wording.length(thickness)} is thicker than its joint, {most}")


def broken_limits(job: Job) -> tuple[Miss, ...]:
    """Limits of the wing file that its own web breaks."""
    built = job.web
    bevel, _ = built.cut_bevels()
    stated = _misses(job, job.record.web.thickness, built.gap, bevel, masses(job, built).total)
    return tuple(miss for miss in stated if miss.limit in Limits.model_fields)


def _misses(job: Job, thickness: float, gap: float, bevel: float, mass: float) -> tuple[Miss, ...]:
    limits = job.record.limits or Limits()
    over = {
        "max_gap": gap - _or_inf(limits.max_gap),
        "max_bevel": bevel - _or_inf(limits.max_bevel),
        "min_thickness": (limits.min_thickness or 0.0) - thickness,
        "max_mass": mass - _or_inf(limits.max_mass),
    }
    if job.caps is not None:
        checks, _ = core_checks(job, job.caps.flow, thickness)
        over |= {check.name: 1.0 / float(check.reserve.min()) - 1.0 for check in checks}
    return tuple(Miss(name, by) for name, by in over.items() if by > 1e-9)


def _or_inf(limit: float | None) -> float:
    return float("inf") if limit is None else limit


def verdict(found: Sequence[Candidate], job: Job) -> Verdict:
    """The lightest candidate within the limits, with the reason and how close the next one is.

    Of those that weigh the same in the figures shown, the easier edge is taken, then the thinner sheet.
    """
    order = {edge: i for i, edge in enumerate(TREATMENTS)}

    def rank(c: Candidate) -> tuple[float, int, float]:
        return float(job.wording.mass_column(c.masses.total)), order[c.edge], c.thickness

    ranked = sorted((c for c in found if c.fits), key=rank)
    if not ranked:
        return _no_verdict(found, job)
    best, limited = ranked[0], job.record.limits is not None
    among = "that meets the limits" if limited else "of all (the wing file states no limits)"
    if job.record.load is not None:
        among = f"{among} and bears the shear"
    sentence = f"Take {_named(best, job)}: at {job.wording.mass(best.masses.total)} the lightest {among}."
    if len(ranked) > 1:
        more = ranked[1].masses.total - best.masses.total
        by = f"{job.wording.mass(more)} heavier" if rank(ranked[1])[0] > rank(best)[0] else "as heavy in these figures"
        sentence += f" Next: {_named(ranked[1], job)}, {by}."
    return Verdict(best, None, sentence)


def _no_verdict(found: Sequence[Candidate], job: Job) -> Verdict:
    """Which limit fails, and by how much, for the candidate that comes nearest to meeting them all."""
    made = [c for c in found if c.outside is None]
    if not made:
        why = " or ".join(dict.fromkeys(_WHY[c.refused or "no room"] for c in found))
        return Verdict(None, None, f"No candidate can be made: at each of them the web {why}.")
    limits = job.record.limits

    def rank(c: Candidate) -> tuple[list[float], float]:
        """By the worst miss, as a share of its limit; where those are alike by the next, and then by mass."""
        shares = (round(m.over / (getattr(limits, m.limit, None) or 1.0), 3) for m in c.misses)
        return sorted(shares, reverse=True), c.masses.total

    nearest = min(made, key=rank)
    by = " and ".join(f"{m.limit} by {amount(m, job)}" for m in nearest.misses)
    return Verdict(None, nearest, f"No candidate meets the limits. Nearest: {_named(nearest, job)}, which misses {by}.")


def amount(miss: Miss, job: Job) -> str:
    """By how much a limit is broken, in words."""
    if miss.limit == "max_mass":
        return job.wording.mass(miss.over)
    if miss.limit.endswith("shear"):
        return f"{100.0 * miss.over:.0f} %"
    return f"{miss.over:.2f}°" if miss.limit == "max_bevel" else job.wording.length(miss.over)


def _named(candidate: Candidate, job: Job) -> str:
    runs = f" in {candidate.runs} runs" if candidate.runs > 1 else ""
    return f"{job.wording.length(candidate.thickness)} {candidate.edge}{runs} at cant {candidate.cant:.2f}°"


def saving(job: Job) -> Saving:
    """What the cant of least filler would save over the stated one."""
    best = job.best_cant("filler")[0]
    least = masses(job, job.fit(best, job.survey(best))).filler
    return Saving(float(np.degrees(job.cant)), float(np.degrees(best)), masses(job, job.web).filler, least)


def saving_sentence(found: Saving, job: Job) -> str:
    """What the best cant would save, as a sentence."""
    by = found.filler_stated - found.filler_best
    if not float(job.wording.mass_column(by)):
        return f"No other cant would save filler worth having; the stated one is {found.stated:.2f}°."
    at = f"With the stated sheet and edge, cant {found.best:.2f}° needs least filler"
    least, less = job.wording.mass(found.filler_best), job.wording.mass(by)
    return f"{at}: {least}, {less} less than the stated {found.stated:.2f}°."


def cautions(job: Job) -> list[tuple[str, str]]:
    """What to know of the sheets' strength, where a load is stated: (what, figures)."""
    if job.caps is None:
        return []
    checks, _ = core_checks(job, job.caps.flow, job.record.web.thickness)
    allowed = "; ".join(f"{c.name} {job.wording.stress(float(np.max(c.allowable)))} ({c.origin})" for c in checks)
    return [("allowed", allowed), ("caution", f"{CAUTION}; {UNLOOKED}")] if checks else []


def rounding(job: Job) -> float:
    """Grams of filler that a set bevel costs because the saw has steps."""
    return job.rounding * job.stock.find(job.record.web.filler, Filler).density * _GRAM
