"""Files exchanged one by one, within a folder that cannot be exchanged as a whole.

Everything is first written in full to a folder within; only then are the files moved. If a move fails, those made so
far are undone; if the run is killed between two moves, the next run undoes them.
"""

from __future__ import annotations

import os
from collections.abc import Collection, Mapping
from contextlib import suppress
from pathlib import Path

from . import manifest
from .swap import remove

_STAGE, _AWAY = ".wrywing-part", "old"


def renew(folder: Path, content: Mapping[str, bytes], ours: Collection[str]) -> None:
    """Exchange the files named in `ours` for `content`, whose last file is the manifest.

    Raises
    ------
    OSError
        If the disk will not take them; everything is as it was.
    """
    stage = folder / _STAGE
    _clear(stage)
    try:
        stage.mkdir()
        for name, data in content.items():  # the manifest comes last: where it is, the stage is complete
            (stage / name).write_bytes(data)
        (stage / _AWAY).mkdir()
        for name in sorted(ours):
            (folder / name).replace(stage / _AWAY / name)
        for name in content:
            (stage / name).replace(folder / name)
    except BaseException:
        recover(folder)
        raise
    _clear(stage)


def recover(folder: Path) -> None:
    """Undo the moves of a run that came to an end before its last one, the manifest's."""
    stage = folder / _STAGE
    if (new := manifest.listed(stage)) is not None:
        for name, sha in new.items():
            if not (stage / name).exists() and manifest.same(folder / name, sha):
                (folder / name).replace(stage / name)
        for path in sorted((stage / _AWAY).glob("*")):
            if not os.path.lexists(folder / path.name):
                path.replace(folder / path.name)
    _clear(stage)


def _clear(stage: Path) -> None:
    """Remove a stage, first of all what says that it is complete."""
    with suppress(OSError):
        (stage / manifest.NAME).unlink(missing_ok=True)
    remove(stage)
