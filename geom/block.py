"""The block that a bay is cut from, and the two pins that hold the templates to each of its ends.

The pins stand on a level line, equally far apart at both ends and alike in the block's two ends: they alone set the
washout between the ends. x aft and z up in the block's axes, mm.
"""

from __future__ import annotations

import numpy as np
import shapely
from numpy.typing import NDArray

Array = NDArray[np.float64]

PIN = 3.0  # mm, diameter of the holes for the pins
_ROOM = (4.0, 3.0, 2.0, 1.0, 0.5)  # mm of foam round a pin's hole, the first that can be had


class NoPins(ValueError):
    """The core is too small at rib `y` for two pins."""

    def __init__(self, y: float) -> None:
        super().__init__(f"too little foam for two {PIN:g} mm pins at rib y = {y:.0f} mm")
        self.y = y


def level_pins(outlines: list[Array], places: tuple[float, float], step: float) -> list[Array]:
    """Two pins (2, 2) for each end, level and equally far apart, in the longest level line that the foam has room for.

    Parameters
    ----------
    outlines
        Closed outlines (k, 2) of the core at both ends.
    places
        Their rib planes.
    step
        Their distance is rounded down to a multiple of it where it is that long, mm.

    Raises
    ------
    NoPins
        If an end has no room for them.
    """
    for room in _ROOM:
        bars = [_level(shapely.Polygon(outline).buffer(-room - PIN / 2.0)) for outline in outlines]
        apart = min(bar[1] - bar[0] for bar in bars)
        if apart >= 2.0 * PIN:
            break
    else:
        raise NoPins(places[int(np.argmin([bar[1] - bar[0] for bar in bars]))])
    apart = 0.96 * apart
    apart = np.floor(apart / step) * step or apart
    sides = np.array([-0.5, 0.5]) * apart
    return [np.column_stack([(bar[0] + bar[1]) / 2.0 + sides, [bar[2]] * 2]) for bar in bars]


def _level(room: shapely.Polygon) -> tuple[float, float, float]:
    """The longest level line inside a shape: x from, x to, z; of no length if there is none."""
    best = (0.0, 0.0, 0.0)
    if room.is_empty:
        return best
    x0, z0, x1, z1 = room.bounds
    for z in np.linspace(z0, z1, 41)[1:-1]:
        inside = room.intersection(shapely.LineString([(x0 - 1.0, z), (x1 + 1.0, z)]))
        for part in getattr(inside, "geoms", [inside]):
            if part.length > best[1] - best[0]:
                best = (part.bounds[0], part.bounds[2], float(z))
    return best


def blocks_about(outlines: list[Array], pins: list[Array], margin: float) -> list[tuple[float, float, float, float]]:
    """The block's two ends, which lie alike about the pins: the smallest that holds the core with a margin."""
    about = [outline - pin[0] for outline, pin in zip(outlines, pins, strict=True)]
    low = np.min([a.min(axis=0) for a in about], axis=0) - margin
    high = np.max([a.max(axis=0) for a in about], axis=0) + margin
    return [tuple(np.concatenate([pin[0] + low, pin[0] + high]).tolist()) for pin in pins]
