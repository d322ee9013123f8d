"""Cloth in resin: what a laid-up facing or cover weighs and how thick it is."""

from __future__ import annotations

from dataclasses import dataclass

from .records.caps import Facing
from .stock import Adhesive, Cloth, Stock


@dataclass(frozen=True)
class Laminate:
    """All layers of one face; None where no cloth tells the fibre's density.

    Attributes
    ----------
    areal
        With the resin, g/m^2.
    thickness
        As laid, mm.
    bearing
        The thickness that the cloth's shear figures count for, mm: as thick as its fibre makes the laminate that they
        are for. By the rule of mixtures strength and stiffness go with the fibre; more resin adds to neither.
    fibre
        The fibre's share of the volume as laid.
    """

    areal: float
    thickness: float | None = None
    bearing: float | None = None
    fibre: float | None = None


def laminate(facing: Facing, stock: Stock, resin: str) -> Laminate:
    """The laminate of a stated facing.

    Thickness is fibre volume and resin volume, each mass over its density (1 g/m^2 over 1 kg/m^3 is 1 mm): the same as
    areal weight over fibre density and fibre volume fraction.
    """
    cloth = stock.find(facing.cloth, Cloth) if facing.cloth is not None else None
    dry = facing.layers * (cloth.areal_weight if cloth else facing.areal_weight or 0.0)
    areal = dry / (1.0 - facing.resin_fraction)
    if cloth is None:
        return Laminate(areal)
    fibre = dry / cloth.fibre_density
    thickness = fibre + (areal - dry) / stock.find(resin, Adhesive).density
    return Laminate(areal, thickness, fibre / cloth.bears_at, fibre / thickness)
