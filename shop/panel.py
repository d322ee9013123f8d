"""The stated panel as a loft."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from ..geom import washout
from ..geom.airfoil import Section
from ..geom.loft import Loft
from .records.wing import Wing, WingFile


def loft(record: WingFile, sections: Sequence[Section]) -> Loft:
    """Surfaces of the panel that a wing file states, with one section for each of its stations."""
    wing = record.wing
    y = [s.y for s in wing.stations]
    law = washout.smooth if wing.planform == "smooth" else washout.straight
    return Loft(
        y=np.array(y),
        sections=sections,
        planform=law(y, [[s.chord, s.le, s.z] for s in wing.stations]),
        washout=_washout(wing),
        skin=_skin(record),
        axis=wing.twist_axis,
    )


def _washout(wing: Wing) -> washout.Law:
    y = np.array([s.y for s in wing.stations])
    if wing.washout.law == "table":
        places, twist = np.array(wing.washout.points).T
        return washout.smooth(places, np.radians(twist))
    angles = np.radians([s.washout if s.washout is not None else np.nan for s in wing.stations])
    if wing.washout.law == "power":
        return washout.Power(y[[0, -1]], float(angles[0]), float(angles[-1]), wing.washout.exponent or 1.0)
    return (washout.straight if wing.washout.law == "straight" else washout.smooth)(y, angles)


def _skin(record: WingFile) -> washout.Piecewise:
    thickness, stations = record.skin.thickness, record.wing.stations
    if isinstance(thickness, float):
        return washout.straight((stations[0].y, stations[-1].y), (thickness, thickness))
    y, value = zip(*thickness, strict=True)
    return washout.straight(y, value)
