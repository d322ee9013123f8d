"""Cuts, gaps and filler, against closed forms, brute force, a mesh kernel and the laws of the edge cuts."""

from __future__ import annotations

from itertools import combinations, pairwise, product
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from wings import Bent, loft, slab

from wrywing.geom import cant as cants
from wrywing.geom import runs as runs_of
from wrywing.geom import seat, web
from wrywing.geom.airfoil import naca
from wrywing.shop import job as jobs

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
    sheet = seat.sheet_volume(seat.cut(survey, "top", "full bevel"), seat.cut(survey, "bottom", "full bevel"))
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


def test_a_thinner_sheet_is_read_from_a_thicker_ones_survey():
    # Between stations; at a station the surface has a kink that no polynomial across the sheet follows.
    wing = loft(naca("2412"), ENDS, chord=[400.0, 250.0], le=[0.0, 200.0], twist=[0.0, 7.0])
    wide, _ = surveyed(wing, 20.0)
    for thickness in (3.0, 7.5):
        direct, _ = surveyed(wing, thickness)
        for treatment in ("square", "full bevel"):
            read = seat.cut(wide.thinner(thickness / 20.0), "top", treatment)
            assert read.filler == pytest.approx(seat.cut(direct, "top", treatment).filler, rel=1e-5)


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
    runs = min(runs, count)
    slope = np.array([[random.uniform(-0.2, 0.2)] * 3 for _ in range(count)])
    survey = made(slope, 6.0, crown=random.uniform(-0.2, 0.2))
    angles = np.radians([-8.0, -3.0, 0.0, 3.0, 8.0])
    best = fill(survey, "set bevel", runs, angles, aim)

    def cost(breaks, chosen):
        bounds = [0, *breaks, count]
        pieces = tuple(
            seat.Run(10.0 * a, 10.0 * b, float(k)) for a, b, k in zip(bounds, bounds[1:], chosen, strict=False)
        )
        done = seat.cut(survey, "top", "set bevel", pieces)
        return done.filler if aim == "filler" else done.gap.max()

    brute = min(
        cost(breaks, chosen)
        for k in range(1, runs + 1)
        for breaks in combinations(range(1, count), k - 1)
        for chosen in product(angles, repeat=k)
    )
    assert (best.filler if aim == "filler" else best.gap.max()) == pytest.approx(brute, rel=1e-9, abs=1e-12)


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
    flat = s.ravel()
    thickness = job.thickness(flat)
    nodes = thickness[:, None] / 2.0 * tau
    seated = web.edge(job.loft, built.plane, flat[:, None], nodes, side, job.depth[side](flat)[:, None]).h
    slope = seat.slope_at(cut, flat, seated, thickness)
    height = seat.rest(seated, nodes, slope, side)
    return s, n, skin, (height + slope * n.ravel()).reshape(s.shape)


def test_the_best_cant_is_the_least_of_a_fine_sweep():
    job = jobs.load(EXAMPLES / "saltpan.toml")
    for treatment, aim in (("square", "filler"), ("square", "gap"), ("set bevel", "filler")):
        angle, least = job.best_cant(aim, 6.0, treatment)
        sweep = []
        for k in np.radians(np.arange(-15.0, 15.01, 0.5)):
            built = job.fit(k, job.survey(k, 6.0, longest=jobs.COARSE), treatment)
            sweep.append(built.filler if aim == "filler" else built.gap)
        assert least <= min(sweep) * 1.0005 + jobs.TOLD_APART[aim]
        assert abs(np.degrees(angle)) <= 15.0


@settings(max_examples=30)
@given(st.dictionaries(st.integers(-5, 5), st.floats(0.0, 1.0), min_size=1, max_size=4), st.floats(-0.01, 0.01))
def test_the_cant_search_finds_the_deepest_of_several_hollows(floors, shift):
    # Hollows 0.05 rad apart, nearly three steps of the sweep.
    hollows = [(0.05 * place + shift, floor) for place, floor in floors.items()]

    def figure(k):
        return min(floor + 40.0 * abs(k - at) for at, floor in hollows)

    _, least = cants.least(figure, -0.26, 0.26, step=np.radians(1.0), close=1e-6)
    assert least == pytest.approx(min(floor for _, floor in hollows), abs=1e-3)
