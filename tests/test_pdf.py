"""Printed sheets: measured with another library, cut along their marks and put together again."""

import io
import re
from collections import deque
from dataclasses import replace
from itertools import combinations, pairwise

import numpy as np
import pdfplumber
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st
from samples import A4, LETTER, ROLL, WING, Sheet, blank, card, core

from wrywing.export import pdf, tiles
from wrywing.export.pdf import Print
from wrywing.geom.drawing import Drawing, Hole, Label, Role, Stroke
from wrywing.shop import stock
from wrywing.shop.sheets.layout import Layout

MM = 25.4 / 72.0  # published: ISO 32000-1, 8.3.2.3, user space unit
GLUE = 10.0
UPRIGHT = Drawing(
    "rib", "Rib 7", "3fa9c1d2", "left", (Stroke(core().strokes[0].points[:, ::-1], Role.CUT_OUTSIDE, True),)
)
CASES = {
    "blank on a4": (blank(), Print(A4)),
    "blank on letter": (blank().mirrored("left"), Print(LETTER, "in")),
    "core on a4": (core(), Print(A4)),
    "rib on letter": (UPRIGHT, Print(LETTER, "in")),
    "card on a4": (card(), Print(A4)),
    "blank on a roll": (blank(), Print(ROLL)),
    "blank from a printer that shrinks": (blank(), Print(A4, "mm", (0.951, 0.994))),
    "core from a printer that stretches": (core(), Print(LETTER, "in", (1.004, 1.049))),
}


class Page:
    """One page's lines and boxes in mm of the print, from its lower left corner."""

    def __init__(self, page, how):
        self.page = page
        across = abs(page.width * MM - min(how.paper.width, how.paper.height)) < 0.01
        self.mm = MM * np.array(how.printed if across else how.printed[::-1])
        self.size = np.array([page.width, page.height], dtype=float) * self.mm
        self.paper = np.array([page.width, page.height], dtype=float) * MM
        self.axes = "xy" if across else "yx"
        self.lines, self.widths, self.colours = [], [], []
        for mark in page.lines + page.curves + [r for r in page.rects if r["stroke"]]:
            pts = np.array(mark["pts"]) * self.mm * [1.0, -1.0] + [0.0, self.size[1]]
            if mark["object_type"] != "line" and mark["path"][-1][0] == "h":
                pts = np.vstack([pts, pts[:1]])
            self.lines.append(shapely.LineString(pts))
            self.widths.append(round(mark["linewidth"] * self.mm[0], 3))  # pdfplumber scales it as it does x
            self.colours.append(tuple(mark["stroking_color"]))
        self.blocks = [self.box(r) for r in page.rects if r["fill"] and not r["stroke"]]
        self.text = page.extract_text()

    def box(self, thing):
        y0, y1 = self.page.height - thing["bottom"], self.page.height - thing["top"]
        return shapely.box(*(np.array([thing["x0"], y0, thing["x1"], y1], dtype=float) * [*self.mm, *self.mm]))

    def outline(self):
        """Lines of the widest pen in black: the outside cut."""
        return shapely.union_all(
            [s for s, w, c in zip(self.lines, self.widths, self.colours, strict=True) if w == 0.35 and not any(c)]
        )

    def furniture(self):
        """Fine lines in black or grey that are not the drawing's."""
        greys = {(round(k / 255, 3),) * 3 for k in (0, 80, 176)}
        return [
            s
            for s, w, c in zip(self.lines, self.widths, self.colours, strict=True)
            if w < 0.3 and tuple(np.round(c, 3)) in greys
        ]

    def window(self):
        """The largest rectangle that furniture lines bound: the frame."""
        long = sorted(self.furniture(), key=lambda s: -s.length)
        upright = [s for s in long if s.bounds[2] - s.bounds[0] < 1e-6][:2]
        level = [s for s in long if s.bounds[3] - s.bounds[1] < 1e-6][:2]
        return shapely.union_all(upright + level).bounds

    def crosses(self):
        """Centres of the register marks outside the window."""
        short = [s for s in self.furniture() if abs(s.length - 5.0) < 1e-3]
        return [
            np.array(a.centroid.coords[0]) for a, b in combinations(short, 2) if a.centroid.distance(b.centroid) < 1e-3
        ]

    def seams(self):
        """Where it is cut (left, top) and where neighbours come to lie (right, bottom), from its crosses."""
        x0, y0, x1, y1 = self.window()
        found = self.crosses()
        above, below = (sorted(x for x, y in found if (y > y1) == up and x0 - 1 < x < x1) for up in (True, False))
        assert np.allclose(above, below, atol=1e-3)
        left, right = (sorted(y for x, y in found if (x > x1) == far and not x0 - 1 < x < x1) for far in (False, True))
        assert np.allclose(left, right, atol=1e-3)
        middle = (x0 + x1) / 2.0, (y0 + y1) / 2.0
        return {
            "left": next((x for x in above if x < middle[0]), None),
            "right": next((x for x in above if x > middle[0]), None),
            "top": next((y for y in left if y > middle[1]), None),
            "bottom": next((y for y in left if y < middle[1]), None),
        }

    def place(self):
        """Row and column, as the sheet's mark says."""
        bold = [c for c in self.page.chars if c["fontname"] == "Helvetica-Bold"]
        largest = max(c["size"] for c in bold)
        row, *column = (c["text"] for c in bold if c["size"] == largest)
        return ord(row) - ord("A"), int("".join(column)) - 1


@pytest.fixture(scope="module", params=CASES)
def case(request):
    drawing, how = CASES[request.param]
    pages = printed(drawing, how)
    return drawing, how, pages[0].page.pdf, pages


def printed(drawing, how, wing=WING):
    """The pages of a drawing as they come out of the printer."""
    file = pdfplumber.open(io.BytesIO(pdf.render(drawing, how, wing=wing)))
    return [Page(page, how) for page in file.pages]


def test_asks_not_to_be_scaled(case):
    # published: ISO 32000-1, 12.2
    catalog = pdfplumber.utils.resolve(case[2].doc.catalog)
    assert pdfplumber.utils.resolve(catalog["ViewerPreferences"])["PrintScaling"].name == "None"


def test_pages_are_the_paper(case):
    _, how, _, pages = case
    for page in pages:
        if np.isinf(how.paper.height):
            assert len(pages) == 1
            assert page.paper[1] == pytest.approx(how.paper.width, abs=0.001)
        else:
            assert sorted(page.paper) == pytest.approx(sorted((how.paper.width, how.paper.height)), abs=0.001)


def test_bars_measure_true_on_every_page(case):
    _, how, _, pages = case
    length, words = {"mm": (100.0, "100 mm"), "in": (4 * 25.4, "4 in")}[how.units]
    for page in pages:
        for axis in (0, 1):
            bars = [
                s
                for s in page.furniture()
                if s.length > 99.0
                and abs(s.length - (s.bounds[2 + axis] - s.bounds[axis])) < 1e-6
                and not any(s.distance(shapely.Point(c)) < 0.01 for c in shapely.box(*page.window()).exterior.coords)
            ]
            assert [s.length for s in bars] == pytest.approx([length], abs=0.05)
            ends = [
                s for s in page.furniture() if s.length == pytest.approx(3.0, abs=0.01) and s.distance(bars[0]) < 0.01
            ]
            assert abs(ends[0].centroid.coords[0][axis] - ends[1].centroid.coords[0][axis]) == pytest.approx(
                length, abs=0.05
            )
        # x is across the paper held upright, or across the roll
        assert f"{page.axes[0]}: {words}" in page.text
        assert ("print corrected" in page.text) == (how.printed != (1.0, 1.0))


def test_every_page_says_what_it_belongs_to(case):
    drawing, _, file, pages = case
    hand = {"right": "right-hand panel", "left": "left-hand panel", "both": "both hands"}[drawing.hand]
    for number, page in enumerate(pages, start=1):
        for words in (
            "Möwe survey wing, outer panel",
            drawing.title,
            hand,
            drawing.stamp,
            f"page {number} of {len(pages)}",
            "Print at 100 %, unscaled",
        ):
            assert words in page.text
    assert drawing.title in file.metadata["Title"]
    assert drawing.stamp in file.metadata["Subject"]


def test_no_page_is_blank_and_none_repeats_another(case):
    pages = case[3]
    assert all(page.outline().length > 1.0 for page in pages)
    assert len({page.place() for page in pages}) == len(pages)


def test_sheets_cut_along_their_marks_give_the_outline(case):
    assemble(case[0], case[3])


@pytest.mark.parametrize("paper", [*stock.PAPERS, "roll 250 mm", "roll 24 in"])
def test_every_paper_gives_the_outline(paper):
    drawing = core()
    how = Print(stock.paper(paper), "mm", (0.996, 1.002))
    assemble(drawing, printed(drawing, how))


def assemble(drawing, pages):
    """Trim the pages along their marks, lay them over their neighbours' strips, and measure the outline."""
    by_place = {page.place(): page for page in pages}
    at = {min(by_place): np.zeros(2)}
    queue = deque(at)
    while queue:
        row, column = queue.popleft()
        here = by_place[row, column].seams()
        for there, mine, other, axis in (
            ((row, column + 1), "right", "left", 0),
            ((row, column - 1), "left", "right", 0),
            ((row + 1, column), "bottom", "top", 1),
            ((row - 1, column), "top", "bottom", 1),
        ):
            assert (here[mine] is not None) == (there in by_place)
            if there in by_place and there not in at:
                step = np.zeros(2)
                step[axis] = here[mine] - by_place[there].seams()[other]
                at[there] = at[row, column] + step
                queue.append(there)
    assert len(at) == len(pages)
    joined = shapely.union_all(
        [shapely.transform(showing(page), lambda p, place=place: p + at[place]) for place, page in by_place.items()]
    )
    ring = shapely.LinearRing(drawing.strokes[0].points)
    shift = np.array(ring.bounds[:2]) - joined.bounds[:2]
    joined = shapely.transform(joined, lambda p: p + shift)
    assert off(ring, joined) < 0.05
    assert off(joined, ring) < 0.05
    assert joined.length == pytest.approx(ring.length, abs=0.05)


def showing(page):
    """What is left to see of a page's outline when it is trimmed and its neighbours lie on its glue strips."""
    seams = page.seams()
    x0, y0, x1, y1 = page.window()
    trim = [seams["left"] or x0, seams["bottom"] or y0, seams["right"] or x1, seams["top"] or y1]
    return page.outline().intersection(shapely.box(*trim))


def off(line, other):
    """Largest distance from points of `line`, a millimetre apart, to `other`."""
    points = shapely.points(shapely.get_coordinates(shapely.segmentize(line, 1.0)))
    return shapely.distance(points, other).max()


def test_furniture_stays_clear(case):
    drawing, how, *_ = case
    for page in printed(replace(drawing, labels=()), how, wing=WING * 5):
        window = shapely.box(*page.window())
        lines = [s for s in page.furniture() if s.distance(window.exterior) > 0.05 or s.length < 2.0]
        inner = [s for s in page.furniture() if abs(s.length - 4.0) < 1e-3]
        assert all(s.distance(page.outline()) > 2.0 for s in inner)
        outside = [s for s in lines if s not in inner]
        words = [page.box(w) for w in page.page.extract_words(keep_blank_chars=True) if w["upright"]]
        words += [page.box(c) for c in page.page.chars if not c["upright"]]
        words = [w for w in words if not window.contains(w)]
        usable = np.minimum(page.size, page.paper) - 16.0
        sheet = shapely.box(*((page.size - usable) / 2.0), *((page.size + usable) / 2.0))
        for thing in outside + page.blocks + words:
            assert window.buffer(-0.01).disjoint(thing)
            assert sheet.buffer(0.15).covers(thing)
        rules = [s for s in outside if s.length > 0.1]
        for word in words:
            assert all(word.disjoint(line) for line in rules + page.blocks)
        flat = [w for w in words if w.bounds[2] - w.bounds[0] > 8.0]
        assert all(a.disjoint(b) for a, b in combinations(flat, 2))


@pytest.mark.parametrize("hatched", [False, True])
def test_crosses_inside_the_window_give_way_to_the_drawing(hatched):
    step = 5.0 if hatched else 400.0
    lines = [np.array([[x, 0.0], [x, 400.0]]) for x in np.arange(0.0, 401.0, step)]
    net = Drawing("net", "Net", "3fa9c1d2", "both", tuple(Stroke(line, Role.CUT_OUTSIDE) for line in lines))
    inner = [s for page in printed(net, Print(A4)) for s in page.furniture() if abs(s.length - 4.0) < 1e-3]
    assert bool(inner) != hatched


def test_a_hole_far_from_all_else_keeps_its_place():
    lone = replace(core(), holes=(Hole(0.0, 0.0, 8.0),))
    places = {page.place() for page in printed(lone, Print(A4))}
    for start in places:
        reached, edge = set(), {start}
        while edge:
            reached |= edge
            edge = {q for r, c in edge for q in ((r + 1, c), (r - 1, c), (r, c + 1), (r, c - 1))} & places - reached
        assert reached == places
    assert len(places) > len(printed(replace(core(), holes=()), Print(A4)))


def test_text_and_lines_are_large_enough(case):
    for page in case[3]:
        assert min(page.widths) >= 0.2
        # Helvetica's capitals are 0.718 of its size (published: Adobe Core 14 metrics, from memory)
        sizes = [c["size"] if c["upright"] else c["width"] for c in page.page.chars]
        assert min(sizes) * page.mm.min() * 0.718 >= 2.2 - 1e-3


def test_holes_are_round_and_all_there():
    for drawing in (card(), blank(), core()):
        (page,) = printed(drawing, Print(Sheet("roll 1200 mm", 1200.0, np.inf)))
        red = [s for s, c in zip(page.lines, page.colours, strict=True) if c[0] > 0.5 and c[1] == 0.0]
        found = sorted((round(s.bounds[0], 2), s.length, s.is_ring) for s in red)
        assert [n for _, n, _ in found] == pytest.approx([np.pi * h.diameter for h in drawing.holes], rel=1e-3)
        assert all(ring for *_, ring in found)


def test_labels_can_be_searched_where_they_are_drawn():
    drawing = card()
    (page,) = printed(drawing, Print(A4))
    assert drawing.labels[0].text in page.text
    word = page.page.search(re.escape(drawing.labels[0].text))[0]
    x, ring = page.outline().bounds[0], drawing.strokes[0].points
    x0, _, x1, _ = drawing.labels[0].box().bounds
    shift = x - ring[:, 0].min()
    assert word["x0"] * MM - shift == pytest.approx(x0, abs=0.1)
    assert word["x1"] * MM - shift == pytest.approx(x1, abs=0.1)


@pytest.mark.parametrize(
    ("paper", "words"),
    [
        (Sheet("card", 105.0, 148.0), r"^paper card: wanted at least \S+ x \S+ mm, got 105 x 148 mm$"),
        (Sheet("roll 150 mm", 150.0, np.inf), r"^paper roll 150 mm: wanted a roll at least \S+ mm wide, got 150 mm$"),
    ],
)
def test_too_small_a_paper_is_refused(paper, words):
    with pytest.raises(tiles.PaperError, match=words):
        pdf.render(card(), Print(paper))


def test_fewest_pages():
    # 2102 mm in steps of 256 mm (A4 sideways) or 238.4 mm, and one glue strip
    for paper, count in ((A4, 9), (LETTER, 9), (ROLL, 1)):
        assert pdf.paged(blank(), Print(paper))[1] == count
    assert pdf.paged(card(), Print(A4))[1] == 1
    # published: ISO 32000-1, annex C: no page beyond 14400 units, 5080 mm
    long = printed(blank(6000.0), Print(ROLL))
    assert len(long) == 2
    assert max(page.size[0] for page in long) <= 5080.0


LINES = st.lists(
    st.tuples(st.floats(-900, 900), st.floats(-900, 900), st.floats(-300, 300), st.floats(1, 300)),
    min_size=1,
    max_size=6,
)


@settings(max_examples=40, deadline=None)
@given(LINES)
def test_whatever_is_drawn_shows_somewhere(ends):
    shapes = np.array([shapely.LineString([(x, y), (x + dx, y + dy)]) for x, y, dx, dy in ends], dtype=object)
    layout, *_ = tiles.plan(shapes, A4, margins=(15.0, 30.0, 15.0, 15.0), least=(50.0, 50.0))
    shown = []
    for tile in layout.tiles:
        shown += [shapely.LineString(p) for _, parts in tiles.clip(shapes, tile.window) for p in parts]
    for shape in shapes:
        assert off(shape, shapely.union_all(shown)) < 0.005


def test_lettering_can_be_searched_for_with_its_accents():
    lettered = replace(card(), labels=(Label("Flügel, François", 5.0, 5.0, 4.0),))
    with pdfplumber.open(io.BytesIO(pdf.render(lettered, Print(A4)))) as file:
        assert any("Flügel, François" in page.extract_text() for page in file.pages)


def lettered(drawing, texts, at, wide=150.0):
    """A drawing with title and notes one below the other."""
    layout = Layout()
    layout.write_notes(["Möwe survey wing", drawing.title], texts, *at, wide=wide)
    return replace(drawing, labels=(*drawing.labels, *layout.labels))


NOTES = [
    f"Note {i}: pins through the 3 mm holes register it with the other face, edges cut as marked" for i in range(9)
]


@pytest.mark.parametrize(
    ("bare", "how"),
    [
        (blank(), Print(A4)),
        (blank(), Print(ROLL)),
        (core(), Print(LETTER, "in", (0.96, 1.01))),
        (card(), Print(A4)),
        (UPRIGHT, Print(A4)),
    ],
    ids=["blank on a4", "blank on a roll", "core from a printer that errs", "card", "rib"],
)
def test_notes_go_on_one_page_that_is_there_anyway_clear_of_seams_and_marks(bare, how):
    pages, plain = printed(lettered(bare, NOTES, (0.0, -60.0)), how), printed(bare, how)
    assert len(pages) == len(plain)
    (page,) = (page for page in pages if "Note 0" in page.text)
    words = page.page.search(r"Note \d: [^\n]+")
    assert len(words) == len(NOTES)
    x0, y0, x1, y1 = page.window()
    seams = page.seams()
    room = shapely.box(
        x0 + GLUE * (seams["left"] is not None),
        y0 + GLUE * (seams["bottom"] is not None),
        x1 - GLUE * (seams["right"] is not None),
        y1 - GLUE * (seams["top"] is not None),
    )
    for word in words:
        box = page.box(word)
        assert room.contains(box)
        assert box.distance(page.outline()) > 0.5


def test_notes_without_room_have_a_page_of_their_own_that_is_joined_to_none():
    lines = [np.array([[x, 0.0], [x, 400.0]]) for x in np.arange(0.0, 401.0, 20.0)]
    net = Drawing("net", "Net", "3fa9c1d2", "both", tuple(Stroke(line, Role.CUT_OUTSIDE) for line in lines))
    pages, plain = printed(lettered(net, 4 * NOTES, (0.0, -10.0)), Print(A4)), printed(net, Print(A4))
    shape, apart = pages[: len(plain)], pages[len(plain) :]
    assert sum(page.text.count("Note 0:") for page in apart) == 4
    assert not any("Note" in page.text for page in shape)
    assert all(page.crosses() == [] and "glue" not in page.text for page in apart)
    assert all(f"page {i} of {len(pages)}" in page.text for i, page in enumerate(pages, start=1))


@settings(max_examples=30, deadline=None)
@given(st.lists(st.tuples(st.floats(0.0, 2050.0), st.floats(5.0, 45.0)), min_size=1, max_size=30), st.floats(900, 2300))
def test_seams_cut_no_more_lettering_than_they_must(texts, long):
    shapes = np.array([shapely.LineString([(0.0, 0.0), (long, 0.0)])], dtype=object)
    boxes = [(x, 5.0, x + wide, 8.0) for x, wide in texts if x + wide < long]
    layout, *_ = tiles.plan(shapes, A4, margins=(15.0, 30.0, 15.0, 15.0), least=(150.0, 100.0), texts=boxes)
    tiles_ = sorted(layout.tiles, key=lambda tile: tile.column)
    assert len(tiles_) == int(np.ceil((long + 2.0 - GLUE) / (297.0 - 30.0 - GLUE)))  # no sheet more than without
    for before, after in pairwise(tiles_):
        assert before.window[2] - after.window[0] == pytest.approx(GLUE, abs=0.002)
        assert 150.0 <= after.window[2] - after.window[0] <= 267.001
    assert tiles_[0].window[0] <= 0.0
    assert tiles_[-1].window[2] >= long

    def cut(places, near=0.0):
        return sum(x1 - x0 for x0, _, x1, _ in boxes if any(x0 - near < s < x1 + near for s in places))

    seams = [tile.window[0] for tile in tiles_[1:]]
    step, play = 257.0, len(tiles_) * 257.0 + GLUE - long - 2.0
    for share in np.linspace(0.0, 1.0, 21):  # any grid of equal sheets; seams are placed to the millimetre
        assert cut(seams) <= cut([-1.0 - share * play + k * step for k in range(1, len(tiles_))], near=1.0) + 1e-9
