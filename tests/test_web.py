"""Where the flat web meets the twisted skin, against closed forms, a CAD kernel and laws that hold for all wings."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st
from wings import Bent, ellipse, loft, slab, upside_down

from wrywing.geom import web
from wrywing.geom.loft import Loft
from wrywing.geom.naca import naca
from wrywing.geom.washout import straight

S = np.linspace(40.0, 950.0, 12)
ENDS = (0.0, 1000.0)


def edges(wing, plane, thickness=6.0, s=S):
    n = np.array([-0.5, 0.0, 0.5]) * thickness
    return tuple(web.edge(wing, plane, s[:, None], n, side).h for side in web.SIDES)


def bevels(h, thickness=6.0):
    return np.degrees(web.bevel(h[:, 0], h[:, -1], thickness))


@pytest.mark.parametrize("cant", [0.0, 7.0])
def test_edges_and_bevels_agree_with_a_cad_kernel_on_the_nasa_wing(cant, tmp_path):
    # Published: NASA/TP-2016-219072; independent kernel: Open CASCADE, offset surface cut by the layer planes.
    pytest.importorskip("OCP", reason="no Open CASCADE on this machine")
    import kernel

    from wrywing.shop import job as jobs

    path = tmp_path / "nasa.toml"
    path.write_text(kernel.wing_file_text(kernel.NASA_WING, kernel.Web(cant=cant)))
    job = jobs.load(path)
    n = np.array([-6.35, 0.0, 6.35]) / 2.0
    s = np.linspace(5.0, job.web.plane.length - 5.0, 12)
    wanted = kernel.reference_edges(kernel.NASA_WING, kernel.Web(cant=cant), s, n)
    got = edges(job.loft, job.web.plane, 6.35, s)
    for h, reference in zip(got, wanted, strict=True):
        np.testing.assert_allclose(h, reference, atol=0.005)
        np.testing.assert_allclose(bevels(h, 6.35), bevels(reference, 6.35), atol=0.01)


@pytest.mark.parametrize("thickness", [2.0, 6.0, 25.0])
@pytest.mark.parametrize("washout", [-4.0, 0.0, 3.0, 12.0])
def test_flat_skins_at_constant_washout(washout, thickness):
    # Closed form: h = n tan w ± (c q - skin) / cos w.
    wing = loft(slab(), ENDS, twist=washout, axis=0.3)
    plane = web.plane(wing, ends=ENDS, line=(0.3, 0.3))
    top, bottom = edges(wing, plane, thickness)
    w = np.radians(washout)
    n = np.array([-0.5, 0.0, 0.5]) * thickness
    np.testing.assert_allclose(top, np.broadcast_to(n * np.tan(w) + 9.0 / np.cos(w), top.shape), atol=1e-9)
    np.testing.assert_allclose(bottom, np.broadcast_to(n * np.tan(w) - 9.0 / np.cos(w), top.shape), atol=1e-9)
    np.testing.assert_allclose(bevels(top, thickness), washout, atol=1e-6)
    np.testing.assert_allclose(bevels(bottom, thickness), washout, atol=1e-6)


def test_flat_skins_with_washout_growing_as_y_squared():
    # Closed form without a skin: h = n tan w(y) ± c q / cos w(y) on a web through the twist axis.
    k = np.radians(10.0) / 1000.0**2
    wing = loft(slab(), ENDS, twist=Bent(lambda y: k * y**2, lambda y: 2 * k * y, ENDS), skin=0.0, axis=0.3)
    plane = web.plane(wing, ends=ENDS, line=(0.3, 0.3))
    top, bottom = edges(wing, plane)
    w, n = k * S[:, None] ** 2, np.array([-3.0, 0.0, 3.0])
    np.testing.assert_allclose(top, n * np.tan(w) + 10.0 / np.cos(w), atol=1e-9)
    np.testing.assert_allclose(bottom, n * np.tan(w) - 10.0 / np.cos(w), atol=1e-9)
    np.testing.assert_allclose(bevels(top), np.degrees(k * S**2), atol=1e-6)


def test_cylinder_of_elliptic_section():
    # Closed form: the parallel curve of an ellipse, (a cos u, b sin u) - skin x normal.
    wing = loft(ellipse(), ENDS, twist=0.0, skin=1.5)
    plane = web.plane(wing, ends=ENDS, line=(0.35, 0.35))
    top, _ = edges(wing, plane, 8.0)
    u = np.linspace(0.05, np.pi - 0.05, 400001)
    a, b = 100.0, 12.0
    across = np.hypot(b * np.cos(u), a * np.sin(u))
    x = a * np.cos(u) * (1.0 - 1.5 * b / a / across)
    z = b * np.sin(u) * (1.0 - 1.5 * a / b / across)
    wanted = np.interp(-30.0 + np.array([-4.0, 0.0, 4.0]), x[::-1], z[::-1])
    np.testing.assert_allclose(top, np.broadcast_to(wanted, top.shape), atol=1e-6)


@pytest.mark.parametrize("turn", [0.14, -0.14])
def test_the_inside_of_a_skin_that_breaks_at_a_station(turn):
    # Closed form: flat plates at slopes a and b, their insides 5 mm under them square to each, meet where these cross.
    a, b = 0.2, 0.2 + turn
    wing = loft(slab(), [0.0, 500.0, 1000.0], z=[0.0, 500.0 * a, 500.0 * (a + b)], skin=5.0, axis=0.3)
    plane = web.plane(wing, ends=ENDS, line=(0.3, 0.3))
    s = np.linspace(plane.length / 2 - 20.0, plane.length / 2 + 20.0, 161)
    for side, over in (("top", 1.0), ("bottom", -1.0)):
        h = web.edge(wing, plane, s, 0.0, side).h
        point = plane.point(s, h, np.zeros_like(s))
        y, z = point[:, 1], point[:, 2]
        plates = [
            500.0 * a + k * (y - 500.0) + over * (10.0 - 5.0 * np.hypot(1.0, k))  # sections stand in rib planes
            for k in (a, b)
        ]
        wanted = np.minimum(*plates) if b < a else np.maximum(*plates)
        np.testing.assert_allclose(z, wanted, atol=1e-6)


@pytest.mark.parametrize(
    ("y", "z"),
    [
        ([498.0, 502.0], [0.0, 3.0]),  # a step
        ([498.0, 500.0, 502.0], [0.0, 1.5, 1.5]),  # a corner in two breaks, of which the depth leaves nothing
        ([499.5, 500.5], [2.0, 0.0]),
        ([497.0, 500.0, 503.0], [0.0, -1.0, 0.0]),  # a dent
    ],
)
@pytest.mark.parametrize("over", [1.0, -1.0])
def test_the_inside_of_a_skin_with_breaks_close_together(y, z, over):
    # Independent: shapely offsets the skin's trace in the web plane with mitred corners.
    y, z = [0.0, *y, 1000.0], over * np.array([z[0], *z, z[-1]])
    wing = loft(slab(), y, z=z, skin=1.5, axis=0.3)
    plane = web.plane(wing, ends=ENDS, line=(0.3, 0.3))
    s = np.linspace(plane.length / 2 - 12.0, plane.length / 2 + 12.0, 241)
    side = "top" if over > 0 else "bottom"
    at = plane.point(s, web.edge(wing, plane, s, 0.0, side, 0.5).h, np.zeros_like(s))
    skin = shapely.LineString(np.column_stack([y, z + 10.0 * over]))
    inside = shapely.get_coordinates(shapely.offset_curve(skin, -2.0 * over, join_style="mitre", mitre_limit=20.0))
    np.testing.assert_allclose(at[:, 2], np.interp(at[:, 1], *inside.T), atol=1e-6)


@pytest.mark.parametrize(("tall", "ramp"), [(1.0, 1.0), (1.0, 40.0), (-1.0, 1.0)])
@pytest.mark.parametrize("slope", [0.0, 0.15, -0.15])
def test_the_inside_of_a_skin_whose_thickness_runs_down_a_ramp(slope, tall, ramp):
    # Closed form: a straight line of that slope less the thickness square to it, whatever is laid off it.
    wing = loft(slab(), ENDS, z=[0.0, 1000.0 * slope], axis=0.3)
    law = straight([0.0, 600.0, 600.0 + ramp, 1000.0], [2.0, 2.0, 2.0 - tall, 2.0 - tall])
    plane = web.plane(replace(wing, skin=law), ends=ENDS, line=(0.3, 0.3))
    s = np.hypot(1.0, slope) * np.linspace(590.0, 650.0, 601)
    point = plane.point(s, web.edge(replace(wing, skin=law), plane, s, 0.0, "top", 0.3).h, 0.0)
    y = np.linspace(580.0, 660.0, 80001)
    normal = np.array([-slope, 1.0]) / np.hypot(1.0, slope)
    inside = np.column_stack([y, 10.0 + slope * y]) - (law(y, y)[0] + 0.3)[:, None] * normal
    np.testing.assert_allclose(point[:, 2], np.interp(point[:, 1], *inside.T), atol=1e-5)


@pytest.mark.parametrize("turn", [0.1, -0.1])
def test_a_crease_runs_where_flat_plates_meet(turn):
    # Closed form: two planes 1.5 mm under plates of slopes 0 and `turn`, in the web's own coordinates.
    wing = loft(slab(), [0.0, 500.0, 1000.0], le=[0.0, 300.0, 600.0], z=[0.0, 0.0, 500.0 * turn], skin=1.2, axis=0.3)
    plane = web.plane(wing, ends=ENDS, line=(0.3, 0.3), cant=0.1)
    n = np.array([[-6.0, 0.0, 6.0]])
    for side, up in (("top", 1.0), ("bottom", -1.0)):
        level = [up * 8.5, up * (10.0 - 1.5 * np.hypot(1.0, turn)) - 500.0 * turn]
        normal = np.array([[0.0, 0.0, 1.0], [0.0, -turn, 1.0]])
        wanted = [
            np.linalg.solve(
                np.column_stack([normal @ plane.s, normal @ plane.h]), level - normal @ plane.point(0, 0, k)
            )
            for k in n[0]
        ]
        found = web.creases(wing, plane, np.array([500.0]), n, side, np.array([0.3]))
        np.testing.assert_allclose(found[0], np.array(wanted)[:, 0], atol=1e-6)
    smooth = web.creases(loft(slab(), ENDS), plane, np.array([500.0]), n, "top", np.array([0.3]))
    assert np.isnan(smooth).all()


def test_edges_stop_at_the_rib_planes_on_a_swept_web():
    # Plane trigonometry: on an unskinned slab swept by phi the faces meet a rib t tan(phi) apart.
    wing = loft(slab(), ENDS, le=[0.0, 300.0], skin=0.0)
    plane = web.plane(wing, ends=(100.0, 900.0), line=(0.3, 0.3))
    starts, stops = web.end_places(wing, plane, [-4.0, 4.0], "top")
    np.testing.assert_allclose(np.diff(starts), 8.0 * 0.3, atol=1e-9)
    np.testing.assert_allclose(np.diff(stops), 8.0 * 0.3, atol=1e-9)
    np.testing.assert_allclose(stops - starts, np.hypot(800.0, 240.0), atol=1e-9)


def test_cant_square_at_a_rib():
    wing = loft(naca("2412"), ENDS, chord=[300.0, 200.0], le=[0.0, 150.0], z=[0.0, 60.0], twist=[0.0, 8.0])
    given_ends = {"ends": ENDS, "line": (0.3, 0.32)}
    cant = web.cant_square_at(wing, **given_ends, y=700.0)
    plane = web.plane(wing, **given_ends, cant=cant)
    trace = plane.h * plane.s[1] - plane.s * plane.h[1]
    w = wing.washout(np.array(700.0), np.array(700.0))[0]
    assert trace[1] == pytest.approx(0.0, abs=1e-12)
    assert trace @ [np.cos(w), 0.0, np.sin(w)] == pytest.approx(0.0, abs=1e-12)
    assert abs(cant) < np.radians(20.0)


@st.composite
def wings(draw):
    """A panel of three stations with taper, sweep, dihedral and a washout of any shape; its web line."""

    def figure(low, high):
        return draw(st.floats(low, high))

    y = np.array([0.0, figure(300.0, 700.0), 1000.0])
    sections = [naca(draw(st.sampled_from(["0012", "2412", "4415", "23012", "1410"]))) for _ in y]
    wing = loft(
        sections,
        y,
        chord=[figure(250.0, 400.0), figure(200.0, 300.0), figure(150.0, 250.0)],
        le=[0.0, figure(0.0, 150.0), figure(0.0, 300.0)],
        z=[0.0, figure(-20.0, 40.0), figure(-40.0, 80.0)],
        twist=[0.0, figure(-3.0, 5.0), figure(-6.0, 12.0)],
        skin=figure(0.5, 1.5),
    )
    line = (figure(0.25, 0.45), figure(0.25, 0.45))
    return wing, line, np.radians(figure(-10.0, 10.0))


@settings(max_examples=25)
@given(wings())
def test_a_left_hand_panel_has_the_right_hand_ones_numbers(drawn):
    wing, line, cant = drawn
    y = wing.y
    plan, twist, skin = wing.planform(y, y)[0], wing.washout(y, y)[0], wing.skin(y, y)[0]
    left = Loft(
        -y[::-1],
        wing.sections[::-1],
        straight(-y[::-1], plan[::-1]),
        straight(-y[::-1], twist[::-1]),
        straight(-y[::-1], skin[::-1]),
        wing.axis,
    )
    right_plane = web.plane(wing, ends=ENDS, line=line, cant=cant)
    left_plane = web.plane(left, ends=(0.0, -1000.0), line=line, cant=cant)
    for right, mirrored in zip(edges(wing, right_plane), edges(left, left_plane), strict=True):
        np.testing.assert_allclose(mirrored, right, atol=1e-7)


@settings(max_examples=25)
@given(wings())
def test_upside_down_top_and_bottom_change_places(drawn):
    wing, line, cant = drawn
    y = wing.y
    plan = wing.planform(y, y)[0] * [1.0, 1.0, -1.0]
    turned = replace(
        wing,
        sections=[upside_down(s) for s in wing.sections],
        planform=straight(y, plan),
        washout=straight(y, -wing.washout(y, y)[0]),
    )
    top, bottom = edges(wing, web.plane(wing, ends=ENDS, line=line, cant=cant))
    turned_top, turned_bottom = edges(turned, web.plane(turned, ends=ENDS, line=line, cant=-cant))
    np.testing.assert_allclose(turned_top, -bottom, atol=1e-7)
    np.testing.assert_allclose(turned_bottom, -top, atol=1e-7)
    np.testing.assert_allclose(bevels(turned_top), -bevels(bottom), atol=1e-6)


@settings(max_examples=25)
@given(wings(), st.floats(0.2, 5.0))
def test_scaled_lengths_scale_and_angles_stay(drawn, k):
    wing, line, cant = drawn
    y = wing.y
    big = replace(
        wing,
        y=k * y,
        planform=straight(k * y, k * wing.planform(y, y)[0]),
        washout=straight(k * y, wing.washout(y, y)[0]),
        skin=straight(k * y, k * wing.skin(y, y)[0]),
    )
    ends = (0.0, 1000.0 * k)
    small_edges = edges(wing, web.plane(wing, ends=ENDS, line=line, cant=cant))
    for h, scaled in zip(
        small_edges, edges(big, web.plane(big, ends=ends, line=line, cant=cant), 6.0 * k, k * S), strict=True
    ):
        np.testing.assert_allclose(scaled, k * h, atol=1e-6 * k)
        np.testing.assert_allclose(bevels(scaled, 6.0 * k), bevels(h), atol=1e-5)


@settings(max_examples=25)
@given(st.floats(-8.0, 8.0), st.floats(-6.0, 10.0), st.floats(0.25, 0.5))
def test_turning_cant_and_washout_together_about_the_web_line_leaves_the_bevel(turn, tip, line):
    # A washout of delta tips the top forward by delta, which is a cant of minus delta.
    wing = loft(naca("2412"), ENDS, chord=[300.0, 180.0], le=[0.0, 120.0 * line], twist=[0.0, tip], axis=line)
    turned = replace(wing, washout=straight(wing.y, np.radians([turn, tip + turn])))
    straight_line = replace(wing.planform, coef=wing.planform.coef.copy())
    straight_line.coef[2, 0, 1] = -line * straight_line.coef[2, 0, 0]  # unswept web line
    wing, turned = replace(wing, planform=straight_line), replace(turned, planform=straight_line)
    level = edges(wing, web.plane(wing, ends=ENDS, line=(line, line)))
    tipped = edges(turned, web.plane(turned, ends=ENDS, line=(line, line), cant=-np.radians(turn)))
    for h, h_tipped in zip(level, tipped, strict=True):
        np.testing.assert_allclose(bevels(h_tipped), bevels(h), atol=1e-6)


def test_a_web_that_misses_the_section_has_no_edge():
    wing = loft(naca("0012"), ENDS)
    plane = web.plane(wing, ends=ENDS, line=(0.01, 0.01))
    assert np.isnan(web.edge(wing, plane, S, -10.0, "top").h).all()
