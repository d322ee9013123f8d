"""A comparison of two wing files as tables and as a record."""

from __future__ import annotations

from dataclasses import asdict
from typing import Any

from ..shop.compare import Comparison, Effect, Unit
from ..shop.job import Job
from ..shop.wording import Wording
from .table import Table


def tables(of: Comparison) -> list[Table]:
    """Keys that differ and what comes of it, in A's units."""
    words, heads = of.a.wording, (_name(of.a, "A"), _name(of.b, "B"))
    keys = [(key.key, key.a or "-", key.b or "-") for key in of.keys]
    keys += [(f"section at rib {words.length(y)}", "its own", "its own") for y in of.sections]
    effects = [(e.what, _text(words, e.unit, e.a), _text(words, e.unit, e.b), _change(words, e)) for e in of.effects]
    shown = [row for row in effects if row[1] != row[2]]
    found = [Table(f"keys that differ (lengths in {words.length_unit})", ("key", *heads), tuple(keys))] if keys else []
    if shown:
        found.append(Table("what comes of it, the largest share first", ("what", *heads, "change"), tuple(shown)))
    return found


def sentences(of: Comparison) -> list[str]:
    """Doubts that only one of the files has, or that nothing differs."""
    said = [f"only in {name}: {doubt}" for name, doubts in zip("AB", of.only, strict=True) for doubt in doubts]
    if not (of.keys or of.sections or of.effects):
        return ["Both files describe the same panel."]
    return said


def record(of: Comparison) -> dict[str, Any]:
    """The comparison as a record: mm, mm^2, degrees, grams; keys in words, in A's units."""
    return {
        "a": _head(of.a),
        "b": _head(of.b),
        "keys": [asdict(key) for key in of.keys],
        "sections": list(of.sections),
        "effects": [asdict(e) | {"change": e.change, "share": e.share} for e in of.effects],
        "doubts": {"only_a": list(of.only[0]), "only_b": list(of.only[1])},
    }


def _head(job: Job) -> dict[str, str]:
    return {"file": job.path.name, "name": job.record.name, "stamp": job.stamp, "units": job.record.units}


def _name(job: Job, letter: str) -> str:
    return f"{letter}: {job.path.stem}"


def _text(words: Wording, unit: Unit, value: float | None) -> str:
    if value is None:
        return "-"
    if unit == "mm":
        return words.length(value)
    if unit == "mm2":
        return words.area(value)
    if unit == "g":
        return words.mass(value)
    return f"{value:.2f}°" if unit == "degrees" else f"{value:.2f}".rstrip("0").rstrip(".")


def _change(words: Wording, effect: Effect) -> str:
    """The change with its sign, and what share of A that is where A is not nothing."""
    if effect.change is None or effect.a is None:
        return "only in B" if effect.a is None else "only in A"
    sign = "+" if effect.change > 0.0 else "-"
    text = f"{sign}{_text(words, effect.unit, abs(effect.change))}"
    share = 0.0 if effect.unit == "degrees" or abs(effect.a) < 1e-9 else 100.0 * abs(effect.change / effect.a)
    return f"{text} ({sign}{share:.0f} %)" if share >= 0.5 else text
