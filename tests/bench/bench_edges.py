"""Edges of the published wing, and whole processes against what Python needs to import its libraries."""

from __future__ import annotations

import sys
import tempfile
from pathlib import Path

import numpy as np
from timing import best, nasa, process

from wrywing.geom import web
from wrywing.shop import job as jobs


def main() -> None:
    with tempfile.TemporaryDirectory() as folder:
        path = nasa(Path(folder))
        job = jobs.load(path)
        plane, n = job.web.plane, np.array([-0.5, 0.5]) * job.record.web.thickness
        s = np.linspace(0.0, plane.length, 400)[:, None]
        took = best(lambda: [web.edge(job.loft, plane, s, n, side) for side in web.SIDES])
        print(f"edges at 400 places, two faces, both edges: {took * 1000:.1f} ms (to reach: under 100)")
        imports = process(sys.executable, "-c", "import numpy, scipy.interpolate, shapely")
        wrywing = str(Path(sys.executable).parent / "wrywing")
        for words, limit in ((("bevels", str(path)), 4), (("--help",), 1)):
            ratio = process(wrywing, *words) / imports
            print(f"wrywing {words[0]}: {ratio:.2f} x the imports' {imports:.2f} s (to reach: under {limit})")
        took = process(wrywing, "templates", str(path), "--out", str(Path(folder) / "out"))
        print(f"wrywing templates in three formats: {took:.2f} s (to reach: under 3)")


if __name__ == "__main__":
    main()
