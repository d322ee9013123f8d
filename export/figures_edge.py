"""Figures of the web's two edges: bevel, heights, gap and filler along the web, and the web's section at a place."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.ticker import MaxNLocator

from ..geom import seat
from ..geom import web as web_geometry
from ..geom.blank import FACES
from ..geom.profile import face_line, inner, symmetric
from ..geom.web import SIDES, Side
from ..shop.bevels import Row
from ..shop.job import Job
from ..shop.stock import Filler
from ..shop.strips import cover_thickness, rise
from ..shop.units import MM_PER_INCH
from ..shop.wording import GRAMS_PER_OUNCE, degrees
from .plot import (
    COVER,
    EDGES,
    FILL,
    FOAM,
    GLUE,
    INK,
    PAPER,
    QUIET,
    SKIN,
    STRIP,
    WIDTH,
    Array,
    figure,
    in_units,
    name_ends,
)

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
    cut, survey = job.web.cut(side), job.web.survey
    if cut.treatment == "full bevel":
        return
    runs = cut.runs or (seat.Run(0.0, job.web.plane.length, 0.0),)
    for i, run in enumerate(runs):
        at, slope = in_units(job, [run.start, run.stop]), np.tan(run.angle)
        angle = float(np.degrees(run.angle))
        ax.plot(at, [angle, angle], color=INK, linewidth=2.4, solid_capstyle="butt", label=None if i else "cut")
        if i:
            ax.axvline(at[0], color=QUIET, linewidth=0.7, linestyle=(0, (1, 2)))
        under = float(np.interp(run.start, survey.s.ravel(), survey.bevel_slope(side).ravel())) < slope
        ax.annotate(
            degrees(angle, 2),
            (at[0], angle),
            xytext=(3, 3 if under else -3),
            textcoords="offset points",
            ha="left",
            va="bottom" if under else "top",
        )


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
    high.set_ylabel(f"h over the web line, {job.wording.length_unit}")
    high.legend(loc="best", fontsize=8, ncols=2)
    more.set_ylabel(f"rear less front, {job.wording.length_unit}")
    more.margins(y=0.15)
    more.set_xlabel(_along(job))
    name_ends(more, ends)
    return made


def fill(job: Job) -> Figure:
    """The largest gap along each edge, and what fills it."""
    made, (gap, mass) = figure(3.8, 2)
    s = in_units(job, job.web.survey.s.ravel())
    ends: list[list[tuple[float, str, str]]] = [[], []]
    per = job.stock.find(job.record.web.filler, Filler).density * 1e-3  # g/m for each mm^2
    if job.record.units == "in":
        per *= 12.0 * MM_PER_INCH / 1e3 / GRAMS_PER_OUNCE
    for side in SIDES:
        colour, dash = EDGES[side]
        cut = job.web.cut(side)
        found = in_units(job, cut.gap.ravel()), cut.filler_area.ravel() * per
        for ax, values, named in zip((gap, mass), found, ends, strict=True):
            ax.plot(s, values, color=colour, linestyle=dash)
            named.append((float(values[-1]), side, colour))
        mass.fill_between(s, found[1], color=colour, alpha=0.15, linewidth=0.0)
    for ax in (gap, mass):
        ax.set_ylim(0.0, 1.2 * max(ax.dataLim.y1, 1e-6))
    ends[0] += _allowed(job, gap)
    for ax, named in zip((gap, mass), ends, strict=True):
        name_ends(ax, named)
    gap.set_ylabel(f"gap, {job.wording.length_unit}")
    mass.set_ylabel("filler in it, oz a foot" if job.record.units == "in" else "filler in it, g a metre")
    mass.set_xlabel(_along(job))
    return made


def _allowed(job: Job, ax: Axes) -> list[tuple[float, str, str]]:
    """The largest gap allowed, as a line with a name at its end, or in words where it is far above the figure."""
    limit = job.record.limits.max_gap if job.record.limits else None
    if limit is None:
        return []
    most, high = float(in_units(job, limit)), ax.get_ylim()[1]
    if most < high:
        ax.axhline(most, color=INK, linewidth=1.0, linestyle=(0, (1, 2)))
        return [(most, "allowed", QUIET)]
    text = f"allowed: {job.wording.length(limit)}, above this figure"
    ax.text(1.0, 1.0, text, transform=ax.transAxes, ha="right", va="top", color=QUIET)
    return []


def _along(job: Job) -> str:
    return f"s, {job.wording.length_unit} along the web from its inner end"


def places(job: Job) -> list[float]:
    """Where sections are shown: near both ends, and where the misfit of the square edge is worst in between."""
    length = job.web.plane.length
    survey = job.web.survey
    steep = np.max([np.abs(survey.bevel_slope(side)) for side in SIDES], axis=0)
    inside = (survey.s > 0.3 * length) & (survey.s < 0.7 * length)
    worst = float(survey.s[inside][steep[inside].argmax()]) if inside.any() else 0.5 * length
    return [0.03 * length, worst, 0.97 * length]


def section(job: Job, s: float) -> Figure:
    """The web in its section at a place, and both its edges enlarged below it."""
    made = Figure(figsize=(WIDTH, 3.55))
    _rib(job, made.add_axes((0.01, 0.65, 0.98, 0.30)), s)
    row = job.rows([s])[0]
    for i, side in enumerate(SIDES):
        _edge(job, made.add_axes((0.01 + 0.5 * i, 0.0, 0.48, 0.52)), row, side)
    return made


def _bare(job: Job, ax: Axes, title: str, around: Array) -> None:
    """Axes without ticks that hold all points (k, 2), to scale, with a bar that says how long a length is."""
    (x0, z0), (x1, z1) = around.min(axis=0), around.max(axis=0)
    tick = MaxNLocator(nbins=5, steps=[1, 2, 5, 10]).tick_values(0.0, x1 - x0)[1]
    ax.set_axis_off()
    ax.set_aspect("equal")
    ax.set_anchor("N")
    below = z0 - 0.05 * (x1 - x0)
    ax.plot([x0, x0 + tick], [below, below], color=INK, linewidth=1.6, solid_capstyle="butt")
    ax.annotate(
        f"{tick:g} {job.record.units}",
        (x0 + tick, below),
        xytext=(4, 0),
        textcoords="offset points",
        va="center",
        fontsize=8,
    )
    ax.set_xlim(x0, x1)
    ax.set_ylim(z0 - 0.10 * (x1 - x0), z1)
    ax.set_title(title, fontsize=8.5)


def _rib(job: Job, ax: Axes, s: float) -> None:
    """Skin and web as the rib plane through the web line's place s cuts them, to scale."""
    plane, loft = job.web.plane, job.loft
    y = float(plane.origin[1] + s * plane.s[1])
    outer = loft.outer(_T, y)[0][:, [0, 2]]
    within = inner(loft, _T, y)[0][:, [0, 2]]
    lines = [face_line(plane, job.face(face), y) for face in FACES]
    row = job.rows([s])[0]
    middles = [(edge.cut_front + edge.cut_rear) / 2.0 for edge in (row.bottom, row.top)]
    low, high = (float(plane.point(s, h, 0.0)[2]) for h in middles)
    web = np.array([_on(line, z) for line, z in ((lines[0], low), (lines[0], high), (lines[1], high), (lines[1], low))])
    shown = [in_units(job, points) for points in (outer, within, web)]
    ax.fill(*shown[0].T, facecolor=SKIN, edgecolor=INK, linewidth=0.6)
    ax.fill(*shown[1].T, facecolor=PAPER, edgecolor=INK, linewidth=0.4)
    ax.fill(*shown[2].T, facecolor=FOAM, edgecolor=INK, linewidth=0.8)
    put = job.wording.column
    _bare(
        job,
        ax,
        f"s {put(s, 1)} {job.record.units}, rib y {put(y, 1)} {job.record.units}: to scale, nose left",
        shown[0],
    )


def _on(line: Array, z: float) -> Array:
    """Place (x, z) at a height on a line that rises."""
    return np.array([np.interp(z, line[:, 1], line[:, 0]), z])


def _edge(job: Job, ax: Axes, row: Row, side: Side) -> None:
    """One edge square to the web line, enlarged: skin, what lies under it, the gap, and the sheet as it is cut."""
    cut = row.top if side == "top" else row.bottom
    half, up, middle = row.thickness / 2.0, 1.0 if side == "top" else -1.0, float(job.over()[1](row.s))
    n = middle + half * np.linspace(-1.0 - _BESIDE, 1.0 + _BESIDE, 65)
    on = np.abs(n - middle) <= half * (1.0 + 1e-9)
    inside = _surface(job, row.s, n, side, 0.0)
    skin = inside + up * float(job.loft.skin(np.array(row.y), np.array(row.y))[0])
    line = cut.cut_front + (cut.cut_rear - cut.cut_front) * (n[on] - n[on][0]) / row.thickness
    deep = up * max(0.7 * row.thickness, 0.3 * abs(skin - line[0]).max())
    at, inside, skin, line, far = (in_units(job, v) for v in (n, inside, skin, line, line - deep))
    ax.fill_between(at, inside, skin, facecolor=SKIN, edgecolor=INK, linewidth=0.6)
    ax.fill_between(at[on], line, inside[on], facecolor=FILL, linewidth=0.0)
    _bed(job, ax, row.s, n[on], side)
    ax.fill_between(at[on], far, line, facecolor=FOAM, linewidth=0.0)
    ax.plot(at[on][[0, 0, -1, -1]], [far[0], line[0], line[-1], far[-1]], color=INK, linewidth=1.0)
    level = line.min() if side == "top" else line.max()
    ax.plot(at[on][[0, -1]], [level, level], color=INK, linewidth=0.9, linestyle=(0, (3, 2)))
    around = np.column_stack([np.tile(at, 2), np.concatenate([skin, np.resize(far, len(at))])])
    _bare(job, ax, f"{side} edge: bevel {degrees(cut.bevel)},\ngap {job.wording.length(cut.gap)}", around)


def _surface(job: Job, s: float, n: Array, side: Side, depth: float) -> Array:
    return web_geometry.edge(job.loft, job.web.plane, np.full_like(n, s), n, side, depth).h


def _bed(job: Job, ax: Axes, s: float, n: Array, side: Side) -> None:
    """Bond line, cover and strips between the skin and the seat."""
    caps, bond = job.record.caps, job.record.web.bond
    cover = cover_thickness(job, caps) if caps else 0.0
    for top, deep, colour in ((0.0, bond, GLUE), (bond, cover, COVER)):
        if deep:
            _layer(job, ax, s, n, side, (top, top + deep), colour)
    if caps is None:
        return
    wide = caps.beside * caps.width / 2.0
    across = np.linspace(max(-wide, n[0]), min(wide, n[-1]), 15)
    here = [layer for layer in job.layers if layer.side == side and (layer.whole or layer.stop >= s)]
    for i in range(len(here)):
        top = bond + cover + i * rise(caps)
        _layer(job, ax, s, across, side, (top, top + caps.glue), GLUE)
        _layer(job, ax, s, across, side, (top + caps.glue, top + rise(caps)), STRIP)


def _layer(job: Job, ax: Axes, s: float, n: Array, side: Side, depths: tuple[float, float], colour: str) -> None:
    outer, within = (in_units(job, _surface(job, s, n, side, depth)) for depth in depths)
    ax.fill_between(in_units(job, n), outer, within, facecolor=colour, linewidth=0.0)


def key(job: Job) -> list[tuple[str, str]]:
    """What the colours of the enlarged edges stand for: (colour, what)."""
    caps = job.record.caps
    laid = [(GLUE, "bond line")] if job.record.web.bond or (caps and caps.glue) else []
    if caps is not None:
        laid += [(COVER, "cover ply")] * (caps.cover is not None) + [(STRIP, "cap strips")]
    return [(SKIN, "skin"), *laid, (FILL, "filler"), (FOAM, "sheet")]
