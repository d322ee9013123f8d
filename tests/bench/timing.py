"""Small helpers of the bench scripts."""

from __future__ import annotations

import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

HERE = Path(__file__).parent
EXAMPLES = HERE.parent.parent / "examples"
sys.path.insert(0, str(HERE.parent))


def best(action: Callable[[], object], times: int = 5) -> float:
    """Shortest of several runs, seconds."""
    taken = []
    for _ in range(times):
        start = time.perf_counter()
        action()
        taken.append(time.perf_counter() - start)
    return min(taken)


def process(*command: str) -> float:
    """Shortest of several runs of a whole process, seconds."""
    return best(lambda: subprocess.run(command, check=True, capture_output=True), 5)


def nasa(folder: Path) -> Path:
    """Wing file of the published wing."""
    import kernel

    path = folder / "nasa.toml"
    path.write_text(kernel.wing_file_text(kernel.NASA_WING, kernel.Web()))
    return path
