"""The web blank: the outline of each face of the sheet, and the marks that stand on it, in the web's own (s, h)."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
import shapely
from numpy.typing import NDArray

from .seat import Along, Cut, quadratic
from .web import Plane

Array = NDArray[np.float64]
FaceName = Literal["front", "rear"]
FACES: tuple[FaceName, FaceName] = ("front", "rear")

REGISTER_SIZES = (3.0, 2.0, 1.5, 1.0, 0.6, 0.3, 0.1)  # mm, diameters of register holes; the last are pricked

_FINE = quadratic(np.linspace(0.0, 1.0, 9)[:-1])  # places in a cell at which its quadratic is drawn
_SPARE = 10.0  # mm by which an edge is carried on before the rib planes cut it
_CLOSE = 1e-6  # mm


@dataclass(frozen=True)
class Face:
    """One face of the blank.

    Attributes
    ----------
    name
        ``front`` (n = -t/2) or ``rear`` (n = +t/2).
    top, bottom
        (k, 2) the two edges in (s, h), s ascending, from rib plane y1 to rib plane y2.
    """

    name: FaceName
    top: Array
    bottom: Array

    def outline(self) -> Array:
        """(k, 2) closed outline, anticlockwise in (s, h), first point not repeated."""
        return np.concatenate([self.bottom, self.top[::-1]])

    def area(self) -> float:
        """Area inside the outline, mm^2."""
        x, y = self.outline().T
        return float(x @ np.roll(y, -1) - y @ np.roll(x, -1)) / 2.0

    def heights(self, s: float) -> tuple[float, float]:
        """Bottom and top of the face at s."""
        return float(np.interp(s, *self.bottom.T)), float(np.interp(s, *self.top.T))


def face(web: Plane, top: Cut, bottom: Cut, name: FaceName) -> Face:
    """One face of the sheet, its edges cut and its ends at the rib planes."""
    return layer(web, top, bottom, top.survey.n[..., 0 if name == "front" else -1], name)


def layer(web: Plane, top: Cut, bottom: Cut, n: Array, name: FaceName) -> Face:
    """The layer of the web at places `n` (C, 3) across its thickness, drawn as a face that is looked at from `name`."""
    return Face(name, _edge_line(web, top, n), _edge_line(web, bottom, n))


def rib_line(web: Plane, of: Face, n: Along, y: float) -> Array:
    """(2, 2) the line from the bottom to the top edge of a face along which the rib plane `y` meets it.

    The face stands at `n` along s.
    """
    ends = []
    for line in (of.bottom, of.top):
        ahead = line[:, 0] - web.s_at_rib(y, line[:, 1], n(line[:, 0]))
        ends.append([float(np.interp(0.0, ahead, line[:, i])) for i in range(2)])
    return np.array(ends)


def register_places(
    front: Face,
    rear: Face,
    *,
    apart: float = 500.0,
    inset: float = 25.0,
    keep_off: tuple[float, float] | None = None,
) -> Array:
    """(k, 2) places (s, h), three or more, that lie on both faces: a pin pushed square through the sheet hits both.

    They stand on the web line where it runs well inside the sheet, else half-way up, and are spaced unevenly, so that a
    face cannot be laid on end for end. One that would fall between the two places s of `keep_off` moves clear. Every
    hole has room, its own diameter of sheet all round: where a tip is too thin they stay inboard, and where even half
    the sheet's length has no room for them they are smaller; `register_diameter` says what they are then.
    """
    s = np.concatenate([f.outline()[:, 0] for f in (front, rear)])
    for size in REGISTER_SIZES:
        room = _room(front, rear, size)
        start, stop = _stretch(room, inset, keep_off)
        if stop - start > 0.5 * float(np.ptp(s)):
            break
    count = max(3, int(np.ceil((stop - start) / apart)) + 1)
    share = np.linspace(0.0, 1.0, count)
    share[1:-1] -= 0.12 / (count - 1)
    places = (_clear_of(float(wanted), keep_off, start, stop) for wanted in start + share * (stop - start))
    return np.array([[at, _height(room, at)] for at in places])


def register_diameter(front: Face, rear: Face, places: Array) -> float:
    """The largest diameter in mm, of those in use, for which all the places (k, 2) of the register holes have room."""
    points = shapely.points(places)
    fitting = (d for d in REGISTER_SIZES if shapely.covers(_room(front, rear, d).buffer(1e-6), points).all())
    return next(fitting, REGISTER_SIZES[-1])


def _room(front: Face, rear: Face, diameter: float) -> shapely.Polygon:
    """Where the middle of a hole may stand, so that both faces have its diameter to spare round it; may be empty."""
    both = shapely.Polygon(front.outline()).intersection(shapely.Polygon(rear.outline()))
    parts = shapely.get_parts(both.buffer(-1.5 * diameter))
    return max(parts, key=lambda part: part.length, default=shapely.Polygon())


def _stretch(room: shapely.Polygon, inset: float, keep_off: tuple[float, float] | None) -> tuple[float, float]:
    """First and last place s with room, `inset` from the ends and clear of `keep_off`; both 0 if there is none."""
    if room.is_empty:
        return 0.0, 0.0
    start, _, stop, _ = room.bounds
    inset = min(inset, 0.2 * (stop - start))
    start, stop = start + inset, stop - inset
    if keep_off is not None and keep_off[0] < start < keep_off[1]:
        start = min(keep_off[1], stop)
    if keep_off is not None and keep_off[0] < stop < keep_off[1]:
        stop = max(keep_off[0], start)
    return start, stop


def _height(room: shapely.Polygon, s: float) -> float:
    """The web line's where it runs well inside the room at s, else half-way up."""
    _, bottom, _, top = room.bounds
    _, low, _, high = room.intersection(shapely.LineString([[s, bottom - 1.0], [s, top + 1.0]])).bounds
    margin = 0.1 * (high - low)
    return 0.0 if low + margin < 0.0 < high - margin else float(low + high) / 2.0


def _clear_of(s: float, keep_off: tuple[float, float] | None, start: float, stop: float) -> float:
    """`s`, or, if it falls between the two places to keep off, the one nearer to the middle of the web."""
    if keep_off is None or not keep_off[0] < s < keep_off[1]:
        return s
    return keep_off[1] if sum(keep_off) < start + stop else keep_off[0]


def _edge_line(web: Plane, cut: Cut, n: Array) -> Array:
    """(k, 2) one edge at the layer `n` (C, 3), cut off by the rib planes at both ends."""
    line = np.column_stack([(v @ _FINE).ravel() for v in (cut.survey.s, cut.at(n))])
    last = [cut.survey.s[-1, 2], cut.at(n)[-1, 2]]
    line = np.concatenate([line, [last]])
    line = np.concatenate([[_carried(line[1], line[0])], line, [_carried(line[-2], line[-1])]])
    for rib, outer, end in zip(web.ends, (1.0, -1.0), (n[0, 0], n[-1, 2]), strict=True):
        past = outer * (line[:, 0] - web.s_at_rib(rib, line[:, 1], end))
        line = _cut_off(line, past)
    return line


def _carried(before: Array, end: Array) -> Array:
    """A point `_SPARE` mm beyond `end`, straight on from `before`."""
    step = end - before
    return np.asarray(end + step * (_SPARE / abs(step[0])))


def _cut_off(line: Array, past: Array) -> Array:
    """The part of a line where `past` is positive, with the crossing put in for points that lie `_CLOSE` to it."""
    inside = past > 0.0
    crossing = int(np.flatnonzero(inside[1:] != inside[:-1])[0])
    share = past[crossing] / (past[crossing] - past[crossing + 1])
    point = line[crossing] + share * (line[crossing + 1] - line[crossing])
    kept = line[past > _CLOSE]
    return np.concatenate([[point], kept] if inside[crossing + 1] else [kept, [point]])
