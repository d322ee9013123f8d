"""The wing file's keys as a table, made from the records that read it."""

from __future__ import annotations

from typing import Any

from pydantic import BaseModel

from .wingfile import tables


def markdown() -> str:
    """One markdown table for each table of the wing file: key, default, what it means."""
    parts = []
    for path, record in tables().items():
        head = f"`[{'.'.join(path)}]`" if path else "Top of the file"
        rows = [
            f"| `{key}` | {_default(field.is_required(), field.get_default(call_default_factory=True))} "
            f"| {str(field.description).replace('|', '/')} |"
            for key, field in record.model_fields.items()
        ]
        parts.append("\n".join([f"**{head}**", "", "| key | unless stated | what |", "|---|---|---|", *rows]))
    return "\n\n".join(parts)


def _default(required: bool, default: Any) -> str:
    if required:
        return "needed"
    if default is None or isinstance(default, BaseModel) or default in ((), {}):
        return ""
    if isinstance(default, bool):
        return str(default).lower()
    if isinstance(default, float | int):
        return f"{default:g}"
    return f'"{default}"' if isinstance(default, str) else ""
