"""Figures as the builder reads them: in the wing file's units, with the digits that matter in a workshop."""

from __future__ import annotations

import math
from dataclasses import dataclass
from fractions import Fraction

from .units import MM_PER_INCH, Units

GRAMS_PER_OUNCE = 28.349523125
NEWTONS_PER_POUND = 4.4482216152605
PSI_PER_MPA = 145.03773773
CAUTION = (
    "an estimate, no proof of airworthiness: your country's rules, a licensed engineer and a proof load "
    "come before flight"
)
CAUTIONS = (
    "Foam dust, resins, hot wires and aircraft structure hurt people: wear a mask, gloves and eye protection.",
    "PVC and polyurethane foams give off poisonous gas under a hot wire: only polystyrene and polypropylene foams are "
    "cut that way, in moving air.",
    "Nothing here is proof of airworthiness: the rules of your own country, a licensed engineer and a proof load come "
    "before flight.",
)
_DENSITY = 0.016 * GRAMS_PER_OUNCE / (0.012 * MM_PER_INCH) ** 3  # kg/m^3 in 1 lb/ft^3
_AREAL = GRAMS_PER_OUNCE / (0.036 * MM_PER_INCH) ** 2  # g/m^2 in 1 oz/yd^2
_HALF_UP = 1e-9  # mm or in: 5/16 in is 0.313 in, as every drill chart has it, though Python would round it to even
_PARTS = 64  # of an inch, the finest that is marked
_MM2_PER_SQUARE_FOOT = (12.0 * MM_PER_INCH) ** 2


@dataclass(frozen=True)
class Wording:
    """Lengths, areas and masses in words.

    Examples
    --------
    >>> Wording("in").length(6.35), Wording("mm").length(6.35), Wording("in").length(7.9375)
    ('0.25 in', '6.35 mm', '0.313 in')
    """

    units: Units

    @property
    def length_unit(self) -> str:
        """The unit of lengths as a word of a sentence."""
        return "inches" if self.units == "in" else "mm"

    @property
    def mass_unit(self) -> str:
        """Grams, or ounces in a wing file in inches."""
        return "oz" if self.units == "in" else "g"

    def length(self, mm: float) -> str:
        """Length with its unit, without needless noughts."""
        return f"{self.plain(mm)} {self.units}"

    def plain(self, mm: float) -> str:
        """Length without its unit or needless noughts: 0.01 mm or 0.001 in."""
        text = self.column(mm, 3 if self.units == "in" else 2)
        return text.rstrip("0").rstrip(".") if "." in text else text

    def column(self, mm: float, digits: int | None = None) -> str:
        """Length without its unit, always as many digits, for a column: 0.01 mm or 0.001 in unless told otherwise."""
        if digits is None:
            digits = 3 if self.units == "in" else 2
        value = mm / MM_PER_INCH if self.units == "in" else mm
        return _tidy(f"{value + math.copysign(_HALF_UP, value):.{digits}f}")

    def size(self, mm: float) -> str:
        """Size of what is bought, without its unit: in inches a fraction, as drills and sheets are marked.

        >>> Wording("in").size(7.9375), Wording("in").size(38.1), Wording("in").size(7.0), Wording("mm").size(1.5)
        ('5/16', '1 1/2', '0.276', '1.5')
        """
        parts = mm / MM_PER_INCH * _PARTS
        if self.units != "in" or abs(parts - round(parts)) > 1e-3:
            return self.plain(mm)
        whole, rest = divmod(round(parts), _PARTS)
        words = [str(whole)] * bool(whole or not rest) + [str(Fraction(rest, _PARTS))] * bool(rest)
        return " ".join(words)

    def area(self, mm2: float) -> str:
        """Area in square metres or square feet."""
        if self.units == "in":
            return f"{mm2 / _MM2_PER_SQUARE_FOOT:.2f} sq ft"
        return f"{mm2 * 1e-6:.3f} m²"

    def area_bought(self, mm2: float) -> tuple[float, str]:
        """Area to buy and its unit: square metres or square feet.

        >>> amount, unit = Wording("in").area_bought(92903.04)
        >>> round(amount, 6), unit
        (1.0, 'sq ft')
        """
        return (mm2 / _MM2_PER_SQUARE_FOOT, "sq ft") if self.units == "in" else (mm2 * 1e-6, "m²")

    def volume_bought(self, mm3: float) -> tuple[float, str]:
        """Volume to buy and its unit: cubic centimetres or cubic inches.

        >>> amount, unit = Wording("in").volume_bought(16387.064)
        >>> round(amount, 6), unit
        (1.0, 'cu in')
        """
        return (mm3 / MM_PER_INCH**3, "cu in") if self.units == "in" else (mm3 * 1e-3, "cm³")

    def moment(self, newton_mm: float) -> str:
        """Moment in newton metres or pounds times feet."""
        if self.units == "in":
            return f"{newton_mm / NEWTONS_PER_POUND / (12.0 * MM_PER_INCH):.0f} lbf ft"
        return f"{newton_mm * 1e-3:.1f} N m"

    def mass(self, grams: float) -> str:
        """Mass with its unit."""
        return f"{self.mass_column(grams)} {self.mass_unit}"

    def force(self, newtons: float) -> str:
        """Force in newtons, or pounds-force in a wing file in inches.

        >>> Wording("in").force(4448.2), Wording("mm").force(4448.2)
        ('1000 lbf', '4448 N')
        """
        return f"{newtons / NEWTONS_PER_POUND:.0f} lbf" if self.units == "in" else f"{newtons:.0f} N"

    def stress(self, mpa: float) -> str:
        """Stress in MPa, or psi in a wing file in inches; three digits count.

        >>> Wording("in").stress(147.4), Wording("mm").stress(147.4)
        ('21,400 psi', '147 MPa')
        """
        return f"{self.stress_column(mpa)} {self.stress_unit}"

    @property
    def stress_unit(self) -> str:
        """MPa, or psi in a wing file in inches."""
        return "psi" if self.units == "in" else "MPa"

    def stress_column(self, mpa: float) -> str:
        """Stress without its unit."""
        return _three(mpa * PSI_PER_MPA if self.units == "in" else mpa)

    def density(self, kg_per_m3: float) -> tuple[str, str]:
        """Density and its unit: kg/m³ or pounds a cubic foot.

        >>> Wording("in").density(80.0), Wording("mm").density(80.0)
        (('4.99', 'lb/ft³'), ('80', 'kg/m³'))
        """
        return (_three(kg_per_m3 / _DENSITY), "lb/ft³") if self.units == "in" else (_three(kg_per_m3), "kg/m³")

    def areal_weight(self, g_per_m2: float) -> tuple[str, str]:
        """Weight of a cloth and its unit: g/m² or ounces a square yard.

        >>> Wording("in").areal_weight(105.0), Wording("mm").areal_weight(105.0)
        (('3.1', 'oz/yd²'), ('105', 'g/m²'))
        """
        return (_three(g_per_m2 / _AREAL), "oz/yd²") if self.units == "in" else (_three(g_per_m2), "g/m²")

    def mass_column(self, grams: float) -> str:
        """Mass without its unit: 0.1 g or 0.01 oz."""
        return _tidy(f"{grams / GRAMS_PER_OUNCE:.2f}" if self.units == "in" else f"{grams:.1f}")


def degrees(angle: float, digits: int = 1) -> str:
    """Angle with its sign and the degree mark.

    >>> degrees(4.26), degrees(-0.04), degrees(-3.0, 2)
    ('+4.3°', '0.0°', '-3.00°')
    """
    text = _tidy(f"{angle:.{digits}f}")
    return f"{text}°" if text.startswith("-") or not text.strip("0.") else f"+{text}°"


def _three(value: float) -> str:
    """Three digits that count, without needless noughts; thousands apart."""
    rounded = float(f"{value:.3g}")
    return f"{rounded:,.0f}" if abs(rounded) >= 100.0 else f"{rounded:g}"


def _tidy(text: str) -> str:
    """`text` without the minus sign of a rounded nought."""
    return text[1:] if text.startswith("-") and not text.strip("-0.") else text
