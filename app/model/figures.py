"""How a figure is written for people: rounding as the trade prints it, always with its unit.

Judging is done on unrounded figures; these functions only write them down.
"""

import math
from collections.abc import Callable

MINUS = "\N{MINUS SIGN}"
THIN = "\N{NARROW NO-BREAK SPACE}"
UP, DOWN = "\N{BLACK UP-POINTING TRIANGLE}", "\N{BLACK DOWN-POINTING TRIANGLE}"
RAISED = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


def plain(value: float, digits: int, unit: str = "", *, sign: bool = False) -> str:
    """A number with a true minus, thousands set apart, and its unit; `–` where there is none."""
    if not math.isfinite(value):
        return "–" if math.isnan(value) else f"{'' if value > 0 else MINUS}∞{' ' + unit if unit else ''}"
    shown, mark = f"{abs(value):,.{digits}f}".replace(",", THIN), ""
    if (value < 0 or sign) and shown.strip("0."):  # not nought as it is written
        mark = MINUS if value < 0 else "+"
    return f"{mark}{shown} {unit}" if unit else f"{mark}{shown}"


def volts(value: float) -> str:
    """Under 1 kV to 0.1 V, above to 0.01 kV: 388.0 V, 10.73 kV."""
    return plain(value, 1, "V") if not abs(value) >= 999.95 else plain(value / 1e3, 2, "kV")


def nameplate(value: float) -> str:
    """A rated or nameplate voltage: 400 V, 10 725 V."""
    return plain(value, 0 if float(value).is_integer() else 1, "V")


def level(value: float) -> str:
    """A nominal voltage as people call it: 11 kV, 400 V."""
    return f"{typed(value / 1000)} kV" if value >= 1000 else f"{typed(value)} V"


def ratio(first: float, second: float) -> str:
    """Two nominal voltages of a transformer: 11/0.4 kV, 400/230 V."""
    if max(first, second) < 1000:
        return f"{typed(first)}/{typed(second)} V"
    return f"{typed(first / 1000)}/{typed(second / 1000)} kV"


def amps(value: float) -> str:
    """0.1 A under 100 A, else whole."""
    return plain(value, 1 if not abs(value) >= 99.95 else 0, "A")


def power(value_kw: float, unit: str = "kW") -> str:
    """A flow: 88.6 kW, 4.93 kW, 1 240 kW."""
    size = abs(value_kw)
    return plain(value_kw, 0 if size >= 999.5 else 1 if size >= 9.995 else 2, unit)


def loss(value_kw: float, *, sign: bool = False) -> str:
    """A loss to 0.01 kW, under 0.1 kW in whole watts: 1.64 kW, 68 W."""
    if abs(value_kw) < 0.0995:
        return plain(value_kw * 1e3, 0, "W", sign=sign)
    return plain(value_kw, 2, "kW", sign=sign)


def percent(value: float, digits: int = 1, *, sign: bool = False) -> str:
    """97.0 %."""
    return plain(value, digits, "%", sign=sign)


def length(value_m: float) -> str:
    """1.15 km, 320 m."""
    if abs(value_m) >= 1000:
        return f"{round(value_m / 1e3, 3):g}".replace("-", MINUS) + " km"
    return f"{round(value_m, 1):g} m"


def closure(value: float) -> str:
    """What a balance leaves open, as part of the supply: 2·10⁻⁹."""
    if value == 0 or math.isnan(value):
        return plain(value, 0)
    mantissa, _, exponent = f"{value:.0e}".partition("e")
    small = abs(int(exponent)) > 2
    return f"{mantissa}·10{str(int(exponent)).translate(RAISED)}" if small else plain(value, 3)


def change(now: float, then: float, write: Callable[[float], str]) -> str:
    """A change since a drag began, ▲ 5.8 V, with its size as `write` writes a figure; nothing where that
    rounds to nought."""
    delta = now - then
    if not math.isfinite(delta):
        return ""
    size = write(abs(delta))
    if not any(digit in "123456789" for digit in size):
        return ""
    return f"{UP if delta > 0 else DOWN} {size}"


def stated(value: float, unit: str = "", *, sign: bool = False) -> str:
    """A figure that is given, not worked out, with the digits it needs, six at most: −2.5 %, 0.625 %."""
    digits = next((d for d in range(6) if float(f"{value:.{d}f}") == float(f"{value:.6g}")), 6)
    return plain(value, digits, unit, sign=sign)


def typed(value: float) -> str:
    """A number as a person would type it, exact to the last bit: 0.125, 11000."""
    return str(int(value)) if float(value).is_integer() and abs(value) < 1e15 else repr(float(value))
