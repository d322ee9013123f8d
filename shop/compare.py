"""Two wing files side by side: which keys differ, and what that does to bevels, filler, masses and strips."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, fields
from typing import Literal

import numpy as np

from ..geom.web import SIDES
from .job import Job
from .masses import Masses
from .stated import stated
from .strips import Layer, Schedule

Unit = Literal["mm", "mm2", "degrees", "g", ""]
_SAME = 1e-9
_RIBS = 81


@dataclass(frozen=True)
class Key:
    """A key that differs: what either file says, in words; empty where it says nothing."""

    key: str
    a: str
    b: str


@dataclass(frozen=True)
class Effect:
    """A figure of both files; None where a file has no such part."""

    what: str
    unit: Unit
    a: float | None
    b: float | None

    @property
    def change(self) -> float | None:
        """B less A."""
        return None if self.a is None or self.b is None else self.b - self.a

    @property
    def share(self) -> float:
        """The change as a share of the larger figure, from 0 to 2; 1 for what only one file has.

        >>> Effect("gap", "mm", 0.5, 2.0).share
        0.75
        """
        if self.a is None or self.b is None:
            return 0.0 if self.a is self.b else 1.0
        most = max(abs(self.a), abs(self.b))
        return abs(self.b - self.a) / most if most > _SAME else 0.0


@dataclass(frozen=True)
class Comparison:
    """What differs between two wing files, and what comes of it, the largest share first.

    `sections` are the stations (rib y, mm) at which the files mean different sections, `only` the doubts that only one
    of them has.
    """

    a: Job
    b: Job
    keys: tuple[Key, ...]
    sections: tuple[float, ...]
    effects: tuple[Effect, ...]
    only: tuple[tuple[str, ...], tuple[str, ...]]


def compare(a: Job, b: Job) -> Comparison:
    """Compare two jobs; words are in A's units.

    Raises
    ------
    WingError
        If either cannot be made.
    """
    found = [effect for effect in _effects(a, b) if effect.share > _SAME]
    only = tuple(doubt for doubt in a.doubts if doubt not in b.doubts), tuple(d for d in b.doubts if d not in a.doubts)
    return Comparison(a, b, _keys(a, b), _sections(a, b), tuple(sorted(found, key=lambda e: -e.share)), only)


def _keys(a: Job, b: Job) -> tuple[Key, ...]:
    words = a.wording
    first, second = (dict(stated(job.record, words)) for job in (a, b))
    out = []
    for key in [*first, *(key for key in second if key not in first)]:
        one, two = first.get(key), second.get(key)
        if one is not None and two is not None and _equal(one.value, two.value):
            continue
        if any(side is not None and side.given for side in (one, two)):
            out.append(Key(key, *(side.text(words) if side else "" for side in (one, two))))
    return tuple(out)


def _equal(one: object, two: object) -> bool:
    """The same value, lengths to a millionth of a millimetre."""
    if isinstance(one, float) and isinstance(two, float):
        return abs(one - two) <= 1e-6
    if isinstance(one, tuple) and isinstance(two, tuple):
        return len(one) == len(two) and all(map(_equal, one, two))
    return one == two


def _sections(a: Job, b: Job) -> tuple[float, ...]:
    """Ribs of stations that both files have, where their sections are not the same curve."""
    there = {round(float(y), 6): section for y, section in zip(b.loft.y, b.loft.sections, strict=True)}
    return tuple(
        float(y)
        for y, section in zip(a.loft.y, a.loft.sections, strict=True)
        if (other := there.get(round(float(y), 6))) is not None
        and not (section.nose == other.nose and np.array_equal(section.coef, other.coef))
    )


def _effects(a: Job, b: Job) -> Iterator[Effect]:
    yield from _shape(a, b)
    yield from _bevels(a, b)
    yield from _masses(a, b)
    yield from _strips(a, b)
    yield from _joint(a, b)
    yield from _cores(a, b)


def _shape(a: Job, b: Job) -> Iterator[Effect]:
    one, two = a.facts, b.facts
    yield Effect("span", "mm", one.span, two.span)
    yield Effect("area", "mm2", one.area, two.area)
    yield Effect("web length", "mm", one.web_length, two.web_length)
    yield Effect("cant", "degrees", one.web_cant, two.web_cant)
    for i, end in enumerate(("inner", "outer")):
        yield Effect(f"height between the skins, {end} end", "mm", one.heights[i], two.heights[i])
        yield Effect(f"washout, {('root', 'tip')[i]}", "degrees", one.washout[i], two.washout[i])
    yield Effect("largest gap", "mm", one.gap, two.gap)


def _bevels(a: Job, b: Job) -> Iterator[Effect]:
    """Range of each edge's bevel, and where it differs most among the ribs that both webs cross."""
    one, two = a.facts, b.facts
    for side, first, second in (
        ("top", one.bevel_top, two.bevel_top),
        ("bottom", one.bevel_bottom, two.bevel_bottom),
    ):
        for i, end in enumerate(("least", "largest")):
            yield Effect(f"{side} bevel, {end}", "degrees", first[i], second[i])
    low = max(a.record.web.ends[0], b.record.web.ends[0])
    high = min(a.record.web.ends[1], b.record.web.ends[1])
    if low >= high:
        return
    ribs = np.linspace(low, high, _RIBS)
    rows = [job.rows(np.clip(job.web.plane.s_at_rib(ribs, 0.0, 0.0), 0.0, job.web.plane.length)) for job in (a, b)]
    for side in SIDES:
        bevel = np.array([[getattr(row, side).bevel for row in found] for found in rows])
        i = int(np.abs(bevel[1] - bevel[0]).argmax())
        what = f"{side} bevel at rib {a.wording.length(float(ribs[i]))}, where it differs most"
        yield Effect(what, "degrees", float(bevel[0, i]), float(bevel[1, i]))


def _masses(a: Job, b: Job) -> Iterator[Effect]:
    for part in fields(Masses):
        name = part.name.replace("_top", " at the top").replace("_bottom", " at the bottom")
        yield Effect(f"mass of {name}", "g", getattr(a.masses, part.name), getattr(b.masses, part.name))
    yield Effect("mass of all filler", "g", a.masses.filler, b.masses.filler)
    yield Effect("mass of the web with all of it", "g", a.masses.total, b.masses.total)


def _strips(a: Job, b: Job) -> Iterator[Effect]:
    def layers(found: Schedule | None, side: Literal["top", "bottom"]) -> float | None:
        return None if found is None or side not in found.stacks else float(len(found.stacks[side].stops))

    for side in SIDES:
        yield Effect(f"layers of strips at the {side}", "", layers(a.caps, side), layers(b.caps, side))
    yield Effect("strips", "", *(_total(job, lambda layer: 1.0) for job in (a, b)))
    yield Effect("length of all strips", "mm", *(_total(job, lambda layer: layer.length) for job in (a, b)))
    yield Effect("least reserve factor", "", _reserve(a), _reserve(b))


def _total(job: Job, each: Callable[[Layer], float]) -> float | None:
    return None if job.record.caps is None else float(sum(layer.count * each(layer) for layer in job.layers))


def _reserve(job: Job) -> float | None:
    if job.strength is None or not job.strength.checks:
        return None
    return float(job.strength.worst.reserve.min())


def _joint(a: Job, b: Job) -> Iterator[Effect]:
    yield Effect("joint's pin", "mm", *(job.joint.pin if job.joint else None for job in (a, b)))
    yield Effect("most that a flange is sprung", "degrees", *(_sprung(job) for job in (a, b)))


def _sprung(job: Job) -> float | None:
    if not job.flanges:
        return None
    return max(float(np.degrees(np.abs(made.flange.spring).max())) for made in job.flanges)


def _cores(a: Job, b: Job) -> Iterator[Effect]:
    for i in range(max(len(a.cores), len(b.cores))):
        pair = [job.cores[i] if i < len(job.cores) else None for job in (a, b)]
        name = f"core {i + 1}"
        yield Effect(f"{name}, bays", "", *(float(len(core.bays)) if core else None for core in pair))
        yield Effect(f"{name}, straight cut off by", "mm", *(abs(core.worst.off) if core else None for core in pair))
        yield Effect(f"{name}, mass", "g", *(core.mass if core else None for core in pair))
