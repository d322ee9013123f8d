"""The wing file: TOML into checked, frozen records in mm, degrees and grams; every error names its key.

Errors count stations and list entries from 1 and give the station's y: ``wing.stations[2].chord (y = 2100)``.
Each field carries the description that an error quotes when it is missing or of the wrong type.
"""

from __future__ import annotations

import difflib
import hashlib
import re
import tomllib
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Annotated, Any, Literal, Self, get_args, get_origin

from pydantic import (
    BaseModel,
    BeforeValidator,
    ConfigDict,
    Discriminator,
    Field,
    Tag,
    ValidationError,
    ValidationInfo,
    model_validator,
)
from pydantic_core import ErrorDetails

from ..geom import airfoil
from . import units as read
from .stock import FAMILIES, Adhesive, Cloth, Filler, Foam, MaterialError, Stock
from .units import MM_PER_INCH, Units, shown

FAR = 1e5  # mm; a longer length is a slip, and one far longer would overflow later on

Where = tuple[str | int, ...]
Reader = Callable[[object, ValidationInfo], float]


class WingError(ValueError):
    """A wing file that cannot be used, in one line: file, key, what was wanted, what was got."""

    def __init__(self, path: Path, *rest: str) -> None:
        line = ": ".join((path.name or str(path), *rest))
        super().__init__("".join(c if c.isprintable() else " " for c in line))


class KeyedError(ValueError):
    """Something wrong at `where`, as seen from the record that raises it; `text` follows the key."""

    def __init__(self, where: Where, text: str) -> None:
        super().__init__(text)
        self.where = where
        self.text = text


# --- single values: each reader raises ValueError("what was wanted, got what") --------------------


def _file_units(info: ValidationInfo) -> Units:
    units: Units = (info.context or {}).get("units", "mm")
    return units


def _length(value: object, info: ValidationInfo) -> float:
    size = read.length(value, _file_units(info))
    if abs(size) > FAR:
        raise ValueError(f"a length within 100 m, got {shown(value)}")
    return size


def _plainly(reader: Callable[[object], float]) -> Reader:
    return lambda value, info: reader(value)


_angle, _fraction, _density, _areal, _mass = map(
    _plainly, (read.angle, read.fraction, read.density, read.areal, read.mass)
)


def _fit(reader: Reader, wanted: str, fits: Callable[[float], bool]) -> Reader:
    """Reader that also refuses what does not fit, in the words of `wanted`."""

    def checked(value: object, info: ValidationInfo) -> float:
        number = reader(value, info)
        if not fits(number):
            raise ValueError(f"{wanted}, got {shown(value)}")
        return number

    return checked


def _text(value: object) -> str:
    if not isinstance(value, str) or not value.strip() or not value.isprintable() or len(value) > 120:
        raise ValueError(f"a line of text in quotes, 1 to 120 characters, got {shown(value)}")
    return value.strip()


def _family(value: object) -> str:
    if not isinstance(value, str) or value not in FAMILIES:
        names = ", ".join(f'"{name}"' for name in FAMILIES)
        raise ValueError(f"one of {names}, got {shown(value)}")
    return value


_positive = _fit(_length, "a length above 0", lambda v: v > 0)

Text = Annotated[str, BeforeValidator(_text)]
Length = Annotated[float, BeforeValidator(_length)]
Positive = Annotated[float, BeforeValidator(_positive)]
NotNegative = Annotated[float, BeforeValidator(_fit(_length, "a length of 0 or more", lambda v: v >= 0))]
Twist = Annotated[float, BeforeValidator(_fit(_angle, "an angle from -60 to 60 degrees", lambda v: abs(v) <= 60))]
Tilt = Annotated[float, BeforeValidator(_fit(_angle, "an angle above 0, up to 45 degrees", lambda v: 0 < v <= 45))]
Inside = Annotated[float, BeforeValidator(_fit(_fraction, "a chord fraction between 0 and 1", lambda v: 0 < v < 1))]
OnChord = Annotated[float, BeforeValidator(_fit(_fraction, "a chord fraction from 0 to 1", lambda v: 0 <= v <= 1))]
# A density in g/cm^3 without its unit would pass for one of almost nothing.
Density = Annotated[
    float,
    BeforeValidator(
        _fit(
            _density,
            'a density from 5 to 25000 kg/m^3 (1.15 g/cm^3 is 1150 or "1.15 g/cm^3")',
            lambda v: 5 <= v <= 25000,
        )
    ),
]
Areal = Annotated[
    float, BeforeValidator(_fit(_areal, "an areal weight above 0, up to 10000 g/m^2", lambda v: 0 < v <= 1e4))
]


@dataclass(frozen=True)
class Cant:
    """The web's cant as given: degrees, the y in mm of the rib it is square to, or what it makes least."""

    kind: Literal["angle", "square", "least filler", "least gap"]
    value: float | None = None


def _cant(value: object, info: ValidationInfo) -> Cant:
    leasts: tuple[Literal["least filler", "least gap"], ...] = ("least filler", "least gap")
    for least in leasts:
        if isinstance(value, str) and value.lower().split() == least.split():
            return Cant(least)
    wanted = 'an angle within 45 degrees, "square at Y", "least filler" or "least gap"'
    try:
        if square := re.fullmatch(r"\s*square\s+at\s+(.+)", str(value), re.IGNORECASE):
            return Cant("square", _length(square[1], info))
        angle = read.angle(value)
    except ValueError:
        raise ValueError(f"{wanted}, got {shown(value)}") from None
    if abs(angle) > 45:
        raise ValueError(f"{wanted}, got {shown(value)}")
    return Cant("angle", angle)


Rows = Annotated[tuple[tuple[Length, Positive], ...], Field(min_length=2)]
_TAGS = ("<one>", "<rows>")  # pydantic puts them among the keys of an error
OneOrRows = Annotated[
    Annotated[Positive, Tag(_TAGS[0])] | Annotated[Rows, Tag(_TAGS[1])],
    Discriminator(lambda value: _TAGS[isinstance(value, list)]),
]


# --- the records ----------------------------------------------------------------------------------


class _Record(BaseModel):
    model_config = ConfigDict(frozen=True, extra="forbid")


def _said(length: float, units: Units) -> str:
    """Length in mm as an error gives it, in the file's units."""
    return f"{length / MM_PER_INCH:.6g} in" if units == "in" else f"{length:.6g} mm"


def _ascending(places: Iterable[tuple[Where, float]], units: Units) -> None:
    """Raise a KeyedError at the first y that is not above the one before it."""
    before = -float("inf")
    for where, y in places:
        if y <= before:
            raise KeyedError(where, f"wanted y above the one before, {_said(before, units)}, got {_said(y, units)}")
        before = y


class Station(_Record):
    """One section of the wing, where it stands and how far it is turned."""

    y: NotNegative = Field(description="the distance out along the span from the panel's origin, a length")
    chord: Positive = Field(description="the section's chord, a length above 0")
    le: Length = Field(
        default=0.0,
        description="how far the leading edge is aft of the panel's origin, before washout, a length",
    )
    z: Length = Field(default=0.0, description="the height of the twist axis, a length")
    airfoil: Text = Field(description='the section: "naca 2412" or other 4 or 5 digits, or a file of coordinates')
    washout: Twist | None = Field(
        default=None, description="the washout, nose down positive, in degrees from -60 to 60"
    )


class Washout(_Record):
    """How the washout runs from station to station."""

    law: Literal["smooth", "straight", "power", "table"] = Field(
        default="smooth",
        description='"smooth" or "straight" through the stations, "power" from root to tip, or "table"',
    )
    exponent: Annotated[
        float | None,
        BeforeValidator(_fit(_fraction, "a number from 1 to 20", lambda v: 1 <= v <= 20)),
    ] = Field(default=None, description='the exponent of law "power", a number from 1 to 20')
    points: Annotated[tuple[tuple[Length, Twist], ...], Field(min_length=2)] | None = Field(
        default=None,
        description='the rows of law "table", two or more [y, degrees], y ascending over all stations',
    )

    @model_validator(mode="after")
    def _law(self, info: ValidationInfo) -> Self:
        for key, law in (("exponent", "power"), ("points", "table")):
            given = getattr(self, key) is not None
            if given and self.law != law:
                raise KeyedError((key,), f'wanted only with law = "{law}", got law = "{self.law}"')
            if self.law == law and not given:
                raise KeyedError((key,), f"is missing, wanted {type(self).model_fields[key].description}")
        places = ((("points", i), row[0]) for i, row in enumerate(self.points or ()))
        _ascending(places, _file_units(info))
        return self


class Wing(_Record):
    """The outer shape of one panel, as a right-hand one."""

    twist_axis: OnChord = Field(default=0.25, description="the chord fraction each section turns about, from 0 to 1")
    planform: Literal["straight", "smooth"] = Field(
        default="straight", description='how chord, le and z run between stations: "straight" or "smooth"'
    )
    stations: tuple[Station, ...] = Field(
        min_length=2, description="the stations, two or more [[wing.stations]], root outwards"
    )
    washout: Washout = Field(
        default=Washout(), description="how the washout runs from station to station, a table [wing.washout]"
    )

    @model_validator(mode="after")
    def _outwards(self, info: ValidationInfo) -> Self:
        places = ((("stations", i, "y"), station.y) for i, station in enumerate(self.stations))
        _ascending(places, _file_units(info))
        return self

    @model_validator(mode="after")
    def _washouts(self, info: ValidationInfo) -> Self:
        law, last = self.washout.law, len(self.stations) - 1
        for i, station in enumerate(self.stations):
            needed = law in ("smooth", "straight") or (law == "power" and i in (0, last))
            if needed and station.washout is None:
                places = "the first and last station" if law == "power" else "every station"
                raise KeyedError(
                    ("stations", i, "washout"),
                    f'is missing, wanted degrees at {places} with washout law "{law}"',
                )
            if not needed and station.washout is not None:
                raise KeyedError(
                    ("stations", i, "washout"),
                    f'wanted none here with washout law "{law}", got {station.washout:g}',
                )
        if points := self.washout.points:
            _covers(points, (self.stations[0].y, self.stations[-1].y), "stations", ("washout", "points"), info)
        return self


def _covers(
    rows: tuple[tuple[float, float], ...],
    span: tuple[float, float],
    what: str,
    where: Where,
    info: ValidationInfo,
) -> None:
    """Raise a KeyedError if rows [y, value] stop short of the span."""
    low, high, first, last = (_said(y, _file_units(info)) for y in (*span, rows[0][0], rows[-1][0]))
    if rows[0][0] > span[0] or rows[-1][0] < span[1]:
        raise KeyedError(where, f"wanted rows that cover the {what}, {low} to {high}, got {first} to {last}")


class Skin(_Record):
    """The skin between the outer surface and the web."""

    thickness: OneOrRows = Field(
        description="the skin's thickness, a length above 0, or two or more rows [y, thickness]"
    )

    @model_validator(mode="after")
    def _outwards(self, info: ValidationInfo) -> Self:
        if not isinstance(self.thickness, float):
            places = ((("thickness", i), row[0]) for i, row in enumerate(self.thickness))
            _ascending(places, _file_units(info))
        return self


class Facing(_Record):
    """Cloth laid on both faces of the web."""

    cloth: Text | None = Field(default=None, description="the cloth's name in stock")
    areal_weight: Areal | None = Field(
        default=None, description="in place of a cloth: dry areal weight of one layer, in g/m^2 where bare"
    )
    layers: int = Field(strict=True, ge=1, le=100, description="the layers on each face, a whole number of 1 or more")
    resin_fraction: Annotated[
        float, BeforeValidator(_fit(_fraction, "a fraction from 0 to 0.95", lambda v: 0 <= v <= 0.95))
    ] = Field(default=0.5, description="the resin's share of the facing's mass, from 0 to 0.95")

    @model_validator(mode="after")
    def _one_weight(self) -> Self:
        if self.cloth is None and self.areal_weight is None:
            raise KeyedError(("cloth",), "is missing, wanted a cloth, or areal_weight in its place")
        if self.cloth is not None and self.areal_weight is not None:
            raise KeyedError(("areal_weight",), f"wanted none beside a cloth, got {self.areal_weight:g}")
        return self


class Web(_Record):
    """The shear web: a flat sheet between upper and lower skin."""

    ends: tuple[Length, Length] = Field(description="the ribs [y1, y2] where the web starts and stops, lengths")
    line: tuple[Inside, Inside] = Field(
        description="the chord fractions [f1, f2] of the web line at its two ends, between 0 and 1"
    )
    thickness: Positive = Field(description="the web sheet's thickness, a length above 0")
    cant: Annotated[Cant, BeforeValidator(_cant)] = Field(
        default=Cant("angle", 0.0),
        description='degrees, top leaning aft positive; or "square at Y", "least filler", "least gap"',
    )
    cant_limit: Tilt = Field(
        default=15.0,
        description="how far a search for the best cant may tip the web either way, in degrees up to 45",
    )
    edge: Literal["square", "set bevel", "full bevel"] = Field(
        default="full bevel", description='how both long edges are cut: "square", "set bevel" or "full bevel"'
    )
    runs: int = Field(
        default=1,
        strict=True,
        ge=1,
        description="the saw settings along each edge with a set bevel, a whole number of 1 or more",
    )
    angle_step: Tilt = Field(
        default=0.5, description="the step to which the saw's angle can be set, in degrees up to 45"
    )
    aim: Literal["filler", "gap"] = Field(
        default="filler", description='what a set bevel\'s runs make least: "filler" or the largest "gap"'
    )
    bond: NotNegative = Field(default=0.0, description="the bond line between web and skin, a length of 0 or more")
    foam: Text = Field(description="the web sheet's material, a foam in stock")
    filler: Text = Field(description="what fills the gaps, a filler in stock")
    adhesive: Text = Field(default="laminating epoxy", description="what bonds the web, an adhesive in stock")
    facing: Facing | None = Field(default=None, description="the cloth on both faces of the web, a table [web.facing]")

    @model_validator(mode="after")
    def _outwards(self, info: ValidationInfo) -> Self:
        _ascending(((("ends", i), y) for i, y in enumerate(self.ends)), _file_units(info))
        return self


class Limits(_Record):
    """What a choice of web must meet."""

    max_gap: NotNegative | None = Field(default=None, description="the largest gap to be filled, a length")
    max_bevel: Annotated[
        float | None,
        BeforeValidator(_fit(_angle, "an angle from 0 to 45 degrees", lambda v: 0 <= v <= 45)),
    ] = Field(default=None, description="the steepest bevel the workshop can cut, in degrees up to 45")
    min_thickness: NotNegative | None = Field(default=None, description="the thinnest web sheet, a length")
    max_mass: Annotated[float | None, BeforeValidator(_fit(_mass, "a mass above 0", lambda v: v > 0))] = Field(
        default=None, description="the heaviest web, filler and bond line included, in grams where bare"
    )


class Material(_Record):
    """A material of the workshop's own, or figures that override those in stock."""

    kind: Literal["foam", "filler", "adhesive", "cloth"] | None = Field(
        default=None, description='for a new material: "foam", "filler", "adhesive" or "cloth"'
    )
    density: Density | None = Field(default=None, description="the density, in kg/m^3 where bare")
    areal_weight: Areal | None = Field(default=None, description="a cloth's dry areal weight, in g/m^2 where bare")
    fibre_density: Density | None = Field(
        default=None, description="the density of a cloth's fibre, in kg/m^3 where bare"
    )
    family: Annotated[str | None, BeforeValidator(_family)] = Field(
        default=None, description="a new foam's family, which says whether a hot wire may touch it"
    )
    sheets: Annotated[tuple[Positive, ...], Field(min_length=1)] | None = Field(
        default=None, description="the sheet thicknesses a foam comes in, one or more lengths in a list"
    )
    hot_wire: bool | None = Field(default=None, strict=True, description="true or false: may a hot wire touch the foam")
    source: Text | None = Field(default=None, description="where the figures come from, a line of text")


class WingFile(_Record):
    """A whole wing file, in mm, degrees and grams."""

    name: Text = Field(description="what the wing is called, a line of text in quotes")
    units: Units = Field(default="mm", description='what a bare length means: "mm" or "in"')
    wing: Wing = Field(description="the panel's outer shape, a table [wing]")
    skin: Skin = Field(description="the skin, a table [skin]")
    web: Web = Field(description="the shear web, a table [web]")
    limits: Limits | None = Field(default=None, description="what a choice of web must meet, a table [limits]")
    materials: dict[str, Material] = Field(
        default={}, description='materials added or overridden, tables [materials."name"]'
    )

    @model_validator(mode="after")
    def _web_inside(self, info: ValidationInfo) -> Self:
        low, high = self.wing.stations[0].y, self.wing.stations[-1].y
        places: list[tuple[Where, float]] = [(("web", "ends", i), y) for i, y in enumerate(self.web.ends)]
        if self.web.cant.kind == "square" and self.web.cant.value is not None:
            places.append((("web", "cant"), self.web.cant.value))
        for where, y in places:
            if not low <= y <= high:
                limits = f"{_said(low, self.units)} to {_said(high, self.units)}"
                raise KeyedError(where, f"wanted y within the stations, {limits}, got {_said(y, self.units)}")
        if not isinstance(self.skin.thickness, float):
            _covers(self.skin.thickness, self.web.ends, "web's ends", ("skin", "thickness"), info)
        return self


# --- errors ---------------------------------------------------------------------------------------


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
    where = tuple(step for step in where if step not in _TAGS)
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
        Eight hexadecimal digits that change with the wing file or any section file it names.
    """

    path: Path
    record: WingFile
    sections: tuple[airfoil.Section, ...]
    stock: Stock
    stamp: str


def load(path: Path) -> Loaded:
    """Read a wing file and the section files it names.

    Raises
    ------
    WingError
        For whatever a user may have got wrong: one line that names the file and the key.
    """
    data: dict[str, Any] = {}
    try:
        raw = _bytes(path, "a wing file")
        data = _toml(raw)
        record = _record(data)
        stock = _stock(record)
        sections, files = _sections(record, path.parent)
    except KeyedError as fault:
        raise WingError(path, *filter(None, (_key(fault.where, data), fault.text))) from None
    stamp = hashlib.sha256(b"".join((raw, *files))).hexdigest()[:8]
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
        got = shown(text.replace("\r\n", "\n").split("\n")[int(line) - 1].strip())
        raise KeyedError((), f"line {line}: wanted TOML, got {got} (column {column}: {what})") from None


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
    asked: list[tuple[Where, type[Foam | Filler | Adhesive | Cloth], str | None]] = [
        (("web", "foam"), Foam, web.foam),
        (("web", "filler"), Filler, web.filler),
        (("web", "adhesive"), Adhesive, web.adhesive),
        (("web", "facing", "cloth"), Cloth, web.facing.cloth if web.facing else None),
    ]
    for where, kind, wanted in asked:
        try:
            if wanted is not None:
                stock.find(wanted, kind)
        except ValueError as error:
            raise KeyedError(where, f"wanted {error}") from None
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
            if code := airfoil.naca_code(name):
                sections[name] = airfoil.naca(code)
                continue
            files.append(_bytes(folder / name, 'a coordinate file or a NACA section such as "naca 2412"'))
            sections[name] = airfoil.read(files[-1], name)
        except ValueError as error:
            raise KeyedError(where, str(error) if code else f"{name}: {error}") from None
    return tuple(sections[station.airfoil] for station in record.wing.stations), files
