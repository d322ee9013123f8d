"""Figures of what bears the load: strips, reserve factors, and the flanges that tie web and skin."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.ticker import FuncFormatter, MaxNLocator

from ..geom.web import SIDES, Side
from ..shop.describe.strength import factor
from ..shop.describe.strips import cut_length
from ..shop.job import Job
from .plot import EDGES, INK, LINES, PAPER, figure, in_units, name_ends

_LETTER = 0.015  # of the figure's width that a letter takes
_MOST = 30.0  # reserve factors above this are cut off: they say no more


def strips(job: Job) -> Figure | None:
    """Every layer of strips as a bar along the web with the length it is cut to, under the layers that are needed."""
    found, caps = job.caps, job.record.caps
    if found is None or caps is None:
        return None
    counts = [len(found.stacks[side].stops) for side in SIDES]
    made, axes = figure(1.5 + 0.26 * sum(counts), 2, height_ratios=[n + 0.8 for n in counts])
    s = in_units(job, found.s)
    for ax, side in zip(axes, SIDES, strict=True):
        colour, _ = EDGES[side]
        _bars(job, ax, side, colour)
        need = found.need[side]
        ax.plot(s, need, color=INK, linewidth=1.6, label="layers needed")
        ax.set_title(f"{side} edge")
        ax.set_ylabel("layers")
        ax.set_ylim(0.0, len(found.stacks[side].stops) + 0.5)
        ax.yaxis.set_major_locator(_whole(len(found.stacks[side].stops)))
    axes[0].legend(loc="upper right", fontsize=8)
    axes[1].set_xlabel(f"s, {job.wording.length_unit} along the web from its inner end")
    return made


def _whole(most: int) -> MaxNLocator:
    return MaxNLocator(nbins=min(most, 6), integer=True)


def _bars(job: Job, ax: Axes, side: Side, colour: str) -> None:
    room = 0
    for layer in (layer for layer in job.layers if layer.side == side):
        stop = float(in_units(job, layer.stop))
        ax.barh(layer.number - 0.5, stop, height=0.8, color=colour, alpha=0.28, edgecolor=colour, linewidth=0.6)
        text = f"{layer.count} x {cut_length(job, layer)}"  # beyond its end, where fewer layers are needed
        ax.annotate(
            text, (stop, layer.number - 0.5), xytext=(4, 0), textcoords="offset points", va="center", fontsize=8
        )
        room = max(room, len(text))
    length = float(in_units(job, job.web.plane.length))
    ax.set_xlim(0.0, max(ax.get_xlim()[1], length / (1.0 - _LETTER * room)))


def reserves(job: Job) -> Figure | None:
    """Reserve factors along the web at ultimate load."""
    found = job.strength
    if found is None or not found.checks:
        return None
    made, (ax,) = figure(3.2)
    s, ends = in_units(job, found.schedule.s), []
    looks = zip(found.checks, LINES * 2, strict=False)
    for check, (colour, dash) in sorted(looks, key=lambda pair: float(pair[0].reserve.min())):
        at = check.least
        ax.plot(s, np.where(check.reserve < 10.0 * _MOST, check.reserve, np.nan), color=colour, linestyle=dash)
        ax.plot(s[at], min(check.reserve[at], 10.0 * _MOST), "o", color=colour, markerfacecolor=PAPER, markersize=4.5)
        ends.append((_MOST, f"{check.name} {factor(float(check.reserve[at]))}", colour))
    ax.set_yscale("log")
    least = min(float(check.reserve.min()) for check in found.checks)
    ax.set_ylim(min(0.8, 0.9 * least), _MOST)
    ax.yaxis.set_major_formatter(FuncFormatter(lambda v, _: f"{v:g}"))
    ax.yaxis.set_minor_formatter(FuncFormatter(lambda v, _: f"{v:g}" if v in (0.5, 2.0, 3.0, 5.0, 20.0, _MOST) else ""))
    ax.axhspan(ax.get_ylim()[0], 1.0, color="#f6d9cc", linewidth=0.0)
    ax.axhline(1.0, color=INK, linewidth=1.2)
    name_ends(ax, ends)
    ax.set_ylabel("reserve factor")
    ax.set_xlabel(f"s, {job.wording.length_unit} along the web from its inner end")
    return made


def flanges(job: Job) -> Figure | None:
    """The angle between web and skin that each flange is asked for, and the bar it is laid up over."""
    if not job.flanges:
        return None
    made, (ax,) = figure(2.9)
    ends = []
    for made_one, (colour, dash) in zip(job.flanges, LINES, strict=False):
        flange = made_one.flange
        s, angle = in_units(job, flange.s), np.degrees(flange.angle)
        ax.plot(s, angle, color=colour, linestyle=dash)
        bar = float(np.degrees(flange.shape.bar))
        ax.plot(s[0], bar, ">", color=colour, markersize=6, clip_on=False)
        ends.append((float(angle[-1]), f"{flange.name}, bar {bar:g}°", colour))
    ax.margins(y=0.12)
    name_ends(ax, ends)
    ax.set_ylabel("angle of web and skin, degrees")
    ax.set_xlabel(f"s, {job.wording.length_unit} along the web (arrows: bars)")
    return made
