"""Load, strips, seat, core check, masses and drawings of the richest example."""

from __future__ import annotations

from timing import EXAMPLES, best

from wrywing.shop import describe, sheets, weigh
from wrywing.shop import job as jobs


def reckoned() -> jobs.Job:
    job = jobs.load(EXAMPLES / "highmoor.toml")
    weigh.masses(job, job.web)
    describe.facts(job)
    return job


def main() -> None:
    job = reckoned()
    print(f"read, strips, web, checks, masses: {best(reckoned):.3f} s")
    print(f"drawings of one hand: {best(lambda: sheets.drawings(job)):.3f} s")
    print(f"all of it: {best(lambda: sheets.drawings(reckoned())):.3f} s (to reach: under 0.3)")


if __name__ == "__main__":
    main()
