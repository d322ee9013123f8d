"""Cut list and shopping list: every figure again by another way, and the files as a spreadsheet reads them."""

from __future__ import annotations

import csv
import io
import json
import math
import sys
from collections import Counter
from pathlib import Path

import numpy as np
import pytest

from wrywing import cli
from wrywing.export.table import to_csv
from wrywing.export.table_lists import records
from wrywing.shop import job as jobs
from wrywing.shop import weigh
from wrywing.shop.cutlist import cut_list
from wrywing.shop.nesting import nestings
from wrywing.shop.shopping import shopping_list

EXAMPLES = Path(__file__).parent.parent / "examples"
SHEETS = """
[cutting]
allowance = "50 %"
[[cutting.sheets]]
material = "pvc foam 80"
size = ["1220 mm", "250 mm"]
"""


def loaded(tmp_path, name, more=SHEETS):
    text = (EXAMPLES / f"{name}.toml").read_text().replace('"sections/', f'"{EXAMPLES}/sections/')
    for key in ("[cutting", "[gauges"):
        text = text.split(f"\n{key}")[0] if f"\n{key}" in text else text
    (tmp_path / "wing.toml").write_text(text + more)
    return jobs.load(tmp_path / "wing.toml")


@pytest.fixture(params=["saltpan", "highmoor"])
def job(request, tmp_path):
    return loaded(tmp_path, request.param)


def test_masses_are_those_of_weigh(job):
    weights, rows = weigh.masses(job, job.web), cut_list(job)
    for row in rows:
        assert row.both_hands == 2 * row.each_hand
        assert row.mass is None or row.mass_both == pytest.approx(row.mass * row.both_hands, abs=0.01 * row.both_hands)
    sums = Counter()
    for row in rows:
        name = "pads" if row.piece.startswith("Joint pad") else "web" if row.piece.startswith("Web sheet") else row.kind
        sums[name] += (row.mass_both or 0.0) / 2.0
    want = {"web": weights.foam, "pads": weights.pads, "strip": weights.strips, "laminate": weights.flanges}
    for name, grams in (want | {"cloth": weights.facing + weights.cover}).items():
        assert sums[name] == pytest.approx(grams, abs=0.05), name


def test_what_is_bought_is_what_is_cut(job):
    laid, rows = nestings(job), cut_list(job)
    bought = {(b.item, b.unit): b for b in shopping_list(job)}
    sheet = bought["pvc foam 80", "sheets"]
    assert sheet.amount == len(laid[0].sheets)
    assert sheet.note == f"{len(laid[0].pieces)} pieces, {100 * laid[0].waste:.0f} % waste"
    web = [row for row in rows if row.piece.startswith("Web sheet")]
    assert sum(row.both_hands for row in web) == len(laid[0].pieces)
    assert all(row.length <= 1210.0 for row in web)
    weights, allowed = weigh.masses(job, job.web), 2 * 1.5
    unit, cm3 = ("cu in", 2.54**3) if job.record.units == "in" else ("cm³", 1.0)
    filler = bought["microballoon paste", unit]
    assert filler.amount * cm3 == pytest.approx(allowed * weights.filler / 0.6, abs=0.01)  # 600 kg/m^3, stock
    assert filler.mass == pytest.approx(allowed * weights.filler, abs=0.01)
    resin = bought["laminating epoxy", unit]
    laminates = weights.facing + weights.cover + weights.flanges
    assert resin.mass == pytest.approx(allowed * (weights.bond + laminates / 2.0), abs=0.01)  # half of each is resin
    if job.record.caps:
        strip = bought["pultruded carbon strip", "ft"]
        assert strip.amount * 304.8 == pytest.approx(2 * sum(la.count * la.length for la in job.layers), abs=1.0)
        assert f"{2 * len(job.layers)} pieces" in strip.note


def test_cloth_by_hand(tmp_path):
    # Saltpan: one layer of 80 g/m^2 on each face of each web, half of the laminate resin.
    job = loaded(tmp_path, "saltpan")
    area = 2 * sum(face.area() for face in job.web.faces) * 1e-6
    cloth = next(b for b in shopping_list(job) if b.item == "glass cloth 80")
    assert cloth.amount == pytest.approx(area, abs=2e-3)
    assert cloth.mass == pytest.approx(80.0 * area, abs=0.1)
    row = next(r for r in cut_list(job) if r.kind == "cloth")
    assert row.each_hand == 2
    assert row.mass == pytest.approx(160.0 * area / 4.0, abs=0.05)


def test_blocks_hold_their_cores(tmp_path):
    cores = """
[wire]
diameter = "0.4 mm"
[[cores]]
region = "nose"
foam = "extruded polystyrene 33"
bays = 2
kerf = "1 mm"
"""
    text = (EXAMPLES / "saltpan.toml").read_text()
    job = loaded(tmp_path, "saltpan", SHEETS if "[[cores]]" in text else SHEETS + cores)
    rows = [row for row in cut_list(job) if row.kind == "block"]
    assert len(rows) == sum(len(core.bays) for core in job.cores)
    for core in job.cores:
        own = [r for r in rows if f"core {core.number}," in r.piece]
        # the bays' cores are what the whole core is
        assert sum(r.mass for r in own) == pytest.approx(core.mass, rel=2e-3)
        assert all(r.mass < r.length * r.width * r.thickness * core.foam.density * 1e-6 for r in own)
    blocks = [b for b in shopping_list(job) if b.unit == "blocks"]
    assert sum(b.amount for b in blocks) == 2 * len(rows)


def test_without_sheets_the_area_stands_in_their_place(tmp_path):
    job = loaded(tmp_path, "highmoor", "")
    rows = {b.item: b for b in shopping_list(job)}
    outline = np.concatenate([face.outline() for face in job.web.faces])
    assert rows["pvc foam 80"].unit == "sq ft"
    assert rows["pvc foam 80"].amount == pytest.approx(2.0 / 304.8**2 * np.prod(np.ptp(outline, axis=0)), abs=1e-3)
    assert "20 % more" in rows["microballoon paste"].note


def test_csv_reads_back_in_plain_columns(job):
    rows = cut_list(job)
    read = list(csv.DictReader(io.StringIO(to_csv(records(rows)))))
    assert list(read[0]) == [
        *("kind", "piece", "material", "size", "length_mm", "width_mm", "thickness_mm"),
        *("each_hand", "both_hands", "mass_g", "mass_both_g"),
    ]
    for row, line in zip(rows, read, strict=True):
        assert (line["piece"], int(line["both_hands"])) == (row.piece, row.both_hands)
        assert math.isclose(float(line["length_mm"]), row.length)
        assert line["size"].endswith(job.record.units)
    bought = list(csv.DictReader(io.StringIO(to_csv(records(shopping_list(job))))))
    assert list(bought[0]) == ["item", "size", "amount", "unit", "mass_g", "note"]
    assert all(float(line["amount"]) > 0.0 for line in bought)


@pytest.fixture
def templates(monkeypatch, capsys):
    """Run `wrywing templates` on a job's wing file: exit status, and what it complained of."""

    def go(job, out, formats):
        words = ["wrywing", "templates", str(job.path), "--out", str(out), "--hand", "right,left", "--formats", formats]
        monkeypatch.setattr(sys, "argv", words)
        with pytest.raises(SystemExit) as ended:
            cli.main()
        return ended.value.code or 0, capsys.readouterr().err

    return go


def test_templates_writes_lists_sheets_and_solids_as_its_manifest_says(templates, tmp_path):
    job, out = loaded(tmp_path, "highmoor"), tmp_path / "out"
    assert templates(job, out, "dxf,csv,stl,3mf,glb") == (0, "")
    files = {file["path"]: file for file in json.loads((out / "manifest.json").read_text())["files"]}
    assert {"cut-list.csv", "shopping-list.csv", "stock-sheet-1-both.dxf", "gauges-left.dxf"} <= set(files)
    assert {"web-blank-left.stl", "strip-top-1-right.stl", "panel-right.3mf", "panel-left.glb"} <= set(files)
    assert files["cut-list.csv"]["hand"] == "both"
    glb = files["panel-left.glb"]
    assert (glb["format"], glb["drawing"], glb["hand"]) == ("glb", "panel", "left")
    written = list(csv.DictReader(io.StringIO((out / "cut-list.csv").read_text(encoding="utf-8"))))
    assert [line["piece"] for line in written] == [row.piece for row in cut_list(job)]


def test_a_piece_that_fits_no_sheet_leaves_the_disk_alone(templates, tmp_path):
    job, out = loaded(tmp_path, "highmoor", SHEETS.replace('"250 mm"', '"60 mm"')), tmp_path / "out"
    status, complaint = templates(job, out, "dxf")
    assert status == 2
    assert complaint.startswith("wing.toml: cutting.sheets[1].size: wanted a sheet that takes the Web sheet 1 of 3, ")
    assert complaint.count("\n") == 1
    assert not out.exists()
