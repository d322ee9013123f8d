"""Cutting one bay of a core with a straight hot wire: where the wire's middle runs in the rib planes at both ends.

Both ends are in step: point i of a run at one end belongs to point i at the other, which on the skins is equal chord
fraction. The skins are cut past the web's face and the tail, as far as the section goes on there, so that no ruling
starts at a corner of the core; those faces are straight runs of their own.

Half the kerf is laid off square to the ruled surface that the wire makes. Where that leans against the rib plane, as a
swept nose does, it is more in the plane: what a wire aslant leaves of itself there is an ellipse.

A bay is laid out in its block's axes: x aft and z up in mm, as one looks outwards along the span, turned nose down by
the mean washout of the two ends, so that the block need not hold the wing's tilt as well.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from .block import blocks_about, level_pins
from .core import Limits, Region, limits, ring
from .loft import Loft
from .profile import Profile, profile, symmetric, tail, turned

Array = NDArray[np.float64]
Passes = Literal["one", "separate"]

_PAST = 4.0  # mm by which the skins are cut past the web's face and the tail
_MARKS = (5.0, 30.0)  # mm, least distance of marks at the nose of the smaller end, largest on the larger end
_COARSE = symmetric(np.linspace(0.0, 1.0, 241))


class WideKerf(ValueError):
    """The kerf is wider than the foam aft of a chord fraction in the rib plane `y`."""

    def __init__(self, y: float, kerf: float, fraction: float) -> None:
        super().__init__(f"at rib y = {y:.0f} mm the foam is thinner than that aft of chord fraction {fraction:.3f}")
        self.y, self.kerf, self.fraction = y, kerf, fraction


@dataclass(frozen=True)
class How:
    """How a core is cut.

    Attributes
    ----------
    wire
        Diameter of the wire.
    kerf
        Width of the cut at the inner and the outer end of each bay.
    passes
        Upper and lower side in ``one`` run round the nose, or as ``separate`` ones.
    runway
        How far the wire runs on outside the block.
    margin
        Foam left round the core in its block.
    pins
        Step to which the distance of the two pins is rounded down.
    """

    wire: float
    kerf: tuple[float, float]
    passes: Passes = "one"
    runway: float = 30.0
    margin: float = 5.0
    pins: float = 5.0


@dataclass(frozen=True)
class End:
    """One end of a bay.

    Attributes
    ----------
    y, kerf
        The rib plane, and the width of the cut there.
    profile
        What the wire is to leave, its tail kept at the least thickness.
    limits
        How far the core reaches on it.
    outline
        (k, 2) closed outline of the core.
    pins
        (2, 2) the two pins, both on the level line.
    block
        (x0, z0, x1, z1) of the block's end.
    """

    y: float
    kerf: float
    profile: Profile
    limits: Limits
    outline: Array
    pins: Array
    block: tuple[float, float, float, float]


@dataclass(frozen=True)
class Run:
    """One run of the wire.

    Attributes
    ----------
    name
        ``skins``, ``upper``, ``lower``, or for a straight one ``web`` or ``tail``.
    centre
        (2, k, 2) the wire's middle at the inner and the outer end, from outside the block to outside.
    normals
        (2, k, 2) unit vectors in the rib planes, square to its way, from the foam that stays towards the wire.
    marks
        (number, index) of the sync marks.
    """

    name: str
    centre: Array
    normals: Array
    marks: tuple[tuple[int, int], ...] = ()

    @property
    def straight(self) -> bool:
        """Whether it cuts a flat face."""
        return self.name in ("web", "tail")


@dataclass(frozen=True)
class Bay:
    """One bay as it is cut.

    Attributes
    ----------
    turn
        How far the block's axes are turned nose down from the wing's, radians.
    ends, runs
        Both ends in the block's axes, and the runs in the order in which they are made.
    """

    region: Region
    how: How
    turn: float
    ends: tuple[End, End]
    runs: tuple[Run, ...]

    @property
    def length(self) -> float:
        """Of the block, along the span."""
        return self.ends[1].y - self.ends[0].y

    def aside(self, run: Run, end: int) -> Array:
        """(k, 2) ways in an end's rib plane on which the wire's middle is 1 mm off what it passes; see `aslant`."""
        return aslant(run.normals[end], (run.centre[1] - run.centre[0]) / self.length)

    @property
    def section(self) -> tuple[float, float]:
        """Width and height of the block's ends."""
        x0, z0, x1, z1 = self.ends[0].block
        return x1 - x0, z1 - z0

    @property
    def shift(self) -> Array:
        """(2,) how far aft and up the outer end's pins (and with them all of its block) stand of the inner end's."""
        return np.asarray(self.ends[1].pins[0] - self.ends[0].pins[0])

    @property
    def upright(self) -> tuple[float, float]:
        """Width and height of a block that is not sheared."""
        return self.section[0] + float(abs(self.shift[0])), self.section[1] + float(abs(self.shift[1]))


def aslant(normals: Array, slope: Array) -> Array:
    """Ways (..., 2) in a rib plane from a line there to the middle of a straight wire, 1 mm in radius, that touches it.

    Parameters
    ----------
    normals
        (..., 2) of the line, unit vectors.
    slope
        (..., 2) how far the wire runs aft and up for each mm along the span.

    Notes
    -----
    The plane cuts the wire in an ellipse, stretched by ``sqrt(1 + u . u)`` along the slope u. A line of normal n
    touches it at ``(n + (n . u) u) / sqrt(1 + (n . u)^2)`` from its middle, which stands off that line by the root: one
    over the length that the rib plane shows of the surface's own unit normal.

    Examples
    --------
    A nose swept back by 60 degrees:

    >>> aslant(np.array([-1.0, 0.0]), np.array([np.sqrt(3.0), 0.0])).round(6).tolist()
    [-2.0, 0.0]
    """
    lean = np.sum(normals * slope, axis=-1, keepdims=True)
    return np.asarray((normals + lean * slope) / np.sqrt(1.0 + lean**2))


def bay(loft: Loft, region: Region, places: tuple[float, float], how: How) -> Bay:
    """Lay out the cutting of one bay.

    Raises
    ------
    NoFoam
        If nothing of the core is left at an end.
    WideKerf
        If the kerf is wider than the foam at the tail.
    NoPins
        If an end has no room for two pins.
    """
    rough = [profile(loft, y, _COARSE) for y in places]
    found = [limits(region, of) for of in rough]
    for of, kerf, at in zip(rough, how.kerf, found, strict=True):
        _refuse_wide(region, of, kerf, at)
    low, high = _reach(region, rough, found)
    marks = _marks(rough, low, high)
    chord = max(float(np.linalg.norm(of.at(1.0) - of.at(0.0))) for of in rough)
    nodes = np.linspace(0.0, 1.0, int(np.ceil(9.0 * np.sqrt(chord))) + 1)
    tails = [tail(loft, of, region.least) for of in rough]  # where the padding sets in
    t = symmetric(np.concatenate([nodes, low, high, *marks, tails]))
    turn = float(np.mean(loft.washout(np.array(places), np.array(places))[0]))
    wanted = [profile(loft, y, t) for y in places]
    outlines = [turned(ring(region, of, 201), turn) for of in wanted]
    pins = level_pins(outlines, places, how.pins)
    blocks = blocks_about(outlines, pins, how.margin)
    ends = tuple(
        End(y, kerf, (of if region.kind == "nose" else of.padded(region.least)).turned(turn), at, outline, pin, block)
        for y, kerf, of, at, outline, pin, block in zip(
            places, how.kerf, wanted, found, outlines, pins, blocks, strict=True
        )
    )
    runs = [*_faces(region, ends, how, turn), *_skins(region, ends, how, low, high, marks)]
    return Bay(region, how, turn, (ends[0], ends[1]), tuple(runs))


def _refuse_wide(region: Region, of: Profile, kerf: float, at: Limits) -> None:
    wide = of.tail(kerf)
    if region.kind != "nose" and wide < min(at.stop) - 1e-9:
        raise WideKerf(of.y, kerf, wide**2)


def _reach(region: Region, rough: list[Profile], found: list[Limits]) -> tuple[Array, Array]:
    """From which to which t (0 and up) the skins are cut at both ends: (lower, upper) each."""
    start, stop = (np.array([getattr(at, name) for at in found]) for name in ("start", "stop"))
    past = _PAST / min(float(np.linalg.norm(of.at(1.0) - of.at(0.0))) for of in rough)
    last = np.sqrt(np.minimum(stop.max(axis=0) ** 2 + past, 1.0))
    if region.kind == "nose":
        return np.zeros(2), last
    last = np.minimum(last, region.limit)
    if region.kind == "whole":
        return np.zeros(2), last
    first = start.min(axis=0) ** 2
    return np.sqrt(np.maximum(first - past, 0.25 * first)), last


def _marks(rough: list[Profile], low: Array, high: Array) -> tuple[Array, Array]:
    """Parameters t (0 and up) of the marks on the lower and the upper side: even in t, so closer at the nose.

    Where that leaves too long a way on the larger end, it is divided further.
    """
    t = _COARSE[len(_COARSE) // 2 :]
    round_nose = min(float(np.linalg.norm(of.at(0.1) - of.at(-0.1))) for of in rough)
    step = float(np.clip(0.2 * _MARKS[0] / max(round_nose, 1e-3), 0.1, 0.3))
    out = []
    for side, (a, b) in zip((-1.0, 1.0), zip(low, high, strict=True), strict=True):
        inside = np.arange(1, int(1.0 / step) + 1) * step
        inside = inside[(inside > a + 0.6 * step) & (inside < b - 0.6 * step)]
        stops = np.concatenate([[a], inside, [b]])
        lines = [of.at(side * t) for of in rough]
        ways = [np.append(0.0, np.cumsum(np.hypot(*np.diff(line, axis=0).T))) for line in lines]
        way = np.max([np.diff(np.interp(stops, t, w)) for w in ways], axis=0)
        pieces = np.ceil(way / _MARKS[1]).astype(int)
        fine = [
            np.linspace(a, b, max(1, n), endpoint=False) for a, b, n in zip(stops[:-1], stops[1:], pieces, strict=True)
        ]
        out.append(np.append(np.concatenate(fine), stops[-1]))
    return out[0], out[1]


# --- runs -----------------------------------------------------------------------------------------


def _faces(region: Region, ends: tuple[End, ...], how: How, turn: float) -> list[Run]:
    """Straight runs from above the block to below it: the face beside the web, and a tail that is cut off."""
    runs = []
    if region.kind != "whole":
        lines = [_web_line(region, end, turn) for end in ends]
        runs.append(_face("web", lines, ends, how, 1.0 if region.kind == "nose" else -1.0))
    if region.kind != "nose" and region.to < 1.0 and max(max(end.limits.stop) for end in ends) == region.limit:
        lines = [end.profile.at(np.array([-1.0, 1.0]) * region.limit) for end in ends]
        runs.append(_face("tail", lines, ends, how, 1.0))
    return runs


def _web_line(region: Region, end: End, turn: float) -> Array:
    """(2, 2) where the core's face beside the web meets the lower and the upper skin."""
    t = end.limits.stop if region.kind == "nose" else end.limits.start
    z = end.profile.at(np.array([-1.0, 1.0]) * t)[:, 1]
    face = turned(region.face_at(end.y), turn)
    return np.column_stack([np.interp(z, face[:, 1], face[:, 0]), z])


def _face(name: str, lines: list[Array], ends: tuple[End, ...], how: How, side: float) -> Run:
    places, normals = [], []
    for line, end in zip(lines, ends, strict=True):
        up = (line[1] - line[0]) / np.linalg.norm(line[1] - line[0])
        heights = np.array([end.block[3] + how.runway, end.block[3], end.block[1], end.block[1] - how.runway])
        places.append(line[0] + ((heights - line[0, 1]) / up[1])[:, None] * up)
        normals.append(np.tile(side * np.array([up[1], -up[0]]), (len(heights), 1)))
    slope = _slope(places, ends)
    off = [end.kerf / 2.0 * aslant(out, slope) for end, out in zip(ends, normals, strict=True)]
    return Run(name, np.array(places) + off, np.array(normals))


def _slope(places: list[Array], ends: tuple[End, ...]) -> Array:
    """(k, 2) how far lines from places at the inner end to those at the outer one run aft and up for each mm."""
    return np.asarray((places[1] - places[0]) / (ends[1].y - ends[0].y))


def _skins(
    region: Region, ends: tuple[End, ...], how: How, low: Array, high: Array, marks: tuple[Array, Array]
) -> list[Run]:
    """Runs along the skins, from aft over the top forward, then below from the front aft."""
    upper, lower = marks[1][::-1], -marks[0]
    if region.kind != "aft" and how.passes == "one":
        return [_skin("skins", ends, how, high[1], -high[0], [*upper, *lower[1:]], 1)]
    return [
        _skin("upper", ends, how, high[1], low[1], list(upper), 1),
        _skin("lower", ends, how, -low[0], -high[0], list(lower), len(upper) + 1),
    ]


def _skin(
    name: str, ends: tuple[End, ...], how: How, first: float, last: float, marks: list[float], number: int
) -> Run:
    """A run along the skins from parameter `first` down to `last`, a runway before and one after it."""
    t = ends[0].profile.t
    slope = _slope([end.profile.points for end in ends], ends)
    inside = np.flatnonzero((t <= first + 1e-12) & (t >= last - 1e-12))[::-1]
    ahead = (name == "lower", name == "upper")  # which runway leads forward
    centre, normals = [], []
    for end in ends:
        out = end.profile.normals
        line = replace(end.profile, normals=aslant(out, slope)).offset(end.kerf / 2.0)[inside]
        out = out[inside]
        before, after = (
            _runway(end, how, line[i], t[inside[i]], forward) for i, forward in ((0, ahead[0]), (-1, ahead[1]))
        )
        centre.append(np.concatenate([[before], line, [after]]))
        normals.append(np.concatenate([out[:1], out, out[-1:]]))
    at = [1 + int(np.argmin(np.abs(t[inside] - mark))) for mark in marks]
    return Run(name, np.array(centre), np.array(normals), tuple(enumerate(at, start=number)))


def _runway(end: End, how: How, start: Array, t: float, forward: bool) -> Array:
    """Where a runway ends that begins at `start`, off the profile's parameter t.

    It runs midway between the two skins; ahead of a nose, straight on along the chord line.
    """
    way = end.profile.aft
    if t != 0.0:
        ahead, behind = (end.profile.at([r, -r]).mean(axis=0) for r in (abs(t) - 0.02, abs(t)))
        way = (behind - ahead) / np.linalg.norm(behind - ahead)
    out = start[0] - end.block[0] if forward else end.block[2] - start[0]
    length = max(out + how.runway, _PAST) / way[0]
    return np.asarray(start - length * way if forward else start + length * way)
