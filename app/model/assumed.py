"""What stands in for a field left blank, what came with the shelf, and on what basis: nothing else is
assumed."""

import math
from bisect import bisect_left
from dataclasses import dataclass

from app.model import conductors
from app.model.fields import fields_of
from app.model.kinds import (
    Cable,
    Capacitor,
    Element,
    Generator,
    Line,
    Load,
    Motor,
    OverheadLine,
    Regulator,
    Supply,
    Transformer,
)

NO_SOURCE = "common practice, no source"
FROM_SHELF = "as the shelf gives it"
CABLE_DEGC = 60.0
OVERHEAD_DEGC = 50.0
EU = "Regulation (EU) 548/2014 as amended by (EU) 2019/1783, Annex I Table I.1, tier 2"
# rating kVA, load loss W, no-load loss W: liquid-immersed, three-phase, highest winding up to 24 kV,
# other winding up to 1.1 kV; source EU above.
EU_LOSSES = (
    (25.0, 600.0, 63.0), (50.0, 750.0, 81.0), (100.0, 1250.0, 130.0), (160.0, 1750.0, 189.0),
    (250.0, 2350.0, 270.0), (315.0, 2800.0, 324.0), (400.0, 3250.0, 387.0), (500.0, 3900.0, 459.0),
    (630.0, 4600.0, 540.0), (800.0, 6000.0, 585.0), (1000.0, 7600.0, 693.0), (1250.0, 9500.0, 855.0),
    (1600.0, 12000.0, 1080.0), (2000.0, 15000.0, 1305.0), (2500.0, 18500.0, 1575.0),
    (3150.0, 23000.0, 1980.0),
)  # fmt: skip


@dataclass(frozen=True, slots=True)
class Blank:
    """A field left blank, what was put in its place and why."""

    field: str
    value: float
    unit: str
    basis: str


def value(element: Element, field: str, nominal_v: float = math.nan) -> float:
    """The given value, or the assumed one. `nominal_v` of the element's node serves the fields
    that follow it: reference_v of a load, rated_v of a motor or capacitor."""
    given = getattr(element, field)
    return float(given) if given is not None else stand_in(element, field, nominal_v)[0]


def blank(element: Element, nominal_v: float = math.nan) -> tuple[Blank, ...]:
    """Every field left blank for which a value is assumed."""
    kind = fields_of(type(element))
    return tuple(
        Blank(name, *_with_unit(stand_in(element, name, nominal_v), kind[name].unit))
        for name in assumable(type(element))
        if getattr(element, name) is None and not _idle(element, name)
    )


def unconfirmed(element: Element) -> tuple[Blank, ...]:
    """Every figure that came with a built-in part and that nobody has confirmed since."""
    kind = fields_of(type(element))
    found = tuple(
        Blank(name, float(given), kind[name].unit, FROM_SHELF)
        for name in element.assumed
        if name in kind and isinstance(given := getattr(element, name), int | float)
    )
    return _of_spacing(element, found) if isinstance(element, OverheadLine) and element.hung_at_m else found


def _of_spacing(line: OverheadLine, found: tuple[Blank, ...]) -> tuple[Blank, ...]:
    """Without what follows from the spacing, and with the spacing itself, by its mean distance."""
    used = tuple(b for b in found if b.field not in conductors.FOLLOWING)
    mean = conductors.mean_distance_m(line)
    if "hung_at_m" not in line.assumed or math.isnan(mean):
        return used
    return (*used, Blank("hung_at_m", mean, "m", f"mean distance, {FROM_SHELF}"))


def figures_of(kind: type[Element]) -> tuple[str, ...]:
    """The figures that a built-in part brings with it and that the person has to confirm."""
    return next((names for known, names in _FIGURES.items() if issubclass(kind, known)), ())


def _with_unit(put: tuple[float, str], unit: str) -> tuple[float, str, str]:
    return put[0], unit, put[1]


def assumable(kind: type[Element]) -> tuple[str, ...]:
    """The fields of a kind that have a stand-in where they are left blank."""
    for known, names in _ASSUMABLE.items():
        if issubclass(kind, known):
            return names
    return ()


_ASSUMABLE: dict[type[Element], tuple[str, ...]] = {
    OverheadLine: ("capacitance_uf_per_km", "temperature_degc", *conductors.STAND_INS),
    Line: ("capacitance_uf_per_km", "temperature_degc"),
    Transformer: (
        "load_loss_w", "no_load_loss_w", "no_load_current_percent", "hold_percent", "bandwidth_percent",
    ),
    Regulator: ("hold_percent", "bandwidth_percent"),
    Generator: ("q_min_kvar", "q_max_kvar"),
    Load: ("constant_current_percent", "constant_impedance_percent", "reference_v"),
    Motor: ("rated_v", "limited_current", "limited_power_factor"),
    Capacitor: ("rated_v",),
    Supply: ("xr",),
}  # fmt: skip
_FIGURES: dict[type[Element], tuple[str, ...]] = {
    Supply: ("nominal_v", "held_percent"),
    Line: ("length_m", "resistance_ohm_per_km", "reactance_ohm_per_km"),
    Transformer: ("rating_kva", "v1_v", "v2_v", "uk_percent"),
    Load: ("demand_kva", "power_factor"),
    Motor: ("rated_kw", "efficiency", "power_factor", "starting_current", "starting_power_factor"),
    Generator: ("output_kw", "output_kvar"),
    Capacitor: ("rating_kvar",),
}  # fmt: skip
GENERATOR_TAN = math.tan(math.acos(0.9))
LIMITED = {"soft starter": (3.0, 0.3), "drive": (1.2, 0.95)}  # × rated current, power factor


def stand_in(element: Element, field: str, nominal_v: float = math.nan) -> tuple[float, str]:
    """The assumed value of a blank field and its basis."""
    if isinstance(element, Transformer | Regulator) and field in ("hold_percent", "bandwidth_percent"):
        return _of_changer(element, field)
    if isinstance(element, OverheadLine) and field in conductors.STAND_INS:
        return conductors.stand_in(element, field)
    if isinstance(element, Line):
        return _of_line(element, field)
    if isinstance(element, Transformer):
        return _of_transformer(element, field)
    if isinstance(element, Generator) and field in ("q_min_kvar", "q_max_kvar"):
        most = GENERATOR_TAN * element.output_kw
        return (most if field == "q_max_kvar" else -most), f"power factor 0.9 at its output; {NO_SOURCE}"
    if field == "xr":
        return 10.0, "R = 0.1·X where nobody states it, IEC 60909-0 (from memory)"
    if isinstance(element, Motor) and field != "rated_v":
        return _of_motor(element, field)
    if field in ("constant_current_percent", "constant_impedance_percent"):
        return 0.0, "what is left over is constant power, which draws most at low voltage"
    if field in ("reference_v", "rated_v"):
        return nominal_v, "nominal voltage of its node"
    raise KeyError(field)


def _idle(element: Element, field: str) -> bool:
    """Nothing hangs on the field: no starter, no fault level stated, no share of a load left to state, no tap
    changer that steps by itself."""
    if isinstance(element, Supply):
        return element.fault_level_min_mva is None
    if isinstance(element, OverheadLine) and field in conductors.STAND_INS:
        return conductors.is_idle(element, field)
    if isinstance(element, Generator):
        return element.hold_percent is None
    if isinstance(element, Load):
        return 100 in (element.constant_current_percent, element.constant_impedance_percent) and (
            field != "reference_v"
        )
    if isinstance(element, Transformer):
        return element.regulates == "no" and field in ("hold_percent", "bandwidth_percent")
    return isinstance(element, Motor) and field != "rated_v" and element.starter == "direct"


def _of_changer(element: Transformer | Regulator, field: str) -> tuple[float, str]:
    if field == "hold_percent":
        return 100.0, "nominal voltage"
    if isinstance(element, Regulator):
        return 2 / 1.2, f"2 V on a base of 120 V; {NO_SOURCE}"
    return 2 * element.notch_percent, f"two steps; {NO_SOURCE}"


def _of_motor(motor: Motor, field: str) -> tuple[float, str]:
    """The locked-rotor values where nothing limits them."""
    if motor.starter == "direct":
        started = motor.starting_current, motor.starting_power_factor
        return started[field == "limited_power_factor"], "nothing limits the start"
    return LIMITED[motor.starter][field == "limited_power_factor"], f"usual of a {motor.starter}; {NO_SOURCE}"


def _of_line(line: Line, field: str) -> tuple[float, str]:
    if field == "capacitance_uf_per_km" and isinstance(line, OverheadLine) and line.hung_at_m:
        return conductors.capacitance_uf_per_km(line), "from the spacing, by images in the earth"
    if field == "capacitance_uf_per_km":
        return 0.0, "neglected"
    if field != "temperature_degc":
        raise KeyError(field)
    if isinstance(line, Cable):
        return CABLE_DEGC, f"a 90 °C cable in 20 °C ground at three quarters of its rating; {NO_SOURCE}"
    return OVERHEAD_DEGC, f"a loaded bare conductor on a warm day; {NO_SOURCE}"


def _of_transformer(t: Transformer, field: str) -> tuple[float, str]:
    if field == "load_loss_w":
        watts, basis = eu_loss(t.rating_kva, 1)
        most = t.uk_percent * t.rating_kva * 10
        return (watts, basis) if watts <= most else (most, "all of the impedance uk taken as resistance")
    if field == "no_load_loss_w":
        return eu_loss(t.rating_kva, 2)
    if field != "no_load_current_percent":
        raise KeyError(field)
    usual = 1.0 if t.rating_kva < 100 else 0.8 if t.rating_kva <= 250 else 0.5
    least = value(t, "no_load_loss_w") / (t.rating_kva * 10)
    if least > usual:
        return least, "the current that the no-load loss alone draws"
    return usual, NO_SOURCE


def eu_loss(rating_kva: float, column: int) -> tuple[float, str]:
    """Load loss (column 1) or no-load loss (2) in W at a rating; between ratings as the regulation
    says by straight line, outside them in proportion to the rating."""
    ratings = [row[0] for row in EU_LOSSES]
    if not ratings[0] <= rating_kva <= ratings[-1]:
        row = EU_LOSSES[0 if rating_kva < ratings[0] else -1]
        return row[column] * rating_kva / row[0], f"in proportion from {row[0]:g} kVA, {EU}"
    after = bisect_left(ratings, rating_kva)
    high = EU_LOSSES[after]
    if high[0] == rating_kva:
        return high[column], EU
    low = EU_LOSSES[after - 1]
    share = (rating_kva - low[0]) / (high[0] - low[0])
    between = low[column] + share * (high[column] - low[column])
    return between, f"between {low[0]:g} and {high[0]:g} kVA, {EU}"
