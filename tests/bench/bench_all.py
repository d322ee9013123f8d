"""Everything for both hands, in all flat formats and meshes, for each example; the richest one has a time to reach."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
import tempfile
import time
from pathlib import Path

from timing import EXAMPLES

FORMATS = "dxf,svg,pdf,csv,nc,stl,3mf,glb"


def run(wing: Path, out: Path) -> tuple[float, float, int]:
    """Seconds, peak memory in MB and number of files of one run."""
    wrywing = str(Path(sys.executable).parent / "wrywing")
    start = time.perf_counter()
    words = [wrywing, "templates", str(wing), "--out", str(out), "--hand", "right,left", "--formats", FORMATS]
    child = subprocess.Popen(words, stdout=subprocess.DEVNULL)
    _, status, usage = os.wait4(child.pid, 0)
    took = time.perf_counter() - start
    if status:
        raise SystemExit(f"{wing.name}: exit status {status}")
    files = len(json.loads((out / "manifest.json").read_text())["files"])
    return took, usage.ru_maxrss / (1024.0 if sys.platform != "darwin" else 1024.0**2), files


def main() -> None:
    found = {}
    for wing in sorted(EXAMPLES.glob("*.toml")):
        with tempfile.TemporaryDirectory() as folder:
            runs = []
            for _ in range(3):
                out = Path(folder) / "out"
                shutil.rmtree(out, ignore_errors=True)
                runs.append(run(wing, out))
            found[wing.name] = min(runs)
    richest = max(found, key=lambda name: found[name][2])
    for name, (took, peak, files) in found.items():
        goal = " (to reach: under 8 s and 600 MB)" if name == richest else ""
        print(f"{name}: {files} files in {took:.2f} s, peak memory {peak:.0f} MB{goal}")


if __name__ == "__main__":
    main()
