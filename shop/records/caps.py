"""The wing file's records of what bears the load: facings, cap strips with their cover, and the load itself."""

from __future__ import annotations

from typing import Annotated, Literal, Self

from pydantic import BeforeValidator, Discriminator, Field, Tag, ValidationInfo, model_validator

from ..units import Units
from ..values import (
    TAGS,
    Allowable,
    Areal,
    KeyedError,
    Length,
    Mass,
    NotNegative,
    Positive,
    Stress,
    Text,
    file_units,
    fit,
    read_allowable,
    read_force,
    read_fraction,
    read_moment,
)
from .base import Record, ascending, covers, said

Force = Annotated[float, BeforeValidator(fit(read_force, "a force of 0 or more", lambda v: v >= 0))]
Moment = Annotated[float, BeforeValidator(fit(read_moment, "a moment of 0 or more", lambda v: v >= 0))]
Share = Annotated[float, BeforeValidator(fit(read_fraction, "a number of 0 or more", lambda v: v >= 0))]
ForceRows = Annotated[tuple[tuple[Length, Force], ...], Field(min_length=2)]
MomentRows = Annotated[tuple[tuple[Length, Moment], ...], Field(min_length=2)]
ShareRows = Annotated[tuple[tuple[Length, Share], ...], Field(min_length=2)]
Layers = Annotated[int, Field(strict=True, ge=1, le=100)]
Resin = Annotated[float, BeforeValidator(fit(read_fraction, "a fraction from 0 to 0.95", lambda v: 0 <= v <= 0.95))]
SpanLoad = Annotated[
    Annotated[Literal["elliptic", "bell", "uniform"], Tag(TAGS[0])] | Annotated[ShareRows, Tag(TAGS[1])],
    Discriminator(lambda value: TAGS[isinstance(value, list)]),
]


class Facing(Record):
    """Cloth laid on both faces of the web."""

    cloth: Text | None = Field(default=None, description="the cloth's name in stock")
    areal_weight: Areal | None = Field(
        default=None, description="in place of a cloth: dry areal weight of one layer, in g/m^2 where bare"
    )
    layers: Layers = Field(description="the layers on each face, a whole number of 1 or more")
    resin_fraction: Resin = Field(
        default=0.5, description="the resin's share of the facing's mass, from 0 to 0.95; it adds mass, no strength"
    )

    @model_validator(mode="after")
    def _one_weight(self) -> Self:
        if self.cloth is None and self.areal_weight is None:
            raise KeyedError(("cloth",), "is missing, wanted a cloth, or areal_weight in its place")
        if self.cloth is not None and self.areal_weight is not None:
            raise KeyedError(("areal_weight",), f"wanted none beside a cloth, got {self.areal_weight:g}")
        return self


class Load(Record):
    """What the web has to carry at limit load: a span load, bending moments, or cap forces."""

    span_load: SpanLoad | None = Field(
        default=None,
        description='how the lift lies along the span: "elliptic", "bell", "uniform", or two or more rows '
        "[distance from the centreline, load] of which only the ratios count",
    )
    mass: Mass | None = Field(default=None, description="the aircraft's mass, in grams where bare")
    load_factor: Annotated[
        float | None, BeforeValidator(fit(read_fraction, "a number above 0, up to 20", lambda v: 0 < v <= 20))
    ] = Field(default=None, description="the limit load factor, a number above 0, up to 20")
    semi_span: Positive | None = Field(
        default=None, description="from the aircraft's centreline to the wing tip, a length above 0"
    )
    inboard: NotNegative | None = Field(
        default=None,
        description="how far out from the centreline the panel's y = 0 stands, a length; "
        "unless stated the last station is the wing tip",
    )
    moments: MomentRows | None = Field(
        default=None,
        description="in place of a span load: two or more rows [y, bending moment], in N m where bare; the moment in "
        "the web's own plane, which on a swept web is larger than that about the rib plane",
    )
    cap_forces: ForceRows | None = Field(
        default=None, description="in place of a span load: two or more rows [y, cap force], in newtons where bare"
    )
    ultimate_factor: Annotated[
        float, BeforeValidator(fit(read_fraction, "a number from 1 to 10", lambda v: 1 <= v <= 10))
    ] = Field(default=1.5, description="ultimate over limit load, a number from 1 to 10")

    @model_validator(mode="after")
    def _one_load(self, info: ValidationInfo) -> Self:
        given = [key for key in ("span_load", "moments", "cap_forces") if getattr(self, key) is not None]
        if not given:
            raise KeyedError(("span_load",), "is missing, wanted a span load, or moments or cap_forces in its place")
        if len(given) > 1:
            raise KeyedError((given[1],), f"wanted none beside {given[0]}")
        for key in ("mass", "load_factor", "semi_span", "inboard"):
            stated = getattr(self, key) is not None
            if stated and self.span_load is None:
                raise KeyedError((key,), f"wanted only with a span_load, got {given[0]}")
            if not stated and self.span_load is not None and key != "inboard":
                raise KeyedError((key,), f"is missing, wanted {type(self).model_fields[key].description}")
        self._rows(given[0], info)
        return self

    def _rows(self, key: str, info: ValidationInfo) -> None:
        rows = getattr(self, key)
        if isinstance(rows, str):
            return
        ascending((((key, i), row[0]) for i, row in enumerate(rows)), file_units(info))
        if not any(row[1] for row in rows):
            raise KeyedError((key,), "wanted a load somewhere, got 0 in every row")
        if key == "span_load" and self.semi_span is not None:
            covers(rows, (0.0, self.semi_span), "semi-span", (key,), info)
            if rows[0][0] < 0 or rows[-1][0] > self.semi_span:
                tip = said(self.semi_span, file_units(info))
                raise KeyedError((key,), f"wanted rows from the centreline, 0, to the semi-span, {tip}")


class Cover(Facing):
    """Cloth laid over the cap strips, between them and the skin."""

    layers: Layers = Field(description="the layers over the strips of each edge, a whole number of 1 or more")
    resin_fraction: Resin = Field(default=0.5, description="the resin's share of the cover's mass, from 0 to 0.95")
    thickness: Positive | None = Field(
        default=None, description="the cover's thickness as laid, a length; from the cloth unless stated"
    )

    @model_validator(mode="after")
    def _thick(self) -> Self:
        if self.cloth is None and self.thickness is None:
            raise KeyedError(("thickness",), "is missing, wanted the cover's thickness, as no cloth is named")
        return self


class Caps(Record):
    """The cap strips on both edges of the web, all of one size."""

    strip: Text = Field(description="what the strips are made of, a strip in stock")
    width: Positive = Field(
        description="the width of one strip, a length above 0; those beside one another no wider than the web's sheet"
    )
    thickness: Positive = Field(description="the thickness of one strip, a length above 0")
    beside: int = Field(
        default=1, strict=True, ge=1, description="the strips side by side in a layer, a whole number of 1 or more"
    )
    allowable: Annotated[Allowable | None, BeforeValidator(read_allowable)] = Field(
        default=None,
        description="what one strip carries at ultimate load, a force or stress; from stock unless stated",
    )
    compression: Annotated[Allowable | None, BeforeValidator(read_allowable)] = Field(
        default=None,
        description="what one strip carries in compression, as in the top cap, a force or stress; "
        "the same as allowable where that is stated",
    )
    bond_shear: Stress | None = Field(
        default=None, description="what the bond of a strip carries in shear, a stress; from stock unless stated"
    )
    glue: NotNegative = Field(default=0.0, description="the glue line under each layer, a length of 0 or more")
    step: Positive | None = Field(
        default=None, description="strips stop at multiples of this length; 10 mm or 1/2 in unless stated"
    )
    ramp: Positive | None = Field(
        default=None, description="the length over which a strip's end is feathered; 10 thicknesses unless stated"
    )
    most: int = Field(
        default=20,
        strict=True,
        ge=1,
        le=200,
        description="the most layers of strips at either edge, a whole number from 1 to 200",
    )
    cover: Cover | None = Field(default=None, description="the cloth over the strips, a table [caps.cover]")


def load_fits(load: Load, ends: tuple[float, float], tip: float, info: ValidationInfo) -> None:
    """Raise a KeyedError if a load does not reach as far as the web, or its span is shorter than the panel."""
    for key in ("moments", "cap_forces"):
        if (rows := getattr(load, key)) is not None:
            covers(rows, ends, "web's ends", ("load", key), info)
    if load.semi_span is None:
        return
    last, inboard = (tip, 0.0) if load.inboard is None else (ends[1], load.inboard)
    if load.semi_span < inboard + last:
        least, got = (said(v, file_units(info)) for v in (inboard + last, load.semi_span))
        what = "last station" if load.inboard is None else "web's outer end"
        raise KeyedError(("load", "semi_span"), f"wanted one that reaches the {what}, {least} or more, got {got}")


def caps_fit(caps: Caps, sheet: float, units: Units) -> None:
    """Raise a KeyedError, with the remedy, if the strips are wider than the sheet they lie on."""
    if caps.beside * caps.width > sheet * (1.0 + 1e-9):
        wide = said(caps.width, units) if caps.beside == 1 else f"{caps.beside} x {said(caps.width, units)}"
        fewer = ", fewer side by side" if caps.beside > 1 else ""
        raise KeyedError(
            ("caps", "width"),
            f"wanted strips no wider than the web sheet, {said(sheet, units)}, got {wide}: "
            f"take narrower strips{fewer} or a sheet of {said(caps.beside * caps.width, units)} or more",
        )
