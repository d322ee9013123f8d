"""Figure of the foam cores: how far a straight wire is off along each of them."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from ..geom import straight
from ..shop.cores import BuiltCore
from ..shop.job import Job
from .plot import BLUE, INK, QUIET, RED, figure, in_units

_ROWS = 97


def straight_cut(job: Job) -> Figure | None:
    """For each core how far what the wire leaves stands proud of skin and web, and how far it falls short."""
    if not job.cores:
        return None
    made, axes = figure(0.7 + 1.75 * len(job.cores), len(job.cores))
    for ax, core in zip(axes, job.cores, strict=True):
        _core(job, ax, core)
    axes[-1].set_xlabel(f"y, {job.wording.length_unit}")
    return made


def _core(job: Job, ax: Axes, core: BuiltCore) -> None:
    grid = straight.grid(core.loft, core.region, rows=_ROWS)
    for i, (a, b) in enumerate(pairwise(core.bounds)):
        y, (proud, short) = grid.extremes(a, b)
        at = in_units(job, np.concatenate([[a], y, [b]]))
        for values, colour, dash, word in ((proud, BLUE, "-", "foam proud"), (-short, RED, (0, (4, 2)), "foam short")):
            ends = in_units(job, np.concatenate([[0.0], values, [0.0]]))
            ax.fill_between(at, ends, color=colour, alpha=0.22, linewidth=0.0)
            ax.plot(at, ends, color=colour, linestyle=dash, linewidth=1.3, label=None if i else word)
        ax.axvline(float(in_units(job, b)), color=QUIET, linewidth=0.7, linestyle=(0, (1, 2)))
        ax.text(
            float(in_units(job, (a + b) / 2.0)),
            0.03,
            str(i + 1),
            transform=ax.get_xaxis_transform(),
            ha="center",
            va="bottom",
            color=INK,
        )
    ax.axhline(0.0, color=QUIET, linewidth=0.7)
    most = in_units(job, max(abs(core.worst.off), 1e-4))
    if core.stated.tolerance is not None:
        most = max(most, in_units(job, core.stated.tolerance))
        for sign in (-1.0, 1.0):
            ax.axhline(
                sign * float(in_units(job, core.stated.tolerance)), color=INK, linewidth=0.9, linestyle=(0, (1, 2))
            )
    ax.set_ylim(-1.45 * float(most), 1.45 * float(most))
    ax.set_ylabel(f"off, {job.wording.length_unit}")
    ax.set_title(f"core {core.number}, {core.stated.region}")
    if core.number == 1:
        ax.legend(loc="upper right", fontsize=8, ncols=2)
