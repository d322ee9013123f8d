"""Where along the chord should the web stand? A sweep that no command makes, by wrywing's own functions.

Run it on any wing file: ``python examples/sweep.py examples/saltpan.toml``.
"""

from __future__ import annotations

import sys

import wrywing


def main(path: str) -> None:
    """Move the web line from 20 to 50 % of the chord, and print what comes of it."""
    print("chord  height   bevel, deg   largest gap  filler    web")
    for percent in range(20, 51, 5):
        fraction = percent / 100.0
        try:
            job = wrywing.load(path, {"web.line": [fraction, fraction]})
            facts = job.facts
        except ValueError as fault:  # one line that names the file and the key
            print(f"{percent:3d} %  {fault}")
            continue
        steepest = max(abs(angle) for angle in (*facts.bevel_top, *facts.bevel_bottom))
        print(
            f"{percent:3d} %  {facts.heights[0]:5.1f} mm {steepest:9.2f} {facts.gap:13.2f} mm "
            f"{facts.filler:6.2f} g {facts.mass:7.1f} g"
        )


if __name__ == "__main__":
    main(sys.argv[1] if len(sys.argv) > 1 else "examples/saltpan.toml")
