"""Full-size templates and cutting decisions for the flat web in a twisted composite wing.

>>> import wrywing
>>> job = wrywing.load("wing.toml")          # doctest: +SKIP
>>> job.web.gap, job.verdict.sentence        # doctest: +SKIP
"""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from .shop.job import Job

__version__ = "0.1.0"


def load(path: str | Path, changes: Mapping[str, object] | None = None) -> Job:
    """Read a wing file into a job, whose properties are all that the commands print.

    Parameters
    ----------
    path
        The wing file.
    changes
        Values to take in place of the file's, by key, as they would stand in the file:
        ``{"web.thickness": "1/4 in", "web.line": [0.3, 0.3]}``.

    Raises
    ------
    ValueError
        If the file, or a value, cannot be used; one line that names the file and the key.
    """
    from .shop import job

    return job.load(path, changes)
