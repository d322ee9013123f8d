"""Cores, ribs and cradles of a wing file: what is drawn and said, and what is refused in one line."""

from __future__ import annotations

import json
import re
from itertools import combinations
from pathlib import Path

import numpy as np
import pytest
import shapely
import wings

from wrywing import cli
from wrywing.export import wire as wire_export
from wrywing.geom.block import PIN
from wrywing.geom.drawing import Role
from wrywing.geom.profile import turned
from wrywing.shop import cores
from wrywing.shop import job as jobs
from wrywing.shop.describe import facts as describe
from wrywing.shop.sheets import core as sheets_core
from wrywing.shop.sheets import rib as sheets_rib
from wrywing.shop.stock import Adhesive, Cloth
from wrywing.shop.wingfile import WingError

EXAMPLES = Path(__file__).parent.parent / "examples"

GOOD = f"""{wings.GOOD}[[cores]]
region = "aft"
foam = "extruded polystyrene 33"
bays = 2
kerf = 1.0
least_thickness = 1.2
[wire]
diameter = 0.5
speed = 3
planes = [-100, 700]
place = [100, 80]
travel = [700, 300]
[ribs]
at = [0, 490]
[cradles]
"""


@pytest.fixture
def load(tmp_path):
    def go(*changes):
        text = GOOD
        for old, new in changes:
            assert text.count(old) == 1, old
            text = text.replace(old, new)
        path = tmp_path / "plain.toml"
        path.write_text(text)
        job = jobs.load(path)
        describe.facts(job)
        return job

    return go


BAD = [
    ("an unknown foam", [('"extruded polystyrene 33"', '"polystyrene"')], "cores[1].foam: wanted a known foam"),
    (
        "PVC under a hot wire",
        [('"extruded polystyrene 33"', '"pvc foam 60"')],
        r"cores[1].foam: wanted a foam that a hot wire may cut, got 'pvc foam 60': PVC foam gives off poisonous gas",
    ),
    (
        "polyurethane under a hot wire",
        [('"extruded polystyrene 33"', '"polyurethane foam 64"')],
        "cores[1].foam: wanted a foam that a hot wire may cut, got 'polyurethane foam 64': polyurethane foam gives off",
    ),
    (
        "more bays than may be taken",
        [("bays = 2", "tolerance = 0.02\nmost = 3")],
        "cores[1].tolerance: wanted one that 3 bays can hold, got 0.02 mm: 3 bays are off by 0.",
    ),
    (
        "a tolerance and bays",
        [("bays = 2", "tolerance = 0.2\nbays = 2")],
        "cores[1].bays: wanted none beside a tolerance",
    ),
    ("neither", [("bays = 2", "")], "cores[1].tolerance: is missing, wanted a tolerance, or bays in its place"),
    (
        "a kerf wider than the tail",
        [("kerf = 1.0", "kerf = [1.0, 1.6]")],
        "cores[1].kerf: wanted a kerf that the trailing edge allows, got 1.6 mm: at rib y = 488 mm the foam is thinner "
        "than that aft of chord fraction 0.95",
    ),
    (
        "a kerf narrower than the wire",
        [("kerf = 1.0", "kerf = 0.3")],
        "cores[1].kerf: wanted a kerf no narrower than the wire",
    ),
    (
        "no foam",
        [("bays = 2", "bays = 2\nto = 0.3")],
        "cores[1].to: wanted a region with foam in it, got none at rib y = 0 mm, where it would stop ahead of",
    ),
    (
        "all skin",
        [("least_thickness = 1.2", "least_thickness = 40")],
        "cores[1].region: wanted a region with foam in it, got none at rib y = 0 mm, where the skins leave less",
    ),
    (
        "a block that is too long",
        [("bays = 2", "bays = 2\nlongest = 400")],
        "cores[1].bays: wanted 3 bays or more, as no block over 980 mm may be longer than 400 mm, got 2",
    ),
    (
        "ends off the web",
        [("bays = 2", "bays = 2\nends = [0, 990]")],
        "cores[1].ends[2]: wanted y within the web's ends",
    ),
    (
        "a nose that stops short",
        [('region = "aft"', 'region = "nose"\nto = 0.2')],
        "cores[1].to: wanted only with region",
    ),
    ("no wire", [(GOOD[GOOD.index("[wire]") : GOOD.index("[ribs]")], "")], "wire: is missing, wanted the hot wire"),
    ("axes repeated", [("speed = 3", 'speed = 3\naxes = ["X", "Y", "X", "V"]')], "each once, got X more than once"),
    ("axes that are none", [("speed = 3", 'speed = 3\naxes = ["X", "Y", "G", "F"]')], "wire.axes: wanted four letters"),
    ("a machine without its travel", [("travel = [700, 300]", "")], "wire.travel: is missing, wanted how far"),
    (
        "a plane in the block",
        [("planes = [-100, 700]", "planes = [-100, 450]")],
        "wire.planes[2]: wanted planes on both sides of the block, got 450 mm: in core 1 bay 1 the block is 487.",
    ),
    (
        "a first plane in the block",
        [("planes = [-100, 700]", "planes = [10, 700]")],
        "wire.planes[1]: wanted a plane outside",
    ),
    (
        "too little travel",
        [("travel = [700, 300]", "travel = [300, 300]")],
        "wire.travel: wanted room for every place of the wire, got 300 mm: core 1 bay 1 takes axis U to 361.82 mm",
    ),
    (
        "a block too near the zero",
        [("place = [100, 80]", "place = [100, 5]")],
        "wire.place: wanted a block further from the machine's zero, got one where core 1 bay 1 takes axis Y to -",
    ),
    (
        "a rib off the panel",
        [("at = [0, 490]", "at = [0, 1200]")],
        "ribs.at[2]: wanted y within the stations, 0 mm to 1000 mm",
    ),
    ("ribs nowhere", [("at = [0, 490]", "at = []")], 'ribs.at: wanted "stations", or one or more y in a list'),
    ("a cradle off the panel", [("[cradles]", "[cradles]\nat = [-5]")], "cradles.at[1]: wanted y within the stations"),
    (
        "a saddle of no length",
        [("[cradles]", "[cradles]\nchord = [0.5, 0.4]")],
        "cradles.chord: wanted two chord fractions",
    ),
]


@pytest.mark.parametrize(("changes", "said"), [case[1:] for case in BAD], ids=[case[0] for case in BAD])
def test_what_is_wrong_is_said_in_one_line(load, changes, said):
    with pytest.raises(WingError) as refused:
        load(*changes)
    line = str(refused.value)
    assert said in line
    assert line.startswith("plain.toml: ")
    assert "\n" not in line


def test_a_refusal_leaves_the_disk_alone(tmp_path, monkeypatch, capsys):
    path, out = tmp_path / "w.toml", tmp_path / "out"
    path.write_text(GOOD.replace("travel = [700, 300]", "travel = [300, 300]"))
    monkeypatch.setattr("sys.argv", ["wrywing", "templates", str(path), "--out", str(out)])
    with pytest.raises(SystemExit) as ended:
        cli.main()
    assert ended.value.code == 2
    assert capsys.readouterr().err.count("\n") == 1
    assert not out.exists()


def test_the_good_file_is_good(load):
    job = load()
    assert [made.number for made in job.cores] == [1]
    assert len(job.wire_paths) == 2
    assert [made.y for made in job.cradles] == [0.0, 1000.0]
    assert not any("core" in doubt for doubt in describe.doubts(job) if "tails" not in doubt)


JOINT = '[joint]\npin = 8\nmaterial = "carbon pin"\nwall = 0.5\noverwrap = 0.5\nlength = 60\ntaper = 40\nforce = 900\n'


def off_the_face(made):
    """How far what the wire cuts beside the web is off a core's face, across the web: the largest in each bay."""
    web, face, out = made.region.web, made.region.face, []
    for bay in made.bays:
        lines = []
        for end, at in enumerate(bay.ends):
            run = bay.runs[0]
            foam = run.centre[end] - at.kerf / 2.0 * bay.aside(run, end)
            low, high = at.profile.at(np.array([-1.0, 1.0]) * at.limits.start)[:, 1]
            z = np.linspace(low, high, 41)
            x = np.interp(z, foam[::-1, 1], foam[::-1, 0])
            lines.append(np.insert(turned(np.column_stack([x, z]), -bay.turn), 1, at.y, axis=1))
        cut = lines[0] + np.linspace(0.0, 1.0, 401)[:, None, None] * (lines[1] - lines[0]) - web.origin
        out.append(np.abs(cut @ web.n - face(cut @ web.s)).max())
    return out


@pytest.mark.parametrize("more", ["", "cant = 12"])
def test_a_tolerance_holds_beside_a_thickened_web_too(load, more):
    joint = ("[ribs]", f"{JOINT}[ribs]"), ("thickness = 6", f"thickness = 6\n{more}"), ("le = 100", "le = 300")
    by_hand = ("planes = [-100, 700]\nplace = [100, 80]\ntravel = [700, 300]", "")
    (held,) = load(*joint, by_hand, ("bays = 2", "tolerance = 0.15")).cores
    assert max(off_the_face(held)) <= 0.15 + 0.001
    stated = load(*joint, by_hand)
    (two,) = stated.cores
    assert two.worst.side == "web"
    assert max(off_the_face(two)) == pytest.approx(abs(two.worst.off), abs=0.005)
    assert describe.facts(stated).cores[0]["bays"][0]["off_side"] == "web"
    assert any("beside the web: think of more bays" in doubt for doubt in describe.doubts(stated))


FACING = '[web.facing]\ncloth = "glass cloth 160"\nlayers = 3\n'


def test_a_core_stands_off_the_webs_facing(load):
    # three layers of 160 g/m^2, as much resin: mass over density, of glass and of resin
    bare, faced = load(), load(("[[cores]]", f"{FACING}[[cores]]"))
    glass, resin = faced.stock.find("glass cloth 160", Cloth), faced.stock.find("laminating epoxy", Adhesive)
    thick = 3 * 160.0 * (1.0 / glass.fibre_density + 1.0 / resin.density)
    assert 0.55 < thick < 0.65
    web = bare.plane_at(bare.cant)
    cut = []
    for job in (bare, faced):
        bay = job.cores[0].bays[0]
        foam = bay.runs[0].centre[0] - bay.ends[0].kerf / 2.0 * bay.aside(bay.runs[0], 0)
        cut.append((np.insert(turned(foam, -bay.turn), 1, bay.ends[0].y, axis=1) - web.origin) @ web.n)
    assert cut[1] - cut[0] == pytest.approx(thick, abs=1e-6)
    tall = shapely.Polygon(bare.cores[0].bays[0].ends[0].outline).bounds
    assert bare.cores[0].mesh.volume - faced.cores[0].mesh.volume < thick * 980.0 * (tall[3] - tall[1])
    assert bare.cores[0].mesh.volume > faced.cores[0].mesh.volume + thick * 980.0 * 15.0


def test_a_facing_of_unknown_thickness_is_doubted(load):
    facing = FACING.replace('cloth = "glass cloth 160"', "areal_weight = 160")
    doubts = describe.doubts(load(("[[cores]]", f"{facing}[[cores]]")))
    assert any(doubt.startswith("core 1: its face leaves no room for the web's facing") for doubt in doubts)


FLANGES = """
[flanges]
web_leg = 8
skin_leg = [20, 10]
inner_radius = 2
thickness = 0.6
density = 1800
max_spring = 30
[flanges.front_top]
[flanges.rear_top]
[flanges.rear_bottom]
skin_leg = 12
"""


def test_flange_legs_are_left_to_be_relieved_by_hand(load):
    job = load(("[[cores]]", f"{FLANGES}[[cores]]"))
    legs = "the legs of the flanges, 0.6 mm thick: rear top 8 mm wide on the web, {} mm on the skin; rear bottom 8 mm"
    doubts = [doubt for doubt in describe.doubts(job) if doubt.startswith("core 1: no room")]
    assert len(doubts) == 1
    assert legs.format("20 to 10") in doubts[0]
    assert "front" not in doubts[0]
    middle = job.wording.plain(20.0 - 10.0 * job.cores[0].bounds[1] / 980.0)
    for drawing, ends in zip(sheets_core.core_boards(job), (f"20 to {middle}", f"{middle} to 10"), strict=True):
        (said,) = [note for note in drawing.notes if "legs of the flanges" in note]
        assert legs.format(ends) in said
        assert said.endswith("relieve the foam by hand.")


def test_no_flanges_nothing_said_of_them(load):
    job = load()
    assert not any("flange" in doubt for doubt in describe.doubts(job))
    assert not any("flange" in note for drawing in sheets_core.core_boards(job) for note in drawing.notes)


def test_flimsy_tails_are_doubted(load):
    assert any("tails are only 1.7 mm thick" in doubt for doubt in describe.doubts(load()))


# --- check and templates ---------------------------------------------------------------------------


@pytest.fixture(scope="module")
def saltpan():
    return jobs.load(EXAMPLES / "saltpan.toml")


def test_check_reports_cores_and_bays(saltpan):
    text = "\n".join(figures for _, figures in describe.lines(saltpan))
    for made in saltpan.cores:
        assert f"{made.number} {made.stated.region}, y 15 to 1370, {made.foam.name}" in text
        assert len(re.findall(r"block [\d.]+ x [\d.]+ x [\d.]+ mm", text)) == sum(len(c.bays) for c in saltpan.cores)
    assert cores.HOT_WIRE in text
    record = describe.facts(saltpan).cores
    assert [len(core["bays"]) for core in record] == [len(made.bays) for made in saltpan.cores]
    assert json.dumps(record)


def test_mass_is_volume_by_density(saltpan):
    for made in saltpan.cores:
        assert made.mass == pytest.approx(made.mesh.volume * 33e-6)  # the foam's name is its density, kg/m^3


def test_templates_write_boards_and_paths(tmp_path, load, monkeypatch, capsys):
    job = load()
    out = tmp_path / "out"
    words = [
        "wrywing",
        "templates",
        str(job.path),
        "--out",
        str(out),
        "--formats",
        "svg,csv,nc",
        "--hand",
        "right,left",
    ]
    monkeypatch.setattr("sys.argv", words)
    with pytest.raises(SystemExit) as ended:
        cli.main()
    assert not ended.value.code, capsys.readouterr().err
    listed = {f["path"] for f in json.loads((out / "manifest.json").read_text())["files"]}
    for hand in ("right", "left"):
        for i in (1, 2):
            assert f"core-1-aft-bay-{i}-{hand}.svg" in listed
            for kind in ("nc", "csv"):
                assert f"core-1-aft-bay-{i}-path-{hand}.{kind}" in listed
        assert {f"rib-1-{hand}.svg", f"cradle-2-{hand}.svg", f"cradle-strip-{hand}.svg"} <= listed
    assert all((out / name).stat().st_size for name in listed)


def test_no_paths_without_a_machine(load):
    job = load(("planes = [-100, 700]\nplace = [100, 80]\ntravel = [700, 300]", ""))
    assert job.wire_paths == ()


def test_inches(load):
    job = load(
        ('name = "plain"', 'name = "plain"\nunits = "in"'),
        *((old, f"{old.split(' = ')[0]} = {new}") for old, new in INCHES),
    )
    (found, *_) = job.wire_paths
    program = wire_export.to_rs274(job, found, "right").decode()
    assert "\nG20\nG90\n" in program
    first = re.search(r"^G0 X0 Y(\S+) U0 V(\S+)$", program, re.MULTILINE)
    assert float(first[1]) * 25.4 == pytest.approx(found.path.planes[0, 0, 1], abs=0.0003)


INCHES = [
    ("y = 1000", '"1000 mm"'),
    ("chord = 300", '"300 mm"'),
    ("chord = 200", '"200 mm"'),
    ("le = 100", '"100 mm"'),
    ("thickness = 1\n", '"1 mm"\n'),
    ("ends = [0, 980]", '[0, "980 mm"]'),
    ("thickness = 6", '"6 mm"'),
    ("kerf = 1.0", '"1 mm"'),
    ("least_thickness = 1.2", '"1.2 mm"'),
    ("diameter = 0.5", '"0.5 mm"'),
    ("speed = 3", '"3 mm"'),
    ("planes = [-100, 700]", '["-100 mm", "700 mm"]'),
    ("place = [100, 80]", '["100 mm", "80 mm"]'),
    ("travel = [700, 300]", '["700 mm", "300 mm"]'),
    ("at = [0, 490]", '[0, "490 mm"]'),
]


# --- what two people with a bow need ---------------------------------------------------------------


@pytest.fixture(scope="module")
def boards(saltpan):
    return sheets_core.core_boards(saltpan, "right")


def test_a_template_says_all_that_is_needed(saltpan, boards):
    for drawing, (made, i) in zip(boards, ((m, i) for m in saltpan.cores for i in range(len(m.bays))), strict=True):
        text = " ".join(label.text for label in drawing.labels)
        bay = made.bays[i]
        for words in (
            f"bay {i + 1} of {len(made.bays)}", "RIGHT hand", made.foam.name, "Runs:", "Call the numbers", "kerf",
            "level line", "pins on the level line", "washout", "seconds to each mark", saltpan.stamp, "block's front",
            "IN", "OUT", *cores.HOT_WIRE.split()[:6],
            f"{bay.length:.1f} mm", f"{bay.section[0]:.1f} mm x {bay.section[1]:.1f} mm",
        ):  # fmt: skip
            assert words in text, words
        numbers = {label.text for label in drawing.labels if label.text.isdigit()}
        count = sum(len(run.marks) for run in bay.runs)
        assert numbers == {str(n) for n in range(1, count + 1)}
        assert len([label for label in drawing.labels if label.text.isdigit()]) == 2 * count  # once at each end
        assert len(drawing.holes) == 2 * sum(len(b) for b in made.boards[i])
        assert all(hole.diameter == PIN for hole in drawing.holes)


@pytest.mark.parametrize("hand", ["right", "left"])
def test_no_lettering_lies_on_other_lettering_holes_or_lines(saltpan, hand):
    drawings = [
        *sheets_core.core_boards(saltpan, hand),
        *sheets_rib.rib_sheets(saltpan, hand),
        *sheets_rib.cradle_sheets(saltpan, hand),
    ]
    for drawing in drawings:
        boxes = [label.box() for label in drawing.labels]
        for a, b in combinations(range(len(boxes)), 2):
            assert not boxes[a].intersects(boxes[b]), (drawing.name, drawing.labels[a].text, drawing.labels[b].text)
        lines = shapely.union_all(
            [shapely.LineString([*s.points, s.points[0]] if s.closed else s.points) for s in drawing.strokes]
            + [shapely.Point(h.x, h.y).buffer(h.diameter / 2.0) for h in drawing.holes]
        )
        for label, box in zip(drawing.labels, boxes, strict=True):
            assert not box.intersects(lines), (drawing.name, label.text)


def test_the_left_hand_is_the_mirror_image(saltpan, boards):
    for right, left in zip(boards, sheets_core.core_boards(saltpan, "left"), strict=True):
        for a, b in zip(right.strokes, left.strokes, strict=True):
            assert np.array_equal(a.points[::-1] * [-1.0, 1.0], b.points)
        text = " ".join(label.text for label in left.labels)
        assert "LEFT hand" in text
        assert "RIGHT" not in text


def test_each_board_is_one_closed_simple_outline(boards):
    for drawing in boards:
        cuts = [s for s in drawing.strokes if s.role is Role.CUT_OUTSIDE]
        shapes = [shapely.Polygon(s.points) for s in cuts]
        assert all(s.closed for s in cuts)
        assert all(shape.is_valid for shape in shapes)
        for a, b in combinations(shapes, 2):
            assert not a.intersects(b)
        for hole in drawing.holes:
            assert any(shape.contains(shapely.Point(hole.x, hole.y).buffer(PIN)) for shape in shapes)


def test_a_strip_says_where_the_cradles_stand(saltpan):
    strip = sheets_rib.cradle_sheets(saltpan)[-1]
    lines = [s.points for s in strip.strokes if s.role is Role.ENGRAVE and abs(np.diff(s.points[:, 1])[0]) > 1.0]
    at = sorted(float(line[:, 0].mean()) for line in lines)
    y = np.array([cradle.y for cradle in saltpan.cradles])
    x = np.array([cradle.line for cradle in saltpan.cradles])
    assert np.diff(at) == pytest.approx(np.hypot(np.diff(x), np.diff(y)), abs=0.01)
    for line in lines:  # along the flight direction: as far from the strip's own as the web line is swept
        run = line[1] - line[0]
        sweep = np.arctan2(x[-1] - x[0], y[-1] - y[0])
        assert abs(run[0] / run[1]) == pytest.approx(np.tan(sweep), abs=1e-3)
