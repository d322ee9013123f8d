"""Closed meshes of what is cut and filled, from the same curves as the drawings; wing axes, mm.

A part of the web lies between two sheets over the same places (s, n) of its plane, one above the other everywhere. Each
sheet is a graph over those places, so a mesh built this way is closed and cannot cross itself.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray
from scipy.interpolate import BarycentricInterpolator

from .core import Mesh
from .loft import Loft
from .places import crossings, spread
from .seat import Along, Cut, Survey, lobatto, rib_crossing
from .web import Plane, Side, edge, end_places

Array = NDArray[np.float64]

GRID = 1e-4  # mm
FILM = 0.001  # mm, least thickness of a mesh: a few steps of single precision at 4 m, so it stays closed in STL
LEAST = 0.01  # mm, mean gap under which there is nothing to fill
_STEP, _STEEP = 0.02, 4.0  # mm of s over which an edge steps, at least, where the saw is set anew; its slope, at most
_CLEAR = 0.5  # mm between the rib planes' skewed ends and the nearest row
_ACROSS = np.linspace(-1.0, 1.0, 17)  # columns of a filler, of the half thickness
_ON_STRIP = np.linspace(-0.5, 0.5, 5)  # columns of a strip, of its width
_APART, _LEAST_ROW = 10.0, 0.1  # mm between the rows of a strip, at most and at least


def between(low: Array, high: Array) -> Mesh:
    """Closed solid between two grids of points.

    Parameters
    ----------
    low, high
        (R, K, 3) points in wing axes; rows follow one another outwards along the span, columns aft, and each point of
        `high` stands over that of `low`.

    Examples
    --------
    >>> y, x = np.meshgrid([0.0, 3.0], [0.0, 2.0], indexing="ij")
    >>> between(np.stack([x, y, 0 * x], axis=-1), np.stack([x, y, 0 * x + 5.0], axis=-1)).volume
    30.0
    """
    rows, columns = low.shape[:2]
    index = np.arange(rows * columns).reshape(rows, columns)
    a, b, c, d = (v.ravel() for v in (index[:-1, :-1], index[1:, :-1], index[1:, 1:], index[:-1, 1:]))
    down = np.concatenate([np.stack([a, b, c], axis=1), np.stack([a, c, d], axis=1)])
    rim = np.concatenate([index[:-1, 0], index[-1, :-1], index[:0:-1, -1], index[0, :0:-1]])
    after, lift = np.roll(rim, -1), rows * columns
    walls = [np.stack(t, axis=1) for t in ((after, rim, rim + lift), (after, rim + lift, after + lift))]
    points = np.concatenate([low.reshape(-1, 3), high.reshape(-1, 3)])
    return Mesh(points, np.concatenate([down, down[:, ::-1] + lift, *walls]))


def welded(mesh: Mesh) -> Mesh:
    """The same on a grid of `GRID`, points that come to one place made one, and what that leaves of triangles dropped.

    A reader of STL knows points by their places alone; and the last bits of a place may differ between machines.

    Examples
    --------
    >>> welded(Mesh(np.eye(3)[[0, 1, 2, 2]], np.array([[0, 1, 2], [1, 2, 3]]))).faces.tolist()
    [[2, 1, 0]]
    """
    points, which = np.unique(np.round(mesh.points / GRID) * GRID + 0.0, axis=0, return_inverse=True)
    faces = which.reshape(-1)[mesh.faces]
    return Mesh(points, faces[(np.diff(np.sort(faces, axis=1)) > 0).all(axis=1)])


def mirrored(mesh: Mesh) -> Mesh:
    """The same for the other hand: y negated, still outwards anticlockwise."""
    return Mesh(mesh.points * [1.0, -1.0, 1.0], mesh.faces[:, ::-1])


def web_blank(web: Plane, top: Cut, bottom: Cut) -> Mesh:
    """The web as it is cut, with what thickens it at a joint: its bevels, its taper, its ends at the rib planes.

    Where the saw is set anew the edge steps over a fiftieth of a millimetre, or over a quarter of what it steps by.
    """
    survey = top.survey
    n = survey.n[..., [0, -1]]
    return _solid(web, survey, n, bottom.layers(n), top.layers(n))


def filler(web: Plane, cut: Cut) -> Mesh | None:
    """What fills the gap between one edge and its seat; None where that is less than `LEAST` on the average.

    A film `FILM` thick keeps it in one piece where edge and seat touch. For that, and for the corners that facets cut
    off a crown, its thickness is scaled (by a percent or so where the gap is small) to keep the volume `cut.filler`.
    """
    survey, up = cut.survey, 1.0 if cut.side == "top" else -1.0
    area = float(survey.weight[cut.side].sum())
    if cut.filler < LEAST * area:
        return None
    tau = lobatto(survey.n.shape[-1])[0]
    read = BarycentricInterpolator(tau, np.eye(len(tau)))(_ACROSS).T
    n, seat = survey.n @ read, survey.seat[cut.side] @ read
    edge_line = cut.layers(n)
    gap = np.maximum(up * (seat - edge_line), 0.0)

    def filled(gap: Array) -> Mesh:
        sheets = edge_line, edge_line + up * (FILM + gap)
        return _solid(web, survey, n, *(sheets if up > 0.0 else sheets[::-1]))

    film, whole = filled(np.zeros_like(gap)).volume, filled(gap).volume
    return filled(gap * round((cut.filler - film) / (whole - film), 9))


def _solid(web: Plane, survey: Survey, n: Array, low: Array, high: Array) -> Mesh:
    """Solid between two sheets of heights (C, 3, K) over the survey's places and `n` (C, 3, K), cut by the ribs."""
    s, keep = _rows(survey, [low, high])
    return between(*(web.point(*_to_ribs(web, survey, s, keep, n, h)) for h in (low, high)))


def _rows(survey: Survey, sheets: Sequence[Array]) -> tuple[Array, NDArray[np.bool_]]:
    """Places s (C, 3) of the rows, and which of them are wanted.

    A cell's end is the next one's start, unless a sheet steps there: then it comes just before it. The short cells at a
    crease of the skin, which may be a hundredth of a millimetre long, have none of their own.
    """
    s = survey.s.copy()
    keep = np.repeat(survey.length()[:, None] > _LEAST_ROW, 3, axis=1)
    rise = np.max([np.abs(h[:-1, 2] - h[1:, 0]).max(axis=-1) for h in sheets], axis=0)
    steps = rise > FILM
    keep[:-1, 2] = steps
    wide = np.minimum(np.maximum(_STEP, rise / _STEEP), survey.length()[:-1] / 4.0)
    s[:-1, 2] -= np.where(steps, wide, 0.0)
    first = max(float(v.max()) for v in survey.starts.values()) + _CLEAR
    last = min(float(v.min()) for v in survey.stops.values()) - _CLEAR
    return s, keep & (s > first) & (s < last)


def _to_ribs(
    web: Plane, survey: Survey, s: Array, keep: NDArray[np.bool_], n: Array, h: Array
) -> tuple[Array, Array, Array]:
    """Places (s, h, n), each (R, K), of a sheet's rows, the first and the last of them in the rib planes."""
    inner = np.broadcast_to(s[..., None], h.shape)[keep], h[keep], n[keep]
    layers = n[[0, -1], [0, 2]]
    first, last = zip(*rib_crossing(web, np.array(web.ends)[:, None], survey.s, h, layers), layers, strict=True)
    s_, h_, n_ = (np.concatenate([a[None], v, b[None]]) for a, v, b in zip(first, inner, last, strict=True))
    return s_, h_, n_


def strip(
    loft: Loft, web: Plane, side: Side, *, width: float, outer: Along, inner: Along, stop: float | None = None
) -> Mesh:
    """A strip that lies on an edge of the web, about n = 0, from the inner rib plane to `stop` or the outer one.

    Parameters
    ----------
    width
        Across the web, mm.
    outer, inner
        How deep under the skin's inside its two faces lie along s, mm.
    stop
        Place s of its outer end; the web's outer rib plane unless given.
    """
    middle = np.linspace(0.0, web.length, 2 + int(web.length / _APART))
    rise = np.diff(edge(loft, web, middle[:, None], width * _ON_STRIP[[0, -1]], side, outer(middle)[:, None]).h)[:, 0]
    across = Along(middle, width / np.hypot(1.0, rise / width))  # a strip on a bevel covers less of the thickness
    ends = np.stack(
        [
            end_places(loft, web, float(across(at)) * _ON_STRIP, side, depth(at))
            for at in (0.0, web.length)
            for depth in (outer, inner)
        ]
    )
    starts, stops = ends[:2, 0], ends[2:, 1]
    if stop is not None:
        stops = np.full_like(stops, stop)
    s = _strip_rows(loft, web, side, (starts.max() + _CLEAR, stops.min() - _CLEAR), across, (outer, inner))
    sheets = []
    for depth, first, last in zip((outer, inner), starts, stops, strict=True):
        places = np.concatenate([first[None], s, last[None]])
        n = across(places) * _ON_STRIP
        sheets.append((places, edge(loft, web, places, n, side, depth(places)).h, n))
    low, high = sheets[::-1] if side == "top" else sheets
    high = high[0], np.maximum(high[1], low[1] + FILM), high[2]
    return between(web.point(*low), web.point(*high))


def _strip_rows(
    loft: Loft, web: Plane, side: Side, ends: tuple[float, float], across: Along, faces: tuple[Along, Along]
) -> Array:
    """Places s (R, K) of a strip's rows, one along each crease of the skin and at each corner of its two faces."""
    kinks = crossings(
        loft,
        web,
        side,
        n=lambda s: across(s)[:, None] * _ON_STRIP,
        depth=lambda s: np.mean([face(s) for face in faces], axis=0),
    )
    straight = np.concatenate([ends, *(face.s for face in faces)])
    first, last, *level = np.tile(straight[:, None], len(_ON_STRIP))
    corners = np.array([*level, *kinks])
    return spread(first, last, corners, longest=_APART, least=_LEAST_ROW)
