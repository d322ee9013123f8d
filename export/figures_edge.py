"""Figures of the web's two edges: bevel, heights, gap and filler along the web, and the web's section at a place."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Polygon

from ..geom import seat
from ..geom import web as web_geometry
from ..geom.profile import face_line, inner, symmetric
from ..geom.web import SIDES, Side
from ..shop.job import Job
from ..shop.strips import cover_thickness, rise
from ..shop.wording import degrees
from .plot import COVER, EDGES, FILL, FOAM, INK, PAPER, QUIET, RED, SKIN, STRIP, WIDTH, Array, figure, in_units, name_ends

_T = symmetric(np.linspace(0.0, 1.0, 161))
_BESIDE = 0.6  # how far beyond the faces an enlarged edge is shown, in thicknesses


def bevels(job: Job) -> Figure:
    """Bevel of the skin along both edges, and what the edge is cut to over it."""
    made, axes = figure(3.9, 2)
    survey = job.web.survey
    s = in_units(job, survey.s.ravel())
    for ax, side in zip(axes, SIDES, strict=True):
        colour, dash = EDGES[side]
        skin = survey.skin[side]
        angle = np.degrees(web_geometry.bevel(skin[..., 0], skin[..., -1], survey.thickness)).ravel()
        ax.plot(s, angle, color=colour, linestyle=dash, linewidth=1.8, label="bevel of the skin")
        _cut_angles(job, ax, side)
        ax.axhline(0.0, color=QUIET, linewidth=0.7)
        ax.set_title(f"{side} edge")
        ax.set_ylabel("degrees")
        ax.margins(y=0.18)
    axes[0].legend(loc="best", fontsize=8)
    axes[1].set_xlabel(_along(job))
    return made


def _cut_angles(job: Job, ax: Axes, side: Side) -> None:
    """The saw's settings of a set bevel with their angles written on them, or the level of a square cut."""
    cut = job.web.cut(side)
    if cut.treatment == "full bevel":
        return
    runs = cut.runs or (seat.Run(0.0, job.web.plane.length, 0.0),)
    word = "saw set to" if cut.runs else "cut square"
    for i, run in enumerate(runs):
        at, angle = in_units(job, [run.start, run.stop]), float(np.degrees(run.angle))
        ax.plot(at, [angle, angle], color=INK, linewidth=2.4, solid_capstyle="butt", label=None if i else word)
        if cut.runs:
            ax.annotate(degrees(angle, 2), (float(at.mean()), angle), xytext=(0, -3), textcoords="offset points", ha="center", va="top")
        if i:
            ax.axvline(at[0], color=QUIET, linewidth=0.7, linestyle=(0, (1, 2)))


def heights(job: Job) -> Figure:
    """Where the skin's inside stands over both faces along the web, and how much higher it stands over the rear one."""
    made, (high, more) = figure(4.1, 2, height_ratios=[3, 2])
    survey = job.web.survey
    s = in_units(job, survey.s.ravel())
    ends = []
    for side in SIDES:
        colour, dash = EDGES[side]
        front, rear = (in_units(job, survey.skin[side][..., i].ravel()) for i in (0, -1))
        high.fill_between(s, front, rear, color=colour, alpha=0.25, linewidth=0.0)
        high.plot(s, front, color=colour, linewidth=1.0, label=f"{side}, front face")
        high.plot(s, rear, color=colour, linestyle=(0, (4, 2)), linewidth=1.0, label=f"{side}, rear face")
        more.plot(s, rear - front, color=colour, linestyle=dash, linewidth=1.6)
        ends.append((float((rear - front)[-1]), side, colour))
    for ax in (high, more):
        ax.axhline(0.0, color=QUIET, linewidth=0.7)
    high.set_ylabel(f"h over the web line, {job.record.units}")
    high.legend(loc="best", fontsize=8, ncols=2)
    more.set_ylabel(f"rear less front, {job.record.units}")
    more.margins(y=0.15)
    more.set_xlabel(_along(job))
    name_ends(more, ends)
    return made


def fill(job: Job) -> Figure:
    """The largest gap along each edge, and the filler for each length of it."""
    made, (gap, area) = figure(3.8, 2)
    survey = job.web.survey
    s = in_units(job, survey.s.ravel())
    ends: list[list[tuple[float, str, str]]] = [[], []]
    per = 1.0 / 25.4**2 if job.record.units == "in" else 1.0
    for side in SIDES:
        colour, dash = EDGES[side]
        cut = job.web.cut(side)
        found = in_units(job, cut.gap.ravel()), cut.filler_area.ravel() * per
        for ax, values, named in zip((gap, area), found, ends, strict=True):
            ax.plot(s, values, color=colour, linestyle=dash)
            named.append((float(values[-1]), side, colour))
        area.fill_between(s, found[1], color=colour, alpha=0.15, linewidth=0.0)
    if job.record.limits is not None and job.record.limits.max_gap is not None:
        most = float(in_units(job, job.record.limits.max_gap))
        gap.axhline(most, color=INK, linewidth=1.0, linestyle=(0, (1, 2)))
        gap.annotate("largest gap allowed", (1.0, most), xycoords=gap.get_yaxis_transform(), ha="right", va="bottom", xytext=(0, 2), textcoords="offset points")
    for ax, named in zip((gap, area), ends, strict=True):
        ax.set_ylim(0.0, 1.15 * max(ax.dataLim.y1, 1e-6))
        name_ends(ax, named)
    gap.set_ylabel(f"gap, {job.record.units}")
    area.set_ylabel("filler, sq in" if job.record.units == "in" else "filler, mm²")
    area.set_xlabel(_along(job))
    return made


def _along(job: Job) -> str:
    return f"s, {job.record.units} along the web from its inner end"


def places(job: Job) -> list[float]:
    """Where sections are shown: near both ends, and where the misfit of the square edge is worst in between."""
    length = job.web.plane.length
    survey = job.web.survey
    steep = np.max([np.abs(survey.bevel_slope(side)) for side in SIDES], axis=0)
    inside = (survey.s > 0.15 * length) & (survey.s < 0.85 * length)
    worst = float(survey.s[inside][steep[inside].argmax()]) if inside.any() else 0.5 * length
    return [0.03 * length, worst, 0.97 * length]


def section(job: Job, s: float) -> Figure:
    """The web in its section at a place, and both its edges enlarged beside it."""
    made = Figure(figsize=(WIDTH, 4.4), layout="constrained")
    grid = made.add_gridspec(2, 2, height_ratios=[1.0, 1.9])
    _rib(job, made.add_subplot(grid[0, :]), s)
    for i, side in enumerate(SIDES):
        _edge(job, made.add_subplot(grid[1, i]), s, side)
    return made


def _rib(job: Job, ax: Axes, s: float) -> None:
    """Skin and web as the rib plane through the web line's place s cuts them, to scale."""
    plane, loft = job.web.plane, job.loft
    y = float(plane.origin[1] + s * plane.s[1])
    outer = loft.outer(_T, y)[0][:, [0, 2]]
    within = inner(loft, _T, y)[0][:, [0, 2]]
    lines = [face_line(plane, job.face(face), y) for face in ("front", "rear")]
    low, high = (_reach(job, s, side) for side in ("bottom", "top"))
    web = np.array([_on(line, z) for line, z in ((lines[0], low), (lines[0], high), (lines[1], high), (lines[1], low))])
    origin = outer[:, 0].min()
    shown = [in_units(job, points - [origin, 0.0]) for points in (outer, within, web)]
    ax.fill(*shown[0].T, facecolor=SKIN, edgecolor=INK, linewidth=0.6)
    ax.fill(*shown[1].T, facecolor=PAPER, edgecolor=INK, linewidth=0.4)
    ax.fill(*shown[2].T, facecolor=FOAM, edgecolor=INK, linewidth=0.8)
    ax.set_aspect("equal")
    ax.grid(False)
    ax.spines[:].set_visible(False)
    ax.tick_params(length=2)
    ax.set_title(f"rib y {job.wording.length(y)}, to scale; s {job.wording.length(s)}")


def _reach(job: Job, s: float, side: Side) -> float:
    """Height in wing axes of the cut's middle at s."""
    row = job.rows([s])[0]
    edge = row.top if side == "top" else row.bottom
    return float(job.web.plane.point(s, (edge.cut_front + edge.cut_rear) / 2.0, 0.0)[2])


def _on(line: Array, z: float) -> Array:
    """Place (x, z) at a height on a line through two places."""
    share = (z - line[0, 1]) / (line[1, 1] - line[0, 1])
    return np.asarray(line[0] + share * (line[1] - line[0]))


def _edge(job: Job, ax: Axes, s: float, side: Side) -> None:
    """One edge square to the web line, enlarged: skin, what lies under it, the gap, and the sheet as it is cut."""
    row = job.rows([s])[0]
    cut = row.top if side == "top" else row.bottom
    half, up = row.thickness / 2.0, 1.0 if side == "top" else -1.0
    middle = float(job.over()[1](s))
    n = np.linspace(middle - half * (1.0 + _BESIDE), middle + half * (1.0 + _BESIDE), 61)
    within = np.abs(n - middle) <= half + 1e-9
    inside = _surface(job, s, n, side, 0.0)
    under = _surface(job, s, n[within], side, float(job.depth[side](s)))
    slope = (cut.cut_rear - cut.cut_front) / row.thickness
    line = cut.cut_front + slope * (n[within] - n[within][0])
    deep = max(float(np.ptp(inside)), float(job.depth[side](s)), row.thickness) * 0.55
    far = line - up * deep
    at = in_units(job, n)
    put = [in_units(job, v) for v in (inside, under, line, far)]
    skin = put[0] + up * in_units(job, float(job.loft.skin(np.array(row.y), np.array(row.y))[0]))
    ax.fill_between(at, put[0], skin, facecolor=SKIN, edgecolor=INK, linewidth=0.6)
    _bed(job, ax, s, n[within], side)
    ax.fill_between(at[within], put[2], put[1], facecolor=FILL, linewidth=0.0)
    ax.fill_between(at[within], put[3], put[2], facecolor=FOAM, linewidth=0.0)
    ax.plot(at[within][[0, 0, -1, -1]], [put[3][0], put[2][0], put[2][-1], put[3][-1]], color=INK, linewidth=1.0)
    ax.set_aspect("equal")
    ax.grid(False)
    ax.spines[:].set_visible(False)
    ax.tick_params(length=2)
    ax.set_title(f"{side} edge: bevel {degrees(cut.bevel)},\ngap {job.wording.length(cut.gap)}", fontsize=8)


def _surface(job: Job, s: float, n: Array, side: Side, depth: float) -> Array:
    return web_geometry.edge(job.loft, job.web.plane, np.full_like(n, s), n, side, depth).h


def _bed(job: Job, ax: Axes, s: float, n: Array, side: Side) -> None:
    """Cover and strips between bond line and seat."""
    caps = job.record.caps
    if caps is None or job.caps is None:
        return
    bond, cover = job.record.web.bond, cover_thickness(job, caps)
    put = [in_units(job, _surface(job, s, n, side, depth)) for depth in (bond, bond + cover)]
    ax.fill_between(in_units(job, n), *put, facecolor=COVER, linewidth=0.0)
    wide = caps.beside * caps.width / 2.0
    across = np.linspace(max(-wide, n[0]), min(wide, n[-1]), 21)
    here = [layer for layer in job.layers if layer.side == side and (layer.whole or layer.stop >= s)]
    for i in range(len(here)):
        top = bond + cover + i * rise(caps) + caps.glue
        put = [in_units(job, _surface(job, s, across, side, depth)) for depth in (top, top + caps.thickness)]
        ax.fill_between(in_units(job, across), *put, facecolor=STRIP, edgecolor=PAPER, linewidth=0.4)


def key(job: Job) -> Sequence[tuple[str, str]]:
    """What the colours of the enlarged edges stand for: (colour, what)."""
    laid = [(STRIP, "cap strips"), (COVER, "cover ply")] if job.record.caps is not None else []
    if job.record.caps is not None and job.record.caps.cover is None:
        laid = laid[:1]
    return [(SKIN, "skin"), *laid, (FILL, "filler"), (FOAM, "sheet")]
