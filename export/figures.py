"""Figures of the panel and of the choice: plan view, washout, and what each sheet and edge cut weighs."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Polygon

from ..shop.cores import BuiltCore
from ..shop.job import Job
from ..shop.verdict import Verdict
from ..shop.weigh import TREATMENTS, Candidate
from ..shop.wording import GRAMS_PER_OUNCE, degrees
from .plot import BLUE, EDGES, GREEN, INK, LINES, PAPER, PURPLE, QUIET, WIDTH, figure, in_units, key_above, name_ends

_MARKS = ("s", "^", "o")  # one for each edge cut
_BODY = "#eef2f4"


def plan(job: Job) -> Figure:
    """The panel from above: stations, web, ends of the cap strips, bays of the cores, joint."""
    y = np.unique(np.concatenate([np.linspace(job.loft.y[0], job.loft.y[-1], 121), job.loft.y]))
    lead, trail = (np.array([job.loft.chord_point(f, v)[1::-1] for v in y]) for f in (0.0, 1.0))
    ring = in_units(job, np.concatenate([lead, trail[::-1]]))
    wide, tall = np.ptp(ring, axis=0)
    made, (ax,) = figure(2.0)
    ax.add_patch(Polygon(ring, facecolor=_BODY, edgecolor=INK, linewidth=1.2))
    for core, colour in zip(job.cores, (BLUE, GREEN, PURPLE) * 20, strict=False):
        _bays(job, ax, core, colour)
    _stations(job, ax, 0.03 * wide)
    _web(job, ax, 0.022 * wide)
    ax.set_aspect("equal")
    ax.grid(False)
    ax.spines[:].set_visible(False)
    ax.set_xlim(ring[:, 0].min() - 0.02 * wide, ring[:, 0].max() + 0.045 * wide)
    ax.set_ylim(ring[:, 1].max() + 0.03 * wide, ring[:, 1].min() - 0.09 * wide)
    ax.set_xlabel(f"y, {job.wording.length_unit} out along the span")
    ax.set_ylabel(f"x, {job.wording.length_unit} aft")
    key_above(made, 2)
    made.set_figheight(1.0 + 0.1 * len(made.legends[0].get_texts()) + (WIDTH - 0.75) * 1.12 * tall / wide)
    return made


def _bays(job: Job, ax: Axes, core: BuiltCore, colour: str) -> None:
    """A core from above, every other bay darker, each with its number."""
    places, which = np.unique(core.mesh.points[:, 1], return_inverse=True)
    front, aft = np.full(len(places), np.inf), np.full(len(places), -np.inf)
    np.minimum.at(front, which, core.mesh.points[:, 0])
    np.maximum.at(aft, which, core.mesh.points[:, 0])
    for i, (a, b) in enumerate(pairwise(core.bounds)):
        at = np.linspace(a, b, 21)
        edge = [np.column_stack([at, np.interp(at, places, x)]) for x in (front, aft)]
        ring = in_units(job, np.concatenate([edge[0], edge[1][::-1]]))
        ax.add_patch(Polygon(ring, facecolor=colour, alpha=0.32 if i % 2 else 0.16, linewidth=0.0))
        ax.text(ring[:, 0].mean(), ring[:, 1].mean(), str(i + 1), color=INK, ha="center", va="center", fontsize=8)
    ax.fill([], [], color=colour, alpha=0.3, label=f"core {core.number} ({core.stated.region}), bays numbered")


def _stations(job: Job, ax: Axes, off: float) -> None:
    """Stations as broken lines with their washout over the leading edge."""
    twist = np.degrees(job.loft.washout(job.loft.y, job.loft.y)[0])
    before = -np.inf
    for i, (y, angle) in enumerate(zip(job.loft.y, twist, strict=True)):
        ends = in_units(job, np.array([job.loft.chord_point(f, float(y))[1::-1] for f in (0.0, 1.0)]))
        ax.plot(
            *ends.T, color=QUIET, linewidth=0.8, dashes=(4, 3), label="station, with its washout" if i == 0 else None
        )
        if ends[0, 0] - before > 3.0 * off:
            ax.text(ends[0, 0], ends[0, 1] - off / 2.0, degrees(float(angle)), ha="center", va="bottom", fontsize=8)
            before = ends[0, 0]


def _web(job: Job, ax: Axes, tick: float) -> None:
    """The web with its two faces, and where each layer of strips stops."""
    plane = job.web.plane
    line = in_units(job, plane.point([0.0, plane.length], 0.0, 0.0)[:, 1::-1])
    ax.plot(*line.T, color=INK, linewidth=2.4, solid_capstyle="butt", label="web")
    for side, sign in (("top", -1.0), ("bottom", 1.0)):
        stops = [layer for layer in job.layers if layer.side == side and not layer.whole]
        ends = in_units(job, plane.point([layer.stop for layer in stops] or [], 0.0, 0.0)[:, 1::-1])
        mark = "v" if side == "top" else "^"
        at = ends + np.array([0.0, sign * tick])
        if stops:
            ax.plot(*at.T, mark, color=EDGES[side][0], markersize=5, label=f"a {side} strip stops")
    if job.joint is not None:
        end = job.joint.thickening
        span = in_units(job, plane.point([end.place(0.0), end.place(end.full + end.taper)], 0.0, 0.0)[:, 1::-1])
        ax.plot(*span.T, color=INK, linewidth=5.0, solid_capstyle="butt", label="joint")


def washout(job: Job) -> Figure:
    """The washout and its law, and the straight twist from end to end that it departs from."""
    made, (ax,) = figure(2.5)
    y = np.unique(np.concatenate([np.linspace(job.loft.y[0], job.loft.y[-1], 241), job.loft.knots]))
    twist, stations = (np.degrees(job.loft.washout(v, v)[0]) for v in (y, job.loft.y))
    at = in_units(job, y)
    ax.plot(at[[0, -1]], twist[[0, -1]], color=QUIET, linestyle=(0, (5, 3)), linewidth=1.0)
    ax.plot(at, twist, color=BLUE, linewidth=1.8)
    ax.plot(in_units(job, job.loft.y), stations, "o", color=BLUE, markerfacecolor=PAPER)
    middle = len(at) // 2
    straight = np.interp(at, at[[0, -1]], twist[[0, -1]])
    above = straight[middle] >= twist[middle]
    ax.annotate(
        "straight twist",
        (at[middle], straight[middle]),
        xytext=(-4, 4) if above else (4, -4),
        textcoords="offset points",
        color=QUIET,
        ha="right" if above else "left",
        va="bottom" if above else "top",
    )
    law = f'law "{job.record.wing.washout.law}"'
    ax.annotate(
        law,
        (at[middle], twist[middle]),
        xytext=(4, -4) if above else (-4, 4),
        textcoords="offset points",
        color=BLUE,
        ha="left" if above else "right",
        va="top" if above else "bottom",
    )
    for place in in_units(job, np.array(job.record.web.ends)):
        ax.axvline(place, color=QUIET, linewidth=0.8, linestyle=(0, (1, 2)))
    ax.set_ylabel("washout, degrees")
    ax.set_xlabel(f"y, {job.wording.length_unit} (dotted: the web's ends)")
    return made


def trade(job: Job, found: Sequence[Candidate], verdict: Verdict) -> Figure:
    """Mass of the whole web, and of its filler, against the sheet's thickness; one line for each edge cut."""
    made, (total, filler) = figure(4.4, 2, height_ratios=[3, 2])
    unit = GRAMS_PER_OUNCE if job.record.units == "in" else 1.0
    ends: dict[Axes, list[tuple[float, str, str]]] = {total: [], filler: []}
    for edge, mark, (colour, dash) in zip(TREATMENTS, _MARKS, LINES, strict=False):
        these = sorted((c for c in found if c.edge == edge and c.outside is None), key=lambda c: c.thickness)
        if not these:
            continue
        sheet = in_units(job, [c.thickness for c in these])
        full = [PAPER if not c.fits else colour for c in these]
        for ax, values in (
            (total, [c.masses.total / unit for c in these]),
            (filler, [c.masses.filler / unit for c in these]),
        ):
            ax.plot(sheet, values, color=colour, linestyle=dash, linewidth=1.2)
            ax.scatter(sheet, values, marker=mark, s=22, facecolor=full, edgecolor=colour, linewidth=1.0, zorder=3)
            ends[ax].append((values[-1], edge, colour))
    _refused(job, found, total)
    _picked(job, total, verdict.chosen or verdict.nearest, unit)
    key_above(made, 3)
    for ax in (total, filler):
        ax.set_ylim(0.0, 1.2 * ax.dataLim.y1)
        name_ends(ax, ends[ax])
    total.set_ylabel(f"the whole web, {job.wording.mass_unit}")
    filler.set_ylabel(f"of it filler, {job.wording.mass_unit}")
    filler.set_xlabel(f"thickness of the sheet, {job.wording.length_unit}")
    return made


def _refused(job: Job, found: Sequence[Candidate], ax: Axes) -> None:
    """Sheets that cannot be made with any edge cut, with the reason."""
    made = {c.thickness for c in found if c.outside is None}
    why = {c.thickness: c.refused or "" for c in found if c.thickness not in made}
    for thickness, reason in why.items():
        at = float(in_units(job, thickness))
        ax.plot([at], [0.04], "x", color=QUIET, transform=ax.get_xaxis_transform())
        ax.annotate(
            reason, (at, 0.08), xycoords=ax.get_xaxis_transform(), rotation=90.0, ha="center", va="bottom", color=QUIET
        )


def _picked(job: Job, ax: Axes, chosen: Candidate | None, unit: float) -> None:
    """A ring round the candidate to take, and a cross where the wing file stands."""
    stated = float(in_units(job, job.record.web.thickness)), job.masses.total / unit
    ax.plot(*stated, "+", color=INK, markersize=13, markeredgewidth=1.4, label="as stated", linestyle="none")
    if chosen is not None:
        at = float(in_units(job, chosen.thickness)), chosen.masses.total / unit
        label = "to take" if chosen.fits else "nearest to the limits"
        ax.plot(
            *at,
            "o",
            color=INK,
            markersize=12,
            markerfacecolor="none",
            markeredgewidth=1.4,
            label=label,
            linestyle="none",
        )
    ax.plot([], [], "o", color=QUIET, markerfacecolor=PAPER, markersize=5, label="breaks a limit", linestyle="none")
