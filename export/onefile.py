"""One file written whole or not at all: what stood there before is kept until the new one is complete."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path

from .folder import FolderError


def require_place(path: Path) -> None:
    """Refuse, before any work is done, a place that cannot take a file.

    Raises
    ------
    FolderError
        If its folder does not exist, or a folder stands there.
    """
    if path.is_dir():
        raise FolderError(f"output file {path}: wanted a file, got a folder")
    if not path.parent.is_dir():
        got = "a file" if path.parent.exists() else "none"
        raise FolderError(f"output file {path}: wanted a folder {path.parent} that exists, got {got}")


_PAGE = b"<!DOCTYPE html>"


def require_page(path: Path) -> None:
    """Refuse a place for a page that is not named like one, or where something other than a page stands.

    Raises
    ------
    FolderError
        Besides what `require_place` refuses.
    """
    require_place(path)
    if path.suffix.lower() not in (".html", ".htm"):
        raise FolderError(f"output file {path}: wanted a name that ends in .html, got {path.name!r}")
    try:
        start = path.read_bytes()[:200] if path.exists() else _PAGE
    except OSError as error:
        raise FolderError(f"output file {path}: wanted to read what stands there, got: {error.strerror}") from error
    if start.strip() and not start.lstrip().upper().startswith(_PAGE.upper()):
        raise FolderError(f"output file {path}: wanted to write there, got a file that is no page; move it away first")


def write(path: Path, content: bytes) -> None:
    """Write a file, in place of one that is there.

    Raises
    ------
    FolderError
        If the disk will not take it.
    """
    require_place(path)
    made = ""
    try:
        handle, made = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name}.")
        with os.fdopen(handle, "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        Path(made).chmod(0o666 & ~_umask())
        Path(made).replace(path)
    except OSError as error:
        if made:
            Path(made).unlink(missing_ok=True)
        raise FolderError(f"output file {path}: wanted to write there, got: {error.strerror or error}") from error


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask
