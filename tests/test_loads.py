"""Loads: closed forms, and shear and moment that agree by integration."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad

from wrywing.shop import loads
from wrywing.shop.records_caps import Load

ROWS = loads.Rows(np.array([0.0, 0.3, 0.8, 1.0]), np.array([1.0, 2.0, 1.5, 0.2]))
SHAPES = {"elliptic": loads.elliptic, "bell": loads.bell, "uniform": loads.uniform, "rows": ROWS}


def stated(**figures):
    return loads.stated(Load.model_validate(figures, context={"units": "mm"}), 1000.0)


def lift(shape="elliptic", **figures):
    return stated(**{"span_load": shape, "mass": "100 kg", "load_factor": 4, "semi_span": 1000, "inboard": 0} | figures)


# Published closed forms (facts.md): centre of one half of the lift, as a fraction of the semi-span.
@pytest.mark.parametrize(
    ("shape", "centre"),
    [("elliptic", 4 / (3 * math.pi)), ("bell", 16 / (15 * math.pi)), ("uniform", 0.5)],
)
def test_centre_of_the_half(shape, centre):
    load = lift(shape)
    root = np.zeros(1)
    # load factor x mass x g / 2: 4 x 100 x 9.80665 / 2 = 1961.33 N
    assert load.shear(root) == pytest.approx(1961.33, rel=1e-6)
    assert load.moment(root) / load.shear(root) / 1000.0 == pytest.approx(centre, rel=1e-6)
    if shape == "uniform":  # w L^2 / 2 with w = 1.96133 N/mm
        assert load.moment(root) == pytest.approx(1.96133 * 1000.0**2 / 2, rel=1e-6)


@settings(max_examples=40, deadline=None)
@given(st.sampled_from(sorted(SHAPES)), st.floats(0.0, 0.99))
def test_shear_and_moment_are_integrals_of_the_lift(shape, e):
    density, outboard, first = SHAPES[shape](np.array(e))
    knots = [k for k in (0.3, 0.8) if e < k]

    def integral(figure):
        return quad(figure, e, 1.0, points=knots or None, limit=200)[0]

    assert integral(lambda x: float(SHAPES[shape](np.array(x))[0])) == pytest.approx(
        float(outboard), rel=1e-6, abs=1e-9
    )
    assert integral(lambda x: float(SHAPES[shape](np.array(x))[1])) == pytest.approx(float(first), rel=1e-6, abs=1e-9)
    assert density >= 0.0


@pytest.mark.parametrize("shape", sorted(SHAPES))
def test_the_whole_half_is_one_and_the_tip_bears_nothing(shape):
    ends = SHAPES[shape](np.array([0.0, 1.0]))
    assert ends[1] == pytest.approx([1.0, 0.0], abs=1e-12)
    assert ends[2][1] == pytest.approx(0.0, abs=1e-12)


def test_rows_of_a_triangle():
    # Lift falling straight to nothing at the tip: centre of the half at a third.
    load = lift([[0, 5], [1000, 0]])
    assert load.moment(np.zeros(1)) / load.shear(np.zeros(1)) == pytest.approx(1000.0 / 3.0)


def test_the_panel_is_the_outer_part():
    whole, panel, unsaid = lift(), lift(inboard=400), lift(semi_span=1400, inboard=None)
    y = np.array([0.0, 250.0, 590.0])
    for figure in ("running", "shear", "moment"):
        assert getattr(panel, figure)(y) == pytest.approx(getattr(whole, figure)(y + 400.0))
    assert unsaid.inboard == 400.0  # the last station, at 1000, is the tip


def test_a_swept_web_has_longer_arms():
    # Lift on a web line that runs out at 30 degrees: its arm along the web is longer by 1 / cos 30.
    load, lean = lift("uniform"), math.cos(math.radians(30.0))
    y = np.array([200.0])
    along, weights = np.polynomial.legendre.leggauss(8)
    eta = 600.0 + 400.0 * along
    moment = np.sum(weights * 400.0 * load.running(eta) * (eta - 200.0) / lean)
    assert load.cap_force(y, np.array([50.0]), lean) * 50.0 == pytest.approx([moment])
    assert load.flow(y, np.array([50.0]), lean) * 50.0 == pytest.approx(load.shear(y))


def test_tables():
    y, apart = np.array([0.0, 250.0, 500.0, 750.0]), np.full(4, 40.0)
    moments = stated(moments=[[0, 200], [500, "50 N m"], [1000, 0]])
    assert moments.cap_force(y, apart, 1.0) * apart == pytest.approx([200e3, 125e3, 50e3, 25e3])
    assert moments.flow(y, apart, 1.0) * apart == pytest.approx([300.0, 300.0, 300.0, 100.0])  # the steeper at a row
    forces = stated(cap_forces=[[0, "900 lbf"], [1000, 0]])
    assert forces.cap_force(y, apart, 1.0) == pytest.approx(4.4482216 * np.array([900.0, 675.0, 450.0, 225.0]))
    assert forces.flow(y, apart, 0.8) == pytest.approx([0.8 * 900.0 * 4.4482216 / 1000.0] * 4)
    assert forces.running(y) == pytest.approx(np.zeros(4))
