"""What the workshop buys: sheets, fillers, adhesives, cloths, strips, pins and paper, each figure with its source.

Names are generic; a wing file adds its own or overrides a figure under ``[materials."name"]``.
"""

from __future__ import annotations

import difflib
import math
from collections.abc import Mapping
from dataclasses import dataclass, field, fields, replace
from typing import Any, TypeVar

from . import strengths
from .units import MM_PER_INCH, Units, length, shown

PRACTICE = "common practice"
OWN = "the wing file"


@dataclass(frozen=True)
class Family:
    """A family of sheet materials: may a hot wire touch it, and why; usual sheets of both systems, in mm."""

    hot_wire: bool
    why: str
    sheets_mm: tuple[float, ...]
    sheets_in: tuple[float, ...]


@dataclass(frozen=True)
class Foam:
    """Sheet material for a web or a core, foam or light wood: kg/m^3, sheet thicknesses in mm, strengths in MPa."""

    name: str
    density: float
    family: str
    sheets_mm: tuple[float, ...]
    sheets_in: tuple[float, ...]
    hot_wire: bool
    why: str
    source: str = PRACTICE
    shear: float | None = None
    compression: float | None = None
    shear_modulus: float | None = None


@dataclass(frozen=True)
class Filler:
    """A resin paste that fills gaps: density in kg/m^3 as mixed."""

    name: str
    density: float
    source: str = PRACTICE


@dataclass(frozen=True)
class Adhesive:
    """A laminating resin or glue, cured: density in kg/m^3, shear strength of a bond in MPa."""

    name: str
    density: float
    source: str = PRACTICE
    shear: float | None = None


@dataclass(frozen=True)
class Cloth:
    """A reinforcing cloth: dry areal weight in g/m^2, density of the fibre itself in kg/m^3.

    Shear strength and modulus, MPa, are those of a laminate on the bias with `fibre_volume` of its volume fibre; unless
    stated that of the usual hand lay-up, as much resin as cloth by mass.
    """

    name: str
    areal_weight: float
    fibre_density: float
    source: str = PRACTICE
    shear: float | None = None
    shear_modulus: float | None = None
    fibre_volume: float | None = None

    @property
    def bears_at(self) -> float:
        """The fibre's share of the volume of the laminate that the shear figures are for.

        >>> round(Stock().find("glass cloth 105", Cloth).bears_at, 4)
        0.3108
        """
        return self.fibre_volume or strengths.RESIN / (strengths.RESIN + self.fibre_density)


@dataclass(frozen=True)
class Strip:
    """Material of a cap strip: density in kg/m^3; strength in tension and compression and modulus along it, MPa."""

    name: str
    density: float
    tension: float
    compression: float
    modulus: float
    source: str = PRACTICE


@dataclass(frozen=True)
class Pin:
    """Material of a joint's pin: shear strength across it in MPa; diameters in mm, the usual ones if there are none."""

    name: str
    shear: float
    source: str = PRACTICE
    diameters: tuple[float, ...] | None = None

    def sizes(self, units: Units) -> tuple[float, ...]:
        """Diameters in mm it comes in, thinnest first; usual ones of the mm or the inch system."""
        return tuple(sorted(self.diameters or (PINS_IN if units == "in" else PINS_MM)))


@dataclass(frozen=True)
class Paper:
    """A sheet of paper, upright: width and height in mm; a roll's height has no end."""

    name: str
    width: float
    height: float
    source: str


Material = Foam | Filler | Adhesive | Cloth | Strip | Pin
_M = TypeVar("_M", bound=Material)
KINDS: dict[str, type[Material]] = {
    "foam": Foam,
    "wood": Foam,
    "filler": Filler,
    "adhesive": Adhesive,
    "cloth": Cloth,
    "strip": Strip,
    "pin": Pin,
}
STRENGTHS = ("shear", "compression", "tension", "shear_modulus", "modulus")
LIGHTER = 0.9  # of stock's density: what is lighter still does not bear what stock says
NEEDED = {
    "cloth": ("areal_weight", "fibre_density"),
    "strip": ("density", "tension", "compression", "modulus"),
    "pin": ("shear",),
}


def _inches(*sizes: float) -> tuple[float, ...]:
    return tuple(round(size * MM_PER_INCH, 4) for size in sizes)


USUAL_MM = (3.0, 4.0, 5.0, 6.0, 8.0, 10.0, 12.0, 15.0, 20.0, 25.0, 30.0)
USUAL_IN = _inches(1 / 8, 3 / 16, 1 / 4, 3 / 8, 1 / 2, 5 / 8, 3 / 4, 1)
PINS_MM = (3.0, 4.0, 5.0, 6.0, 8.0, 10.0, 12.0, 14.0, 16.0, 20.0)
PINS_IN = _inches(1 / 8, 3 / 16, 1 / 4, 5 / 16, 3 / 8, 7 / 16, 1 / 2, 5 / 8, 3 / 4)
_ONLY = "only polystyrene and polypropylene foams are cut with a hot wire"
_FUMES = "cut with a hot wire in moving air: its fumes are harmful too"

# Sheet thicknesses and what a hot wire does to each family: common practice.
FAMILIES: dict[str, Family] = {
    "extruded polystyrene": Family(
        True, _FUMES, (3, 6, 10, 20, 30, 40, 50, 60, 80, 100), _inches(1 / 4, 1 / 2, 3 / 4, 1, 1.5, 2)
    ),
    "expanded polystyrene": Family(
        True, _FUMES, (10, 20, 30, 40, 50, 60, 80, 100), _inches(1 / 2, 3 / 4, 1, 1.5, 2, 3, 4)
    ),
    "expanded polypropylene": Family(
        True, _FUMES, (3, 5, 6, 8, 10, 15, 20, 30, 40), _inches(1 / 8, 1 / 4, 3 / 8, 1 / 2, 3 / 4, 1, 1.5, 2)
    ),
    "cross-linked PVC": Family(
        False, f"PVC foam gives off poisonous gas under a hot wire; {_ONLY}", USUAL_MM, USUAL_IN
    ),
    "polyurethane": Family(
        False,
        f"polyurethane foam gives off poisonous gas under a hot wire; {_ONLY}",
        (5, 10, 15, 20, 25, 30, 40, 50),
        _inches(1 / 4, 3 / 8, 1 / 2, 3 / 4, 1, 1.5, 2),
    ),
    "PET": Family(
        False,
        f"what PET foam gives off under a hot wire is harmful; {_ONLY}",
        (5, 8, 10, 12, 15, 20, 25, 30),
        _inches(1 / 4, 3 / 8, 1 / 2, 3 / 4, 1),
    ),
    "PMI": Family(
        False,
        f"PMI foam gives off poisonous gas under a hot wire; {_ONLY}",
        (2, 3, 4, 5, 6, 8, 10, 12, 15, 20),
        _inches(1 / 8, 3 / 16, 1 / 4, 3 / 8, 1 / 2, 3 / 4),
    ),
    "wood": Family(
        False,
        f"wood chars under a hot wire and can catch fire; {_ONLY}",
        (1, 1.5, 2, 2.5, 3, 4, 5, 6, 8, 10, 12, 15, 20),
        _inches(1 / 32, 1 / 16, 3 / 32, 1 / 8, 3 / 16, 1 / 4, 3 / 8, 1 / 2, 3 / 4),
    ),
    "other": Family(False, f"what this material gives off under a hot wire is not known; {_ONLY}", USUAL_MM, USUAL_IN),
}


def _foam(name: str, family: str, density: float, source: str = PRACTICE) -> Foam:
    kin = FAMILIES[family]
    bears = strengths.FOAMS.get(name, ())
    return Foam(name, density, family, kin.sheets_mm, kin.sheets_in, kin.hot_wire, kin.why, source, *bears)


# The number in a foam's name is its density in kg/m^3, in a cloth's its areal weight in g/m^2.
_FOAMS: tuple[Foam, ...] = (
    *(_foam(f"extruded polystyrene {d}", "extruded polystyrene", d) for d in (28, 33, 45)),
    *(_foam(f"expanded polystyrene {d}", "expanded polystyrene", d) for d in (15, 20, 30)),
    *(_foam(f"expanded polypropylene {d}", "expanded polypropylene", d) for d in (20, 30, 45)),
    *(_foam(f"pvc foam {d}", "cross-linked PVC", d) for d in (48, 60, 80, 100, 130)),
    *(_foam(f"polyurethane foam {d}", "polyurethane", d) for d in (32, 64, 96)),
    *(_foam(f"pet foam {d}", "PET", d) for d in (80, 100)),
    *(_foam(f"pmi foam {d}", "PMI", d) for d in (52, 75)),
    *(_foam(f"balsa {d}", "wood", d) for d in (100, 160, 220)),
    _foam("sitka spruce", "wood", 430),
)
_FILLERS = (
    Filler("microballoon paste", 600),
    Filler("cotton-fibre paste", 1150),
    Filler("cotton and microballoon paste", 850),
    Filler("silica-thickened epoxy", 1200),
)
_ADHESIVES = tuple(
    Adhesive(name, density, shear=strengths.ADHESIVES[name])
    for name, density in (("laminating epoxy", 1150), ("epoxy glue", 1200))
)
_CLOTHS = tuple(
    Cloth(f"{fibre} cloth {w}", w, density, PRACTICE, *strengths.CLOTHS[fibre])
    for fibre, density, weights in (
        ("glass", 2550, (25, 49, 80, 105, 160, 200, 280)),
        ("carbon", 1780, (93, 160, 200)),
        ("aramid", 1440, (61, 110, 170)),
    )
    for w in weights
)
_STRIPS = tuple(Strip(name, *figures) for name, figures in strengths.STRIPS.items())
_PINS = tuple(Pin(name, shear) for name, shear in strengths.PINS.items())

_ALL: tuple[Material, ...] = (*_FOAMS, *_FILLERS, *_ADHESIVES, *_CLOTHS, *_STRIPS, *_PINS)
_USUAL = {material.name: material for material in _ALL}

CHECK_BARS: dict[Units, float] = {"mm": 100.0, "in": 4.0 * MM_PER_INCH}  # printed on every page, mm
_ISO, _ASME = "ISO 216", "ASME Y14.1"
PAPERS: dict[str, Paper] = {
    paper.name: paper
    for paper in (
        Paper("a4", 210, 297, _ISO),
        Paper("a3", 297, 420, _ISO),
        Paper("a2", 420, 594, _ISO),
        Paper("a1", 594, 841, _ISO),
        Paper("a0", 841, 1189, _ISO),
        Paper("letter", 215.9, 279.4, _ASME),
        Paper("legal", 215.9, 355.6, PRACTICE),
        Paper("tabloid", 279.4, 431.8, _ASME),
    )
}


@dataclass(frozen=True)
class Lighter:
    """A material that a wing file states lighter than stock has it: kg/m^3, and the strengths it states none of."""

    own: float
    usual: float
    strengths: tuple[str, ...]


class MaterialError(ValueError):
    """What is wrong with one figure of a wing file's material; `key` names the figure."""

    def __init__(self, key: str, text: str) -> None:
        super().__init__(text)
        self.key = key


@dataclass(frozen=True)
class Stock:
    """Everything that can be asked for by name; capitals and spacing do not matter.

    Examples
    --------
    >>> stock = Stock().with_material("PVC foam 80", {"density": 83.0})
    >>> stock.find("pvc foam 80", Foam).density, stock.find("pvc foam 80", Foam).hot_wire
    (83.0, False)
    """

    materials: Mapping[str, Material] = field(default_factory=lambda: _USUAL)
    stated: Mapping[str, frozenset[str]] = field(default_factory=dict)

    def origin(self, name: str, figure: str) -> str:
        """Where a figure of a material comes from: ``the wing file`` or ``stock``."""
        return OWN if figure in self.stated.get(_plain(name), ()) else "stock"

    def lighter(self, name: str) -> Lighter | None:
        """A material of stock that the wing file makes lighter, by more than a tenth, without all of its strengths."""
        usual, own = _USUAL.get(_plain(name)), self.materials.get(_plain(name))
        figure = "fibre_density" if isinstance(usual, Cloth) else "density"
        high, low = getattr(usual, figure, None), getattr(own, figure, None)
        if high is None or low is None or low >= LIGHTER * high:
            return None
        missing = tuple(key for key in STRENGTHS if hasattr(own, key) and self.origin(name, key) != OWN)
        return Lighter(low, high, missing) if missing else None

    def find(self, name: str, kind: type[_M]) -> _M:
        """Material of that name and kind; ValueError with the nearest known names if there is none."""
        found = self.materials.get(_plain(name))
        if isinstance(found, kind):
            return found
        names = [known for known, material in self.materials.items() if isinstance(material, kind)]
        got = f"{shown(name)}, which is {_a(kind_of(found))}" if found else shown(name)
        kinds = [of for of, made in KINDS.items() if made is kind]
        near = f"nearest: {_nearest(name, names)}; `wrywing stock {kinds[0]}` lists them"
        raise ValueError(f"a known {' or '.join(kinds)}, got {got} ({near})")

    def with_material(self, name: str, given: Mapping[str, Any]) -> Stock:
        """Stock with a new material, or with figures of a known one overridden.

        Parameters
        ----------
        name : str
            As it stands in the wing file.
        given : mapping
            Only what is stated there: `kind` (needed for a new material) and any of `density` and
            `fibre_density` in kg/m^3, `areal_weight` in g/m^2, `sheets` and `diameters` in mm, `family`, `hot_wire`,
            `source`, strengths and moduli in MPa, and `fibre_volume`, a share.

        Raises
        ------
        MaterialError
            A figure is missing, out of place or unsafe; its text says what was wanted and what was got.
        """
        figures = dict(given)
        known = self.materials.get(_plain(name))
        kind = figures.pop("kind", known and kind_of(known))
        if kind is None:
            raise MaterialError("kind", f"is missing, wanted {_or(KINDS)}, as {shown(name)} is not in stock")
        if known and KINDS[kind] is not type(known):
            raise MaterialError("kind", f"wanted {kind_of(known)!r}, as stock has this name, got {kind!r}")
        stated = self.stated.get(_plain(name), frozenset()) | figures.keys()
        made = _overridden(known, figures) if known else _new(kind, _plain(name), figures)
        return Stock({**self.materials, made.name: made}, {**self.stated, made.name: stated})


def usual_sheets(units: Units, low: float = 3.0, high: float = 20.0, foam: Foam | None = None) -> tuple[float, ...]:
    """Sheet thicknesses in mm that shops of the mm or the inch system keep, from `low` to `high` mm.

    >>> usual_sheets("in", high=10.0)
    (3.175, 4.7625, 6.35, 9.525)
    """
    metric, inch = (foam.sheets_mm, foam.sheets_in) if foam else (USUAL_MM, USUAL_IN)
    return tuple(float(size) for size in (inch if units == "in" else metric) if low <= size <= high)


def paper(name: str, units: Units = "mm") -> Paper:
    """Find a paper by its name, capitals or not, or make a roll of a stated width; ValueError if there is none.

    >>> paper("A4").height, paper("roll 24 in").width, paper("Roll 610").width
    (297, 609.6, 610.0)
    """
    plain = _plain(name)
    kind, _, wide = plain.partition(" ")
    try:
        if kind != "roll":
            return PAPERS[plain]
        if (width := length(wide, units)) > 0.0:
            return Paper(plain, width, math.inf, OWN)
    except (LookupError, ValueError):
        pass
    raise ValueError(f'a paper size, {_or(PAPERS)}, or a roll with its width, "roll 610 mm", got {shown(name)}')


def _new(kind: str, name: str, figures: dict[str, Any]) -> Material:
    """Make a material that stock does not have."""
    for key in NEEDED.get(kind, ("density",)):
        if key not in figures:
            raise MaterialError(key, f"is missing, wanted for a new {kind}")
    if KINDS[kind] is Foam:
        family = figures.pop("family", "wood" if kind == "wood" else "other")
        if kind == "wood" and family != "wood":
            raise MaterialError("family", f'wanted none, or "wood", for a wood, got {shown(family)}')
        return _overridden(_foam(name, family, figures["density"]), figures)
    _refuse_strays(KINDS[kind], figures)
    return KINDS[kind](name, **{"source": OWN, **figures})


def _overridden(known: Material, figures: dict[str, Any]) -> Material:
    """Material with some figures changed; their source is the wing file. A lighter foam loses stock's strengths."""
    _refuse_strays(type(known), figures)
    changes = {"source": known.source if not figures else OWN, **figures}
    if isinstance(known, Foam):
        if figures.get("density", known.density) < LIGHTER * known.density:
            changes = {key: None for key in STRENGTHS if hasattr(known, key)} | changes
        if figures.get("family", known.family) != known.family:
            got = figures["family"]
            raise MaterialError("family", f"wanted {known.family!r}, as stock has this name, got {got!r}")
        if figures.get("hot_wire") and not FAMILIES[known.family].hot_wire:
            raise MaterialError("hot_wire", f"wanted false, got true: {FAMILIES[known.family].why}")
        if figures.get("hot_wire") is False and known.hot_wire:
            changes["why"] = "the wing file says so"
        if "sheets" in changes:
            changes["sheets_mm"] = changes["sheets_in"] = tuple(sorted(changes.pop("sheets")))
    return replace(known, **changes)


def _refuse_strays(kind: type[Material], figures: Mapping[str, Any]) -> None:
    allowed = {f.name for f in fields(kind)} | ({"sheets"} if kind is Foam else set())
    for key in figures:
        if key not in allowed:
            raise MaterialError(key, f"wanted none for {_a(kind.__name__.lower())}, got {shown(figures[key])}")


def kind_of(material: Material) -> str:
    """What kind of material one is, a key of `KINDS`: a wood is a foam that no hot wire may touch."""
    wood = isinstance(material, Foam) and material.family == "wood"
    return "wood" if wood else type(material).__name__.lower()


def _a(noun: str) -> str:
    return f"an {noun}" if noun[0] in "aeiou" else f"a {noun}"


def _or(names: Mapping[str, object]) -> str:
    *most, last = (f'"{name}"' for name in names)
    return f"{', '.join(most)} or {last}"


def _plain(name: str) -> str:
    return " ".join(name.lower().split())


def _nearest(name: str, names: list[str]) -> str:
    near = difflib.get_close_matches(_plain(name), names, n=3, cutoff=0.4) or names[:3]
    return ", ".join(f'"{known}"' for known in near)
