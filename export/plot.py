"""How the report's figures look, and how they become SVG: the same bytes every time.

Lines are told apart by dash and by a label at their end as well as by colour. The hues are those of M. Okabe and
K. Ito, *Color Universal Design* (2008), darkened where they serve as text.
"""

from __future__ import annotations

import io
import re
from collections.abc import Sequence
from contextlib import AbstractContextManager
from dataclasses import dataclass
from typing import Any

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_svg import FigureCanvasSVG
from matplotlib.figure import Figure
from matplotlib.text import Annotation, Text
from numpy.typing import ArrayLike, NDArray

from ..shop.job import Job
from ..shop.units import MM_PER_INCH

Array = NDArray[np.float64]

INK, QUIET, RULE, PAPER = "#222222", "#5a5a5a", "#d4d4d4", "#ffffff"
BLUE, RED, GREEN, PURPLE, BROWN = "#0072b2", "#b04300", "#00735c", "#94447c", "#7d5a00"
LINES: tuple[tuple[str, Any], ...] = (
    (BLUE, "-"),
    (RED, (0, (5, 2))),
    (GREEN, (0, (1.2, 1.5))),
    (PURPLE, (0, (6, 2, 1.2, 2))),
    (INK, (0, (9, 1.5))),
    (BROWN, (0, (3, 1.5))),
)
EDGES: dict[str, tuple[str, Any]] = {"top": LINES[0], "bottom": LINES[1]}
FOAM, FILL, STRIP, SKIN, COVER, GLUE = "#e8dcc0", "#e69f00", "#3c4048", "#8fa3b0", "#56b4e9", "#cc79a7"

WIDTH = 4.7  # inches: at this width letters can still be read on a telephone
_STYLE: dict[Any, Any] = {
    "font.family": "DejaVu Sans",
    "font.size": 8.5,
    "text.color": INK,
    "axes.edgecolor": QUIET,
    "axes.labelcolor": INK,
    "axes.labelsize": 8.5,
    "axes.titlesize": 8.5,
    "axes.titlelocation": "left",
    "axes.linewidth": 0.7,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.grid": True,
    "axes.axisbelow": True,
    "grid.color": RULE,
    "grid.linewidth": 0.5,
    "lines.linewidth": 1.5,
    "lines.markersize": 4.0,
    "xtick.color": QUIET,
    "ytick.color": QUIET,
    "xtick.labelcolor": INK,
    "ytick.labelcolor": INK,
    "hatch.linewidth": 0.5,
    "legend.frameon": False,
    "legend.handlelength": 2.6,
    "figure.facecolor": "none",
    "axes.facecolor": "none",
    "svg.hashsalt": "wrywing",
    "svg.fonttype": "path",
    "path.simplify": True,
}


@dataclass(frozen=True)
class Shown:
    """A figure as it stands in the report: its name in the page, what it shows in a word or two, and its SVG."""

    name: str
    title: str
    svg: str


def style() -> AbstractContextManager[None]:
    """The look in which figures have to be both drawn and written."""
    return mpl.rc_context(_STYLE)


def figure(height: float, rows: int = 1, **layout: Any) -> tuple[Figure, list[Axes]]:
    """A figure of a height in inches with axes below one another that share x."""
    made = Figure(figsize=(WIDTH, height))
    found = made.subplots(rows, 1, sharex=True, squeeze=False, **layout)
    return made, list(found[:, 0])


def key_above(made: Figure, columns: int) -> None:
    """The legend of all axes over the figure, in columns from the left."""
    made.legend(
        loc="upper left", bbox_to_anchor=(0.0, 1.0), ncols=columns, fontsize=8, columnspacing=1.4, borderaxespad=0.2
    )


def settle(made: Figure) -> None:
    """Leave room round the axes for their lettering, reckoned from the length of the words.

    Matplotlib's own layouts draw a figure several times over to measure it, which takes longer than all the rest.
    """
    axes = made.axes
    wide, high = made.get_size_inches()
    labels = (ax.yaxis.get_major_formatter().format_ticks(ax.get_yticks().tolist()) for ax in axes)
    ticks = max((len(text) for some in labels for text in some), default=0)
    names = max((len(text.get_text()) for ax in axes for text in ax.texts if _beside(text)), default=0)
    key = sum(legend.get_window_extent().height for legend in made.legends) / made.dpi
    title = 0.17 if any(ax.get_title("left") for ax in axes) else 0.0
    top = 0.08 + title + key
    tall = (high - 0.47 - top - (len(axes) - 1) * (0.17 + title)) / len(axes)
    made.subplots_adjust(
        left=(0.36 + 0.072 * ticks) / wide,
        right=1.0 - (0.1 + 0.08 * names) / wide,
        top=1.0 - top / high,
        bottom=0.47 / high,
        hspace=(0.17 + title) / tall,
    )
    made.align_ylabels()


def _beside(text: Text) -> bool:
    return isinstance(text, Annotation) and text.xycoords == "axes fraction" and text.xy[0] >= 1.0


def to_svg(of: Figure, name: str) -> str:
    """A figure as SVG to stand inside a page: no size of its own, and every identifier with its name before it."""
    FigureCanvasSVG(of)
    if of.axes[0].get_subplotspec() is not None:
        settle(of)
    out = io.StringIO()
    of.savefig(out, format="svg", metadata={"Date": None, "Creator": None, "Format": None, "Type": None})
    svg = out.getvalue()
    svg = svg[svg.index("<svg") :]
    svg = re.sub(r"<metadata>.*?</metadata>\s*", "", svg, flags=re.DOTALL)
    svg = re.sub(r'(<svg[^>]*?) width="[^"]*"', r"\1", svg, count=1)
    svg = re.sub(r'(<svg[^>]*?) height="[^"]*"', r"\1", svg, count=1)
    svg = re.sub(r'(\bid="|href="#|url\(#)', rf"\g<1>{name}-", svg)
    return re.sub(r"\n\s*", "\n", svg).strip()


def in_units(job: Job, mm: ArrayLike) -> Array:
    """Lengths in the wing file's units."""
    values = np.asarray(mm, dtype=float)
    return np.asarray(values / MM_PER_INCH if job.record.units == "in" else values)


def spread(places: Sequence[float], least: float, low: float, high: float) -> list[float]:
    """Places moved apart until they are `least` from one another, in the same order, and within the bounds if they fit.

    >>> spread([1.0, 1.1, 5.0], 0.5, 0.0, 10.0)
    [0.8, 1.3, 5.0]
    """
    order = sorted(range(len(places)), key=lambda i: places[i])
    groups: list[list[int]] = []
    middles: list[float] = []

    def middle(group: list[int]) -> float:
        half = least * (len(group) - 1) / 2.0
        wanted = sum(places[i] for i in group) / len(group)
        return min(max(wanted, low + half), max(high - half, low + half))

    for i in order:
        groups.append([i])
        middles.append(middle([i]))
        while len(groups) > 1:
            gap = least * (len(groups[-2]) + len(groups[-1])) / 2.0
            if middles[-1] - middles[-2] >= gap - 1e-12:
                break
            groups[-2:] = [groups[-2] + groups[-1]]
            middles[-2:] = [middle(groups[-1])]
    out = [0.0] * len(places)
    for group, at in zip(groups, middles, strict=True):
        for k, i in enumerate(group):
            out[i] = round(at + least * (k - (len(group) - 1) / 2.0), 12)
    return out


def name_ends(ax: Axes, ends: Sequence[tuple[float, str, str]], *, points: float = 11.0) -> None:
    """Name lines at the right of the axes, moved apart where they are close: (height of the end, text, colour)."""
    low, high = ax.get_ylim()
    whole = ax.get_figure(root=True)
    tall = ax.get_position().height * (whole.get_figheight() if whole else 1.0) * 72.0
    to_axes = [float(ax.transAxes.inverted().transform(ax.transData.transform((0.0, y)))[1]) for y, _, _ in ends]
    at = spread([min(max(v, 0.0), 1.0) for v in to_axes], points / tall, 0.0, 1.0)
    for (_, text, colour), y in zip(ends, at, strict=True):
        ax.annotate(
            text,
            (1.0, y),
            xycoords="axes fraction",
            xytext=(4, 0),
            textcoords="offset points",
            color=colour,
            va="center",
        )
    ax.set_ylim(low, high)
