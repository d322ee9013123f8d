"""What each sheet thickness, edge cut and cant costs."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, fields
from functools import cache, partial
from itertools import product
from typing import get_args

import numpy as np

from ..geom.seat import Survey, Treatment
from ..geom.web import NothingInside, OffSection
from .job import Job
from .masses import Masses, masses
from .records.wing import Limits
from .strength import core_checks
from .values import KeyedError

TREATMENTS: tuple[Treatment, ...] = get_args(Treatment)


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
                try:
                    angle = job.best_cant("gap" if stated == "least gap" else "filler", thickness, edge, found)[0]
                except KeyedError as fault:
                    yield _refused(thickness, edge, float("nan"), fault)
                else:
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
        return _refused(thickness, edge, cant, fault)
    bevel, swing = built.cut_bevels()
    runs = max(len(built.top.runs), len(built.bottom.runs))
    misses = _misses(job, thickness, built.gap, bevel, weights.total)
    return Candidate(thickness, edge, cant, runs, weights, built.gap, bevel, swing, misses)


def _refused(thickness: float, edge: Treatment, cant: float, fault: Exception) -> Candidate:
    """A candidate that cannot be made, and why."""
    none = float("nan")
    why, word = str(fault), _REFUSED.get(type(fault), "")
    if isinstance(fault, KeyedError):
        table, *key = map(str, fault.where)
        why, word = f"{'.'.join((table, *key))}: {fault}", key[0] if table == "web" else table
    masses = Masses(*[none] * len(fields(Masses)))
    return Candidate(thickness, edge, cant, 0, masses, none, none, none, outside=why, refused=word)


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
REFUSALS = {
    "no room": "leaves the section",
    "too thin": "is thinner than its strips",
    "too thick": "is thicker than its joint",
    "joint": "leaves no room for the joint's pin",
    "flanges": "does not suit its flanges",
    "runs": "has too few places for its runs",
    "cant_limit": "fits at no cant that may be tried",
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
    stated = _misses(job, job.record.web.thickness, built.gap, bevel, job.masses.total)
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
        checks, _ = core_checks(job, job.caps.flow, job.over(thickness)[0](job.caps.s))
        over |= {check.name: 1.0 / float(check.reserve.min()) - 1.0 for check in checks}
    return tuple(Miss(name, by) for name, by in over.items() if by > 1e-9)


def _or_inf(limit: float | None) -> float:
    return float("inf") if limit is None else limit
