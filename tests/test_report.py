"""The report: it stands alone, its figures are those of the other commands, and any screen and paper shows it."""

from __future__ import annotations

import csv
import io
import json
import re
import sys
from pathlib import Path

import numpy as np
import pdfplumber
import pytest
import shapely
from hypothesis import HealthCheck, given, settings
from PIL import Image
from wings import GOOD

pytest.importorskip("resource")  # POSIX
import browser
import pages
from randomly import wing_files
from richest import richest

import wrywing
from wrywing import cli
from wrywing.export import figures_edge, figures_load, plot, report
from wrywing.shop.steps import steps

INCH, OUNCE = 25.4, 28.349523125
seen = pytest.mark.skipif(browser.CHROMIUM is None, reason=browser.WHY)


@pytest.fixture(scope="module")
def wing(tmp_path_factory):
    return richest(tmp_path_factory.mktemp("rich"))


@pytest.fixture(scope="module")
def job(wing):
    return wrywing.load(wing)


@pytest.fixture(scope="module")
def html(job):
    return report.render(job)


@pytest.fixture(scope="module")
def page(html, tmp_path_factory):
    """The report on the screen, with WebGL."""
    path = tmp_path_factory.mktemp("page") / "report.html"
    path.write_bytes(html)
    with pages.Page(path.parent / "profile", (1280, 900), *pages.WEBGL) as shown:
        shown.open(path.as_uri())
        yield shown


@pytest.fixture
def said(monkeypatch, capsys):
    """What the program prints with --json."""

    def go(*words):
        monkeypatch.setattr(sys, "argv", ["wrywing", *map(str, words), "--json"])
        with pytest.raises(SystemExit) as ended:
            cli.main()
        assert not ended.value.code
        return json.loads(capsys.readouterr().out)

    return go


# --- the file -------------------------------------------------------------------------------------


def test_it_stands_alone_and_is_small(html):
    text = html.decode()
    shown = re.sub(r"<script>.*?</script>", "", text, flags=re.DOTALL)
    links = re.findall(r'(?:src|href|xlink:href)="([^"]*)"', shown)
    assert all(link.startswith(("#", "data:")) for link in links)
    assert "default-src 'none'" in text
    assert len(html) < 6e6


def test_the_same_file_gives_the_same_bytes(wing, html):
    assert report.render(wrywing.load(wing)) == html


def test_no_two_elements_share_a_name(html):
    names = re.findall(r'\bid="([^"]+)"', re.sub(r"<script.*?</script>", "", html.decode(), flags=re.DOTALL))
    assert len(names) == len(set(names))


def test_a_wing_with_only_the_tables_that_are_needed(tmp_path):
    (tmp_path / "plain.toml").write_text(GOOD)
    text = report.render(wrywing.load(tmp_path / "plain.toml")).decode()
    titles = re.findall(r"<h2>(.*?)</h2>", text)
    assert not {"Cap strips", "Load and reserves", "Flanges", "Joint", "Cores"} & set(titles)
    for body in re.findall(r'<div class="body">(.*?)</div>\n</section>', text, flags=re.DOTALL):
        assert re.search(r"<svg|<table|<dd>|<p", body)


@settings(max_examples=4, deadline=None, suppress_health_check=list(HealthCheck))
@given(wing_files())
def test_any_wing_that_can_be_made_has_a_report(tmp_path_factory, text):
    path = tmp_path_factory.mktemp("any") / "wing.toml"
    path.write_text(text)
    try:
        found = wrywing.load(path)
        found.web, found.flanges, found.cores, found.ribs, found.cradles  # noqa: B018
    except ValueError:
        return
    assert len(report.render(found)) < 6e6


@pytest.mark.parametrize(
    ("out", "said"),
    [
        ("nowhere/report.html", "wanted a folder {0}/nowhere that exists, got none"),
        ("plain.toml/report.html", "wanted a folder {0}/plain.toml that exists, got a file"),
        ("", "wanted a file, got a folder"),
    ],
)
def test_a_place_that_cannot_take_it(out, said, tmp_path, monkeypatch, capsys):
    (tmp_path / "plain.toml").write_text(GOOD)
    before = sorted(tmp_path.iterdir())
    words = ["wrywing", "report", str(tmp_path / "plain.toml"), "--out", str(tmp_path / out)]
    monkeypatch.setattr(sys, "argv", words)
    with pytest.raises(SystemExit) as ended:
        cli.main()
    err = capsys.readouterr().err
    assert (ended.value.code, err.count("\n")) == (2, 1)
    assert said.format(tmp_path) in err
    assert sorted(tmp_path.iterdir()) == before


def test_a_wing_that_cannot_be_made_leaves_the_old_report(tmp_path, monkeypatch, capsys):
    (tmp_path / "plain.toml").write_text(GOOD.replace("thickness = 6", "thickness = 600"))
    (tmp_path / "report.html").write_text("<!DOCTYPE html>the old one")
    words = ["wrywing", "report", str(tmp_path / "plain.toml"), "--out", str(tmp_path / "report.html")]
    monkeypatch.setattr(sys, "argv", words)
    with pytest.raises(SystemExit) as ended:
        cli.main()
    assert ended.value.code == 2
    assert capsys.readouterr().err.startswith("plain.toml: web.thickness: ")
    assert (tmp_path / "report.html").read_text() == "<!DOCTYPE html>the old one"
    assert len(list(tmp_path.iterdir())) == 2


# --- what it answers ------------------------------------------------------------------------------


def numbers(text):
    return [float(v.replace(",", "")) for v in re.findall(r"-?\d[\d,]*\.?\d*", text)]


def test_the_first_part_answers_what_a_builder_asks(job, said, wing):
    facts, found = said("check", wing), {step.what: step for step in steps(job)}
    assert numbers(found["Sheet"].answer)[0] == pytest.approx(facts["web_thickness"] / INCH, abs=5e-4)
    assert facts["edge"] in found["Edges"].answer
    assert numbers(found["Filler"].answer)[0] == pytest.approx(facts["filler"] / OUNCE, abs=5e-3)
    layers = facts["strength"]["layers"]
    assert numbers(found["Cap strips"].answer)[0] == sum(layer["count"] for layer in layers)
    for side, line in zip(("top", "bottom"), found["Cap strips"].more, strict=False):
        lengths = numbers(line)[1::2]
        assert lengths == pytest.approx([v["length"] / INCH for v in layers if v["side"] == side], abs=0.1)
    (buy,) = found["To buy"].more
    assert numbers(found["Cores"].answer)[0] == sum(len(core["bays"]) for core in facts["cores"])
    assert re.search(r"^\d+ sheets? pvc foam 80, ", buy)
    assert "microballoon paste" in buy


def rows(page, title):
    """Cells of the table whose title begins so, as numbers where they are."""
    script = """title => [...document.querySelectorAll("table")]
        .filter(t => t.caption.textContent.startsWith(title))
        .flatMap(t => [...t.tBodies[0].rows].map(r => [...r.cells].map(c => c.textContent)))"""
    return page.evaluate(f"({script})({json.dumps(title)})")


def close(text, value, scale):
    """Whether a figure on the page is the value, rounded."""
    digits = len(text.strip("°").partition(".")[2])
    return abs(float(text.strip("°")) * scale - value) <= 0.5001 * 10.0**-digits * scale


@seen
def test_the_bevel_tables_are_those_of_bevels(page, said, wing):
    found = said("bevels", wing)["rows"]
    for side in ("top", "bottom"):
        shown = rows(page, f"{side} edge")
        assert len(shown) == len(found)
        for cells, row in zip(shown, found, strict=True):
            edge = row[side]
            lengths = [row["s"], row["y"], row["thickness"], edge["front"], edge["rear"]]
            assert all(close(c, v, INCH) for c, v in zip(cells, lengths, strict=False))
            assert close(cells[5], edge["bevel"], 1.0)
            lengths = [edge["crown"], edge["gap"], edge["cut_front"], edge["cut_rear"]]
            assert all(close(c, v, INCH) for c, v in zip(cells[6:], lengths, strict=True))


@seen
def test_the_candidates_and_the_verdict_are_those_of_weigh(page, said, wing):
    found = said("weigh", wing)
    shown = rows(page, "Highmoor sailplane, outer panel: what a web costs")
    made = [c for c in found["candidates"] if c["outside"] is None]
    refused = {c["thickness"] for c in found["candidates"] if c["outside"] is not None}  # a row a sheet
    assert len(shown) == len(made) + len(refused)
    assert sum(cells[2] == "any" for cells in shown) == len(refused)
    for cells, c in zip((cells for cells in shown if cells[2] != "any"), made, strict=True):
        assert close(cells[1], c["thickness"], INCH)
        assert cells[2] == c["edge"]
        assert all(close(cells[i], c["masses"][k], OUNCE) for i, k in ((5, "foam"), (6, "filler"), (8, "total")))
        assert (cells[0] == "→") == c["chosen"]
    assert found["verdict"] in page.evaluate("document.querySelector('#trade .see').textContent")


@seen
def test_strips_reserves_and_bays_are_those_of_check(page, said, wing):
    facts = said("check", wing)
    for cells, layer in zip(rows(page, "cap strips"), facts["strength"]["layers"], strict=True):
        assert cells[:3] == [layer["side"], str(layer["number"]), str(layer["count"])]
    for cells, check in zip(rows(page, "where each reserve"), facts["strength"]["checks"], strict=True):
        assert cells[0] == check["name"]
        assert close(cells[1], check["reserve"], 1.0)
    said_of_cores = page.evaluate("document.querySelector('#cores .facts').textContent")
    for core in facts["cores"]:
        for bay in core["bays"]:
            assert any(abs(v * INCH - bay["ends"][1]) < 0.13 for v in numbers(said_of_cores))
    assert facts["stamp"] == page.evaluate("document.getElementById('stamp').textContent")


@seen
def test_the_lists_are_those_of_templates(page, monkeypatch, tmp_path, wing):
    words = ["wrywing", "templates", str(wing), "--out", str(tmp_path / "out"), "--formats", "csv"]
    monkeypatch.setattr(sys, "argv", [*words, "--hand", "right,left"])
    with pytest.raises(SystemExit) as ended:
        cli.main()
    assert not ended.value.code
    for name, title, columns in (
        ("cut-list", "cut list", ("piece", "material", "size", "each_hand", "both_hands")),
        ("shopping-list", "to buy", ("item", "size")),
    ):
        found = list(csv.DictReader(io.StringIO((tmp_path / "out" / f"{name}.csv").read_text())))
        shown = rows(page, title)
        assert [cells[: len(columns)] for cells in shown] == [[row[c] for c in columns] for row in found]


# --- on the screen --------------------------------------------------------------------------------


@seen
def test_nothing_is_asked_for_and_nothing_goes_wrong(page):
    assert [address for address in page.asked if not address.startswith(("file:", "data:"))] == []
    assert [line for line in page.said if "'level': 'error'" in line or "exceptionThrown" in line] == []
    assert all("Performance" in line or "WebGL" in line for line in page.said)  # what swiftshader says of itself


@seen
@pytest.mark.parametrize("width", [1280, 390])
def test_nothing_overflows(page, width):
    page.resize(width)
    wide = "[document.documentElement.scrollWidth, document.documentElement.clientWidth]"
    across, room = page.evaluate(wide)
    assert across <= room == width
    over = """[...document.body.querySelectorAll("*")].filter(e => !e.closest(".scroll") || e.matches(".scroll"))
        .filter(e => !e.closest("svg"))
        .filter(e => (r => r.width && (r.right > innerWidth + 0.5 || r.left < -0.5))(e.getBoundingClientRect()))
        .map(e => e.outerHTML.slice(0, 80))"""
    assert page.evaluate(over) == []
    page.resize(1280)


@seen
def test_letters_in_figures_can_be_read_on_a_telephone(page):
    """Common practice: letters of 8 px and more can be read at arm's length."""
    page.resize(390)
    scale = page.evaluate("document.querySelector('#figure-bevel svg').getBoundingClientRect().width")
    page.resize(1280)
    assert (
        scale / (plot.WIDTH * 72.0) * 8.0 > 7.9
    )  # the smallest letters are 8 points in figures plot.WIDTH inches wide


CONTRAST = """(() => {
  const rgb = text => (text.match(/[\\d.]+/g) || []).map(Number);
  const linear = v => v <= 0.04045 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4;
  const light = c => { const [r, g, b] = c.map(v => linear(v / 255)); return 0.2126 * r + 0.7152 * g + 0.0722 * b };
  const ratio = (a, b) => { const [x, y] = [light(a), light(b)].sort((p, q) => q - p); return (x + 0.05) / (y + 0.05) };
  const ground = e => { for (; e; e = e.parentElement) { const c = rgb(getComputedStyle(e).backgroundColor);
    if (c.length === 3 || c[3] > 0) return c.slice(0, 3) } return [255, 255, 255] };
  const out = [];
  const walk = document.createTreeWalker(document.body, NodeFilter.SHOW_TEXT);
  while (walk.nextNode()) { const e = walk.currentNode.parentElement;
    if (walk.currentNode.textContent.trim() && !e.closest("script, svg"))
      out.push([ratio(rgb(getComputedStyle(e).color).slice(0, 3), ground(e)), e.textContent.slice(0, 40)]) }
  for (const e of document.querySelectorAll('svg g[id*="-text_"] > g, svg g[id*="-text_"] use'))
    out.push([ratio(rgb(getComputedStyle(e).fill).slice(0, 3), [255, 255, 255]), e.closest("figure").id]);
  return out })()"""


@seen
def test_contrast_of_text(page):
    """Published: WCAG 2.2, success criterion 1.4.3, and its relative luminance."""
    found = page.evaluate(CONTRAST)
    assert len(found) > 500
    assert min(found)[0] >= 4.5, min(found)


def test_lines_are_told_apart_without_colour():
    assert len({str(dash) for _, dash in plot.LINES}) == len(plot.LINES)
    assert plot.EDGES["top"][1] != plot.EDGES["bottom"][1]


SALTPAN = Path(__file__).parent.parent / "examples" / "saltpan.toml"
HEAVY = {"load.mass": "1200 kg", "caps.most": 60}  # strips reach nearly to the tip, where the layers needed are few


@pytest.mark.parametrize("name", ["strips", "gap"])
def test_no_line_runs_through_the_words_of_a_figure(wing, name):
    made = {"strips": figures_load.strips, "gap": figures_edge.fill}[name]
    changed = wrywing.load(wing, HEAVY) if name == "strips" else wrywing.load(SALTPAN, {"limits.max_gap": "0.12 mm"})
    with plot.style():
        figure = made(changed)
        plot.FigureCanvasSVG(figure)
        plot.settle(figure)
        for ax in figure.axes:
            words = [text for text in ax.texts if text.get_text()]
            boxes = [shapely.box(*text.get_window_extent().extents) for text in words]
            assert boxes
            for line in ax.lines:
                path = shapely.LineString(line.get_transform().transform(np.column_stack(line.get_data())))
                drawn = path.intersection(shapely.box(*ax.bbox.extents)) if line.get_clip_on() else path
                crossed = [text.get_text() for text, box in zip(words, boxes, strict=True) if box.intersects(drawn)]
                assert not crossed


@seen
def test_the_panel_turns_in_three_dimensions(page, tmp_path):
    assert page.evaluate("document.getElementById('view3d').className") == "live"
    assert not page.evaluate("document.querySelector('.still').offsetHeight")
    kinds = page.evaluate("[...document.querySelectorAll('#view3d label')].map(e => e.textContent)")
    assert {"skin", "web", "cap strips", "foam cores"} <= set(kinds)
    views = [stage(page, tmp_path, f"document.querySelectorAll('#view3d button')[{i}].click()") for i in range(4)]
    assert all(np.ptp(view) > 60 for view in views)
    assert all(np.abs(a - b).max() > 40 for i, a in enumerate(views) for b in views[:i])
    off = "document.querySelectorAll('#view3d input')[0].click()"
    assert np.abs(stage(page, tmp_path, off) - views[-1]).max() > 5


def stage(page, tmp_path, script):
    """Grey levels of the 3D view after a script has run."""
    page.evaluate(f"document.querySelector('.stage').scrollIntoView({{block: 'center'}}); {script}")
    page.evaluate("new Promise(done => requestAnimationFrame(() => requestAnimationFrame(done)))")
    page.picture(tmp_path / "view.png")
    x, y, w, h = page.evaluate(
        "(r => [r.x, r.y, r.width, r.height])(document.querySelector('#view3d canvas').getBoundingClientRect())"
    )
    whole = np.asarray(Image.open(tmp_path / "view.png").convert("L"), dtype=float)
    return whole[int(y) : int(y + h), int(x) : int(x + w)]


@seen
def test_a_still_picture_where_there_is_no_webgl(html, tmp_path):
    (tmp_path / "report.html").write_bytes(html)
    with pages.Page(tmp_path / "profile", (1280, 900), "--disable-3d-apis") as plain:
        plain.open((tmp_path / "report.html").as_uri())
        assert plain.evaluate("document.querySelector('.still svg').getBoundingClientRect().height") > 100
        assert plain.evaluate("document.querySelectorAll('#view3d button, #view3d canvas').length") == 0
        assert plain.said == []


# --- on paper -------------------------------------------------------------------------------------


@seen
def test_no_figure_is_broken_across_pages(page):
    """A mark is put on the first and the last line of every figure: both stand on one page."""
    marks = """document.querySelectorAll("figure").forEach((f, i) => { f.style.position = "relative";
        for (const end of ["top", "bottom"]) { const m = document.createElement("span"); m.textContent = `@${i}${end}@`;
          m.className = "mark"; m.style.cssText = `position:absolute;left:0;${end}:0;font-size:6px`; f.append(m) } })"""
    page.evaluate(marks)
    with pdfplumber.open(io.BytesIO(page.printed())) as printed:
        texts = [sheet.extract_text(x_tolerance=1) for sheet in printed.pages]
        width = float(printed.pages[0].width)
    page.evaluate("document.querySelectorAll('.mark').forEach(m => m.remove())")
    on = {
        end: {int(i): n for n, text in enumerate(texts) for i in re.findall(rf"@(\d+){end}@", text)}
        for end in ("top", "bottom")
    }
    count = page.evaluate("document.querySelectorAll('figure').length")
    assert len(on["top"]) == count > 10
    assert on["top"] == on["bottom"]
    assert width == pytest.approx(210.0 / INCH * 72.0, abs=1.0)  # A4, ISO 216
    assert "0.375 in pvc foam 80" in texts[0]
    assert any("cut rear" in text for text in texts)  # tables that are folded away on the screen
