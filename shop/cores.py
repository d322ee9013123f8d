"""The foam cores as stated: divided into bays, each laid out for the wire, and the path of a machine."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache, cached_property
from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from ..geom import bays, core, path, straight, template, wire
from ..geom.blank import FaceName
from ..geom.block import NoPins
from ..geom.core import Mesh, NoFoam, Region
from ..geom.loft import Loft
from ..geom.path import BetweenPlanes, Machine, OffTravel, Path
from ..geom.straight import Grid, Miss
from ..geom.template import Board, FoldedWay
from ..geom.wire import Bay, How, WideKerf
from .records.core import Core
from .ribs import faces, facing
from .stock import Foam
from .units import GRAM, MM_PER_INCH
from .wingfile import WingError

if TYPE_CHECKING:
    from .job import Job

HOT_WIRE = (
    "Hot wire: hot foam gives off harmful fumes and can burn. Moving air, a mask, an isolated low-voltage supply, an "
    "extinguisher at hand; never leave it hot."
)
FACE: dict[str, FaceName] = {"nose": "front", "aft": "rear"}  # of the web, that a core lies beside
Off = Callable[[tuple[float, float]], Miss]

_ROWS = 241


@dataclass(frozen=True)
class BuiltCore:
    """A core as it is cut.

    Attributes
    ----------
    number
        1 for the first in the wing file.
    stated, foam
        What the wing file says.
    bounds
        Ribs (bays + 1,) between its bays, mm.
    misses
        The largest straight-cut error of each bay.
    bays
        How each of them is cut.
    """

    number: int
    stated: Core
    foam: Foam
    loft: Loft
    region: Region
    bounds: tuple[float, ...]
    misses: tuple[Miss, ...]
    bays: tuple[Bay, ...]

    @property
    def name(self) -> str:
        """Fit for a file name."""
        return f"core-{self.number}-{self.stated.region}"

    @property
    def worst(self) -> Miss:
        """The largest straight-cut error of all bays."""
        return max(self.misses, key=lambda miss: abs(miss.off))

    @cached_property
    def boards(self) -> tuple[tuple[tuple[Board, ...], tuple[Board, ...]], ...]:
        """The templates of each bay's inner and outer end."""
        return tuple((tuple(template.boards(bay, 0)), tuple(template.boards(bay, 1))) for bay in self.bays)

    @cached_property
    def mesh(self) -> Mesh:
        """The core as wanted, all bays together."""
        return core.solid(self.loft, self.region)

    @property
    def mass(self) -> float:
        """Grams."""
        return self.mesh.volume * self.foam.density * GRAM


@dataclass(frozen=True)
class WirePath:
    """The path that cuts one bay on a machine; `index` counts the bays from 0."""

    core: BuiltCore
    index: int
    path: Path


def built(job: Job) -> tuple[BuiltCore, ...]:
    """The stated cores.

    Raises
    ------
    WingError
        If one cannot be cut; the key at fault is named.
    """
    return tuple(_core(job, i, stated) for i, stated in enumerate(job.record.cores))


def _core(job: Job, index: int, stated: Core) -> BuiltCore:
    key = f"cores[{index + 1}]"
    region = _region(job, stated)
    try:
        rows = max(_ROWS, 12 * (stated.bays or stated.most) + 1)
        sampled = straight.grid(job.loft, region, rows=rows)
        off = cache(lambda pair: straight.worst(job.loft, sampled, pair))
        bounds = _bounds(job, key, stated, region, sampled, off)
        pairs = _pairs(bounds)
        misses = tuple(off(pair) for pair in pairs)
        how = _how(job, stated)
        made = tuple(wire.bay(job.loft, region, pair, how) for pair in pairs)
        out = BuiltCore(index + 1, stated, job.stock.find(stated.foam, Foam), job.loft, region, bounds, misses, made)
        _ = out.boards
    except NoFoam as fault:
        raise job.error(f"{key}.{fault.key}", f"wanted a region with foam in it, got {fault}") from None
    except WideKerf as fault:
        got = job.wording.length(fault.kerf)
        remedy = "state a larger least_thickness, or stop the core there with to"
        text = f"wanted a kerf that the trailing edge allows, got {got}: {fault}; {remedy}"
        raise job.error(f"{key}.kerf", text) from None
    except NoPins as fault:
        raise job.error(f"{key}.region", f"wanted a core large enough for its templates' pins, got {fault}") from None
    except FoldedWay as fault:
        raise job.error(f"{key}.kerf", f"wanted a kerf that the core's shape allows, got one where {fault}") from None
    return out


def _region(job: Job, stated: Core) -> Region:
    """What the core fills: its face beside the web stands off the sheet's by facing and bond line."""
    if stated.region == "whole":
        ends = stated.ends or (job.record.wing.stations[0].y, job.record.wing.stations[-1].y)
        return Region("whole", ends, to=stated.to, least=stated.least)
    bond = job.record.web.bond if stated.bond is None else stated.bond
    web = faces(job, bond + (facing(job) or 0.0))
    face = web.front if stated.region == "nose" else web.rear
    return Region(stated.region, stated.ends or job.record.web.ends, web.web, face, stated.to, stated.least)


def _how(job: Job, stated: Core) -> How:
    wire_ = job.record.wire
    return How(
        wire_.diameter if wire_ else 0.0,
        stated.kerf,
        stated.passes,
        stated.runway,
        stated.margin,
        MM_PER_INCH / 4.0 if job.record.units == "in" else 5.0,
    )


def _bounds(job: Job, key: str, stated: Core, region: Region, sampled: Grid, off: Off) -> tuple[float, ...]:
    """Ribs between the bays: as many as stated, or the fewest that hold the tolerance."""
    longest = stated.longest or float("inf")
    divider = bays.Divider(region.ends, sampled.parts, sampled.table, sampled.spread, longest)
    span, words = region.ends[1] - region.ends[0], job.wording
    need = int(np.ceil(span / longest - 1e-9))
    if need > (stated.bays or stated.most):
        what, got = ("bays", stated.bays) if stated.bays else ("most", stated.most)
        raise job.error(
            f"{key}.{what}",
            f"wanted {need} bays or more, as no block over {words.length(span)} may be longer than "
            f"{words.length(longest)}, got {got}",
        )
    if stated.bays:
        return divider.into(stated.bays)
    tolerance = stated.tolerance or 0.0

    try:
        return divider.fewest(tolerance, stated.most, lambda found: max(abs(off(pair).off) for pair in _pairs(found)))
    except bays.TooFew as fault:
        raise job.error(
            f"{key}.tolerance",
            f"wanted one that {stated.most} bays can hold, got {words.length(tolerance)}: "
            f"{stated.most} bays are off by {words.length(fault.reached)}",
        ) from None


def _pairs(bounds: tuple[float, ...]) -> list[tuple[float, float]]:
    return list(pairwise(bounds))


def flange_steps(job: Job, made: BuiltCore, ends: tuple[float, float]) -> str:
    """What is said of flange legs that lie between a core and web or skin, from rib to rib; "" where none do."""
    beside = [m.flange for m in job.flanges if made.region.kind == "whole" or m.flange.face == FACE[made.region.kind]]
    words, legs = job.wording, dict[str, list[str]]()
    for flange in beside:
        s = job.web.plane.s_at_rib(np.array(ends), 0.0, 0.0)
        skin = list(dict.fromkeys(words.plain(leg) for leg in flange.shape.skin_leg(s).tolist()))
        width = f"{words.length(flange.shape.web_leg)} wide on the web, {' to '.join(skin)} {words.units} on the skin"
        legs.setdefault(width, []).append(flange.name)
    if not legs:
        return ""
    thick = words.length(beside[0].shape.thickness)
    wide = "; ".join(f"{' and '.join(names)} {width}" for width, names in legs.items())
    return (
        f"no room is left for the legs of the flanges, {thick} thick: {wide}. A straight wire cannot cut such a step: "
        "relieve the foam by hand"
    )


def wire_paths(job: Job) -> tuple[WirePath, ...]:
    """The path of the stated machine for each bay of each core; none without a machine.

    Raises
    ------
    WingError
        If a block does not go between the planes, or a place is out of reach.
    """
    stated = job.record.wire
    if stated is None or not (stated.planes and stated.place and stated.travel and stated.speed):
        return ()
    machine = Machine(stated.planes, stated.place, stated.travel, stated.speed)
    out = []
    for made in job.cores:
        for i, bay in enumerate(made.bays):
            try:
                out.append(WirePath(made, i, path.path(bay, machine)))
            except BetweenPlanes as fault:
                where, got = f"core {made.number} bay {i + 1}", job.wording.length(stated.planes[fault.plane])
                text = f"wanted planes on both sides of the block, got {got}: in {where} {fault}"
                raise job.error(f"wire.planes[{fault.plane + 1}]", text) from None
            except OffTravel as fault:
                raise _off_travel(job, made, i, fault) from None
    return tuple(out)


def _off_travel(job: Job, made: BuiltCore, index: int, fault: OffTravel) -> WingError:
    stated, words = job.record.wire, job.wording
    axis = stated.axes[2 * fault.plane + fault.axis] if stated else ""
    where = f"core {made.number} bay {index + 1} takes axis {axis} to {words.length(fault.reach)}"
    limit = stated.travel[fault.axis] if stated and stated.travel else 0.0
    if fault.reach < 0.0:
        return job.error("wire.place", f"wanted a block further from the machine's zero, got one where {where}")
    return job.error("wire.travel", f"wanted room for every place of the wire, got {words.length(limit)}: {where}")
