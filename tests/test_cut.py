"""The web blank for a router: the outline of both faces together, and each face's own line within."""

from itertools import combinations
from pathlib import Path

import numpy as np
import pytest
import shapely

from wrywing.export import contours
from wrywing.geom.drawing import Role
from wrywing.shop import job as jobs
from wrywing.shop.sheets_cut import web_cut

EXAMPLES = Path(__file__).parent.parent / "examples"


@pytest.fixture(scope="module", params=["saltpan.toml", "highmoor.toml"])
def case(request):
    job = jobs.load(EXAMPLES / request.param)
    return job, contours.clean(web_cut(job)[0])


def test_outline_and_lines_together_are_both_faces(case):
    job, drawing = case
    cut = shapely.LinearRing(drawing.strokes[0].points)
    engraved = [shapely.LineString(s.points) for s in drawing.strokes if s.role is Role.ENGRAVE]
    everything = shapely.union_all([cut, *engraved])
    steps = [run.start for side in ("top", "bottom") for run in job.web.cut(side).runs]
    for row in job.rows(np.linspace(5.0, job.web.plane.length - 5.0, 200)):
        if any(abs(row.s - step) < 20.0 for step in steps):
            continue
        for edge, outermost in ((row.top, max), (row.bottom, min)):
            for h in (edge.cut_front, edge.cut_rear):
                assert everything.distance(shapely.Point(row.s, h)) < 0.12  # nearer ones are lost in the cut
            assert cut.distance(shapely.Point(row.s, outermost(edge.cut_front, edge.cut_rear))) < 0.01
    assert engraved


def test_what_is_engraved_lies_inside_the_cut(case):
    _, drawing = case
    whole = shapely.Polygon(drawing.strokes[0].points)
    assert whole.is_valid
    for stroke in drawing.strokes[1:]:
        assert whole.covers(shapely.LineString(stroke.points))
    assert all(whole.contains(shapely.Point(h.x, h.y).buffer(h.diameter)) for h in drawing.holes)
    assert len(drawing.holes) >= 3


def test_each_line_says_whose_it_is_and_no_lettering_lies_on_anything(case):
    job, drawing = case
    boxes = [label.box() for label in drawing.labels]
    assert not any(a.intersects(b) for a, b in combinations(boxes, 2))
    marks = shapely.union_all([shapely.LineString(s.points) for s in drawing.strokes if s.role is not Role.NOTE])
    ring = shapely.LinearRing(drawing.strokes[0].points)
    assert not any(box.intersects(marks) or box.intersects(ring) for box in boxes)
    text = "\n".join(label.text for label in drawing.labels)
    for words in ("rear face ends here", "front face ends here, on the far side", "ROOT", "TIP", "UP", job.stamp):
        assert words in text


def test_a_square_edge_engraves_only_the_ends(tmp_path):
    text = (EXAMPLES / "saltpan.toml").read_text().replace("sections/", f"{(EXAMPLES / 'sections').as_posix()}/")
    path = tmp_path / "square.toml"
    path.write_text(text.replace('edge      = "set bevel"', 'edge      = "square"').replace("runs      = 3", ""))
    (drawing,) = web_cut(jobs.load(path))
    assert all(len(s.points) == 2 for s in drawing.strokes if s.role is Role.ENGRAVE)
