"""Cap strips: the schedule by hand, the bed under them, strains, reserves, masses, and what is refused."""

from __future__ import annotations

import json
import math
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_allclose
from test_weigh import PLAIN, SLAB
from typer.testing import CliRunner

from wrywing import cli
from wrywing.geom import caps, seat, web
from wrywing.shop import job as jobs
from wrywing.shop import loads, weigh
from wrywing.shop import masses as weights
from wrywing.shop import verdict as choice
from wrywing.shop.describe import strength as describe_strength
from wrywing.shop.sheets import drawings as sheets
from wrywing.shop.stock import Stock, Strip

EXAMPLES = Path(__file__).parent.parent / "examples"
POUND, INCH = 4.4482216, 25.4

# Two flat skins 40 mm apart, tilted by 5 degrees; the cap force falls straight from 9 kN to nothing over 1000 mm.
LOAD = "[load]\ncap_forces = [[0, 9000], [1000, 0]]\n"
CAPS = """[caps]
strip = "pultruded carbon strip"
width = 6
thickness = 0.8
allowable = 5000
bond_shear = 5
glue = 0.1
"""
LOADED = PLAIN + LOAD + CAPS


@pytest.fixture
def slab(tmp_path):
    (tmp_path / "slab.dat").write_text(SLAB)

    def made(text=LOADED):
        (tmp_path / "wing.toml").write_text(text)
        return jobs.load(tmp_path / "wing.toml")

    return made


# ---------------------------------------------------------------------------- the schedule


def test_a_straight_load_by_hand(slab):
    # ultimate 13 500 N: 2.7 layers of 5000 N. Two suffice from 1000 (1 - 10/13.5) = 259.3 mm, one from 629.6 mm.
    # The bond hands 5000 N over in 5000 / (6 x 5) = 166.7 mm: stops at 425.9 and 796.3, in steps of 10 mm.
    job = slab()
    for side in web.SIDES:
        assert job.caps.stacks[side].stops == (1000.0, 800.0, 430.0)
        assert job.caps.bond[side] == pytest.approx(166.667, abs=0.001)
    # to cut: the feathered end, 10 x 0.8 mm, comes on top
    lengths = [layer.length for layer in job.layers if layer.side == "top"]
    assert lengths == pytest.approx([1000.0, 808.0, 438.0], abs=0.05)
    # centroids: 40 mm less two skins of 1, two bond lines of 0.5 and two half stacks of 3 x 0.9 / 2, over cos 5
    cos = math.cos(math.radians(5.0))
    assert job.caps.apart[0] == pytest.approx((40.0 - 2.0 - 1.0 - 2.7) / cos, abs=1e-3)
    assert job.caps.moment[0] == pytest.approx(13500.0 * job.caps.apart[0])


def test_the_bed_follows_the_stack(slab):
    # Lower by the stack over cos 5: 3 layers of 0.9 mm, 2 beyond 438 mm, 1 beyond 808 mm; half-way down at 434 mm.
    bare, capped = slab(PLAIN), slab()
    places = [100.0, 430.0, 434.0, 438.0, 700.0, 900.0]
    rows = zip(bare.rows(places), capped.rows(places), strict=True)
    lower = [(a.top.cut_front - b.top.cut_front, b.bottom.cut_front - a.bottom.cut_front) for a, b in rows]
    steps = 0.9 / math.cos(math.radians(5.0)) * np.array([3.0, 3.0, 2.5, 2.0, 2.0, 1.0])
    assert_allclose(lower, np.column_stack([steps, steps]), atol=2e-3)


def test_masses_by_hand(slab):
    # At each edge 6 x 0.8 mm of strip over 1000 + 804 + 434 mm (a feathered end counts half): 10 742 mm^3.
    bare, job = slab(PLAIN), slab()
    before, after = weights.masses(bare, bare.web), weights.masses(job, job.web)
    strip = 6 * 0.8 * (1000.0 + 804.0 + 434.0)
    assert after.strips == pytest.approx(2 * strip * 1550e-6, rel=1e-3)
    # epoxy between the strips: an eighth of their volume; paste beside them: (8 / cos 5 - 6) x 0.9 over the same length
    assert after.bond - before.bond == pytest.approx(2 * strip / 8.0 * 1150e-6, rel=1e-3)
    beside = (8.0 / math.cos(math.radians(5.0)) - 6.0) * 0.9 * (1000.0 + 804.0 + 434.0)
    assert after.filler_top - before.filler_top == pytest.approx(beside * 600e-6, rel=5e-3)
    parts = [weights.bedded(job, job.web.survey, side) for side in web.SIDES]
    beds = [job.web.survey.bedding(side) for side in web.SIDES]
    assert [p.bond + p.strips + p.cover + p.beside for p in parts] == pytest.approx(beds, rel=1e-6)


def test_a_cover_ply_lowers_the_bed_and_weighs(slab):
    # Glass of 105 g/m^2 and as much epoxy: 105/2550 + 105/1150 = 0.1325 mm, 210 g/m^2 on 8 / cos 5 mm x 1000 mm.
    cover = '[caps.cover]\ncloth = "glass cloth 105"\nlayers = 1\nresin_fraction = 0.5\n'
    with_cover, without = slab(LOADED + cover), slab()
    cos = math.cos(math.radians(5.0))
    rows = [job.rows([900.0])[0].top.cut_front for job in (without, with_cover)]
    assert rows[0] - rows[1] == pytest.approx(0.13248 / cos, abs=1e-3)
    assert weights.masses(with_cover, with_cover.web).cover == pytest.approx(2 * 8.0 / cos * 1000.0 * 210e-6, rel=2e-3)


def test_side_by_side_halves_the_layers(slab):
    job = slab(LOADED.replace("width = 6", "width = 4\nbeside = 2"))
    assert [len(job.caps.stacks[side].stops) for side in web.SIDES] == [2, 2]
    assert [layer.count for layer in job.layers] == [2, 2, 2, 2]


def test_compression_has_an_allowable_of_its_own(slab):
    job = slab(LOADED + 'compression = "800 MPa"\n')  # 800 x 6 x 0.8 = 3840 N: 13 500 / 3840 = 3.5
    assert {side: len(stack.stops) for side, stack in job.caps.stacks.items()} == {"top": 4, "bottom": 3}


def test_highmoor_by_hand_at_three_places():
    """The example's schedule in pounds and inches; only the heights of the skin's inside come from the bevel table."""
    job = jobs.load(EXAMPLES / "highmoor.toml")
    # one strip, 5/16 x 0.045 in: 800 MPa is 116 030 psi, 1000 MPa 145 038 psi
    carries = {"top": 116030.0 * 5 / 16 * 0.045, "bottom": 145038.0 * 5 / 16 * 0.045}  # 1631.7 and 2039.6 lbf
    # bonds: 6 MPa, 870.2 psi, on 5/16 in: 6.00 in and 7.50 in, stops in steps of 1/2 in
    bond = {side: carries[side] / (5 / 16 * 870.2) for side in web.SIDES}
    assert bond["top"] == pytest.approx(6.0, abs=0.002)
    # half the lift: 560 lb x 4 / 2 at limit, x 1.5
    lift = 560.0 * 4 / 2 * 1.5  # 1680 lbf
    lean = 92.0 / (job.web.plane.length / INCH)  # 92 in across the ribs, 93.526 in along the web

    def layers_needed(s, layers):
        """Top and bottom, `s` inches out, where so many layers lie at the top and the bottom."""
        e = (60.0 + s * lean) / 156.0  # the panel begins 13 ft - 96 in = 60 in from the centreline
        root = math.sqrt(1 - e * e)
        outboard = 3 / 8 * (math.acos(e) - e * root) - e * root**3 / 4
        moment = lift * 156.0 * 16 / (3 * math.pi) * (root**5 / 5 - e * outboard) / lean
        row = job.rows([s * INCH])[0]
        tall = (row.top.front + row.top.rear - row.bottom.front - row.bottom.rear) / 2 / INCH
        # bond line 0.010, cover 105/2550 + 105/1150 mm = 0.0052, half of each layer's 0.045 + 0.004 in; the beds slope
        # by up to 3.4 degrees across and 1.7 along
        lost = [0.010 + 0.0052 + 0.049 * n / 2 for n in layers]
        force = moment / (tall - sum(lost) / 0.998)
        return force / carries["top"], force / carries["bottom"]

    # at the inner end: 3.42 and 2.73, so 4 layers at the top and 3 at the bottom
    assert layers_needed(0.0, (4, 3)) == pytest.approx((3.42, 2.73), abs=0.005)
    stacks = job.caps.stacks
    assert [len(stacks[side].stops) for side in web.SIDES] == [4, 3]
    # the fourth at the top: three suffice between 4.0 and 4.5 in; with 6.0 in of bond it stops at 10.5 in
    assert layers_needed(4.0, (4, 3))[0] > 3.0 > layers_needed(4.5, (4, 3))[0]
    assert stacks["top"].stops[3] == pytest.approx(10.5 * INCH)
    # the third at the bottom: two suffice between 9.5 and 10.0 in; with 7.5 in of bond it stops at 17.5 in
    assert layers_needed(9.5, (4, 3))[1] > 2.0 > layers_needed(10.0, (4, 3))[1]
    assert stacks["bottom"].stops[2] == pytest.approx(17.5 * INCH)
    # the second at the top: one suffices between 32.0 and 32.5 in: 38.5 in
    assert layers_needed(32.0, (2, 2))[0] > 1.0 > layers_needed(32.5, (2, 2))[0]
    assert stacks["top"].stops[1] == pytest.approx(38.5 * INCH)


@settings(max_examples=60, deadline=None)
@given(
    st.lists(st.floats(0.0, 7.0), min_size=2, max_size=30),
    st.floats(10.0, 400.0),
    st.floats(1.0, 60.0),
    st.floats(1.0, 80.0),
)
def test_no_place_is_left_short(need, bond, step, ramp):
    """Whatever the load, the layers that carry are enough everywhere; stops are whole steps, a ramp or more apart."""
    need, s = np.array(need), np.linspace(0.0, 2000.0, len(need))
    stack = caps.Stack(caps.stops(need, s, bond=bond, step=step, ramp=ramp), 1.0, ramp, 2000.0)
    places = np.linspace(0.0, 2000.0, 4001)
    assert np.all(stack.carrying(places, bond) >= np.interp(places, s, need) - 1e-6)
    inner = np.array([stop for stop in stack.stops if stop < 2000.0])
    assert_allclose(inner / step, np.round(inner / step), atol=1e-6)
    assert np.all(-np.diff(inner) >= ramp - 1e-9)
    assert len(stack.stops) == max(1, math.ceil(need.max() - 1e-9))
    assert stack.height(0.0) == len(stack.stops)


def test_schedule_and_centroids_agree():
    # The fixed point: force, stacks and centroids of the answer belong to each other.
    job = jobs.load(EXAMPLES / "highmoor.toml")
    found, plane = job.caps, job.web.plane
    heights = [
        caps.height(job.loft, plane, found.s, side, 0.01 * INCH + 0.13248 + found.height(side)(found.s) / 2)
        for side in web.SIDES
    ]
    assert_allclose(found.apart, heights[0] - heights[1], atol=1e-4)
    limit = job.load.at(loads.Line(found.y, found.apart, np.zeros_like(found.y), plane.s[1]))
    assert_allclose(found.force, 1.5 * limit.force, rtol=1e-9)
    assert_allclose(found.moment, found.force * found.apart, rtol=1e-9)
    for check in job.strength.checks[:2]:
        assert check.reserve.min() >= 1.0


# ---------------------------------------------------------------------------- common practice


def strip(name, width, thickness, figure):
    return getattr(Stock().find(name, Strip), figure) * width * thickness * INCH**2 / POUND


def test_common_practice_of_sticks_and_strips():
    # Common practice: a spruce stick 1/2 x 1/4 in fails near 1250 lbf, a carbon strip 0.024 x 0.25 in carries 1800.
    assert strip("spruce strip", 0.5, 0.25, "tension") == pytest.approx(1250.0, rel=0.02)
    assert strip("pultruded carbon strip", 0.25, 0.024, "tension") == pytest.approx(1800.0, rel=0.01)


def test_common_practice_five_strips(slab):
    # Common practice: 6000 lbf at limit with factor 1.5 takes five such strips.
    five = '[caps]\nstrip = "pultruded carbon strip"\nwidth = "1/4 in"\nthickness = "24 thou"\nallowable = "1800 lbf"\n'
    job = slab(PLAIN + '[load]\ncap_forces = [[0, "6000 lbf"], [1000, 0]]\n' + five)
    assert [len(job.caps.stacks[side].stops) for side in web.SIDES] == [5, 5]


def test_common_practice_of_gaps(slab):
    # Common practice: the gap of a half-inch web at 3 degrees is about a third of that at 8; a quarter-inch one halves
    # both.
    def gap(thickness, tilt):
        return slab(PLAIN.replace("thickness = 8", f'thickness = "{thickness} in"').replace("= 5", f"= {tilt}")).web.gap

    assert gap("1/2", 3) / gap("1/2", 8) == pytest.approx(1 / 3, abs=0.05)
    assert gap("1/4", 3) / gap("1/2", 3) == pytest.approx(0.5, abs=1e-3)
    assert gap("1/4", 8) / gap("1/2", 8) == pytest.approx(0.5, abs=1e-3)


# ---------------------------------------------------------------------------- volumes against other kernels


def test_filler_under_caps_agrees_with_a_mesh_kernel_over_a_cad_kernels_surfaces(tmp_path):
    """Seat from Open CASCADE (the skin thickened by the depth), square cut and volumes from it by manifold3d alone."""
    kernel = pytest.importorskip("kernel")
    pytest.importorskip("OCP")
    wing, plain = kernel.NASA_WING, kernel.Web(ends=(0.0, 1800.0))
    text = kernel.wing_file_text(wing, plain, edge="square")
    load = "[load]\ncap_forces = [[0, 4000], [1800, 0]]\n"
    strips = '[caps]\nstrip = "laid-up carbon strip"\nwidth = 6\nthickness = 1\nallowable = 2200\nramp = 40\n'
    (tmp_path / "nasa.toml").write_text(text + load + strips)
    job = jobs.load(tmp_path / "nasa.toml")
    assert [len(job.caps.stacks[side].stops) for side in web.SIDES] == [3, 3]

    corners = np.concatenate([job.depth[side].s for side in web.SIDES])
    s = np.unique(np.concatenate([np.linspace(25.0, job.web.plane.length - 25.0, 61), corners]))
    n = plain.thickness / 2 * seat.lobatto(7)[0]
    deep = np.array([0.3, 1.8, 3.3])  # skins thickened by this much; heights between them by a parabola
    found = [kernel.reference_edges(kernel.Wing(**(vars(wing) | {"skin": wing.skin + d})), plain, s, n) for d in deep]
    depth = {side: job.depth[side](s) for side in web.SIDES}
    seats = {}
    for i, side in enumerate(web.SIDES):
        read = seat._lagrange(deep, depth[side])
        seats[side] = np.einsum("kc,kcm->cm", read, np.array([pair[i] for pair in found]))
        mine = web.edge(job.loft, job.web.plane, s[:, None], n, side, depth[side][:, None]).h
        assert_allclose(mine, seats[side], atol=0.002)

    fine = np.linspace(n[0], n[-1], 41)
    read, survey = seat._lagrange(n, fine), job.web.survey
    across, places = seat.lobatto(7)[1] / 2.0 * plain.thickness, np.linspace(s[0], s[-1], 20001)

    def integral(area):
        return np.trapezoid(np.interp(places, survey.s.ravel(), area.ravel()), places)

    cuts, far = [], np.zeros((len(s), 41))
    for i, (side, sign) in enumerate((("top", 1.0), ("bottom", -1.0))):
        skin = sign * np.array(kernel.reference_edges(wing, plain, s, n)[i]) @ read
        bed = sign * (seats[side] @ read)
        cuts.append(sign * np.broadcast_to(bed.min(axis=1)[:, None], bed.shape))
        under, inner, cut = (kernel.solid_between(s, fine, far, h) for h in (skin, bed, sign * cuts[-1]))
        filler = integral(job.web.cut(side).filler_area)
        assert filler == pytest.approx(kernel.volume_outside(inner, cut), rel=0.002)
        bedding = integral(np.abs(survey.skin[side] - survey.seat[side]) @ across)
        assert bedding == pytest.approx(kernel.volume_outside(under, inner), rel=0.002)
    foam = integral((job.web.top.height - job.web.bottom.height) * plain.thickness)
    assert foam == pytest.approx(kernel.solid_between(s, fine, cuts[1], cuts[0]).volume(), rel=0.002)


# ---------------------------------------------------------------------------- strains and checks


def test_strips_twisted_along_a_full_bevel(slab):
    # Washout from 0 to 6 degrees over 1000 mm: 1.0472e-4 rad/mm; x 0.8 mm of strip 8.38e-5 in shear.
    text = LOADED.replace("washout = 5", "washout = 0", 1).replace("washout = 5", "washout = 6")
    bent = slab(text.replace('"square"', '"full bevel"')).strength.bent
    assert [b.twist for b in bent] == pytest.approx([8.38e-5] * 2, rel=0.01)
    assert bent[0].helix == pytest.approx((3.0 * 1.0472e-4) ** 2 / 2, rel=0.02)
    assert [b.twist for b in slab(text).strength.bent] == [0.0, 0.0]  # square edges do not twist


def test_strips_bent_over_an_arched_edge(slab):
    # z is the parabola through 0, 5 and 0 mm (PCHIP keeps to it): 2 x 5 / 500^2 = 4e-5 per mm all along.
    middle = '[[wing.stations]]\ny = 500\nchord = 400\nz = 5\nairfoil = "slab.dat"\nwashout = 0\n'
    text = LOADED.replace("washout = 5", "washout = 0").replace("[wing]", '[wing]\nplanform = "smooth"')
    head, tail = text.rsplit("[[wing.stations]]", 1)
    for bent in slab(f"{head}{middle}[[wing.stations]]{tail}").strength.bent:
        assert bent.bend == pytest.approx(0.8 / 2 * 4e-5, rel=0.01)


def test_core_checks_by_hand(slab):
    # cap force falling by 13.5 N/mm at ultimate: that is the shear flow. Bare 8 mm sheet: 13.5 / 8 = 1.6875 MPa, and
    # PVC foam of 80 kg/m^3 has 0.95 in stock. Bond: 13.5 / 6 = 2.25 MPa against the 5 stated.
    bare = LOADED.split("[web.facing]")[0] + LOAD + CAPS
    checks = {check.name: check for check in slab(bare).strength.checks}
    assert checks["core in shear"].reserve[0] == pytest.approx(0.95 / 1.6875)
    assert checks["core in shear"].origin == "stock"
    assert checks["strip bond"].reserve[0] == pytest.approx(5.0 / 2.25)
    assert checks["strip bond"].origin == "the wing file"
    # Faced with 2 x 105 g/m^2 glass in as much epoxy: 0.26496 mm, 8000 MPa; the core, 23 MPa, keeps
    # 23 x 8 / (23 x 8 + 2 x 8000 x 0.26496) = 4.16 % of the flow.
    faced = bare.replace("[load]", '[web.facing]\ncloth = "glass cloth 105"\nlayers = 2\nresin_fraction = 0.5\n[load]')
    checks = {check.name: check for check in slab(faced).strength.checks}
    angle = 13.5 / (23 * 8 + 2 * 8000 * 0.26496)
    assert checks["core in shear"].demand[0] == pytest.approx(23 * angle, rel=1e-4)
    assert checks["facings in shear"].demand[0] == pytest.approx(8000 * angle, rel=1e-4)
    # Crushing: straight edges; both caps strained by F / (130 000 x 3 x 4.8 mm^2), on 6 mm of core; no air load told.
    apart = slab(faced).caps.apart[0]
    pressed = 13500.0 * 2 * 13500.0 / (130000.0 * 3 * 4.8) / apart / 6.0
    assert checks["core crushed"].demand[0] == pytest.approx(pressed, rel=1e-3)


def test_a_load_without_strips_checks_the_core(slab):
    job = slab(PLAIN + '[load]\nmoments = [[0, "100 N m"], [1000, 0]]\n')
    # seats 37 mm / cos 5 apart; 1.5 x 100 N m over 1000 mm: 150 N of shear
    flow = 150.0 / (37.0 / math.cos(math.radians(5.0)))
    assert [check.name for check in job.strength.checks] == ["core in shear"]  # the facing's cloth is not named
    assert job.strength.checks[0].demand[0] == pytest.approx(flow / 8.0, rel=1e-3)
    assert "facings in shear" in job.strength.unchecked[0]
    assert job.layers == ()


# ---------------------------------------------------------------------------- choices, screens and sheets


def test_weigh_refuses_a_sheet_thinner_than_its_strips_and_one_that_shears(slab):
    job = slab(LOADED.replace("layers = 2", "layers = 1"))
    thin, made = (next(iter(weigh.candidates(job, [t], ["square"], [0.0]))) for t in (5.0, 8.0))
    assert (thin.refused, thin.fits) == ("too thin", False)
    assert "5 mm is thinner than its strips, 6 mm" in thin.outside
    over = {miss.limit: miss.over for miss in made.misses}
    assert over["core in shear"] == pytest.approx(1.6875 / 0.95 - 1.0, rel=1e-3)
    assert "core in shear by 78 %" in choice.verdict([made], job).sentence


def run(*words):
    result = CliRunner().invoke(cli.app, [str(word) for word in words])
    assert result.exit_code == 0, result.output
    return result.stdout


@pytest.mark.parametrize("command", ["check", "weigh"])
@pytest.mark.parametrize("form", [(), ("--json",)])
def test_every_strength_figure_comes_with_its_caution(command, form):
    printed = " ".join(run(command, EXAMPLES / "highmoor.toml", *form).split())
    assert "no proof of airworthiness" in printed
    assert "(stock)" in printed
    if command == "check":
        assert "(the wing file)" in printed


def test_check_json_says_what_the_screen_does():
    record = json.loads(run("check", EXAMPLES / "highmoor.toml", "--json"))["strength"]
    assert [layer["number"] for layer in record["layers"]] == [1, 2, 3, 4, 1, 2, 3]
    assert record["places"][0]["layers_needed"]["top"] == pytest.approx(3.42, abs=0.01)
    assert {check["from"] for check in record["checks"]} == {"the wing file", "stock"}


def test_the_blank_shows_where_strips_stop_and_their_lengths():
    job = jobs.load(EXAMPLES / "highmoor.toml")
    for drawing in sheets.drawings(job)[:2]:
        texts = [label.text for label in drawing.labels]
        for layer in job.layers:
            if not layer.whole:
                assert any(f"layer {layer.number} to s {job.wording.plain(layer.stop)}, cut" in text for text in texts)
                ends = [stroke.points[0, 0] for stroke in drawing.strokes if len(stroke.points) == 2]
                assert min(abs(abs(x) - layer.stop) for x in ends) < 1e-6
        assert any("no proof of airworthiness" in note for note in drawing.notes)
        assert any("1 x 11.0 in, 1 x 22.5 in" in note for note in drawing.notes)


def test_doubts_name_place_and_factor(slab):
    doubts = describe_strength.doubts(slab())
    assert any(d.startswith("core in shear: reserve factor 0.56, below 1, at s 0 mm (rib y 0 mm)") for d in doubts)


# ---------------------------------------------------------------------------- bad input

BAD = [
    (("width = 6", "width = 9"), "caps.width", "wanted strips no wider than the web sheet, 8 mm, got 9 mm: take n"),
    (("width = 6", "width = 5\nbeside = 2"), "caps.width", "got 2 x 5 mm: take narrower strips, fewer side by side or"),
    (("allowable = 5000", "allowable = 0"), "caps.allowable", "a force or stress above 0"),
    (("allowable = 5000", 'allowable = "-9 MPa"'), "caps.allowable", "got '-9 MPa'"),
    (("allowable = 5000", 'compression = "3 mm"'), "caps.compression", "got '3 mm'"),
    (("bond_shear = 5", "bond_shear = 0"), "caps.bond_shear", "a stress above 0, got 0"),
    (("glue = 0.1", "step = 0"), "caps.step", "a length above 0"),
    (("glue = 0.1", "most = 2"), "caps.most", "2 layers of strips at the top edge can carry, got a cap force of 1350"),
    (("[0, 9000]", "[0, 9e6]"), "caps.most", "got a cap force of 13500000 N at s = 0 mm (rib y = 0 mm), which takes"),
    (("thickness = 0.8", "thickness = 6.5"), "caps", "19.8 mm at the top and 19.8 mm at the bottom, where there is"),
    (("[1000, 0]", "[900, 0]"), "load.cap_forces", "cover the web's ends, 0 mm to 1000 mm, got 0 mm to 900 mm"),
    (("[0, 9000]", "[0, -9]"), "load.cap_forces[1][2]", "a force of 0 or more, got -9"),
    (("cap_forces = [[0, 9000], [1000, 0]]", ""), "load.span_load", "is missing"),
    ((LOAD, ""), "load", "is missing, wanted what the cap strips have to carry"),
    (("cap_forces", 'span_load = "bell"\ncap_forces'), "load.cap_forces", "wanted none beside span_load"),
    ((LOAD, '[load]\nspan_load = "bell"\n'), "load.mass", "is missing"),
    (("[1000, 0]]", "[1000, 0]]\nmass = 3"), "load.mass", "wanted only with a span_load, got cap_forces"),
    (("glue = 0.1", "[caps.cover]\nareal_weight = 80\nlayers = 1"), "caps.cover.thickness", "is missing"),
    (('"pultruded carbon strip"', '"pvc foam 80"'), "caps.strip", "a known strip, got 'pvc foam 80', which is a foam"),
    (("glue = 0.1", '[materials."pvc foam 80"]\nshear = -1'), 'materials."pvc foam 80".shear', "above 0, got -1"),
    (("glue = 0.1", '[materials.ash]\nkind = "strip"\ndensity = 650'), "materials.ash.tension", "is missing"),
]  # fmt: skip


@pytest.mark.parametrize(("edit", "key", "words"), BAD, ids=[f"{key}-{i}" for i, (_, key, _) in enumerate(BAD)])
def test_bad_input_is_one_line_with_place_and_figures(slab, edit, key, words):
    assert LOADED.count(edit[0]) == 1
    with pytest.raises(jobs.WingError) as caught:
        _ = slab(LOADED.replace(*edit)).web
    line = str(caught.value)
    assert line.startswith(f"wing.toml: {key}: ")
    assert words in line


def test_spans_that_do_not_reach(slab):
    span = '[load]\nspan_load = "bell"\nmass = 3000\nload_factor = 4\nsemi_span = 900\n'
    with pytest.raises(jobs.WingError, match=r"load\.semi_span: .*last station, 1000 mm or more, got 900 mm"):
        slab(PLAIN + span)
    with pytest.raises(jobs.WingError, match=r"load\.semi_span: .*web's outer end, 1200 mm or more, got 900 mm"):
        slab(PLAIN + span + "inboard = 200\n")
    short = span.replace('"bell"', "[[0, 1], [800, 1]]")
    with pytest.raises(jobs.WingError, match=r"load\.span_load: .*semi-span, 0 mm to 900 mm, got 0 mm to 800 mm"):
        slab(PLAIN + short)
