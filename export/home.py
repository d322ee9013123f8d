"""Folders for what the libraries keep between runs, where the user's own cannot be used."""

from __future__ import annotations

import atexit
import logging
import os
import shutil
import tempfile
from collections.abc import Iterator
from pathlib import Path

_FOLDERS = {"XDG_CONFIG_HOME": ".config", "XDG_CACHE_HOME": ".cache"}  # XDG Base Directory Specification


def provide() -> None:
    """Point the libraries that draw to a passing folder if the home folder cannot be read or written.

    They read settings from there, and ezdxf and matplotlib keep lists of fonts; without it they stop or complain as
    soon as they are imported.
    """
    # a first run may take its time to look for fonts: no cause for alarm
    logging.getLogger("matplotlib.font_manager").setLevel(logging.ERROR)
    poor = list(_poor())
    if not poor:
        return
    passing = tempfile.mkdtemp(prefix="wrywing-")
    atexit.register(shutil.rmtree, passing, ignore_errors=True)
    os.environ.update(dict.fromkeys(poor, passing))
    os.environ.setdefault("MPLCONFIGDIR", passing)


def _poor() -> Iterator[str]:
    """Variables that name, or leave to be guessed, a folder that cannot be used."""
    try:
        home = Path.home()
        readable = home.is_dir() and os.access(home, os.R_OK | os.X_OK)
    except (OSError, RuntimeError):  # RuntimeError: nobody knows where it is
        readable = False
    if not readable:
        yield "HOME"
    for name, folder in _FOLDERS.items():
        stated = os.environ.get(name)
        if not (_writable(Path(stated)) if stated else readable and _writable(home / folder)):
            yield name


def _writable(folder: Path) -> bool:
    """Whether a folder, made if need be as the libraries would, can be read and written."""
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError:
        return False
    return os.access(folder, os.R_OK | os.W_OK | os.X_OK)
