"""Docstrings' examples run, the house's walls stand, and the README's table of keys is the code's own."""

from __future__ import annotations

import ast
import doctest
import importlib
import pkgutil
from pathlib import Path

import pytest

import wrywing
from wrywing.shop import keys

ROOT = Path(wrywing.__file__).parent
MODULES = sorted(
    module.name
    for room in ("geom", "shop", "export")
    for module in pkgutil.walk_packages([str(ROOT / room)], f"wrywing.{room}.")
    if not module.ispkg
)


@pytest.mark.parametrize("name", MODULES)
def test_examples_in_docstrings(name):
    failed, _ = doctest.testmod(importlib.import_module(name))
    assert failed == 0


def imported(path):
    """Rooms that a module imports from, 'cli' among them."""
    rooms, depth = set(), len(path.relative_to(ROOT).parts)
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.ImportFrom) and node.level == depth:
            rooms |= {node.module.split(".")[0]} if node.module else {alias.name for alias in node.names}
    return rooms


def test_data_flows_one_way():
    allowed = {"geom": set(), "shop": {"geom"}, "export": {"geom", "shop"}}
    for room, may in allowed.items():
        for path in (ROOT / room).rglob("*.py"):
            assert imported(path) - {"__version__"} <= may, path.name


def test_the_developers_guide_lists_every_module():
    text = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    for name in MODULES:
        path = ROOT.joinpath(*name.split(".")[1:]).with_suffix(".py")
        said = ast.get_docstring(ast.parse(path.read_text(encoding="utf-8"))).splitlines()[0]
        assert f"- `{path.relative_to(ROOT).as_posix().partition('/')[2]}`: {said}" in text


def test_the_readme_lists_the_keys_that_the_code_knows():
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    assert keys.markdown() in text
