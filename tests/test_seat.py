"""Cuts, gaps and filler, against closed forms, brute force, a mesh kernel and the laws of the edge cuts."""

from __future__ import annotations

from dataclasses import replace
from itertools import combinations, pairwise, product
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from wings import GOOD, Bent, loft, slab

from wrywing.geom import cant as cants
from wrywing.geom import joint, seat, web
from wrywing.geom import runs as runs_of
from wrywing.geom.naca import naca
from wrywing.shop import job as jobs
from wrywing.shop import weigh

ENDS = (0.0, 1000.0)
BARE = {side: seat.constant(0.0) for side in web.SIDES}
EXAMPLES = Path(__file__).parent.parent / "examples"


def surveyed(wing, thickness=8.0, bond=0.0):
    plane = web.plane(wing, ends=ENDS, line=(0.3, 0.3))
    depth = {side: seat.constant(bond) for side in web.SIDES}
    return seat.survey(wing, plane, thickness=seat.constant(thickness), depth=depth), plane


def made(slope, thickness, crown=0.0, length=10.0):
    """A survey with given slopes of the seat (C, 3), and a parabolic crown, over cells of equal length."""
    slope = np.asarray(slope, dtype=float)
    tau = seat.lobatto(7)[0]
    s = length * (np.arange(len(slope))[:, None] + [0.0, 0.5, 1.0])
    n = np.broadcast_to(thickness / 2.0 * tau, (*s.shape, 7))
    top = 20.0 + slope[..., None] * n + crown * (1.0 - tau**2)
    heights = {"top": top, "bottom": -top}
    ends = {side: np.full(7, at) for at, side in ((0.0, "top"), (0.0, "bottom"))}
    stops = {side: np.full(7, s[-1, 2]) for side in web.SIDES}
    return seat.Survey(s, np.full(s.shape, thickness), n, heights, heights, ends, stops)


def fill(survey, treatment, runs=1, angles=None, aim="filler"):
    chosen = ()
    if treatment == "set bevel":
        chosen = runs_of.best_runs(survey, "top", runs=runs, angles=angles, aim=aim)
    return seat.cut(survey, "top", treatment, chosen)


@pytest.mark.parametrize("thickness", [3.0, 8.0])
def test_a_flat_tilted_skin_needs_triangle_prisms_of_filler(thickness):
    # Plane trigonometry (facts of the design): t^2/2 tan w for each length, gap t tan w.
    survey, plane = surveyed(loft(slab(), ENDS, twist=5.0, axis=0.3), thickness)
    slope = np.tan(np.radians(5.0))
    for side in web.SIDES:
        square = seat.cut(survey, side, "square")
        assert square.filler == pytest.approx(thickness**2 / 2 * slope * 1000.0, rel=1e-6)
        np.testing.assert_allclose(square.gap, thickness * slope, rtol=1e-6)
        full = seat.cut(survey, side, "full bevel")
        assert full.filler == pytest.approx(0.0, abs=1e-6)
        assert full.removed == pytest.approx(thickness**2 / 2 * slope * 1000.0, rel=1e-6)
    top, bottom = (seat.cut(survey, side, "full bevel") for side in web.SIDES)
    sheet = seat.sheet_volume(plane, top, bottom, survey.n)
    assert sheet == pytest.approx(1000.0 * thickness * 2 * 9.0 / np.cos(np.radians(5.0)), rel=1e-6)
    assert plane.length == pytest.approx(1000.0)


def test_a_linearly_growing_bevel_needs_a_prismoid_of_filler():
    # Published: prismoidal formula V = L/6 (A1 + 4 Am + A2), exact for a ruled prism; tan w = k y on bare flat skins.
    k = 0.2 / 1000.0
    law = Bent(lambda y: np.arctan(k * y), lambda y: k / (1 + (k * y) ** 2), ENDS)
    survey, _ = surveyed(loft(slab(), ENDS, twist=law, skin=0.0, axis=0.3))
    areas = [8.0**2 / 2 * k * y for y in (0.0, 500.0, 1000.0)]
    prismoid = 1000.0 / 6.0 * (areas[0] + 4 * areas[1] + areas[2])
    for side in web.SIDES:
        assert seat.cut(survey, side, "square").filler == pytest.approx(prismoid, rel=1e-6)


def test_the_bond_line_is_the_volume_between_skin_and_seat():
    # Plane trigonometry: a layer 0.4 mm thick square to a skin tilted by w measures 0.4 / cos w along h.
    survey, _ = surveyed(loft(slab(), ENDS, twist=5.0, axis=0.3), bond=0.4)
    assert survey.bedding("top") == pytest.approx(0.4 / np.cos(np.radians(5.0)) * 8.0 * 1000.0, rel=1e-6)


@pytest.mark.parametrize("turn", [0.0, 6.0, -6.0])
def test_a_thinner_sheet_is_read_from_a_thicker_ones_survey(turn):
    y = [0.0, 500.0, 1000.0]
    z = [0.0, 0.0, 500.0 * np.tan(np.radians(turn))]
    wing = loft(naca("2412"), y, chord=[400.0, 325.0, 250.0], le=[0.0, 100.0, 200.0], z=z, twist=[0.0, 3.5, 7.0])
    wide, _ = surveyed(wing, 20.0)
    for thickness in (3.0, 7.5):
        direct, _ = surveyed(wing, thickness)
        for treatment in ("square", "full bevel"):
            read, wanted = (seat.cut(s, "top", treatment) for s in (wide.thinner(thickness / 20.0), direct))
            assert read.filler == pytest.approx(wanted.filler, rel=1e-5, abs=0.1 if turn else 0.0)
            assert read.gap.max() == pytest.approx(wanted.gap.max(), abs=0.01 if turn else 1e-4)


tangents = st.lists(st.floats(-0.25, 0.25), min_size=1, max_size=9)


@given(tangents, st.floats(2.0, 20.0))
def test_half_the_thickness_of_a_square_edge_needs_a_quarter_of_the_filler(slopes, thickness):
    slope = np.repeat(np.array(slopes)[:, None], 3, axis=1)
    whole, half = (fill(made(slope, t), "square").filler for t in (thickness, thickness / 2))
    assert half == pytest.approx(whole / 4.0, rel=1e-9, abs=1e-12)


@given(tangents)
def test_one_set_bevel_is_the_median_for_filler_and_the_mid_range_for_gap(slopes):
    # On a fine saw the chosen angle costs no more than the law's, and no other angle costs less than the law's.
    slope = np.repeat(np.array(slopes)[:, None], 3, axis=1)
    survey = made(slope, 8.0)
    angles = np.radians(np.arange(-16.0, 16.01, 0.05))
    for aim, law in (("filler", np.median(slopes)), ("gap", (min(slopes) + max(slopes)) / 2)):
        chosen = fill(survey, "set bevel", 1, angles, aim)
        by_law = seat.cut(survey, "top", "set bevel", (seat.Run(0.0, 10.0 * len(slopes), float(np.arctan(law))),))
        mine, lawful = (c.filler if aim == "filler" else c.gap.max() for c in (chosen, by_law))
        spare = 8.0**2 / 2 * 0.001 * 10.0 * len(slopes) if aim == "filler" else 8.0 * 0.001
        assert lawful - 1e-9 <= mine <= lawful + spare


@given(st.lists(st.floats(-0.25, 0.25), min_size=4, max_size=12), st.floats(-0.3, 0.3))
def test_more_runs_never_need_more_filler(slopes, crown):
    slope = np.repeat(np.array(slopes)[:, None], 3, axis=1)
    survey = made(slope, 8.0, crown)
    angles = runs_of.saw_angles(survey, "top", np.radians(1.0))
    needs = [fill(survey, "set bevel", runs, angles).filler for runs in (1, 2, 3, 4)]
    assert all(b <= a + 1e-9 for a, b in pairwise(needs))


@given(tangents, st.floats(0.0, 0.3), st.integers(1, 3))
def test_full_bevel_never_needs_more_than_set_nor_set_than_square(slopes, crown, runs):
    slope = np.repeat(np.array(slopes)[:, None], 3, axis=1)
    survey = made(slope, 8.0, crown)
    angles = runs_of.saw_angles(survey, "top", np.radians(0.5))
    square, full = (fill(survey, t).filler for t in ("square", "full bevel"))
    set_bevel = fill(survey, "set bevel", min(runs, len(slopes)), angles).filler
    assert full <= set_bevel + 1e-9
    assert set_bevel <= square + 1e-9


@given(tangents, st.floats(-0.3, 0.3))
def test_no_cut_fouls_the_seat(slopes, crown):
    slope = np.repeat(np.array(slopes)[:, None], 3, axis=1)
    survey = made(slope, 8.0, crown)
    for treatment in ("square", "full bevel"):
        done = fill(survey, treatment)
        assert (survey.seat["top"] - done.height[..., None] - done.slope[..., None] * survey.n).min() > -1e-9


@settings(max_examples=60)
@given(st.integers(1, 6), st.integers(1, 4), st.sampled_from(["filler", "gap"]), st.randoms(use_true_random=False))
def test_dynamic_programming_equals_brute_force(count, runs, aim, random):
    # Of divisions with the same largest gap that with least filler, of those with the same filler that in fewest runs.
    runs = min(runs, count)
    slope = np.array([[random.uniform(-0.2, 0.2) for _ in range(3)] for _ in range(count)])
    survey = made(slope, 6.0, crown=random.uniform(-0.2, 0.2))
    angles = np.radians([-8.0, -3.0, 0.0, 3.0, 8.0])
    best = fill(survey, "set bevel", runs, angles, aim)

    def cost(breaks, chosen):
        bounds = [0, *breaks, count]
        pieces = tuple(
            seat.Run(10.0 * a, 10.0 * b, float(k)) for a, b, k in zip(bounds, bounds[1:], chosen, strict=False)
        )
        done = seat.cut(survey, "top", "set bevel", pieces)
        return (round(done.gap.max(), 9) if aim == "gap" else 0.0, round(done.filler, 6), len(breaks) + 1)

    brute = min(
        cost(breaks, chosen)
        for k in range(1, runs + 1)
        for breaks in combinations(range(1, count), k - 1)
        for chosen in product(angles, repeat=k)
    )
    mine = (best.gap.max() if aim == "gap" else 0.0, best.filler, len(best.runs))
    assert mine == pytest.approx(brute, rel=1e-8, abs=2e-6)


@given(st.lists(st.floats(0.0, 3.0), min_size=7, max_size=7).flatmap(lambda v: st.tuples(st.just(v), st.randoms())))
def test_the_highest_quadratic_under_others_touches_one_of_them(drawn):
    # Brute force: of all quadratics with the same ends, none that is higher in the middle stays under all of them.
    values, random = drawn
    free = np.array([[[v], [random.uniform(0.0, 3.0)], [random.uniform(0.0, 3.0)]] for v in values])
    found = seat.highest_under(free)
    np.testing.assert_array_equal(found[[0, 2]], free.min(axis=0)[[0, 2]])
    x = np.linspace(0.0, 1.0, 2001)
    read = seat.quadratic(x)
    room = (free[..., 0] @ read - found[:, 0] @ read)[:, 1:-1] / (4.0 * x * (1.0 - x))[1:-1]
    assert -1e-12 < room.min() < 1e-3


def test_the_gap_is_that_of_the_web_not_of_places_beyond_the_ribs():
    # Closed form: a square edge's gap is t tan w, tan w growing along s; the ribs cut the faces off askew.
    s = 10.0 * (np.arange(6)[:, None] + [0.0, 0.5, 1.0])
    steep = 0.004
    whole = made(steep * s, 8.0)
    starts, stops = np.linspace(2.0, 11.0, 7), np.linspace(44.0, 53.0, 7)
    ends = {"starts": dict.fromkeys(web.SIDES, starts), "stops": dict.fromkeys(web.SIDES, stops)}
    survey = replace(whole, **ends)
    # the cut touches the front face; the clearance t tan w of the rear one, wholly there up to its own end
    assert seat.cut(survey, "top", "square").gap.max() == pytest.approx(8.0 * steep * stops[-1], rel=1e-9)
    angles = np.arctan(np.linspace(0.0, 0.24, 241))
    (run,) = runs_of.best_runs(survey, "top", runs=1, angles=angles, aim="gap")
    # t (tan w - slope) at the rear, t (slope - tan w) at the front: midway from the front's first to the rear's last
    assert np.tan(run.angle) == pytest.approx(steep * (starts[0] + stops[-1]) / 2.0, abs=0.0005)


def bent_plates(turn, sweep, start, thickness):
    """Flat plates 10 mm off the chord, bent by `turn` degrees and swept: a web's survey, the seat in closed form."""
    slopes = [0.0, np.tan(np.radians(turn))]
    le = np.tan(np.radians(sweep)) * np.array([0.0, 500.0, 1000.0])
    wing = loft(slab(), [0.0, 500.0, 1000.0], le=le, z=[0.0, 0.0, 500.0 * slopes[1]], skin=1.2, axis=0.3)
    plane = web.plane(wing, ends=(start, 980.0), line=(0.3, 0.3))
    depth = dict.fromkeys(web.SIDES, seat.constant(0.3))
    survey = seat.survey(wing, plane, thickness=seat.constant(thickness), depth=depth)

    def seated(s, n, side):
        # plane z = slope (y - 500) + over (10 - 1.5 sqrt(1 + slope^2)) of each plate; they meet at the crease
        up, heights = 1.0 if side == "top" else -1.0, []
        for slope in slopes:
            normal = np.array([0.0, -slope, 1.0])
            level = up * (10.0 - 1.5 * np.hypot(1.0, slope)) - 500.0 * slope
            heights.append((level - plane.point(s, 0.0, n) @ normal) / (plane.h @ normal))
        return (np.minimum if slopes[1] < slopes[0] else np.maximum)(*heights)

    return survey, seated


@pytest.mark.parametrize("treatment", ["square", "set bevel", "full bevel"])
@pytest.mark.parametrize("turn", [6.0, -6.0])
@pytest.mark.parametrize(
    ("start", "thickness"), [(500.0, 24.0), (500.0, 12.0), (503.0, 24.0), (495.0, 24.0), (300.0, 12.0)]
)
def test_no_cut_stands_proud_of_a_skin_that_breaks(treatment, turn, start, thickness):
    # Closed form: flat plates on both sides of the break, their insides square to them.
    survey, seated = bent_plates(turn, 30.0, start, thickness)
    tau = np.linspace(-1.0, 1.0, 81)
    nodes, n = seat.lobatto(7)[0], tau * thickness / 2.0
    for side in web.SIDES:
        chosen = ()
        if treatment == "set bevel":
            chosen = runs_of.best_runs(survey, side, runs=2, angles=np.radians(np.arange(-8.0, 8.1, 0.5)))
        cut = seat.cut(survey, side, treatment, chosen)
        first, last = (np.interp(tau, nodes, ends[side]) for ends in (survey.starts, survey.stops))
        s = np.linspace(first.min(), min(first.max() + 300.0, last.max()), 4001)[:, None]
        height, slope = (v[:, None] for v in cut.line(s[:, 0]))
        room = (seated(s, n, side) - height - slope * n) * (1.0 if side == "top" else -1.0)
        on_web = (s >= first) & (s <= last)
        assert room[on_web].min() > -1e-3
        assert room.min(axis=1).max() < 0.03  # and nowhere does it stand off without need


def between_layers(plane, top, bottom, low, high):
    """Volume of the web between the layers low(s) and high(s), each (s, n) clipped in h by the rib planes."""
    s, step = np.linspace(top.survey.s[0, 0], top.survey.s[-1, 2], 40001, retstep=True)
    nodes, weights = np.polynomial.legendre.leggauss(16)
    half = (high(s) - low(s)) / 2.0
    n = (high(s) + low(s)) / 2.0 + half * nodes[:, None]
    (up, up_slope), (down, down_slope) = (cut.line(s) for cut in (top, bottom))
    y = plane.point(s, 0.0, n)[..., 1]
    ribs = np.sort([(end - y) / plane.h[1] for end in plane.ends], axis=0)
    tall = np.minimum(up + up_slope * n, ribs[1]) - np.maximum(down + down_slope * n, ribs[0])
    return float(weights @ (np.maximum(tall, 0.0) * half).sum(axis=1)) * step


@pytest.mark.parametrize("treatment", ["square", "full bevel"])
@pytest.mark.parametrize("faces", ["both", "rear"])
def test_volumes_between_rib_planes_that_cut_the_web_askew(treatment, faces):
    # Independent: midpoints along s, Gauss-Legendre across, each height clipped by the rib planes as it is.
    wing = loft(naca("2412"), ENDS, chord=[300.0, 200.0], le=[0.0, -500.0], z=[0.0, 140.0], twist=[0.0, 9.0])
    plane = web.plane(wing, ends=(0.0, 980.0), line=(0.3, 0.32), cant=np.radians(-20.0))
    thickness, middle = joint.Thickening(18.0, 80.0, 50.0, plane.length, faces=faces).over(6.0)
    depth = dict.fromkeys(web.SIDES, seat.constant(2.0))
    survey = seat.survey(wing, plane, thickness=thickness, middle=middle, depth=depth)
    top, bottom = (seat.cut(survey, side, treatment) for side in web.SIDES)
    outer = (lambda s, k=k: middle(s) + k * thickness(s) / 2.0 for k in (-1.0, 1.0))
    whole = between_layers(plane, top, bottom, *outer)
    plain = between_layers(plane, top, bottom, *(lambda s, k=k: np.full_like(s, k) for k in (-3.0, 3.0)))
    assert seat.sheet_volume(plane, top, bottom, survey.n) == pytest.approx(whole, rel=2e-6)
    assert joint.pads_volume(plane, top, bottom, 6.0) == pytest.approx(whole - plain, rel=2e-5)


def test_square_edges_that_cross_leave_no_sheet():
    # Plane trigonometry: flat skins tilted by w, 18 mm apart: 18 / cos w - t tan w between square edges.
    survey, _ = surveyed(loft(slab(), ENDS, twist=50.0, axis=0.3), 24.0)
    w = np.radians(50.0)
    square, full = ([seat.cut(survey, side, treatment) for side in web.SIDES] for treatment in ("square", "full bevel"))
    with pytest.raises(web.NothingInside, match=r"mm of height at s = \d+ mm$") as fault:
        seat.refuse_crossing(*square)
    assert fault.value.height == pytest.approx(18.0 / np.cos(w) - 24.0 * np.tan(w), abs=1e-6)
    seat.refuse_crossing(*full)


CROSSED = {
    "washout = 6": "washout = 25",
    "chord = 200": "chord = 90",
    "thickness = 6": "thickness = 14",
    "thickness = 1\n": "thickness = 2.5\n",
    "line = [0.3, 0.3]": "line = [0.3, 0.62]",
}


def test_a_web_whose_edges_cross_is_refused_in_one_line_and_is_no_candidate(tmp_path):
    text = GOOD
    for old, new in CROSSED.items():
        assert old in text
        text = text.replace(old, new)
    (tmp_path / "wing.toml").write_text(text)
    job = jobs.load(tmp_path / "wing.toml")
    wanted = "wanted an edge cut that leaves room for the web, got square"
    with pytest.raises(jobs.WingError, match=rf"^wing\.toml: web\.edge: {wanted}: -2\.70 mm of height at s = 983 mm$"):
        _ = job.web
    made = weigh.candidates(job, [14.0], ["square", "full bevel"], [0.0])
    assert [(c.refused, np.isfinite(c.gap)) for c in made] == [("no room", False), (None, True)]


@pytest.mark.parametrize("runs", [0, 6])
def test_runs_beyond_the_places_are_refused(runs):
    with pytest.raises(ValueError, match=f"from 1 to 5 runs .* got {runs}"):
        runs_of.best_runs(made(np.zeros((5, 3)), 6.0), "top", runs=runs, angles=np.zeros(1))


def nasa(tmp_path):
    kernel = pytest.importorskip("kernel")
    path = tmp_path / "nasa.toml"
    path.write_text(kernel.wing_file_text(kernel.NASA_WING, kernel.Web()))
    return path


@pytest.mark.parametrize("wing", ["nasa", "saltpan.toml", "highmoor.toml"])
@pytest.mark.parametrize("treatment", ["square", "set bevel", "full bevel"])
def test_filler_agrees_with_a_mesh_kernel(wing, treatment, tmp_path):
    # Independent kernel: manifold3d, inner solid minus web solid, closed meshes of the same curves.
    kernel = pytest.importorskip("kernel")
    pytest.importorskip("manifold3d")
    job = jobs.load(nasa(tmp_path) if wing == "nasa" else EXAMPLES / wing)
    built = job.fit(job.cant, job.survey(job.cant), treatment)
    across = np.linspace(-1.0, 1.0, 49)
    grid = {side: _grid(job, built, side, across) for side in web.SIDES}
    for side, other in (("top", "bottom"), ("bottom", "top")):
        s, n, skin, cut = grid[side]
        far = np.full_like(skin, np.min(grid[other][3]) if other == "bottom" else np.max(grid[other][3]))
        solids = [kernel.solid_between(s, n, *((far, edge) if side == "top" else (edge, far))) for edge in (skin, cut)]
        volume = kernel.volume_outside(*solids)
        mine = built.cut(side).filler + built.survey.bedding(side)
        assert mine == pytest.approx(volume, rel=0.002)
        bond = job.record.web.bond
        if bond:  # without the bond line, the filler alone
            seated = grid_seat(job, built, side, s, n)
            inner = kernel.solid_between(s, n, *((far, seated) if side == "top" else (seated, far)))
            assert built.cut(side).filler == pytest.approx(kernel.volume_outside(inner, solids[1]), rel=0.002, abs=1.0)


def grid_seat(job, built, side, s, n):
    return web.edge(job.loft, built.plane, s, n, side, job.depth[side](s)).h


def _grid(job, built, side, across):
    """Places (S, M) between the rib planes, layers (S, M), the skin there and the cut as it is at each place."""
    survey, cut = built.survey, built.cut(side)
    tau = seat.lobatto(survey.n.shape[-1])[0]
    starts, stops = (np.interp(across, tau, ends[side]) for ends in (survey.starts, survey.stops))
    inner = np.linspace(starts.max() + 1e-3, stops.min() - 1e-3, 401)
    steps = [run.start + side_of for run in cut.runs[1:] for side_of in (-1e-6, 1e-6)]  # a place on either side
    inner = np.sort(np.concatenate([inner, steps]))
    s = np.concatenate([[starts], np.repeat(inner[:, None], len(across), axis=1), [stops]])
    n = job.thickness(s) / 2.0 * across
    skin = web.edge(job.loft, built.plane, s, n, side).h
    height, slope = cut.line(s.ravel())
    return s, n, skin, (height + slope * n.ravel()).reshape(s.shape)


def test_the_best_cant_is_the_least_of_a_fine_sweep():
    job = jobs.load(EXAMPLES / "saltpan.toml")
    for treatment, aim in (("square", "filler"), ("square", "gap"), ("set bevel", "filler")):
        angle, least = job.best_cant(aim, 6.0, treatment)
        sweep = []
        for k in np.radians(np.arange(-15.0, 15.01, 0.5)):
            built = job.fit(k, job.survey(k, 6.0, coarse=True), treatment)
            sweep.append(built.filler if aim == "filler" else built.gap)
        assert least <= min(sweep) * 1.0005 + jobs.TOLD_APART[aim]
        assert abs(np.degrees(angle)) <= 15.0


@pytest.mark.filterwarnings("error")
@pytest.mark.parametrize("fits", [lambda k: abs(k) < 0.018, lambda k: 0.06 < k < 0.08, lambda k: False])
def test_the_cant_search_passes_over_cants_that_have_no_web(fits):
    # Closed form: least where it fits of a line that falls towards larger cants.
    _, least = cants.least(lambda k: 1.0 - k if fits(k) else np.inf, -0.26, 0.26, step=np.radians(1.0), close=1e-5)
    best = min((1.0 - k for k in np.linspace(-0.26, 0.26, 5201) if fits(k)), default=np.inf)
    assert least == pytest.approx(best, abs=0.018)


@settings(max_examples=30)
@given(st.dictionaries(st.integers(-5, 5), st.floats(0.0, 1.0), min_size=1, max_size=4), st.floats(-0.01, 0.01))
def test_the_cant_search_finds_the_deepest_of_several_hollows(floors, shift):
    # Hollows 0.05 rad apart, nearly three steps of the sweep.
    hollows = [(0.05 * place + shift, floor) for place, floor in floors.items()]

    def figure(k):
        return min(floor + 40.0 * abs(k - at) for at, floor in hollows)

    _, least = cants.least(figure, -0.26, 0.26, step=np.radians(1.0), close=1e-6)
    assert least == pytest.approx(min(floor for _, floor in hollows), abs=1e-3)
