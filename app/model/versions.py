"""Older files are brought up one version at a time; newer ones are not opened at all."""

from collections.abc import Callable, Mapping
from typing import Any

from app.model.errors import FileError

CURRENT = 2
Step = Callable[[dict[str, Any]], dict[str, Any]]
# from version n to n + 1. Version 2 says which phases an element has; a file without is all of them.
STEPS: Mapping[int, Step] = {1: lambda raw: raw}


def migrate(
    raw: dict[str, Any], key: str = "farend", steps: Mapping[int, Step] = STEPS, current: int = CURRENT
) -> dict[str, Any]:
    """The file as the current version would hold it; `key` names its version."""
    version = raw[key]
    if isinstance(version, bool) or not isinstance(version, int) or version < 1:
        raise FileError(
            f'the key "{key}" is {str(version)[:40]!r}, allowed is a version from 1 to {current}.'
        )
    if version > current:
        raise FileError(
            f"was written by a newer Farend: its version is {version}, this Farend reads up to {current}."
        )
    for step in range(version, current):
        raw = {**steps[step](raw), key: step + 1}
    return raw
