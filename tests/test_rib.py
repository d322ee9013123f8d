"""Ribs about a canted, swept web, and cradles that hold the panel at its washout."""

from __future__ import annotations

import kernel
import numpy as np
import pytest
import shapely
from kernel import NASA_WING
from wings import loft, section

from wrywing.geom import naca, rib, web
from wrywing.geom.rib import NoRib
from wrywing.geom.seat import constant
from wrywing.geom.slot import Cut, Faces, slot
from wrywing.shop import job as jobs

SWEEP = np.radians(27.0)


def panel(sweep=0.0, cant=0.0, sheet=7.0, twist=(0.0, 4.0)):
    of = loft(naca.naca("2412"), [0, 800], chord=[300, 200], le=[0, 800 * np.tan(sweep) + 0.3 * 100], twist=list(twist))
    plane = web.plane(of, ends=(50.0, 760.0), line=(0.3, 0.3), cant=cant)
    return of, Faces(plane, constant(-sheet / 2.0), constant(sheet / 2.0))


def test_slot_of_an_upright_unswept_web_is_the_sheet():
    _, faces = panel(twist=(0.0, 0.0))
    assert slot(faces, Cut((400.0, 400.0))).width == pytest.approx(7.0, abs=1e-9)
    assert slot(faces, Cut((400.0, 400.0), clearance=0.25)).width == pytest.approx(7.5, abs=1e-9)


def test_slot_of_a_swept_web_is_wider_than_the_sheet():
    # plane trigonometry: t / cos(sweep), and w tan(sweep) more through a rib w thick
    _, faces = panel(SWEEP, twist=(0.0, 0.0))
    assert faces.web.s[0] / faces.web.s[1] == pytest.approx(np.tan(SWEEP))
    assert slot(faces, Cut((400.0, 400.0))).width == pytest.approx(7.0 / np.cos(SWEEP), abs=1e-9)
    thick = slot(faces, Cut((398.5, 401.5))).width
    assert thick == pytest.approx(7.0 / np.cos(SWEEP) + 3.0 * np.tan(SWEEP), abs=1e-9)


def test_slot_leans_with_the_cant():
    # unswept: the web's trace in a rib leans by the cant itself, and takes t / cos(cant) level across
    _, faces = panel(cant=np.radians(9.0), twist=(0.0, 0.0))
    found = slot(faces, Cut((400.0, 400.0)))
    steps = np.diff(shapely.get_coordinates(found.shape), axis=0)
    sides = steps[np.linalg.norm(steps, axis=1) > 100.0]
    assert np.degrees(np.arctan(sides[:, 0] / sides[:, 1])) == pytest.approx([9.0, 9.0], abs=1e-9)
    assert found.width == pytest.approx(7.0 / np.cos(np.radians(9.0)), abs=1e-9)


def test_the_web_goes_through_the_rib_with_its_clearance():
    of, faces = panel(SWEEP, cant=0.1)
    made = rib.rib(of, 400.0, faces, clearance=0.3, thickness=3.0)
    assert len(made.pieces) == 2
    h, near = np.linspace(-40.0, 40.0, 201), []
    for y in (398.5, 400.0, 401.5):  # both faces of the rib's own sheet and its middle
        for n in (-3.5, 3.5):
            at = faces.web.point(faces.web.s_at_rib(y, h, n), h, n)
            points = shapely.points(at[:, 0], at[:, 2])
            near += [shapely.distance(shapely.Polygon(piece), points).min() for piece in made.pieces]
    # n is square to the web, a rib plane is not: the clearance shows at least as large there
    assert 0.3 - 1e-6 <= min(near) < 0.36


@pytest.mark.parametrize("y", [5.0, 790.0])
def test_no_slot_where_there_is_no_web(y):
    of, faces = panel()
    made = rib.rib(of, y, faces)
    assert made.slot is None
    assert len(made.pieces) == 1


def test_outer_outline_is_the_published_wings(tmp_path):
    path = tmp_path / "nasa.toml"
    path.write_text(kernel.wing_file_text(NASA_WING, kernel.Web()))
    of = jobs.load(path).loft
    for y in (0.0, 901.7, 1874.52):
        ring = shapely.LinearRing(rib.outline(of, y, "outer"))
        for side in (kernel.UPPER, kernel.LOWER):
            x, _, z = kernel.outer(NASA_WING, np.linspace(0.001, 0.99, 60), y, side).T
            assert shapely.distance(ring, shapely.points(x, z)).max() < 0.01


def test_inner_outline_is_the_outer_one_less_the_skin():
    # a prism: nothing leans along the span, so the section itself moves in by the skin (shapely's buffer)
    of = loft(naca.naca("2412"), [0, 500], skin=1.2, twist=[3, 3])
    want = shapely.Polygon(rib.outline(of, 250.0, "outer")).buffer(-1.2, quad_segs=32)
    found = shapely.Polygon(rib.outline(of, 250.0))
    inside = shapely.box(0.0, -50.0, 175.0, 50.0)  # ahead of where the rib stops, as it gets too thin
    a, b = (shape.intersection(inside).exterior for shape in (want, found))
    assert shapely.hausdorff_distance(a, b, densify=0.05) < 0.01


@pytest.mark.parametrize("which", ["inner", "outer"])
def test_a_thick_rib_stands_nowhere_into_the_skin(which):
    of, _ = panel(SWEEP)
    made = rib.rib(of, 400.0, None, which=which, thickness=6.0)
    sheet = [shapely.Polygon(rib.outline(of, y, which)) for y in np.linspace(397.0, 403.0, 7)]
    points = shapely.points(made.pieces[0])
    assert max(shapely.distance(section, points).max() for section in sheet) < 2e-3
    # nor more away from it than it must
    assert sheet[0].intersection(sheet[-1]).area == pytest.approx(shapely.Polygon(made.pieces[0]).area, rel=1e-4)


def test_how_far_a_square_cut_stands_short_of_a_swept_nose():
    # a prism: the section only moves aft, by the thickness times the tangent of the sweep
    of = loft(naca.naca("0012"), [0, 800], le=[0, 800 * np.tan(SWEEP)])
    assert rib.rib(of, 400.0, None, which="outer", thickness=6.0).short == pytest.approx(6.0 * np.tan(SWEEP), abs=1e-3)
    assert rib.rib(of, 400.0, None, which="outer").short == 0.0


def test_a_rib_beside_the_webs_end_has_a_slot_if_its_sheet_reaches_it():
    of, faces = panel()  # from 50 to 760
    assert rib.rib(of, 48.0, faces, thickness=3.0).slot is None
    assert rib.rib(of, 49.0, faces, thickness=3.0).slot is not None
    assert rib.rib(of, 761.0, faces, thickness=3.0).slot is not None


def test_an_outer_outline_stops_where_its_sides_cross():
    # q = a t (0.9 - t^2): the sides meet at 90 % of the chord, and have changed places behind it
    lens = section(lambda t: 0.2 * t * (0.9 - t * t), lambda t: 0.2 * (0.9 - 3.0 * t * t))
    of = loft(lens, [0, 500], le=[20, 20])
    ring = rib.outline(of, 250.0, "outer")
    assert shapely.Polygon(ring).is_valid
    assert ring[:, 0].max() == pytest.approx(20.0 + 0.9 * 200.0, abs=5e-3)
    plane = web.plane(of, ends=(0.0, 500.0), line=(0.4, 0.4))
    made = rib.rib(of, 250.0, Faces(plane, constant(-2.0), constant(2.0)), which="outer", margin=4.0)
    assert all(shapely.Polygon(piece).is_valid for piece in made.pieces)


@pytest.mark.parametrize(("line", "pieces", "slivers"), [(0.2, 2, 0), (0.07, 2, 0), (0.055, 1, 1)])
def test_only_slivers_are_left_out(line, pieces, slivers):
    of = loft(naca.naca("0009"), [0, 500], chord=50.0, skin=0.5)
    plane = web.plane(of, ends=(0.0, 500.0), line=(line, line))
    faces = Faces(plane, constant(-1.5), constant(1.5))
    made = rib.rib(of, 250.0, faces)
    assert (len(made.pieces), len(made.slivers)) == (pieces, slivers)
    whole = shapely.Polygon(rib.outline(of, 250.0)).difference(made.slot.shape)
    found = [shapely.Polygon(ring) for ring in (*made.pieces, *made.slivers)]
    assert sum(part.area for part in found) == pytest.approx(whole.area, abs=1e-6)
    for ring, cut in ((made.pieces, True), (made.slivers, False)):
        assert all((shapely.maximum_inscribed_circle(shapely.Polygon(r)).length > 0.49) is cut for r in ring)


def test_holes_keep_their_margin():
    of, faces = panel(SWEEP)
    made = rib.rib(of, 200.0, faces, margin=6.0, corner=4.0)
    solid = shapely.union_all([shapely.Polygon(piece) for piece in made.pieces])
    assert len(made.holes) == 2
    for hole in made.holes:
        assert solid.contains(shapely.Polygon(hole))
        assert shapely.distance(shapely.Polygon(hole), solid.boundary) == pytest.approx(6.0, abs=0.02)


def test_corners_are_cut_away():
    of, faces = panel()
    plain, made = (rib.rib(of, 200.0, faces, corner=r) for r in (0.0, 5.0))
    for a, b in zip(plain.pieces, made.pieces, strict=True):
        lost = shapely.Polygon(a).difference(shapely.Polygon(b))
        # two quarter rounds, near enough: the skin is almost square to the web
        assert lost.area == pytest.approx(2 * np.pi * 25.0 / 4.0, rel=0.2)


def test_a_rib_that_is_all_skin_is_refused():
    of = loft(naca.naca("0006"), [0, 500], chord=30.0, skin=1.0)
    with pytest.raises(NoRib):
        rib.outline(of, 250.0)


@pytest.mark.parametrize("surface", ["lower", "upper"])
def test_cradles_hold_the_panel_at_its_washout(surface):
    of, faces = panel(SWEEP)
    made = rib.cradles(of, np.array([60.0, 300.0, 750.0]), faces, surface=surface, chord=(0.1, 0.8), height=40.0)
    assert min(cradle.saddle[:, 1].min() for cradle in made) == pytest.approx(40.0)
    up = 1.0 if surface == "lower" else -1.0  # on its back the panel is turned about the span
    for cradle in made:
        skin = of.outer(-up * np.sqrt(np.linspace(0.1, 0.8, 40)), cradle.y)[0][:, [0, 2]] * up
        lift = made[0].saddle[0, 1] - up * of.outer(-up * np.sqrt(0.1), 60.0)[0][2]  # one bench for all
        gap = shapely.distance(shapely.LineString(cradle.saddle), shapely.points(skin + np.array([0.0, lift])))
        assert gap.max() < 0.005
        assert np.all(cradle.outline[-2:, 1] == 0.0)
        on_line = faces.web.point(faces.web.s_at_rib(cradle.y, 0.0, 0.0), 0.0, 0.0)
        assert cradle.line * up == pytest.approx(on_line[0])


@pytest.mark.parametrize("surface", ["lower", "upper"])
def test_a_thick_cradle_stands_nowhere_into_the_panel(surface):
    of, faces = panel(SWEEP)
    thin, made = (rib.cradles(of, [300.0], faces, surface=surface, height=40.0, thickness=w)[0] for w in (0.0, 18.0))
    up, body = (1.0 if surface == "lower" else -1.0), shapely.Polygon(made.outline)
    t = -up * np.sqrt(np.linspace(0.05, 0.9, 400))
    skins = np.array([of.outer(t, y)[0][:, [0, 2]] * up for y in np.linspace(300.0, 318.0, 7)])
    skins[..., 1] += 40.0 - skins[..., 1].min()  # the lowest place of all
    assert not shapely.contains_xy(body.buffer(-2e-3), skins[..., 0], skins[..., 1]).any()
    assert shapely.distance(body, shapely.points(skins)).min(axis=1)[[0, -1]] == pytest.approx(0.0, abs=2e-3)
    assert made.short > thin.short == 0.0


def test_padding_lies_between_saddle_and_skin():
    of, faces = panel()
    plain, padded = (rib.cradles(of, np.array([300.0]), faces, padding=p, height=40.0)[0] for p in (0.0, 2.0))
    lift = plain.saddle[:, 1].max() - padded.saddle[:, 1].max()
    for drop in np.linspace(lift - 2.0, lift + 2.0, 401):  # the height at which it is 2 mm off everywhere
        off = shapely.distance(
            shapely.LineString(plain.saddle), shapely.points(padded.saddle[20:-20] + np.array([0.0, drop]))
        )
        if np.ptp(off) < 0.02 and abs(off.mean() - 2.0) < 0.02:
            return
    pytest.fail("the padding is not even")


def test_the_web_is_marked_in_the_saddle():
    of, faces = panel(SWEEP, cant=0.08)
    (made,) = rib.cradles(of, np.array([400.0]), faces)
    lift = made.saddle[0, 1] - of.outer(-np.sqrt(0.05), 400.0)[0][2]
    for n, place in zip((-3.5, 3.5), made.web, strict=True):
        x, z = place - [0.0, lift]
        assert (np.array([x, 400.0, z]) - faces.web.origin) @ faces.web.n == pytest.approx(n, abs=0.002)
