"""Cores: the skin's inside in rib planes, the straight cut, bays, volume."""

from __future__ import annotations

from itertools import pairwise
from pathlib import Path

import kernel
import manifold3d
import numpy as np
import pytest
import trimesh
from numpy.testing import assert_allclose
from scipy.integrate import quad
from scipy.spatial import cKDTree
from wings import Bent, ellipse, loft, slab

from wrywing.geom import bays, core, naca, profile, straight, washout, web
from wrywing.geom.core import NoFoam, Region
from wrywing.geom.seat import Along, constant
from wrywing.shop import job as jobs

EXAMPLE = Path(kernel.__file__).parent.parent / "examples" / "saltpan.toml"
T = profile.symmetric(np.linspace(0.0, 1.0, 201))


@pytest.fixture(scope="module")
def nasa(tmp_path_factory):
    path = tmp_path_factory.mktemp("nasa") / "nasa.toml"
    path.write_text(kernel.wing_file_text(kernel.NASA_WING, kernel.Web()))
    return jobs.load(path)


def region(of, kind, ends=(0.0, 1800.0), **more):
    plane = of.plane_at(0.0)
    side = {"nose": -1.0, "aft": 1.0}.get(kind)
    if side is None:
        return Region(kind, ends, **more)
    return Region(kind, ends, plane, constant(side * (of.record.web.thickness / 2.0 + 0.3)), **more)


# --- the skin's inside in a rib plane --------------------------------------------------------------


def test_points_lie_on_the_cad_kernels_offset_surface(nasa):
    pytest.importorskip("OCP")
    from OCP.GeomAPI import GeomAPI_ProjectPointOnSurf
    from OCP.gp import gp_Pnt

    for side in (kernel.UPPER, kernel.LOWER):
        patches = kernel.inner_patches(kernel.NASA_WING, side)
        for y in (130.0, 777.0, 1651.0):
            t = side * np.sqrt([0.2, 0.35, 0.55])
            points, _ = profile.inner(nasa.loft, t, y)
            assert_allclose(points[:, 1], y, atol=1e-9)
            for point in points:
                near = (GeomAPI_ProjectPointOnSurf(gp_Pnt(*point.tolist()), patch) for patch in patches)
                assert min(p.LowerDistance() for p in near if p.NbPoints()) < 2e-4


def test_inside_of_a_swept_slab():
    # plane trigonometry: a plane tilted by e across the span leaves skin / cos e in a rib plane
    of = loft(slab(), [0, 400], z=[0, 40], skin=2.0)
    points, _ = profile.inner(of, 0.5, 100.0)
    assert_allclose(points[2] - 10.0, 0.05 * 200 - 2.0 / np.cos(np.arctan(0.1)), atol=1e-9)


def test_a_nose_sharper_than_the_skin_is_not_folded():
    of = profile.profile(loft(naca.naca("0006"), [0, 400], chord=120.0, skin=1.5), 200.0, T)
    crossing = of.points[np.abs(of.t) < 0.06]
    assert np.ptp(crossing, axis=0).max() < 1e-9  # one point where the two sides meet
    assert np.all(np.diff(of.points[of.t >= 0.0][:, 0]) >= 0.0)


def test_a_thin_tail_is_padded_about_its_middle():
    of = profile.profile(loft(naca.naca("2410"), [0, 400], skin=1.0), 200.0, T)
    padded = of.padded(1.5)
    thin = of.t[len(T) // 2 :] > of.tail(1.5)
    assert thin.any()
    assert_allclose(padded.depth()[thin], 1.5, atol=1e-9)
    assert_allclose((padded.points + padded.points[::-1])[:, 1], (of.points + of.points[::-1])[:, 1], atol=1e-9)
    assert_allclose(padded.points[of.tail(1.5) ** 2 > T**2], of.points[of.tail(1.5) ** 2 > T**2])


# --- the straight cut ------------------------------------------------------------------------------


def parabolic(a, knots, **more):
    """Constant chord 200 about the quarter chord, flat sides, washout growing as y squared."""
    return loft(slab(), knots, twist=Bent(lambda y: a * y * y, lambda y: 2.0 * a * y, knots), **more)


@pytest.mark.parametrize("skin", [1e-9, 1.2])
def test_straight_cut_of_a_parabolic_washout(skin):
    a, length = 2e-8, 400.0
    of = parabolic(a, [0.0, 1000.0], skin=skin)
    for p in (0.001, 0.999):
        # the middle of a chord of a parabola: arm w'' L^2 / 8, below the curve where that bulges up
        want = -(0.25 - p) * 200.0 * 2.0 * a * length**2 / 8.0
        for side in (1.0, -1.0):
            t = side * np.sqrt(p)
            found = straight.proud(of, (300.0, 700.0), t, 500.0)
            assert float(found) == pytest.approx(side * want, rel=0.01)
            half = straight.proud(of, (300.0, 500.0), t, 400.0)
            assert float(found / half) == pytest.approx(4.0, rel=0.01)


def test_no_error_without_twist():
    of = loft(naca.naca("2412"), [0, 700], chord=[300, 140], le=[0, 210], z=[0, 35], skin=1.3)
    for t in (-0.9, -0.3, 0.0, 0.2, 0.7):
        assert_allclose(straight.proud(of, (50.0, 620.0), t, np.linspace(60.0, 610.0, 7)), 0.0, atol=1e-9)
    sampled = straight.grid(of, Region("whole", (50.0, 620.0)), rows=61)
    assert abs(straight.worst(of, sampled, (50.0, 620.0)).off) < 1e-9


def triangles(of, t, y):
    """Triangles (k, 3, 3) of the skin's inside, its normals from central differences."""
    d, e = 1e-6, 1e-3
    aft = of.outer(t[:, None] + d, y)[0] - of.outer(t[:, None] - d, y)[0]
    out = of.outer(t[:, None], y + e)[0] - of.outer(t[:, None], y - e)[0]
    normal = np.cross(aft, out)
    v = of.outer(t[:, None], y)[0] - 0.8 * normal / np.linalg.norm(normal, axis=-1, keepdims=True)
    a, b, c, d = v[:-1, :-1], v[1:, :-1], v[1:, 1:], v[:-1, 1:]
    return v, np.concatenate([np.stack(s, axis=2).reshape(-1, 3, 3) for s in ((a, b, c), (a, c, d))])


@pytest.mark.parametrize("kind", ["nose", "aft"])
def test_straight_cut_against_a_mesh(nasa, kind):
    bay = (400.0, 620.0)
    wanted = region(nasa, kind, bay)
    sampled = straight.grid(nasa.loft, wanted, rows=61)
    found = straight.worst(nasa.loft, sampled, bay)
    side = np.sign(found.t)
    limit = float(np.abs(sampled.bounds[:, int(side > 0.0)]).min()) - 0.002
    first, last = (0.0, limit) if kind == "nose" else (0.7, limit)
    t, y = np.unique(side * np.linspace(first, last + 0.002, 700)), np.linspace(bay[0] - 2.0, bay[1] + 2.0, 180)
    grid, mesh = triangles(nasa.loft, t, y)
    at = np.flatnonzero(np.abs(t) <= limit)[::6]
    ends = [np.array([[np.interp(end, row[:, 1], row[:, i]) for i in (0, 2)] for row in grid[at]]) for end in bay]
    share = np.linspace(0.05, 0.95, 46)
    flat = ends[0][:, None] + share[:, None] * (ends[1] - ends[0])[:, None]
    points = np.insert(flat.reshape(-1, 2), 1, np.tile(bay[0] + share * (bay[1] - bay[0]), len(at)), axis=1)
    near = cKDTree(mesh.mean(axis=1)).query(points, k=12)[1]
    close = trimesh.triangles.closest_point(
        mesh[near].reshape(-1, 3, 3), np.repeat(points, near.shape[1], axis=0)
    ).reshape(len(points), -1, 3)
    distance = np.linalg.norm(close - points[:, None], axis=2).min(axis=1)
    assert distance.max() == pytest.approx(abs(found.off), rel=0.02)


# --- bays ------------------------------------------------------------------------------------------


def divided(of, wanted, tolerance, most=20, longest=float("inf"), rows=241):
    sampled = straight.grid(of, wanted, rows=rows)
    divider = bays.Divider(wanted.ends, sampled.parts, sampled.table, sampled.spread, longest)

    def exact(bounds):
        return max(abs(straight.worst(of, sampled, pair).off) for pair in pairwise(bounds))

    return sampled, divider, exact, divider.fewest(tolerance, most, exact)


def errors(sampled, places, hopeless=2.0):
    """Errors (k, k) of all bays between the places."""
    cost = np.full((len(places),) * 2, np.inf)
    for i, a in enumerate(places):
        for j in range(i + 1, len(places)):
            cost[i, j] = sampled.error(a, places[j])
            if cost[i, j] > hopeless and j > i + 30:
                break
    return cost


def searched(cost, count):
    """Least largest error of `count` bays with bounds at any of the places, by trying every way (Bellman 1961)."""
    best = cost[0]
    for _ in range(count - 1):
        best = np.maximum(best[:, None], cost).min(axis=0)
    return best[-1]


@pytest.mark.parametrize("kind", ["nose", "aft"])
def test_fewest_bays_of_the_nasa_wing(nasa, kind):
    wanted = region(nasa, kind)
    sampled, _, exact, bounds = divided(nasa.loft, wanted, 0.2)
    count = len(bounds) - 1
    cost = errors(sampled, np.linspace(*wanted.ends, 101))
    assert exact(bounds) <= 0.2
    assert exact(bounds) < searched(cost, count) * 1.002
    # bounds at the places are at most half a step, 9 mm, off better ones
    assert searched(cost, count - 1) * 0.9 > 0.2


def test_fewest_bays_of_an_example():
    of = jobs.load(EXAMPLE)
    made = of.cores[-1]
    sampled = straight.grid(of.loft, made.region)
    places = np.union1d(np.linspace(*made.region.ends, 81), of.loft.knots[1:-1])
    tolerance = made.stated.tolerance
    assert abs(made.worst.off) <= tolerance
    assert searched(errors(sampled, places), len(made.bays) - 1) > tolerance


def test_bays_have_equal_errors():
    law = Bent(lambda y: 1.5e-8 * y * y, lambda y: 3e-8 * y, [0.0, 1200.0])
    of = loft(ellipse(0.05), [0.0, 1200.0], twist=law)
    sampled, _, _, bounds = divided(of, Region("whole", (0.0, 1200.0)), 0.1)
    errors = [abs(straight.worst(of, sampled, pair).off) for pair in pairwise(bounds)]
    assert len(errors) > 1
    assert_allclose(errors, np.mean(errors), rtol=0.01)
    assert_allclose(np.diff(bounds), 1200.0 / len(errors), rtol=0.01)


def test_bays_of_a_reversing_washout_are_no_worse_than_any_among_even_places():
    # with 3 bays or more their errors have many local minima
    law = washout.smooth([0.0, 300.0, 500.0, 1000.0], np.radians([0.0, 4.0, -2.0, 6.0]))
    of = loft(naca.naca("2412"), [0, 1000], chord=[300, 200], le=[0, 100], twist=law)
    plane = web.plane(of, ends=(0.0, 980.0), line=(0.3, 0.3))
    wanted = Region("aft", (0.0, 980.0), plane, constant(3.3), least=1.2)
    sampled = straight.grid(of, wanted)
    divider = bays.Divider(wanted.ends, sampled.parts, sampled.table, sampled.spread)
    cost = errors(sampled, np.linspace(0.0, 980.0, 71), np.inf)
    for count in (3, 4, 5):
        found = max(sampled.error(*pair) for pair in pairwise(divider.into(count)))
        assert found < searched(cost, count) * 1.001


def test_a_table_of_errors_is_their_list():
    of = loft(naca.naca("2412"), [0, 600], chord=[300, 200], twist=washout.smooth([0, 200, 600], [0.0, 0.05, 0.1]))
    plane = web.plane(of, ends=(0.0, 600.0), line=(0.3, 0.3))
    for kind, side in (("nose", -1.0), ("aft", 1.0)):
        face = Along(np.array([100.0, 200.0]), side * np.array([6.0, 3.0]))
        sampled = straight.grid(of, Region(kind, (0.0, 600.0), plane, face))
        places = np.linspace(0.0, 600.0, 13)
        table = sampled.table(places)
        for i, j in zip(*np.triu_indices(13, 1), strict=True):
            assert table[i, j] == pytest.approx(sampled.error(places[i], places[j]), rel=0.02, abs=0.002)


def test_no_bay_is_longer_than_longest():
    of = loft(naca.naca("2412"), [0, 1000], chord=[300, 200], twist=[0, 1e-9])
    *_, bounds = divided(of, Region("whole", (0.0, 1000.0)), 0.5, longest=300.0, rows=61)
    assert len(bounds) == 5
    assert max(np.diff(bounds)) <= 300.0 + 1e-6


def test_too_few_bays_are_refused(nasa):
    with pytest.raises(bays.TooFew) as refused:
        divided(nasa.loft, region(nasa, "aft"), 0.05, most=4)
    assert refused.value.reached > 0.05


# --- the face beside a thickened web ---------------------------------------------------------------

TAPER = Along(np.array([100.0, 160.0]), np.array([6.0, 3.0]))


def beside(kind, taper=TAPER, **more):
    """An untwisted panel of ellipses, 200 by 20 mm; its web is 3 mm to either side, and 6 mm at one end."""
    cant = more.pop("cant", 0.2)
    of = loft(ellipse(0.05), [0, 600], skin=1e-9, **more)
    plane = web.plane(of, ends=(0.0, 600.0), line=(0.4, 0.4), cant=cant)
    side = 1.0 if kind == "aft" else -1.0
    return of, Region(kind, (0.0, 600.0), plane, Along(taper.s, side * taper.value), to=1.0 if kind == "nose" else 0.8)


@pytest.mark.parametrize("kind", ["nose", "aft"])
def test_straight_cut_beside_a_taper(kind):
    # by similar triangles: from 6 mm at s = 0 to 3 mm at s = b the cut is at 6 - 3 s / b
    of, wanted = beside(kind)
    sampled = straight.grid(of, wanted, rows=61)
    for b, at, off in ((160.0, 100.0, 3.0 * 100.0 / 160.0), (500.0, 160.0, -3.0 * (1.0 - 160.0 / 500.0))):
        found = straight.worst(of, sampled, (0.0, b))
        assert (found.side, round(found.y, 3)) == ("web", at)
        assert found.off == pytest.approx(off, abs=1e-6)
        assert sampled.error(0.0, b) == pytest.approx(abs(off), abs=1e-6)
    assert abs(straight.worst(of, sampled, (100.0, 160.0)).off) < 1e-6


@pytest.mark.parametrize("steep", [60.0, 5.0])
def test_a_core_gives_way_to_what_thickens_the_web(steep):
    # height between the skins, 40 sqrt(p (1 - p)) mm, times how far along the web the thickening has that n
    taper = Along(np.array([100.0, 100.0 + steep]), TAPER.value)
    for kind, side in (("nose", -1.0), ("aft", 1.0)):
        of, wanted = beside(kind, taper, cant=0.0)
        _, plain = beside(kind, constant(3.0), cant=0.0)

        def layer(n, side=side):
            p = (80.0 + side * n) / 200.0
            return 40.0 * np.sqrt(p * (1.0 - p)) * (100.0 + steep * (6.0 - n) / 3.0)

        less = core.solid(of, plain).volume - core.solid(of, wanted).volume
        assert less == pytest.approx(quad(layer, 3.0, 6.0)[0], rel=1e-3)


def test_a_swept_canted_cores_mesh_keeps_to_the_face():
    of, wanted = beside("nose", le=[0, 200])
    corners = core.solid(of, wanted, longest=40.0).points.reshape(-1, 162, 3)[:, [0, -1]]
    way = np.linspace(0.0, 1.0, 21)[:, None, None, None]
    out = (corners[:-1] + way * np.diff(corners, axis=0)).reshape(-1, 3) - wanted.web.origin
    assert_allclose(out @ wanted.web.n, wanted.face(out @ wanted.web.s), atol=0.003)


# --- volume ----------------------------------------------------------------------------------------


def test_volume_is_the_prismoidal_formulas():
    # V = L/6 (A1 + 4 Am + A2), exact for ruled sides: an untwisted taper
    of = loft(ellipse(0.06), [0, 600], chord=[240, 120], le=[0, 90], skin=1.5)
    wanted = Region("whole", (0.0, 600.0), to=0.8, least=0.1)
    areas = [
        trimesh.path.polygons.Polygon(core.ring(wanted, profile.profile(of, y, T), 401)).area for y in (0, 300, 600)
    ]
    assert core.solid(of, wanted).volume == pytest.approx(100.0 * (areas[0] + 4 * areas[1] + areas[2]), rel=5e-4)


@pytest.mark.parametrize("kind", ["nose", "aft", "whole"])
def test_mesh_is_closed_and_manifold_agrees(nasa, kind):
    mesh = core.solid(nasa.loft, region(nasa, kind))
    shape = trimesh.Trimesh(mesh.points, mesh.faces, process=False)
    assert shape.is_watertight
    assert shape.is_winding_consistent
    solid = manifold3d.Manifold(manifold3d.Mesh64(mesh.points, mesh.faces.astype(np.uint64)))
    assert solid.status() == manifold3d.Error.NoError
    finer = core.solid(nasa.loft, region(nasa, kind), longest=4.0)
    assert solid.volume() == pytest.approx(finer.volume, rel=2e-3)
    assert mesh.volume == pytest.approx(solid.volume(), rel=1e-9)


def test_nose_web_and_aft_make_the_whole(nasa):
    # manifold's boolean: the whole less a slab as thick as web and bond lines is nose and aft
    parts = [core.solid(nasa.loft, region(nasa, kind)).volume for kind in ("nose", "aft")]
    whole = core.solid(nasa.loft, region(nasa, "whole"))
    plane = nasa.plane_at(0.0)
    box = np.array([[s, h, n] for s in (-99.0, 2200.0) for h in (-99.0, 99.0) for n in (-3.475, 3.475)])
    slab = manifold3d.Manifold.hull_points(plane.point(*box.T))
    solid = manifold3d.Manifold(manifold3d.Mesh64(whole.points, whole.faces.astype(np.uint64)))
    assert (solid - slab).volume() == pytest.approx(sum(parts), rel=2e-3)


# --- nothing there ---------------------------------------------------------------------------------


def test_regions_without_foam():
    of = loft(naca.naca("0010"), [0, 500], chord=[200, 90])
    plane = web.plane(of, ends=(0.0, 500.0), line=(0.3, 0.3))
    inside = profile.profile(of, 250.0, T)
    with pytest.raises(NoFoam, match="ahead of the web's rear face"):
        core.limits(Region("aft", (0.0, 500.0), plane, constant(4.0), to=0.31), inside)
    with pytest.raises(NoFoam, match="misses the lower side"):
        core.limits(Region("nose", (0.0, 500.0), plane, constant(-60.0)), inside)
    thick = profile.profile(loft(naca.naca("0006"), [0, 500], chord=40.0, skin=1.3), 250.0, T)
    with pytest.raises(NoFoam, match="less than 1 mm"):
        core.limits(Region("whole", (0.0, 500.0)), thick)


def test_a_face_follows_a_thickened_web():
    of = loft(slab(), [0, 600], le=[0, 100], skin=1.0)
    plane = web.plane(of, ends=(0.0, 600.0), line=(0.4, 0.4))
    face = Along(np.array([100.0, 200.0]), np.array([6.0, 3.0]))
    line = profile.face_line(plane, face, 148.0)
    # a place on it, taken back to the web: its n is the face's at its s
    out = np.array([line[0, 0], 148.0, line[0, 1]]) - plane.origin
    assert float(out @ plane.n) == pytest.approx(float(face(out @ plane.s)), abs=1e-6)
    assert 100.0 < out @ plane.s < 200.0
