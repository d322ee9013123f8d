"""The web blank's drawings: what they measure, what they carry, and that nothing lies on anything."""

from __future__ import annotations

from itertools import combinations, pairwise
from pathlib import Path

import numpy as np
import pytest
import shapely
from richest import richest

from wrywing.export import room
from wrywing.geom import lettering, web
from wrywing.geom.drawing import Role
from wrywing.shop import job as jobs
from wrywing.shop.sheets import drawings as sheets
from wrywing.shop.sheets.stock import stock_sheets
from wrywing.shop.sheets.web import web_blank
from wrywing.shop.wording import degrees

EXAMPLES = Path(__file__).parent.parent / "examples"
WINGS = ["saltpan.toml", "highmoor.toml"]


@pytest.fixture(scope="module", params=WINGS)
def job(request):
    return jobs.load(EXAMPLES / request.param)


def outline(drawing):
    (cut,) = (s for s in drawing.strokes if s.role is Role.CUT_OUTSIDE)
    assert cut.closed
    return cut.points


def test_outlines_follow_the_cut_within_a_hundredth(job):
    for drawing, sense, n in zip(web_blank(job), (-1.0, 1.0), (-0.5, 0.5), strict=True):
        ring = shapely.Polygon(outline(drawing))
        assert ring.is_valid
        assert ring.exterior.is_ccw == (sense > 0)
        s = np.linspace(5.0, job.web.plane.length - 5.0, 300)
        for row in job.rows(s):
            for edge in (row.top, row.bottom):
                h = edge.cut_front if n < 0 else edge.cut_rear
                at_a_step = any(abs(row.s - run.start) < 20.0 for side in web.SIDES for run in job.web.cut(side).runs)
                if not at_a_step:
                    assert ring.exterior.distance(shapely.Point(sense * row.s, h)) < 0.01


def test_outlines_have_no_more_points_than_a_hundredth_needs(job):
    # Every inner point of an edge stands off the line between its neighbours by a fair share of the tolerance.
    for drawing in web_blank(job):
        points = outline(drawing)
        fewer = shapely.simplify(shapely.LineString(np.vstack([points, points[:1]])), 0.003)
        assert len(fewer.coords) >= 0.9 * (len(points) + 1)


def test_ends_lie_on_the_rib_planes(job):
    for face in job.web.faces:
        for line in (face.top, face.bottom):
            for (s, h), rib in zip(line[[0, -1]], job.record.web.ends, strict=True):
                assert job.web.plane.point(s, h, job.face(face.name)(s))[1] == pytest.approx(rib, abs=1e-4)


def test_a_pin_pushed_square_through_the_sheet_hits_both_faces(job):
    front, rear = web_blank(job)
    assert len(front.holes) == len(rear.holes) >= 3
    for a, b in zip(front.holes, rear.holes, strict=True):
        assert (-a.x, a.y) == pytest.approx((b.x, b.y), abs=1e-12)
    for drawing in (front, rear):
        inside = shapely.Polygon(outline(drawing))
        assert all(inside.contains(shapely.Point(h.x, h.y).buffer(h.diameter)) for h in drawing.holes)


def test_ticks_stand_every_50_mm_or_2_in_with_the_local_bevel(job):
    step = 50.8 if job.record.units == "in" else 50.0
    rear = web_blank(job)[1]
    bevels = [t for t in rear.labels if t.text.endswith("°") and "saw" not in t.text]
    rows = {round(row.s, 6): row for row in job.rows(np.arange(1, int(job.web.plane.length / step) + 1) * step)}
    for s, row in rows.items():
        here = sorted((t for t in bevels if abs(t.x - s) < 1e-6), key=lambda t: t.y)
        assert [float(t.text[:-1]) for t in here] == [
            pytest.approx(row.bottom.bevel, abs=0.0501),
            pytest.approx(row.top.bevel, abs=0.0501),
        ]
    marks = [s.points for s in rear.strokes if len(s.points) == 2 and s.points[0, 0] == s.points[1, 0]]
    assert {round(m[0, 0], 6) for m in marks} >= set(rows)


@pytest.mark.parametrize("hand", ["right", "left"])
def test_sheets_carry_what_the_workshop_must_know(job, hand):
    for drawing in web_blank(job, hand):
        face = "FRONT" if "front" in drawing.name else "REAR"
        text = "\n".join(label.text for label in drawing.labels)
        for word in ("ROOT", "TIP", "UP", face, f"{hand} hand", job.stamp, job.record.name, job.record.web.foam):
            assert word in text
        assert drawing.hand == hand


@pytest.mark.parametrize("hand", ["right", "left"])
def test_no_lettering_lies_on_other_lettering_or_on_holes_or_crosses_the_outline(job, hand):
    for drawing in web_blank(job, hand):
        boxes = [label.box() for label in drawing.labels]
        for a, b in combinations(range(len(boxes)), 2):
            assert not boxes[a].intersects(boxes[b]), (drawing.labels[a].text, drawing.labels[b].text)
        ring = shapely.Polygon(outline(drawing)).exterior
        for label, box in zip(drawing.labels, boxes, strict=True):
            assert not box.intersects(ring), label.text
            for hole in drawing.holes:
                assert not box.intersects(shapely.Point(hole.x, hole.y).buffer(hole.diameter / 2)), label.text


def test_the_left_hand_is_the_mirror_image(job):
    for right, left in zip(web_blank(job, "right"), web_blank(job, "left"), strict=True):
        a, b = (shapely.Polygon(outline(d) * f) for d, f in ((right, [1, 1]), (left, [-1, 1])))
        assert a.symmetric_difference(b).area == pytest.approx(0.0, abs=1e-9)


def test_a_square_cut_has_one_outline_but_for_its_ends():
    job = jobs.load(EXAMPLES / "highmoor.toml")
    built = job.fit(job.cant, job.survey(job.cant), "square")
    front, rear = built.faces
    s = np.linspace(20.0, built.plane.length - 20.0, 100)
    for a, b in ((front.top, rear.top), (front.bottom, rear.bottom)):
        np.testing.assert_allclose(np.interp(s, *a.T), np.interp(s, *b.T), atol=1e-9)


@pytest.mark.parametrize("hand", ["right", "left"])
def test_a_set_bevel_says_at_each_limit_what_the_saw_changes_from_and_to(hand):
    job = jobs.load(EXAMPLES / "saltpan.toml")
    for drawing in web_blank(job, hand):
        sense = (-1.0 if "front" in drawing.name else 1.0) * (1.0 if hand == "right" else -1.0)
        said = [t for t in drawing.labels if t.text.startswith("s ") and "saw" in t.text]
        limits = [pair for side in web.SIDES for pair in pairwise(job.web.cut(side).runs)]
        assert len(said) == len(limits) == 4
        for before, after in limits:
            left, right = (degrees(np.degrees(run.angle), 2) for run in (before, after)[:: int(sense)])
            (label,) = (t for t in said if t.text == f"s {job.wording.plain(after.start)}: saw {left} | {right}")
            bar = label.place([lettering.width(label.text.split("|")[0] + "|", 3.0) - lettering.width("|", 1.5), 0.0])
            assert bar[0] == pytest.approx(sense * after.start)


def test_the_saw_is_said_often_enough_for_every_sheet_of_paper():
    job = jobs.load(EXAMPLES / "saltpan.toml")
    for drawing, sense in zip(web_blank(job), (-1.0, 1.0), strict=True):
        middle = np.interp(0.0, *job.web.faces[1].top.T) / 2.0
        for side in web.SIDES:
            for run in job.web.cut(side).runs:
                text = f"saw {degrees(np.degrees(run.angle), 2)}"
                s = [sense * t.x for t in drawing.labels if t.text == text and (t.y > middle) == (side == "top")]
                here = sorted(v for v in s if run.start < v < run.stop)
                places = [max(run.start, 0.0), *here, min(run.stop, job.web.plane.length)]
                assert here
                assert np.diff(places).max() < 180.0


def test_notes_are_no_wider_than_a_sheet_of_paper(job):
    for drawing in web_blank(job):
        x0 = shapely.Polygon(outline(drawing)).bounds[0]
        for label in drawing.labels:
            a, _, b, _ = label.box().bounds
            assert b - a < 170.0
        (name,) = (t for t in drawing.labels if t.text == job.record.name)
        assert name.x == pytest.approx(x0)


THIN = """
name = "thin tip"
units = "mm"
wing.stations = [
    {{ y = 0, chord = {chord}, le = 0, airfoil = "naca 0010", washout = 0 }},
    {{ y = 700, chord = 20, le = 40, airfoil = "naca 0010", washout = 0 }},
]
skin.thickness = 0.2
[web]
ends = [5, 690]
line = [0.3, 0.3]
thickness = {sheet}
cant = 0
edge = "full bevel"
bond = 0.1
foam = "pvc foam 80"
filler = "microballoon paste"
"""


@pytest.mark.parametrize(("chord", "sheet", "least"), [(200, 3.0, 3.0), (60, 2.0, 1.0)])
def test_register_holes_keep_their_room_on_a_thin_tip(tmp_path, chord, sheet, least):
    path = tmp_path / "thin.toml"
    path.write_text(THIN.format(chord=chord, sheet=sheet))
    job = jobs.load(path)
    faces = [shapely.Polygon(face.outline()) for face in job.web.faces]
    for drawing, sense in zip(web_blank(job), (-1.0, 1.0), strict=True):
        assert len(drawing.holes) >= 3
        for hole in drawing.holes:
            spare = shapely.Point(sense * hole.x, hole.y).buffer(1.49 * hole.diameter)
            assert all(face.contains(spare) for face in faces)
            assert hole.diameter == least
        for word in ("UP", "ROOT y 5", "TIP y 690"):
            assert any(t.text == word for t in drawing.labels)
        assert not any(a.box().intersects(b.box()) for a, b in combinations(drawing.labels, 2))


def test_a_web_too_low_for_its_arrow_has_it_beside_its_root(tmp_path):
    path = tmp_path / "low.toml"
    path.write_text(THIN.format(chord=60, sheet=2.0))
    for drawing in web_blank(jobs.load(path)):
        ring = shapely.Polygon(outline(drawing))
        (up,) = (t for t in drawing.labels if t.text == "UP")
        (root,) = (t for t in drawing.labels if t.text.startswith("ROOT"))
        assert not up.box().intersects(ring)
        assert up.box().distance(root.box()) < 10.0
        assert any("FRONT face" in t.text or "REAR face" in t.text for t in drawing.labels)


def test_the_joints_tube_and_the_strips_turns_are_named():
    job = jobs.load(EXAMPLES / "highmoor.toml")
    for drawing in web_blank(job):
        texts = [t.text for t in drawing.labels]
        assert f"pin tube {job.wording.length(job.tube.across)}, wrapped" in texts
        # the shortest strip of each edge lies furthest from the skin: it goes on the web first
        for side in web.SIDES:
            shortest = min((layer for layer in job.layers if layer.side == side), key=lambda layer: layer.length)
            assert any(t.startswith(f"layer {shortest.number} ") and t.endswith("laid first") for t in texts)


def test_title_and_notes_of_every_drawing_can_be_set_elsewhere_on_paper(tmp_path):
    job = jobs.load(richest(tmp_path))
    for drawing in [*sheets.drawings(job, "left"), *stock_sheets(job, job.nestings, ["right", "left"])]:
        texts = [text for text, _ in room.paragraphs(drawing.labels)]
        assert texts[0] == job.record.name
        assert [*drawing.notes] == [text for text in texts if text in drawing.notes]
        assert f"Wing file revision {job.stamp}" in texts[-1]
