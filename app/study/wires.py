"""Conductors as bits and letters: A 1, B 2, C 4, N 8; the systems they belong to."""

import cmath
from collections.abc import Iterable

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.model.levels import SPLIT, THREE_PHASE, TWO_WIRE

LETTERS = "ABCN"
ALL_LETTERS = tuple("".join(x for slot, x in enumerate(LETTERS) if has >> slot & 1) for has in range(16))
N, NEUTRAL, ABC = 3, 0b1000, 0b0111
OF_SYSTEM = {THREE_PHASE: ABC, TWO_WIRE: 0b0001, SPLIT: 0b0011}
ROOT3 = 3**0.5
TURN = cmath.exp(-2j * cmath.pi / 3)
PHASORS = {  # volts of a balanced system of one volt, by slot
    THREE_PHASE: (1, TURN, TURN**2, 0),
    TWO_WIRE: (1, 0, 0, 0),
    SPLIT: (1, -1, 0, 0),
}
PER_PHASE = {THREE_PHASE: ROOT3, TWO_WIRE: 1.0, SPLIT: 2.0}  # nominal volts over those of a phase to neutral


def bits(letters: Iterable[str]) -> int:
    """Conductors of some letters.

    letters : such as `AB` or `BN`

    Returns : int, bits
    """
    return sum(1 << LETTERS.index(letter) for letter in letters)


def letters(has: int) -> str:
    """Letters of some conductors, such as `ABN`.

    has : bits

    Returns : str
    """
    return ALL_LETTERS[has]


def slots(has: int) -> list[int]:
    """Slots of some conductors, 0 to 3.

    has : bits

    Returns : list of int, lowest first
    """
    return [slot for slot in range(4) if has >> slot & 1]


def flags(has: ArrayLike, count: int = 4) -> NDArray[np.bool_]:
    """Conductors of many rows as yes or no.

    has : (row,) int, bits
    count : 4, or 3 for the phases alone

    Returns : (row, count) bool
    """
    return (np.asarray(has, dtype=np.intp).reshape(-1, 1) >> np.arange(count) & 1).astype(bool)
