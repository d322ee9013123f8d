"""What every record of the wing file is built on, and what several of them check."""

from __future__ import annotations

from collections.abc import Iterable

from pydantic import BaseModel, ConfigDict, ValidationInfo

from ..units import MM_PER_INCH, Units
from ..values import KeyedError, Where, file_units


class Record(BaseModel):
    """A table of the wing file: what it does not know is an error, and what it holds cannot be changed."""

    model_config = ConfigDict(frozen=True, extra="forbid")


def said(length: float, units: Units) -> str:
    """Length in mm as an error gives it, in the file's units."""
    return f"{length / MM_PER_INCH:.6g} in" if units == "in" else f"{length:.6g} mm"


def ascending(places: Iterable[tuple[Where, float]], units: Units) -> None:
    """Raise a KeyedError at the first y that is not above the one before it."""
    before = -float("inf")
    for where, y in places:
        if y <= before:
            raise KeyedError(where, f"wanted y above the one before, {said(before, units)}, got {said(y, units)}")
        before = y


def covers(
    rows: tuple[tuple[float, float], ...],
    span: tuple[float, float],
    what: str,
    where: Where,
    info: ValidationInfo,
) -> None:
    """Raise a KeyedError if rows [y, value] stop short of the span."""
    low, high, first, last = (said(y, file_units(info)) for y in (*span, rows[0][0], rows[-1][0]))
    if rows[0][0] > span[0] or rows[-1][0] < span[1]:
        raise KeyedError(where, f"wanted rows that cover the {what}, {low} to {high}, got {first} to {last}")
