"""The output folder: all files of a run appear in it together, and nothing else in it is touched.

A run owns the files that its manifest lists, as long as they are what it wrote.
"""

from __future__ import annotations

import errno
import os
from collections.abc import Iterable, Mapping
from pathlib import Path

from . import manifest, moves, swap


class FolderError(ValueError):
    """The folder cannot take the files; the message is one line for the user, and nothing was changed."""


def write(folder: Path, files: Mapping[str, bytes], records: Iterable[Mapping[str, str]], *, stamp: str) -> int:
    """Put `files` and their manifest into `folder`; what an earlier run put there and this one does not goes.

    A run that is killed leaves what stood there before or all that is new; see `swap`, and `moves` for the few folders
    that cannot be exchanged as a whole, where that holds as soon as the next run has begun.

    Parameters
    ----------
    folder
        Made if it is missing, with the folders above it.
    files
        Plain file names and what goes into them.
    records
        For each file its ``path`` (a key of `files`), ``format``, ``drawing`` and ``hand``; the manifest adds
        its ``sha256``.
    stamp
        The wing file's revision.

    Returns
    -------
    int
        How many files of an earlier run went, as this one does not make them.

    Raises
    ------
    FolderError
        If a file of the user's own stands where one is to be written, or the disk will not take them.
    """
    content = {**files, manifest.NAME: manifest.text(files, records, stamp=stamp)}
    try:
        place = folder.resolve()
        swap.recover(place)
        if place.exists():
            return _renew(folder, place, content)
        _create(folder, place, content)
        return 0
    except OSError as error:
        raise FolderError(f"output folder {folder}: wanted to write there, got: {error.strerror or error}") from error


def _create(folder: Path, place: Path, content: Mapping[str, bytes]) -> None:
    nearest = next(p for p in place.parents if p.exists())
    if not nearest.is_dir():
        raise FolderError(f"output folder {folder}: wanted a folder at {nearest}, got a file")
    swap.create(place, content)


def _renew(folder: Path, place: Path, content: Mapping[str, bytes]) -> int:
    if not place.is_dir():
        raise FolderError(f"output folder {folder}: wanted a folder, got a file")
    if not os.access(place, os.W_OK):
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES))
    moves.recover(place)
    ours = manifest.ours(place)
    for name in content:
        if os.path.lexists(place / name) and name not in ours:
            raise FolderError(
                f"output folder {folder}: wanted to write {name}, got a file there that is not from this program "
                "or was changed since; move it away first"
            )
    if not swap.renew(place, content, ours):
        moves.renew(place, content, ours)
    return sum(name not in content for name in ours)
