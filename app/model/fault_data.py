"""What stands in for data that only fault currents need, and on what basis; listed only with these."""

import math
from typing import NamedTuple

from app.model.assumed import NO_SOURCE
from app.model.kinds import Element, Line, OverheadLine, Supply, Transformer

OPEN_OHM = 1e6  # between a star point and earth: not earthed
LOW_V = 1000.0  # up to here a system counts as low voltage, IEC 60038
PLAIN_V = 300.0  # up to here one of two wires is taken for the neutral, above it may be two phases
CABLE_HOT_DEGC, OVERHEAD_HOT_DEGC = 90.0, 80.0
EARTH_OHM_PER_KM = 0.0493  # of the way back through earth at 50 Hz, Carson; goes with the frequency
OVERHEAD_X0 = 3.0  # X0 / X1 of a bare line
ZIGZAG_Z0 = 0.1  # Z0 / Z1 of a winding in zigzag


class Put(NamedTuple):
    """A value that was not given and what was put in its place."""

    value: float
    basis: str


def figure(value: float | Put) -> float:
    """The figure itself, whether it was given or put in its place."""
    return value.value if isinstance(value, Put) else value


def fault_value(element: Element, field: str, nominal_v: float, frequency_hz: float = 50.0) -> float | Put:
    """The given value of a field that fault currents need, or what is put in its place."""
    given = getattr(element, field)
    if given is not None:
        return float(given)
    if isinstance(element, Line):
        return _of_line(element, field, nominal_v, frequency_hz)
    if isinstance(element, Transformer) and field == "z0_ratio":
        return _of_transformer(element)
    if isinstance(element, Supply):
        return _of_supply(element, field)
    raise KeyError(field)


def _of_line(line: Line, field: str, nominal_v: float, frequency_hz: float) -> Put:
    bare = isinstance(line, OverheadLine) and nominal_v > LOW_V
    if field == "fault_degc":
        if isinstance(line, OverheadLine):
            return Put(OVERHEAD_HOT_DEGC, f"a bare conductor at its usual highest temperature; {NO_SOURCE}")
        return Put(CABLE_HOT_DEGC, f"XLPE at its highest operating temperature; {NO_SOURCE}")
    if field == "zero_resistance_ohm_per_km":
        if line.return_resistance_ohm_per_km is not None:
            return Put(
                line.resistance_ohm_per_km + 3 * line.return_resistance_ohm_per_km,
                "R1 + 3·R of its return conductor",
            )
        if bare:
            back = 3 * EARTH_OHM_PER_KM * frequency_hz / 50
            return Put(
                line.resistance_ohm_per_km + back,
                f"R1 + {back:.4g} Ω/km of earth return (Carson); {NO_SOURCE}",
            )
        return Put(
            4 * line.resistance_ohm_per_km, f"4·R1, a return conductor as large as a phase; {NO_SOURCE}"
        )
    if field == "zero_reactance_ohm_per_km":
        times = OVERHEAD_X0 if isinstance(line, OverheadLine) else 4.0
        return Put(times * line.reactance_ohm_per_km, f"{times:g}·X1; {NO_SOURCE}")
    raise KeyError(field)


def _of_transformer(t: Transformer) -> Put:
    if "Z" in t.vector_group.upper():
        return Put(ZIGZAG_Z0, f"usual of a winding in zigzag; {NO_SOURCE}")
    return Put(1.0, f"usual of a three-limb core is 0.85 to 1, of which the highest is taken; {NO_SOURCE}")


def _of_supply(supply: Supply, field: str) -> Put:
    if field == "fault_level_min_mva" and supply.fault_level_max_mva is not None:
        return Put(
            supply.fault_level_max_mva, "as the highest, so least currents come out too high; ask for it"
        )
    if field == "fault_level_max_mva" and supply.fault_level_min_mva is not None:
        return Put(
            supply.fault_level_min_mva, "as the least, so highest currents come out too low; ask for it"
        )
    if field == "xr":
        return Put(10.0, "R = 0.1·X where nobody states it, IEC 60909-0 (from memory)")
    if field == "z0_ratio" and supply.wires != "three-phase":
        return Put(1.0, f"its neutral is one of its wires, earthed at the supply; {NO_SOURCE}")
    if field == "z0_ratio":
        return Put(1.0, f"a transformer close by, its star point earthed; {NO_SOURCE}")
    raise KeyError(field)


def stated_earth_ohm(t: Transformer, winding: int) -> float | None:
    """Resistance to earth that is stated of a winding; infinite from 1 MΩ, None where nothing is stated."""
    given = t.earth_1_ohm if winding == 1 else t.earth_2_ohm
    return math.inf if given is not None and given >= OPEN_OHM else given


def star_earth_ohm(t: Transformer, winding: int) -> float | None:
    """Resistance between a star point and earth; None where it is not earthed."""
    given = stated_earth_ohm(t, winding)
    if given is not None:
        return given if given < math.inf else None
    mark = "N" if winding == 1 else "n"
    return 0.0 if mark in t.vector_group else None


def corner_earth_ohm(t: Transformer) -> float | None:
    """Resistance to earth of corner b of an open delta at winding 2; None where it is not earthed."""
    given = stated_earth_ohm(t, 2)
    return given if given is not None and given < math.inf else None
