"""The program from Python: light to import, what the commands print as properties, and values changed for a sweep."""

from __future__ import annotations

import json
import subprocess
import sys
from dataclasses import asdict

import pytest
from richest import EXAMPLES
from wings import GOOD

import wrywing
from wrywing import cli
from wrywing.export import table

SALTPAN = EXAMPLES / "saltpan.toml"
HEAVY = ["numpy", "scipy", "shapely", "matplotlib", "jinja2", "pydantic", "ezdxf", "trimesh"]


@pytest.mark.parametrize(
    "first", ["import wrywing", "from wrywing import cli; sys.argv[1:] = ['--help']; run(cli.main)"]
)
def test_heavy_libraries_wait(first):
    code = "import sys\ndef run(go):\n    try: go()\n    except SystemExit: pass\n"
    code += f"{first}\nprint([name for name in {HEAVY} if name in sys.modules])"
    found = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert found.stdout.splitlines()[-1] == "[]"


def test_only_a_report_needs_figures():
    code = f"import sys\nfrom wrywing import cli\nsys.argv = ['wrywing', 'check', {str(SALTPAN)!r}]\n"
    code += "try: cli.main()\nexcept SystemExit: print([n for n in ('matplotlib', 'jinja2') if n in sys.modules])"
    found = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert found.stdout.splitlines()[-1] == "[]"


def test_what_commands_print_are_properties(monkeypatch, capsys):
    def said(*words):
        monkeypatch.setattr(sys, "argv", ["wrywing", *words, str(SALTPAN), "--json"])
        with pytest.raises(SystemExit):
            cli.main()
        return json.loads(capsys.readouterr().out)

    job = wrywing.load(SALTPAN)
    assert said("check") == json.loads(table.to_json(asdict(job.facts)))
    assert said("bevels")["rows"] == json.loads(table.to_json([asdict(row) for row in job.rows(job.places(50.0))]))
    found = said("weigh")
    assert found["verdict"] == job.verdict.sentence
    assert found["saving"] == pytest.approx(asdict(job.saving))
    assert found["candidates"] == json.loads(table.to_json(table.candidate_records(job.usual_candidates, job.verdict)))
    assert len(job.candidates([4.0, 5.0], ["square"], [0.0, 3.0])) == 4


def test_changed_values_are_read_like_the_files_own():
    job = wrywing.load(SALTPAN, {"web.thickness": "1/4 in", "wing.stations[5].washout": 8, "limits.max_mass": "2 oz"})
    assert job.record.web.thickness == pytest.approx(6.35)
    assert job.record.wing.stations[4].washout == 8.0
    assert job.record.limits.max_mass == pytest.approx(2 * 28.349523125)
    assert job.stamp != wrywing.load(SALTPAN).stamp


@pytest.mark.parametrize(
    ("key", "value", "said"),
    [
        ("web.thicknes", 5, "web.thicknes: unknown key, did you mean web.thickness?"),
        ("web.thickness", "5 g", "web.thickness: wanted a length"),
        ("wing.stations[9].chord", 5, "wing.stations[9]: wanted a key that the wing file has room for"),
        ("web.line.x", 5, "web.line.x: wanted a key"),
        ("web..line", 5, "wanted a key such as"),
    ],
)
def test_a_change_that_cannot_be(key, value, said):
    with pytest.raises(ValueError, match=r"^saltpan\.toml: ") as fault:
        wrywing.load(SALTPAN, {key: value})
    assert said in str(fault.value)


def test_the_example_sweeps(tmp_path):
    plain = tmp_path / "plain.toml"
    plain.write_text(GOOD)
    words = [sys.executable, str(EXAMPLES / "sweep.py"), str(plain)]
    found = subprocess.run(words, capture_output=True, text=True, check=True).stdout.splitlines()
    heights = {line.split()[0]: float(line.split()[2]) for line in found[1:]}
    job = wrywing.load(plain, {"web.line": [0.35, 0.35]})
    assert list(heights) == ["20", "25", "30", "35", "40", "45", "50"]
    assert heights["35"] == pytest.approx(job.facts.heights[0], abs=0.05)
