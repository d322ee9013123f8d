"""The report of each example and of a wing file with every table: time of the whole process, and size."""

from __future__ import annotations

import sys
import tempfile
from pathlib import Path

from timing import EXAMPLES, process


def main() -> None:
    from richest import richest

    wrywing = str(Path(sys.executable).parent / "wrywing")
    with tempfile.TemporaryDirectory() as folder:
        out = Path(folder) / "report.html"
        for wing in (*sorted(EXAMPLES.glob("*.toml")), richest(Path(folder))):
            took = process(wrywing, "report", str(wing), "--out", str(out))
            size = out.stat().st_size / 1e6
            print(f"{wing.name}: {took:.2f} s, {size:.1f} MB (to reach: under 5 s and 6 MB)")


if __name__ == "__main__":
    main()
