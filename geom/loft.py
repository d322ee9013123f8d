"""The outer and inner surface of a panel, with three-dimensional normals.

A point of the surface has two coordinates: t, the section's own parameter (-1 lower trailing edge, 0 foremost point,
+1 upper trailing edge), and y, the rib plane. x is aft, y out along the span, z up; mm and radians.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .airfoil import N, Section
from .washout import Law, Piecewise

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Loft:
    """Sections blended along the span, twisted and placed.

    Attributes
    ----------
    y
        (k,) the stations' rib planes.
    sections
        k airfoils at chord 1.
    planform
        Chord, leading edge and height of the twist axis along the span: three figures in one law.
    washout
        Nose-down angle along the span, radians.
    skin
        Skin thickness along the span.
    axis
        Chord fraction that each section turns about.
    """

    y: Array
    sections: Sequence[Section]
    planform: Piecewise
    washout: Law
    skin: Piecewise
    axis: float = 0.25

    @cached_property
    def knots(self) -> Array:
        """Every y where the surface may have a kink, the panel's ends included."""
        inner = np.concatenate([self.planform.knots, self.washout.knots, self.skin.knots, self.y])
        return np.unique(inner[(inner >= self.y[0]) & (inner <= self.y[-1])])

    @cached_property
    def breaks(self) -> Array:
        """The knots at which the outer surface or the skin's thickness has a kink: another slope on either side."""
        t = np.array([-0.8, -0.5, -0.2, 0.2, 0.5, 0.8])

        def slopes(at: Array) -> Array:
            surface = self.outer(t, self.knots[:, None], at[:, None])[2].reshape(len(at), -1)
            return np.column_stack([surface, self.skin(self.knots, at)[1]])

        kinks = slopes(self.knots) - slopes(np.nextafter(self.knots, -np.inf))
        return np.asarray(self.knots[np.abs(kinks).max(axis=1) > 1e-9])

    @cached_property
    def _coef(self) -> Array:
        return np.stack([s.coef for s in self.sections])

    @cached_property
    def _nose(self) -> Array:
        return np.array([s.nose for s in self.sections])

    def _profile(self, t: Array, y: Array, at: Array) -> tuple[Array, ...]:
        """p, q and their derivatives by t and by y: blended at equal t, which is equal chord fraction."""
        bay = np.searchsorted(self.y[1:-1], at, side="right")
        width = self.y[bay + 1] - self.y[bay]
        out = (y - self.y[bay]) / width
        cell = np.minimum(np.maximum(((t + 1.0) * N).astype(int), 0), 2 * N - 1)
        d = t + 1.0 - cell / N
        a = self._coef[bay, cell]
        change = self._coef[bay + 1, cell] - a
        blend = a + change * out[..., None]
        c0, c1, c2, c3 = (blend[..., i] for i in range(4))
        g0, g1, g2, g3 = (change[..., i] for i in range(4))
        nose = self._nose[bay] + (self._nose[bay + 1] - self._nose[bay]) * out
        p = nose + (1.0 - nose) * t * t
        q = ((c3 * d + c2) * d + c1) * d + c0
        return (
            p,
            q,
            2.0 * (1.0 - nose) * t,
            (3.0 * c3 * d + 2.0 * c2) * d + c1,
            (self._nose[bay + 1] - self._nose[bay]) / width * (1.0 - t * t),
            (((g3 * d + g2) * d + g1) * d + g0) / width,
        )

    def outer(self, t: ArrayLike, y: ArrayLike, at: ArrayLike | None = None) -> tuple[Array, Array, Array]:
        """Points of the outer surface and its two tangents.

        Parameters
        ----------
        t, y
            Surface coordinates, any shapes that broadcast.
        at
            y that says which bay between knots is meant where `y` itself lies just beyond it; `y` unless given.

        Returns
        -------
        tuple of arrays
            Position, d/dt and d/dy, each (..., 3) in mm.

        Notes
        -----
        ``x = le + a c + c ((p - a) cos w - q sin w)``, ``z = z0 + c ((p - a) sin w + q cos w)``.
        """
        t, y, at = np.broadcast_arrays(
            np.asarray(t, dtype=float),
            np.asarray(y, dtype=float),
            np.asarray(y if at is None else at, dtype=float),
        )
        p, q, p_t, q_t, p_y, q_y = self._profile(t, y, at)
        plan, plan_y = self.planform(y, at)
        c, le, z0 = plan[..., 0], plan[..., 1], plan[..., 2]
        c_y, le_y, z0_y = plan_y[..., 0], plan_y[..., 1], plan_y[..., 2]
        w, w_y = self.washout(y, at)
        cos, sin = np.cos(w), np.sin(w)
        u = p - self.axis
        ahead, above = u * cos - q * sin, u * sin + q * cos
        point = np.stack([le + self.axis * c + c * ahead, y, z0 + c * above], axis=-1)
        by_t = np.stack([c * (p_t * cos - q_t * sin), np.zeros_like(y), c * (p_t * sin + q_t * cos)], axis=-1)
        by_y = np.stack(
            [
                le_y + self.axis * c_y + c_y * ahead + c * (p_y * cos - q_y * sin - w_y * above),
                np.ones_like(y),
                z0_y + c_y * above + c * (p_y * sin + q_y * cos + w_y * ahead),
            ],
            axis=-1,
        )
        return point, by_t, by_y

    def normal(self, t: ArrayLike, y: ArrayLike, at: ArrayLike | None = None) -> Array:
        """Outward unit normals (..., 3) of the outer surface."""
        _, by_t, by_y = self.outer(t, y, at)
        return _normal(by_t, by_y)

    def under_skin(
        self, t: ArrayLike, y: ArrayLike, depth: ArrayLike = 0.0, at: ArrayLike | None = None
    ) -> tuple[Array, Array, Array]:
        """Points `depth` mm under the inside of the skin, with the outer surface's two tangents; each (..., 3).

        Both the skin's thickness and `depth` are laid off along the outer surface's normal.
        """
        point, by_t, by_y = self.outer(t, y, at)
        y = np.asarray(y, dtype=float)
        skin = self.skin(y, y if at is None else np.asarray(at, dtype=float))[0]
        under = skin + np.asarray(depth, dtype=float)
        return point - under[..., None] * _normal(by_t, by_y), by_t, by_y

    def chord_point(self, fraction: float, y: float) -> Array:
        """Point (3,) of the twisted chord line at a chord fraction."""
        (c, le, z0), w = (
            self.planform(np.array(y), np.array(y))[0],
            float(self.washout(np.array(y), np.array(y))[0]),
        )
        u = fraction - self.axis
        return np.array([le + self.axis * c + c * u * np.cos(w), y, z0 + c * u * np.sin(w)])

    def area(self) -> float:
        """Planform area between the end stations, mm^2: the integral of the chord over y."""
        nodes, weights = np.polynomial.legendre.leggauss(4)  # exact: the chord is cubic between knots
        half = np.diff(self.knots)[:, None] / 2.0
        y = self.knots[:-1, None] + half * (1.0 + nodes)
        return float(np.sum(self.planform(y, y)[0][..., 0] * weights * half))


def _normal(by_t: Array, by_y: Array) -> Array:
    """Unit cross product of the tangents, of which d/dt has no y and d/dy has y = 1."""
    t_x, t_z, y_x, y_z = by_t[..., 0], by_t[..., 2], by_y[..., 0], by_y[..., 2]
    aslant = t_z * y_x - t_x * y_z
    length = np.sqrt(t_x**2 + aslant**2 + t_z**2)
    return np.stack([-t_z / length, aslant / length, t_x / length], axis=-1)


def unit(v: Array) -> Array:
    """The directions (..., m) of vectors."""
    return np.asarray(v / np.linalg.norm(v, axis=-1, keepdims=True))
