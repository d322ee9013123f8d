"""A whole run's files: both hands, the cover, and outlines that agree whichever format they are read from."""

import io
import os
import re
import subprocess
import sys
from dataclasses import replace
from functools import cache
from pathlib import Path
from xml.etree import ElementTree

import ezdxf
import numpy as np
import pdfplumber
import pytest
import shapely
from samples import A4, LETTER, ROLL, WING, Sheet, blank, card, core

from wrywing.export import bundle, contours, cover, pdf
from wrywing.export.bundle import Options
from wrywing.export.cover import Revision
from wrywing.export.pdf import Print
from wrywing.geom.drawing import Role
from wrywing.shop import job as jobs
from wrywing.shop.sheets import drawings as sheets

EXAMPLES = Path(__file__).parent.parent / "examples"
MM = 25.4 / 72.0  # published: ISO 32000-1, 8.3.2.3
OF = Revision(WING, "3fa9c1d2", "2026-03-14")
ROOMY = Sheet("roll 1500 mm", 1500.0, np.inf)


@cache
def both_hands(name):
    job = jobs.load(EXAMPLES / name)
    return [d for hand in ("right", "left") for d in sheets.drawings(job, hand)]


def outlines(path, data):
    """Outside cuts in a file, as rings from the lower left corner of them all, longest first."""
    rings = {"dxf": _dxf, "svg": _svg, "pdf": _pdf}[path.suffix[1:]](data)
    whole = shapely.MultiLineString(rings)
    shift = np.array(whole.bounds[:2])
    return sorted((shapely.LinearRing(np.asarray(r) - shift) for r in rings), key=lambda r: (-r.length, r.bounds))


def _dxf(data):
    found = ezdxf.read(io.StringIO(data.decode())).modelspace().query('LWPOLYLINE[layer=="CUT_OUTSIDE"]')
    return [[p[:2] for p in e.get_points()] for e in found]


def _svg(data):
    root = ElementTree.fromstring(data)
    paths = root.iterfind("{*}g[@id='CUT_OUTSIDE']/{*}path")
    pairs = [re.findall(r"(-?[\d.]+),(-?[\d.]+)", p.get("d")) for p in paths]
    return [np.array(pair, dtype=float) * [1.0, -1.0] for pair in pairs]


def _pdf(data):
    (page,) = pdfplumber.open(io.BytesIO(data)).pages
    marks = page.curves + [r for r in page.rects if r["stroke"]]
    cuts = [m for m in marks if round(m["linewidth"] * MM, 3) == 0.35 and not any(m["stroking_color"])]
    return [np.array(m["pts"]) * MM * [1.0, -1.0] for m in cuts]


def test_outlines_agree_whichever_format_they_are_read_from():
    drawings = [replace(d, labels=()) for d in (*both_hands("highmoor.toml"), blank(), core(), card())]
    made = bundle.build(drawings, bundle.FORMATS, Options(Print(ROOMY)), OF)
    for drawing in drawings:
        name = f"{drawing.name}-{drawing.hand}"
        first, *others = (outlines(Path(f"{name}.{k}"), made.files[f"{name}.{k}"]) for k in bundle.FORMATS)
        wanted = [s for s in drawing.strokes if s.role is Role.CUT_OUTSIDE]
        assert len(first) == len(wanted)
        for other in others:
            for a, b in zip(first, other, strict=True):
                assert a.hausdorff_distance(b) < 0.02


def test_the_left_hand_mirrors_the_right_one_exactly():
    drawings = [replace(d, labels=()) for d in both_hands("saltpan.toml")]
    for with_arcs in (False, True):
        made = bundle.build(drawings, ["dxf", "svg"], Options(Print(A4), arcs=with_arcs), OF)
        for right in (d for d in drawings if d.hand == "right"):
            for kind, rings in (("dxf", _dxf), ("svg", _svg)):
                ours, theirs = (rings(made.files[f"{right.name}-{hand}.{kind}"]) for hand in ("right", "left"))
                for a, b in zip(ours, theirs, strict=True):
                    a, b = ({(x * side, y) for x, y in np.asarray(r).tolist()} for r, side in ((a, -1.0), (b, 1.0)))
                    assert a == b


def test_what_serves_either_hand_is_written_once():
    made = bundle.build([blank(), card(), blank().mirrored("left"), card()], ["dxf", "svg"], Options(Print(A4)), OF)
    assert list(made.files) == [f"{n}.{k}" for n in ("blank-right", "card-both", "blank-left") for k in ("dxf", "svg")]
    assert made.records[2] == {"path": "card-both.dxf", "format": "dxf", "drawing": "card", "hand": "both"}
    assert b"both hands" in made.files["card-both.svg"]
    with pytest.raises(ValueError, match="two files are named"):
        bundle.build([blank(), blank()], ["svg"], Options(Print(A4)), OF)


def test_every_page_is_fit_to_print():
    for drawing in both_hands("highmoor.toml"):
        assert all(label.height >= 2.2 for label in drawing.labels)
        data = pdf.render(contours.clean(replace(drawing, labels=())), Print(LETTER), wing=WING)
        for page in pdfplumber.open(io.BytesIO(data)).pages:
            assert min(m["linewidth"] for m in page.lines + page.curves) * MM >= 0.2 - 1e-6
            # Helvetica's capitals are 0.718 of its size (published: Adobe Core 14 metrics, from memory)
            sizes = [c["size"] if c["upright"] else c["width"] for c in page.chars]
            assert min(sizes) * MM * 0.718 >= 2.2 - 1e-3


class TestCover:
    def text(self, count=3, how=Print(A4), of=OF):  # noqa: B008 (nothing changes it)
        entries = [cover.Entry(f"Rib {i}", "left", "200 x 31 mm", i, f"rib-{i}-left.pdf") for i in range(1, count + 1)]
        file = pdfplumber.open(io.BytesIO(cover.render(entries, how, of)))
        for page in file.pages:
            sheet = shapely.box(8.0, 8.0, page.width * MM - 8.0, page.height * MM - 8.0)
            words = page.extract_words()
            boxes = [shapely.box(w["x0"], w["top"], w["x1"], w["bottom"]) for w in words]
            assert all(sheet.covers(shapely.transform(b, lambda p: p * MM)) for b in boxes)
            tree = shapely.STRtree([b.buffer(-0.5) for b in boxes if b.area > 1.0])
            assert len(tree.query(tree.geometries, predicate="intersects")[0]) == len(tree.geometries)
        return file, " ".join(" ".join(page.extract_text().split()) for page in file.pages)

    def test_lists_drawings_pages_stamp_date_and_cautions(self):
        file, text = self.text()
        for words in ("Möwe survey wing", "revision 3fa9c1d2", "wing file of 2026-03-14", *cover.CAUTIONS):
            assert words in text
        assert "3 drawings on 6 pages of a4 paper" in text
        assert "Rib 2 left 200 x 31 mm 2 rib-2-left.pdf" in text
        assert len(file.pages) == 1
        assert "3fa9c1d2" in file.metadata["Subject"]

    def test_a_long_list_goes_on_to_more_pages(self):
        file, text = self.text(90)
        assert len(file.pages) > 1
        assert all(f"Rib {i} left" in text for i in range(1, 91))
        assert all("revision 3fa9c1d2" in page.extract_text() for page in file.pages)

    def test_no_date_is_made_up(self):
        assert "wing file of" not in self.text(of=Revision(WING, "3fa9c1d2"))[1]

    @pytest.mark.parametrize(
        ("how", "size"),
        [(Print(ROLL), (210, 297)), (Print(ROLL, "in"), (215.9, 279.4)), (Print(LETTER), (215.9, 279.4))],
    )
    def test_stands_on_a_sheet_that_can_be_held(self, how, size):
        file, text = self.text(how=how)
        page = file.pages[0]
        assert (page.width * MM, page.height * MM) == pytest.approx(size, abs=0.01)
        assert ("the bars below" in text) == (how.paper is LETTER)

    def test_says_that_the_print_is_corrected(self):
        assert "corrected for bars of x 99.6, y 100.2 mm" in self.text(how=Print(A4, "mm", (0.996, 1.002)))[1]

    def test_comes_with_pdf_only(self):
        assert "cover.pdf" in bundle.build([card()], ["pdf"], Options(Print(A4)), OF).files
        assert list(bundle.build([card()], ["svg"], Options(Print(A4)), OF).files) == ["card-both.svg"]


def test_same_bytes_on_another_processor(tmp_path):
    """NumPy's sines differ in their last bits from one processor to another; what is written does not."""
    from numpy._core import _multiarray_umath as core

    wide = " ".join(name for name in core.__cpu_dispatch__ if core.__cpu_features__[name])
    code = "import sys; from wrywing import cli; sys.argv[1:] = sys.argv[2:]; cli.main()"
    words = ["templates", str(EXAMPLES / "highmoor.toml"), "--formats", "dxf,svg,pdf", "--out"]
    for out, features in (("a", ""), ("b", wide)):
        env = os.environ | {"NPY_DISABLE_CPU_FEATURES": features, "PYTHONHASHSEED": str(len(features))}
        subprocess.run([sys.executable, "-c", code, "-", *words, str(tmp_path / out)], env=env, check=True)
    files = sorted(p.name for p in (tmp_path / "a").iterdir())
    assert len(files) > 10
    assert all((tmp_path / "a" / f).read_bytes() == (tmp_path / "b" / f).read_bytes() for f in files)
