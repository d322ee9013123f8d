"""A thousand candidates on the published wing."""

from __future__ import annotations

import resource
import sys
import tempfile
import time
from pathlib import Path

import numpy as np
from timing import nasa

from wrywing.shop import job as jobs
from wrywing.shop import weigh


def main() -> None:
    with tempfile.TemporaryDirectory() as folder:
        job = jobs.load(nasa(Path(folder)))
        sheets = list(np.linspace(3.0, 14.0, 12))
        cants: list[float | str] = list(np.linspace(-9.0, 9.0, 28))
        start = time.perf_counter()
        found = list(weigh.candidates(job, sheets, weigh.TREATMENTS, cants))
        took = time.perf_counter() - start
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / (1024.0 if sys.platform != "darwin" else 1024.0**2)
    print(f"{len(found)} candidates: {took:.2f} s (to reach: under 2), peak memory {peak:.0f} MB (under 500)")


if __name__ == "__main__":
    main()
