"""Single values of a wing file, read into mm, degrees and grams.

Each reader raises ``ValueError("what was wanted, got what")``, to which the file's name and the key are put.
"""

from __future__ import annotations

import datetime
import re
from collections.abc import Callable
from contextlib import suppress
from dataclasses import dataclass
from typing import Annotated, Literal

from pydantic import BeforeValidator, Discriminator, Field, Tag, ValidationInfo

from . import units as read
from .stock import FAMILIES
from .units import Units, shown

FAR = 1e5  # mm; a longer length is a slip, and one far longer would overflow later on

Where = tuple[str | int, ...]
Reader = Callable[[object, ValidationInfo], float]


class KeyedError(ValueError):
    """Something wrong at `where`, as seen from the record that raises it; `text` follows the key."""

    def __init__(self, where: Where, text: str) -> None:
        super().__init__(text)
        self.where = where
        self.text = text


def file_units(info: ValidationInfo) -> Units:
    """What a bare length means in the file that is being read."""
    units: Units = (info.context or {}).get("units", "mm")
    return units


def read_length(value: object, info: ValidationInfo) -> float:
    """Read a length in mm, in the file's units where bare."""
    size = read.length(value, file_units(info))
    if abs(size) > FAR:
        raise ValueError(f"a length within 100 m, got {shown(value)}")
    return size


def _plainly(reader: Callable[[object], float]) -> Reader:
    return lambda value, info: reader(value)


read_angle, read_fraction, read_density, read_areal, read_mass, read_force, read_moment, read_stress = map(
    _plainly,
    (read.angle, read.fraction, read.density, read.areal, read.mass, read.force, read.moment, read.stress),
)


def fit(reader: Reader, wanted: str, fits: Callable[[float], bool]) -> Reader:
    """Reader that also refuses what does not fit, in the words of `wanted`."""

    def checked(value: object, info: ValidationInfo) -> float:
        number = reader(value, info)
        if not fits(number):
            raise ValueError(f"{wanted}, got {shown(value)}")
        return number

    return checked


def read_text(value: object) -> str:
    """Read a line of text."""
    if not isinstance(value, str) or not value.strip() or not value.isprintable() or len(value) > 120:
        raise ValueError(f"a line of text in quotes, 1 to 120 characters, got {shown(value)}")
    return value.strip()


def read_family(value: object) -> str:
    """Read the name of a family of foams."""
    if not isinstance(value, str) or value not in FAMILIES:
        names = ", ".join(f'"{name}"' for name in FAMILIES)
        raise ValueError(f"one of {names}, got {shown(value)}")
    return value


def read_date(value: object) -> datetime.date:
    """Read a day: a TOML date, or one in quotes."""
    if isinstance(value, datetime.date) and not isinstance(value, datetime.datetime):
        return value
    with suppress(ValueError):
        if isinstance(value, str):
            return datetime.date.fromisoformat(value.strip())
    raise ValueError(f"a day such as 2026-03-14, got {shown(value)}")


read_positive = fit(read_length, "a length above 0", lambda v: v > 0)

Text = Annotated[str, BeforeValidator(read_text)]
Date = Annotated[datetime.date, BeforeValidator(read_date)]
Length = Annotated[float, BeforeValidator(read_length)]
Positive = Annotated[float, BeforeValidator(read_positive)]
NotNegative = Annotated[float, BeforeValidator(fit(read_length, "a length of 0 or more", lambda v: v >= 0))]
Twist = Annotated[float, BeforeValidator(fit(read_angle, "an angle from -60 to 60 degrees", lambda v: abs(v) <= 60))]
Tilt = Annotated[float, BeforeValidator(fit(read_angle, "an angle above 0, up to 45 degrees", lambda v: 0 < v <= 45))]
Inside = Annotated[float, BeforeValidator(fit(read_fraction, "a chord fraction between 0 and 1", lambda v: 0 < v < 1))]
OnChord = Annotated[float, BeforeValidator(fit(read_fraction, "a chord fraction from 0 to 1", lambda v: 0 <= v <= 1))]
# A density in g/cm^3 without its unit would pass for one of almost nothing.
Density = Annotated[
    float,
    BeforeValidator(
        fit(
            read_density,
            'a density from 5 to 25000 kg/m^3 (1.15 g/cm^3 is 1150 or "1.15 g/cm^3")',
            lambda v: 5 <= v <= 25000,
        )
    ),
]
Areal = Annotated[
    float, BeforeValidator(fit(read_areal, "an areal weight above 0, up to 10000 g/m^2", lambda v: 0 < v <= 1e4))
]
Stress = Annotated[float, BeforeValidator(fit(read_stress, "a stress above 0", lambda v: v > 0))]
Mass = Annotated[float, BeforeValidator(fit(read_mass, "a mass above 0", lambda v: v > 0))]


@dataclass(frozen=True)
class Allowable:
    """What one strip may carry: a force in N, or a stress in MPa."""

    kind: Literal["force", "stress"]
    value: float


def read_allowable(value: object) -> Allowable:
    """Read what a strip may carry; its unit says whether it is a force or a stress, and a bare number is in newtons."""
    readers: tuple[tuple[Literal["force", "stress"], Callable[[object], float]], ...] = (
        ("force", read.force),
        ("stress", read.stress),
    )
    for kind, reader in readers:
        with suppress(ValueError):
            if (number := reader(value)) > 0:
                return Allowable(kind, number)
    raise ValueError(f'a force or stress above 0, such as 4000 (newtons), "900 lbf" or "600 MPa", got {shown(value)}')


@dataclass(frozen=True)
class Cant:
    """The web's cant as given: degrees, the y in mm of the rib it is square to, or what it makes least."""

    kind: Literal["angle", "square", "least filler", "least gap"]
    value: float | None = None


def read_cant(value: object, info: ValidationInfo) -> Cant:
    """Read a cant: an angle, or what is to settle it."""
    leasts: tuple[Literal["least filler", "least gap"], ...] = ("least filler", "least gap")
    for least in leasts:
        if isinstance(value, str) and value.lower().split() == least.split():
            return Cant(least)
    wanted = 'an angle within 45 degrees, "square at Y", "least filler" or "least gap"'
    try:
        if square := re.fullmatch(r"\s*square\s+at\s+(.+)", str(value), re.IGNORECASE):
            return Cant("square", read_length(square[1], info))
        angle = read.angle(value)
    except ValueError:
        raise ValueError(f"{wanted}, got {shown(value)}") from None
    if abs(angle) > 45:
        raise ValueError(f"{wanted}, got {shown(value)}")
    return Cant("angle", angle)


Rows = Annotated[tuple[tuple[Length, Positive], ...], Field(min_length=2)]
TAGS = ("<one>", "<rows>")  # pydantic puts them among the keys of an error
OneOrRows = Annotated[
    Annotated[Positive, Tag(TAGS[0])] | Annotated[Rows, Tag(TAGS[1])],
    Discriminator(lambda value: TAGS[isinstance(value, list)]),
]
