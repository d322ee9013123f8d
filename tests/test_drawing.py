"""Drawings and their lettering."""

import numpy as np
import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st

from wrywing.geom import lettering
from wrywing.geom.drawing import Drawing, Hole, Label, Role, Stroke, thin

PRINTABLE = st.text(st.characters(codec="latin-1", categories=["L", "N", "P", "S"]), min_size=1, max_size=12)
LABELS = st.builds(
    Label,
    text=PRINTABLE,
    x=st.floats(-500, 500),
    y=st.floats(-500, 500),
    height=st.floats(2, 10),
    angle=st.floats(-180, 180),
    anchor=st.sampled_from(["start", "middle", "end"]),
)
KITE = np.array([[0.0, 0.0], [40.0, 5.0], [60.0, 30.0], [5.0, 20.0]])


def drawing(**more):
    return Drawing(
        "kite",
        "Kite",
        "0badc0de",
        strokes=(Stroke(KITE, Role.CUT_OUTSIDE, closed=True),),
        holes=(Hole(10.0, 8.0, 4.0),),
        **more,
    )


@given(LABELS)
def test_lettering_stays_in_its_box(label):
    box = label.box().buffer(1e-3)  # strokes stand to the micrometre
    assert all(box.covers(shapely.LineString(line)) for line in label.strokes())


@given(LABELS)
def test_mirrored_label_reads_in_the_mirrored_box(label):
    plain = Drawing("a", "a", "", labels=(label,))
    (turned,) = plain.mirrored("left").labels
    mirror = shapely.transform(label.box(), lambda p: p * [-1.0, 1.0])
    assert turned.text == label.text
    assert mirror.hausdorff_distance(turned.box()) < 1e-9


def test_mirror_is_exact_and_its_own_inverse():
    there = drawing().mirrored("left")
    assert there.hand == "left"
    ring = there.strokes[0].points
    assert {(-x, y) for x, y in KITE} == set(map(tuple, ring))
    assert shapely.is_ccw(shapely.LinearRing(ring)) == shapely.is_ccw(shapely.LinearRing(KITE))
    assert (there.holes[0].x, there.holes[0].y) == (-10.0, 8.0)
    back = there.mirrored("right")
    assert np.array_equal(back.strokes[0].points, KITE)


def test_bounds_take_in_holes_and_lettering():
    assert drawing().bounds() == (0.0, 0.0, 60.0, 30.0)
    label = Label("ROOT", 100.0, 0.0, height=5.0)
    x0, y0, x1, y1 = drawing(labels=(label,)).bounds()
    assert (x0, y1) == (0.0, 30.0)
    assert x1 == pytest.approx(100.0 + lettering.width("ROOT", 5.0))
    assert y0 < 0.0


@pytest.mark.parametrize("height", [2.2, 5.0])
def test_capitals_stand_on_the_line_and_are_as_tall_as_asked(height):
    ink = np.vstack(lettering.strokes("ROOT TIP", height))
    assert ink[:, 1].min() == pytest.approx(0.0)
    assert ink[:, 1].max() == pytest.approx(height)


def test_points_and_commas_stand_on_the_line():
    for mark in ".,":
        assert np.vstack(lettering.strokes(mark, 10.0))[:, 1].max() < 1.0


@pytest.mark.parametrize(
    ("text", "drawn"),
    [
        ("Möwe", "Mowe"),
        ("−3.2°", "-3.2°"),
        ("8 × 5 ± 0.1", "8 x 5 +/- 0.1"),
        ("1½ in", "1 1/2 in"),
        ("Øre, łódź", "Ore, lodz"),
        ("翼", "?"),
        ("a\nb", "a?b"),
    ],
)
def test_text_falls_back_to_what_can_be_drawn(text, drawn):
    assert lettering.plain(text) == drawn


@pytest.mark.parametrize("letter", [*"äéñůčőÄÉÑŮČŐâàīğż", "a\u0302\u0301"])
def test_an_accent_stands_clear_over_its_letter(letter):
    bare, drawn = (lettering.strokes(t, 1.0) for t in (lettering.plain(letter), letter))
    letter_top = max(line[:, 1].max() for line in bare if line[:, 1].min() < 0.6)  # an i without its dot
    assert max(line[:, 1].min() for line in drawn) > letter_top
    assert lettering.width(letter, 3.0) == lettering.width(lettering.plain(letter), 3.0)


@pytest.mark.parametrize("letter", "çąșạŞ")
def test_an_accent_hangs_below_its_letter(letter):
    drawn, bare = (np.vstack(lettering.strokes(t, 1.0))[:, 1] for t in (letter, lettering.plain(letter)))
    assert drawn.min() < bare.min()
    assert drawn.max() == bare.max()


@given(PRINTABLE, PRINTABLE)
def test_widths_add_up(left, right):
    parts = lettering.width(left, 3.0) + lettering.width(right, 3.0)
    assert lettering.width(left + right, 3.0) == pytest.approx(parts)


@given(st.floats(0.001, 0.05), st.floats(1.0, 40.0))
def test_thinned_line_stays_within_tolerance(tolerance, bow):
    x = np.linspace(0.0, 2000.0, 800)
    line = np.column_stack([x, bow * np.sin(x / 300.0)])
    kept = thin(line, tolerance)
    assert len(kept) < len(line)
    assert shapely.LineString(line).hausdorff_distance(shapely.LineString(kept)) <= tolerance * 1.001
