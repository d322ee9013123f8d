"""The command line: what it prints, what it refuses in one line, and that a refusal leaves the disk alone."""

from __future__ import annotations

import csv
import io
import json
import subprocess
import sys
import time
import tomllib
from pathlib import Path

import pdfplumber
import pytest
from wings import GOOD

from wrywing import cli
from wrywing.shop.stock import Stock

EXAMPLES = Path(__file__).parent.parent / "examples"


@pytest.fixture
def run(monkeypatch, capsys):
    """Run the program on some arguments: exit status, what it printed, what it complained of."""

    def go(*words):
        monkeypatch.setattr(sys, "argv", ["wrywing", *map(str, words)])
        with pytest.raises(SystemExit) as ended:
            cli.main()
        return ended.value.code or 0, *capsys.readouterr()

    return go


@pytest.fixture
def wing(tmp_path):
    def write(*changes):
        text = GOOD
        for old, new in changes:
            assert old in text
            text = text.replace(old, new)
        path = tmp_path / "wing.toml"
        path.write_text(text)
        return path

    return write


KINKED = """washout = 6
[[wing.stations]]
y = 2000
chord = 200
le = 800
airfoil = "naca 2412"
washout = 6
"""
# Parse-level faults stand in test_wingfile; these need the geometry.
OUTSIDE = [
    ("line = [0.3, 0.3]", "line = [0.002, 0.3]", "web.thickness", "leaves the section at s ="),
    ("washout = 6\n[skin]", KINKED + "[skin]", "web.line", "leaves the section at s ="),
    ("thickness = 6", "thickness = 500", "web.thickness", "leaves the section at s ="),
    ("[skin]\nthickness = 1", "[skin]\nthickness = 14", "skin.thickness", "wanted a skin that leaves room"),
    ("line = [0.3, 0.3]\nthickness = 6", "cant = 45\nline = [0.012, 0.012]\nthickness = 4", "web.cant", "leaves"),
    ("thickness = 6", "thickness = 6\nbond = 14", "web.bond", "wanted a bond line that leaves room"),
    ("ends = [0, 980]", "ends = [0, 8]", "web.ends", "wanted ribs 10 mm or more apart, got 8 mm"),
    ("ends = [0, 980]", "ends = [0, 1200]", "web.ends", "got"),
    ("ends = [0, 980]", "ends = [-5, 980]", "web.ends", "got"),
    ("line = [0.3, 0.3]", "line = [0.3, 1.2]", "web.line", "got 1.2"),
]


@pytest.mark.parametrize(("old", "new", "key", "words"), OUTSIDE)
def test_webs_that_do_not_fit_the_wing_are_refused_in_one_line(run, wing, tmp_path, old, new, key, words):
    more = {"web.cant": ("thickness = 1", "thickness = 0.1"), "web.line": ("ends = [0, 980]", "ends = [0, 1950]")}
    path = wing((old, new), *([more[key]] if "leaves" in words and key in more else []))
    out = tmp_path / "out"
    for words_of in (("bevels", path), ("templates", path, "--out", out)):
        status, printed, complaint = run(*words_of)
        assert (status, printed) == (2, "")
        assert complaint.startswith(f"wing.toml: {key}")
        assert words in complaint
        assert complaint.count("\n") == 1
    assert not out.exists()


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["bevels", "nowhere.toml"], "nowhere.toml: no such file"),
        (["bevels", "WING", "--every", "3 kg"], "--every: wanted a length"),
        (["bevels", "WING", "--every", "0"], "--every: wanted"),
        (["bevels", "WING", "--at", "0,,5"], "--at: wanted a list"),
        (["bevels", "WING", "--at", "0,99999"], "--at: wanted places from 0 to"),
        (["weigh", "WING", "--thickness", ""], "--thickness: wanted a list"),
        (["weigh", "WING", "--thickness", "thick"], "--thickness: wanted a length"),
        (["weigh", "WING", "--thickness", "0"], "--thickness: wanted lengths above 0"),
        (["weigh", "WING", "--thickness", "4,5mm"], "--thickness: wanted 4.5mm with a point, or 4, 5mm with a blank"),
        (["bevels", "WING", "--every", "0,5 mm"], "with a decimal point, got '0,5 mm'"),
        (["weigh", "WING", "--json", "--csv"], "--csv: wanted none beside --json"),
        (["bevels", "WING", "--json", "--csv"], "--csv: wanted none beside --json"),
        (["stock", "--json", "--csv"], "--csv: wanted none beside --json"),
        (["stock", "steel"], "KIND: wanted one of foam, wood, filler, adhesive, cloth, strip, pin, got 'steel'"),
        (["weigh", "WING", "--edge", "round"], "--edge: wanted one of square, set bevel, full bevel, got 'round'"),
        (["weigh", "WING", "--cant", "80"], "--cant: wanted angles within 45 degrees"),
        (["weigh", "WING", "--cant", "square at 3000"], "--cant: wanted y within the stations, 0 mm to"),
        (["weigh", "WING", "--cant", "square at 3 kg"], "--cant: wanted a length"),
        (["weigh", "WING", "--cant", "upright"], '--cant: wanted "square at Y"'),
        (["report", "WING", "--out", "WING"], "wanted a name that ends in .html"),
        (["templates", "WING", "--out", "OUT", "--formats", "png"], "--formats: wanted one of dxf, svg, pdf"),
        (["templates", "WING", "--out", "OUT", "--hand", "upper"], "--hand: wanted one of right, left, both,"),
        (["templates", "WING", "--out", "OUT", "--paper", "a9"], "--paper: wanted a paper size"),
        (["templates", "WING", "--out", "OUT", "--paper", "roll"], "--paper: wanted a paper size"),
        (["templates", "WING", "--out", "OUT", "--paper", "roll 90 mm"], "--paper: paper roll 90 mm: wanted a roll at"),
        (["templates", "WING", "--out", "OUT", "--kerf", "thin"], "--kerf: wanted a length"),
        (["templates", "WING", "--out", "OUT", "--kerf", "-1"], "--kerf: wanted a length from 0 to 10 mm, got '-1'"),
        (
            ["templates", "WING", "--out", "OUT", "--kerf", "3.5mm"],
            "--kerf: drawing web-front: wanted a kerf below its",
        ),
        (
            ["templates", "WING", "--out", "OUT", "--dxf-version", "R9"],
            "--dxf-version: wanted one of R12, R2000, R2010",
        ),
        (["templates", "WING"], "--out"),
        (["new", "WING"], "wanted a new file, got one that exists"),
        (["new", "no/such/folder.toml"], "no such file or directory"),
        (["new", "fresh.toml", "--units", "cm"], "--units: wanted one of mm, in, got 'cm'"),
        (["bevel", "WING"], "bevel"),
        (["check"], "WING.toml"),
    ],
)
def test_wrong_arguments_get_one_line_and_change_nothing(run, wing, tmp_path, monkeypatch, arguments, words):
    monkeypatch.chdir(tmp_path)
    path = wing()
    before = path.read_bytes()
    given = [{"WING": str(path), "OUT": "out"}.get(word, word) for word in arguments]
    status, printed, complaint = run(*given)
    assert (status, printed) == (2, "")
    assert words in complaint
    assert complaint.count("\n") == 1
    assert [p.name for p in tmp_path.iterdir()] == ["wing.toml"]
    assert path.read_bytes() == before


def test_an_output_folder_that_cannot_be_written_loses_nothing(run, wing, tmp_path):
    file = tmp_path / "file"
    file.write_text("mine")
    for out in (file, file / "below"):
        status, _, complaint = run("templates", wing(), "--out", out)
        assert status == 2
        assert complaint.count("\n") == 1
        assert str(file) in complaint
    assert file.read_text() == "mine"


def test_a_paper_of_the_wing_file_is_used_and_a_wrong_one_named(run, wing, tmp_path):
    for paper, words in (
        ('size = "roll 90 mm"', "wing.toml: paper.size: paper roll 90 mm: wanted a roll at least"),
        (
            "measured = [99.6, 94.9]",
            "wing.toml: paper.measured[2]: wanted a bar within 5% of 100 mm, printed unscaled, got",
        ),
    ):
        status, _, complaint = run(
            "templates", wing(("[skin]", f"[paper]\n{paper}\n[skin]")), "--out", tmp_path / "out"
        )
        assert status == 2
        assert complaint.startswith(words)
        assert complaint.count("\n") == 1
        assert not (tmp_path / "out").exists()
    path = wing(
        ("[skin]", '[paper]\nsize = "a3"\nmeasured = [99.6, 100.2]\n[skin]'), ("[wing]", "date = 2026-03-14\n[wing]")
    )
    assert run("templates", path, "--out", tmp_path / "out")[0] == 0
    for name in ("cover.pdf", "web-front-right.pdf"):
        with pdfplumber.open(tmp_path / "out" / name) as file:
            page = file.pages[0]
            size = sorted(round(float(v) * 25.4 / 72.0, 3) for v in (page.width, page.height))
            assert size == [297.0, 420.0]
            assert "corrected for bars of x 99.6, y 100.2 mm" in page.extract_text()
    with pdfplumber.open(tmp_path / "out" / "cover.pdf") as file:
        assert "wing file of 2026-03-14" in file.pages[0].extract_text()


@pytest.mark.parametrize("units", ["mm", "in"])
def test_a_new_file_is_one_that_check_takes(run, tmp_path, units):
    path = tmp_path / "my.toml"
    assert run("new", path, "--units", units)[0] == 0
    assert tomllib.loads(path.read_text())["units"] == units
    status, printed, _ = run("check", path)
    assert status == 0
    assert "doubt" not in printed


def test_check_describes_in_a_dozen_lines(run):
    status, printed, _ = run("check", EXAMPLES / "saltpan.toml")
    assert status == 0
    for word in ("span", "area", "chords", "washout", "steepest", "web", "height", "bevel", "filler"):
        assert word in printed
    figures = json.loads(run("check", EXAMPLES / "saltpan.toml", "--json")[1])
    assert figures["span"] == 1400.0


@pytest.mark.parametrize(
    ("changes", "doubt"),
    [
        ([("washout = 6\n[skin]", KINKED[:-2] + "2\n[skin]")], "the washout reverses at y 1000"),
        ([("line = [0.3, 0.3]", "line = [0.02, 0.02]")], "of the leading edge at y"),
        ([("washout = 6", "washout = 25")], "beyond 15°"),
        ([("name = \"plain\"", "name = \"plain\"\nunits = \"in\"")], "is that the unit that is meant?"),
        ([("thickness = 6", "thickness = 30")], "thicker than the web is high"),
        ([("thickness = 6", "thickness = 7")], "not usual in 7 mm; the nearest is 6 mm"),
        ([("thickness = 6", "thickness = 6\nbond = 3")], "a bond line of 3 mm is thick"),
        ([("washout = 6\n[skin]", KINKED.replace("le = 800", "le = 200\nz = 150") + "[skin]"),
          ("ends = [0, 980]", "ends = [0, 1950]")], "skin breaks by"),
    ],
)  # fmt: skip
def test_check_says_what_is_doubtful(run, wing, changes, doubt):
    _, printed, _ = run("check", wing(*changes))
    assert any(line.startswith("doubt") and doubt in line for line in printed.splitlines())


def test_a_crossed_trailing_edge_is_doubtful(run, wing, tmp_path):
    from wrywing.geom.naca import naca

    section = naca("2412")
    t = [i / 40.0 for i in range(40, -41, -1)]
    rows = [f"{v * v:.6f} {float(section.q(v)) - 0.003 * v * v * v:.6f}" for v in t]
    (tmp_path / "crossed.dat").write_text("\n".join(rows))
    _, printed, _ = run("check", wing(('"naca 2412"', '"crossed.dat"')))
    assert "doubt     crossed.dat: the trailing edge is crossed" in printed


def test_bevels_json_is_as_documented_and_csv_holds_the_same(run):
    path = EXAMPLES / "saltpan.toml"
    record = json.loads(run("bevels", path, "--at", "0,120,240", "--json")[1])
    assert set(record) == {"name", "stamp", "web", "rows"}
    assert {"length", "cant", "edge"} <= set(record["web"])
    assert [row["s"] for row in record["rows"]] == [0.0, 120.0, 240.0]
    edge = {"front", "rear", "bevel", "crown", "gap", "cut_front", "cut_rear"}
    for row in record["rows"]:
        assert set(row) == {"s", "y", "thickness", "top", "bottom"}
        assert set(row["top"]) == set(row["bottom"]) == edge
    lines = list(csv.DictReader(io.StringIO(run("bevels", path, "--at", "0,120,240", "--csv")[1])))
    assert [float(line["top_bevel"]) for line in lines] == [row["top"]["bevel"] for row in record["rows"]]


def test_the_screen_fits_a_hundred_columns(run):
    wings = [
        (word, EXAMPLES / name) for word in ("bevels", "weigh", "check") for name in ("saltpan.toml", "highmoor.toml")
    ]
    for words in [*wings, ("stock",), ("stock", "--units", "in")]:
        _, printed, _ = run(*words)
        tables = [line for line in printed.splitlines() if not line.startswith(("Take", "With"))]
        assert max(map(len, tables)) <= 100
        assert "…" not in printed


def test_the_washout_is_said_for_both_ends_and_where_its_extremes_lie_in_between(run, wing):
    middle = '[[wing.stations]]\ny = {}\nchord = 250\nle = 50\nairfoil = "naca 2412"\nwashout = {}\n'
    tip = "[[wing.stations]]\ny = 1000"
    sagging = wing((tip, middle.format(300, -0.5) + middle.format(700, -1) + tip), ("washout = 6", "washout = 4"))
    said = "washout   0.0° at the root, +4.0° at the tip, least -1.0° at y 700 mm, law smooth"
    assert said in run("check", sagging)[1].splitlines()
    assert json.loads(run("check", sagging, "--json")[1])["washout"] == pytest.approx([0.0, 4.0])
    bulging = wing((tip, middle.format(500, 7) + tip))
    assert "washout   0.0° at the root, +6.0° at the tip, greatest +7.0° at y 500 mm, law" in run("check", bulging)[1]
    assert "washout   0.0° at the root, +6.0° at the tip, law smooth\n" in run("check", wing())[1]


def test_the_stock_is_listed_and_all_of_it_can_be_named(run):
    _, shown, _ = run("stock")
    names = Stock().materials
    assert all(f" {name} " in shown for name in names)
    records = json.loads(run("stock", "--json")[1])
    assert [record["name"] for record in records] == [*names]
    assert all(record["source"] for record in records)
    rows = list(csv.DictReader(io.StringIO(run("stock", "--csv")[1])))
    assert [row["density"] for row in rows if row["name"] == "pvc foam 80"] == ["80"]
    # published: 1 lb/ft^3 = 16.01846 kg/m^3, 1 MPa = 145.0377 psi (NIST SP 811, appendix B)
    (line,) = (line for line in run("stock", "FOAM", "--units", "in")[1].splitlines() if " pvc foam 80 " in line)
    density, _, shear, *_, wire = line.split()[3:]
    assert float(density) == pytest.approx(80.0 / 16.01846, rel=0.005)
    assert float(shear) == pytest.approx(names["pvc foam 80"].shear * 145.0377, rel=0.005)
    assert wire == "never"
    assert "PVC foam gives off poisonous gas" in run("stock", "foam")[1]
    assert " 1/8, 3/16, 1/4, 5/16, 3/8, " in run("stock", "pin", "--units", "in")[1]


def test_a_decimal_comma_in_a_wing_file_is_named(run, wing):
    said = "a figure has a decimal point, no comma"
    for changed, words in (("4,5", said), ('"4,5 mm"', "with a decimal point, got")):
        status, _, complaint = run("check", wing(("thickness = 6", f"thickness = {changed}")))
        assert status == 2
        assert words in complaint


def test_case_does_not_matter(run, wing, tmp_path):
    words = ("--formats", "DXF,Svg", "--hand", "Both", "--paper", "A4", "--dxf-version", "r12")
    assert run("templates", wing(), "--out", tmp_path / "out", *words)[0] == 0
    made = {path.suffix for path in (tmp_path / "out").iterdir()}
    assert made == {".dxf", ".svg", ".json"}
    assert run("weigh", wing(), "--thickness", "5", "--edge", "Square", "--cant", "Least Filler")[0] == 0


def test_refused_sheets_are_joined_by_sheet_and_cant_not_by_what_is_shown_of_them(run, wing):
    words = ("--thickness", "400.001, 400.002", "--cant", "0,5")
    rows = [line.split() for line in run("weigh", wing(), *words)[1].splitlines() if line.endswith("no room ")]
    assert rows == [["400", "any", cant, "no", "room"] for cant in ("0.0°", "+5.0°") for _ in range(2)]


class Terminal(io.StringIO):
    def isatty(self):
        return True


@pytest.mark.parametrize(
    ("terminal", "seconds", "shown"), [(Terminal, 1.3, True), (Terminal, 0.0, False), (io.StringIO, 1.3, False)]
)
def test_what_takes_long_says_so_on_a_terminal_alone(monkeypatch, terminal, seconds, shown):
    monkeypatch.setattr(sys, "stderr", terminal())
    monkeypatch.setenv("TERM", "xterm")
    with cli._waiting("weighing") as say:
        say("weighing 2 of 3")
        time.sleep(seconds)
    assert ("weighing 2 of 3" in sys.stderr.getvalue()) == shown


def test_weigh_json_marks_one_candidate_and_gives_the_saving(run):
    record = json.loads(run("weigh", EXAMPLES / "saltpan.toml", "--thickness", "5,6", "--json")[1])
    assert len(record["candidates"]) == 6
    assert sum(c["chosen"] for c in record["candidates"]) == 1
    assert {"stated", "best", "filler_stated", "filler_best"} == set(record["saving"])


def test_limits_nothing_meets_are_an_answer_not_an_error(run, wing):
    status, printed, _ = run("weigh", wing(("[web]", "[limits]\nmax_mass = 1\n[web]")), "--thickness", "5")
    assert status == 0
    assert "misses max_mass by" in printed


def test_templates_are_written_as_the_manifest_says_and_twice_the_same(run, tmp_path):
    import hashlib

    for out in ("a", "b"):
        assert run("templates", EXAMPLES / "saltpan.toml", "--out", tmp_path / out, "--hand", "right,left")[0] == 0
    manifest = json.loads((tmp_path / "a" / "manifest.json").read_text())
    assert {f["format"] for f in manifest["files"]} >= {"dxf", "svg", "pdf"}
    assert {f["hand"] for f in manifest["files"]} >= {"right", "left"}
    for file in manifest["files"]:
        data = (tmp_path / "a" / file["path"]).read_bytes()
        assert hashlib.sha256(data).hexdigest() == file["sha256"]
        assert (tmp_path / "b" / file["path"]).read_bytes() == data


def test_a_page_never_takes_the_place_of_something_else(run, wing, tmp_path):
    mine = tmp_path / "mine.html"
    mine.write_text("my notes")
    status, _, complaint = run("report", wing(), "--out", mine)
    assert status == 2
    assert "wanted to write there, got a file that is no page" in complaint
    assert mine.read_text() == "my notes"


def test_a_later_run_says_what_of_an_earlier_one_is_gone(run, wing, tmp_path):
    out = tmp_path / "out"
    run("templates", wing(), "--out", out, "--hand", "both", "--formats", "svg")
    before = {path.name for path in out.iterdir()}
    _, printed, _ = run("templates", wing(), "--out", out, "--hand", "left", "--formats", "svg")
    gone = before - {path.name for path in out.iterdir()}
    assert {name.rsplit("-", 1)[1] for name in gone} == {"right.svg"}
    assert f"{len(gone)} of an earlier run" in printed


def test_weigh_takes_a_cant_square_to_a_rib(run, wing):
    record = json.loads(run("weigh", wing(), "--thickness", "6", "--cant", "square at 900", "--json")[1])
    stated = json.loads(run("check", wing(("thickness = 6", 'thickness = 6\ncant = "square at 900"')), "--json")[1])
    assert record["candidates"][0]["cant"] == pytest.approx(stated["web_cant"])


def test_a_fault_of_the_program_shows_no_traceback(run, wing, monkeypatch):
    monkeypatch.setattr(cli, "_job", lambda path: 1 / 0)
    status, _, complaint = run("check", wing())
    assert status == 1
    assert complaint.count("\n") == 1
    assert "ZeroDivisionError" in complaint


def test_help_needs_no_heavy_library():
    code = "import sys; sys.argv = ['wrywing', '--help']\nfrom wrywing import cli\n"
    code += "try:\n cli.main()\nexcept SystemExit: pass\n"
    code += "print(sorted({'numpy', 'scipy', 'shapely', 'ezdxf', 'pydantic'} & set(sys.modules)))"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip().endswith("[]")
