"""Whether the strips and the web's core carry the load: reserve factors, and what the strips are bent to.

A builder's estimate at ultimate load. Not looked at: buckling of web and skin, torsion, fatigue, heat.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..geom import caps as geometry
from ..geom.web import SIDES, Side
from .laminate import laminate
from .records.caps import Caps
from .stock import Cloth, Foam, Strip
from .strips import Schedule, bond_shear, under

if TYPE_CHECKING:
    from .job import Job

Array = NDArray[np.float64]

UNLOOKED = (
    "not looked at: negative load factors (the bottom cap pressed), the tie from facings to caps, buckling, "
    "torsion, fatigue, heat"
)
NOTHING = 1e-9  # of the allowable: what is asked for below that is rounding
STRAINED = 1e-3  # a strip bent to more than this in building is doubtful


@dataclass(frozen=True)
class Check:
    """One figure against its allowable along the web.

    Attributes
    ----------
    formula
        Its name, or how it is reckoned.
    unit
        ``N`` or ``MPa``.
    demand, allowable
        (k,) at ultimate load; the allowable may be one figure for all.
    origin
        Where the allowable comes from.
    """

    name: str
    formula: str
    unit: str
    demand: Array
    allowable: Array | float
    origin: str

    @property
    def reserve(self) -> Array:
        """(k,) allowable over demand; infinite where nothing is asked."""
        nothing = self.demand <= NOTHING * self.allowed
        return np.where(nothing, np.inf, self.allowed / np.where(nothing, 1.0, self.demand))

    @property
    def allowed(self) -> Array:
        """(k,) the allowable at each place."""
        return np.broadcast_to(self.allowable, self.demand.shape)

    @property
    def least(self) -> int:
        """Place of the least reserve, the innermost of equal ones."""
        return int(np.argmin(self.reserve))


@dataclass(frozen=True)
class Bent:
    """What a strip on one edge is bent to where it is bent most, and where (s); strains as fractions.

    `bend` comes from the edge's curvature in the web plane, `twist` (shear) and `helix` (tension at the strip's long
    edges) from the twist of a full bevel.
    """

    side: Side
    bend: float
    bend_at: float
    twist: float
    helix: float
    twist_at: float


@dataclass(frozen=True)
class Strength:
    """All checks of a web at the places of its schedule; what could not be checked, and why; the strips' strains."""

    schedule: Schedule
    checks: tuple[Check, ...]
    unchecked: tuple[str, ...]
    bent: tuple[Bent, ...]

    @property
    def worst(self) -> Check:
        """The check with the least reserve of all."""
        return min(self.checks, key=lambda check: float(check.reserve.min()))


def assess(job: Job, found: Schedule) -> Strength:
    """Check strips, bond and core of the web as stated."""
    caps = job.record.caps
    core, unchecked = core_checks(job, found.flow, job.thickness(found.s))
    checks, bent = list(core), []
    if caps is not None:
        bent = [_bent(job, caps, side) for side in SIDES]
        checks = [*_cap_checks(job, caps, found), *core]
        crush = _crushing(job, caps, found)
        if isinstance(crush, Check):
            checks.append(crush)
        else:
            unchecked = (*unchecked, crush)
    return Strength(found, tuple(checks), unchecked, tuple(bent))


def _cap_checks(job: Job, caps: Caps, found: Schedule) -> Iterator[Check]:
    for side in SIDES:
        one, carrying = found.one[side], _carrying(found, side)
        allowed = one.value * caps.beside * carrying
        yield Check(f"{side} cap", found.carried.force_formula, "N", found.force, allowed, one.origin)
    bond = bond_shear(job, caps)
    wide = caps.beside * caps.width
    yield Check("strip bond", "shear flow / width of the strips", "MPa", found.flow / wide, bond.value, bond.origin)


def _carrying(found: Schedule, side: Side) -> Array:
    return found.stacks[side].carrying(found.s, found.bond[side])


def core_checks(job: Job, flow: Array, thickness: ArrayLike) -> tuple[tuple[Check, ...], tuple[str, ...]]:
    """Shear in core and facings for a shear flow (k,), N/mm, in a sheet of a thickness in mm; and what is not checked.

    Both are strained alike, so that they share the flow q as their stiffness is: ``tau = G q / (G_core t + 2 G_facing
    t_facing)``, t_facing being the facing's bearing thickness. Where either stiffness is not known, each is checked as
    if it bore it all, ``q / t`` and ``q / (2 t_facing)``; and so is the core where the facing's strength is not.
    """
    name, facing = job.record.web.foam, job.record.web.facing
    foam, faced = job.stock.find(name, Foam), _facing(job)
    core, skin, formula = _shared(foam, faced, flow, np.asarray(thickness, dtype=float))
    checks, unchecked = [], []
    if foam.shear is None:
        unchecked.append(f'core in shear: state the shear strength of "{name}" under [materials]')
    else:
        checks.append(Check("core in shear", formula, "MPa", core, foam.shear, job.stock.origin(name, "shear")))
    if faced is not None:
        origin = job.stock.origin(faced.cloth.name, "shear")
        checks.append(Check("facings in shear", formula, "MPa", skin, faced.shear, origin))
    elif facing is not None:
        unchecked.append("facings in shear: their thickness or strength is not known, so the core bears it all")
    return tuple(checks), tuple(unchecked)


@dataclass(frozen=True)
class _Faced:
    """One facing: its cloth, its shear strength in MPa, and the thickness in mm that this counts for."""

    cloth: Cloth
    shear: float
    bearing: float


def _facing(job: Job) -> _Faced | None:
    """One facing, where its strength and thickness are known."""
    facing = job.record.web.facing
    if facing is None or facing.cloth is None:
        return None
    cloth = job.stock.find(facing.cloth, Cloth)
    bearing = laminate(facing, job.stock, job.record.web.adhesive).bearing
    return None if bearing is None or cloth.shear is None else _Faced(cloth, cloth.shear, bearing)


def _shared(foam: Foam, faced: _Faced | None, flow: Array, thickness: Array) -> tuple[Array, Array, str]:
    """Shear stress (k,) of core and of facings, MPa, and how it is reckoned."""
    if faced is None:
        return flow / thickness, np.zeros_like(flow), "shear flow / thickness"
    at = f"tf at {100.0 * faced.cloth.bears_at:.0f} % fibre by volume"
    modulus = faced.cloth.shear_modulus
    if foam.shear_modulus is None or modulus is None:
        alone = f"q / t or q / (2 tf), each as if it bore the shear flow alone, a stiffness not being known, {at}"
        return flow / thickness, flow / (2.0 * faced.bearing), alone
    angle = flow / (foam.shear_modulus * thickness + 2.0 * modulus * faced.bearing)
    formula = f"shear flow shared by stiffness, G q / (G t + 2 Gf tf), {at}"
    return foam.shear_modulus * angle, modulus * angle, formula


def _crushing(job: Job, caps: Caps, found: Schedule) -> Check | str:
    """Pressure of the caps on the core under the strips, the worse edge of the two.

    A cap of force F on a curved line presses with F times the curvature for each length (L. G. Brazier, *On the flexure
    of thin cylindrical shells*, 1927): that of the beam as it bends, the sum of the caps' strains over their distance,
    and that of the edge itself, whichever way it is curved. The air load, where it is known, comes on top of it, taken
    to cross the web.
    """
    name = job.record.web.foam
    foam, strip = job.stock.find(name, Foam), job.stock.find(caps.strip, Strip)
    if foam.compression is None:
        return f'core crushed by the caps: state the compressive strength of "{name}" under [materials]'
    wide = caps.beside * caps.width
    strained = sum(found.force / (strip.modulus * wide * caps.thickness * _carrying(found, side)) for side in SIDES)
    edge = np.max([np.interp(found.s, *_edge_curvature(job, side)) for side in SIDES], axis=0)
    pressed, formula = found.force * (strained / found.apart + edge), "force x (curvature under load + of the edge)"
    if (running := found.carried.running) is not None:
        pressed, formula = pressed + running, f"({formula} + air load)"
    return Check(
        "core crushed",
        f"Brazier: {formula} / width of the strips",
        "MPa",
        pressed / wide,
        foam.compression,
        job.stock.origin(name, "compression"),
    )


def _edge_curvature(job: Job, side: Side) -> tuple[Array, Array]:
    """Places (k,) and the size (k,) of the edge's curvature in the web plane there, per mm."""
    plane = job.web.plane
    s = geometry.bend_places(plane.length)
    h = geometry.height(job.loft, plane, s, side, under(job))
    return s[1:-1], np.abs(geometry.curvature(s, h))


def _bent(job: Job, caps: Caps, side: Side) -> Bent:
    """What the strips of one edge are bent to where it is most."""
    s, curved = _edge_curvature(job, side)
    i = int(curved.argmax())
    at, twist = _twist(job, side)
    j = int(np.abs(twist).argmax())
    shear, helix = geometry.twisting_strain(float(twist[j]), caps.width, caps.thickness)
    bend = geometry.bending_strain(float(curved[i]), caps.thickness)
    return Bent(side, bend, float(s[i]), shear, helix, float(at[j]))


def _twist(job: Job, side: Side) -> tuple[Array, Array]:
    """Places (k,) and the bed's twist (k,) there, radians per mm: none unless the edge is cut to the full bevel."""
    s = geometry.bend_places(job.web.plane.length)
    if job.record.web.edge != "full bevel":
        return s[:1], np.zeros(1)
    survey = job.web.survey
    bevel = np.interp(s, survey.s.ravel(), np.arctan(survey.bevel_slope(side)).ravel())
    return (s[1:] + s[:-1]) / 2.0, np.diff(bevel) / np.diff(s)
