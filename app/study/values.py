"""The SI values of the elements, gathered into arrays: what rows.py puts into the solver's rows."""

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from app.model import assumed, taps
from app.model.drawing import Case
from app.model.kinds import Capacitor, Element, Generator, Line, Load, Supply, Transformer
from solver import line, load, transformer

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]


def stated(elements: Sequence[Element], field: str) -> Real:
    """One field of many elements that is never blank.

    elements : (element,) of one kind
    field : name of a field in the unit it carries

    Returns : (element,) float, in the field's unit
    """
    return np.array([getattr(e, field) for e in elements], dtype=np.float64)


def given(elements: Sequence[Element], field: str) -> Real:
    """One field of many elements, with the assumed value where it is blank.

    elements : (element,) of one kind
    field : name of a field in the unit it carries

    Returns : (element,) float, in the field's unit
    """
    return np.array(
        [
            assumed.value(e, field) if (v := getattr(e, field)) is None else v
            for e in elements
        ],
        dtype=np.float64,
    )  # fmt: skip


def line_values(
    lines: Sequence[Line], two_wire: NDArray[np.bool_], frequency_hz: float
) -> tuple[Complex, Complex]:
    """Series impedance and shunt admittance of whole lines.

    lines : (line,) cables and overhead lines
    two_wire : (line,) bool; there the impedance counts out and back, and the capacitance, stated from one
        wire to the neutral plane, counts half
    frequency_hz : float [Hz]

    Returns : z (line,) complex [ohm], y (line,) complex [S], parallel runs merged
    Source : see solver.line
    """
    length, runs = stated(lines, "length_m"), stated(lines, "parallel")
    alpha = np.array([line.ALPHA[e.conductor] for e in lines], dtype=np.float64)
    z = line.series(
        stated(lines, "r20_ohm_per_km"),
        stated(lines, "x_ohm_per_km"),
        length,
        given(lines, "temperature_degc"),
        alpha,
        runs,
        two_wire,
    )
    return z, line.charging(given(lines, "c_uf_per_km"), length, frequency_hz, runs, two_wire)


def transformer_values(
    units: Sequence[Transformer], notches: Sequence[int]
) -> tuple[Complex, Complex, Complex]:
    """Ratio, series impedance and magnetising admittance of transformers at their taps, all units together.

    units : (transformer,)
    notches : (transformer,) int, where each tap stands

    Returns : ratio (transformer,) complex, U1/U2 with the lead of side 1 over side 2; z (transformer,)
        complex [ohm] seen at winding 2; y (transformer,) complex [S] seen at winding 1
    Source : see solver.transformer
    """
    factor = np.array([taps.factor(t, n) for t, n in zip(units, notches, strict=True)], dtype=np.float64)
    on_first = np.array([t.tapped == "winding 1" for t in units], dtype=bool)
    clock = np.array([taps.group(t.vector_group)[2] for t in units], dtype=np.float64)  # type: ignore[index]
    rating, v1, v2 = stated(units, "rating_kva") * 1e3, stated(units, "v1_v"), stated(units, "v2_v")
    z = transformer.short_circuit(stated(units, "uk_percent"), given(units, "load_loss_w"), rating, v2)
    y = transformer.magnetising(
        given(units, "no_load_loss_w"), given(units, "no_load_current_percent"), rating, v1
    )
    tap_1, tap_2 = np.where(on_first, factor, 1.0), np.where(on_first, 1.0, factor)
    return transformer.equivalent(v1, v2, z, y, clock, tap_1, tap_2, stated(units, "parallel"))


def held_values(supplies: Sequence[Supply], cases: Sequence[Case]) -> Complex:
    """Line volts that each supply holds in each case: nominal · held % · case %.

    supplies : (source,)
    cases : (case,)

    Returns : (source, case) complex [V]
    """
    level = np.array([c.supply_percent for c in cases], dtype=np.float64)
    held = stated(supplies, "held_percent")[:, None] * level / 1e4
    return (stated(supplies, "nominal_v") * np.exp(1j * np.deg2rad(stated(supplies, "angle_deg"))))[
        :, None
    ] * held


def load_values(
    drawn: Sequence[Load | Generator], nominal_v: Real, cases: Sequence[Case]
) -> tuple[Complex, Real, Real]:
    """Power drawn at the reference voltage, that voltage, and the load mix.

    drawn : (load,) loads and generators; a generator draws negative power
    nominal_v : (load,) float [V] of their nodes
    cases : (case,) scale loads and generation

    Returns : power (load, case) complex [VA], whole; reference (load,) float [V]; mix (load, 3) shares of
        constant power, current, impedance
    """
    makes = np.array([isinstance(e, Generator) for e in drawn], dtype=bool)[:, None]
    made = np.array([-complex(e.output_kw, e.output_kvar) if isinstance(e, Generator) else 0j for e in drawn])
    demand = [_demand(e) for e in drawn]
    used = load.power(*(np.array(d) for d in zip(*demand, strict=True))) if demand else made
    power = np.where(makes[:, 0], made, used)[:, None] * 1e3
    loads = np.array([c.load_percent for c in cases], dtype=np.float64) / 100
    makers = np.array([c.generation_percent for c in cases], dtype=np.float64) / 100
    shares = np.array([_shares(e) for e in drawn], dtype=np.float64).reshape(-1, 2)
    reference = np.array(
        [math.nan if _reference(e) is None else _reference(e) for e in drawn], dtype=np.float64
    )
    reference = np.where(np.isnan(reference), nominal_v, reference)
    return power * np.where(makes, makers, loads), reference, load.mix(shares[:, 0], shares[:, 1])


def _demand(element: Load | Generator) -> tuple[float, float, bool]:
    """kVA, power factor, leading; nothing for a generator."""
    if isinstance(element, Generator):
        return 0.0, 1.0, False
    if element.demand_kva is not None:
        return element.demand_kva, element.power_factor, element.leading
    kw = element.demand_kw or 0.0
    return kw / element.power_factor if kw else 0.0, element.power_factor, element.leading


def _shares(element: Load | Generator) -> tuple[float, float]:
    """Constant current and constant impedance; a generator's power is constant."""
    if isinstance(element, Generator):
        return 0.0, 0.0
    current = assumed.value(element, "constant_current_percent")
    return current / 100, assumed.value(element, "constant_impedance_percent") / 100


def _reference(element: Load | Generator) -> float | None:
    return None if isinstance(element, Generator) else element.reference_v


def shunt_values(capacitors: Sequence[Capacitor], nominal_v: Real) -> Complex:
    """Admittance of capacitors: Y = jQ/U² at the rated voltage, or the node's nominal where that is blank.

    capacitors : (shunt,)
    nominal_v : (shunt,) float [V] of their nodes

    Returns : (shunt,) complex [S], per phase or between the wires, which is the same number
    """
    rated = np.array([math.nan if c.rated_v is None else c.rated_v for c in capacitors], dtype=np.float64)
    rated = np.where(np.isnan(rated), nominal_v, rated)
    return 1j * stated(capacitors, "rating_kvar") * 1e3 / rated**2
