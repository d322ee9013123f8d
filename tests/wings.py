"""Wings for the tests: lofts built without a wing file, and the plainest wing file there is."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from wrywing.geom import washout
from wrywing.geom.airfoil import N, Section
from wrywing.geom.loft import Loft

GOOD = """
name = "plain"
[wing]
[[wing.stations]]
y = 0
chord = 300
airfoil = "naca 2412"
washout = 0
[[wing.stations]]
y = 1000
chord = 200
le = 100
airfoil = "naca 2412"
washout = 6
[skin]
thickness = 1
[web]
ends = [0, 980]
line = [0.3, 0.3]
thickness = 6
edge = "square"
foam = "pvc foam 80"
filler = "microballoon paste"
"""

GRID = np.linspace(-1.0, 1.0, 2 * N + 1)


def section(q: Callable, slope: Callable) -> Section:
    """Cubic pieces through q(t) with slopes dq/dt; both may jump at the nose."""
    a, b = GRID[:-1], GRID[1:]
    inner_a, inner_b = a + 1e-12, b - 1e-12
    q0, q1, d0, d1 = q(inner_a), q(inner_b), slope(inner_a), slope(inner_b)
    h = 1.0 / N
    c2 = (3.0 * (q1 - q0) / h - 2.0 * d0 - d1) / h
    c3 = (2.0 * (q0 - q1) / h + d0 + d1) / h**2
    return Section("test", 0.0, np.column_stack([q0, d0, c2, c3]))


def slab(half: float = 0.05) -> Section:
    """Flat parallel sides at plus and minus `half`."""
    return section(lambda t: half * np.sign(t), np.zeros_like)


def ellipse(half: float = 0.06) -> Section:
    """Half-axes 0.5 and `half`: q = 2 half t sqrt(1 - t^2)."""

    def root(t):
        return np.sqrt(np.maximum(1.0 - t * t, 1e-9))

    return section(lambda t: 2 * half * t * root(t), lambda t: 2 * half * (1 - 2 * t * t) / root(t))


def upside_down(of: Section) -> Section:
    """q(t) becomes -q(-t)."""
    d = 1.0 / N
    c0, c1, c2, c3 = of.coef[::-1].T
    turned = [-(c0 + c1 * d + c2 * d**2 + c3 * d**3), c1 + 2 * c2 * d + 3 * c3 * d**2, -(c2 + 3 * c3 * d), c3]
    return Section(of.name, of.nose, np.column_stack(turned))


def loft(sections, y, *, chord=200.0, le=0.0, z=0.0, twist=0.0, skin=1.0, axis=0.25) -> Loft:
    """Straight planform and straight washout (degrees) unless `twist` is a law of its own."""
    y = np.asarray(y, dtype=float)
    if isinstance(sections, Section):
        sections = [sections] * len(y)
    law = twist if callable(twist) else washout.straight(y, np.radians(np.broadcast_to(twist, y.shape)))
    plan = np.column_stack([np.broadcast_to(v, y.shape) for v in (chord, le, z)])
    return Loft(y, sections, washout.straight(y, plan), law, washout.straight(y, np.full(len(y), skin)), axis)


class Bent:
    """A washout law given as angle and slope functions of y."""

    def __init__(self, angle, slope, knots):
        self.angle, self.slope, self.knots = angle, slope, np.asarray(knots, dtype=float)

    def __call__(self, y, at):
        return self.angle(y), self.slope(y)
