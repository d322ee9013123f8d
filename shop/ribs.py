"""Ribs and cradles as stated."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from ..geom import rib
from ..geom.rib import Cradle, Faces, NoRib, Rib
from .records_core import Places

if TYPE_CHECKING:
    from .job import Job


def built(job: Job) -> tuple[Rib, ...]:
    """The stated ribs.

    Raises
    ------
    WingError
        If nothing is left of one.
    """
    stated = job.record.ribs
    if stated is None:
        return ()
    try:
        return tuple(
            rib.rib(
                job.loft,
                y,
                faces(job),
                which=stated.outline,
                clearance=stated.clearance,
                thickness=stated.thickness,
                corner=stated.corner,
                margin=stated.margin,
            )
            for y in places(job, stated.at)
        )
    except NoRib as fault:
        raise job.error("ribs.at", f"wanted ribs that the skin leaves something of, got one where {fault}") from None


def cradles(job: Job) -> tuple[Cradle, ...]:
    """The stated cradles."""
    stated = job.record.cradles
    if stated is None:
        return ()
    return tuple(
        rib.cradles(
            job.loft,
            np.array(places(job, stated.at)),
            faces(job),
            surface=stated.surface,
            chord=stated.chord,
            height=stated.height,
            padding=stated.padding,
        )
    )


def faces(job: Job) -> Faces:
    """The web as ribs have to make room for it."""
    return Faces(job.plane_at(job.cant), job.face("front"), job.face("rear"))


def places(job: Job, at: Places) -> tuple[float, ...]:
    """Where ribs or cradles stand; at the stations unless stated."""
    return at if at is not None else tuple(station.y for station in job.record.wing.stations)
