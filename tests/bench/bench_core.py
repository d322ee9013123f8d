"""Cores of the published wing to 0.2 mm: bays, templates and a machine's path."""

from __future__ import annotations

import tempfile
from pathlib import Path

from timing import best, nasa

from wrywing.export import wire
from wrywing.shop import job as jobs
from wrywing.shop.sheets.core import core_boards

_CORE = """
[[cores]]
region = "{region}"
foam = "extruded polystyrene 33"
tolerance = 0.2
longest = 1000
kerf = [0.8, 0.9]
passes = "{passes}"
"""
_WIRE = """
[wire]
diameter = 0.4
speed = 4
planes = [-200, 1200]
place = [400, 200]
travel = [1500, 700]
"""


def main() -> None:
    with tempfile.TemporaryDirectory() as folder:
        path = nasa(Path(folder))
        cores = _CORE.format(region="nose", passes="one") + _CORE.format(region="aft", passes="separate")
        path.write_text(path.read_text() + cores + _WIRE)

        def cut() -> None:
            job = jobs.load(path)
            core_boards(job)
            for found in job.wire_paths:
                wire.to_rs274(job, found, "right")
                wire.to_csv(job, found, "right")

        took = best(cut, 3)
        job = jobs.load(path)
    for made in job.cores:
        print(f"core {made.stated.region}: {len(made.bays)} bays, off by at most {abs(made.worst.off):.3f} mm")
    print(f"load, cores, templates and paths: {took:.2f} s (to reach: under 1)")


if __name__ == "__main__":
    main()
