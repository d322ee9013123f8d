"""A folder exchanged for another in one step: whoever looks, and whenever the program is killed, sees one or the other.

The new folder is made in full beside the old one: what the user keeps there is linked into it, not copied. Then the two
change names, in one step where the platform can (Linux, macOS). Elsewhere it takes two renames; a program killed
between them leaves no folder at its place, and the next run puts the old one back.
"""

from __future__ import annotations

import ctypes
import os
import shutil
import sys
from collections.abc import Collection, Mapping
from contextlib import suppress
from itertools import islice
from pathlib import Path

_MOST = 5000  # files in a folder that is exchanged
_AT_CWD, _EXCHANGE, _SWAP = -100, 2, 2  # AT_FDCWD, RENAME_EXCHANGE of Linux, RENAME_SWAP of macOS


def recover(folder: Path) -> None:
    """Put right what a killed run left beside `folder`."""
    new, old = _beside(folder)
    if os.path.lexists(old) and not os.path.lexists(folder):
        old.rename(folder)
    for leftover in (new, old):
        remove(leftover)


def create(folder: Path, content: Mapping[str, bytes]) -> None:
    """Make a folder that is not there yet, with those above it, complete from its first moment.

    Raises
    ------
    OSError
        If it cannot be made; then nothing is left of it.
    """
    missing = [p for p in folder.parents if not p.exists()]
    new, _ = _beside(folder)
    try:
        folder.parent.mkdir(parents=True, exist_ok=True)
        new.mkdir()
        _fill(new, content)
        new.rename(folder)
    except BaseException:
        remove(new)
        with suppress(OSError):
            for parent in missing:
                parent.rmdir()
        raise


def renew(folder: Path, content: Mapping[str, bytes], ours: Collection[str]) -> bool:
    """Exchange `folder` for one with `content` in place of the files named in `ours`, and all else as it was.

    Returns
    -------
    bool
        False, and nothing is changed, if this folder is not to be exchanged: it is where the program or its shell
        stands, the root of a disk, in use (Windows), in a place where nothing may be written, on a disk without links,
        or holds thousands of the user's own files.
    """
    if os.path.ismount(folder) or folder in (_here(), *_here().parents):
        return False
    if len(list(islice(folder.rglob("*"), _MOST))) == _MOST:
        return False
    new, old = _beside(folder)
    try:
        new.mkdir()
        _link_all(folder, new, ours)
        _fill(new, content)
        if not _exchange(folder, new):
            _rename_both(folder, new, old)
            new = old
    except OSError:
        remove(new)
        return False
    except BaseException:
        remove(new)
        raise
    _carry(new, folder, ours)
    remove(new)
    return True


def remove(folder: Path) -> None:
    """Remove a folder as far as that can be done; the next run tries again."""
    shutil.rmtree(folder, ignore_errors=True)


def _beside(folder: Path) -> tuple[Path, Path]:
    """Where the new folder is made, and where the old one waits if the exchange takes two steps."""
    return folder.parent / f".{folder.name}.wrywing-new", folder.parent / f".{folder.name}.wrywing-old"


def _here() -> Path:
    """The current folder, as a shell that stands in it would be left behind in the old one."""
    try:
        return Path.cwd().resolve()
    except OSError:
        return Path()


def _fill(folder: Path, content: Mapping[str, bytes]) -> None:
    for name, data in content.items():
        (folder / name).write_bytes(data)


def _link_all(old: Path, new: Path, but: Collection[str] = ()) -> None:
    """Link everything of one folder but what is named into another, and make that one look like the first."""
    for entry in os.scandir(old):
        there = new / entry.name
        if entry.name in but:
            continue
        if entry.is_dir(follow_symlinks=False):
            there.mkdir()
            _link_all(Path(entry.path), there)
        elif entry.is_symlink():
            there.symlink_to(Path(entry.path).readlink())
        else:
            os.link(entry.path, there)
    shutil.copystat(old, new)
    if sys.platform != "win32":
        with suppress(PermissionError):
            os.chown(new, old.stat().st_uid, old.stat().st_gid)


def _exchange(one: Path, other: Path) -> bool:
    """Let two folders change names in one step, where the platform can."""
    if sys.platform == "win32":
        return False
    libc = ctypes.CDLL(None)
    a, b = os.fsencode(one), os.fsencode(other)
    if hasattr(libc, "renameat2"):
        return bool(libc.renameat2(_AT_CWD, a, _AT_CWD, b, ctypes.c_uint(_EXCHANGE)) == 0)
    return bool(hasattr(libc, "renamex_np") and libc.renamex_np(a, b, ctypes.c_uint(_SWAP)) == 0)


def _rename_both(folder: Path, new: Path, old: Path) -> None:
    folder.rename(old)
    try:
        new.rename(folder)
    except BaseException:
        old.rename(folder)
        raise


def _carry(old: Path, folder: Path, but: Collection[str] = ()) -> None:
    """Bring along what was put into the old folder, or saved anew there, while the new one was being made."""
    for entry in os.scandir(old):
        there = folder / entry.name
        if entry.name in but:
            continue
        if entry.is_dir(follow_symlinks=False) and there.is_dir():
            _carry(Path(entry.path), there)
        elif not os.path.lexists(there) or not os.path.samestat(entry.stat(follow_symlinks=False), there.lstat()):
            Path(entry.path).replace(there)
