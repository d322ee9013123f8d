"""The reference itself is checked: closed forms, and two methods that share only wing and web axes."""

import tomllib

import kernel
import numpy as np
import pytest
from kernel import NASA_WING, Web, Wing
from numpy.testing import assert_allclose


def prism(section, *, washout=0.0, band=(0.2, 0.5), chord=200.0, skin=1.5):
    two = (0.0, 400.0)
    return Wing(two, (chord,) * 2, (0.0,) * 2, (0.0,) * 2, (washout,) * 2, skin, 0.25, section, "", band)


def plate(u, side):
    return u, np.full_like(u, 0.05 * side)


def ellipse(u, side):
    return u, 0.1 * side * np.sqrt(1 - (2 * u - 1) ** 2)


S = np.linspace(20, 380, 5)


def test_plate_bevel_is_the_washout():
    pytest.importorskip("OCP")
    w, n = np.radians(6.0), np.array([-6.0, 0.0, 6.0])
    wing, web = prism(plate, washout=6.0), Web(ends=(0.0, 400.0))
    top, bottom = kernel.reference_edges(wing, web, S, n)
    straight = n * np.tan(w)  # plane trigonometry
    rise = (0.05 * 200 - 1.5) / np.cos(w)
    assert_allclose(top, np.tile(straight + rise, (5, 1)), atol=1e-7)
    assert_allclose(bottom, np.tile(straight - rise, (5, 1)), atol=1e-7)


def test_plate_canted_by_the_washout_has_square_edges():
    pytest.importorskip("OCP")
    # the nose goes down, so the plate's normal leans forward: cant is positive aft
    wing, web = prism(plate, washout=6.0), Web(ends=(0.0, 400.0), cant=-6.0)
    top, bottom = kernel.reference_edges(wing, web, S, [-6.0, 6.0])
    assert_allclose(top, 8.5, atol=1e-7)
    assert_allclose(bottom, -8.5, atol=1e-7)


@pytest.mark.parametrize("edges", [kernel.reference_edges, kernel.brute_edges])
def test_cylinder(edges):
    if edges is kernel.reference_edges:
        pytest.importorskip("OCP")
    # a point of the ellipse (100 cos t, 20 sin t) moved inwards along its normal (20 cos t, 100 sin t)
    t = np.radians([115.0, 105.0, 95.0])
    normal = np.array([20 * np.cos(t), 100 * np.sin(t)])
    x, h = np.array([100 * np.cos(t), 20 * np.sin(t)]) - 1.5 * normal / np.hypot(*normal)
    n = 100 + x - 0.4 * 200  # web line at 40 % chord
    top, bottom = edges(prism(ellipse), Web(ends=(0.0, 400.0), line=(0.4, 0.4)), S, n)
    tolerance = 1e-5 if edges is kernel.reference_edges else 1e-3
    assert_allclose(top, np.tile(h, (5, 1)), atol=tolerance)
    assert_allclose(bottom, np.tile(-h, (5, 1)), atol=tolerance)


def test_section_is_the_published_one():
    # published: Abbott & von Doenhoff, Theory of Wing Sections, appendix (from memory), percent of chord;
    # the lower column is itself up to 0.014 off the formula it was computed from
    u, x = np.linspace(0, 1, 2001), [0.1, 0.3, 0.5, 0.7]
    upper, lower = (100 * np.interp(x, *kernel.naca_2412(u, side)) for side in (1, -1))
    assert_allclose(upper, [5.63, 7.88, 7.24, 5.18], atol=0.005)
    assert_allclose(lower, [-3.75, -4.12, -3.34, -2.14], atol=0.015)


def test_wing_file_holds_the_same_wing():
    read = tomllib.loads(kernel.wing_file_text(NASA_WING, Web(cant=4)))
    stations = read["wing"]["stations"]
    for key in ("y", "chord", "le", "z", "washout"):
        assert tuple(station[key] for station in stations) == getattr(NASA_WING, key)
    assert (read["skin"]["thickness"], read["web"]["cant"], read["web"]["thickness"]) == (0.8, 4, 6.35)


def test_nasa_planform_is_the_published_one():
    # published: NASA/TP-2016-219072, in its own inches and degrees
    tip = np.array([NASA_WING.y[-1], NASA_WING.chord[-1], NASA_WING.le[-1], NASA_WING.z[-1]])
    assert_allclose(tip[:2] / 25.4, [73.8, 3.94])
    assert_allclose(np.degrees(np.arctan(tip[2:] / tip[0])), [24, 2.5])
    assert len(NASA_WING.washout) == 21
    assert max(NASA_WING.washout) == 1.6726


@pytest.mark.parametrize("cant", [0.0, 8.0])
def test_nasa_wing_two_ways(cant):
    pytest.importorskip("OCP")
    web = Web(cant=cant)
    axes = kernel.frame(NASA_WING, web)
    s, n = np.linspace(10, axes.length - 10, 12), np.array([-1, 0, 1]) * web.thickness / 2
    kernel_edges = np.array(kernel.reference_edges(NASA_WING, web, s, n))
    assert_allclose(kernel_edges, kernel.brute_edges(NASA_WING, web, s, n), atol=0.002)
    assert np.all(kernel_edges[0] > kernel_edges[1])


def test_nasa_patches_have_converged():
    pytest.importorskip("OCP")
    places = Web(), np.linspace(10, 1900, 12), [-3.175, 3.175]
    coarse, fine = (np.array(kernel.reference_edges(NASA_WING, *places, grid=g)) for g in (kernel.GRID, (40, 28)))
    assert_allclose(coarse, fine, atol=1e-5)


def test_a_poor_patch_is_refused():
    pytest.importorskip("OCP")
    with pytest.raises(ArithmeticError, match="stands"):
        kernel.inner_patches(prism(ellipse, band=(0.01, 0.5)), 1, (4, 4))


def test_a_place_off_the_wing_is_refused():
    pytest.importorskip("OCP")
    with pytest.raises(ValueError, match="meets no inner surface at s = -50"):
        kernel.reference_edges(NASA_WING, Web(), [-50.0], [0.0])


def wedge(slope, s, n):
    """Filler over a square edge of height 20 under a skin rising by slope(s) across the web."""
    skin = 20 + slope[:, None] * (n - n[0])
    floor = np.zeros_like(skin)
    inner = kernel.solid_between(s, n, floor, skin)
    web = kernel.solid_between(s, n, floor, np.full_like(skin, 20))
    assert kernel.volume_outside(web, inner) == pytest.approx(0, abs=1e-6)
    return kernel.volume_outside(inner, web)


def test_filler_prism():
    t, length, slope = 8.0, 300.0, np.tan(np.radians(7.0))
    volume = wedge(np.full(4, slope), np.linspace(0, length, 4), np.linspace(-t / 2, t / 2, 3))
    assert volume == pytest.approx(t**2 / 2 * slope * length, rel=1e-9)  # plane trigonometry


def test_filler_under_growing_bevel():
    t, length, k = 8.0, 300.0, 0.2
    volume = wedge(np.linspace(0, k, 121), np.linspace(0, length, 121), np.linspace(-t / 2, t / 2, 9))
    area = t**2 / 2 * np.array([0, k / 2, k])
    assert volume == pytest.approx(length / 6 * (area @ [1, 4, 1]), rel=2e-3)  # prismoidal formula, exact


def test_swept_ends():
    n = np.linspace(-4, 4, 5)
    s = np.linspace(0, 300, 7)[:, None] + n * np.tan(np.radians(24))
    solid = kernel.solid_between(s, n, np.zeros(s.shape), np.full(s.shape, 20.0))
    assert solid.volume() == pytest.approx(300 * 8 * 20)  # shearing keeps the volume
    low, high = np.array(solid.bounding_box()).reshape(2, 3)
    assert_allclose(high - low, [300 + 8 * np.tan(np.radians(24)), 20, 8])


def test_inside_out_is_refused():
    grid = np.zeros((3, 3))
    with pytest.raises(ValueError, match="no closed solid"):
        kernel.solid_between([0, 1, 2], [0, 1, 2], grid + 1, grid)
