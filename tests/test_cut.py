"""The web blank for a router: the outline of both faces together, and each face's own line within."""

from itertools import combinations
from pathlib import Path

import numpy as np
import pytest
import shapely
from wings import GOOD, loft

from wrywing.export import contours
from wrywing.geom import blank, seat, web
from wrywing.geom.drawing import Role
from wrywing.geom.naca import naca
from wrywing.shop import job as jobs
from wrywing.shop.sheets.cut import web_cut

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
    for words in ("rear face", "front face, far side", "ROOT", "TIP", "UP", job.stamp):
        assert words in text


LOW = ("chord = 300", "chord = 150"), ("chord = 200", "chord = 100"), ('"square"', '"set bevel"\nruns = 2')


@pytest.mark.parametrize("hand", ["right", "left"])
@pytest.mark.parametrize("changes", [(), (("thickness = 6", "thickness = 9"),), LOW], ids=["plain", "thick", "low"])
def test_every_line_within_the_blank_has_its_own_face_named_beside_it(tmp_path, changes, hand):
    path = tmp_path / "wing.toml"
    text = GOOD.replace('edge = "square"', 'edge = "full bevel"') if changes is not LOW else GOOD
    for old, new in changes:
        assert old in text
        text = text.replace(old, new)
    path.write_text(text)
    job = jobs.load(path)
    (drawing,) = web_cut(job, hand)
    sense = [1.0 if hand == "right" else -1.0, 1.0]
    faces = {face.name: shapely.LinearRing(face.outline() * sense) for face in job.web.faces}
    names = [t for t in drawing.labels if t.text.removeprefix("inner line: ").startswith(("front face", "rear face"))]
    lines = [shapely.LineString(s.points) for s in drawing.strokes if s.role is Role.ENGRAVE]
    assert len(lines) >= 2
    for line in lines:
        middle = line.interpolate(0.5, normalized=True)
        whose = min(faces, key=lambda name: faces[name].distance(middle))
        name = min(names, key=lambda t: t.box().distance(line))
        assert name.box().distance(line) < 8.0
        assert f"{whose} face" in name.text
        # said again on every sheet of paper, an A4 held sideways showing 266 mm
        assert len([t for t in names if t.box().distance(line) < 8.0]) >= line.length / 266.0


def test_a_square_edge_engraves_only_the_ends(tmp_path):
    text = (EXAMPLES / "saltpan.toml").read_text().replace("sections/", f"{(EXAMPLES / 'sections').as_posix()}/")
    path = tmp_path / "square.toml"
    path.write_text(text.replace('edge      = "set bevel"', 'edge      = "square"').replace("runs      = 3", ""))
    (drawing,) = web_cut(jobs.load(path))
    assert all(len(s.points) == 2 for s in drawing.strokes if s.role is Role.ENGRAVE)


@pytest.mark.parametrize("sweep", np.linspace(-400.0, 400.0, 17))
def test_no_outline_of_a_face_doubles_back(sweep):
    # Edges cut to a bare skin cross the rib planes at the very places where the survey starts and stops.
    wing = loft(naca("2412"), [0.0, 1000.0], chord=[300.0, 200.0], le=[0.0, sweep], z=[0.0, 60.0], twist=[0.0, 6.0])
    plane = web.plane(wing, ends=(0.0, 980.0), line=(0.3, 0.32), cant=0.05)
    depth = dict.fromkeys(web.SIDES, seat.constant(0.0))
    survey = seat.survey(wing, plane, thickness=seat.constant(9.0), depth=depth)
    for treatment in ("square", "full bevel"):
        edges = [seat.cut(survey, side, treatment) for side in web.SIDES]
        for name in blank.FACES:
            outline = blank.face(plane, *edges, name).outline()
            assert shapely.Polygon(outline).is_valid
            assert np.linalg.norm(np.roll(outline, -1, axis=0) - outline, axis=1).min() > 1e-7
