"""What the README shows can be done: every command runs, every picture is there, and the program can make it anew."""

from __future__ import annotations

import re
import shlex
import shutil
import sys
from pathlib import Path

import pytest

import wrywing
from wrywing import cli
from wrywing.export import plot

ROOT = Path(wrywing.__file__).parent
TEXT = (ROOT / "README.md").read_text(encoding="utf-8")
BLOCKS = re.findall(r"```(\w*)\n(.*?)```", TEXT, flags=re.DOTALL)
LINES = [line for kind, block in BLOCKS if not kind for line in block.splitlines() if line.startswith("wrywing ")]
PYTHON = [block for kind, block in BLOCKS if kind == "python"]


def test_every_command_has_an_example():
    known = {command.name or command.callback.__name__ for command in cli.app.registered_commands}
    assert {shlex.split(line)[1] for line in LINES} == known


def test_they_run_one_after_the_other(tmp_path, monkeypatch, capsys):
    shutil.copytree(ROOT / "examples", tmp_path / "examples")
    monkeypatch.chdir(tmp_path)
    for line in LINES:
        monkeypatch.setattr(sys, "argv", shlex.split(line))
        with pytest.raises(SystemExit) as ended:
            cli.main()
        assert not ended.value.code, f"{line}: {capsys.readouterr().err}"


@pytest.mark.parametrize("block", PYTHON)
def test_python_runs(block, monkeypatch, capsys):
    monkeypatch.chdir(ROOT)
    exec(block, {})
    assert "Take" in capsys.readouterr().out


def test_pictures_are_there():
    found = re.findall(r"!\[[^\]]+\]\(([^)]+)\)", TEXT)
    assert len(found) >= 4
    assert all((ROOT / path).is_file() for path in found)


def test_pictures_are_the_programs_own():
    """One of them made anew: figures change with matplotlib's version, so only what is drawn is compared."""
    job = wrywing.load(ROOT / "examples" / "saltpan.toml")
    from wrywing.export import figures_edge

    with plot.style():
        made = plot.to_svg(figures_edge.bevels(job), "bevel")
    stored = (ROOT / "examples" / "pictures" / "bevel.svg").read_text(encoding="utf-8")
    viewed = [re.search(r'viewBox="([^"]+)"', svg).group(1) for svg in (made, stored)]
    assert viewed[0] == viewed[1]
    assert made.count("<path") == pytest.approx(stored.count("<path"), abs=4)


def test_the_five_steps():
    assert re.findall(r"^\*\*(\d)\. ", TEXT, flags=re.MULTILINE) == list("12345")
