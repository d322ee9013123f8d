"""Quantities as a builder writes them, read into mm, degrees, grams, kg/m^3, g/m^2, N, N m, MPa and fractions.

A bare number is in the unit of its kind (lengths: the wing file's own); a string may carry a unit. Mixed
fractions and the inch mark are read here; pint, slow to import, is asked only about a unit that the kind does
not list.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from typing import Any, Literal

Units = Literal["mm", "in"]
GRAM = 1e-6  # what a mm^3 weighs at 1 kg/m^3, or a mm^2 at 1 g/m^2
MM_PER_INCH = 25.4

_NUMBER = re.compile(
    r"""(?P<sign>[+-]?)\s*
    (?: (?:(?P<whole>[0-9]+)(?:\s+|-))? (?P<top>[0-9]+) \s*/\s* (?P<bottom>[0-9]+)  # 1/4, 1 1/2, 1-1/2
      | (?P<plain>(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?) )
    \s*(?P<unit>.*)""",
    re.VERBOSE,
)
# One digit to an exponent: pint would try to work out mm**9**9**9.
_FACTOR = r"[A-Za-zµ°%]+(?:\s*(?:\^|\*\*)\s*-?[1-9]|[²³])?"
_UNIT = re.compile(rf"{_FACTOR}(?:\s*[*/\s]\s*{_FACTOR}){{0,5}}")


@dataclass(frozen=True)
class Kind:
    """A kind of quantity: what to call it, the unit it is kept in, the units known without asking pint."""

    noun: str
    unit: str
    examples: str
    known: Mapping[str, float]

    @property
    def wanted(self) -> str:
        """What an error says was wanted."""
        return f"{self.noun} such as {self.examples}"


LENGTH = Kind("a length", "mm", '6, "0.8 mm" or "1/4 in"', {"mm": 1.0, "in": MM_PER_INCH})
ANGLE = Kind("an angle", "deg", '3 or "3 deg"', {"deg": 1.0, "°": 1.0})
MASS = Kind("a mass", "g", '250 (grams), "0.25 kg" or "9 oz"', {"g": 1.0, "kg": 1000.0})
DENSITY = Kind("a density", "kg/m^3", '80 (kg/m^3), "1.15 g/cm^3" or "5 lb/ft^3"', {"kg/m^3": 1.0})
AREAL = Kind("an areal weight", "g/m^2", '105 (g/m^2) or "3 oz/yd^2"', {"g/m^2": 1.0})
FORCE = Kind("a force", "N", '4000 (newtons) or "900 lbf"', {"N": 1.0})
MOMENT = Kind("a moment", "N*m", '300 (N m) or "220 lbf ft"', {"N m": 1.0, "N*m": 1.0})
STRESS = Kind("a stress", "MPa", '60 (MPa) or "8700 psi"', {"MPa": 1.0})
FRACTION = Kind("a fraction", "", '0.25 or "25 %"', {"%": 0.01})


def length(value: object, units: Units = "mm") -> float:
    """Read a length in mm; a bare number is in `units`.

    Parameters
    ----------
    value : object
        A number, or a string with or without a unit.
    units : {"mm", "in"}
        What a bare number means.

    Returns
    -------
    float
        Millimetres.

    Raises
    ------
    ValueError
        One line, what was wanted and what was got: not a number, not finite, another dimension.

    Examples
    --------
    >>> length("1 1/2 in"), length('3/8"'), length("24 thou"), length(2, "in")
    (38.1, 9.525, 0.6096, 50.8)
    """
    return _read(value, LENGTH, bare=MM_PER_INCH if units == "in" else 1.0)


def angle(value: object) -> float:
    """Read an angle in degrees, bare or with a unit; errors as `length`."""
    return _read(value, ANGLE)


def mass(value: object) -> float:
    """Read a mass in grams, bare or with a unit; errors as `length`."""
    return _read(value, MASS)


def density(value: object) -> float:
    """Read a density in kg/m^3, bare or with a unit; errors as `length`."""
    return _read(value, DENSITY)


def areal(value: object) -> float:
    """Read an areal weight in g/m^2, bare or with a unit; errors as `length`."""
    return _read(value, AREAL)


def force(value: object) -> float:
    """Read a force in newtons, bare or with a unit; errors as `length`."""
    return _read(value, FORCE)


def moment(value: object) -> float:
    """Read a moment in N m, bare or with a unit; errors as `length`."""
    return _read(value, MOMENT)


def stress(value: object) -> float:
    """Read a stress in MPa, bare or with a unit; errors as `length`."""
    return _read(value, STRESS)


def fraction(value: object) -> float:
    """Read a plain fraction, or one in percent; errors as `length`."""
    return _read(value, FRACTION)


def shown(value: object) -> str:
    """Short form of what a user gave, on one line, for an error.

    >>> shown("3 kg"), shown(True), shown({"y": 0}), shown([{"y": 0}])
    ("'3 kg'", 'true', 'a table', 'a list of 1 table')
    """
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, list) and value and all(isinstance(item, dict) for item in value):
        return f"a list of {len(value)} table{'s' * (len(value) > 1)}"
    try:
        text = repr(value) if isinstance(value, str | int | float | list) else str(value)
    except ValueError:  # Python writes no integer of more than 4300 digits
        return "a number too long to show"
    return text if len(text) <= 60 else f"{text[:56]} ..."


def _read(value: object, kind: Kind, bare: float = 1.0) -> float:
    """Value in the kind's unit; `bare` is the scale of a number without one."""
    try:
        number, unit = _split(value)
        scale = _scale(unit, kind) if unit else bare
        # Fourteen digits: 1 1/2 in is 38.1, not 38.099999999999994.
        result = number if scale == 1.0 else float(f"{number * scale:.14g}")
    except (ValueError, ArithmeticError):
        result = math.nan
    if not math.isfinite(result):
        point = ", with a decimal point" if isinstance(value, str) and re.search(r"\d,\d", value) else ""
        raise ValueError(f"{kind.wanted}{point}, got {shown(value)}")
    return result


def _split(value: object) -> tuple[float, str]:
    """Return number and unit text; ValueError or ArithmeticError where there is no number."""
    if isinstance(value, int | float) and not isinstance(value, bool):
        return float(value), ""
    if not isinstance(value, str):
        raise ValueError
    text = value.strip().replace("−", "-")
    match = _NUMBER.fullmatch(text.replace('"', " in").replace("″", " in"))
    if match is None:
        raise ValueError
    if match["plain"]:
        size = float(match["plain"])
    else:
        size = float(match["whole"] or 0) + float(match["top"]) / float(match["bottom"])
    return -size if match["sign"] == "-" else size, match["unit"]


def _scale(unit: str, kind: Kind) -> float:
    """How many of the kind's unit one `unit` is."""
    if unit in kind.known:
        return kind.known[unit]
    if not kind.unit or len(unit) > 60 or not _UNIT.fullmatch(unit):
        raise ValueError
    return _ask_pint(unit, kind.unit)


@cache
def _ask_pint(unit: str, target: str) -> float:
    registry = _registry()
    try:
        (scale, root), (target_scale, target_root) = (
            registry.get_root_units(registry.parse_units(text)) for text in (unit, target)
        )
    except Exception as error:  # what pint raises has no common base: AssertionError, TokenError, ...
        raise ValueError from error
    if root != target_root:  # root units, not dimensions: pint gives an angle none
        raise ValueError
    return float(scale) / float(target_scale)


@cache
def _registry() -> Any:
    import pint

    return pint.UnitRegistry(cache_folder=None)
