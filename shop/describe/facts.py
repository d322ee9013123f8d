"""What a wing file describes, in a dozen lines, and what is doubtful about it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from ...geom import washout
from ...geom import web as web_geometry
from ...geom.web import SIDES, Side
from ..job import Job
from ..stock import Foam
from ..units import GRAM
from ..verdict import amount
from ..weigh import broken_limits
from ..wording import degrees
from . import core, cutting, joint, strength

STEEP = 15.0  # degrees of bevel from which a saw cut is doubtful
SMALL, LARGE = 40.0, 4000.0  # mm of chord beyond which the unit is doubtful
THICK_BOND = 1.5  # mm
SHARP = 4.0  # degrees by which the skin may break at a station
CLEAR = 3.0  # skin thicknesses a web keeps from either edge of the section


@dataclass(frozen=True)
class Facts:
    """The panel and its web in figures: mm, mm^2, degrees, grams."""

    name: str
    stamp: str
    span: float
    area: float
    chords: tuple[float, float]
    stations: int
    washout: tuple[float, float]
    law: str
    steepest_y: float
    steepest: float
    web_length: float
    web_cant: float
    web_thickness: float
    edge: str
    heights: tuple[float, float]
    cut_heights: tuple[float, float]
    planed: float
    bevel_top: tuple[float, float]
    bevel_bottom: tuple[float, float]
    gap: float
    filler: float
    mass: float
    strength: dict[str, Any] | None
    joint: dict[str, Any] | None
    flanges: list[dict[str, Any]]
    cores: list[dict[str, Any]]
    wire: list[dict[str, Any]]
    ribs: list[dict[str, Any]]
    cradles: list[dict[str, Any]]
    sheets: list[dict[str, Any]]
    doubts: tuple[str, ...]


def facts(job: Job) -> Facts:
    """Figures of the panel and of the web as stated."""
    wing, loft, built = job.record.wing, job.loft, job.web
    ends = loft.y[[0, -1]]
    chords = loft.planform(ends, ends)[0][:, 0]
    twist = np.degrees(loft.washout(ends, ends)[0])
    steep_y, steep = washout.steepest(loft.washout)
    rows = job.rows([0.0, built.plane.length])
    cut_heights = [max(r.top.cut_front - r.bottom.cut_front, r.top.cut_rear - r.bottom.cut_rear) for r in rows]
    heights = [(r.top.front + r.top.rear - r.bottom.front - r.bottom.rear) / 2.0 for r in rows]
    weights = job.masses
    return Facts(
        name=job.record.name,
        stamp=job.stamp,
        span=float(ends[1] - ends[0]),
        area=loft.area(),
        chords=(float(chords[0]), float(chords[1])),
        stations=len(wing.stations),
        washout=(float(twist[0]), float(twist[1])),
        law=wing.washout.law,
        steepest_y=steep_y,
        steepest=float(np.degrees(steep)),
        web_length=built.plane.length,
        web_cant=float(np.degrees(job.cant)),
        web_thickness=job.record.web.thickness,
        edge=job.record.web.edge,
        heights=(heights[0], heights[1]),
        cut_heights=(cut_heights[0], cut_heights[1]),
        planed=(built.top.removed + built.bottom.removed) * job.stock.find(job.record.web.foam, Foam).density * GRAM,
        bevel_top=_bevels(job, "top"),
        bevel_bottom=_bevels(job, "bottom"),
        gap=built.gap,
        filler=weights.filler,
        mass=weights.total,
        strength=strength.record(job),
        joint=joint.joint_record(job),
        flanges=joint.flange_records(job),
        cores=core.core_records(job),
        wire=core.path_records(job),
        ribs=core.rib_records(job),
        cradles=core.cradle_records(job),
        sheets=cutting.records(job),
        doubts=doubts(job),
    )


def lines(job: Job) -> list[tuple[str, str]]:
    """The facts as a builder reads them: (what, figures)."""
    return [
        *panel(job),
        *strength.lines(job),
        *joint.lines(job),
        *core.lines(job),
        *cutting.lines(job),
    ]


def panel(job: Job) -> list[tuple[str, str]]:
    """The panel's shape and its web, the first of the lines."""
    f, words, wing = job.facts, job.wording, job.record.wing
    airfoils = list(dict.fromkeys(s.airfoil for s in wing.stations))
    per = 1000.0 if words.units == "mm" else 304.8
    ends = job.record.web.ends
    counts = [len(job.web.cut(side).runs) for side in SIDES]
    runs = f", {counts[0]} runs at the top, {counts[1]} at the bottom" if any(counts) else ""
    planed = f", {words.mass(f.planed)} of foam planed off" if f.planed > 0.0 else ""
    unit = "metre" if words.units == "mm" else "foot"
    return [
        ("panel", f"{f.name}, revision {f.stamp}"),
        ("span", f"{words.length(f.span)}, area {words.area(f.area)}, {f.stations} stations, {wing.planform} planform"),
        ("chords", f"{words.length(f.chords[0])} at the root, {words.length(f.chords[1])} at the tip"),
        ("sections", ", ".join(airfoils)),
        ("washout", _washout(job)),
        (
            "steepest",
            f"{degrees(f.steepest * per)} per {unit} at y {words.plain(f.steepest_y)}",
        ),
        ("skin", _skin(job)),
        (
            "web",
            f"{words.length(f.web_length)} from rib {words.plain(ends[0])} to {words.plain(ends[1])}, "
            f"{words.length(f.web_thickness)} {job.record.web.foam}, cant {degrees(f.web_cant, 2)}",
        ),
        (
            "height",
            f"between the skins {words.length(f.heights[0])} at the inner end, {words.length(f.heights[1])} at "
            f"the outer; the web is cut {words.length(f.cut_heights[0])} and {words.length(f.cut_heights[1])} high",
        ),
        (
            "bevel",
            f"top {degrees(f.bevel_top[0])} to {degrees(f.bevel_top[1])}, "
            f"bottom {degrees(f.bevel_bottom[0])} to {degrees(f.bevel_bottom[1])}",
        ),
        (
            "edge",
            f"{f.edge}{runs}, largest gap {words.length(f.gap)}{planed}",
        ),
        ("masses", f"filler {words.mass(f.filler)}, the web with all that bonds it {words.mass(f.mass)}"),
    ]


def _washout(job: Job) -> str:
    """Washout at both ends, and its least and greatest where they lie in between."""
    said = [degrees(value) for value in job.facts.washout]
    text = f"{said[0]} at the root, {said[1]} at the tip"
    for word, (y, value) in zip(("least", "greatest"), washout.extremes(job.loft.washout), strict=True):
        if (extreme := degrees(float(np.degrees(value)))) not in said:
            text += f", {word} {extreme} at y {job.wording.length(y)}"
    return f"{text}, law {job.facts.law}"


def _skin(job: Job) -> str:
    thickness = job.record.skin.thickness
    if isinstance(thickness, float):
        return job.wording.length(thickness)
    values = [row[1] for row in thickness]
    return f"{job.wording.plain(min(values))} to {job.wording.length(max(values))}"


def _bevels(job: Job, side: Side) -> tuple[float, float]:
    """Least and largest bevel of the skin along one edge, degrees."""
    survey = job.web.survey
    skin = survey.skin[side]
    angles = np.degrees(web_geometry.bevel(skin[..., 0], skin[..., -1], survey.thickness))
    return float(angles.min()), float(angles.max())


def doubts(job: Job) -> tuple[str, ...]:
    """What a builder should look at twice before cutting."""
    return (
        *_washout_doubts(job),
        *_kink_doubts(job),
        *_size_doubts(job),
        *_section_doubts(job),
        *_edge_doubts(job),
        *_bevel_doubts(job),
        *(f"limits.{miss.limit} is broken, by {amount(miss, job)}" for miss in broken_limits(job)),
        *strength.doubts(job),
        *joint.doubts(job),
        *core.doubts(job),
        *cutting.doubts(job),
    )


def _washout_doubts(job: Job) -> list[str]:
    turned = washout.reverses(job.loft.washout)
    return [] if turned is None else [f"the washout reverses at y {job.wording.length(turned)}"]


def _section_doubts(job: Job) -> list[str]:
    said = {s.airfoil: section.doubts for s, section in zip(job.record.wing.stations, job.loft.sections, strict=True)}
    return [f"{airfoil}: {doubt}" for airfoil, doubts in said.items() for doubt in doubts]


def _edge_doubts(job: Job) -> list[str]:
    """Where a face of the web comes closer than three skin thicknesses to the section's leading or trailing edge."""
    survey, loft = job.web.survey, job.loft
    s, n = survey.s[:, 1], survey.n[:, 1][:, [0, -1]]
    nearest: dict[str, tuple[float, float]] = {}
    for side in SIDES:
        found = web_geometry.edge(loft, job.web.plane, s[:, None], n, side)
        chord = loft.planform(found.y, found.y)[0][..., 0]
        skin = loft.skin(found.y, found.y)[0]
        share = found.t**2
        for name, room in (("leading", share * chord), ("trailing", (1.0 - share) * chord)):
            short = np.where(room < CLEAR * skin, room, np.inf)
            i = np.unravel_index(int(short.argmin()), short.shape)
            if np.isfinite(short[i]) and short[i] < nearest.get(name, (np.inf, 0.0))[0]:
                nearest[name] = (float(short[i]), float(found.y[i]))
    return [
        f"the web comes within {job.wording.length(room)} of the {name} edge at y {job.wording.length(y)}: "
        f"less than {CLEAR:g} skin thicknesses"
        for name, (room, y) in nearest.items()
    ]


def _size_doubts(job: Job) -> list[str]:
    """Figures that are more likely a slip of the pen, or of the unit, than meant."""
    stated, words = job.record.web, job.wording
    said = []
    chord = max(s.chord for s in job.record.wing.stations)
    if not SMALL <= chord <= LARGE:
        said.append(f"the largest chord is {words.length(chord)}: is that the unit that is meant?")
    survey = job.web.survey
    low = float((survey.seat["top"] - survey.seat["bottom"]).min())
    if stated.thickness > low:
        said.append(
            f"the web's sheet, {words.length(stated.thickness)}, is thicker than the web is high, {words.length(low)}"
        )
    foam = job.stock.find(stated.foam, Foam)
    sheets = foam.sheets_in if words.units == "in" else foam.sheets_mm
    if not any(abs(stated.thickness - sheet) < 0.02 * sheet for sheet in sheets):
        near = min(sheets, key=lambda sheet: abs(sheet - stated.thickness))
        said.append(
            f"{foam.name} is not usual in {words.length(stated.thickness)}; the nearest is {words.length(near)}"
        )
    if stated.bond > THICK_BOND:
        said.append(
            f"a bond line of {words.length(stated.bond)} is thick: fill what is beyond {words.length(THICK_BOND)}"
        )
    return said


def _kink_doubts(job: Job) -> list[str]:
    """Stations where the skin breaks: a laminate rounds the corner that the reckoned edge has there."""
    loft, plane = job.loft, job.web.plane
    y1, y2 = job.record.web.ends
    said = []
    for y in loft.y[(loft.y > y1) & (loft.y < y2)]:
        for side in SIDES:
            t = web_geometry.edge(loft, plane, plane.s_at_rib(y, 0.0, 0.0), 0.0, side).t
            inner, outer = (loft.normal(t, y, at) for at in (np.nextafter(y, -np.inf), y))
            turn = float(np.degrees(np.arccos(np.clip(inner @ outer, -1.0, 1.0))))
            if turn > SHARP:
                at = job.wording.length(float(y))
                said.append(f"the {side} skin breaks by {turn:.1f}° at y {at}: close to that rib fit the edge by hand")
    return said


def _bevel_doubts(job: Job) -> list[str]:
    said = []
    for side in SIDES:
        low, high = _bevels(job, side)
        if max(-low, high) > STEEP:
            steep = low if -low > high else high
            said.append(f"the {side} edge's bevel reaches {degrees(steep)}: beyond {STEEP:g}°, think of another cant")
    return said
