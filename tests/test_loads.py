"""Loads: closed forms, also close to the tip, and shear and moment that agree by integration."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad

from wrywing.shop import loads
from wrywing.shop.records.caps import Load

ROWS = loads.Rows(np.array([0.0, 0.2, 0.7, 1.0]), np.array([0.2, 1.5, 2.0, 1.0]))
SHAPES = {"elliptic": loads.elliptic, "bell": loads.bell, "uniform": loads.uniform, "rows": ROWS}


def stated(**figures):
    return loads.stated(Load.model_validate(figures, context={"units": "mm"}), 1000.0)


def lift(shape="elliptic", **figures):
    return stated(**{"span_load": shape, "mass": "100 kg", "load_factor": 4, "semi_span": 1000, "inboard": 0} | figures)


def carried(load, *y, apart=50.0, taper=0.0, lean=1.0):
    y = np.array(y, dtype=float)
    return load.at(loads.Line(y, np.broadcast_to(apart, y.shape), np.full_like(y, taper), lean))


# Published closed forms (facts.md): centre of one half of the lift, as a fraction of the semi-span.
@pytest.mark.parametrize(
    ("shape", "centre"),
    [("elliptic", 4 / (3 * math.pi)), ("bell", 16 / (15 * math.pi)), ("uniform", 0.5)],
)
def test_centre_of_the_half(shape, centre):
    root = carried(lift(shape), 0.0)
    # load factor x mass x g / 2: 4 x 100 x 9.80665 / 2 = 1961.33 N
    assert root.shear == pytest.approx(1961.33, rel=1e-6)
    assert root.moment / root.shear / 1000.0 == pytest.approx(centre, rel=1e-12)
    if shape == "uniform":  # w L^2 / 2 with w = 1.96133 N/mm
        assert root.moment == pytest.approx(1.96133 * 1000.0**2 / 2, rel=1e-6)


# Published (facts.md): the lift goes as (1 - e^2)^p; from the tip 1 - e^2 = d (2 - d).
LAWS = {
    "elliptic": lambda d: 4 / math.pi * math.sqrt(d * (2 - d)),
    "bell": lambda d: 16 / (3 * math.pi) * (d * (2 - d)) ** 1.5,
    "uniform": lambda d: 1.0,
    "rows": lambda d: float(np.interp(d, ROWS.d, ROWS.value)) / (0.2 * 0.85 + 0.5 * 1.75 + 0.3 * 1.5),
}


@settings(max_examples=60, deadline=None)
@given(st.sampled_from(sorted(SHAPES)), st.floats(-12.0, 0.0))
def test_shear_and_moment_are_integrals_of_the_lift_and_positive_down_to_the_tip(shape, power):
    d = 10.0**power
    found = [float(v) for v in SHAPES[shape](np.array(d))]
    knots = [k / d for k in (0.2, 0.7) if k < d] or None

    def integral(f):  # over u, the share of d, so that quad sees figures of order 1
        return quad(f, 0.0, 1.0, points=knots, limit=200, epsabs=0.0, epsrel=1e-11)[0]

    law = LAWS[shape]
    assert found[0] == pytest.approx(law(d), rel=1e-12)
    assert found[1] == pytest.approx(d * integral(lambda u: law(u * d)), rel=1e-9)
    assert found[2] == pytest.approx(d**2 * integral(lambda u: (1 - u) * law(u * d)), rel=1e-9)
    assert min(found) > 0.0


@pytest.mark.parametrize("shape", sorted(SHAPES))
def test_the_whole_half_is_one_and_what_lies_outboard_only_grows_inwards(shape):
    d = np.concatenate([[0.0], np.geomspace(1e-16, 1.0, 4001)])
    _, outboard, first = SHAPES[shape](d)
    assert outboard[-1] == pytest.approx(1.0, abs=1e-12)
    assert (outboard[0], first[0]) == (0.0, 0.0)
    assert np.all(np.diff(outboard) > 0.0)
    assert np.all(np.diff(first) > 0.0)


@pytest.mark.parametrize(("shape", "slope"), [("elliptic", 0.5), ("bell", 1.5)])
def test_close_to_the_tip(shape, slope):
    # (1 - e^2)^p is (2 d)^p there: its integrals are (2 d)^p d / (p + 1) and (2 d)^p d^2 / ((p + 1) (p + 2)).
    d, scale = np.geomspace(1e-14, 1e-7, 50), {"elliptic": 4 / math.pi, "bell": 16 / (3 * math.pi)}[shape]
    _, outboard, first = SHAPES[shape](d)
    lead = scale * (2.0 * d) ** slope
    np.testing.assert_allclose(outboard, lead * d / (slope + 1), rtol=1e-6)
    np.testing.assert_allclose(first, lead * d**2 / ((slope + 1) * (slope + 2)), rtol=1e-6)


def test_a_load_that_ends_before_the_tip_asks_nothing_beyond():
    load = lift([[0, 1], [700, 0.1], [800, 0], [1000, 0]])
    found = carried(load, *np.linspace(0.0, 1000.0, 1001))
    for figure in (found.running, found.shear, found.moment, found.force, found.flow):
        assert np.all(figure[800:] <= 1e-12 * figure[0])
        assert np.all(figure >= 0.0)
        assert np.all(np.diff(figure) <= 0.0)
    # the last 100 mm before the end carry a triangle: w x^2 / 2 and w x^3 / 6, 0.001 of the root's load each mm
    whole = 700.0 * 0.55 + 100.0 * 0.05
    assert found.shear[750] / found.shear[0] == pytest.approx(0.001 * 50.0**2 / 2 / whole)
    assert found.moment[750] / found.shear[0] == pytest.approx(0.001 * 50.0**3 / 6 / whole)


def test_rows_of_a_triangle():
    # Lift falling straight to nothing at the tip: centre of the half at a third.
    root = carried(lift([[0, 5], [1000, 0]]), 0.0)
    assert root.moment / root.shear == pytest.approx(1000.0 / 3.0)


def test_the_panel_is_the_outer_part():
    whole, panel, unsaid = lift(), lift(inboard=400), lift(semi_span=1400, inboard=None)
    y = np.array([0.0, 250.0, 590.0])
    for figure in ("running", "shear", "moment"):
        assert getattr(carried(panel, *y), figure) == pytest.approx(getattr(carried(whole, *(y + 400.0)), figure))
    assert unsaid.tip == 1000.0  # the last station is the wing tip


def test_a_swept_web_has_longer_arms():
    # Lift on a web line that runs out at 30 degrees: its arm along the web is longer by 1 / cos 30.
    load, lean = lift("uniform"), math.cos(math.radians(30.0))
    along, weights = np.polynomial.legendre.leggauss(8)
    eta = 600.0 + 400.0 * along
    straight, swept = carried(load, 200.0), carried(load, 200.0, lean=lean)
    moment = np.sum(weights * 400.0 * carried(load, *eta).running * (eta - 200.0) / lean)
    assert swept.moment == pytest.approx([moment])
    assert swept.force * 50.0 == pytest.approx([moment])
    assert swept.flow * 50.0 == pytest.approx(swept.shear)
    assert swept.shear == pytest.approx(straight.shear)
    assert swept.running == pytest.approx(straight.running * lean)  # the same lift over a longer line


def test_tables_of_moments():
    found = carried(stated(moments=[[0, 200], [500, "50 N m"], [1000, 0]]), 0.0, 250.0, 500.0, 750.0, apart=40.0)
    assert found.moment == pytest.approx([200e3, 125e3, 50e3, 25e3])
    assert found.force * 40.0 == pytest.approx(found.moment)
    assert found.shear == pytest.approx([300.0, 300.0, 300.0, 100.0])  # the steeper at a row
    assert found.flow * 40.0 == pytest.approx(found.shear)
    assert found.running is None


def test_tables_of_cap_forces():
    forces = stated(cap_forces=[[0, "900 lbf"], [1000, 0]])
    found = carried(forces, 0.0, 250.0, 500.0, 750.0, apart=40.0, lean=0.8)
    newtons = 4.4482216 * np.array([900.0, 675.0, 450.0, 225.0])
    assert found.force == pytest.approx(newtons)
    assert found.moment == pytest.approx(newtons * 40.0)
    assert found.flow == pytest.approx([0.8 * newtons[0] / 1000.0] * 4)
    assert found.shear == pytest.approx(found.flow * 40.0)  # a web as high all along
    assert found.running is None


@pytest.mark.parametrize("taper", [-0.02, 0.0, 0.03])
def test_shear_of_tabled_cap_forces_is_the_slope_of_their_moment(taper):
    # Cap force 3000 (1 - s / 1000), caps 60 + taper s apart: M = F a, and V = |dM/ds| by hand, no sweep.
    s = np.array([1.0, 300.0, 640.0])
    apart = 60.0 + taper * s
    found = carried(stated(cap_forces=[[0, 3000], [1000, 0]]), *s, apart=apart, taper=taper)
    assert found.moment == pytest.approx(3000.0 * (1 - s / 1000.0) * apart)
    assert found.shear == pytest.approx(np.abs(-3.0 * (60.0 + taper * s) + 3000.0 * (1 - s / 1000.0) * taper))


def test_tables_are_nowhere_below_their_rows():
    # just short of this row numpy's own interpolation comes to -1.8e-12
    end = 1735.9650862885937
    y = end - np.arange(9.0)[::-1] * np.spacing(end)
    found = carried(stated(cap_forces=[[687.4730184842546, 7523.970693280267], [end, 0]]), *y)
    assert found.force.min() == found.force[-1] == found.moment[-1] == 0.0
