"""Bevel gauges: each card, laid on the section it is for, bears on face and edge and on nothing else."""

from __future__ import annotations

from itertools import combinations, pairwise
from pathlib import Path

import numpy as np
import pytest
import shapely
import trimesh

from wrywing.geom import gauge, solid
from wrywing.geom.drawing import Role
from wrywing.shop import job as jobs
from wrywing.shop.sheets.gauge import bevel_gauges, cards
from wrywing.shop.wingfile import WingError

EXAMPLES = Path(__file__).parent.parent / "examples"
LONG = 1.5  # mm, longer than the pieces of the arc about a card's corner


def variant(tmp_path, name, *changes, more=""):
    text = (EXAMPLES / f"{name}.toml").read_text().replace('"sections/', f'"{EXAMPLES}/sections/')
    for old, new in changes:
        assert old in text
        text = text.replace(old, new)
    path = tmp_path / "wing.toml"
    path.write_text(text + more)
    return jobs.load(path)


@pytest.fixture(params=[("saltpan", "rear"), ("saltpan", "front"), ("highmoor", "rear"), ("highmoor", "front")])
def job(request, tmp_path):
    name, face = request.param
    return variant(tmp_path, name, more=f'\n[gauges]\nface = "{face}"\n')


def outlines(drawing):
    found = [s.points for s in drawing.strokes if s.role is Role.CUT_OUTSIDE]
    assert all(s.closed for s in drawing.strokes if s.role is Role.CUT_OUTSIDE)
    return found


def notch(ring):
    """The corner a card is made for, and the directions of its two legs: where its outline turns inwards."""
    step = np.roll(ring, -1, axis=0) - ring
    long = np.flatnonzero(np.hypot(*step.T) > LONG)
    for i, j in pairwise([*long, long[0]]):
        if step[i, 0] * step[j, 1] - step[i, 1] * step[j, 0] < 0.0:  # a right turn on an anticlockwise ring
            a, b = step[i], step[j]
            share = np.linalg.solve(np.column_stack([a, -b]), ring[j] - ring[i])[0]
            return ring[i] + share * a, -a / np.hypot(*a), b / np.hypot(*b)
    raise AssertionError("no notch")


def section(job, s, hand):
    """The foam at s as one looks outwards: x aft to the right, or to the left on a left-hand panel."""
    (row,) = job.rows([s])
    n = [float(job.face(face)(s)) for face in ("front", "rear")]
    corners = [
        (n[0], row.bottom.cut_front),
        (n[1], row.bottom.cut_rear),
        (n[1], row.top.cut_rear),
        (n[0], row.top.cut_front),
    ]
    return np.array(corners) * [1.0 if hand == "right" else -1.0, 1.0]


@pytest.mark.parametrize("hand", ["right", "left"])
def test_every_card_fits_the_section_it_is_for(job, hand):
    (drawing,) = bevel_gauges(job, hand)
    face = job.record.gauges.face
    assert len(outlines(drawing)) == len(cards(job)) >= 6
    for ring, card in zip(outlines(drawing), cards(job), strict=True):
        corners = section(job, card.s, hand)
        at = corners[
            {("bottom", "front"): 0, ("bottom", "rear"): 1, ("top", "rear"): 2, ("top", "front"): 3}[
                card.cut.side, face
            ]
        ]
        corner, *legs = notch(ring)
        laid = shapely.Polygon(ring + at - corner)
        foam = shapely.Polygon(corners)
        # what an edge that rises along s makes of an angle seen at constant s is far below a saw's step
        assert laid.intersection(foam).area < 0.02 * np.ptp(corners[:, 0])
        reach = np.ptp(corners[:, 0]) - 0.5
        for leg in legs:
            bearing = at + leg * reach
            assert foam.exterior.distance(shapely.Point(bearing)) < 0.02
            assert laid.exterior.distance(shapely.Point(bearing)) < 1e-6
        upright = max(legs, key=lambda leg: abs(leg[1]))  # the leg on the face is longer than the web is thick
        assert laid.exterior.buffer(1e-6).contains(shapely.LineString([at + 1.1 * upright, at + 9.0 * upright]))


def test_angles_are_those_between_the_faces_of_the_solid(job):
    # The angle of the foam is the straight angle less the one between outward normals of face and edge (trimesh).
    built, face = job.web, job.record.gauges.face
    mesh = solid.web_blank(built.plane, built.top, built.bottom)
    body = trimesh.Trimesh(mesh.points, mesh.faces, process=False)
    s = (body.triangles_center - built.plane.origin) @ built.plane.s
    for card in cards(job):
        near = np.abs(s - card.s) < 12.0
        ways = (built.plane.n * (1 if face == "rear" else -1), built.plane.h * (1 if card.cut.side == "top" else -1))
        sides = [near & (body.face_normals @ way > 0.9) for way in ways]
        normals = [np.average(body.face_normals[on], axis=0, weights=body.area_faces[on]) for on in sides]
        a, b = (v / np.linalg.norm(v) for v in normals)
        found = gauge.corner_angle(card.cut, face, card.s)
        assert np.degrees(found) == pytest.approx(180.0 - np.degrees(np.arccos(a @ b)), abs=0.03)


@pytest.mark.parametrize("hand", ["right", "left"])
def test_cards_say_what_they_are_for_and_nothing_overlaps(job, hand):
    (drawing,) = bevel_gauges(job, hand)
    shapes = [shapely.Polygon(ring) for ring in outlines(drawing)]
    boxes = [(label.text, label.box()) for label in drawing.labels]
    for shape, card in zip(shapes, cards(job), strict=True):
        assert shape.is_valid
        assert shape.exterior.is_ccw
        said = " ".join(text for text, box in boxes if shape.contains(box))
        words = [f"{card.cut.side.upper()} edge", f"on the {job.record.gauges.face.upper()} face", job.stamp]
        assert all(word in said for word in [*words, f"{hand.upper()} hand"])
        _, down, along = notch(np.asarray(shape.exterior.coords)[:-1])
        angle = np.degrees(np.arccos(down @ along))
        assert float(said.split("corner ")[1].split("°")[0]) == pytest.approx(angle, abs=0.0501)
        if card.run is None:
            assert f"s {job.wording.plain(card.s)} " in said
    assert all(a.distance(b) > 1.0 for a, b in combinations(shapes, 2))
    assert not any(a.intersects(b) for (_, a), (_, b) in combinations(boxes, 2))
    assert not any(shape.exterior.intersects(box) for shape in shapes for _, box in boxes)


def test_a_set_bevel_has_a_card_for_each_run_with_the_saws_own_angle():
    job = jobs.load(EXAMPLES / "saltpan.toml")
    runs = [run for side in ("top", "bottom") for run in job.web.cut(side).runs]
    for card, run in zip(cards(job), runs, strict=True):
        bevel = 90.0 - np.degrees(gauge.corner_angle(card.cut, "rear", card.s))
        bevel *= 1.0 if card.cut.side == "top" else -1.0
        assert bevel == pytest.approx(np.degrees(run.angle), abs=0.02)
        assert run.start < card.s < run.stop


def test_stated_places_and_a_face_are_taken(tmp_path):
    job = variant(tmp_path, "highmoor", more='\n[gauges]\nplaces = [10, "500 mm"]\nface = "front"\n')
    assert [(card.cut.side, card.s) for card in cards(job)] == [
        (side, pytest.approx(s)) for side in ("top", "bottom") for s in (254.0, 500.0)
    ]


def test_square_edges_need_none_unless_asked_for(tmp_path):
    square = ('edge      = "full bevel"', 'edge      = "square"')
    assert bevel_gauges(variant(tmp_path, "highmoor", square)) == []
    asked = variant(tmp_path, "highmoor", square, more="\n[gauges]\nplaces = [20, 60]\n")
    (card,) = cards(asked)  # every other would be the same
    assert np.degrees(gauge.corner_angle(card.cut, "rear", card.s)) == pytest.approx(90.0, abs=1e-6)
    (drawing,) = bevel_gauges(asked, "right")
    said = " ".join(label.text for label in drawing.labels)
    assert all(words in said for words in ("TOP and BOTTOM", "anywhere along both", "at s 20, 60 and wherever"))


def test_a_place_beyond_the_web_is_refused_in_one_line(tmp_path):
    job = variant(tmp_path, "highmoor", more="\n[gauges]\nplaces = [20, 500]\n")
    wanted = r"wanted a place on the web, 0 to 93\S* in, got 500 in"
    with pytest.raises(WingError, match=rf"^wing\.toml: gauges\.places\[2\]: {wanted}$"):
        cards(job)
