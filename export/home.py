"""Folders for what the libraries keep between runs, where the user's own cannot be used."""

from __future__ import annotations

import atexit
import logging
import os
import shutil
import tempfile
from pathlib import Path

_FOLDERS = {"XDG_CONFIG_HOME": ".config", "XDG_CACHE_HOME": ".cache"}  # XDG Base Directory Specification


def provide() -> None:
    """Point the libraries that draw to a passing folder if the home folder cannot be read or written.

    Without one ezdxf stops or complains when it is imported, and so does matplotlib.
    """
    # a first run may take its time to look for fonts: no cause for alarm
    logging.getLogger("matplotlib.font_manager").setLevel(logging.ERROR)
    poor = [name for name, folder in _FOLDERS.items() if not _usable(os.environ.get(name) or f"~/{folder}")]
    if not poor:
        return
    passing = tempfile.mkdtemp(prefix="wrywing-")
    atexit.register(shutil.rmtree, passing, ignore_errors=True)
    os.environ.update(dict.fromkeys(poor, passing))
    os.environ.setdefault("MPLCONFIGDIR", passing)


def _usable(folder: str) -> bool:
    """Whether what is in a folder can be read, and more be put there, once it is made if need be."""
    try:
        path = Path(folder).expanduser()
        while not path.exists():
            path = path.parent
    except (OSError, RuntimeError):  # RuntimeError: nobody knows where home is
        return False
    return path.is_dir() and os.access(path, os.R_OK | os.W_OK | os.X_OK)
