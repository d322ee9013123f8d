"""Ribs and cradles as stated."""

from __future__ import annotations

from typing import TYPE_CHECKING

from ..geom import rib
from ..geom.rib import SLIVER, Cradle, NoRib, Rib
from ..geom.seat import Along
from ..geom.slot import Faces
from .laminate import laminate
from .records.core import PLYWOOD, Places

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
                faces(job, facing(job) or 0.0),
                which=stated.outline,
                clearance=stated.clearance,
                thickness=rib_sheet(job),
                corner=stated.corner,
                margin=stated.margin,
                flanges=[made.flange for made in job.flanges],
            )
            for y in places(job, stated.at)
        )
    except NoRib as fault:
        raise job.error("ribs.at", f"wanted ribs that the skin leaves something of, got one where {fault}") from None


def cradles(job: Job) -> tuple[Cradle, ...]:
    """The stated cradles.

    Raises
    ------
    WingError
        If nothing is left of one.
    """
    stated = job.record.cradles
    if stated is None:
        return ()
    try:
        return tuple(
            rib.cradles(
                job.loft,
                places(job, stated.at),
                faces(job),
                surface=stated.surface,
                chord=stated.chord,
                height=stated.height,
                padding=stated.padding,
                thickness=cradle_sheet(job),
            )
        )
    except NoRib as fault:
        text = f"wanted cradles that find room under the panel all through their sheet, got one where {fault}"
        raise job.error("cradles.at", text) from None


def rib_sheet(job: Job) -> float:
    """Thickness of the ribs' sheet, mm: as stated, or that of the sheet they are cut from; 0 where neither is."""
    stated, cutting = job.record.ribs, job.record.cutting
    cut = cutting.ribs if cutting else None
    return (stated.thickness if stated else 0.0) or (cut.thickness if cut else 0.0)


def cradle_sheet(job: Job) -> float:
    """Thickness of the cradles' sheet, mm: as stated, or that of the sheet they are cut from, or a usual plywood's."""
    stated, cutting = job.record.cradles, job.record.cutting
    if stated is not None and stated.thickness is not None:
        return stated.thickness
    cut = cutting.cradles if cutting else None
    return cut.thickness if cut else PLYWOOD


def facing(job: Job) -> float | None:
    """How much the cloth on each face of the web adds to it, mm; None where no cloth tells."""
    stated = job.record.web
    return laminate(stated.facing, job.stock, stated.adhesive).thickness if stated.facing else 0.0


def faces(job: Job, over: float = 0.0) -> Faces:
    """The web's two faces, `over` mm laid on each of them."""
    front, rear = job.face("front"), job.face("rear")
    return Faces(job.plane_at(job.cant), Along(front.s, front.value - over), Along(rear.s, rear.value + over))


def places(job: Job, at: Places) -> tuple[float, ...]:
    """Where ribs or cradles stand; at the stations unless stated."""
    return at if at is not None else tuple(station.y for station in job.record.wing.stations)


def left_out(job: Job, made: Rib) -> str:
    """What is said of a rib whose slivers are left out."""
    middle = made.slot.shape.centroid.x if made.slot else 0.0
    sides = sorted({"ahead of" if float(of[:, 0].mean()) < middle else "behind" for of in made.slivers})
    return f"what is left of it {' and '.join(sides)} the web, nowhere {job.wording.length(SLIVER)} wide, is left out"
