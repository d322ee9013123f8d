"""A wing file with every table in it: the sailplane of the examples, and what it does not state itself."""

from __future__ import annotations

import shutil
from pathlib import Path

EXAMPLES = Path(__file__).parent.parent / "examples"

_MORE = {
    "[[cores]]": """
[[cores]]
region    = "nose"
foam      = "extruded polystyrene 33"
tolerance = "0.3 mm"
longest   = 30
kerf      = ["1 mm", "1.2 mm"]
[[cores]]
region    = "aft"
foam      = "extruded polystyrene 33"
bays      = 5
kerf      = "1 mm"
passes    = "separate"
least_thickness = "1.5 mm"
""",
    "[wire]": """
[wire]
diameter = "0.5 mm"
""",
    "[ribs]": """
[ribs]
at        = [0, 54]
thickness = "1/8 in"
corner    = "1/4 in"
""",
    "[cradles]": """
[cradles]
height = 3
""",
    "[cutting]": """
[cutting]
[[cutting.sheets]]
material  = "pvc foam 80"
size      = [48, 24]
thickness = "3/8 in"
""",
}


def richest(folder: Path) -> Path:
    """Write it into a folder, with the section files it names."""
    shutil.copytree(EXAMPLES, folder / "examples")
    path = folder / "examples" / "richest.toml"
    text = (EXAMPLES / "highmoor.toml").read_text(encoding="utf-8")
    more = (more for table, more in _MORE.items() if table not in text)
    path.write_text(text + "".join(more), encoding="utf-8")
    return path
