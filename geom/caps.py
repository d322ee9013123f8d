"""Cap strips on the web's edges: where each layer stops, how high the stack is, what the strips are bent to.

Layers are counted from the skin: the first is the longest and lies nearest to it, the last is the shortest and lies in
the foam. Each starts at the web's inner end, keeps its full thickness to its stop, and is feathered out over a ramp
behind it, so that the next layer is borne all along; mm and radians.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .loft import Loft
from .seat import Along
from .web import OffSection, Plane, Side, edge

Array = NDArray[np.float64]

BEND = 25.0  # mm on either side over which curvature and twist are read: a strip rounds off what is sharper


@dataclass(frozen=True)
class Stack:
    """Layers of strips on one edge of the web.

    Attributes
    ----------
    stops
        Where each layer's full thickness ends, the longest first; `end` for one that runs to the web's outer end.
    rise
        Height of a layer: strip and glue line, mm.
    ramp
        Length behind a stop over which the layer is feathered out, mm.
    end
        Length of the web line, mm.

    Examples
    --------
    >>> two = Stack((900.0, 400.0), rise=1.5, ramp=15.0, end=900.0)
    >>> two.height([0.0, 400.0, 410.0, 500.0]).tolist()
    [3.0, 3.0, 2.0, 1.5]
    """

    stops: tuple[float, ...]
    rise: float
    ramp: float
    end: float

    @cached_property
    def height(self) -> Along:
        """Height of the stack along s."""
        inner = [stop for stop in reversed(self.stops) if stop < self.end]
        s = np.array([[stop, stop + self.ramp] for stop in inner]).ravel()
        down = np.repeat(np.arange(len(inner) + 1), 2)[1:-1]
        whole = len(self.stops) * self.rise
        if not inner:
            return Along(np.zeros(1), np.array([whole]))
        return Along(s, np.asarray(whole - down * self.rise))

    def carrying(self, s: ArrayLike, bond: float) -> Array:
        """Layers that carry at `s`, a layer counting less and less over the last `bond` mm before its stop.

        A layer that runs to the web's outer end counts in full.
        """
        s = np.asarray(s, dtype=float)[..., None]
        stops = np.array(self.stops)
        share = np.clip((stops - s) / bond, 0.0, 1.0)
        return np.asarray(np.where(stops < self.end, share, 1.0).sum(axis=-1))


def stops(need: Array, s: Array, *, bond: float, step: float, ramp: float) -> tuple[float, ...]:
    """Where each layer may stop, the longest first.

    Layer k (from 1) is needed as far out as `need` exceeds k - 1; from there its bond hands the force over, and the
    stop is the next multiple of `step`. Stops lie at least a ramp apart. The first layer runs to the outer end, and so
    does any that would stop within a ramp of it.

    Parameters
    ----------
    need
        (k,) layers needed at the places `s` (k,), a fraction being a part of a layer; straight between the places.
    bond
        Length over which the bond hands over one layer's force.

    Examples
    --------
    >>> s = np.array([0.0, 1000.0])
    >>> stops(np.array([2.5, 0.0]), s, bond=130.0, step=25.0, ramp=10.0)
    (1000.0, 750.0, 350.0)
    """
    end = float(s[-1])
    layers = max(1, int(np.ceil(need.max() - 1e-9)))
    found: list[float] = []
    least = -np.inf
    for k in range(layers - 1, 0, -1):
        stop = _rounded_up(max(_last_above(need, s, k) + bond, least), step)
        found.insert(0, stop if stop + ramp < end else end)
        least = stop + ramp
    return (end, *found)


def _last_above(need: Array, s: Array, level: float) -> float:
    """Outermost place up to which `need` exceeds `level`."""
    above = np.flatnonzero(need > level)
    if not above.size:
        return float(s[0])
    i = int(above[-1])
    if i + 1 == len(s):
        return float(s[-1])
    share = (need[i] - level) / (need[i] - need[i + 1])
    return float(s[i] + share * (s[i + 1] - s[i]))


def _rounded_up(length: float, step: float) -> float:
    return float(np.ceil(length / step - 1e-9) * step)


def height(loft: Loft, web: Plane, s: Array, side: Side, depth: ArrayLike) -> Array:
    """Height (k,) over the web's middle plane at which the surface `depth` under the skin stands at places `s` (k,).

    Raises
    ------
    OffSection
        Where the middle of the web leaves the section.
    """
    found = edge(loft, web, s, 0.0, side, depth).h
    lost = np.isnan(found)
    if lost.any():
        raise OffSection(side, float(s[lost][0]))
    return found


def bend_places(length: float) -> Array:
    """Places (k,) at which curvature and twist are read: `BEND` apart, or a few where the web is short."""
    return np.linspace(0.0, length, max(5, int(length / BEND) + 1))


def curvature(s: Array, h: Array) -> Array:
    """(k - 2,) curvature, per mm, of the line h(s) at its inner places, by the circle through each and its neighbours.

    Positive where the line is hollow upwards. The signed area of a triangle over the product of its sides is a quarter
    of the curvature of the circle round it.

    Examples
    --------
    >>> s = np.array([-3.0, 0.0, 4.0])
    >>> curvature(s, 5.0 - np.sqrt(25.0 - s**2)).round(9).tolist()
    [0.2]
    """
    point = np.column_stack([s, h])
    a, b, c = point[1:-1] - point[:-2], point[2:] - point[1:-1], point[2:] - point[:-2]
    area = (a[:, 0] * b[:, 1] - a[:, 1] * b[:, 0]) / 2.0
    sides = np.prod([np.hypot(*v.T) for v in (a, b, c)], axis=0)
    return np.asarray(4.0 * area / sides)


def bending_strain(curvature: float, thickness: float) -> float:
    """Largest strain of a straight strip laid on a curved bed: half its thickness times the curvature."""
    return abs(curvature) * thickness / 2.0


def twisting_strain(twist: float, width: float, thickness: float) -> tuple[float, float]:
    """Strains of a flat strip on a bed that twists by `twist` radians per mm: shear, and tension at its long edges.

    The shear at the face of a thin strip in torsion is its thickness times the twist (Timoshenko and Goodier, *Theory
    of Elasticity*, torsion of a narrow rectangle). A long edge becomes a helix, longer than the middle by half the
    square of (half the width times the twist).
    """
    return thickness * abs(twist), (width / 2.0 * twist) ** 2 / 2.0
