"""The joint end: edges and volumes against kernels and closed forms, its pin, its pads, and what is refused."""

from __future__ import annotations

import io
from dataclasses import replace
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
from scipy.interpolate import CubicSpline
from wings import loft, section, slab

from wrywing.export import dxf
from wrywing.geom import joint, seat, web
from wrywing.geom.drawing import Role
from wrywing.shop import job as jobs
from wrywing.shop import masses as weights
from wrywing.shop import verdict as choice
from wrywing.shop import weigh
from wrywing.shop.sheets import drawings as sheets
from wrywing.shop.stock import Pin, Stock
from wrywing.shop.wingfile import WingError

EXAMPLES = Path(__file__).parent.parent / "examples"
INCH, POUND = 25.4, 4.4482216152605
STATED = """
[joint]
length = 90
taper = 140
pin = 7
wall = 0.9
overwrap = 0.6
"""
WEB = kernel.Web(thickness=6.0, cant=3.0)


def loaded(folder, text=STATED, edge="full bevel", wing=kernel.NASA_WING, of=WEB):
    path = folder / "wing.toml"
    path.write_text(kernel.wing_file_text(wing, of, edge=edge) + text)
    return jobs.load(path)


# ---------------------------------------------------------------------------- thickness and pin


def test_pin_tube_and_overwrap_of_the_trade():
    # Common practice: a 3/8 in pin in its tube with overwrap makes about 1/2 in.
    assert joint.across(0.375, wall=0.035, overwrap=0.03) == pytest.approx(0.5, abs=0.01)


def test_carbon_pins_of_the_trade(tmp_path):
    # Common practice: a 1/4 in carbon pin carries about 5000 lbf in shear (read as double shear, through a fork), and a
    # 3/8 in one is needed for 9000.
    shear = Stock().find("carbon pin", Pin).shear
    assert 2 * shear * joint.area(0.25 * INCH) / POUND == pytest.approx(5000, rel=0.05)
    inches = ", ".join(f"{size}" for size in Stock().find("carbon pin", Pin).sizes("in"))
    text = STATED.replace("pin = 7", 'force = "9000 lbf"\nshear_planes = 2')
    found = loaded(tmp_path, text + f'[materials."carbon pin"]\ndiameters = [{inches}]\n').joint
    assert found.pin == pytest.approx(0.375 * INCH)
    assert found.strength.reserve == pytest.approx(2 * shear * np.pi / 4 * (0.375 * INCH) ** 2 / (9000 * POUND))
    assert found.strength.origin == "stock"


def test_a_pin_of_the_files_own(tmp_path):
    own = '[materials."oak dowel"]\nkind = "pin"\nshear = 12\ndiameters = [30, 20, 9]\n'
    text = STATED.replace("pin = 7", 'force = 1500\nmaterial = "oak dowel"') + own
    job = loaded(tmp_path, text, of=kernel.Web(thickness=6.0))
    found = job.joint
    assert (found.pin, found.chosen, found.strength.origin) == (20.0, True, "the wing file")
    assert found.strength.carries == pytest.approx(12 * np.pi * 100)


@given(
    sheet=st.floats(2.0, 10.0),
    s=st.floats(-20.0, 920.0),
    end=st.sampled_from(["inner", "outer"]),
    faces=st.sampled_from(["both", "front", "rear"]),
)
def test_thickness_falls_straight_from_joint_to_sheet(sheet, s, end, faces):
    made = joint.Thickening(12.0, 80.0, 120.0, 900.0, end, faces)
    thickness, middle = (law(s) for law in made.over(sheet))
    out = s if end == "inner" else 900.0 - s
    assert thickness == pytest.approx(sheet + (12.0 - sheet) * np.clip((200.0 - out) / 120.0, 0.0, 1.0))
    front, rear = middle - thickness / 2, middle + thickness / 2
    more = thickness - sheet
    share = {"both": (0.5, 0.5), "front": (1.0, 0.0), "rear": (0.0, 1.0)}[faces]
    assert (front, rear) == pytest.approx((-sheet / 2 - share[0] * more, sheet / 2 + share[1] * more))


# ---------------------------------------------------------------------------- edges and volumes


@pytest.mark.parametrize("faces", ["both", "front"])
def test_bevels_follow_the_taper(tmp_path, faces):
    # Independent kernel: Open CASCADE cuts the offset surface with the planes n = constant.
    pytest.importorskip("OCP")
    job = loaded(tmp_path, STATED + f'faces = "{faces}"\n')
    assert job.joint.across == pytest.approx(10.0)
    places = np.array([30.0, 120.0, 160.0, 200.0, 240.0, 900.0])
    for row in job.rows(places):
        more = 4.0 * np.clip((230.0 - row.s) / 140.0, 0.0, 1.0)
        n = [-3.0 - more * (0.5 if faces == "both" else 1.0), 3.0 + more * (0.5 if faces == "both" else 0.0)]
        assert row.thickness == pytest.approx(6.0 + more)
        top, bottom = kernel.reference_edges(kernel.NASA_WING, WEB, [row.s], n)
        for edge, (front, rear) in ((row.top, top[0]), (row.bottom, bottom[0])):
            assert (edge.front, edge.rear) == pytest.approx((front, rear), abs=0.001)
            assert edge.bevel == pytest.approx(np.degrees(np.arctan((rear - front) / row.thickness)), abs=0.01)


def lines(seats, n, treatment, side):
    """The cut at every place: a straight line across n (S, M) that no seat is above (top)."""
    sign = 1.0 if side == "top" else -1.0
    slope = (seats[:, -1] - seats[:, 0]) / (n[:, -1] - n[:, 0]) if treatment == "full bevel" else np.zeros(len(n))
    free = sign * (seats - slope[:, None] * n)
    return sign * free.min(axis=1)[:, None] + slope[:, None] * n


@pytest.mark.parametrize(("faces", "treatment"), [("both", "square"), ("rear", "square"), ("both", "full bevel")])
def test_volumes_agree_with_a_mesh_kernel(tmp_path, faces, treatment):
    # Independent kernels: heights from Open CASCADE on planes n = constant, volumes from manifold3d.
    pytest.importorskip("OCP")
    chord = np.array([420.0, 380.0, 300.0])
    # The web line is the twist axis, straight out along y: rib planes are then square to it.
    wing = kernel.Wing(
        (0.0, 300.0, 700.0), tuple(chord), tuple(126.0 - 0.3 * chord), (0.0,) * 3, (0.0, 1.5, 8.0), twist_axis=0.3
    )
    of = kernel.Web(ends=(50.0, 650.0), line=(0.3, 0.3), thickness=6.0)
    job = loaded(tmp_path, STATED + f'faces = "{faces}"\n', treatment, wing, of)
    s = np.unique(np.concatenate([np.linspace(0.0, 600.0, 121), [90.0, 230.0, 250.0]]))
    thickness, middle = (law(s)[:, None] for law in job.over())
    n = middle + thickness / 2 * np.linspace(-1.0, 1.0, 33)
    layers = np.linspace(n.min(), n.max(), 7)
    seated = replace(wing, skin=wing.skin + 0.3)  # the bond line of kernel.wing_file_text
    top, bottom = (
        np.stack([CubicSpline(layers, at)(row) for at, row in zip(heights, n, strict=True)])
        for heights in kernel.reference_edges(seated, of, s, layers)
    )
    inner = kernel.solid_between(s, n, bottom, top)
    solid = kernel.solid_between(s, n, lines(bottom, n, treatment, "bottom"), lines(top, n, treatment, "top"))
    built = job.web
    assert built.filler == pytest.approx(kernel.volume_outside(inner, solid), rel=0.002)
    assert built.sheet == pytest.approx(solid.volume(), rel=0.002)
    box = np.full((2, 2), 400.0)
    sheet = kernel.solid_between([-1.0, 601.0], [-3.0, 3.0], -box, box)
    assert built.pads == pytest.approx(kernel.volume_outside(solid, sheet), rel=0.002)


def test_pads_weigh_what_they_are(tmp_path):
    # Trapezia: on a web of height h a pad of thickness p has p h (full + taper / 2) of volume.
    wing = kernel.Wing((0.0, 900.0), (400.0, 400.0), (0.0, 0.0), (0.0, 0.0), (0.0, 0.0))
    job = loaded(tmp_path, STATED + 'pad = "balsa 160"\n', "square", wing, kernel.Web((0.0, 900.0), thickness=6.0))
    row = job.rows([0.0])[0]
    found = weights.masses(job, job.web)
    assert job.web.pads == pytest.approx(2 * 2.0 * (row.top.cut_front - row.bottom.cut_front) * 160.0, rel=0.01)
    assert found.pads == pytest.approx(job.web.pads * 160e-6)
    assert found.foam == pytest.approx((job.web.sheet - job.web.pads) * 80e-6)


def test_a_sheet_thicker_than_the_joint_is_refused(tmp_path):
    job = loaded(tmp_path)
    thin, thick = weigh.candidates(job, [8.0, 12.0], ["square"], [3.0])
    assert thin.outside is None
    assert thin.masses.pads > 0.0
    assert thick.outside == "a sheet of 12 mm is thicker than its joint, 10 mm"
    assert "is thicker than its joint" in choice.verdict([thick], job).sentence


# ---------------------------------------------------------------------------- the pin between the seats


@pytest.mark.parametrize("end", ["inner", "outer"])
def test_an_upright_pin_fills_the_height_and_one_along_lies_midway(tmp_path, end):
    job = loaded(tmp_path, STATED + f'end = "{end}"\n')
    tube, length = job.tube, job.web.plane.length
    at = {"inner": (0.0, 90.0), "outer": (length, length - 90.0)}[end]
    assert (tube.start[0], tube.stop[0]) == pytest.approx(at)
    rows = job.rows(np.linspace(*sorted(at), 7))
    top = min(min(r.top.cut_front, r.top.cut_rear) for r in rows)
    bottom = max(max(r.bottom.cut_front, r.bottom.cut_rear) for r in rows)
    assert tube.start[1] == pytest.approx((top + bottom) / 2, abs=0.1)
    upright = loaded(tmp_path, STATED + f'end = "{end}"\npin_axis = "upright"\npin_at = 40\n')
    tube, at = upright.tube, 40.0 if end == "inner" else length - 40.0
    rows = upright.rows(at + 5.0 * np.linspace(-1.0, 1.0, 5))
    top = min(min(r.top.cut_front, r.top.cut_rear) for r in rows)
    bottom = max(max(r.bottom.cut_front, r.bottom.cut_rear) for r in rows)
    assert (tube.start[1], tube.stop[1]) == pytest.approx((bottom, top), abs=0.4)


def test_a_pin_just_fits_or_not():
    # Plane geometry: a cylinder of radius r about the axis of a slit, 2 a high, fits while r <= a.
    wing = loft(slab(0.05), [0.0, 400.0], chord=200.0, skin=1.0)
    plane = web.plane(wing, ends=(0.0, 400.0), line=(0.3, 0.3))
    depth = {side: seat.constant(0.5) for side in web.SIDES}
    for across, room in ((16.0, 0.5), (18.0, -0.5)):
        found = joint.fit(wing, plane, joint.Tube((0.0, 0.0), (80.0, 0.0), 0.0, across), depth)
        assert found.room == pytest.approx({"top": room, "bottom": room})


def room(wing, tube, line=(0.3, 0.3), ends=(0.0, 400.0)):
    """Room over and under a tube in a web along a chord fraction, no bond line."""
    plane = web.plane(wing, ends=ends, line=line)
    return joint.fit(wing, plane, tube, {side: seat.constant(0.0) for side in web.SIDES}).room


@pytest.mark.parametrize("tilt", [3.7, 7.5, 15.0, 22.5])
def test_room_is_where_tube_and_seat_are_parallel(tilt):
    # Plane geometry: a line tilted by a clears a circle of radius r under it by H - r / cos a along the vertical. The
    # rim of an upright tube clears a seat tilted by a, however the web stands to it, by H - r tan a.
    wing = loft(slab(0.1), [0.0, 400.0], chord=200.0, twist=tilt, skin=1e-9, axis=0.3)
    high = 20.0 / np.cos(np.radians(tilt))
    along = room(wing, joint.Tube((10.0, 0.0), (90.0, 0.0), 0.0, 18.0))
    upright = room(wing, joint.Tube((50.0, -2.0), (50.0, 2.0), 0.0, 18.0))
    for side in web.SIDES:
        assert along[side] == pytest.approx(high - 9.0 / np.cos(np.radians(tilt)), abs=5e-4)
        assert upright[side] == pytest.approx(high - 2.0 - 9.0 * np.tan(np.radians(tilt)), abs=5e-4)


@pytest.mark.parametrize("sweep", [0.0, 0.3])
def test_room_over_a_tube_past_a_break_of_the_skin(sweep):
    # Plane geometry: the higher of two planes over a circle, in the plane of the web.
    y = np.array([0.0, 43.0, 400.0])
    wing = loft(slab(0.1), y, chord=200.0, le=y * sweep, z=[0.0, 0.0, 357.0 * np.tan(np.radians(10.0))], skin=1e-9)
    plane = web.plane(wing, ends=(0.0, 400.0), line=(0.3, 0.3))
    tube = joint.Tube((10.0, 5.0), (90.0, 5.0), 0.0, 18.0)
    turn = np.linspace(-np.pi / 2, np.pi / 2, 721)
    s = np.linspace(10.0, 90.0, 1601)[:, None]
    heights = []
    for normal in (np.array([0.0, 0.0, 1.0]), np.array([0.0, -np.sin(np.radians(10.0)), np.cos(np.radians(10.0))])):
        ridge = np.array([0.0, 43.0, 20.0]) - plane.origin
        heights.append(
            (normal @ ridge - s * (normal @ plane.s) - 9.0 * np.sin(turn) * (normal @ plane.n)) / (normal @ plane.h)
        )
    free = np.maximum(*heights) - 5.0 - 9.0 * np.cos(turn)
    assert room(wing, tube)["top"] == pytest.approx(free.min(), abs=2e-3)


def test_a_skin_that_bulges_inwards_is_met_between_axis_and_rim():
    # Closed form: the lower side is a parabola over the chord, and highest at the station where the wing bends down.
    def lower(t):
        return np.where(t > 0.0, 0.1, -0.06 - 4.0 * (t * t - 0.3) ** 2)

    hollow = section(lower, lambda t: np.where(t > 0.0, 0.0, -16.0 * t * (t * t - 0.3)))
    wing = loft(hollow, [0.0, 200.0, 400.0], chord=200.0, z=[0.0, 10.0, 0.0], skin=1e-9)
    found = room(wing, joint.Tube((200.0, 0.0), (200.0, 10.0), 0.0, 18.0))
    assert found == pytest.approx({"top": 20.0 - 9.0 * 10.0 / 200.0, "bottom": 2.0}, abs=1e-3)


# ---------------------------------------------------------------------------- what is refused


def without(key):
    return "\n".join(line for line in STATED.splitlines() if not line.startswith(key)) + "\n"


@pytest.mark.parametrize(
    ("text", "key", "figures"),
    [
        (STATED.replace("taper = 140", "taper = 3000"), "joint.taper", ("90", "3000 of taper", "3090 mm")),
        (STATED.replace("length = 90", "length = 1"), "joint.length", ("got 1 mm",)),
        (STATED.replace("pin = 7", "pin = 2"), "web.thickness", ("5 mm", "got 6 mm")),
        (STATED.replace("pin = 7", "pin = 70"), "joint.pin", ("73 mm across", "out of the top seat", "apart")),
        (STATED + "height = 26\n", "joint.height", ("10 mm across", "out of the top seat at s = 90 mm")),
        (STATED + 'pin_axis = "upright"\npin_at = 88\n', "joint.pin_at", ("5 to 85 from the end", "got 88 mm")),
        (STATED + 'pin_axis = "upright"\npin_length = 80\n', "joint.pin_length", ("80 mm long", "seats are")),
        (STATED + 'pin_axis = "upright"\nheight = 2\n', "joint.height", ('only with pin_axis = "along"',)),
        (STATED + "pin_length = 91\n", "joint.pin_length", ("90 mm", "got 91 mm")),
        (STATED + "force = 80000\n", "joint.pin", ("80000 N", "7 mm", "13470 N in 1 plane at 350 MPa")),
        (without("pin") + "force = 1e6\n", "joint.force", ("1000000 N", "20 mm, the thickest", "109956 N")),
        (without("pin"), "joint.pin", ("is missing",)),
        (without("wall"), "joint.wall", ("is missing",)),
        (STATED.replace("0.9", "-0.9"), "joint.wall", ("got -0.9",)),
        (STATED + "force = 0\n", "joint.force", ("a force above 0, got 0",)),
        (STATED + 'material = "carbon strip"\n', "joint.material", ("a known pin", "carbon pin")),
        (STATED + '[materials."carbon pin"]\nshear = -1\n', 'materials."carbon pin".shear', ("above 0, got -1",)),
        (STATED + '[materials."carbon pin"]\nshear = 0\n', 'materials."carbon pin".shear', ("above 0, got 0",)),
        (STATED + 'faces = "left"\n', "joint.faces", ("got 'left'",)),
    ],
)
def test_bad_joints_are_refused_in_one_line(tmp_path, text, key, figures):
    with pytest.raises(WingError) as fault:
        loaded(tmp_path, text).web  # noqa: B018
    line = str(fault.value)
    assert line.startswith(f"wing.toml: {key}: ")
    assert "\n" not in line
    for figure in figures:
        assert figure in line


# ---------------------------------------------------------------------------- drawings


@pytest.mark.parametrize("text", ["", 'end = "outer"\n', 'faces = "rear"\npin_axis = "upright"\n'])
@pytest.mark.parametrize("hand", ["right", "left"])
def test_pads_on_paper(tmp_path, text, hand):
    job = loaded(tmp_path, STATED + text)
    made = [d for d in sheets.drawings(job, hand) if d.name.startswith("joint-pad")]
    assert [d.name for d in made] == [f"joint-pad-{f}" for f in (["rear"] if "rear" in text else ["front", "rear"])]
    for drawing in made:
        plan, profile = (s.points for s in drawing.strokes if s.role is Role.CUT_OUTSIDE)
        assert np.ptp(plan[:, 0]) == pytest.approx(230.0, abs=6.0)  # the rib plane cuts the swept end askew
        thick = 4.0 if "rear" in text else 2.0
        assert np.ptp(profile[:, 1]) == pytest.approx(thick)
        assert shapely.Polygon(profile).area == pytest.approx(thick * (np.ptp(profile[:, 0]) - 70.0))
        words = "\n".join(label.text for label in drawing.labels)
        for word in ("ROOT", "TIP", "UP", "PAD", f"{hand} hand", job.stamp, "pin axis", "10 mm over a pin of 7 mm"):
            assert word in words
        faces = {d.name: d for d in sheets.drawings(job, hand)}
        web_holes = {(round(h.x, 6), round(h.y, 6)) for h in faces[drawing.name.replace("joint-pad", "web")].holes}
        assert {(round(h.x, 6), round(h.y, 6)) for h in drawing.holes} <= web_holes
        boxes = [label.box() for label in drawing.labels]
        assert not any(a.intersects(b) for a, b in combinations(boxes, 2))
        for stroke in drawing.strokes:
            assert not any(box.intersects(shapely.LineString(stroke.points)) for box in boxes)


def test_register_holes_keep_off_the_tube(tmp_path):
    job = loaded(tmp_path)
    tube = shapely.Polygon(job.tube.outline())
    assert all(tube.distance(shapely.Point(*place)) > 3.0 for place in job.register)


def test_a_pad_in_dxf_measures_what_it_should(tmp_path):
    job = loaded(tmp_path, wing=kernel.NASA_WING)
    drawing = next(d for d in sheets.drawings(job) if d.name == "joint-pad-rear")
    found = ezdxf.read(io.StringIO(dxf.render(drawing, wing="x").decode()))
    rings = [np.array(e.get_points("xy")) for e in found.modelspace().query("LWPOLYLINE") if e.closed]
    plan = max((shapely.Polygon(ring) for ring in rings), key=lambda ring: ring.area)
    (pad,) = (p for p in job.pads if p.face == "rear")
    assert plan.area == pytest.approx(shapely.Polygon(pad.outer).area, rel=0.01)


def test_the_example_says_what_its_pin_carries_and_that_it_is_no_proof():
    from wrywing.shop.describe import facts as describe

    job = jobs.load(EXAMPLES / "highmoor.toml")
    said = dict(describe.lines(job))
    # By hand: two planes of 350 MPa over pi/4 (5/16 in)^2.
    assert "= 7787 lbf in 2 planes at" in said["pin"]
    record = describe.facts(job).joint
    assert record["carries"] == pytest.approx(2 * 350 * np.pi / 4 * (5 / 16 * INCH) ** 2)
    assert "no proof of airworthiness" in record["caution"]


def test_a_force_below_the_loads_is_doubted(tmp_path):
    from wrywing.shop.describe import joint as describe_joint

    text = (EXAMPLES / "highmoor.toml").read_text()
    (tmp_path / "sections").symlink_to(EXAMPLES / "sections")
    path = tmp_path / "highmoor.toml"
    for force, doubts in (("5600 lbf", 0), ("5000 lbf", 1)):
        path.write_text(text.replace("5600 lbf", force))
        job = jobs.load(path)
        said = describe_joint.doubts(job)
        assert len(said) == doubts
    assert "5000 lbf, is below the cap force there" in said[0]
    # By hand: moment of the bell-shaped lift outboard of the pin, over the distance between the cap centroids there.
    at = job.tube.start[0]
    inboard, semi = (156.0 - 96.0) * INCH, 156.0 * INCH
    e = (inboard + at * job.web.plane.s[1]) / semi
    lift = 1.5 * 4.0 * 560.0 * 0.45359237 * 9.80665 / 2.0
    moment = lift * semi * 16.0 / (3.0 * np.pi) * quad(lambda x: (x - e) * (1.0 - x * x) ** 1.5, e, 1.0)[0]
    force = moment / job.web.plane.s[1] / np.interp(at, job.caps.s, job.caps.apart) / POUND
    assert float(said[0].split("there, ")[1].split(" lbf")[0]) == pytest.approx(force, rel=0.002)


def test_a_pin_along_the_web_is_doubted_for_the_moment_that_would_bend_it():
    from wrywing.shop.describe import joint as describe_joint

    job = jobs.load(EXAMPLES / "highmoor.toml", {"joint.pin_axis": "along"})
    (said,) = describe_joint.doubts(job)
    # Plane bending of a round bar, W = pi d^3 / 32, of 5/16 in under 1685 lbf ft: 6.75 million psi.
    stress = 1685.0 * 12.0 / (np.pi * 0.3125**3 / 32.0)
    found = float(said.split("would ask ")[1].split(" psi")[0].replace(",", ""))
    assert found == pytest.approx(stress, rel=0.002)
