"""The bevel table: both edges at any places along the web."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..geom import seat, web
from ..geom.web import SIDES, Side

if TYPE_CHECKING:
    from .job import Job

Array = NDArray[np.float64]


class OffWeb(ValueError):
    """A place that is not on the web; the message says what was wanted and what was got."""


@dataclass(frozen=True)
class EdgeRow:
    """One edge at one place: heights in mm in the web plane, angles in degrees."""

    front: float
    rear: float
    bevel: float
    crown: float
    gap: float
    cut_front: float
    cut_rear: float


@dataclass(frozen=True)
class Row:
    """Both edges at one place s; y is the rib plane there."""

    s: float
    y: float
    thickness: float
    top: EdgeRow
    bottom: EdgeRow


def rows(job: Job, places: ArrayLike) -> list[Row]:
    """The bevel table at places s (k,) in mm.

    Raises
    ------
    OffWeb
        If a place lies beyond the web line.
    """
    s = np.asarray(places, dtype=float)
    plane = job.web.plane
    beyond = s[(s < 0.0) | (s > plane.length + 1e-9) | ~np.isfinite(s)]
    if beyond.size:
        raise OffWeb(f"wanted places from 0 to {plane.length:.1f} mm, got {beyond[0]:g}")
    thickness, middle = (law(s) for law in job.over())
    n = middle[:, None] + thickness[:, None] / 2.0 * seat.lobatto(job.web.survey.n.shape[-1])[0]
    edges = {side: _edge_rows(job, side, s, n, thickness) for side in SIDES}
    y = plane.origin[1] + s * plane.s[1]
    return [
        Row(float(s[i]), float(y[i]), float(thickness[i]), edges["top"][i], edges["bottom"][i]) for i in range(len(s))
    ]


def _edge_rows(job: Job, side: Side, s: Array, n: Array, thickness: Array) -> list[EdgeRow]:
    skin = web.edge(job.loft, job.web.plane, s[:, None], n, side).h
    bedded = web.edge(job.loft, job.web.plane, s[:, None], n, side, job.depth[side](s)[:, None]).h
    height, slope = job.web.cut(side).line(s)
    gap = seat.clearance(bedded, n, height, slope, side).max(axis=1)
    columns = (
        skin[:, 0],
        skin[:, -1],
        np.degrees(web.bevel(skin[:, 0], skin[:, -1], thickness)),
        seat.crown(skin, n, side),
        gap,
        height + slope * n[:, 0],
        height + slope * n[:, -1],
    )
    return [EdgeRow(*map(float, row)) for row in zip(*columns, strict=True)]
