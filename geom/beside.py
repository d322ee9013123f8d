"""The core's face beside a web that is thickened: how far what a straight wire cuts of it is off. mm."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .core import Limits, Region
from .profile import Profile
from .seat import Along

Array = NDArray[np.float64]

_UP = np.linspace(0.0, 1.0, 9)[:, None]  # shares of the way from the lower to the upper skin at which it is looked at


@dataclass(frozen=True)
class Beside:
    """The face of a core along the span, and the line from skin to skin that a wire cuts in a rib plane.

    Attributes
    ----------
    n
        Of the face along s, across the web.
    sense
        1 where the core lies ahead of it, -1 where it lies behind.
    turns
        (C,) rib planes in which a corner of it meets a skin: between two of them a straight cut is off evenly.
    y, edges
        (M,) rib planes, and (M, 2, 3) where (s, h, n) it meets the lower and the upper skin in them.
    """

    n: Along
    sense: float
    turns: Array
    y: Array
    edges: Array

    def _line(self, y: ArrayLike) -> Array:
        """Places (..., H, 3) of the line that is cut in rib planes `y` (...): straight from skin to skin."""
        y = np.asarray(y, dtype=float)
        i = np.clip(np.searchsorted(self.y, y) - 1, 0, len(self.y) - 2)
        share = ((y - self.y[i]) / (self.y[i + 1] - self.y[i]))[..., None, None]
        low, high = np.moveaxis(self.edges[i] + share * (self.edges[i + 1] - self.edges[i]), -2, 0)
        return np.asarray(low[..., None, :] + _UP * (high - low)[..., None, :])

    def off(self, a: ArrayLike, b: ArrayLike, y: Array) -> Array:
        """How far foam stands proud (..., m, H) in rib planes `y` (..., m) of a bay from rib a to rib b (...).

        It is measured square to the web's plane, at even heights from the lower to the upper skin.
        """
        a, b = np.asarray(a, dtype=float)[..., None], np.asarray(b, dtype=float)[..., None]
        first, last = self._line(a), self._line(b)
        cut = first + ((y - a) / (b - a))[..., None, None] * (last - first)
        return np.asarray(self.sense * (cut[..., 2] - self.n(cut[..., 0])))

    def table(self, places: Array) -> Array:
        """(k, k) how far at most bays from each of k places to each beyond it are off; 0 elsewhere."""
        i, j = np.triu_indices(len(places), 1)
        a, b = places[i], places[j]
        out = np.zeros((len(places), len(places)))
        out[i, j] = np.abs(self.off(a, b, np.clip(self.turns, a[:, None], b[:, None]))).max(axis=(1, 2), initial=0.0)
        return out


def beside(region: Region, turns: Array, profiles: Sequence[Profile], found: Sequence[Limits]) -> Beside | None:
    """The face of a core as its limits on profiles from end to end show it; None where it has none, or a flat one."""
    if region.web is None or region.face is None or not region.thickened:
        return None
    sides = np.array([-1.0, 1.0])
    ends = [at.stop if region.kind == "nose" else at.start for at in found]
    points = np.array([of.at(sides * t) for of, t in zip(profiles, ends, strict=True)])
    y = np.array([of.y for of in profiles])
    out = np.insert(points, 1, y[:, None], axis=-1) - region.web.origin
    s, h = out @ region.web.s, out @ region.web.h
    sense = 1.0 if region.kind == "nose" else -1.0
    return Beside(region.face, sense, turns, y, np.stack([s, h, region.face(s)], axis=-1))
