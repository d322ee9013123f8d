"""Contours as a machine gets them: closed, simple, the right way round, nothing twice; offsets and arcs."""

import io
from dataclasses import replace
from functools import cache
from pathlib import Path

import ezdxf
import numpy as np
import pytest
import shapely
from ezdxf.path import make_path
from hypothesis import given, settings
from hypothesis import strategies as st
from randomly import wing_files

from wrywing.export import arcs, contours, dxf
from wrywing.geom.drawing import Drawing, Hole, Role, Stroke
from wrywing.shop import job as jobs
from wrywing.shop.sheets import drawings as sheets
from wrywing.shop.wingfile import WingError

EXAMPLES = Path(__file__).parent.parent / "examples"
CUTS = {"CUT_OUTSIDE": True, "CUT_INSIDE": False}  # whether it runs anticlockwise: what is kept lies on the left
SQUARE = np.array([[0.0, 0.0], [10.0, 0.0], [10.0, 10.0], [0.0, 10.0]])


def drawn(*strokes, holes=()):
    return Drawing("piece", "Piece", "3fa9c1d2", strokes=strokes, holes=holes)


def outside(ring):
    return Stroke(np.asarray(ring, dtype=float), Role.CUT_OUTSIDE, closed=True)


def line(*points, role=Role.ENGRAVE):
    return Stroke(np.array(points, dtype=float), role)


@cache
def example(name):
    return [contours.clean(d) for d in sheets.drawings(jobs.load(EXAMPLES / name))]


def read(drawing, **how):
    """What ezdxf finds in a drawing's DXF file, which it must not have to mend."""
    data = dxf.render(drawing, **how)
    document = ezdxf.read(io.StringIO(data.decode("cp1252" if how.get("version", "R2010") < "R2007" else "utf-8")))
    audit = document.audit()
    assert not audit.errors
    assert not audit.fixes
    return document.modelspace()


def vertices(entity):
    if entity.dxftype() == "POLYLINE":
        return np.array([v.dxf.location.vec2 for v in entity.vertices]), entity.is_closed
    return np.array([p[:2] for p in entity.get_points()]), entity.closed


def check(space):
    """Every cut is closed, simple and the right way round, and no line or point is there twice."""
    lines = []
    for entity in space.query("LWPOLYLINE POLYLINE"):
        points, closed = vertices(entity)
        steps = np.diff(np.vstack([points, points[:1]]) if closed else points, axis=0)
        assert np.hypot(*steps.T).min() >= 0.02 - 1e-9
        if entity.dxf.layer == "NOTE":
            continue
        lines.append(shapely.LineString([p.vec2 for p in make_path(entity).flattening(1e-3)]))  # arcs and all
        if entity.dxf.layer in CUTS:
            assert closed
            assert shapely.Polygon(lines[-1]).is_valid
            assert shapely.LinearRing(lines[-1]).is_ccw == CUTS[entity.dxf.layer]
    tree = shapely.STRtree(lines)
    for i, j in tree.query(lines, predicate="dwithin", distance=0.005).T:
        if i < j:
            together = lines[i].intersection(lines[j].buffer(0.005, cap_style="flat"))
            assert all(part.length < 0.5 for part in shapely.get_parts(together))


@pytest.mark.parametrize("name", ["saltpan.toml", "highmoor.toml"])
def test_every_drawing_of_the_examples_is_fit_for_a_machine(name):
    for drawing in example(name):
        check(read(replace(drawing, labels=())))
        check(read(replace(drawing.mirrored("left"), labels=())))


@pytest.mark.parametrize("version", dxf.VERSIONS)
@pytest.mark.parametrize("with_arcs", [False, True])
def test_every_version_holds_the_same(version, with_arcs):
    for drawing in example("highmoor.toml")[:3]:
        space = read(drawing, version=version, arcs=with_arcs)
        assert space.doc.acad_release == version
        # published: DXF reference, $INSUNITS 4 is millimetres; R12 has no such variable
        assert space.doc.header.get("$INSUNITS", 4) == 4
        check(space)
        found = [make_path(e) for e in space.query('LWPOLYLINE POLYLINE[layer=="CUT_OUTSIDE"]')]
        rings = [shapely.LinearRing(s.points) for s in drawing.strokes if s.role is Role.CUT_OUTSIDE]
        for path, ring in zip(found, rings, strict=True):
            shown = shapely.LinearRing([p.vec2 for p in path.flattening(1e-4)])
            assert shown.hausdorff_distance(ring) < (arcs.TOLERANCE + 1e-3 if with_arcs else 1e-9)


def test_old_files_say_their_units():
    assert b"999\nUnits: millimetres\n" in dxf.render(drawn(outside(SQUARE)), version="R12")


@settings(max_examples=12, deadline=None)
@given(wing_files())
def test_whatever_the_wing_every_contour_is_fit_for_a_machine(tmp_path_factory, text):
    path = tmp_path_factory.mktemp("wing") / "random.toml"
    path.write_text(text)
    try:
        drawings = sheets.drawings(jobs.load(path), "left")
    except WingError:
        return  # a wing that cannot be built, said in one line
    for drawing in drawings:
        check(read(replace(contours.clean(drawing), labels=())))


class TestClean:
    def test_turns_cuts_the_right_way_round(self):
        for role, anticlockwise in ((Role.CUT_OUTSIDE, True), (Role.CUT_INSIDE, False)):
            for ring in (SQUARE, SQUARE[::-1]):
                (made,) = contours.clean(drawn(Stroke(ring, role, closed=True))).strokes
                assert shapely.LinearRing(made.points).is_ccw == anticlockwise

    def test_drops_points_that_say_nothing_but_keeps_the_ends(self):
        near = line((0, 0), (0.01, 0), (5, 0), (5.015, 0.001), (9.99, 0), (10, 0))
        assert contours.clean(drawn(near)).strokes[0].points.tolist() == [[0, 0], [5.015, 0.001], [10, 0]]

    @given(st.lists(st.tuples(st.integers(0, 90), st.integers(0, 90)), min_size=2, max_size=12))
    def test_moves_no_open_line_by_more_than_a_point_apart(self, steps):
        points = np.cumsum(np.array(steps) / 1000.0, axis=0)
        made = contours.clean(drawn(line(*points))).strokes
        assert len(made) == 1 or np.ptp(points, axis=0).max() < 0.02
        for stroke in made:
            assert shapely.LineString(points).hausdorff_distance(shapely.LineString(stroke.points)) < 0.021

    def test_takes_out_what_runs_along_a_cut_and_what_is_there_twice(self):
        marks = line((2, 0), (8, 0)), line((1, 1), (9, 1)), line((5, 1.004), (20, 1.004)), line((5, -5), (5, 5))
        made = contours.clean(drawn(outside(SQUARE), outside(SQUARE), *marks)).strokes
        assert [s.points.tolist() for s in made[1:]] == [
            [[1, 1], [9, 1]],
            [[9, 1.004], [20, 1.004]],
            [[5, -5], [5, 5]],
        ]
        assert made[0].points.tolist() == SQUARE.tolist()

    def test_keeps_lines_that_only_cross(self):
        marks = line((0, 5), (10, 5)), line((0, 0), (10, 10)), line((0, 10), (10, 0))
        assert len(contours.clean(drawn(*marks)).strokes) == 3

    def test_a_speck_where_a_contour_crosses_itself_goes(self):
        loop = [[0.0, 4.9], [0.1, 4.9], [0.1, 5.1], [-0.1, 5.1], [-0.1, 4.8], [0.0, 4.8]]
        ring = np.vstack([SQUARE, loop])
        (made,) = contours.clean(drawn(outside(ring))).strokes
        assert shapely.Polygon(made.points).is_valid
        assert shapely.Polygon(made.points).area == pytest.approx(100.0, abs=0.06)

    @pytest.mark.parametrize(
        "stroke", [outside([[0, 0], [10, 10], [10, 0], [0, 10]]), line((0, 0), (9, 9), role=Role.CUT_INSIDE)]
    )
    def test_what_cannot_be_cut_is_refused(self, stroke):
        with pytest.raises(contours.ContourError, match=r"^drawing piece: wanted "):
            contours.clean(drawn(stroke))


class TestKerf:
    def test_what_is_kept_stays_its_size(self):
        inside = Stroke(SQUARE * 0.4 + 3.0, Role.CUT_INSIDE, closed=True)
        plate = drawn(outside(SQUARE), inside, line((1, 1), (9, 1)), holes=(Hole(2.0, 8.0, 1.0),))
        made = contours.grown(contours.clean(plate), 0.2)
        assert shapely.LinearRing(made.strokes[0].points).bounds == (-0.1, -0.1, 10.1, 10.1)
        assert shapely.LinearRing(made.strokes[1].points).bounds == (3.1, 3.1, 6.9, 6.9)
        assert made.strokes[2].points.tolist() == [[1, 1], [9, 1]]
        assert made.holes[0].diameter == 0.8

    def test_corners_stay_sharp(self):
        # plane trigonometry: a square's corner moves out by half the kerf both ways, a mitre
        made = contours.grown(drawn(outside(SQUARE)), 1.0)
        assert sorted(made.strokes[0].points.tolist()) == [[-0.5, -0.5], [-0.5, 10.5], [10.5, -0.5], [10.5, 10.5]]

    @pytest.mark.parametrize(
        "plate",
        [
            drawn(outside(SQUARE), holes=(Hole(5.0, 5.0, 1.5),)),
            drawn(outside(SQUARE), Stroke(SQUARE * [0.4, 0.1] + 3.0, Role.CUT_INSIDE, closed=True)),
        ],
    )
    def test_a_kerf_that_fills_a_cut_is_refused(self, plate):
        with pytest.raises(contours.KerfError, match=r"^drawing piece: wanted a kerf .*, got 1.6 mm$"):
            contours.grown(plate, 1.6)

    def test_the_file_says_so(self):
        assert b"for a kerf of 0.2 mm" in dxf.render(drawn(outside(SQUARE)), kerf=0.2)
        assert "Kerf" not in dict(read(drawn(outside(SQUARE))).doc.header.custom_vars.properties)

    def test_every_drawing_of_the_examples_can_be_offset(self):
        for drawing in example("saltpan.toml"):
            check(read(replace(contours.grown(drawing, 0.2), labels=())))


class TestArcs:
    @given(
        st.floats(0.5, 5000.0),
        st.floats(0.05, 3.0),
        st.floats(0.0, 6.0),
        st.integers(4, 300),
    )
    def test_points_on_a_circle_become_one_arc(self, radius, angle, start, count):
        t = np.linspace(start, start + angle, count)
        points = radius * np.column_stack([np.cos(t), np.sin(t)])
        found = arcs.fit(points, closed=False)
        sagitta = radius * (1.0 - np.cos(angle / (count - 1) / 2.0))
        if sagitta < 0.009 and radius * (1.0 - np.cos(angle / 2.0)) > 0.01 and radius * angle > 0.02 * count:
            assert len(found) == 2
            # published: DXF reference, a bulge is the tangent of a quarter of the angle
            assert found[0, 2] == pytest.approx(np.tan(angle / 4.0), rel=0.02, abs=1e-3)

    def test_fewer_lines_for_the_examples(self):
        counts = []
        for drawing in example("highmoor.toml"):
            for stroke in drawing.strokes:
                if stroke.closed and len(stroke.points) > 40:
                    found = arcs.fit(stroke.points, closed=True)
                    counts.append((len(stroke.points), len(found)))
                    kept = {tuple(p) for p in stroke.points.tolist()}
                    assert all(tuple(p) in kept for p in found[:, :2].tolist())
        before, after = np.array(counts).sum(axis=0)
        assert after < 0.4 * before

    def test_corners_and_straight_lines_stay(self):
        assert arcs.fit(SQUARE, closed=True).tolist() == [[*p, 0.0] for p in SQUARE.tolist()]
        zigzag = np.array([[i, 3.0 * (i % 2)] for i in range(9)], dtype=float)
        assert arcs.fit(zigzag, closed=False).tolist() == [[*p, 0.0] for p in zigzag.tolist()]
