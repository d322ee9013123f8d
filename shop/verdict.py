"""Which candidate to take, and why, in plain sentences."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from .job import Job
from .masses import masses
from .strength import UNLOOKED, Check, core_checks
from .values import KeyedError
from .weigh import REFUSALS, TREATMENTS, Candidate, Miss
from .wording import CAUTION


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
        among += " and bears the shear" if _shear_checked(job) else "; what shear it bears is not checked"
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
        why = " or ".join(dict.fromkeys(REFUSALS[c.refused or "no room"] for c in found))
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


def _shear_checked(job: Job) -> bool:
    """Whether the core was: facings alone, checked for all of it, say nothing of the core that holds them apart."""
    if job.caps is None:
        return False
    return "core in shear" in {check.name for check in core_checks(job, job.caps.flow, job.record.web.thickness)[0]}


def saving(job: Job) -> Saving | None:
    """What the cant of least filler would save over the stated one; None if the web fits at none that may be tried."""
    try:
        best = job.best_cant("filler")[0]
    except KeyedError:
        return None
    least = masses(job, job.fit(best, job.survey(best))).filler
    return Saving(float(np.degrees(job.cant)), float(np.degrees(best)), job.masses.filler, least)


def saving_sentence(found: Saving | None, job: Job) -> str:
    """What the best cant would save, as a sentence."""
    if found is None:
        return f"No cant within web.cant_limit, {job.record.web.cant_limit:g}°, would do instead of the stated one."
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
    checks, unchecked = core_checks(job, job.caps.flow, job.record.web.thickness)
    allowed = "; ".join(f"{c.name} {job.wording.stress(float(np.max(c.allowable)))} ({c.origin})" for c in checks)
    weak = ", ".join(f"{c.name} {float(c.reserve.min()):.2f}" for c in _weak(job))
    said = [
        ("allowed", allowed),
        ("unchecked", "; ".join(unchecked)),
        ("doubt", f"reserves below 1 in the web as stated, whatever the sheet: {weak}" if weak else ""),
        ("caution", f"{CAUTION}; {UNLOOKED}"),
    ]
    return [(what, figures) for what, figures in said if figures]


def _weak(job: Job) -> list[Check]:
    """What has no reserve in the web as stated, apart from what each candidate is checked for."""
    if job.strength is None:
        return []
    own = {check.name for check in job.strength.checks if check.name.endswith("shear")}
    return [check for check in job.strength.checks if check.name not in own and float(check.reserve.min()) < 1.0]
