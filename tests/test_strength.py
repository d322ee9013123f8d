"""Reserves by hand: resin, figures that are missing, loads that ask nothing; and slips in what a wing file states."""

from __future__ import annotations

import json
import math

import numpy as np
import pytest
from test_weigh import PLAIN, SLAB

from wrywing.export import figures_load, plot, table, table_strength
from wrywing.shop import compare, keys, steps
from wrywing.shop import job as jobs
from wrywing.shop.describe import strength as describe_strength
from wrywing.shop.describe import strips as describe_strips
from wrywing.shop.stock import Cloth, Foam, Stock
from wrywing.shop.strength import Check
from wrywing.shop.wingfile import WingError

# A slab's web, 8 mm of PVC foam 80 (from memory, shop/strengths.py: 0.95 MPa in shear, modulus 23 MPa); the cap force
# falls by 9 N/mm at limit, 13.5 N/mm at ultimate: that is the shear flow. Glass, from memory: 70 MPa, 8000 MPa.
LOAD = "[load]\ncap_forces = [[0, 9000], [1000, 0]]\n"
CAPS = '[caps]\nstrip = "pultruded carbon strip"\nwidth = 6\nthickness = 0.8\nallowable = 20000\nbond_shear = 5\n'
SPAN = '[load]\nspan_load = "bell"\nload_factor = 4\nsemi_span = 1500\n'
BARE = PLAIN.split("[web.facing]")[0]
FLOW = 13.5


@pytest.fixture
def slab(tmp_path):
    (tmp_path / "slab.dat").write_text(SLAB)

    def made(text):
        (tmp_path / "wing.toml").write_text(text)
        return jobs.load(tmp_path / "wing.toml")

    return made


def faced(resin=0.5, cloth="glass cloth 105", more=""):
    facing = f'[web.facing]\ncloth = "{cloth}"\nlayers = 2\nresin_fraction = {resin}\n'
    return BARE + facing + LOAD + more


def checks(job):
    return {check.name: check for check in job.strength.checks}


# ---------------------------------------------------------------------------- resin and fibre


@pytest.mark.parametrize("resin", [0.3, 0.5, 0.8, 0.95])
def test_resin_adds_mass_and_no_strength(slab, resin):
    # Rule of mixtures (common practice): the fibre carries. 2 x 105 g/m^2 at 2550 kg/m^3 are 0.08235 mm of glass, laid
    # by hand with as much epoxy (1150 kg/m^3) 0.26496 mm: that thickness counts, whatever is poured on.
    bearing = 2 * 105 / 2550 + 2 * 105 / 1150
    angle = FLOW / (23 * 8 + 2 * 8000 * bearing)
    job = slab(faced(resin))
    found = checks(job)
    assert found["core in shear"].reserve[0] == pytest.approx(0.95 / (23 * angle))
    assert found["facings in shear"].reserve[0] == pytest.approx(70 / (8000 * angle))
    assert job.masses.facing == pytest.approx(slab(faced(0.0)).masses.facing / (1 - resin))


def test_figures_of_a_cloth_are_for_its_fibre_volume(slab):
    # Own figures for half fibre by volume: 2 x 150 g/m^2 at 1800 kg/m^3 make a facing of 1/3 mm of such a laminate.
    own = '[materials.twill]\nkind = "cloth"\nareal_weight = 150\nfibre_density = 1800\n'
    own += "shear = 90\nshear_modulus = 20000\nfibre_volume = 0.5\n"
    found = checks(slab(faced(0.6, "twill", own)))["facings in shear"]
    assert found.demand[0] == pytest.approx(20000 * FLOW / (23 * 8 + 2 * 20000 / 3))
    assert found.allowed[0] == 90.0
    assert "50 % fibre" in found.formula
    # the same fibre measured in twice as thick a laminate has half the figures, and as much reserve
    thin = own.replace("= 90", "= 45").replace("20000", "10000").replace("0.5", "0.25")
    assert checks(slab(faced(0.6, "twill", thin)))["facings in shear"].reserve == pytest.approx(found.reserve)


def test_stock_says_which_laminate_its_figures_are_for():
    for name, density in (("glass cloth 49", 2550), ("carbon cloth 160", 1780), ("aramid cloth 61", 1440)):
        cloth = Stock().find(name, Cloth)  # half the mass epoxy of 1150 kg/m^3
        assert cloth.bears_at == pytest.approx((0.5 / density) / (0.5 / density + 0.5 / 1150))


def test_a_facing_too_dry_is_doubted(slab):
    # 10 % resin: 0.9 / 2550 of 0.9 / 2550 + 0.1 / 1150 is 80 % fibre
    assert any("80 % fibre by volume" in doubt for doubt in describe_strength.doubts(slab(faced(0.1))))
    assert not any("fibre by volume" in doubt for doubt in describe_strength.doubts(slab(faced(0.3))))


# ---------------------------------------------------------------------------- figures that are missing


def test_without_a_stiffness_each_is_checked_as_if_alone(slab):
    own = '[materials."own foam"]\nkind = "foam"\ndensity = 60\nshear = 0.6\n'
    found = checks(slab(faced(more=own).replace("pvc foam 80", "own foam")))
    assert found["core in shear"].reserve[0] == pytest.approx(0.6 / (FLOW / 8))
    bearing = 2 * 105 / 2550 + 2 * 105 / 1150
    assert found["facings in shear"].reserve[0] == pytest.approx(70 / (FLOW / 2 / bearing))


def test_a_foam_without_strengths_is_not_checked(slab):
    job = slab(
        faced(more=CAPS + '[materials."own foam"]\nkind = "foam"\ndensity = 60\n').replace("pvc foam 80", "own foam")
    )
    assert list(checks(job)) == ["top cap", "bottom cap", "strip bond", "facings in shear"]
    doubts = describe_strength.doubts(job)
    assert 'not checked, core in shear: state the shear strength of "own foam" under [materials]' in doubts
    assert any("core crushed by the caps: state the compressive strength" in doubt for doubt in doubts)


def test_a_foam_made_lighter_loses_stocks_strengths(slab):
    def job(figures):
        return slab(faced(more=f'[materials."pvc foam 80"]\n{figures}\n'))

    light = job("density = 40")
    assert "core in shear" not in checks(light)
    assert any("40 kg/m³, but stock's strengths are for 80 and are left" in d for d in describe_strength.doubts(light))
    own = job("density = 40\nshear = 0.4\nshear_modulus = 9\ncompression = 0.4")
    assert checks(own)["core in shear"].origin == "the wing file"
    assert checks(own)["core in shear"].allowed[0] == 0.4
    for density in (75, 100):  # as weighed, or heavier: at least as strong
        assert checks(job(f"density = {density}"))["core in shear"].allowed[0] == 0.95
    for same in (own, job("density = 75")):
        assert not any("stock's strengths" in doubt for doubt in describe_strength.doubts(same))


def test_what_else_is_made_lighter_is_doubted():
    stock = Stock().with_material("pultruded carbon strip", {"density": 1200.0, "tension": 900.0})
    found = stock.lighter("Pultruded  carbon strip")
    assert (found.own, found.usual, found.strengths) == (1200.0, 1550.0, ("compression", "modulus"))
    assert Stock().with_material("glass cloth 80", {"fibre_density": 1500.0}).lighter("glass cloth 80").usual == 2550
    assert Stock().with_material("glass cloth 80", {"areal_weight": 60.0}).lighter("glass cloth 80") is None
    assert Stock().lighter("pvc foam 80") is None
    assert Stock().with_material("pvc foam 80", {"density": 71.0}).find("pvc foam 80", Foam).shear is None


# ---------------------------------------------------------------------------- nothing asked


def test_reserve_where_nothing_is_asked():
    demand = np.array([2.0, 1e-16, 0.0, -1e-17, math.nan])
    check = Check("", "", "MPa", demand, 5.0, "stock")
    assert check.reserve[:4].tolist() == [2.5, math.inf, math.inf, math.inf]
    assert math.isnan(check.reserve[4])
    assert check.allowed.tolist() == [5.0] * 5


def screen(job):
    return [row for shown in table_strength.tables(job) for row in shown.rows]


def test_level_cap_forces_ask_no_shear_and_say_so(slab):
    # The slab is as high all along: M = F a does not change, V = 0.
    job = slab(faced(more=CAPS).replace("[1000, 0]", "[1000, 9000]"))
    rows = {row[0]: row for row in screen(job)}
    assert rows["core in shear"][1] == ">99"
    assert rows["core in shear"][4:] == ("0 MPa", "0.95 MPa", "stock")
    assert rows["strip bond"][5] == "5 MPa"
    assert rows["top cap"][1] == "1.48"  # 20 000 / 13 500
    doubts = describe_strength.doubts(job)
    assert "the load as stated asks nothing of: strip bond, core in shear, facings in shear" in doubts
    record = json.loads(table.to_json(describe_strength.record(job)))
    assert [check["reserve"] for check in record["checks"] if check["name"] == "strip bond"] == [None]
    with plot.style():
        assert "strip bond &gt;99" in plot.to_svg(figures_load.reserves(job), "reserves")


def test_a_load_that_ends_short_of_the_tip_leaves_no_reserve_below_nothing(slab):
    short = SPAN.replace('"bell"', "[[0, 1], [1200, 0.1], [1300, 0], [1500, 0]]") + 'mass = "5 kg"\n'
    whole, cut = slab(BARE + SPAN + 'mass = "5 kg"\n' + CAPS), slab(BARE + short + CAPS)
    for job in (whole, cut):
        for check in job.strength.checks:
            assert np.all(check.demand >= 0.0)
            assert check.reserve.min() > 1.0
            assert check.least == 0
        assert not any(cell.startswith("-") or "nan" in cell for row in screen(job) for cell in row)
        assert not any("reserve" in doubt for doubt in describe_strength.doubts(job))
    change = {effect.what: effect for effect in compare.compare(whole, cut).effects}["least reserve factor"]
    assert 1.0 < min(change.a, change.b) < max(change.a, change.b) < 100.0


# ---------------------------------------------------------------------------- tabled cap forces


def test_tabled_cap_forces_are_called_what_they_are(slab):
    # Chord from 400 to 200 mm: the web falls from 37 to 17 mm, the line of half chords is swept by 100 mm, both over
    # 1000 mm. V = dM/ds, so its integral is M's fall.
    text = (BARE + LOAD + CAPS).replace("washout = 5", "washout = 0").replace("chord = 400", "chord = 200")
    found = slab(text.replace("chord = 200", "chord = 400", 1))
    at, formulas = found.caps, {check.name: check.formula for check in found.strength.checks}
    assert np.trapezoid(at.shear, at.s) == pytest.approx(at.moment[0] - at.moment[-1], rel=1e-3)
    # by hand at the inner end: caps 37 - 0.8 mm apart, 13.5 N/mm of it, and 13 500 N x 20 mm over 1000 mm
    lean = 1000 / math.hypot(1000, 100)
    assert at.apart[0] == pytest.approx(36.2, abs=0.02)
    assert at.flow[0] == pytest.approx(13.5 * lean)
    assert at.shear[0] == pytest.approx((13.5 * 36.2 + 13500 * 0.02) * lean, rel=5e-4)
    assert formulas["top cap"] == "cap force as tabled"
    assert "air load" not in formulas["core crushed"]
    assert ("reckoned", "shear flow: slope of the cap force along the web") in describe_strength.lines(found)


def test_a_span_load_is_reckoned_by_its_moment(slab):
    job = slab(BARE + SPAN + 'mass = "50 kg"\n' + CAPS)
    formulas = {check.name: check.formula for check in job.strength.checks}
    assert formulas["bottom cap"] == "bending moment / distance between cap centroids"
    assert "air load" in formulas["core crushed"]
    assert job.caps.flow * job.caps.apart == pytest.approx(job.caps.shear)


# ---------------------------------------------------------------------------- slips and words


@pytest.mark.parametrize(
    ("mass", "words"),  # a wing of 2 x 4 m x 0.4 m, 3.2 m^2
    [
        ("5", "load.mass, 0.005 kg, is less than 5 times the two webs'"),
        ('"5 kg"', None),
        ('"5000 kg"', "load.mass, 5000 kg, is 1.56e+03 kg/m² of the wing"),
        ('"0.8 kg"', "load.mass, 0.8 kg, is 0.25 kg/m² of the wing"),
    ],
)
def test_a_mass_in_the_wrong_unit_is_doubted(slab, mass, words):
    text = BARE + SPAN.replace("1500", "4000") + f"mass = {mass}\n"
    doubts = [doubt for doubt in describe_strength.doubts(slab(text)) if "load.mass" in doubt]
    if words is None:
        assert doubts == []
    else:
        assert doubts[0].startswith(words)
        assert doubts[0].endswith("is that the unit that is meant? A bare mass is in grams")


def test_negative_load_factors_are_said_to_be_left_out(slab):
    assert "negative load factors" in describe_strength.lines(slab(faced()))[-1][1]
    with pytest.raises(WingError, match="load_factor"):
        slab(BARE + SPAN.replace("= 4", "= -4") + 'mass = "5 kg"\n')


def test_one_layer_is_one(slab):
    job = slab(BARE + LOAD + CAPS)
    assert ": 1 layer at the top, 1 layer at the bottom, " in describe_strips.line(job, job.record.caps, job.caps)
    two = slab(BARE + LOAD + CAPS.replace("20000", "10000"))
    assert ": 2 layers at the top, 2 layers at the bottom, " in describe_strips.line(two, two.record.caps, two.caps)
    # crushed (as in test_caps): caps of 13 500 N, strained by F / (130 000 x 4.8 mm^2), press on 6 mm of 1.1 MPa foam
    pressed = 13500 * 2 * 13500 / (130000 * 4.8) / job.caps.apart[0] / 6
    least = f"least reserve factor {1.1 / pressed:.2f}, core crushed"
    assert any(least in text for step in steps.steps(job) for text in step.more)


def test_keys_say_what_they_are_of():
    cover = keys.markdown().split("**`[caps.cover]`**")[1].split("**`[")[0]
    assert "| the layers over the strips of each edge" in cover
    assert "face" not in cover
    assert "the moment in the web's own plane" in keys.markdown()
