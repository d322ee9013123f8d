"""Cloth in resin: what a laid-up facing or cover weighs and how thick it is."""

from __future__ import annotations

from dataclasses import dataclass

from .records_caps import Facing
from .stock import Adhesive, Cloth, Stock


@dataclass(frozen=True)
class Laminate:
    """All layers of one face: g/m^2 with the resin, and mm; None where no cloth tells the fibre's density."""

    areal: float
    thickness: float | None


def laminate(facing: Facing, stock: Stock, resin: str) -> Laminate:
    """The laminate of a stated facing.

    Thickness is fibre volume and resin volume, each mass over its density (1 g/m^2 over 1 kg/m^3 is 1 mm): the same as
    areal weight over fibre density and fibre volume fraction.
    """
    cloth = stock.find(facing.cloth, Cloth) if facing.cloth is not None else None
    dry = facing.layers * (cloth.areal_weight if cloth else facing.areal_weight or 0.0)
    areal = dry / (1.0 - facing.resin_fraction)
    if cloth is None:
        return Laminate(areal, None)
    return Laminate(areal, dry / cloth.fibre_density + (areal - dry) / stock.find(resin, Adhesive).density)
