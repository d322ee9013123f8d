"""Values taken in place of a wing file's own, by key: what a sweep over wing files needs."""

from __future__ import annotations

import copy
import re
from collections.abc import Mapping
from typing import Any

from .values import KeyedError, Where

_STEP = re.compile(r'\.?(?:"(?P<quoted>[^"]+)"|(?P<name>[\w-]+)|\[(?P<count>\d+)\])')


def changed(data: Mapping[str, Any], changes: Mapping[str, object]) -> dict[str, Any]:
    """The wing file's data with some values changed; tables that are missing are made.

    Parameters
    ----------
    changes
        By key as errors name it, entries of lists counted from 1: ``wing.stations[2].chord``.

    Raises
    ------
    KeyedError
        If a key cannot be reached.

    Examples
    --------
    >>> changed({"web": {"runs": 3}}, {"web.runs": 2, "skin.thickness": "0.8 mm"})
    {'web': {'runs': 2}, 'skin': {'thickness': '0.8 mm'}}
    """
    out = copy.deepcopy(dict(data))
    for key, value in changes.items():
        _set(out, _steps(key), value)
    return out


def _steps(key: str) -> Where:
    steps: list[str | int] = []
    at = 0
    while at < len(key):
        found = _STEP.match(key, at)
        if found is None:
            raise KeyedError((key,), "wanted a key such as web.thickness or wing.stations[2].chord")
        count = found["count"]
        steps.append(int(count) - 1 if count else found["quoted"] or found["name"])
        at = found.end()
    return tuple(steps)


def _set(data: dict[str, Any], steps: Where, value: object) -> None:
    here: Any = data
    for i, step in enumerate(steps):
        if not _has_room(here, step):
            raise KeyedError(steps[: i + 1], "wanted a key that the wing file has room for, got none such")
        if i == len(steps) - 1:
            here[step] = value
        else:
            here = here.setdefault(step, {}) if isinstance(here, dict) else here[step]


def _has_room(table: Any, step: str | int) -> bool:
    if isinstance(step, str):
        return isinstance(table, dict)
    return isinstance(table, list) and 0 <= step < len(table)
