"""What stock can bear: strengths and stiffnesses in MPa for what the workshop buys by name.

Common practice, written down from memory and on the low side of what such materials are sold as: good for a first
estimate, no more. A wing file puts its own figures in their place under ``[materials."name"]``.
"""

from __future__ import annotations

# shear strength, compressive strength, shear modulus; for wood across the grain, the grain running along the web
FOAMS: dict[str, tuple[float, float, float]] = {
    "extruded polystyrene 28": (0.15, 0.20, 4.0),
    "extruded polystyrene 33": (0.20, 0.25, 5.0),
    "extruded polystyrene 45": (0.25, 0.40, 8.0),
    "expanded polystyrene 15": (0.05, 0.06, 1.5),
    "expanded polystyrene 20": (0.07, 0.10, 2.5),
    "expanded polystyrene 30": (0.12, 0.17, 4.0),
    "expanded polypropylene 20": (0.05, 0.05, 0.5),
    "expanded polypropylene 30": (0.08, 0.10, 1.0),
    "expanded polypropylene 45": (0.12, 0.15, 2.0),
    "pvc foam 48": (0.50, 0.50, 14.0),
    "pvc foam 60": (0.60, 0.65, 16.0),
    "pvc foam 80": (0.95, 1.10, 23.0),
    "pvc foam 100": (1.40, 1.60, 28.0),
    "pvc foam 130": (1.90, 2.40, 40.0),
    "polyurethane foam 32": (0.13, 0.18, 1.5),
    "polyurethane foam 64": (0.30, 0.45, 4.0),
    "polyurethane foam 96": (0.50, 0.80, 8.0),
    "pet foam 80": (0.45, 0.70, 10.0),
    "pet foam 100": (0.65, 1.10, 16.0),
    "pmi foam 52": (0.70, 0.80, 16.0),
    "pmi foam 75": (1.10, 1.30, 25.0),
    "balsa 100": (0.80, 0.40, 60.0),
    "balsa 160": (1.30, 0.80, 100.0),
    "balsa 220": (2.00, 1.30, 150.0),
    "sitka spruce": (5.00, 2.50, 400.0),
}

# shear strength and shear modulus of a laminate on the bias, by fibre: the first word of a cloth's name; for the fibre
# volume of the usual hand lay-up, as much resin as cloth by mass, the resin's density being RESIN kg/m^3
CLOTHS: dict[str, tuple[float, float]] = {
    "glass": (70.0, 8000.0),
    "carbon": (100.0, 18000.0),
    "aramid": (40.0, 9000.0),
}

RESIN = 1150.0

# shear strength of a bond over a long overlap
ADHESIVES: dict[str, float] = {"laminating epoxy": 6.0, "epoxy glue": 8.0}

# density in kg/m^3, strength in tension and in compression, modulus along the strip
STRIPS: dict[str, tuple[float, float, float, float]] = {
    "pultruded carbon strip": (1550.0, 2070.0, 1500.0, 130000.0),
    "pultruded glass strip": (1950.0, 700.0, 400.0, 38000.0),
    "laid-up carbon strip": (1500.0, 1000.0, 600.0, 100000.0),
    "spruce strip": (430.0, 69.0, 35.0, 9500.0),
}

# shear strength of a solid pin across its axis, for each plane it is sheared in
PINS: dict[str, float] = {"carbon pin": 350.0, "alloy steel pin": 500.0, "aluminium alloy pin": 240.0}
