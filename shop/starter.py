"""A commented wing file to start from."""

from __future__ import annotations

from .units import Units

_TEXT = """\
# A wing file for wrywing: one panel, as a right-hand one. Change the figures, then run `wrywing check` on it.
# Bare lengths are in the file's units, angles in degrees. Any figure may carry its own unit, in quotes:
# "0.8 mm", "1/4 in", "1 1/2 in", "24 thou".

name  = "My wing, outer panel"
units = "{units}"           # what a bare length means: "mm" or "in"

[wing]
twist_axis = 0.25        # chord fraction each section turns about
planform   = "straight"  # between the stations: "straight", or "smooth" (a faired curve)

# Two or more stations from the root outwards. x is aft, y out along the span, z up.

[[wing.stations]]
y       = 0
chord   = {chord0}
le      = 0              # how far the leading edge is aft of the panel's origin, before washout
z       = 0              # height of the twist axis
airfoil = "naca 2412"    # four or five digits, or a coordinate file beside this one: "sections/root.dat"
washout = 0.0            # nose down

[[wing.stations]]
y       = {y1}
chord   = {chord1}
le      = {le1}
airfoil = "naca 2412"
washout = 1.5

[[wing.stations]]
y       = {y2}
chord   = {chord2}
le      = {le2}
airfoil = "naca 0012"
washout = 6.0

[wing.washout]
law = "smooth"           # through the stations' values: "smooth" or "straight"; or
                         # "power" (root to tip, with exponent = 2.4); or
                         # "table" (points = [[y, degrees], ...], and no washout at the stations)

[skin]
thickness = {skin}          # or a table: [[y, thickness], ...]

[web]
ends      = [0, {end}]    # ribs where the web starts and stops
line      = [0.30, 0.30] # chord fractions it runs through there
thickness = {web}
cant      = 0            # degrees, top leaning aft; or "square at {y1}", "least filler", "least gap"
edge      = "full bevel" # or "square", or "set bevel" with runs = 3
bond      = {bond}          # glue line between web and skin
foam      = "pvc foam 80"
filler    = "microballoon paste"

[limits]                 # `wrywing weigh` marks the lightest web that keeps to these
max_gap   = {gap}
max_bevel = 15
"""

_FIGURES: dict[Units, dict[str, str]] = {
    "mm": {
        "chord0": "480", "chord1": "400", "chord2": "260", "y1": "900", "y2": "1800", "le1": "160", "le2": "340",
        "skin": "1.0", "end": "1760", "web": "8", "bond": "0.3", "gap": "1.0",
    },
    "in": {
        "chord0": "19", "chord1": "16", "chord2": "10", "y1": "36", "y2": "72", "le1": "6.5", "le2": "13.5",
        "skin": "0.04", "end": "70", "web": '"1/4 in"', "bond": "0.01", "gap": "0.04",
    },
}  # fmt: skip


def text(units: Units = "mm") -> str:
    """The file's text, in millimetres or in inches."""
    return _TEXT.format(units=units, **_FIGURES[units])
