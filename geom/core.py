"""Foam cores: the region between skin and web in every rib plane, and its volume. mm."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from .loft import Loft
from .profile import Profile, face_line, profile, symmetric
from .seat import Along
from .web import SIDES, Plane, edge

Array = NDArray[np.float64]
Kind = Literal["nose", "aft", "whole"]

_JUMP = 1e-5  # of a slope, no kink below it
_RING = 81  # points along each side of a section of the core
_APART = 2  # digits, mm: ribs nearer to each other are one


class NoFoam(ValueError):
    """The region is empty in the rib plane `y`: what leaves nothing, and which figure of it is to blame."""

    def __init__(self, y: float, why: str, key: Literal["region", "to"] = "region") -> None:
        super().__init__(f"none at rib y = {y:.0f} mm, where {why}")
        self.y, self.key = y, key


@dataclass(frozen=True)
class Region:
    """What part of the panel a core fills, all of it under the skin.

    Attributes
    ----------
    kind
        ``nose``: leading edge to the web's front face; ``aft``: its rear face to the trailing edge; ``whole``: both.
    ends
        Rib planes (y1, y2).
    web, face
        The web's plane, and n of the core's own face beside it along s (facing and bond line taken off); neither for
        ``whole``.
    to
        Chord fraction at which it stops short of the trailing edge; 1 where it does not.
    least
        Foam thinner than this, mm, is no part of it.
    """

    kind: Kind
    ends: tuple[float, float]
    web: Plane | None = None
    face: Along | None = None
    to: float = 1.0
    least: float = 1.0

    @property
    def limit(self) -> float:
        """Parameter t of the chord fraction it stops at."""
        return float(np.sqrt(self.to))

    @property
    def thickened(self) -> bool:
        """Whether the web is thicker at one place beside it than at another, so that its face is not flat."""
        return self.face is not None and bool(np.ptp(self.face.value) > 0.0)

    def face_at(self, y: float) -> Array:
        """(k, 2) the line (x, z), lower end first, of the core's face beside the web in the rib plane `y`."""
        if self.web is None or self.face is None:
            raise ValueError("a whole core has no face beside the web")
        return face_line(self.web, self.face, y)


@dataclass(frozen=True)
class Limits:
    """How far a core reaches in a rib plane: from t = `start` to `stop` on each side, lower side first; t from 0 up."""

    start: tuple[float, float]
    stop: tuple[float, float]


def limits(region: Region, of: Profile) -> Limits:
    """Where the core begins and ends on a profile of the skin's inside.

    Raises
    ------
    NoFoam
        If nothing is left of it there.
    """
    tail = min(of.tail(region.least), region.limit)
    if tail == 0.0:
        raise NoFoam(of.y, f"the skins leave less than {region.least:g} mm between them")
    if region.kind == "whole":
        return Limits((0.0, 0.0), (tail, tail))
    line = region.face_at(of.y)
    corners = _corner(of, line, -1.0), _corner(of, line, 1.0)
    if region.kind == "nose":
        if max(corners) > tail:
            raise NoFoam(of.y, "the web stands aft of it")
        return Limits((0.0, 0.0), corners)
    if max(corners) >= tail:
        if region.to < 1.0 and region.limit <= max(corners):
            raise NoFoam(of.y, "it would stop ahead of the web's rear face", "to")
        raise NoFoam(of.y, "the web reaches as far aft as there is foam")
    return Limits(corners, (tail, tail))


def _corner(of: Profile, line: Array, side: float) -> float:
    """Where (t, 0 and up) the upper (1) or lower (-1) side crosses the line of a face."""
    t = of.t[len(of.t) // 2 :]
    points = of.at(side * t)
    off = points[:, 0] - np.interp(points[:, 1], line[:, 1], line[:, 0])  # positive aft of the line
    turns = np.flatnonzero((off[:-1] < 0.0) & (off[1:] >= 0.0))
    if not turns.size:
        raise NoFoam(of.y, f"the web's face misses the {'upper' if side > 0 else 'lower'} side of the section")
    i = int(turns[0])
    share = off[i] / (off[i] - off[i + 1])
    return float(np.sqrt(t[i] ** 2 + share * (t[i + 1] ** 2 - t[i] ** 2)))


def ring(region: Region, of: Profile, count: int = _RING) -> Array:
    """(2 count, 2) closed section of the core: along the upper side forward, back along the lower side.

    Point i of the upper side stands over point ``2 count - 1 - i``. The web's face and the tail are straight.
    """
    found = limits(region, of)
    share = np.linspace(1.0, 0.0, count)
    low, high = (np.sqrt(a**2 + share * (b**2 - a**2)) for a, b in zip(found.start, found.stop, strict=True))
    if region.kind != "aft":  # round the nose t itself is even
        low, high = share * found.stop[0], share * found.stop[1]
    return np.concatenate([of.at(high), of.at(-low[::-1])])


@dataclass(frozen=True)
class Mesh:
    """A closed surface of triangles: `points` (k, 3) and `faces` (m, 3), outwards anticlockwise."""

    points: Array
    faces: NDArray[np.intp]

    @cached_property
    def volume(self) -> float:
        """Volume inside, mm^3: the sum of signed tetrahedra about one point (divergence theorem)."""
        a, b, c = np.moveaxis(self.points[self.faces] - self.points[0], 1, 0)
        return float(np.einsum("ki,ki->", a, np.cross(b, c))) / 6.0


def solid(loft: Loft, region: Region, *, longest: float = 25.0) -> Mesh:
    """The core as wanted, in sections no further apart than `longest` mm, and one at each of its `kinks`.

    From skin to skin its face beside the web is straight in every section.
    """
    marks = np.concatenate([region.ends[:1], kinks(loft, region), region.ends[1:]])
    pieces = [np.linspace(a, b, max(1, int(np.ceil((b - a) / longest))), endpoint=False) for a, b in pairwise(marks)]
    places = np.append(np.concatenate(pieces), region.ends[1])
    t = symmetric(np.linspace(0.0, 1.0, 241))
    rings = [ring(region, profile(loft, float(y), t)) for y in places]
    points = np.stack([np.insert(r, 1, y, axis=1) for r, y in zip(rings, places, strict=True)])
    return Mesh(points.reshape(-1, 3), _walls(*points.shape[:2]))


def _walls(rows: int, around: int) -> NDArray[np.intp]:
    """Triangles between closed rings of points and over the first and the last of them."""
    index = np.arange(rows * around).reshape(rows, around)
    a, b = index[:-1], np.roll(index[:-1], -1, axis=1)
    c, d = index[1:], np.roll(index[1:], -1, axis=1)
    sides = np.concatenate([np.stack([a, c, b], axis=-1), np.stack([b, c, d], axis=-1)]).reshape(-1, 3)
    i = np.arange(around // 2 - 1)
    over, under = i, around - 1 - i
    cap = np.concatenate([np.stack([over, over + 1, under], -1), np.stack([over + 1, under - 1, under], -1)])
    cap = cap[(np.diff(np.sort(cap, axis=1)) != 0).all(axis=1)]
    return np.concatenate([sides, cap, cap[:, ::-1] + index[-1, 0]])


def kinks(loft: Loft, region: Region) -> Array:
    """Rib planes inside a core's ends where it has a kink along the span.

    There the slope of the outer surface or of the skin's thickness jumps, or a corner of the face beside the web meets
    the skin.
    """
    y = loft.knots[_inside(region, loft.knots)]
    t = np.linspace(-1.0, 1.0, 9)[:, None]
    before = np.nextafter(y, -np.inf)
    jump = loft.outer(t, y, y)[2] - loft.outer(t, y, before)[2]
    skin = loft.skin(y, y)[1] - loft.skin(y, before)[1]
    return np.union1d(y[(np.abs(jump).max(axis=(0, 2)) > _JUMP) | (np.abs(skin) > _JUMP)], turns(loft, region))


def _inside(region: Region, y: Array) -> NDArray[np.bool_]:
    return np.asarray((y > region.ends[0] + 1e-6) & (y < region.ends[1] - 1e-6))


def turns(loft: Loft, region: Region) -> Array:
    """Rib planes inside a core's ends in which a corner of its face beside the web meets a skin."""
    if region.web is None or region.face is None or not region.thickened:
        return np.empty(0)
    s, n = region.face.s, region.face.value
    y = np.stack([region.web.point(s, edge(loft, region.web, s, n, side).h, n)[:, 1] for side in SIDES])
    return np.round(y[_inside(region, y)], _APART)
