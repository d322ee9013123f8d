"""What is in stock as tables for the screen and as records."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import asdict
from typing import Any, get_args

from ..shop.stock import FAMILIES, KINDS, Family, Foam, Material, Pin, Stock, kind_of
from ..shop.units import Units
from ..shop.wording import Wording
from .table import Table

NOTES = (
    "Sources: common practice; strengths are from memory and on the low side, good for a first estimate.",
    'What your own sheet, resin or cloth weighs and bears goes into the wing file, under [materials."name"].',
)
_HEADS = {  # of the columns, by figure
    "density": "density",
    "areal_weight": "weight",
    "fibre_density": "fibre",
    "tension": "tension",
    "compression": "compression",
    "modulus": "modulus",
    "shear": "shear",
    "shear_modulus": "shear modulus",
}


def tables(stock: Stock, kinds: Sequence[str], units: Units) -> list[Table]:
    """A table for each kind; after foams and woods the families they are of, after pins their usual diameters."""
    words, made = Wording(units), []
    for kind in kinds:
        of = _of(stock, kind)
        made.append(_materials(kind, of, words))
        if KINDS[kind] is Foam:
            made.append(_families({m.family: FAMILIES[m.family] for m in of if isinstance(m, Foam)}, words))
        if KINDS[kind] is Pin:
            rows = [(m.name, _sizes(m.sizes(units), words)) for m in of if isinstance(m, Pin)]
            made.append(Table(f"diameters in {words.length_unit}", ("pin", "usual"), tuple(rows)))
    return made


def _of(stock: Stock, kind: str) -> list[Material]:
    return [material for material in stock.materials.values() if kind_of(material) == kind]


def _materials(kind: str, of: Sequence[Material], words: Wording) -> Table:
    keys = [key for key in _HEADS if any(getattr(m, key, None) is not None for m in of)]
    foams = KINDS[kind] is Foam
    heads = (kind, *(_HEADS[key] for key in keys), *(["hot wire"] * foams))
    rows = []
    for m in of:
        figures = (_figure(key, getattr(m, key), words) for key in keys)
        rows.append((m.name, *figures, *([_may(m.hot_wire)] if isinstance(m, Foam) else [])))
    units = [words.density(1.0)[1]] if "density" in keys or "fibre_density" in keys else []
    units += [words.areal_weight(1.0)[1]] * ("areal_weight" in keys)
    units += [words.stress_unit] * any(key not in ("density", "areal_weight", "fibre_density") for key in keys)
    return Table(f"{kind} (in {', '.join(units)})", heads, tuple(rows))


def _figure(key: str, value: float | None, words: Wording) -> str:
    if value is None:
        return ""
    if "density" in key:
        return words.density(value)[0]
    return words.areal_weight(value)[0] if key == "areal_weight" else words.stress_column(value)


def _families(families: dict[str, Family], words: Wording) -> Table:
    rows = [
        (name, _may(kin.hot_wire), _sizes(kin.sheets_in if words.units == "in" else kin.sheets_mm, words))
        for name, kin in families.items()
    ]
    return Table(f"sheets in {words.length_unit}", ("family", "hot wire", "usual thicknesses"), tuple(rows))


def _may(hot_wire: bool) -> str:
    return "yes" if hot_wire else "never"


def _sizes(sizes: Iterable[float], words: Wording) -> str:
    return ", ".join(words.size(size) for size in sizes)


def why(stock: Stock, kinds: Sequence[str]) -> list[str]:
    """What a hot wire does to the families that are listed."""
    said: dict[str, dict[str, None]] = {}
    for m in (m for kind in kinds for m in _of(stock, kind)):
        if isinstance(m, Foam):
            said.setdefault(m.why, {})[m.family] = None
    return [f"{', '.join(families)}: {text}" for text, families in said.items()]


def records(stock: Stock, kinds: Sequence[str]) -> list[dict[str, Any]]:
    """A record for each material: sizes in mm, kg/m^3, g/m^2, MPa; sheets and diameters of both systems."""
    return [{"kind": kind, **_record(material)} for kind in kinds for material in _of(stock, kind)]


def _record(material: Material) -> dict[str, Any]:
    record = asdict(material)
    if isinstance(material, Pin):
        del record["diameters"]
        record |= {f"diameters_{units}": material.sizes(units) for units in get_args(Units)}
    return record


def rows(found: Sequence[dict[str, Any]]) -> list[dict[str, Any]]:
    """The records for CSV: all with the columns of all, sizes with blanks between."""
    columns = dict.fromkeys(key for record in found for key in record)
    return [{key: _cell(record.get(key)) for key in columns} for record in found]


def _cell(value: Any) -> Any:
    return " ".join(f"{size:g}" for size in value) if isinstance(value, tuple) else value
