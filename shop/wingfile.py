"""The wing file: TOML into checked, frozen records; every error names its key.

Errors count stations and list entries from 1 and give the station's y: ``wing.stations[2].chord (y = 2100)``.
"""

from __future__ import annotations

import difflib
import hashlib
import re
import tomllib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any, get_args, get_origin

from pydantic import BaseModel, ValidationError
from pydantic_core import ErrorDetails

from ..geom import airfoil, coordinates, naca
from .changes import changed
from .records.core import foams_asked, refuse_unfit
from .records.cutting import sheets_asked
from .records.wing import WingFile
from .stock import Adhesive, Cloth, Filler, Foam, Material, MaterialError, Pin, Stock, Strip
from .units import shown
from .values import TAGS, KeyedError, Where


class WingError(ValueError):
    """A wing file that cannot be used, in one line: file, key, what was wanted, what was got."""

    def __init__(self, path: Path, *rest: str) -> None:
        line = ": ".join((path.name or str(path), *rest))
        super().__init__("".join(c if c.isprintable() else " " for c in line))


@cache
def tables(model: type[BaseModel] = WingFile) -> dict[tuple[str, ...], type[BaseModel]]:
    """Every table of the wing file with its record, by path: (), ("wing",), ("wing", "stations"), ...

    >>> tables()["web", "facing"].__name__
    'Facing'
    """
    found: dict[tuple[str, ...], type[BaseModel]] = {(): model}
    for key, info in model.model_fields.items():
        named = ('"name"',) if get_origin(info.annotation) is dict else ()
        for inner in _models(info.annotation):
            found |= {(key, *named, *path): record for path, record in tables(inner).items()}
    return found


def _models(annotation: Any) -> Iterator[type[BaseModel]]:
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        yield annotation
    for part in get_args(annotation):
        yield from _models(part)


def _path(where: Where) -> tuple[str, ...]:
    """Place of a key among `tables`: no counts, and one name for all materials."""
    names = [step for step in where if isinstance(step, str)]
    if names[:1] == ["materials"] and len(names) > 1:
        names[1] = '"name"'
    return tuple(names)


def _described(where: Where) -> str:
    """Describe the field at `where`, or the one that holds it."""
    path = _path(where)
    while path[:-1] not in tables() or path[-1] not in tables()[path[:-1]].model_fields:
        path = path[:-1]
    return str(tables()[path[:-1]].model_fields[path[-1]].description)


def _meant(where: Where) -> list[Where]:
    """Known keys that an unknown one may stand for: the nearest in its table, or the same in another."""
    key = str(where[-1])
    here = tables()[_path(where[:-1])].model_fields
    if near := difflib.get_close_matches(key.lower(), here, n=1):
        return [(*where[:-1], near[0])]
    return [(*path, key) for path, record in tables().items() if key in record.model_fields]


def _unknown(where: Where) -> str:
    if meant := _meant(where):
        return f"unknown key, did you mean {' or '.join(_key(key) for key in meant)}?"
    return f"unknown key, known here: {', '.join(tables()[_path(where[:-1])].model_fields)}"


def _key(where: Where, data: Any = None) -> str:
    """Key as a user finds it in the file; with the file's data, a station's y follows."""
    text = ""
    for step in where:
        if isinstance(step, int):
            text += f"[{step + 1}]"
        else:
            text += "." * bool(text) + (step if re.fullmatch(r'[\w-]+|".*"', step) else f'"{step}"')
    if data and where[:2] == ("wing", "stations") and len(where) > 3 and where[3] != "y":
        y = data["wing"]["stations"][where[2]].get("y")
        text += f" (y = {y.strip() if isinstance(y, str) else shown(y)})" if y is not None else ""
    return text


def _fault(error: ErrorDetails) -> KeyedError:
    """Our words for one of pydantic's errors, none of whose phrases are shown."""
    where, kind = tuple(error["loc"]), error["type"]
    if kind == "extra_forbidden":
        return KeyedError(where, _unknown(where))
    where = tuple(step for step in where if step not in TAGS)
    cause = error.get("ctx", {}).get("error")
    if isinstance(cause, KeyedError):
        return KeyedError((*where, *cause.where), cause.text)
    if cause is not None:
        return KeyedError(where, f"wanted {cause}")
    if kind == "missing":
        return KeyedError(where, f"is missing, wanted {_described(where)}")
    wanted = error["ctx"]["expected"].replace("'", '"') if kind == "literal_error" else _described(where)
    return KeyedError(where, f"wanted {wanted}, got {shown(error['input'])}")


def _place(where: Where, data: Any) -> list[int]:
    """Sort key for the order of the file; what is missing comes last in its table."""
    place = []
    for step in where:
        keys: list[str | int] = list(data) if isinstance(data, dict) else list(range(len(data)))
        known = step in keys
        place.append(keys.index(step) if known else len(keys))
        data = data[step] if known else None
        if not isinstance(data, dict | list):
            break
    return place


def _follows(error: ErrorDetails, misspelt: set[Where]) -> bool:
    """Whether an error only follows from another: a key missing as it is misspelt, entries that were refused."""
    if error["type"] == "missing":
        return error["loc"] in misspelt
    return error["type"] == "too_short" and len(error["input"]) >= error["ctx"]["min_length"]


def _first(error: ValidationError, data: dict[str, Any]) -> KeyedError:
    """First fault in the order of the file, with a count of the others."""
    errors = error.errors(include_url=False)
    misspelt = {key for e in errors if e["type"] == "extra_forbidden" for key in _meant(e["loc"])}
    faults = [_fault(e) for e in errors if not _follows(e, misspelt)]
    first = min(faults, key=lambda fault: _place(fault.where, data))
    more = f" (and {len(faults) - 1} more)" if len(faults) > 1 else ""
    return KeyedError(first.where, first.text + more)


# --- from disk ------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Loaded:
    """A wing file that has been read.

    Attributes
    ----------
    path
        The wing file.
    record
        What it states.
    sections
        One section for each station; stations with the same airfoil share it.
    stock
        The workshop's stock, with the file's own materials.
    stamp
        Eight hexadecimal digits that change with the wing file, any section file it names, or what is changed.
    """

    path: Path
    record: WingFile
    sections: tuple[airfoil.Section, ...]
    stock: Stock
    stamp: str


def load(path: Path, changes: Mapping[str, object] | None = None) -> Loaded:
    """Read a wing file and the section files it names.

    Parameters
    ----------
    changes
        Values to take in place of the file's own, by key; see `changes.changed`.

    Raises
    ------
    WingError
        For whatever a user may have got wrong: one line that names the file and the key.
    """
    data: dict[str, Any] = {}
    try:
        raw = _bytes(path, "a wing file")
        data = changed(_toml(raw), changes or {})
        record = _record(data)
        stock = _stock(record)
        sections, files = _sections(record, path.parent)
    except KeyedError as fault:
        raise WingError(path, *filter(None, (_key(fault.where, data), fault.text))) from None
    other = repr(sorted(changes.items())).encode() if changes else b""
    stamp = hashlib.sha256(b"".join((raw, *files, other))).hexdigest()[:8]
    return Loaded(path, record, sections, stock, stamp)


def _bytes(path: Path, wanted: str) -> bytes:
    try:
        if path.is_dir():
            raise KeyedError((), f"is a folder, wanted {wanted}")
        if not path.exists():
            raise KeyedError((), f"no such file, wanted {wanted}")
        if not path.is_file():
            raise KeyedError((), f"is no ordinary file, wanted {wanted}")
        return path.read_bytes()
    except OSError as error:
        raise KeyedError((), f"cannot be read ({error.strerror or 'unknown reason'}), wanted {wanted}") from None


def _toml(raw: bytes) -> dict[str, Any]:
    try:
        text = raw.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        place = raw.count(b"\n", 0, error.start) + 1
        raise KeyedError((), f"line {place}: wanted UTF-8 text, got byte {raw[error.start]:#04x}") from None
    try:
        return tomllib.loads(text)
    except RecursionError:
        raise KeyedError((), "wanted TOML, got brackets nested too deep") from None
    except ValueError as error:
        told = re.fullmatch(r"(.*) \(at line (\d+), column (\d+)\)", str(error), re.DOTALL)
        if told is None:
            raise KeyedError((), f"wanted TOML, got a mistake: {error}") from None
        line, column, what = told[2], told[3], told[1]
        wrong = text.replace("\r\n", "\n").split("\n")[int(line) - 1].strip()
        if re.search(r"=\s*[+-]?\d+,\d", wrong):
            what = "a figure has a decimal point, no comma"
        raise KeyedError((), f"line {line}: wanted TOML, got {shown(wrong)} (column {column}: {what})") from None


def _record(data: dict[str, Any]) -> WingFile:
    units = data.get("units") if data.get("units") in ("mm", "in") else "mm"
    try:
        return WingFile.model_validate(data, context={"units": units})
    except ValidationError as error:
        raise _first(error, data) from None


def _stock(record: WingFile) -> Stock:
    """Stock with the file's materials, every material that the web names being in it."""
    stock = Stock()
    for name, material in record.materials.items():
        try:
            stock = stock.with_material(name, material.model_dump(exclude_none=True))
        except MaterialError as error:
            raise KeyedError(("materials", name, error.key), str(error)) from None
    web = record.web
    caps, joint, flanges = record.caps, record.joint, record.flanges
    asked: list[tuple[Where, type[Material], str | None]] = [
        (("web", "foam"), Foam, web.foam),
        (("web", "filler"), Filler, web.filler),
        (("web", "adhesive"), Adhesive, web.adhesive),
        (("web", "facing", "cloth"), Cloth, web.facing.cloth if web.facing else None),
        (("caps", "strip"), Strip, caps.strip if caps else None),
        (("caps", "cover", "cloth"), Cloth, caps.cover.cloth if caps and caps.cover else None),
        (("flanges", "cloth"), Cloth, flanges.cloth if flanges else None),
        (("joint", "material"), Pin, joint.material if joint else None),
        (("joint", "pad"), Foam, joint.pad if joint else None),
        *foams_asked(record.cores),
        *sheets_asked(record.cutting),
    ]
    for where, kind, wanted in asked:
        try:
            if wanted is not None:
                stock.find(wanted, kind)
        except ValueError as error:
            raise KeyedError(where, f"wanted {error}") from None
    refuse_unfit(record.cores, stock)
    return stock


def _sections(record: WingFile, folder: Path) -> tuple[tuple[airfoil.Section, ...], list[bytes]]:
    """One section for each station, and the bytes of each file among them, every file once."""
    sections: dict[str, airfoil.Section] = {}
    files: list[bytes] = []
    for i, station in enumerate(record.wing.stations):
        name = station.airfoil
        if name in sections:
            continue
        where: Where = ("wing", "stations", i, "airfoil")
        try:
            if code := naca.naca_code(name):
                sections[name] = naca.naca(code)
                continue
            files.append(_bytes(folder / name, 'a coordinate file or a NACA section such as "naca 2412"'))
            sections[name] = coordinates.read(files[-1], name)
        except ValueError as error:
            raise KeyedError(where, str(error) if code else f"{name}: {error}") from None
    return tuple(sections[station.airfoil] for station in record.wing.stations), files
