"""Masses and choices, one row of them by hand."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest

from wrywing.shop import job as jobs
from wrywing.shop import masses as weights
from wrywing.shop import verdict as choice
from wrywing.shop import weigh
from wrywing.shop.stock import Filler
from wrywing.shop.values import KeyedError

EXAMPLES = Path(__file__).parent.parent / "examples"

# A slab: flat sides 10 % of the chord apart from 0.15 to 0.85 of it, rounded in front and pointed behind.
TURN = math.pi * 0.5 * np.linspace(0.0, 1.0, 21)[1:-1]
NOSE = [(0.15 * (1 - math.cos(u)), 0.05 * math.sin(u)) for u in TURN]
TAIL = [(0.85 + 0.15 * e, 0.05 * (1 - e)) for e in np.linspace(0.0, 1.0, 16)[1:-1]]
UPPER = [*NOSE, *((p, 0.05) for p in np.linspace(0.15, 0.85, 71)), *TAIL]
SLAB = "\n".join(
    ["slab", "1.0 0.0", *(f"{p:.9f} {q:.9f}" for p, q in UPPER[::-1]), "0.0 0.0"]
    + [f"{p:.9f} {-q:.9f}" for p, q in UPPER]
    + ["1.0 0.0"]
)

PLAIN = """
name = "slab"
[wing]
twist_axis = 0.5
[[wing.stations]]
y = 0
chord = 400
airfoil = "slab.dat"
washout = 5
[[wing.stations]]
y = 1000
chord = 400
airfoil = "slab.dat"
washout = 5
[skin]
thickness = 1
[web]
ends = [0, 1000]
line = [0.5, 0.5]
thickness = 8
edge = "square"
bond = 0.5
foam = "pvc foam 80"
filler = "microballoon paste"
[web.facing]
areal_weight = 100
layers = 2
resin_fraction = 0.6
"""


@pytest.fixture
def slab(tmp_path):
    (tmp_path / "slab.dat").write_text(SLAB)

    def made(text=PLAIN):
        (tmp_path / "wing.toml").write_text(text)
        return jobs.load(tmp_path / "wing.toml")

    return made


def candidates(job, sheets, edges=weigh.TREATMENTS):
    return list(weigh.candidates(job, sheets, edges, [math.degrees(job.cant)]))


def test_one_row_by_hand(slab):
    # Plane trigonometry throughout: skins tilted by 5 degrees, 40 mm apart outside, 1000 mm of web, 8 mm thick.
    (row,) = candidates(slab(), [8.0], ["square"])
    tilt = math.radians(5.0)
    apart = (40.0 - 2 * 1.0 - 2 * 0.5) / math.cos(tilt)  # between the seats along h: 37.141 mm
    gap = 8.0 * math.tan(tilt)  # 0.69991 mm
    height = apart - gap  # each square edge stands half a gap lower than the seat's middle
    assert row.gap == pytest.approx(gap, rel=1e-4)
    # foam 80 kg/m^3: 8 x 36.44 x 1000 mm^3 = 0.29153 l -> 23.3 g
    assert row.masses.foam == pytest.approx(8.0 * height * 1000.0 * 80e-6, rel=1e-4)
    # paste 600 kg/m^3: 8^2/2 x 0.08749 x 1000 mm^3 = 2.7996 ml -> 1.68 g at each edge
    assert row.masses.filler_top == pytest.approx(8.0**2 / 2 * math.tan(tilt) * 1000.0 * 600e-6, rel=1e-4)
    assert row.masses.filler_bottom == pytest.approx(row.masses.filler_top, rel=1e-4)
    # epoxy 1150 kg/m^3: two layers of 0.5 / cos 5 x 8 x 1000 mm^3 = 8.0306 ml -> 9.24 g
    assert row.masses.bond == pytest.approx(2 * 0.5 / math.cos(tilt) * 8.0 * 1000.0 * 1150e-6, rel=1e-4)
    # 2 faces x 2 layers x 100 g/m^2 / (1 - 0.6) x 0.03644 m^2 -> 36.4 g
    assert row.masses.facing == pytest.approx(2 * 2 * 100.0 / 0.4 * height * 1000.0 * 1e-6, rel=1e-4)
    assert row.masses.total == pytest.approx(23.323 + 2 * 1.680 + 9.235 + 36.442, abs=0.02)
    assert (row.bevel, row.swing, row.runs) == (0.0, 0.0, 0)


def test_the_lightest_within_the_limits_is_marked_and_the_next_named(slab):
    job = slab(PLAIN + "[limits]\nmax_gap = 0.5\nmin_thickness = 4\n")
    found = candidates(job, [3.0, 4.0, 5.0, 8.0])
    verdict = choice.verdict(found, job)
    within = [c for c in found if c.gap <= 0.5 and c.thickness >= 4.0]
    assert verdict.chosen in within
    assert verdict.chosen.masses.total == min(c.masses.total for c in within)
    assert verdict.sentence.startswith(f"Take 4 mm {verdict.chosen.edge}")
    assert "Next: 4 mm" in verdict.sentence


def test_limits_that_nothing_meets_say_which_fails_and_by_how_much(slab):
    job = slab(PLAIN + "[limits]\nmax_mass = 20\n")
    found = candidates(job, [3.0, 8.0])
    verdict = choice.verdict(found, job)
    lightest = min(c.masses.total for c in found)
    assert verdict.chosen is None
    assert f"misses max_mass by {lightest - 20.0:.1f} g" in verdict.sentence


def test_of_equal_worst_misses_the_next_and_then_the_mass_decide(slab):
    job = slab(PLAIN + "[limits]\nmin_thickness = 12\nmax_gap = 0.6\nmax_bevel = 1\n")
    square, set_bevel, full = candidates(job, [8.0], weigh.TREATMENTS)
    # Flat skins tilted by 5 degrees: the gap of a square edge, 0.7 mm, is over by 17 %, the bevel by 400 %.
    assert [{m.limit for m in c.misses} for c in (square, full)] == [
        {"min_thickness", "max_gap"},
        {"min_thickness", "max_bevel"},
    ]
    assert choice.verdict([full, set_bevel, square], job).nearest is square
    other = slab(PLAIN + "[limits]\nmin_thickness = 12\n")
    heavy, _, light = candidates(other, [8.0], weigh.TREATMENTS)
    assert light.masses.total < heavy.masses.total
    assert choice.verdict([heavy, light], other).nearest is light


def test_a_shear_that_nobody_checked_is_not_called_borne(tmp_path):
    (tmp_path / "sections").symlink_to(EXAMPLES / "sections")
    text = (EXAMPLES / "highmoor.toml").read_text()
    path = tmp_path / "wing.toml"
    path.write_text(
        text.replace('foam      = "pvc foam 80"', 'foam = "my foam"')
        + '\n[materials."my foam"]\nkind = "foam"\ndensity = 80\n'
    )
    job = jobs.load(path)
    said = choice.verdict(candidates(job, [9.525], ["full bevel"]), job).sentence
    assert "bears the shear" not in said
    assert "what shear it bears is not checked" in said
    cautions = dict(choice.cautions(job))
    assert 'state the shear strength of "my foam"' in cautions["unchecked"]
    assert "no proof of airworthiness" in cautions["caution"]


def test_reserves_below_one_stand_beside_the_verdict():
    weak = jobs.load(EXAMPLES / "highmoor.toml", {"caps.bond_shear": "200 psi"})
    assert "strip bond 0." in dict(choice.cautions(weak))["doubt"]
    assert "doubt" not in dict(choice.cautions(jobs.load(EXAMPLES / "highmoor.toml")))


def test_runs_that_only_a_set_bevel_has_refuse_that_row_alone(slab):
    job = slab(PLAIN.replace('edge = "square"', 'edge = "full bevel"\nruns = 5000'))
    square, set_bevel, full = candidates(job, [8.0])
    assert (square.fits, full.fits, set_bevel.refused) == (True, True, "runs")
    assert set_bevel.outside.startswith("web.runs: wanted from 1 to")


def test_a_search_that_finds_no_cant_refuses_its_row_and_saves_nothing(slab, monkeypatch):
    job = slab()

    def none(*_, **__):
        raise KeyedError(("web", "cant_limit"), "wanted a cant at which the web fits")

    monkeypatch.setattr(jobs.Job, "best_cant", none)
    (row,) = weigh.candidates(job, [8.0], ["square"], ["least filler"])
    assert row.refused == "cant_limit"
    assert choice.saving(job) is None
    assert choice.saving_sentence(None, job).startswith("No cant within web.cant_limit")


def test_equal_masses_take_the_easier_edge(slab):
    job = slab(PLAIN.replace("washout = 5", "washout = 0"))
    verdict = choice.verdict(candidates(job, [8.0]), job)
    assert verdict.chosen.edge == "square"


def test_a_sheet_that_leaves_the_section_is_said_to(slab):
    job = slab()
    thin, thick = candidates(job, [8.0, 420.0], ["square"])
    assert thin.outside is None
    assert "leaves the section" in thick.outside
    assert choice.verdict([thick], job).chosen is None


def test_what_the_best_cant_saves(slab):
    # Closed form: flat skins tilted by 5 degrees are met squarely by a web canted 5 degrees forward: no filler at all.
    job = slab()
    saving = choice.saving(job)
    assert saving.best == pytest.approx(-5.0, abs=0.02)
    assert saving.filler_best == pytest.approx(0.0, abs=0.02)
    assert saving.filler_stated == pytest.approx(2 * 1.680, abs=0.01)


def test_cants_that_nobody_could_tell_apart_leave_the_web_upright():
    # A law: the chosen cant is within what a workshop can tell of the least over a sweep, and none so good is nearer 0.
    job = jobs.load(EXAMPLES / "highmoor.toml", {"web.cant": "least filler", "web.edge": "set bevel", "web.runs": 2})
    density = job.stock.find(job.record.web.filler, Filler).density * 1e-6
    told = jobs.TOLD_APART["filler"] * density
    sweep = {k: weights.masses(job, job.fit(k, job.survey(k)), ()).filler for k in np.radians(np.arange(-8.0, 9.0))}
    chosen = weights.masses(job, job.web, ()).filler
    assert chosen <= min(sweep.values()) + 2.0 * told
    assert all(abs(k) >= abs(job.cant) - 1e-9 for k, mass in sweep.items() if mass < chosen - 2.0 * told)


def test_a_finer_saw_would_save_what_rounding_costs(slab):
    # Closed form: a saw that only turns by 4 degrees is 1 degree off a bevel of 5: t^2/2 (tan 5 - tan 4) of paste.
    job = slab(PLAIN.replace('edge = "square"', 'edge = "set bevel"\nangle_step = 4'))
    off = math.tan(math.radians(5.0)) - math.tan(math.radians(4.0))
    assert weights.rounding(job) == pytest.approx(2 * 8.0**2 / 2 * off * 1000.0 * 600e-6, rel=0.01)


def test_more_runs_than_places_are_refused(slab):
    job = slab(PLAIN.replace('edge = "square"', 'edge = "set bevel"\nruns = 5000'))
    with pytest.raises(jobs.WingError, match=r"web\.runs: wanted from 1 to \d+ runs .*got 5000"):
        _ = job.web


@pytest.mark.parametrize("wing", ["saltpan.toml", "highmoor.toml"])
def test_every_candidate_of_the_examples_keeps_the_order_of_the_edge_cuts(wing):
    job = jobs.load(EXAMPLES / wing)
    found = candidates(job, [8.0, 12.0])
    for square, set_bevel, full in zip(found[::3], found[1::3], found[2::3], strict=True):
        assert full.masses.filler <= set_bevel.masses.filler <= square.masses.filler


def test_a_web_that_breaks_its_own_limits_is_doubtful():
    changes = {"web.edge": "square", "web.thickness": 20, "limits.max_gap": 1.0, "limits.max_bevel": 0.5}
    job = jobs.load(EXAMPLES / "saltpan.toml", changes)
    assert [doubt for doubt in job.doubts if "limits" in doubt] == [
        f"limits.max_gap is broken, by {job.wording.length(job.web.gap - 1.0)}"
    ]
