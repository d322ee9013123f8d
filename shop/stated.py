"""What a wing file states, key by key, in words: lengths in the reader's units."""

from __future__ import annotations

import types
from collections.abc import Callable, Iterator
from contextlib import suppress
from dataclasses import dataclass
from functools import cache
from typing import Annotated, Any, Union, get_args, get_origin

from pydantic import BaseModel, TypeAdapter, ValidationError

from .records.wing import Station
from .values import Allowable, Cant
from .wording import Wording

_PROBES = (1.0, 0.5, [1.0, 1.0])


@dataclass(frozen=True)
class Stated:
    """One key: its value in mm, degrees and grams, what kind of value the record takes, and whether the file has it."""

    value: Any
    kind: Any
    given: bool

    def text(self, words: Wording) -> str:
        """The value in words."""
        return _text(self.kind, self.value, words)


def stated(record: BaseModel, words: Wording, before: str = "") -> Iterator[tuple[str, Stated]]:
    """Every key with its value; a station goes by its y, other tables of a list by their count from 1."""
    for name, field in type(record).model_fields.items():
        value, key = getattr(record, name), f"{before}{name}"
        given = name in record.model_fields_set
        if isinstance(value, BaseModel):
            yield from stated(value, words, f"{key}.")
        elif isinstance(value, dict):
            for inner, table in value.items():
                yield from stated(table, words, f'{key}."{inner}".')
        elif isinstance(value, tuple) and value and isinstance(value[0], BaseModel):
            for i, table in enumerate(value, start=1):
                which = f"y = {words.length(table.y)}" if isinstance(table, Station) else str(i)
                yield from stated(table, words, f"{key}[{which}].")
        elif value is not None and value != () and value != {}:
            kind = Annotated[field.annotation, *field.metadata] if field.metadata else field.annotation
            yield key, Stated(value, kind, given)


def _text(kind: Any, value: Any, words: Wording) -> str:
    if isinstance(value, tuple):
        return f"[{', '.join(_text(part, v, words) for part, v in zip(_parts(kind, value), value, strict=True))}]"
    if isinstance(value, Cant):
        return _cant(value, words)
    if isinstance(value, Allowable):
        return words.force(value.value) if value.kind == "force" else words.stress(value.value)
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, float):
        return _figure(kind, value, words)
    return str(value)


def _figure(kind: Any, value: float, words: Wording) -> str:
    if _is_length(kind):
        return words.length(value)
    said: dict[str, Callable[[float], str]] = {
        "lbf": words.force,
        "psi": words.stress,
        "lb": words.mass,
        "rad": lambda v: f"{v:.6g}°",
        "kg/m^3": lambda v: f"{v:.6g} kg/m^3",
        "g/m^2": lambda v: f"{v:.6g} g/m^2",
    }
    return next((say(value) for unit, say in said.items() if _takes(kind, unit)), f"{value:.6g}")


def _cant(cant: Cant, words: Wording) -> str:
    if cant.kind == "square":
        return f"square at {words.length(cant.value or 0.0)}"
    return cant.kind if cant.value is None else f"{cant.value:g}"


def _bare(kind: Any) -> Any:
    """A kind without `None` among what it may be."""
    while get_origin(kind) in (Union, types.UnionType):
        some = [part for part in get_args(kind) if part is not type(None)]
        if len(some) != 1:
            return kind
        kind = some[0]
    return kind


def _parts(kind: Any, value: tuple[Any, ...]) -> list[Any]:
    """The kind of each part of a list: the same for all where the list is read as a whole."""
    found = _tuple(kind)
    args = get_args(found)
    if found is None or _is_length(kind):
        return [kind] * len(value)
    return [args[0]] * len(value) if len(args) == 2 and args[1] is Ellipsis else list(args)


def _tuple(kind: Any) -> Any:
    """The tuple that a kind stands for, if it stands for one."""
    kind = _bare(kind)
    if get_origin(kind) is tuple:
        return kind
    for part in get_args(kind):
        if (found := _tuple(part)) is not None:
            return found
    return None


@cache
def _takes(kind: Any, unit: str) -> bool:
    """Whether a kind of value may be given in a unit; a mass is, and a number is not, the same in pounds."""
    for size in (0.5, 1, 30, 1000):
        with suppress(ValidationError):
            TypeAdapter(kind).validate_python(f"{size} {unit}", context={"units": "mm"})
            return True
    return False


@cache
def _is_length(kind: Any) -> bool:
    """Whether a bare number means one thing in mm and another in inches, all parts of a list alike."""
    reader = TypeAdapter(kind)
    for probe in _PROBES:
        try:
            in_mm, in_inches = (reader.validate_python(probe, context={"units": units}) for units in ("mm", "in"))
        except ValidationError:
            continue
        if isinstance(in_mm, tuple):
            return all(isinstance(a, float) and a != b for a, b in zip(in_mm, in_inches, strict=True))
        return bool(in_mm != in_inches)
    return False
