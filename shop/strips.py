"""How many cap strips the load asks for, where each layer stops, and what is cut from the coil.

From the skin inwards come bond line, cover, strips, and the edge of the sheet. The sheet's edge is lowered by all of
it under its whole thickness; what is left beside strips narrower than the sheet counts as filler. Layers start at the
inner end, so one that is needed anywhere is there from the inner end on.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from ..geom import caps as geometry
from ..geom.caps import Stack
from ..geom.seat import Along, constant
from ..geom.web import SIDES, Plane, Side, end_places
from .laminate import laminate
from .loads import Carried, Line
from .records.caps import Caps
from .stock import OWN, Adhesive, Strip
from .units import MM_PER_INCH
from .values import Allowable

if TYPE_CHECKING:
    from .job import Job

Array = NDArray[np.float64]

APART = 10.0  # mm between the places at which the load is looked at
STEP = {"mm": 10.0, "in": MM_PER_INCH / 2.0}
RAMP = 10.0  # strip thicknesses


@dataclass(frozen=True)
class Figure:
    """An allowable and where it comes from: ``the wing file`` or ``stock``."""

    value: float
    origin: str


@dataclass(frozen=True)
class Layer:
    """One layer of strips at one edge, numbered from the skin.

    Attributes
    ----------
    count
        Strips side by side.
    stop, y
        Where its full thickness ends, and the rib plane there.
    whole
        Whether it runs to the web's outer end.
    length
        To cut each strip to, measured along the edge, its feathered end included.
    height
        Of the stack under the skin as far as this layer reaches.
    volume
        Of all its strips, mm^3; a feathered end is half as long a piece.
    """

    side: Side
    number: int
    count: int
    stop: float
    y: float
    whole: bool
    length: float
    height: float
    volume: float


@dataclass(frozen=True)
class Schedule:
    """The strips of a web, and the load they were counted for.

    Attributes
    ----------
    s, y
        (k,) places along the web line, and their rib planes.
    apart
        (k,) distance between the cap centroids, or without strips between the seats.
    carried
        What the web has to carry there at ultimate load.
    need
        For each side (k,) layers needed, not rounded.
    stacks
        For each side its layers; empty without strips.
    one
        For each side what one strip carries, N.
    bond
        For each side the length over which a strip's bond hands that over, mm.
    """

    plane: Plane = field(repr=False)
    s: Array
    y: Array
    apart: Array
    carried: Carried
    need: Mapping[Side, Array]
    stacks: Mapping[Side, Stack]
    one: Mapping[Side, Figure]
    bond: Mapping[Side, float]

    @property
    def force(self) -> Array:
        """(k,) cap force at ultimate load, N."""
        return self.carried.force

    @property
    def flow(self) -> Array:
        """(k,) shear flow in the web at ultimate load, N/mm."""
        return self.carried.flow

    @property
    def shear(self) -> Array:
        """(k,) ultimate shear, N."""
        return self.carried.shear

    @property
    def moment(self) -> Array:
        """(k,) ultimate bending moment, N mm."""
        return self.carried.moment

    def height(self, side: Side) -> Along:
        """Height of the strips along one edge."""
        return self.stacks[side].height if side in self.stacks else constant(0.0)


def under(job: Job) -> float:
    """What lies between the skin and the strips: bond line and cover, mm."""
    caps = job.record.caps
    return job.record.web.bond + (cover_thickness(job, caps) if caps else 0.0)


def cover_thickness(job: Job, caps: Caps) -> float:
    """Thickness of the ply over the strips, mm."""
    if caps.cover is None:
        return 0.0
    return caps.cover.thickness or laminate(caps.cover, job.stock, job.record.web.adhesive).thickness or 0.0


def rise(caps: Caps) -> float:
    """Height of one layer: a strip and its glue line, mm."""
    return caps.thickness + caps.glue


def ramp(caps: Caps) -> float:
    """Length over which a strip's end is feathered, mm."""
    return RAMP * caps.thickness if caps.ramp is None else caps.ramp


def carries(job: Job, caps: Caps) -> dict[Side, Figure]:
    """What one strip carries in newtons: the top cap in compression, the bottom in tension, the lift being upward."""
    stock = job.stock.find(caps.strip, Strip)
    pressed = caps.compression or caps.allowable
    pulled = caps.allowable
    section = caps.width * caps.thickness
    return {
        "top": Figure(_newtons(pressed, section), OWN)
        if pressed
        else Figure(stock.compression * section, job.stock.origin(caps.strip, "compression")),
        "bottom": Figure(_newtons(pulled, section), OWN)
        if pulled
        else Figure(stock.tension * section, job.stock.origin(caps.strip, "tension")),
    }


def _newtons(allowable: Allowable, section: float) -> float:
    return allowable.value if allowable.kind == "force" else allowable.value * section


def bond_shear(job: Job, caps: Caps) -> Figure:
    """What the bond of a strip carries in shear, MPa.

    Raises
    ------
    WingError
        If neither the wing file nor stock tells.
    """
    if caps.bond_shear is not None:
        return Figure(caps.bond_shear, OWN)
    name = job.record.web.adhesive
    if (shear := job.stock.find(name, Adhesive).shear) is None:
        text = f'is missing, wanted a stress, as "{name}" is stated without its shear strength'
        raise job.error("caps.bond_shear", text)
    return Figure(shear, job.stock.origin(name, "shear"))


def schedule(job: Job, plane: Plane) -> Schedule:
    """Count the strips for the load and lay them out on a web plane.

    The cap force depends on the distance between the cap centroids, that on the stacks, and the stacks on the force.
    Begun without strips, every round can only add to them; it ends when a round changes nothing.

    Raises
    ------
    WingError
        If the most layers stated cannot carry the load, or the stacks are higher than the web; with the place.
    OffSection
        Where the middle of the web leaves the section.
    """
    caps = job.record.caps
    s = _places(job, plane)
    if caps is None:
        return _carried(job, plane, s, {}, {}, {})
    one, shear = carries(job, caps), bond_shear(job, caps).value
    bond = {side: one[side].value / (caps.width * shear) for side in SIDES}
    step = caps.step or STEP[job.record.units]
    stacks: dict[Side, Stack] = {}
    while True:
        found = _carried(job, plane, s, stacks, one, bond)
        for side in SIDES:
            _refuse_many(job, found, side, caps.most)
        laid = {
            side: Stack(
                geometry.stops(found.need[side], s, bond=bond[side], step=step, ramp=ramp(caps)),
                rise(caps),
                ramp(caps),
                plane.length,
            )
            for side in SIDES
        }
        if laid == stacks:
            corners = np.concatenate([stack.height.s for stack in stacks.values()])
            return _carried(job, plane, np.unique(np.concatenate([s, corners])), stacks, one, bond)
        stacks = laid


def _places(job: Job, plane: Plane) -> Array:
    knots = plane.s_at_rib(job.loft.knots, 0.0, 0.0)
    even = np.linspace(0.0, plane.length, max(60, int(plane.length / APART)) + 1)
    return np.unique(np.concatenate([even, knots[(knots > 0.0) & (knots < plane.length)]]))


def _carried(
    job: Job,
    plane: Plane,
    s: Array,
    stacks: Mapping[Side, Stack],
    one: Mapping[Side, Figure],
    bond: Mapping[Side, float],
) -> Schedule:
    """What a web with these stacks has to carry."""
    caps, load = job.record.caps, job.load
    stated = job.record.load
    if load is None or stated is None:
        raise job.error("load", "is missing, wanted what the web has to carry, a table [load]")
    high = {side: stacks[side].height(s) if stacks else np.zeros_like(s) for side in SIDES}
    top, bottom = (geometry.height(job.loft, plane, s, side, under(job) + high[side] / 2.0) for side in SIDES)
    apart = top - bottom
    _refuse_high(job, plane, s, apart, high)
    y = plane.origin[1] + s * plane.s[1]
    line = Line(y, apart, _taper(s, apart + (high["top"] + high["bottom"]) / 2.0), float(plane.s[1]))
    carried = load.at(line).times(stated.ultimate_factor)
    return Schedule(
        plane=plane,
        s=s,
        y=y,
        apart=apart,
        carried=carried,
        need={side: carried.force / (one[side].value * caps.beside) for side in SIDES} if caps else {},
        stacks=stacks,
        one=one,
        bond=bond,
    )


def _taper(s: Array, height: Array) -> Array:
    """How fast a height (k,) grows along the web, each time over a stretch that places lying close cannot upset."""
    low, high = np.clip(s - APART, s[0], s[-1]), np.clip(s + APART, s[0], s[-1])
    return np.asarray((np.interp(high, s, height) - np.interp(low, s, height)) / (high - low))


def _at(job: Job, s: float, y: float) -> str:
    return f"at s = {job.wording.length(s)} (rib y = {job.wording.length(y)})"


def _refuse_many(job: Job, found: Schedule, side: Side, most: int) -> None:
    need = found.need[side]
    i = int(need.argmax())
    if need[i] > most + 1e-9:
        force, place = job.wording.force(float(found.force[i])), _at(job, found.s[i], found.y[i])
        text = f"wanted a load that {most} layer{'s' * (most > 1)} of strips at the {side} edge can carry"
        raise job.error("caps.most", f"{text}, got a cap force of {force} {place}, which takes {np.ceil(need[i]):.0f}")


def _refuse_high(job: Job, plane: Plane, s: Array, apart: Array, high: Mapping[Side, Array]) -> None:
    left = apart - (high["top"] + high["bottom"]) / 2.0
    i = int(left.argmin())
    if left[i] <= 0.0:
        y = float(plane.origin[1] + s[i] * plane.s[1])
        stacks = " and ".join(f"{job.wording.length(float(high[side][i]))} at the {side}" for side in SIDES)
        room = f"{job.wording.length(float(left[i] + high['top'][i] + high['bottom'][i]))} {_at(job, s[i], y)}"
        raise job.error("caps", f"wanted stacks lower than the web, got {stacks}, where there is room for {room}")


def layers(job: Job) -> tuple[Layer, ...]:
    """Every layer of both edges as it is cut, the longest of each first."""
    caps, found = job.record.caps, job.caps
    if caps is None or found is None:
        return ()
    return tuple(layer for side in SIDES for layer in _layers(job, caps, found, side))


def _layers(job: Job, caps: Caps, found: Schedule, side: Side) -> list[Layer]:
    """The layers of one edge; lengths are those of the skin's inside over the middle of the sheet."""
    plane, stack = found.plane, found.stacks[side]
    first, last = (float(v[0]) for v in end_places(job.loft, plane, np.zeros(1), side))
    stops = np.array(stack.stops)
    ends = np.where(stops < stack.end, stops + stack.ramp, last)
    inner = found.s[(found.s > first) & (found.s < last)]
    s = np.unique(np.concatenate([[first], inner, ends]))
    h = geometry.height(job.loft, plane, s, side, under(job))
    along = np.concatenate([[0.0], np.cumsum(np.hypot(np.diff(s), np.diff(h)))])
    lengths = np.interp(ends, s, along)
    solid = lengths - np.where(stops < stack.end, stack.ramp / 2.0, 0.0)
    return [
        Layer(
            side=side,
            number=i + 1,
            count=caps.beside,
            stop=float(stop),
            y=float(plane.origin[1] + stop * plane.s[1]),
            whole=bool(stop >= stack.end),
            length=float(lengths[i]),
            height=(i + 1) * stack.rise,
            volume=float(solid[i]) * caps.beside * caps.width * caps.thickness,
        )
        for i, stop in enumerate(stops)
    ]
