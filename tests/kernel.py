"""Edge curves and volumes from a CAD kernel and a mesh kernel, sharing no code with the program.

Everything here is derived afresh from the design's formulas: nothing of `wrywing` is imported. Lengths in mm,
`Wing.washout` and `Web.cant` in degrees; `side` is +1 for the upper and -1 for the lower surface.

How to call::

    import kernel

    web = kernel.Web(cant=4.0)                     # 0..1800, 30 % chord, 6.35 mm unless stated
    text = kernel.wing_file_text(kernel.NASA_WING, web)                 # the same wing as a wing file
    length = kernel.frame(kernel.NASA_WING, web).length
    s = np.linspace(20, length - 20, 12)                                # (S,)
    n = np.array([-1, 0, 1]) * web.thickness / 2                        # (M,) front, middle, rear
    h_top, h_bottom = kernel.reference_edges(kernel.NASA_WING, web, s, n)   # (S, M) each, Open CASCADE
    h_top, h_bottom = kernel.brute_edges(kernel.NASA_WING, web, s, n)       # (S, M) each, triangles and lines

    inner = kernel.solid_between(s, n, inner_bottom, inner_top)         # arrays (S, M) from whoever calls
    solid = kernel.solid_between(s, n, cut_bottom, cut_top)
    filler = kernel.volume_outside(inner, solid)                        # mm^3
    fouling = kernel.volume_outside(solid, inner)                       # zero, or the web cuts the skin

`reference_edges` needs OCP: tests that call it begin with `pytest.importorskip("OCP")`. The outer surface
becomes one interpolating B-spline patch between every two stations (the washout law is only C1 there) and
between `u_breaks`; `Geom_OffsetSurface` moves it inwards along its normal; `GeomAPI_IntSS` cuts it with the
planes n = constant. Patches and cuts are cached: 0.8 s for the first web of a wing, 0.4 s for another cant,
then 0.1 ms a height. It agrees with `brute_edges` to 0.00015 mm (what the triangles leave), and moves by less
than 0.00001 mm when the patches are refined. A place off the wing (on a swept web the corners at both ends)
raises ValueError.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise
from typing import Any, NamedTuple

import manifold3d
import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.interpolate import PchipInterpolator
from scipy.optimize import brentq

Array = NDArray[np.float64]
Section = Callable[[Array, int], tuple[Array, Array]]

UPPER, LOWER = 1, -1
GRID = (24, 16)  # points of a B-spline patch along the chord and along the span
PATCH_TOLERANCE = 0.0005  # mm, how far a patch may stand off the surface it stands for
SEAM = 1e-4  # mm, neighbouring pieces of one edge curve may miss each other by this much

# Published: NASA/TP-2016-219072, geometric twist in degrees, nose up, every 5 % of the semi-span.
NASA_TWIST = (
    *(8.3274, 8.5524, 8.7259, 8.8441, 8.9030, 8.8984, 8.8257, 8.6801, 8.4565, 8.1492, 7.7522),
    *(7.2592, 6.6634, 5.9579, 5.1362, 4.1927, 3.1253, 1.9394, 0.6589, -0.6417, -1.6726),
)


def naca_2412(u: Array, side: int) -> tuple[Array, Array]:
    """NACA 2412, open trailing edge, over the camber line's station u (published: NACA Report 460)"""
    camber, crest, thick = 0.02, 0.4, 0.12
    half = 5 * thick * (0.2969 * np.sqrt(u) - 0.1260 * u - 0.3516 * u**2 + 0.2843 * u**3 - 0.1015 * u**4)
    fore = u < crest
    scale = camber / np.where(fore, crest, 1 - crest) ** 2
    line = scale * (np.where(fore, 0, 1 - 2 * crest) + 2 * crest * u - u**2)
    slope = np.arctan(2 * scale * (crest - u))
    return u - side * half * np.sin(slope), line + side * half * np.cos(slope)


@dataclass(frozen=True)
class Wing:
    """A panel of one section: chord, le and z straight between stations, washout by PCHIP."""

    y: tuple[float, ...]
    chord: tuple[float, ...]
    le: tuple[float, ...]
    z: tuple[float, ...]
    washout: tuple[float, ...]
    skin: float = 0.8
    twist_axis: float = 0.25
    section: Section = naca_2412
    airfoil: str = "naca 2412"
    u_breaks: tuple[float, ...] = (
        0.15,
        0.4,
        0.6,
    )  # band around the web; NACA 2412 has a curvature jump at 0.4


@dataclass(frozen=True)
class Web:
    ends: tuple[float, float] = (0.0, 1800.0)
    line: tuple[float, float] = (0.30, 0.30)
    cant: float = 0.0
    thickness: float = 6.35


def _nasa_wing() -> Wing:
    """As published: span 12.3 ft, chord 15.75 in to 3.94 in, 24 degrees of sweep, 2.5 of dihedral."""
    y = np.linspace(0, 12.3 / 2 * 304.8, 21)
    chord = 25.4 * np.linspace(15.75, 3.94, 21)
    le, z = y * np.tan(np.radians(24)), y * np.tan(np.radians(2.5))
    ys, chords, les, zs = (tuple(row.tolist()) for row in (y, chord, le, z))
    return Wing(ys, chords, les, zs, tuple(-v for v in NASA_TWIST))


NASA_WING = _nasa_wing()  # NACA 2412 in place of its own sections: only the twist matters here


def wing_file_text(wing: Wing, web: Web, *, edge: str = "full bevel", bond: float = 0.3) -> str:
    """Write the same wing and web as a wing file; numbers keep every digit."""
    rows = zip(wing.y, wing.chord, wing.le, wing.z, wing.washout, strict=True)
    keys = ("y", "chord", "le", "z", "washout")
    stations = "\n".join(
        f'[[wing.stations]]\nairfoil = "{wing.airfoil}"\n'
        + "\n".join(f"{key} = {float(value)}" for key, value in zip(keys, row, strict=True))
        for row in rows
    )
    return f"""\
name = "Reference wing"
units = "mm"

[wing]
twist_axis = {float(wing.twist_axis)}
planform = "straight"
{stations}
[wing.washout]
law = "smooth"
[skin]
thickness = {float(wing.skin)}
[web]
ends = [{float(web.ends[0])}, {float(web.ends[1])}]
line = [{float(web.line[0])}, {float(web.line[1])}]
thickness = {float(web.thickness)}
cant = {float(web.cant)}
edge = "{edge}"
bond = {float(bond)}
foam = "pvc foam 80"
filler = "microballoon paste"
"""


def _placed(wing: Wing, p: ArrayLike, q: ArrayLike, y: ArrayLike) -> Array:
    """Section points (p, q) at rib y in wing axes, shape (..., 3) (design, section 2)."""
    p, q, y = np.broadcast_arrays(*(np.asarray(v, dtype=float) for v in (p, q, y)))
    c, le, z0 = (np.interp(y, wing.y, row) for row in (wing.chord, wing.le, wing.z))
    w = PchipInterpolator(wing.y, np.radians(wing.washout))(y)
    a = wing.twist_axis
    x = le + a * c + c * ((p - a) * np.cos(w) - q * np.sin(w))
    z = z0 + c * ((p - a) * np.sin(w) + q * np.cos(w))
    return np.stack([x, y, z], axis=-1)


def outer(wing: Wing, u: ArrayLike, y: ArrayLike, side: int) -> Array:
    """Outer surface, shape (..., 3); u and y broadcast."""
    return _placed(wing, *wing.section(np.asarray(u, dtype=float), side), y)


class Frame(NamedTuple):
    """The web's own axes in wing axes: s along the web line, h up in the plane, n aft."""

    origin: Array
    s: Array
    h: Array
    n: Array
    length: float

    def to_sheet(self, xyz: Array) -> Array:
        """Wing axes to (s, h, n), shape (..., 3)."""
        return (xyz - self.origin) @ np.stack([self.s, self.h, self.n], axis=-1)


def frame(wing: Wing, web: Web) -> Frame:
    inner_end, outer_end = (_placed(wing, f, 0, y) for f, y in zip(web.line, web.ends, strict=True))
    length = float(np.linalg.norm(outer_end - inner_end))
    s = (outer_end - inner_end) / length
    up = np.array([0.0, 0.0, 1.0])
    up = up - (up @ s) * s
    up /= np.linalg.norm(up)
    aft = np.cross(s, up)
    k = np.radians(web.cant)
    return Frame(inner_end, s, up * np.cos(k) + aft * np.sin(k), aft * np.cos(k) - up * np.sin(k), length)


# ---------------------------------------------------------------------------- Open CASCADE


def reference_edges(
    wing: Wing, web: Web, s: ArrayLike, n: ArrayLike, *, grid: tuple[int, int] = GRID
) -> tuple[Array, Array]:
    """h_top and h_bottom at every s (S,) on every plane n (M,): two arrays (S, M), mm, from Open CASCADE."""
    places, planes = np.atleast_1d(s).astype(float), np.atleast_1d(n).astype(float)
    top, bottom = (
        np.stack([_edge_on_plane(wing, web, side, float(n0), places, grid) for n0 in planes], axis=1)
        for side in (UPPER, LOWER)
    )
    return top, bottom


def _edge_on_plane(wing: Wing, web: Web, side: int, n: float, places: Array, grid: tuple[int, int]) -> Array:
    axes, pieces = frame(wing, web), edge_pieces(wing, web, side, n, grid)
    return np.array([_height(axes, pieces, s, n) for s in places])


def _height(axes: Frame, pieces: list[Any], s: float, n: float) -> float:
    def along(t: float, curve: Any) -> float:
        return float((np.array(curve.Value(t).Coord()) - axes.origin) @ axes.s) - s

    for curve in pieces:
        ends = [curve.FirstParameter(), curve.LastParameter()]
        misses = [along(t, curve) for t in ends]
        if misses[0] * misses[1] < 0:
            t = brentq(along, ends[0], ends[1], args=(curve,), xtol=1e-12)
        elif min(map(abs, misses)) < SEAM:
            t = ends[int(abs(misses[1]) < abs(misses[0]))]
        else:
            continue
        return float((np.array(curve.Value(t).Coord()) - axes.origin) @ axes.h)
    raise ValueError(f"the plane n = {n} meets no inner surface at s = {s}")


@lru_cache(maxsize=256)
def edge_pieces(wing: Wing, web: Web, side: int, n: float, grid: tuple[int, int] = GRID) -> list[Any]:
    """Curves (Geom_Curve, wing axes) in which the plane n = constant cuts the inner surface."""
    from OCP.Geom import Geom_Plane
    from OCP.GeomAPI import GeomAPI_IntSS
    from OCP.gp import gp_Dir, gp_Pnt

    axes = frame(wing, web)
    plane = Geom_Plane(gp_Pnt(*(axes.origin + n * axes.n).tolist()), gp_Dir(*axes.n.tolist()))
    pieces = []
    for patch in inner_patches(wing, side, grid):
        cut = GeomAPI_IntSS(patch, plane, 1e-7)
        if not cut.IsDone():
            raise ArithmeticError(f"the kernel could not cut the inner surface at n = {n}")
        pieces += [cut.Line(k + 1) for k in range(cut.NbLines())]
    return pieces


@lru_cache(maxsize=32)
def inner_patches(wing: Wing, side: int, grid: tuple[int, int] = GRID) -> list[Any]:
    """The inner surface (Geom_OffsetSurface), one patch for each station bay and each bay of `u_breaks`."""
    from OCP.Geom import Geom_OffsetSurface

    # u runs aft and y outwards, so the kernel's normal points up on both sides
    return [
        Geom_OffsetSurface(_outer_patch(wing, side, u_bay, y_bay, grid), -side * wing.skin)
        for y_bay in pairwise(wing.y)
        for u_bay in pairwise(wing.u_breaks)
    ]


def _outer_patch(
    wing: Wing, side: int, u_bay: tuple[float, float], y_bay: tuple[float, float], grid: tuple[int, int]
) -> Any:
    from OCP.GeomAPI import GeomAPI_PointsToBSplineSurface, GeomAPI_ProjectPointOnSurf
    from OCP.gp import gp_Pnt

    try:
        from OCP.collections import Array2_gp_Pnt
    except ImportError:  # before Open CASCADE 8
        from OCP.TColgp import TColgp_Array2OfPnt as Array2_gp_Pnt

    u, y = np.linspace(*u_bay, grid[0]), np.linspace(*y_bay, grid[1])
    points = Array2_gp_Pnt(1, grid[0], 1, grid[1])
    for (i, j), point in zip(np.ndindex(grid), outer(wing, u[:, None], y, side).reshape(-1, 3), strict=True):
        points.SetValue(i + 1, j + 1, gp_Pnt(*point.tolist()))
    builder = GeomAPI_PointsToBSplineSurface()
    builder.Interpolate(points)
    surface = builder.Surface()

    between = [(v[1:] + v[:-1])[[0, len(v) // 2, -1]] / 2 for v in (u, y)]  # worst in the outermost cells
    for point in outer(wing, between[0][:, None], between[1], side).reshape(-1, 3):
        miss = GeomAPI_ProjectPointOnSurf(gp_Pnt(*point.tolist()), surface).LowerDistance()
        if miss > PATCH_TOLERANCE:
            raise ArithmeticError(f"a patch between ribs {y_bay} stands {miss:.6f} mm off the surface")
    return surface


# ---------------------------------------------------------------------------- brute force


def brute_edges(
    wing: Wing, web: Web, s: ArrayLike, n: ArrayLike, *, grid: tuple[int, int] = (241, 641)
) -> tuple[Array, Array]:
    """As `reference_edges`, by lines along h shot at a dense triangulated inner surface; no kernel."""
    places, planes = np.atleast_1d(s).astype(float), np.atleast_1d(n).astype(float)
    targets = [(float(a), float(b)) for a in places for b in planes]
    heights = []
    for side in (UPPER, LOWER):
        corners = frame(wing, web).to_sheet(_inner_triangles(wing, side, grid))
        low, high = corners.min(axis=1), corners.max(axis=1)
        heights.append([_shoot(corners, low, high, a, b) for a, b in targets])
    top, bottom = np.array(heights).reshape(2, len(places), len(planes))
    return top, bottom


def _inner_triangles(wing: Wing, side: int, grid: tuple[int, int]) -> Array:
    """Corners (T, 3, 3): outer points less the skin along normals from central differences."""
    du, dy = 1e-5, 1e-2
    u = np.linspace(wing.u_breaks[0] + du, wing.u_breaks[-1] - du, grid[0])[:, None]
    y = np.linspace(wing.y[0] + dy, wing.y[-1] - dy, grid[1])
    aft = outer(wing, u + du, y, side) - outer(wing, u - du, y, side)
    out = outer(wing, u, y + dy, side) - outer(wing, u, y - dy, side)
    normal = side * np.cross(aft, out)
    normal /= np.linalg.norm(normal, axis=-1, keepdims=True)
    v = outer(wing, u, y, side) - wing.skin * normal
    a, b, c, d = v[:-1, :-1], v[1:, :-1], v[1:, 1:], v[:-1, 1:]
    return np.concatenate([np.stack(t, axis=2).reshape(-1, 3, 3) for t in ((a, b, c), (a, c, d))])


def _shoot(corners: Array, low: Array, high: Array, s: float, n: float) -> float:
    near = (low[:, 0] <= s) & (s <= high[:, 0]) & (low[:, 2] <= n) & (n <= high[:, 2])
    a, b, c = np.moveaxis(corners[near], 1, 0)
    flat = np.stack([b - a, c - a], axis=-1)[:, [0, 2], :]
    weights = np.linalg.solve(flat, (np.array([s, n]) - a[:, [0, 2]])[..., None])[..., 0]
    hit = (weights >= -1e-9).all(axis=1) & (weights.sum(axis=1) <= 1 + 1e-9)
    if not hit.any():
        raise ValueError(f"the line s = {s}, n = {n} meets no inner surface")
    heights = a[hit, 1] + (weights[hit] * np.stack([b - a, c - a], axis=1)[hit, :, 1]).sum(axis=1)
    return float(heights.mean())


# ---------------------------------------------------------------------------- mesh kernel


def solid_between(s: ArrayLike, n: ArrayLike, h_lower: ArrayLike, h_upper: ArrayLike) -> manifold3d.Manifold:
    """Closed solid between two grids of heights.

    Parameters
    ----------
    s : (S,) or (S, M)
        Ascending along S; two-dimensional where each n-layer starts and stops elsewhere.
    n : (M,) or (S, M)
        Ascending along M.
    h_lower, h_upper : (S, M)
        In the frame (s, h, n). Every grid cell becomes two triangles, so refine until volumes agree.
    """
    lower, upper = np.asarray(h_lower, dtype=float), np.asarray(h_upper, dtype=float)
    rows, columns = shape = lower.shape
    along = np.asarray(s, dtype=float)
    along = np.broadcast_to(along[:, None] if along.ndim == 1 else along, shape)
    across = np.broadcast_to(np.asarray(n, dtype=float), shape)
    points = np.concatenate([np.stack([along, h, across], axis=-1).reshape(-1, 3) for h in (lower, upper)])

    index = np.arange(rows * columns).reshape(shape)
    a, b, c, d = (v.ravel() for v in (index[:-1, :-1], index[1:, :-1], index[1:, 1:], index[:-1, 1:]))
    down = np.concatenate([np.stack([a, b, c], axis=1), np.stack([a, c, d], axis=1)])  # s x n points down
    rim = np.concatenate([index[:-1, 0], index[-1, :-1], index[:0:-1, -1], index[0, :0:-1]])
    after, lift = np.roll(rim, -1), rows * columns
    walls = [np.stack(t, axis=1) for t in ((after, rim, rim + lift), (after, rim + lift, after + lift))]
    faces = np.concatenate([down, down[:, ::-1] + lift, *walls]).astype(np.uint64)
    solid = manifold3d.Manifold(manifold3d.Mesh64(points, faces))
    if solid.status() != manifold3d.Error.NoError or solid.volume() <= 0:
        raise ValueError(f"no closed solid between the two grids: {solid.status()}, {solid.volume()} mm^3")
    return solid


def volume_outside(solid: manifold3d.Manifold, cutter: manifold3d.Manifold) -> float:
    """Volume of `solid` minus `cutter`, mm^3: inner solid minus web solid is what filler must fill."""
    return float((solid - cutter).volume())
