"""Sheets of stock: scarfs where nothing ends, pieces apart and along the grain, files that a router can follow."""

from __future__ import annotations

import io
import math
import re
from dataclasses import replace
from itertools import combinations, pairwise
from pathlib import Path

import ezdxf
import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st

from wrywing.export import contours, dxf, pdf
from wrywing.geom import nest, scarf
from wrywing.geom.drawing import Role
from wrywing.shop import job as jobs
from wrywing.shop.nesting import HANDS, nestings, without_sheet
from wrywing.shop.sheets.stock import stock_sheets
from wrywing.shop.stock import PAPERS
from wrywing.shop.strips import ramp
from wrywing.shop.web_pieces import web_pieces
from wrywing.shop.wingfile import WingError

EXAMPLES = Path(__file__).parent.parent / "examples"
SHEETS = """
[cutting]
scarf = 8
[[cutting.sheets]]
material = "PVC foam 80"
size = ["1220 mm", "250 mm"]
[[cutting.sheets]]
material = "balsa 160"
size = ["1 m", "100 mm"]
"""


@pytest.fixture
def wing(tmp_path):
    def made(name, more=SHEETS, *changes):
        text = (EXAMPLES / f"{name}.toml").read_text().replace('"sections/', f'"{EXAMPLES}/sections/')
        for key in ("[cutting", "[gauges"):
            text = text.split(f"\n{key}")[0] if f"\n{key}" in text else text
        for old, new in changes:
            assert old in text
            text = text.replace(old, new)
        (tmp_path / "wing.toml").write_text(text + more)
        return jobs.load(tmp_path / "wing.toml")

    return made


# --- scarfs ---------------------------------------------------------------------------------------


@settings(deadline=None, max_examples=60)
@given(
    st.integers(300, 3000),
    st.integers(250, 1500),
    st.integers(5, 60),
    st.lists(st.tuples(st.integers(0, 3000), st.integers(1, 200)), max_size=6),
)
def test_scarfs_lie_clear_and_leave_no_piece_too_long_and_no_fewer_do(length, longest, long, stretches):
    off = [(a, a + b) for a, b in stretches]
    try:
        found = scarf.places(0, length, longest=longest, scarf=long, keep_off=off)
    except scarf.NoPlace:
        found = None
    else:
        ends = [0, *found, length]
        assert all(stop + (long if stop < length else 0) - start <= longest for start, stop in pairwise(ends))
        assert all(p + long <= low or p >= high for p in found for low, high in off)
    if length <= 700:  # by brute force: the fewest scarfs over all whole places
        clear = [p for p in range(length) if all(p + long <= low or p >= high for low, high in off)]
        clear = [p for p in clear if p <= length - scarf.LEAST * long]
        reached, count = {0}, 0
        while reached and not any(length - p <= longest for p in reached):
            reached = {p for p in clear for q in reached if p >= q + scarf.LEAST * long and p + long - q <= longest}
            count += 1
        assert (len(found) == count) if found is not None else not reached


def test_scarfs_of_an_example_keep_off_strip_ends_pins_and_changes_of_the_saw(wing):
    for name in ("saltpan", "highmoor"):
        job = wing(name)
        right = web_pieces(job, job.record.cutting, 1210.0, "right")
        long = 8.0 * job.web.plain
        assert len(right) == math.ceil((job.web.plane.length - long) / (1210.0 - long))
        ends = [piece.shape.bounds[0] for piece in right[1:]]
        off = [(s - 1.5, s + 1.5) for s, _ in job.register]
        off += [(la.stop, la.stop + ramp(job.record.caps)) for la in job.layers if not la.whole]
        off += [(run.start, run.start) for cut in (job.web.top, job.web.bottom) for run in cut.runs[1:]]
        off += [(0.0, job.joint.thickening.full + job.joint.thickening.taper)] if job.joint else []
        for start in ends:
            assert all(start + long <= low or start >= high for low, high in off)


def test_scarfed_pieces_go_together_to_the_web(wing):
    job = wing("saltpan")
    (whole,) = web_pieces(job, job.record.cutting, 5000.0, "right")
    inner, outer = web_pieces(job, job.record.cutting, 1210.0, "right")
    assert whole.shape.symmetric_difference(inner.shape.union(outer.shape)).area < 2.0  # of 2 x 1430 mm of edge
    overlap = inner.shape.intersection(outer.shape).bounds
    assert overlap[2] - overlap[0] == pytest.approx(8.0 * 6.0)
    for face in job.web.faces:  # both faces lie in the envelope that is cut
        assert shapely.Polygon(face.outline()).difference(whole.shape.buffer(0.01)).area < 0.01
    marks = []
    for piece in (inner, outer):
        lines = [s.points for s in piece.drawing.strokes if s.role is Role.ENGRAVE and len(s.points) == 2]
        marks += [s[0, 0] for s in lines if s[0, 0] == s[1, 0] and 5.0 < np.ptp(s[:, 1]) < 20.0]
    assert max(marks) - min(marks) == pytest.approx(8.0 * 6.0 + 80.0)
    assert any("marks 128 mm apart" in label.text for label in inner.drawing.labels)
    for piece, planed, kept in ((inner, "FRONT", "REAR"), (outer, "REAR", "FRONT")):
        said = " ".join([label.text for label in piece.drawing.labels] + list(piece.beside))
        assert f"plane the {planed} face" in said
        assert re.search(f"feather edge: (root|tip) end, s [\\d.]+, {kept} face", said)
        beside = [label for label in piece.drawing.labels if label.text.startswith(planed)]
        assert f": {planed} face" in said or beside  # the line that it is planed from says on which face it is
        assert "set with the two marks" in said
    left = web_pieces(job, job.record.cutting, 1210.0, "left")[0]
    assert shapely.affinity.scale(left.shape, -1, 1, origin=(0, 0)).symmetric_difference(inner.shape).area < 1e-6


# --- laying out -----------------------------------------------------------------------------------

tapers = st.lists(
    st.tuples(st.integers(60, 900), st.integers(15, 90), st.integers(15, 90), st.integers(-20, 20)),
    min_size=1,
    max_size=14,
)


def taper(long, a, b, lean):
    return np.array([[0, 0], [long, lean], [long, lean + b], [0, a]], dtype=float) + np.array([7.0, -40.0])


def placed(outline, laid):
    shape = shapely.Polygon(outline if not laid.turned else -outline)
    x, y = shape.bounds[:2]
    return shapely.affinity.translate(shape, laid.corner[0] - x, laid.corner[1] - y)


@settings(deadline=None, max_examples=40)
@given(tapers, st.booleans())
def test_nested_pieces_keep_apart_within_the_margins_and_only_turn_end_for_end(sizes, turn):
    outlines = [taper(*size) for size in sizes]
    sheets = nest.nest(outlines, (950.0, 210.0), margin=4.0, apart=5.0, turn=turn)
    assert sorted(laid.piece for on in sheets for laid in on) == list(range(len(outlines)))
    assert turn or not any(laid.turned for on in sheets for laid in on)
    inside = shapely.box(4.0, 4.0, 946.0, 206.0).buffer(1e-6)
    for on in sheets:
        shapes = [placed(outlines[laid.piece], laid) for laid in on]
        assert all(inside.contains(shape) for shape in shapes)
        assert all(a.distance(b) > 5.0 - 1e-6 for a, b in combinations(shapes, 2))
    assert len(sheets) >= math.ceil(sum(shapely.Polygon(o).area for o in outlines) / (950.0 * 210.0))


def test_head_to_tail_saves_a_sheet():
    # Two tapers 60 to 10 wide take 2 x 60 + 5 as rectangles, and 60 + 10 + some 5 head to tail.
    two = [taper(800, 60, 10, 0)] * 2
    assert len(nest.nest(two, (820.0, 100.0), margin=5.0, apart=5.0, turn=False)) == 2
    ((a, b),) = nest.nest(two, (820.0, 100.0), margin=5.0, apart=5.0, turn=True)
    assert a.turned != b.turned


def test_a_piece_larger_than_a_sheet_is_named():
    with pytest.raises(nest.TooLarge) as fault:
        nest.nest([taper(100, 20, 20, 0), taper(900, 20, 20, 0)], (850.0, 100.0), margin=0.0, apart=0.0, turn=True)
    assert fault.value.piece == 1


# --- drawings -------------------------------------------------------------------------------------

RIBS = """
[ribs]
thickness = "3 mm"
margin = "10 mm"
"""
FROM = """
[cutting.ribs]
material = "balsa 160"
thickness = "3 mm"
"""


@pytest.mark.parametrize("name", ["saltpan", "highmoor"])
def test_sheets_read_back_hold_every_piece_once_and_apart(wing, name):
    ribbed = "\n[ribs]" in (EXAMPLES / f"{name}.toml").read_text()
    wide = SHEETS.replace('["1 m", "100 mm"]', '["1 m", "200 mm"]')
    job = wing(name, wide + FROM + ("" if ribbed else RIBS))
    laid = nestings(job)
    drawings = stock_sheets(job, laid, HANDS)
    assert len(drawings) == sum(len(n.sheets) for n in laid)
    area = 0.0
    for drawing, size in zip(drawings, [n.size for n in laid for _ in n.sheets], strict=True):
        document = ezdxf.read(io.StringIO(dxf.render(drawing).decode()))
        assert not document.audit().errors
        cuts = document.modelspace().query('LWPOLYLINE[layer=="CUT_OUTSIDE"]')
        shapes = [shapely.Polygon(line.get_points("xy")) for line in cuts]
        assert all(line.closed for line in cuts)
        assert all(shape.is_valid for shape in shapes)
        assert all(a.distance(b) > 5.99 for a, b in combinations(shapes, 2))
        inside = shapely.box(5.0, 5.0, size[0] - 5.0, size[1] - 5.0).buffer(1e-3)
        assert all(inside.contains(shape) for shape in shapes)
        area += sum(shape.area for shape in shapes)
        texts = [label.box() for label in drawing.labels]
        assert not any(a.intersects(b) for a, b in combinations(texts, 2))
        assert not any(shape.exterior.intersects(text) for shape in shapes for text in texts)
        holes = [shapely.Point(h.x, h.y).buffer(h.diameter / 2.0) for h in drawing.holes]
        assert not any(hole.intersects(text) for hole in holes for text in texts)
    want = sum(shapely.Polygon(piece.outline).area for n in laid for piece in n.pieces)
    assert area == pytest.approx(want, rel=1e-5)
    for n in laid:
        used = sum(piece.shape.area for piece in n.pieces)
        assert n.waste == pytest.approx(1.0 - used / (len(n.sheets) * n.size[0] * n.size[1]))
        hands = [piece.drawing.hand for piece in n.pieces]
        assert hands.count("right") == hands.count("left")
    assert without_sheet(job) == []


def test_every_piece_on_a_sheet_says_which_it_is(wing):
    job = wing("highmoor")
    laid = nestings(job, ["left"])
    places = [(n, on) for n in laid for on in n.sheets]
    for drawing, (nesting, on) in zip(stock_sheets(job, laid, ["left"]), places, strict=True):
        assert drawing.hand == "left"
        for place in on:
            shape = placed(nesting.pieces[place.piece].outline, place)
            said = " ".join(label.text for label in drawing.labels if shape.contains(label.box()))
            assert "left hand" in said
            assert job.stamp in said


def test_what_finds_no_room_on_a_piece_stands_under_its_sheet_with_its_name(wing):
    job = wing("saltpan", SHEETS.replace("1220 mm", "400 mm"))  # two scarfs on pieces too small for their words
    laid = nestings(job)
    beside = {text for piece in laid[0].pieces for text in piece.beside}
    assert beside
    said = " ".join(label.text for drawing in stock_sheets(job, laid, HANDS) for label in drawing.labels)
    assert all(text in said for text in beside)
    assert all(text.startswith("WEB ") for text in beside)


def test_no_page_is_printed_for_a_sheets_border(wing):
    job = wing("saltpan", SHEETS.replace('"250 mm"', '"1220 mm"'))
    drawing = contours.clean(stock_sheets(job, nestings(job), HANDS)[0])
    pages = pdf.paged(drawing, pdf.Print(PAPERS["a4"]))[1]
    whole = replace(drawing, strokes=tuple(replace(s, frame=False) for s in drawing.strokes))
    assert pages == 5  # one row of tiles holds the pieces, the arrow along the grain, and the title
    assert pages < pdf.paged(whole, pdf.Print(PAPERS["a4"]))[1] - 8


def test_the_size_of_which_least_is_bought_is_taken(wing):
    two = SHEETS + '[[cutting.sheets]]\nmaterial = "pvc foam 80"\nsize = ["1220 mm", "160 mm"]\n'
    assert nestings(wing("saltpan", two))[0].size == (1220.0, 160.0)
    thick = two + 'thickness = "10 mm"\n'
    assert nestings(wing("saltpan", thick))[0].size == (1220.0, 250.0)


def test_without_the_table_nothing_is_laid_out(wing):
    assert nestings(wing("saltpan", "")) == []
    other = SHEETS.replace("PVC foam 80", "pvc foam 60")
    job = wing("highmoor", other)
    assert [kind[0] for kind in without_sheet(job)] == ["pvc foam 80"]
    assert "pvc foam 80" not in [n.material for n in nestings(job)]


@pytest.mark.parametrize(
    ("change", "words"),
    [
        (('["1220 mm", "250 mm"]', '["1220 mm", "50 mm"]'), r"cutting\.sheets\[1\]\.size: wanted a sheet that takes"),
        (('["1220 mm", "250 mm"]', '["9 mm", "50 mm"]'), r"cutting\.sheets\[1\]\.size: wanted a sheet larger"),
        (("scarf = 8", "scarf = 40"), r"cutting\.scarf: wanted a place for a scarf, 240 mm long, between s = "),
        (("scarf = 8", "scarf = 39"), r"cutting\.scarf: .* 39 times the sheet's 6 mm, and needed as the web is 143"),
        (("scarf = 8", "scarf = 1"), r"cutting\.scarf: wanted a number from 2 to 40, got 1"),
        (("PVC foam 80", "pvc fom 80"), r"cutting\.sheets\[1\]\.material: wanted a known foam or wood, got 'pvc"),
        (("scarf = 8", "turn = 1"), r"cutting\.turn: wanted true or false"),
        (("scarf = 8", 'allowance = "-5 %"'), r"cutting\.allowance: wanted a fraction from 0 to 3"),
        (("scarf = 8", "ribs = 3"), r"cutting\.ribs: wanted what ribs are cut from"),
    ],
)  # fmt: skip
def test_faults_are_one_line_that_names_the_key(wing, change, words):
    short = (
        SHEETS.replace('["1220 mm", "250 mm"]', '["500 mm", "250 mm"]')
        if change[1] in ("scarf = 40", "scarf = 39")
        else SHEETS
    )
    with pytest.raises(WingError, match=rf"^wing\.toml: {words}") as fault:
        nestings(wing("saltpan", short.replace(*change)))
    assert "\n" not in str(fault.value)
