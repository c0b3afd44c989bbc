"""Magnitudes and totals whose last bit does not hang on how many cases stand side by side."""

from typing import Any

import numpy as np
from numpy.typing import NDArray

Real = NDArray[np.float64]


def size(values: NDArray[np.complex128]) -> Real:
    """Magnitude of complex numbers, √(re² + im²).

    values : (...) complex

    Returns : (...) float, in the unit of the values
    """
    return np.asarray(np.sqrt(values.real**2 + values.imag**2))


def total(values: Real, of: NDArray[Any] | None = None) -> Real:
    """Sum over rows, case by case; nan counts as nothing.

    values : (row, case) float
    of : (row,) bool or (chosen,) int, the rows that count; all where it is None

    Returns : (case,) float, in the unit of the values
    """
    chosen = values if of is None else values[of]
    return np.asarray(np.nansum(np.ascontiguousarray(chosen.T), axis=1))
