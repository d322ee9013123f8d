"""Load, strips, flanges, joint, seat, core check, masses and drawings of the richest example; nesting is left out."""

from __future__ import annotations

from timing import EXAMPLES, best

from wrywing.shop import job as jobs
from wrywing.shop.masses import masses
from wrywing.shop.sheets.drawings import drawings


def reckoned() -> jobs.Job:
    job = jobs.load(EXAMPLES / "highmoor.toml")
    masses(job, job.web)
    _ = job.layers, job.strength, job.flanges, job.tube, job.pads
    return job


def main() -> None:
    job = reckoned()
    print(f"read, strips, flanges, joint, web, checks, masses: {best(reckoned):.3f} s")
    print(f"drawings of one hand: {best(lambda: drawings(job)):.3f} s")
    print(f"all of it: {best(lambda: drawings(reckoned())):.3f} s (to reach: under 0.3)")


if __name__ == "__main__":
    main()
