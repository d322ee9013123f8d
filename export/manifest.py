"""The manifest: what a run wrote, and by that what the next run may take away."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable, Mapping
from pathlib import Path

NAME = "manifest.json"


def text(files: Mapping[str, bytes], records: Iterable[Mapping[str, str]], *, stamp: str) -> bytes:
    """The manifest of `files`: each record with the sum of its file, named by its ``path``."""
    listed = [{**record, "sha256": _sha256(files[record["path"]])} for record in records]
    return (json.dumps({"stamp": stamp, "files": listed}, indent=2, ensure_ascii=False) + "\n").encode()


def listed(folder: Path) -> dict[str, str] | None:
    """Names and sums of the files in the folder's manifest; None if there is no manifest of ours."""
    try:
        manifest = json.loads((folder / NAME).read_bytes())
        files = {str(f["path"]): str(f["sha256"]) for f in manifest["files"]}
    except (FileNotFoundError, ValueError, LookupError, TypeError):
        return None
    return {name: sha for name, sha in files.items() if Path(name).name == name}


def ours(folder: Path) -> frozenset[str]:
    """Names of the files in a folder that are as a run of the program wrote them."""
    files = listed(folder)
    if files is None:
        return frozenset()
    return frozenset({NAME, *(name for name, sha in files.items() if same(folder / name, sha))})


def same(path: Path, sha: str) -> bool:
    """Whether a file is there with that sum."""
    return path.is_file() and not path.is_symlink() and _sha256(path.read_bytes()) == sha


def _sha256(data: bytes) -> str:
    return hashlib.sha256(data).hexdigest()
