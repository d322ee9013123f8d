"""Flanges: angles, fold and room against kernels and closed forms, their patterns on paper, and what is refused."""

from __future__ import annotations

import io
from itertools import combinations
from pathlib import Path

import ezdxf
import kernel
import numpy as np
import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.optimize import brentq
from wings import loft, slab

from wrywing.export import dxf
from wrywing.geom import flange, seat, web
from wrywing.geom.drawing import Role
from wrywing.geom.naca import naca
from wrywing.shop import job as jobs
from wrywing.shop import masses as weights
from wrywing.shop import verdict as choice
from wrywing.shop import weigh
from wrywing.shop.sheets.flange import flange_patterns
from wrywing.shop.wingfile import WingError

EXAMPLES = Path(__file__).parent.parent / "examples"
STATED = """
[flanges]
web_leg = 9
skin_leg = [24, 14]
inner_radius = 1.2
thickness = 0.5
density = 1800
max_spring = 12
front_top = {}
front_bottom = {}
rear_top = {}
rear_bottom = {}
"""
WEB = kernel.Web(ends=(0.0, 1200.0), thickness=6.0, cant=3.0)


def loaded(folder, text=STATED, of=WEB):
    path = folder / "wing.toml"
    path.write_text(kernel.wing_file_text(kernel.NASA_WING, of) + text)
    return jobs.load(path)


def laid(wing, side="top", face="rear", *, legs=(20.0, 20.0), bar=90.0, ends=(0.0, 400.0), line=(0.3, 0.3)):
    """A flange 0.6 mm thick along a sheet 6 mm thick, and what it was laid with."""
    plane = web.plane(wing, ends=ends, line=line)
    n = seat.constant(-3.0 if face == "front" else 3.0)
    corner = tuple(float(at) for at in web.end_places(wing, plane, n(0.0), side))
    shape = flange.Shape(np.radians(bar), 12.0, seat.Along(np.array([0.0, plane.length]), np.array(legs)), 0.6, 1.5)
    given_ = {"n": n, "ends": corner, "shape": shape}
    return flange.lay(wing, plane, side, face, **given_), plane, given_


# ---------------------------------------------------------------------------- the bend


@given(st.floats(0.1, 135.0), st.floats(0.0, 20.0), st.floats(0.1, 5.0))
def test_bend_allowance_is_the_published_formula(degrees, radius, thickness):
    # Published: Machinery's Handbook, sheet metal bending, 0.01745 x angle x (R + K T) as printed; K = 0.5.
    allowance = flange.bend_allowance(np.radians(degrees), radius, thickness)
    assert allowance == pytest.approx(0.01745 * degrees * (radius + 0.5 * thickness), rel=2e-4)


@given(st.floats(60.0, 130.0), st.floats(0.0, 3.0), st.floats(0.2, 2.0))
def test_the_flat_strip_is_as_long_as_the_middle_of_the_laminate(bar, radius, thickness):
    # Plane geometry: two straight legs from the corner of the outer sides, rounded off by an arc of radius R + T.
    shape = flange.Shape(np.radians(bar), 30.0, seat.constant(40.0), thickness, radius)
    assert shape.setback == pytest.approx((radius + thickness) / np.tan(np.radians(bar) / 2))
    assert shape.allowance == pytest.approx(np.pi * (180.0 - bar) / 180.0 * (radius + thickness / 2))


def test_a_flat_untapered_edge_unrolls_to_a_plain_rectangle():
    for side, face in (("top", "rear"), ("bottom", "front")):
        made, _, _ = laid(loft(slab(), [0.0, 400.0]), side, face)
        wide = 12.0 + 20.0 - 2 * 2.1 + np.pi / 2 * (1.5 + 0.3)  # legs, less two setbacks of R + T, and the bend
        x0, y0, x1, y1 = shapely.Polygon(made.outline).bounds
        assert (x1 - x0, y1 - y0) == pytest.approx((400.0, wide))
        assert made.area == pytest.approx(400.0 * wide)
        assert made.camber[0] == pytest.approx(0.0, abs=1e-9)
        np.testing.assert_allclose(np.degrees(made.angle), 90.0)


# ---------------------------------------------------------------------------- the angle asked for


@pytest.mark.parametrize("sweep", [0.0, 25.0])
def test_under_a_flat_tilted_skin_the_angle_is_square_and_the_bevel(sweep):
    # Plane trigonometry: washout w is a bevel of w along the chord, and of atan(tan w / cos sweep) square to the web.
    wing = loft(slab(0.1), [0.0, 400.0], le=[0.0, 400.0 * np.tan(np.radians(sweep))], twist=6.0)
    bevel = np.degrees(np.arctan(np.tan(np.radians(6.0)) / np.cos(np.radians(sweep))))
    for side, face, sign in (("top", "rear", 1), ("top", "front", -1), ("bottom", "rear", -1), ("bottom", "front", 1)):
        made, _, _ = laid(wing, side, face)
        np.testing.assert_allclose(np.degrees(made.angle), 90.0 + sign * bevel, atol=1e-6)
        assert np.degrees(made.best_bar) == pytest.approx(90.0 + sign * bevel)


def test_angles_agree_with_a_cad_kernel(tmp_path):
    # Independent kernel: the inner surface's slopes from Open CASCADE heights either side of each place.
    pytest.importorskip("OCP")
    job = loaded(tmp_path)
    s, d = np.array([60.0, 400.0, 800.0, 1150.0]), 0.25
    for made in job.flanges:
        one = made.flange
        out = -1.0 if one.face == "front" else 1.0
        near = [kernel.reference_edges(kernel.NASA_WING, WEB, s + a, [3.0 * out - d, 3.0 * out + d]) for a in (-d, d)]
        (before, after) = (pair[0 if one.side == "top" else 1] for pair in near)
        by_n = (before[:, 1] - before[:, 0] + after[:, 1] - after[:, 0]) / (4 * d)
        by_s = (after - before).mean(axis=1) / (2 * d)
        up = 1.0 if one.side == "top" else -1.0
        asked = np.degrees(np.arccos(-up * out * by_n / np.sqrt(1.0 + by_s**2 + by_n**2)))
        np.testing.assert_allclose(np.degrees(one.at(s)), asked, atol=0.005)


def test_the_fold_follows_the_edge_and_its_camber_is_the_edges(tmp_path):
    # Independent kernel: heights of the edge over the face, and how far they bow from the line between their ends.
    pytest.importorskip("OCP")
    job = loaded(tmp_path)
    for made in job.flanges:
        one = made.flange
        s = np.linspace(5.0, one.places[-1] - 5.0, 61)
        n = 3.0 if one.face == "rear" else -3.0
        h = kernel.reference_edges(kernel.NASA_WING, WEB, s, [n])[0 if one.side == "top" else 1][:, 0]
        chord = h[0] + (h[-1] - h[0]) * (s - s[0]) / (s[-1] - s[0])
        lean = np.cos(np.arctan((h[-1] - h[0]) / (s[-1] - s[0])))
        bow = (h - chord) * lean
        assert abs(one.camber[0]) > 0.2
        assert one.camber[0] == pytest.approx(bow[np.abs(bow).argmax()], abs=0.05)


# ---------------------------------------------------------------------------- where the skin breaks

RISES = [8.0, -15.0]


def laid_over_a_break(degrees, side, face, *, sweep=0.0, n=None):
    """Along two flat slabs, 40 mm thick, that meet at y = 507 mm, the outer one rising by `degrees`."""
    y = np.array([0.0, 507.0, 907.0])
    z = np.array([0.0, 0.0, 400.0 * np.tan(np.radians(degrees))])
    wing = loft(slab(), y, chord=400.0, le=y * sweep, z=z, skin=1.2)
    made, plane, given_ = laid(wing, side, face, ends=(300.0, 700.0))
    if n is not None:
        made = flange.lay(wing, plane, side, face, **(given_ | {"n": n}))
    return made, plane, np.column_stack([y, z])


@pytest.mark.parametrize("degrees", RISES)
@pytest.mark.parametrize(("side", "face"), [("top", "rear"), ("bottom", "front")])
def test_fold_and_legs_have_a_corner_where_the_skin_breaks(degrees, side, face):
    # Plane geometry, parallels by shapely: the web is square to the ribs, so that it cuts both slabs square.
    made, plane, middle = laid_over_a_break(degrees, side, face)
    up = 1.0 if side == "top" else -1.0
    line = shapely.LineString(middle + np.array([0.0, 20.0 * up]))
    inside = np.array(shapely.offset_curve(line, -1.2 * up, join_style="mitre").coords)
    corner = (inside[1] - plane.origin[1:]) @ plane.s[1:]
    i = int(np.abs(made.places - corner).argmin())
    assert made.places[i] == pytest.approx(corner, abs=1e-6)
    fold = made.fold[[0, i, -1]]
    assert made.fold[:, 1] == pytest.approx(np.interp(made.fold[:, 0], *fold.T), abs=1e-6)
    assert np.diff(np.degrees(np.arctan2(*np.diff(fold, axis=0).T[::-1]))) == pytest.approx(degrees)
    ring = shapely.Polygon(made.outline).exterior
    for leg, out in ((20.0, up), (12.0, -up)):  # the bar is square: set back by R + T, a quarter turn at R + T / 2
        trim = shapely.offset_curve(shapely.LineString(fold), out * (leg - 2.1 + np.pi / 4 * 1.8), join_style="mitre")
        places = [trim.interpolate(share, normalized=True) for share in np.linspace(0.1, 0.9, 81)]
        assert max(ring.distance(place) for place in places) < 1e-6


@pytest.mark.parametrize("degrees", RISES)
def test_the_angle_jumps_where_the_skin_breaks_under_a_swept_web(degrees):
    # Plane geometry: a flange asks for the angle between the normals of slab and face.
    made, plane, middle = laid_over_a_break(degrees, "top", "rear", sweep=0.4)
    normals = [np.array([0.0, -z, y]) / np.hypot(y, z) for y, z in np.diff(middle, axis=0)]
    ridge = np.array([0.0, 507.0, 20.0]) - plane.origin - 3.0 * plane.n
    corner = np.linalg.solve([[v @ plane.s, v @ plane.h] for v in normals], [v @ ridge - 1.2 for v in normals])[0]
    assert np.abs(made.places - corner).min() < 1e-6
    asked = [np.degrees(np.arccos(v @ plane.n)) for v in normals]
    assert np.degrees(made.at((corner - 0.01, corner + 0.01))) == pytest.approx(asked, abs=1e-6)
    assert abs(np.diff(asked)) > 2.0


@pytest.mark.parametrize("side", ["top", "bottom"])
@pytest.mark.parametrize("degrees", RISES)
def test_a_pattern_hollow_at_a_break_does_not_cross_itself(side, degrees):
    # shapely's validity; where a pad begins half a millimetre from the break, the legs' lines would turn back.
    plain = laid_over_a_break(degrees, side, "rear")[0]
    corner = plain.places[1 + np.abs(np.diff(plain.fold[:, 1], 2)).argmax()]
    for s in (corner - 0.5, corner + 0.5):
        made, *_ = laid_over_a_break(degrees, side, "rear", n=seat.Along(np.array([s, s + 60.0]), np.array([6.0, 3.0])))
        assert shapely.Polygon(made.outline).is_valid


# ---------------------------------------------------------------------------- legs and trim lines


def test_legs_are_as_wide_as_stated_less_the_bend(tmp_path):
    job = loaded(tmp_path)
    for made in job.flanges:
        one, shape = made.flange, made.flange.shape
        ring = shapely.Polygon(one.outline).exterior
        for s in (200.0, 900.0):
            share = s / job.web.plane.length
            skin = 24.0 + (14.0 - 24.0) * share - shape.setback + shape.allowance / 2
            back = 9.0 - shape.setback + shape.allowance / 2
            for reach in (skin, -back):
                assert ring.distance(shapely.Point(one.mark(s, (reach, 0.0))[0])) < 0.01


def test_on_a_swept_web_the_rib_planes_trim_the_skin_leg_askew():
    # Plane trigonometry: a strip w wide across a line swept by a ends w tan a further along on its rear side.
    sweep = np.tan(np.radians(25.0))
    made, _, given_ = laid(loft(slab(0.1), [0.0, 400.0], le=[0.0, 400.0 * sweep]))
    shape = given_["shape"]
    flat = 20.0 - shape.setback + shape.allowance / 2
    corner = made.outline[np.abs(made.outline[:, 1] - flat) < 1e-6]
    assert len(corner) >= 2
    low = made.outline[made.outline[:, 1] < -1.5]
    assert corner[:, 0].min() - low[:, 0].min() == pytest.approx(20.0 * sweep, abs=1e-6)
    for leg in (corner, low):
        assert np.ptp(leg[:, 0]) == pytest.approx(400.0 / np.cos(np.radians(25.0)))


@pytest.mark.parametrize(("face", "leg"), [("front", 150.0), ("rear", 300.0)])
def test_room_to_the_ends_of_the_section_is_the_arc_along_the_skin(face, leg):
    # Published: NACA Report 460, thickness of NACA 0012; its arc from the face to where the flange is as thick.
    def half(r, order=0):  # over r, the root of the chord fraction
        poly = 0.6 * np.polynomial.Polynomial([0.0, 0.2969, -0.1260, 0.0, -0.3516, 0.0, 0.2843, 0.0, -0.1015])
        return poly.deriv(order)(r) if order else poly(r)

    wing = loft(naca("0012"), [0.0, 400.0], chord=400.0, skin=1e-4)
    _, plane, given_ = laid(wing, "top", face, legs=(leg, leg))
    start = np.sqrt((120.0 + (-3.0 if face == "front" else 3.0)) / 400.0)
    stop = brentq(lambda r: 400.0 * half(r) - 0.3, 0.0, 0.1) if face == "front" else 1.0
    room = abs(quad(lambda r: 400.0 * np.hypot(2.0 * r, half(r, 1)), start, stop)[0])
    with pytest.raises(flange.TooWide) as fault:
        flange.require_room(wing, plane, "top", face, **given_)
    assert fault.value.room == pytest.approx(room, abs=1.0)
    assert fault.value.leg == leg
    _, _, fits = laid(wing, "top", face, legs=(room - 2.0, room - 2.0))
    flange.require_room(wing, plane, "top", face, **fits)


def test_flanges_lie_on_the_pads_of_a_joint(tmp_path):
    joint = '[joint]\nlength = 80\ntaper = 150\npin = 7\nwall = 0.9\noverwrap = 0.6\nfaces = "rear"\n'
    plain, thick = loaded(tmp_path), loaded(tmp_path, STATED + joint)
    for before, after in zip(plain.flanges, thick.flanges, strict=True):
        moved = np.abs(np.degrees(after.flange.at([40.0, 1000.0]) - before.flange.at([40.0, 1000.0])))
        assert moved[1] == pytest.approx(0.0, abs=1e-3)
        assert (moved[0] > 0.02) == (after.flange.face == "rear")


# ---------------------------------------------------------------------------- masses


def test_masses(tmp_path):
    job = loaded(tmp_path)
    for made in job.flanges:
        assert made.mass == pytest.approx(made.flange.area * 0.5 * 1800e-6)
    assert weights.masses(job, job.web).flanges == pytest.approx(sum(made.mass for made in job.flanges))
    cloth = STATED.replace("thickness = 0.5\ndensity = 1800", 'cloth = "glass cloth 280"\nlayers = 2')
    job = loaded(tmp_path, cloth)
    # Laminate thickness: areal weight / (fibre density x fibre volume fraction), half of its mass being fibre.
    fraction = (1 / 2550) / (1 / 2550 + 1 / 1150)
    assert job.flanges[0].flange.shape.thickness == pytest.approx(2 * 280 / (2550 * fraction))
    assert job.flanges[0].mass == pytest.approx(job.flanges[0].flange.area * 2 * 280 / 0.5 * 1e-6)


def test_a_cant_that_springs_the_flanges_too_far_is_refused(tmp_path):
    job = loaded(tmp_path, STATED.replace("max_spring = 12", "max_spring = 7"))
    near, far = weigh.candidates(job, [6.0], ["square"], [3.0, 14.0])
    assert near.masses.flanges > 0.0
    assert far.refused == "flanges"
    assert "does not suit its flanges" in choice.verdict([far], job).sentence


# ---------------------------------------------------------------------------- what is refused


def other(old, new):
    assert old in STATED
    return STATED.replace(old, new)


@pytest.mark.parametrize(
    ("text", "key", "figures"),
    [
        (other("[24, 14]", "140"), "flanges.front_top.skin_leg", ("nose", "rib y = ", "got 140 mm")),
        (
            other("rear_top = {}", "rear_top = {bar = 60}"),
            "flanges.rear_top.bar",
            ("got 60°", "at s = ", "least spring"),
        ),
        (other("max_spring = 12", "max_spring = 1"), "flanges.front_top.bar", ("within 1°", "got 90°", "by ")),
        (
            other("web_leg = 9", "web_leg = 12"),
            "flanges.front_top.web_leg",
            ("front face", "high at", "12 mm and 12 mm"),
        ),
        (other("web_leg = 9", "web_leg = 1.5"), "flanges.front_top.web_leg", ("wider than the bend, 1.7 mm", "1.5 mm")),
        (other("[24, 14]", "[24, 1]"), "flanges.front_top.skin_leg", ("wider than the bend, 1.7 mm", "got 1 mm")),
        (other("[24, 14]", "[24, 14, 3]"), "flanges.skin_leg", ("two in a list", "got [24, 14, 3]")),
        (other("[24, 14]", "[24, 0]"), "flanges.skin_leg", ("above 0, got 0",)),
        (other("thickness = 0.5\n", ""), "flanges.thickness", ("is missing",)),
        (other("density = 1800", 'cloth = "glass cloth 280"'), "flanges.layers", ("is missing",)),
        (other("density = 1800", 'cloth = "glas cloth"\nlayers = 1'), "flanges.cloth", ("a known cloth",)),
        (other("inner_radius = 1.2", "inner_radius = -1"), "flanges.inner_radius", ("got -1",)),
        (STATED.split("front_top")[0], "flanges.front_top", ("one or more of front_top",)),
        (other("front_top = {}", "front_top = {radius = 2}"), "flanges.front_top.radius", ("unknown key",)),
        (other("max_spring = 12", "max_spring = 0"), "flanges.max_spring", ("got 0",)),
        (other("web_leg = 9", "web_leg = 9\nbar = 10"), "flanges.bar", ("45 to 135", "got 10")),
    ],
)
def test_bad_flanges_are_refused_in_one_line(tmp_path, text, key, figures):
    with pytest.raises(WingError) as fault:
        loaded(tmp_path, text).flanges  # noqa: B018
    line = str(fault.value)
    assert line.startswith(f"wing.toml: {key}: ")
    assert "\n" not in line
    for figure in figures:
        assert figure in line


# ---------------------------------------------------------------------------- drawings


@pytest.mark.parametrize("hand", ["right", "left"])
def test_patterns_on_paper(tmp_path, hand):
    job = loaded(tmp_path, other("rear_top = {}", "rear_top = {bar = 94}"))
    drawings = {d.name: d for d in flange_patterns(job, hand)}
    assert list(drawings) == [f"flange-{f}-{s}" for f in ("front", "rear") for s in ("top", "bottom")]
    for made in job.flanges:
        one = made.flange
        drawing = drawings[f"flange-{one.face}-{one.side}"]
        (cut,) = (s for s in drawing.strokes if s.role is Role.CUT_OUTSIDE)
        (fold,) = (s for s in drawing.strokes if s.role is Role.FOLD)
        inside = shapely.Polygon(cut.points)
        assert inside.area == pytest.approx(one.area, rel=1e-4)
        assert inside.buffer(0.01).contains(shapely.LineString(fold.points))
        # s runs to the right where the rear face of a right-hand panel is looked at; the skin leg is at the edge's side
        sense = (1.0 if one.face == "rear" else -1.0) * (1.0 if hand == "right" else -1.0)
        words = {label.text: label for label in drawing.labels}
        assert np.sign(words["TIP"].x - words["ROOT"].x) == sense
        skin = next(label for text, label in words.items() if text.startswith("skin leg: folds towards you"))
        assert (skin.y > words["web leg"].y) == (one.side == "top")
        text = "\n".join(words)
        for word in (f"FLANGE {one.face.upper()} {one.side.upper()}", f"{hand} hand", job.stamp, "Camber", "Sprung by"):
            assert word in text
        assert f"to {94 if one.name == 'rear top' else 90}°" in skin.text
        ticks = [float(t[:-1]) for t in (label.text for label in drawing.labels) if t.endswith("°") and t[0].isdigit()]
        asked = np.degrees(one.at(np.arange(0, 1300, 50.0)))
        assert len(ticks) >= 23
        assert all(np.abs(asked - tick).min() < 0.051 for tick in ticks)


def test_no_lettering_lies_on_anything(tmp_path):
    for job in (loaded(tmp_path), jobs.load(EXAMPLES / "highmoor.toml")):
        for drawing in flange_patterns(job):
            boxes = [label.box() for label in drawing.labels]
            assert not any(a.intersects(b) for a, b in combinations(boxes, 2))
            tree = shapely.STRtree([shapely.LineString(s.points) for s in drawing.strokes])
            assert not tree.query(boxes, predicate="intersects").size


def test_a_pattern_in_dxf_has_its_fold_and_measures_what_it_should(tmp_path):
    job = loaded(tmp_path)
    drawing = flange_patterns(job)[-1]
    found = ezdxf.read(io.StringIO(dxf.render(drawing, wing="x").decode()))
    lines = list(found.modelspace().query("LWPOLYLINE"))
    ring = max((np.array(e.get_points("xy")) for e in lines if e.closed), key=len)
    assert shapely.Polygon(ring).area == pytest.approx(job.flanges[-1].flange.area, rel=1e-4)
    folds = [e for e in lines if "fold" in e.dxf.layer.lower()]
    assert len(folds) == 1
    long = shapely.LineString(np.array(folds[0].get_points("xy"))).length
    assert long == pytest.approx(job.web.plane.length, rel=0.01)
