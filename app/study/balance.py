"""The power balance of a solved layout, one entry a case."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray


@dataclass(frozen=True, slots=True)
class Balance:
    """Where the power of all supplies goes, one entry a case. supply + generation = load + loss."""

    supply_kw: NDArray[np.float64]
    supply_kvar: NDArray[np.float64]
    generation_kw: NDArray[np.float64]
    load_kw: NDArray[np.float64]
    load_kvar: NDArray[np.float64]
    line_kw: NDArray[np.float64]
    copper_kw: NDArray[np.float64]
    iron_kw: NDArray[np.float64]
    loss_kw: NDArray[np.float64]
    closure: NDArray[np.float64]  # |supply + generation - load - loss| / supply, complex power
