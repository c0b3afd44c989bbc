"""How a change since the drag began is written: ▲ 5.8 V, ▼ 0.04 kW; nothing where it rounds to nought."""

import math
from collections.abc import Callable

UP, DOWN = "\N{BLACK UP-POINTING TRIANGLE}", "\N{BLACK DOWN-POINTING TRIANGLE}"


def change(now: float, then: float, write: Callable[[float], str]) -> str:
    """`write` turns a figure into text with its unit; the size of the change is written alike."""
    delta = now - then
    if not math.isfinite(delta):
        return ""
    size = write(abs(delta))
    if not any(digit in "123456789" for digit in size):
        return ""
    return f"{UP if delta > 0 else DOWN} {size}"
