"""What was worked out of frozen elements last time, so that a run only works on what changed.

A value is taken over where its element is the very same object, which is held, so the answer is always
the one that working it out again would give.
"""

from collections.abc import Callable, Sequence
from typing import Generic, TypeVar

import numpy as np
from numpy.typing import NDArray

Item = TypeVar("Item")
Made = TypeVar("Made")


class Memory(Generic[Item, Made]):
    """Remembers what `make` gave for the items of the last call, and no more than that."""

    def __init__(self, make: Callable[[Item], Made]) -> None:
        self._make = make
        self._last: tuple[list[Item], list[Made]] = ([], [])

    def of(self, items: Sequence[Item]) -> list[Made]:
        """What `make` gives for each item."""
        were, last = self._last
        if len(were) == len(items):
            make = self._make
            made = [
                done if was is item else make(item) for was, item, done in zip(were, items, last, strict=True)
            ]
        else:
            known = {id(was): done for was, done in zip(were, last, strict=True)}
            made = [known[id(item)] if id(item) in known else self._make(item) for item in items]
        self._last = (list(items), made)  # one assignment, so that two threads cannot meet half a memory
        return made


class Columns(Generic[Item]):
    """The same for rows of numbers, kept as one array."""

    def __init__(self, make: Callable[[Item], tuple[float, ...]], width: int) -> None:
        self._make, self._width = make, width
        self._last: tuple[list[Item], NDArray[np.float64]] = ([], np.zeros((0, width)))

    def of(self, items: Sequence[Item]) -> NDArray[np.float64]:
        """What `make` gives for each item, as columns: (width, item) float."""
        were, table = self._last
        if len(were) != len(items):
            table = np.array([self._make(item) for item in items], dtype=np.float64).reshape(-1, self._width)
        else:
            pairs = zip(were, items, strict=True)
            moved = [row for row, (was, item) in enumerate(pairs) if was is not item]
            if moved:
                table = table.copy()
                for row in moved:
                    table[row] = self._make(items[row])
        self._last = (list(items), table)
        return table.T
