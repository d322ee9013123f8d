"""Two wing files side by side: the keys that differ, and what comes of it."""

from __future__ import annotations

import json
import sys

import pytest
from richest import EXAMPLES, richest
from wings import GOOD

import wrywing
from wrywing import cli
from wrywing.export import table_compare
from wrywing.shop.compare import compare

SALTPAN = EXAMPLES / "saltpan.toml"
INCHES = (
    GOOD.replace('name = "plain"', 'name = "plain"\nunits = "in"')
    .replace("chord = 300", 'chord = "300 mm"')
    .replace("y = 1000", 'y = "100 cm"')
    .replace("chord = 200", 'chord = "200 mm"')
    .replace("le = 100", 'le = "100 mm"')
    .replace("thickness = 1\n", 'thickness = "1 mm"\n')
    .replace("[0, 980]", '[0, "980 mm"]')
    .replace("thickness = 6", 'thickness = "6 mm"')
)


def texts(found):
    return [row for table in table_compare.tables(found) for row in table.rows]


def effect(found, what):
    return next(e for e in found.effects if e.what == what)


def test_a_file_is_like_itself():
    job = wrywing.load(SALTPAN)
    found = compare(job, wrywing.load(SALTPAN))
    assert (found.keys, found.effects, found.sections) == ((), (), ())
    assert table_compare.sentences(found) == ["Both files describe the same panel."]


def test_a_thinner_sheet():
    a = wrywing.load(SALTPAN)
    b = wrywing.load(SALTPAN, {"web.thickness": "0.2 in", "web.edge": "square"})
    found = compare(a, b)
    keys = {key.key: (key.a, key.b) for key in found.keys}
    assert keys["web.thickness"] == ("6 mm", "5.08 mm")
    assert keys["web.edge"] == ("set bevel", "square")
    total = effect(found, "mass of the web with all of it")
    (candidate,) = a.candidates([5.08], ["square"])  # what weigh says of it
    assert total.a == pytest.approx(a.masses.total)
    assert total.b == pytest.approx(candidate.masses.total, rel=1e-6)
    assert effect(found, "largest gap").b == pytest.approx(candidate.gap, rel=1e-6)
    shares = [e.share for e in found.effects]
    assert shares == sorted(shares, reverse=True)
    assert shares[-1] > 0.0


def test_the_same_wing_in_other_units(tmp_path):
    for name, text in (("mm", GOOD), ("in", INCHES)):
        (tmp_path / f"{name}.toml").write_text(text)
    a, b = (wrywing.load(tmp_path / f"{name}.toml") for name in ("mm", "in"))
    found = compare(a, b)
    assert [key.key for key in found.keys] == ["units"]
    assert all(e.share < 1e-9 for e in found.effects)


def test_both_are_stated_in_the_units_of_a(tmp_path):
    (tmp_path / "in.toml").write_text(INCHES.replace('"6 mm"', '"1/4 in"'))
    (tmp_path / "mm.toml").write_text(GOOD)
    mm, inches = wrywing.load(tmp_path / "mm.toml"), wrywing.load(tmp_path / "in.toml")
    assert ("web.thickness", "6 mm", "6.35 mm") in texts(compare(mm, inches))
    assert ("web.thickness", "0.25 in", "0.236 in") in texts(compare(inches, mm))


def test_bevels_are_compared_at_the_same_rib():
    """With the web an inch further in, what differs along it is not that its inner end stands elsewhere."""
    a, b = wrywing.load(SALTPAN), wrywing.load(SALTPAN, {"web.ends": [40, 1370]})
    found = [e for e in compare(a, b).effects if "where it differs most" in e.what]
    assert all(abs(e.change) < 0.05 for e in found)


def test_a_section_file_that_differs(tmp_path):
    for name, tail in (("a", ""), ("b", "")):
        (tmp_path / name / "sections").mkdir(parents=True)
        (tmp_path / name / "wing.toml").write_text(SALTPAN.read_text())
        section = (EXAMPLES / "sections" / "saltpan-root.dat").read_text()
        (tmp_path / name / "sections" / "saltpan-root.dat").write_text(section + tail)
    other = tmp_path / "b" / "sections" / "saltpan-root.dat"
    lines = other.read_text().splitlines()
    middle = len(lines) // 4
    x, y = map(float, lines[middle].replace(",", " ").split()[:2])
    lines[middle] = f"{x} {y + 0.002 * abs(y) / y}"
    other.write_text("\n".join(lines))
    found = compare(*(wrywing.load(tmp_path / name / "wing.toml") for name in ("a", "b")))
    assert not found.keys
    assert found.sections == (0.0, 420.0)
    assert found.effects


def test_parts_that_only_one_file_has(tmp_path):
    (tmp_path / "plain.toml").write_text(GOOD)
    rich = wrywing.load(richest(tmp_path))
    found = compare(wrywing.load(tmp_path / "plain.toml"), rich)
    strips = effect(found, "strips")
    assert (strips.a, strips.b) == (None, sum(layer.count for layer in rich.layers))
    assert effect(found, "core 1, bays").b == len(rich.cores[0].bays)
    rows = {row[0]: row for row in texts(found)}
    assert rows["strips"][1::2] == ("-", "only in B")
    assert rows["joint.force"][2] == f"{rich.record.joint.force:.0f} N"
    assert rows["wing.stations[y = 1000 mm].chord"] == ("wing.stations[y = 1000 mm].chord", "200 mm", "-")


def test_on_the_command_line(monkeypatch, capsys, tmp_path):
    def run(*words):
        monkeypatch.setattr(sys, "argv", ["wrywing", "compare", *map(str, words)])
        with pytest.raises(SystemExit) as ended:
            cli.main()
        return ended.value.code or 0, *capsys.readouterr()

    other = tmp_path / "plain.toml"
    other.write_text(GOOD)
    status, out, _ = run(SALTPAN, other, "--json")
    said = json.loads(out)
    assert status == 0
    assert said["a"]["stamp"] == wrywing.load(SALTPAN).stamp
    assert {"key": "web.edge", "a": "set bevel", "b": "square"} in said["keys"]
    status, out, _ = run(SALTPAN, other)
    assert (status, "web.edge" in out, "largest gap" in out) == (0, True, True)
    status, out, err = run(SALTPAN, tmp_path / "nothing.toml")
    assert (status, out) == (2, "")
    assert err.startswith("nothing.toml: ")
    assert err.count("\n") == 1
