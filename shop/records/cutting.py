"""The wing file's records of what the sheets of stock are cut to: their sizes, scarfs, allowances, and bevel gauges."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Any, Literal

from pydantic import BeforeValidator, Field

from ..stock import Foam
from ..values import NotNegative, Positive, Text, Where, fit, read_fraction
from .base import Record


class StockSheet(Record):
    """A size in which a sheet material is bought."""

    material: Text = Field(description="what it is made of, a foam or wood in stock")
    size: tuple[Positive, Positive] = Field(
        description="its length along grain or roll and its width across, two lengths above 0"
    )
    thickness: Positive | None = Field(
        default=None, description="the thickness that comes in this size, a length above 0; all of them unless stated"
    )


class CutFrom(Record):
    """What ribs or cradles are cut from."""

    material: Text = Field(description="what they are cut from, a foam or wood in stock")
    thickness: Positive = Field(description="the thickness of that sheet, a length above 0")


class Cutting(Record):
    """How pieces are cut from sheets of stock."""

    sheets: tuple[StockSheet, ...] = Field(
        default=(), description="the sizes of sheets that are bought, tables [[cutting.sheets]]"
    )
    scarf: Annotated[float, BeforeValidator(fit(read_fraction, "a number from 2 to 40", lambda v: 2 <= v <= 40))] = (
        Field(default=10.0, description="the slope of a scarf: its length over the sheet's thickness, from 2 to 40")
    )
    apart: NotNegative = Field(default=6.0, description="what is left between pieces, a length of 0 or more")
    margin: NotNegative = Field(default=5.0, description="what is left along a sheet's edges, a length of 0 or more")
    turn: bool = Field(
        default=True, strict=True, description="true or false: may a piece lie the other way round along the grain"
    )
    allowance: Annotated[
        float, BeforeValidator(fit(read_fraction, "a fraction from 0 to 3", lambda v: 0 <= v <= 3))
    ] = Field(default=0.2, description='what is mixed beyond what is needed, a fraction from 0 to 3, such as "20 %"')
    ribs: CutFrom | None = Field(default=None, description="what ribs are cut from, a table [cutting.ribs]")
    cradles: CutFrom | None = Field(default=None, description="what cradles are cut from, a table [cutting.cradles]")


class Gauges(Record):
    """Cards that check the bevel on the real piece."""

    places: Annotated[tuple[NotNegative, ...], Field(min_length=1)] | None = Field(
        default=None,
        description="places along the web line, lengths from its inner end; a handful, or the middle of each run of a "
        "set bevel, unless stated",
    )
    face: Literal["front", "rear"] = Field(
        default="rear", description='the face of the web that the cards bear on: "front" or "rear"'
    )


def sheets_asked(cutting: Cutting | None) -> Iterator[tuple[Where, Any, str]]:
    """What the table asks of stock: (key, kind, name)."""
    if cutting is None:
        return
    for i, sheet in enumerate(cutting.sheets):
        yield ("cutting", "sheets", i, "material"), Foam, sheet.material
    for key in ("ribs", "cradles"):
        if (cut := getattr(cutting, key)) is not None:
            yield ("cutting", key, "material"), Foam, cut.material
