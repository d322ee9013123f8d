"""The wing file's records, one class for each table: what may be stated, in mm, degrees and grams.

Each field carries the description that an error quotes when it is missing or of the wrong type, and from which the
table of keys is made.
"""

from __future__ import annotations

from typing import Annotated, Literal, Self

from pydantic import BeforeValidator, Field, ValidationInfo, model_validator

from ..stock import CHECK_BARS, paper
from ..units import Units
from ..values import (
    Areal,
    Cant,
    Date,
    Density,
    Inside,
    KeyedError,
    Length,
    NotNegative,
    OnChord,
    OneOrRows,
    Positive,
    Stress,
    Text,
    Tilt,
    Twist,
    Where,
    file_units,
    fit,
    read_angle,
    read_cant,
    read_family,
    read_fraction,
    read_mass,
)
from .base import Record, ascending, covers, said
from .caps import Caps, Facing, Load, caps_fit, load_fits
from .core import Core, Cradles, Ribs, Wire, cores_fit, within
from .cutting import Cutting, Gauges
from .joint import Flanges, Joint

SHORTEST = 10.0  # mm between the ribs that cut the web off
PRINTERS_OFF = 0.05  # a bar further off than this was not printed at 100 %


class Station(Record):
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


class Washout(Record):
    """How the washout runs from station to station."""

    law: Literal["smooth", "straight", "power", "table"] = Field(
        default="smooth",
        description='"smooth" or "straight" through the stations, "power" from root to tip, or "table"',
    )
    exponent: Annotated[
        float | None,
        BeforeValidator(fit(read_fraction, "a number from 1 to 20", lambda v: 1 <= v <= 20)),
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
        ascending(places, file_units(info))
        return self


class Wing(Record):
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
        ascending(places, file_units(info))
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
            covers(points, (self.stations[0].y, self.stations[-1].y), "stations", ("washout", "points"), info)
        return self


class Skin(Record):
    """The skin between the outer surface and the web."""

    thickness: OneOrRows = Field(
        description="the skin's thickness, a length above 0, or two or more rows [y, thickness]"
    )

    @model_validator(mode="after")
    def _outwards(self, info: ValidationInfo) -> Self:
        if not isinstance(self.thickness, float):
            places = ((("thickness", i), row[0]) for i, row in enumerate(self.thickness))
            ascending(places, file_units(info))
        return self


class Web(Record):
    """The shear web: a flat sheet between upper and lower skin."""

    ends: tuple[Length, Length] = Field(description="the ribs [y1, y2] where the web starts and stops, lengths")
    line: tuple[Inside, Inside] = Field(
        description="the chord fractions [f1, f2] of the web line at its two ends, between 0 and 1"
    )
    thickness: Positive = Field(description="the web sheet's thickness, a length above 0")
    cant: Annotated[Cant, BeforeValidator(read_cant)] = Field(
        default=Cant("angle", 0.0),
        description='degrees, top leaning aft positive; or "square at Y" (to the chord line in rib Y), "least filler", '
        '"least gap"',
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
    angle_step: Annotated[
        float, BeforeValidator(fit(read_angle, "an angle from 0.05 to 45 degrees", lambda v: 0.05 <= v <= 45))
    ] = Field(default=0.5, description="the step to which the saw's angle can be set, from 0.05 to 45 degrees")
    aim: Literal["filler", "gap"] = Field(
        default="filler", description='what a set bevel\'s runs make least: "filler" or the largest "gap"'
    )
    bond: NotNegative = Field(default=0.0, description="the bond line between web and skin, a length of 0 or more")
    foam: Text = Field(description="the web sheet's material, a foam or wood in stock")
    filler: Text = Field(description="what fills the gaps, a filler in stock")
    adhesive: Text = Field(default="laminating epoxy", description="what bonds the web, an adhesive in stock")
    facing: Facing | None = Field(default=None, description="the cloth on both faces of the web, a table [web.facing]")

    @model_validator(mode="after")
    def _outwards(self, info: ValidationInfo) -> Self:
        ascending(((("ends", i), y) for i, y in enumerate(self.ends)), file_units(info))
        if self.ends[1] - self.ends[0] < SHORTEST:
            least, got = (said(v, file_units(info)) for v in (SHORTEST, self.ends[1] - self.ends[0]))
            raise KeyedError(("ends",), f"wanted ribs {least} or more apart, got {got}")
        return self


class Limits(Record):
    """What a choice of web must meet."""

    max_gap: NotNegative | None = Field(default=None, description="the largest gap to be filled, a length")
    max_bevel: Annotated[
        float | None,
        BeforeValidator(fit(read_angle, "an angle from 0 to 45 degrees", lambda v: 0 <= v <= 45)),
    ] = Field(default=None, description="the steepest bevel the workshop can cut, in degrees up to 45")
    min_thickness: NotNegative | None = Field(default=None, description="the thinnest web sheet, a length")
    max_mass: Annotated[float | None, BeforeValidator(fit(read_mass, "a mass above 0", lambda v: v > 0))] = Field(
        default=None, description="the heaviest web, filler and bond line included, in grams where bare"
    )


class Paper(Record):
    """What the templates are printed on, and how true the printer prints."""

    size: Text | None = Field(
        default=None, description='the paper: "a4" to "a0", "letter", "legal", "tabloid" or "roll 610 mm"'
    )
    measured: tuple[Positive, Positive] | None = Field(
        default=None,
        description="what check bars x and y measure on a print made without this key, two lengths [x, y]",
    )

    @model_validator(mode="after")
    def _known(self, info: ValidationInfo) -> Self:
        units = file_units(info)
        try:
            if self.size is not None:
                paper(self.size, units)
        except ValueError as fault:
            raise KeyedError(("size",), f"wanted {fault}") from None
        bar = CHECK_BARS[units]
        for i, length in enumerate(self.measured or ()):
            if abs(length / bar - 1.0) > PRINTERS_OFF:
                wanted = f"a bar within {PRINTERS_OFF:.0%} of {said(bar, units)}, printed unscaled"
                raise KeyedError(("measured", i), f"wanted {wanted}, got {said(length, units)}")
        return self

    def printed(self, units: Units) -> tuple[float, float]:
        """How long the printer makes what should be 1, across the sheet and along it."""
        x, y = self.measured or (CHECK_BARS[units],) * 2
        return x / CHECK_BARS[units], y / CHECK_BARS[units]


class Material(Record):
    """A material of the workshop's own, or figures that override those in stock."""

    kind: Literal["foam", "wood", "filler", "adhesive", "cloth", "strip", "pin"] | None = Field(
        default=None,
        description='for a new material: "foam", "wood" (plywood too), "filler", "adhesive", "cloth", "strip" or "pin"',
    )
    density: Density | None = Field(default=None, description="the density, in kg/m^3 where bare")
    areal_weight: Areal | None = Field(default=None, description="a cloth's dry areal weight, in g/m^2 where bare")
    fibre_density: Density | None = Field(
        default=None, description="the density of a cloth's fibre, in kg/m^3 where bare"
    )
    family: Annotated[str | None, BeforeValidator(read_family)] = Field(
        default=None,
        description="a new foam's family, which says whether a hot wire may touch it: see `wrywing stock foam`",
    )
    sheets: Annotated[tuple[Positive, ...], Field(min_length=1)] | None = Field(
        default=None, description="the sheet thicknesses a foam or wood comes in, one or more lengths in a list"
    )
    diameters: Annotated[tuple[Positive, ...], Field(min_length=1)] | None = Field(
        default=None, description="the diameters a pin comes in, one or more lengths in a list"
    )
    hot_wire: bool | None = Field(default=None, strict=True, description="true or false: may a hot wire touch the foam")
    shear: Stress | None = Field(
        default=None,
        description="the shear strength of a foam, a glue, a pin or a cloth's laminate on the bias, in MPa where bare",
    )
    shear_modulus: Stress | None = Field(
        default=None, description="the shear modulus of a foam or a cloth's laminate on the bias, in MPa where bare"
    )
    fibre_volume: Annotated[
        float | None, BeforeValidator(fit(read_fraction, "a fraction between 0 and 1", lambda v: 0 < v < 1))
    ] = Field(
        default=None,
        description="the fibre's share of the volume of the laminate that a cloth's shear figures are for; that of as "
        "much resin as cloth by mass unless stated",
    )
    compression: Stress | None = Field(
        default=None, description="the compressive strength of a foam or a strip, in MPa where bare"
    )
    tension: Stress | None = Field(default=None, description="the tensile strength of a strip, in MPa where bare")
    modulus: Stress | None = Field(default=None, description="the modulus along a strip, in MPa where bare")
    source: Text | None = Field(default=None, description="where the figures come from, a line of text")


class WingFile(Record):
    """A whole wing file, in mm, degrees and grams."""

    name: Text = Field(description="what the wing is called, a line of text in quotes")
    units: Units = Field(default="mm", description='what a bare length means: "mm" or "in"')
    date: Date | None = Field(default=None, description="the day this revision is of, 2026-03-14 without quotes")
    wing: Wing = Field(description="the panel's outer shape, a table [wing]")
    skin: Skin = Field(description="the skin, a table [skin]")
    web: Web = Field(description="the shear web, a table [web]")
    load: Load | None = Field(default=None, description="what the web has to carry, a table [load]")
    caps: Caps | None = Field(default=None, description="the cap strips on the web's edges, a table [caps]")
    flanges: Flanges | None = Field(default=None, description="what ties web and skin, a table [flanges]")
    joint: Joint | None = Field(default=None, description="the thickened end of the web, a table [joint]")
    cores: tuple[Core, ...] = Field(default=(), description="the foam cores, tables [[cores]]")
    wire: Wire | None = Field(
        default=None, description="the hot wire that cuts the cores, a table [wire]; needed with [[cores]]"
    )
    ribs: Ribs | None = Field(default=None, description="the ribs, a table [ribs]")
    cradles: Cradles | None = Field(
        default=None, description="the saddles that hold the panel while it is bonded, a table [cradles]"
    )
    gauges: Gauges | None = Field(default=None, description="cards that check the bevel, a table [gauges]")
    cutting: Cutting | None = Field(default=None, description="how sheets of stock are cut up, a table [cutting]")
    limits: Limits | None = Field(default=None, description="what a choice of web must meet, a table [limits]")
    paper: Paper = Field(default=Paper(), description="what the templates are printed on, a table [paper]")
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
                limits = f"{said(low, self.units)} to {said(high, self.units)}"
                raise KeyedError(where, f"wanted y within the stations, {limits}, got {said(y, self.units)}")
        if not isinstance(self.skin.thickness, float):
            covers(self.skin.thickness, self.web.ends, "web's ends", ("skin", "thickness"), info)
        return self

    @model_validator(mode="after")
    def _bears(self, info: ValidationInfo) -> Self:
        if self.load is not None:
            load_fits(self.load, self.web.ends, self.wing.stations[-1].y, info)
        if self.caps is not None:
            if self.load is None:
                raise KeyedError(("load",), "is missing, wanted what the cap strips have to carry, a table [load]")
            caps_fit(self.caps, self.web.thickness, self.units)
        return self

    @model_validator(mode="after")
    def _inside(self, info: ValidationInfo) -> Self:
        stations = (self.wing.stations[0].y, self.wing.stations[-1].y)
        cores_fit(self.cores, self.wire, stations, self.web.ends, self.units)
        places = within("ribs", self.ribs, stations, self.units)
        within("cradles", self.cradles, stations, self.units)
        if not isinstance(self.skin.thickness, float):
            for i, core in enumerate(self.cores):
                span = core.ends or (stations if core.region == "whole" else self.web.ends)
                covers(self.skin.thickness, span, f"core {i + 1}'s ends", ("skin", "thickness"), info)
            if self.ribs is not None and self.ribs.outline == "inner":
                covers(self.skin.thickness, (min(places), max(places)), "ribs", ("skin", "thickness"), info)
        return self
