"""What the web has to carry, at limit load: shear, bending moment and cap force along the panel.

A span load lies over the whole semi-span, of which the panel is the outer part; its sum for one half of the aircraft is
load factor x mass x g / 2 (the wing's own weight is not taken off: that is on the safe side). The lift is taken to
stand on the web line, so that on a swept web the arms, and with them the moment, are longer by 1 / (its direction's
share across the ribs). Newtons, mm and N mm; y is the panel's.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import Protocol

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.interpolate import PPoly

from .records_caps import Load as Stated

Array = NDArray[np.float64]
Shape = Callable[[Array], tuple[Array, Array, Array]]

G = 9.80665  # m/s^2, standard acceleration of free fall (ISO 80000-3)


class Load(Protocol):
    """A load on the web. `apart` is the distance between the cap centroids, `lean` the web line's share along y."""

    def cap_force(self, y: Array, apart: Array, lean: float) -> Array:
        """Force in either cap, N."""

    def flow(self, y: Array, apart: Array, lean: float) -> Array:
        """Shear flow in the web, N for each mm of its height and length."""

    def running(self, y: Array) -> Array:
        """Air load on the web, N for each mm of span; 0 where the load does not tell."""


@dataclass(frozen=True)
class SpanLoad:
    """Lift over the semi-span.

    Attributes
    ----------
    total
        Lift of one half, N.
    semi_span, inboard
        From the centreline to the tip, and to the panel's y = 0; mm.
    shape
        Of the fraction e of the semi-span: lift density, its integral from e to the tip, and the first moment of that
        part about e; scaled so that the whole half is 1.
    """

    total: float
    semi_span: float
    inboard: float
    shape: Shape

    def _at(self, y: ArrayLike) -> tuple[Array, Array, Array]:
        return self.shape(np.clip((self.inboard + np.asarray(y, dtype=float)) / self.semi_span, 0.0, 1.0))

    def running(self, y: ArrayLike) -> Array:
        """Lift for each mm of span, N/mm."""
        return self.total / self.semi_span * self._at(y)[0]

    def shear(self, y: ArrayLike) -> Array:
        """Lift outboard of y, N."""
        return self.total * self._at(y)[1]

    def moment(self, y: ArrayLike) -> Array:
        """Moment of the lift outboard of y about the rib plane y, N mm."""
        return self.total * self.semi_span * self._at(y)[2]

    def cap_force(self, y: Array, apart: Array, lean: float) -> Array:
        """Bending moment over the distance between the cap centroids, N."""
        return self.moment(y) / lean / apart

    def flow(self, y: Array, apart: Array, lean: float) -> Array:
        """Shear over the distance between the cap centroids, N/mm."""
        return self.shear(y) / apart


@dataclass(frozen=True)
class Table:
    """A figure stated over y, straight between the rows: bending moments in N mm, or cap forces in N."""

    y: Array
    value: Array
    forces: bool

    def _value(self, y: Array) -> Array:
        return np.asarray(np.interp(y, self.y, self.value))

    def _slope(self, y: Array) -> Array:
        """Steepness of the row pair that holds y, the steeper of two that meet there."""
        steep = np.abs(np.diff(self.value) / np.diff(self.y))
        last = len(steep) - 1
        left, right = (np.clip(np.searchsorted(self.y, y, side=side) - 1, 0, last) for side in ("left", "right"))
        return np.maximum(steep[left], steep[right])

    def cap_force(self, y: Array, apart: Array, lean: float) -> Array:
        """As stated, or the moment over the distance between the cap centroids, N."""
        return self._value(y) if self.forces else self._value(y) / apart

    def flow(self, y: Array, apart: Array, lean: float) -> Array:
        """How fast the cap force grows along the web, N/mm; for moments, the shear over the centroids' distance."""
        return self._slope(y) * lean / (1.0 if self.forces else apart)

    def running(self, y: Array) -> Array:
        """Nothing: a table does not tell."""
        return np.zeros_like(y)


def elliptic(e: Array) -> tuple[Array, Array, Array]:
    """``4/pi sqrt(1 - e^2)`` and its integrals; the half's centre is at ``4/(3 pi)``.

    Examples
    --------
    >>> round(float(elliptic(np.array(0.0))[2]), 5)
    0.42441
    """
    root = np.sqrt(1.0 - e**2)
    whole = (np.arccos(e) - e * root) / 2.0
    scale = 4.0 / np.pi
    return scale * root, scale * whole, scale * (root**3 / 3.0 - e * whole)


def bell(e: Array) -> tuple[Array, Array, Array]:
    """``16/(3 pi) (1 - e^2)^1.5`` (L. Prandtl, *Ueber Tragfluegel kleinsten induzierten Widerstandes*, 1933).

    Examples
    --------
    >>> round(float(bell(np.array(0.0))[2]), 5)
    0.33953
    """
    root = np.sqrt(1.0 - e**2)
    whole = 3.0 / 8.0 * (np.arccos(e) - e * root) - e * root**3 / 4.0
    scale = 16.0 / (3.0 * np.pi)
    return scale * root**3, scale * whole, scale * (root**5 / 5.0 - e * whole)


def uniform(e: Array) -> tuple[Array, Array, Array]:
    """The same all along: with w for each length the root bending moment is ``w L^2 / 2``."""
    return np.ones_like(e), 1.0 - e, (1.0 - e) ** 2 / 2.0


@dataclass(frozen=True)
class Rows:
    """A span load through rows, straight between them: fractions `e` (k,) of the semi-span, `value` (k,)."""

    e: Array
    value: Array

    @cached_property
    def _pieces(self) -> tuple[PPoly, PPoly, PPoly, float]:
        slope = np.diff(self.value) / np.diff(self.e)
        density = PPoly(np.stack([slope, self.value[:-1]]), self.e)
        inner = density.antiderivative()
        return density, inner, inner.antiderivative(), float(inner(1.0))

    def __call__(self, e: Array) -> tuple[Array, Array, Array]:
        """Density, integral to the tip, and first moment about e."""
        density, inner, twice, whole = self._pieces
        # the first moment is the integral of (whole - inner) from e to the tip
        first = whole * (1.0 - e) - (twice(1.0) - twice(e))
        return density(e) / whole, 1.0 - inner(e) / whole, first / whole


_SHAPES: dict[str, Shape] = {"elliptic": elliptic, "bell": bell, "uniform": uniform}


def stated(load: Stated, tip: float) -> Load:
    """The load of a wing file whose last station stands at y = `tip`."""
    for key, scale in (("moments", 1e3), ("cap_forces", 1.0)):
        if (rows := getattr(load, key)) is not None:
            y, value = np.array(rows, dtype=float).T
            return Table(y, value * scale, forces=key == "cap_forces")
    semi_span = load.semi_span or 0.0
    total = (load.load_factor or 0.0) * (load.mass or 0.0) / 1e3 * G / 2.0
    inboard = semi_span - tip if load.inboard is None else load.inboard
    if isinstance(load.span_load, str):
        return SpanLoad(total, semi_span, inboard, _SHAPES[load.span_load])
    place, value = np.array(load.span_load, dtype=float).T
    return SpanLoad(total, semi_span, inboard, Rows(place / semi_span, value))
