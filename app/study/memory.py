"""What was worked out of frozen elements last time, so that a run only works on what changed.

A value is looked up by the identity of its element, which is held, so the answer is always the one that
working it out again would give.
"""

from collections.abc import Callable, Sequence
from typing import Generic, TypeVar

Item = TypeVar("Item")
Made = TypeVar("Made")


class Memory(Generic[Item, Made]):
    """Remembers what `make` gave for the items of the last call, and no more than that."""

    def __init__(self, make: Callable[[Item], Made]) -> None:
        self._make = make
        self._known: dict[int, tuple[Item, Made]] = {}

    def of(self, items: Sequence[Item]) -> list[Made]:
        """What `make` gives for each item."""
        known, fresh, made = self._known, {}, []
        for item in items:
            key = id(item)
            entry = known.get(key)
            if entry is None:
                entry = (item, self._make(item))
            fresh[key] = entry
            made.append(entry[1])
        self._known = fresh  # one assignment, so that two threads cannot meet half a memory
        return made
