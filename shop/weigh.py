"""What each sheet thickness, edge cut and cant costs, and which one to take."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from functools import cache
from itertools import product
from typing import get_args

import numpy as np

from ..geom.seat import Survey, Treatment
from ..geom.web import SIDES, NothingInside, OffSection
from .job import BuiltWeb, Job
from .stock import Adhesive, Cloth, Filler, Foam

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

    @property
    def filler(self) -> float:
        """Filler at both edges."""
        return self.filler_top + self.filler_bottom

    @property
    def total(self) -> float:
        """All of it."""
        return self.foam + self.filler + self.bond + self.facing


@dataclass(frozen=True)
class Miss:
    """A limit that a candidate breaks, and by how much (mm, degrees or grams)."""

    limit: str
    over: float


@dataclass(frozen=True)
class Candidate:
    """One way to make the web: mm, degrees, grams.

    `bevel` is the largest angle that has to be cut, `swing` how far the cut turns along the edge that turns most;
    both are zero for square edges. `outside` says why the web cannot be made at all; figures are then NaN.
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


def masses(job: Job, built: BuiltWeb) -> Masses:
    """Masses of a web: sheet, filler at each edge, bond lines and, where stated, facings on both faces."""
    stated = job.record.web
    foam, filler = job.stock.find(stated.foam, Foam), job.stock.find(stated.filler, Filler)
    bond = job.stock.find(stated.adhesive, Adhesive)
    bedding = sum(built.survey.bedding(side) for side in SIDES)
    areal = _facing_areal(job)
    return Masses(
        foam=built.sheet * foam.density * _GRAM,
        filler_top=built.top.filler * filler.density * _GRAM,
        filler_bottom=built.bottom.filler * filler.density * _GRAM,
        bond=bedding * bond.density * _GRAM,
        facing=areal * sum(face.area() for face in built.faces) * 1e-6 if areal else 0.0,
    )


def _facing_areal(job: Job) -> float:
    """g/m^2 of one face's laminate: the cloth's weight over its share of the laminate."""
    facing = job.record.web.facing
    if facing is None:
        return 0.0
    dry = facing.areal_weight if facing.cloth is None else job.stock.find(facing.cloth, Cloth).areal_weight
    return facing.layers * (dry or 0.0) / (1.0 - facing.resin_fraction)


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
    for stated in cants:
        if isinstance(stated, str):
            for thickness, edge in product(thicknesses, edges):
                angle = job.best_cant("gap" if stated == "least gap" else "filler", thickness, edge)[0]
                yield _candidate(job, angle, thickness, edge, lambda t, a=angle: job.survey(a, t))
        else:
            angle = float(np.radians(stated))
            surveys = cache(_surveys(job, angle, max(thicknesses)))
            for thickness, edge in product(thicknesses, edges):
                yield _candidate(job, angle, thickness, edge, surveys)


def _surveys(job: Job, angle: float, widest: float) -> Callable[[float], Survey]:
    """Surveys by thickness: all read from the widest sheet's, or, where that leaves the section, made one by one."""
    try:
        wide = job.survey(angle, widest)
    except (OffSection, NothingInside):
        return lambda thickness: job.survey(angle, thickness)
    return lambda thickness: wide.thinner(thickness / widest)


def _candidate(
    job: Job, angle: float, thickness: float, edge: Treatment, surveys: Callable[[float], Survey]
) -> Candidate:
    cant = float(np.degrees(angle))
    try:
        built = job.fit(angle, surveys(thickness), edge)
    except (OffSection, NothingInside) as fault:
        none = float("nan")
        return Candidate(thickness, edge, cant, 0, Masses(*[none] * 5), none, none, none, outside=str(fault))
    bevel, swing = built.cut_bevels()
    runs = max(len(built.top.runs), len(built.bottom.runs))
    weights = masses(job, built)
    misses = _misses(job, thickness, built.gap, bevel, weights.total)
    return Candidate(thickness, edge, cant, runs, weights, built.gap, bevel, swing, misses)


def _misses(job: Job, thickness: float, gap: float, bevel: float, mass: float) -> tuple[Miss, ...]:
    limits = job.record.limits
    if limits is None:
        return ()
    over = {
        "max_gap": gap - _or_inf(limits.max_gap),
        "max_bevel": bevel - _or_inf(limits.max_bevel),
        "min_thickness": (limits.min_thickness or 0.0) - thickness,
        "max_mass": mass - _or_inf(limits.max_mass),
    }
    return tuple(Miss(name, by) for name, by in over.items() if by > 1e-9)


def _or_inf(limit: float | None) -> float:
    return float("inf") if limit is None else limit


def verdict(found: Sequence[Candidate], job: Job) -> Verdict:
    """The lightest candidate within the limits, with the reason and how close the next one is.

    Of equal ones the easier edge is taken, then the thinner sheet.
    """
    order = {edge: i for i, edge in enumerate(TREATMENTS)}
    ranked = sorted((c for c in found if c.fits), key=lambda c: (round(c.masses.total, 6), order[c.edge], c.thickness))
    if not ranked:
        return _no_verdict(found, job)
    best, limited = ranked[0], job.record.limits is not None
    among = "that meets the limits" if limited else "of all (the wing file states no limits)"
    sentence = f"Take {_named(best, job)}: at {job.wording.mass(best.masses.total)} the lightest {among}."
    if len(ranked) > 1:
        more = ranked[1].masses.total - best.masses.total
        sentence += f" Next: {_named(ranked[1], job)}, {job.wording.mass(more)} heavier."
    return Verdict(best, None, sentence)


def _no_verdict(found: Sequence[Candidate], job: Job) -> Verdict:
    """Which limit fails, and by how much, for the candidate that comes nearest to meeting them all."""
    made = [c for c in found if c.outside is None]
    if not made:
        return Verdict(None, None, "No candidate can be made: at each of them the web leaves the section.")
    limits = job.record.limits
    nearest = min(made, key=lambda c: max(m.over / (getattr(limits, m.limit) or 1.0) for m in c.misses))
    by = " and ".join(f"{m.limit} by {_amount(m, job)}" for m in nearest.misses)
    return Verdict(None, nearest, f"No candidate meets the limits. Nearest: {_named(nearest, job)}, which misses {by}.")


def _amount(miss: Miss, job: Job) -> str:
    if miss.limit == "max_mass":
        return job.wording.mass(miss.over)
    return f"{miss.over:.2f}°" if miss.limit == "max_bevel" else job.wording.length(miss.over)


def _named(candidate: Candidate, job: Job) -> str:
    runs = f" in {candidate.runs} runs" if candidate.runs > 1 else ""
    return f"{job.wording.length(candidate.thickness)} {candidate.edge}{runs} at cant {candidate.cant:.2f}°"


def saving(job: Job) -> Saving:
    """What the cant of least filler would save over the stated one."""
    density = job.stock.find(job.record.web.filler, Filler).density * _GRAM
    best = job.best_cant("filler")[0]
    least = job.fit(best, job.survey(best)).filler
    return Saving(float(np.degrees(job.cant)), float(np.degrees(best)), job.web.filler * density, least * density)


def saving_sentence(found: Saving, job: Job) -> str:
    """What the best cant would save, as a sentence."""
    at = f"With the stated sheet and edge, cant {found.best:.2f}° needs least filler"
    by = found.filler_stated - found.filler_best
    return (
        f"{at}: {job.wording.mass(found.filler_best)}, {job.wording.mass(by)} less than the stated {found.stated:.2f}°."
    )


def rounding(job: Job) -> float:
    """Grams of filler that a set bevel costs because the saw has steps."""
    return job.rounding * job.stock.find(job.record.web.filler, Filler).density * _GRAM
