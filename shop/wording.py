"""Figures as the builder reads them: in the wing file's units, with the digits that matter in a workshop."""

from __future__ import annotations

from dataclasses import dataclass

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
_MM2_PER_SQUARE_FOOT = (12.0 * MM_PER_INCH) ** 2


@dataclass(frozen=True)
class Wording:
    """Lengths, areas and masses in words.

    Examples
    --------
    >>> Wording("in").length(6.35), Wording("mm").length(6.35)
    ('0.25 in', '6.35 mm')
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
        return _tidy(f"{mm / MM_PER_INCH if self.units == 'in' else mm:.{digits}f}")

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
        value, unit = (mpa * PSI_PER_MPA, "psi") if self.units == "in" else (mpa, "MPa")
        return f"{float(f'{value:.3g}'):,g} {unit}"

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


def _tidy(text: str) -> str:
    """`text` without the minus sign of a rounded nought."""
    return text[1:] if text.startswith("-") and not text.strip("-0.") else text
