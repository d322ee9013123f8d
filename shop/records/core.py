"""The wing file's records of foam cores and the hot wire that cuts them, of ribs, and of cradles."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Any, Literal, Self

from pydantic import BeforeValidator, Field, ValidationInfo, model_validator

from ..stock import Foam, Stock
from ..units import Units, shown
from ..values import (
    KeyedError,
    Length,
    NotNegative,
    OnChord,
    Positive,
    Text,
    Where,
    file_units,
    fit,
    read_fraction,
    read_length,
    read_positive,
)
from .base import Record, ascending, said

PLYWOOD = 6.0  # mm, what cradles are mostly cut from
AXES = "ABCUVWXYZ"  # the letters RS-274 (ISO 6983) has for axes


def read_kerf(value: object, info: ValidationInfo) -> tuple[float, float]:
    """Read a kerf: one length, or two for the inner and the outer end of each bay."""
    widths = value if isinstance(value, list) else [value, value]
    if len(widths) != 2:
        raise ValueError(f"a length above 0, or two in a list for the inner and the outer end, got {shown(value)}")
    return read_positive(widths[0], info), read_positive(widths[1], info)


def read_places(value: object, info: ValidationInfo) -> tuple[float, ...] | None:
    """Read a list of y; None stands for the stations."""
    if isinstance(value, str) and value.strip().lower() == "stations":
        return None
    if not isinstance(value, list) or not value:
        raise ValueError(f'"stations", or one or more y in a list, got {shown(value)}')
    return tuple(read_length(y, info) for y in value)


def read_axes(value: object) -> tuple[str, ...]:
    """Read the letters of four axes."""
    wanted = f'four letters of {AXES} in a list, such as ["X", "Y", "U", "V"]'
    letters = tuple(str(letter).strip().upper() for letter in value) if isinstance(value, list) else ()
    if len(letters) != 4 or any(len(letter) != 1 or letter not in AXES for letter in letters):
        raise ValueError(f"{wanted}, got {shown(value)}")
    twice = [letter for letter in AXES if letters.count(letter) > 1]
    if twice:
        raise ValueError(f"{wanted}, each once, got {twice[0]} more than once")
    return letters


Kerf = Annotated[tuple[float, float], BeforeValidator(read_kerf)]
Places = Annotated[tuple[float, ...] | None, BeforeValidator(read_places)]
Axes = Annotated[tuple[str, str, str, str], BeforeValidator(read_axes)]
UpTo = Annotated[
    float, BeforeValidator(fit(read_fraction, "a chord fraction above 0, up to 1", lambda v: 0.0 < v <= 1.0))
]
Count = Annotated[int, Field(strict=True, ge=1, le=60)]


class Core(Record):
    """A foam core, cut in bays with a straight hot wire."""

    region: Literal["nose", "aft", "whole"] = Field(
        description='what it fills: "nose" (leading edge to web), "aft" (web to trailing edge) or "whole"'
    )
    ends: tuple[Length, Length] | None = Field(
        default=None, description="the ribs [y1, y2] it runs between, lengths; the web's unless stated"
    )
    to: UpTo = Field(default=1.0, description="the chord fraction where an aft or whole core stops, up to 1")
    foam: Text = Field(description="the core's material, a foam in stock that a hot wire may cut")
    bays: Count | None = Field(default=None, description="the bays it is cut in, a whole number from 1 to 60")
    tolerance: Positive | None = Field(
        default=None, description="in place of bays: how far the straight cut may be off, a length above 0"
    )
    most: Count = Field(default=20, description="the most bays that may be taken, a whole number from 1 to 60")
    longest: Positive | None = Field(default=None, description="the longest block or bow there is, a length above 0")
    kerf: Kerf = Field(
        description="the width of the cut, a length above 0, or [inner end, outer end] of each bay: wider where the "
        "wire is slower"
    )
    passes: Literal["one", "separate"] = Field(
        default="one", description='upper and lower side cut with "one" template or with "separate" ones'
    )
    least_thickness: Positive | None = Field(
        default=None,
        description="the thinnest foam at the trailing edge that is worth cutting, a length above 0; the wider kerf, "
        "and at least 1 mm, unless stated",
    )
    bond: NotNegative | None = Field(
        default=None, description="the bond line between core and web, a length of 0 or more; the web's unless stated"
    )
    runway: Positive = Field(default=30.0, description="how far templates reach out of the block, a length above 0")
    margin: NotNegative = Field(default=5.0, description="the foam left round the core in its block, a length")

    @property
    def least(self) -> float:
        """The thinnest foam that is cut, mm."""
        return max(1.0, *self.kerf) if self.least_thickness is None else self.least_thickness

    @model_validator(mode="after")
    def _divided(self) -> Self:
        if self.bays is None and self.tolerance is None:
            raise KeyedError(("tolerance",), "is missing, wanted a tolerance, or bays in its place")
        if self.bays is not None and self.tolerance is not None:
            raise KeyedError(("bays",), f"wanted none beside a tolerance, got {self.bays}")
        if self.region == "nose" and self.to != 1.0:
            raise KeyedError(("to",), f'wanted only with region = "aft" or "whole", got {self.to:g}')
        return self

    @model_validator(mode="after")
    def _outwards(self, info: ValidationInfo) -> Self:
        ascending(((("ends", i), y) for i, y in enumerate(self.ends or ())), file_units(info))
        return self


class Wire(Record):
    """The hot wire and, if there is one, the machine that moves both its ends."""

    diameter: Positive = Field(description="the wire's diameter, a length above 0")
    speed: Positive | None = Field(
        default=None, description="how far the slower end of the wire moves through the foam in a second, a length"
    )
    planes: tuple[Length, Length] | None = Field(
        default=None,
        description="where the machine's two planes stand, lengths outwards from the inner end of the block: the first "
        "0 or less, the second beyond the block",
    )
    place: tuple[NotNegative, NotNegative] | None = Field(
        default=None,
        description="where the front lower edge of the block's inner end lies from the machine's zero: [aft, up], "
        "lengths of 0 or more",
    )
    travel: tuple[Positive, Positive] | None = Field(
        default=None, description="how far both ends can be moved from the machine's zero: [aft, up], lengths above 0"
    )
    axes: Axes = Field(
        default=("X", "Y", "U", "V"),
        description="the letters of the axes: aft and up in the plane near the inner end of a right-hand panel, then "
        "in the other",
    )
    feed: Literal["first", "all"] = Field(
        default="first",
        description='what the machine\'s F is the speed of: the "first" pair of axes, or the length over "all" four',
    )

    @model_validator(mode="after")
    def _machine(self) -> Self:
        stated = [key for key in ("planes", "place", "travel") if getattr(self, key) is not None]
        if stated:
            for key in ("planes", "place", "travel", "speed"):
                if getattr(self, key) is None:
                    text = f"is missing, wanted {type(self).model_fields[key].description}, as {stated[0]} is stated"
                    raise KeyedError((key,), text)
        return self

    @model_validator(mode="after")
    def _outside(self, info: ValidationInfo) -> Self:
        if self.planes is not None and self.planes[0] > 0.0:
            got = said(self.planes[0], file_units(info))
            raise KeyedError(("planes", 0), f"wanted a plane outside the block, at 0 or less, got {got}")
        ascending(((("planes", i), y) for i, y in enumerate(self.planes or ())), file_units(info))
        return self


class Ribs(Record):
    """Ribs with the slot for the web."""

    at: Places = Field(default=None, description='where ribs stand: "stations", or one or more y in a list')
    outline: Literal["inner", "outer"] = Field(
        default="inner", description='their outline: the "inner" side of the skin or the "outer" one'
    )
    thickness: NotNegative = Field(
        default=0.0,
        description="the ribs' own sheet, a length of 0 or more, half of it on each side of y: outline and slot clear "
        "skin and web all through it; that of [cutting.ribs] unless stated",
    )
    clearance: NotNegative = Field(
        default=0.2,
        description="the gap left on each face of the web in its slot, and about flanges, a length of 0 or more",
    )
    corner: NotNegative = Field(
        default=0.0,
        description="the radius cut away where web and skin meet, for caps and glue, a length of 0 or more",
    )
    margin: Positive | None = Field(
        default=None, description="what is left round lightening holes, a length above 0; no holes unless stated"
    )


class Cradles(Record):
    """Saddles that hold the panel at its washout on a flat bench."""

    at: Places = Field(default=None, description='where they stand: "stations", or one or more y in a list')
    surface: Literal["lower", "upper"] = Field(
        default="lower", description='which side of the panel lies in them: "lower", or "upper" with it on its back'
    )
    chord: tuple[OnChord, OnChord] = Field(
        default=(0.05, 0.9), description="the chord fractions [from, to] between which they hold it, from 0 to 1"
    )
    height: Positive = Field(default=50.0, description="the lowest saddle's height above the bench, a length above 0")
    padding: NotNegative = Field(
        default=0.0, description="the felt or film laid into the saddles, a length of 0 or more"
    )
    thickness: Positive | None = Field(
        default=None,
        description="the cradles' own sheet, a length above 0, from y outwards: saddles stay clear of the panel "
        "all through it; that of [cutting.cradles], or 6 mm, unless stated",
    )

    @model_validator(mode="after")
    def _aft(self) -> Self:
        if self.chord[1] - self.chord[0] < 0.1:
            got = f"{self.chord[0]:g} to {self.chord[1]:g}"
            raise KeyedError(("chord",), f"wanted two chord fractions, the second larger by 0.1 or more, got {got}")
        return self


def cores_fit(
    cores: tuple[Core, ...],
    wire: Wire | None,
    stations: tuple[float, float],
    web: tuple[float, float],
    units: Units,
) -> None:
    """Raise a KeyedError if a core leaves the panel or the web's ends, or has no wire that could cut it."""
    for i, core in enumerate(cores):
        low, high = stations if core.region == "whole" else web
        what = "the stations" if core.region == "whole" else "the web's ends"
        for j, y in enumerate(core.ends or ()):
            if not low <= y <= high:
                limits = f"{said(low, units)} to {said(high, units)}"
                raise KeyedError(("cores", i, "ends", j), f"wanted y within {what}, {limits}, got {said(y, units)}")
        if wire is None:
            raise KeyedError(("wire",), "is missing, wanted the hot wire that cuts the cores, a table [wire]")
        if min(core.kerf) < wire.diameter:
            least, got = said(wire.diameter, units), said(min(core.kerf), units)
            raise KeyedError(("cores", i, "kerf"), f"wanted a kerf no narrower than the wire, {least}, got {got}")


def within(key: str, stated: Ribs | Cradles | None, stations: tuple[float, float], units: Units) -> tuple[float, ...]:
    """Where ribs or cradles stand, the first and the last station unless stated.

    Raises
    ------
    KeyedError
        If one stands outside the panel.
    """
    places = stations if stated is None or stated.at is None else stated.at
    for i, y in enumerate(places):
        if not stations[0] <= y <= stations[1]:
            limits = f"{said(stations[0], units)} to {said(stations[1], units)}"
            raise KeyedError((key, "at", i), f"wanted y within the stations, {limits}, got {said(y, units)}")
    return places


def foams_asked(cores: tuple[Core, ...]) -> Iterator[tuple[Where, Any, str]]:
    """What the cores want from stock: (key, kind, name)."""
    for i, core in enumerate(cores):
        yield ("cores", i, "foam"), Foam, core.foam


def refuse_unfit(cores: tuple[Core, ...], stock: Stock) -> None:
    """Raise a KeyedError for a foam that must not meet a hot wire."""
    for i, core in enumerate(cores):
        foam = stock.find(core.foam, Foam)
        if not foam.hot_wire:
            raise KeyedError(
                ("cores", i, "foam"),
                f"wanted a foam that a hot wire may cut, got {shown(core.foam)}: {foam.why}, and those too only in "
                "moving air and with a mask, as their fumes are harmful",
            )
