"""The output folder: all files of a run appear in it together, and nothing else in it is touched.

A run owns the files that its manifest lists, as long as they are what it wrote. Everything is first written in
full to a folder of its own on the same disk; only then are the files moved in. If a move fails, those made so far
are undone; if the run is killed between two moves, the next run undoes them.
"""

from __future__ import annotations

import hashlib
import json
import os
import shutil
from collections.abc import Iterable, Mapping
from contextlib import suppress
from pathlib import Path

MANIFEST = "manifest.json"
_STAGE = ".wrywing-part"  # what a killed run may leave behind; the next one clears it away
_AWAY = "old"


class FolderError(ValueError):
    """The folder cannot take the files; the message is one line for the user, and nothing was changed."""


def write(folder: Path, files: Mapping[str, bytes], records: Iterable[Mapping[str, str]], *, stamp: str) -> None:
    """Put `files` and their manifest into `folder`; what an earlier run put there and this one does not goes.

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

    Raises
    ------
    FolderError
        If a file of the user's own stands where one is to be written, or the disk will not take them.
    """
    listed = [{**record, "sha256": _sha256(files[record["path"]])} for record in records]
    manifest = json.dumps({"stamp": stamp, "files": listed}, indent=2, ensure_ascii=False) + "\n"
    content = {**files, MANIFEST: manifest.encode()}
    try:
        if folder.exists():
            _renew(folder, content)
        else:
            _create(folder, content)
    except OSError as error:
        raise FolderError(f"output folder {folder}: wanted to write there, got: {error.strerror or error}") from error


def _create(folder: Path, content: Mapping[str, bytes]) -> None:
    """Make the folder whole beside its place, then give it its name."""
    missing = [p for p in folder.parents if not p.exists()]
    nearest = folder.parents[len(missing)]
    if not nearest.is_dir():
        raise FolderError(f"output folder {folder}: wanted a folder at {nearest}, got a file")
    stage = folder.parent / f".{folder.name}{_STAGE}"
    try:
        folder.parent.mkdir(parents=True, exist_ok=True)
        _fill(stage, content)
        stage.rename(folder)
    except BaseException:
        _clear(stage)
        with suppress(OSError):
            for parent in missing:
                parent.rmdir()
        raise


def _renew(folder: Path, content: Mapping[str, bytes]) -> None:
    """Exchange what the last run left in the folder for `content`."""
    if not folder.is_dir():
        raise FolderError(f"output folder {folder}: wanted a folder, got a file")
    stage = folder / _STAGE
    _take_back(folder, stage)
    listed = _listed(folder)
    ours = set() if listed is None else {MANIFEST, *(n for n, sha in listed.items() if _is(folder / n, sha))}
    for name in content:
        if os.path.lexists(folder / name) and name not in ours:
            raise FolderError(
                f"output folder {folder}: wanted to write {name}, got a file there that is not from this program "
                "or was changed since; move it away first"
            )
    try:
        _fill(stage, content)
        (stage / _AWAY).mkdir()
        for name in sorted(ours):
            (folder / name).replace(stage / _AWAY / name)
        for name in content:
            (stage / name).replace(folder / name)
    except BaseException:
        _take_back(folder, stage)
        _clear(stage)
        raise
    _clear(stage)


def _fill(stage: Path, content: Mapping[str, bytes]) -> None:
    _clear(stage)
    stage.mkdir()
    for name, data in content.items():  # the manifest comes last: where it is, the stage is complete
        (stage / name).write_bytes(data)


def _take_back(folder: Path, stage: Path) -> None:
    """Undo the moves of a run that came to an end before its last one, the manifest's."""
    new = _listed(stage)
    if new is None:
        return
    for name, sha in new.items():
        if not (stage / name).exists() and _is(folder / name, sha):
            (folder / name).replace(stage / name)
    for path in sorted((stage / _AWAY).glob("*")):
        if not os.path.lexists(folder / path.name):
            path.replace(folder / path.name)


def _clear(stage: Path) -> None:
    """Remove a stage, first of all what says that it is complete."""
    with suppress(OSError):
        (stage / MANIFEST).unlink(missing_ok=True)
        shutil.rmtree(stage)


def _listed(folder: Path) -> dict[str, str] | None:
    """Names and sums of the files in the folder's manifest; None if there is no manifest of ours."""
    try:
        manifest = json.loads((folder / MANIFEST).read_bytes())
        files = {str(f["path"]): str(f["sha256"]) for f in manifest["files"]}
    except (FileNotFoundError, ValueError, LookupError, TypeError):
        return None
    return {name: sha for name, sha in files.items() if Path(name).name == name}


def _is(path: Path, sha: str) -> bool:
    return path.is_file() and not path.is_symlink() and _sha256(path.read_bytes()) == sha


def _sha256(data: bytes) -> str:
    return hashlib.sha256(data).hexdigest()
