"""What the web has to carry, at limit load: shear, bending moment and cap force along the panel.

A span load lies over the whole semi-span, of which the panel is the outer part; its sum for one half of the aircraft is
load factor x mass x g / 2 (the wing's own weight is not taken off: that is on the safe side). The lift is taken to
stand on the web line, so that on a swept web the arms, and with them the moment, are longer by 1 / (its direction's
share across the ribs). Newtons, mm and N mm; y is the panel's. What lies outboard is summed from the tip inwards, where
all parts are positive: no figure is a small difference of large ones.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Protocol

import numpy as np
from numpy.typing import NDArray
from scipy.special import betainc

from .records.caps import Load as Stated

Array = NDArray[np.float64]
Shape = Callable[[Array], tuple[Array, Array, Array]]

_APART = "distance between cap centroids"
_BENDING = f"bending moment / {_APART}"
G = 9.80665  # m/s^2, standard acceleration of free fall (ISO 80000-3)


@dataclass(frozen=True)
class Line:
    """Places along a web, (k,) each.

    Attributes
    ----------
    y
        Their rib planes, mm.
    apart
        Distance between the cap centroids, mm.
    taper
        How fast the web grows higher along itself, less than 0 where it grows lower.
    lean
        The web line's share along y.
    """

    y: Array
    apart: Array
    taper: Array
    lean: float


@dataclass(frozen=True)
class Carried:
    """What a web has to carry, (k,) along it.

    Attributes
    ----------
    force
        In either cap, N.
    flow
        Shear flow in the web, N for each mm of its height and length.
    shear, moment
        In the web's own plane, N and N mm. Caps that draw together carry a part of the shear.
    running
        Air load, N for each mm along the web; None where the load does not tell.
    force_formula, flow_formula
        How cap force and shear flow come from the load, in words.
    """

    force: Array
    flow: Array
    shear: Array
    moment: Array
    running: Array | None
    force_formula: str
    flow_formula: str

    def times(self, factor: float) -> Carried:
        """All of it so many times."""
        return replace(
            self,
            force=factor * self.force,
            flow=factor * self.flow,
            shear=factor * self.shear,
            moment=factor * self.moment,
            running=None if self.running is None else factor * self.running,
        )


class Load(Protocol):
    """A load on the web."""

    def at(self, line: Line) -> Carried:
        """What a web has to carry."""


@dataclass(frozen=True)
class SpanLoad:
    """Lift over the semi-span.

    Attributes
    ----------
    total
        Lift of one half, N.
    semi_span
        From the centreline to the wing tip, mm.
    tip
        The panel's y of the wing tip, mm.
    shape
        Of the distance d from the tip, as a fraction of the semi-span: lift density, its integral from there to the
        tip, and the first moment of that part about d; scaled so that the whole half is 1.
    """

    total: float
    semi_span: float
    tip: float
    shape: Shape

    def at(self, line: Line) -> Carried:
        """Cap force is the bending moment over the distance between the centroids, shear flow the shear over it."""
        density, outboard, first = self.shape(np.clip((self.tip - line.y) / self.semi_span, 0.0, 1.0))
        shear = self.total * outboard
        moment = self.total * self.semi_span / line.lean * first
        running = self.total / self.semi_span * line.lean * density
        return Carried(moment / line.apart, shear / line.apart, shear, moment, running, _BENDING, f"shear / {_APART}")


@dataclass(frozen=True)
class _Table:
    """A figure stated over y, (k,) each, straight between the rows."""

    y: Array
    value: Array

    def _value(self, y: Array) -> Array:
        return _between(y, self.y, self.value)[2]

    def _slopes(self, line: Line) -> Array:
        """(2, k) growth along the web in the row pair that ends at each place, and in the one that begins there."""
        steep = np.diff(self.value) / np.diff(self.y) * line.lean
        last = len(steep) - 1
        return np.stack([steep[np.clip(np.searchsorted(self.y, line.y, s) - 1, 0, last)] for s in ("left", "right")])


@dataclass(frozen=True)
class Moments(_Table):
    """Bending moments in the web's own plane, N mm, stated over y."""

    def at(self, line: Line) -> Carried:
        """Shear is how fast the moment changes along the web, the steeper of two rows that meet."""
        moment, shear = self._value(line.y), np.abs(self._slopes(line)).max(axis=0)
        slope = f"slope of the bending moment / {_APART}"
        return Carried(moment / line.apart, shear / line.apart, shear, moment, None, _BENDING, slope)


@dataclass(frozen=True)
class Forces(_Table):
    """Cap forces in N, stated over y."""

    def at(self, line: Line) -> Carried:
        """Moment ``M = F a`` and shear ``V = dM/ds = a dF/ds + F da/ds``: the caps carry what their taper does."""
        force, slopes = self._value(line.y), self._slopes(line)
        shear = np.abs(line.apart * slopes + force * line.taper).max(axis=0)
        flow, slope = np.abs(slopes).max(axis=0), "slope of the cap force along the web"
        return Carried(force, flow, shear, force * line.apart, None, "cap force as tabled", slope)


def elliptic(d: Array) -> tuple[Array, Array, Array]:
    """``4/pi sqrt(1 - e^2)``, e = 1 - d, and its integrals; the half's centre is at ``4/(3 pi)``.

    Examples
    --------
    >>> round(float(elliptic(np.array(1.0))[2]), 5)
    0.42441
    """
    return _power(d, 0.5, 4.0 / np.pi)


def bell(d: Array) -> tuple[Array, Array, Array]:
    """``16/(3 pi) (1 - e^2)^1.5`` (L. Prandtl, *Ueber Tragfluegel kleinsten induzierten Widerstandes*, 1933).

    Examples
    --------
    >>> round(float(bell(np.array(1.0))[2]), 5)
    0.33953
    """
    return _power(d, 1.5, 16.0 / (3.0 * np.pi))


def _power(d: Array, p: float, scale: float) -> tuple[Array, Array, Array]:
    """``scale (1 - e^2)^p`` and its integrals.

    With v half the distance from the tip, ``1 - e^2 = 4 v (1 - v)``: the integral from the tip is an incomplete beta
    function (*NIST Handbook of Mathematical Functions*, 8.17), accurate however small it is.
    """
    outboard = 2.0 * betainc(p + 1.0, p + 1.0, d / 2.0)
    about_tip = 2.0 * betainc(p + 2.0, p + 1.0, d / 2.0)
    return scale * (d * (2.0 - d)) ** p, outboard, d * outboard - about_tip


def uniform(d: Array) -> tuple[Array, Array, Array]:
    """The same all along: with w for each length the root bending moment is ``w L^2 / 2``."""
    return np.ones_like(d), d, d**2 / 2.0


@dataclass(frozen=True)
class Rows:
    """A span load straight between rows: fractions `d` (k,) of the semi-span from the tip, `value` (k,)."""

    d: Array
    value: Array

    @cached_property
    def _sums(self) -> tuple[Array, Array]:
        """Integral from the tip to each row, and the first moment of that part about the row."""
        step, near, far = np.diff(self.d), self.value[:-1], self.value[1:]
        inner = np.concatenate([[0.0], np.cumsum(step * (near + far) / 2.0)])
        first = np.concatenate([[0.0], np.cumsum(step * inner[:-1] + step**2 * (2.0 * near + far) / 6.0)])
        return inner, first

    def __call__(self, d: Array) -> tuple[Array, Array, Array]:
        """Density, integral to the tip, and first moment about d."""
        inner, first = self._sums
        i, step, value = _between(d, self.d, self.value)
        near = self.value[i]
        outboard = inner[i] + step * (near + value) / 2.0
        moment = first[i] + step * inner[i] + step**2 * (2.0 * near + value) / 6.0
        return value / inner[-1], outboard / inner[-1], moment / inner[-1]


def _between(x: Array, places: Array, values: Array) -> tuple[NDArray[np.intp], Array, Array]:
    """The row pair that holds each x, how far x lies behind its first row, and the value there, never outside both."""
    i = np.clip(np.searchsorted(places, x, side="right") - 1, 0, len(places) - 2)
    step = x - places[i]
    share = np.clip(step / (places[i + 1] - places[i]), 0.0, 1.0)
    return i, step, values[i] * (1.0 - share) + values[i + 1] * share


_SHAPES: dict[str, Shape] = {"elliptic": elliptic, "bell": bell, "uniform": uniform}


def stated(load: Stated, tip: float) -> Load:
    """The load of a wing file whose last station stands at y = `tip`."""
    for rows, kind, scale in ((load.moments, Moments, 1e3), (load.cap_forces, Forces, 1.0)):
        if rows is not None:
            y, value = np.array(rows, dtype=float).T
            return kind(y, value * scale)
    semi_span = load.semi_span or 0.0
    total = (load.load_factor or 0.0) * (load.mass or 0.0) / 1e3 * G / 2.0
    end = tip if load.inboard is None else semi_span - load.inboard
    if isinstance(load.span_load, str):
        return SpanLoad(total, semi_span, end, _SHAPES[load.span_load])
    place, value = np.array(load.span_load, dtype=float)[::-1].T
    return SpanLoad(total, semi_span, end, Rows((semi_span - place) / semi_span, value))
