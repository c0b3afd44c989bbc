"""The SI values of the elements, gathered into arrays: what rows.py puts into the solver's rows."""

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from app.model import assumed, taps
from app.model.by_case import as_in, owned, percent_of, scale_of
from app.model.conductors import is_hung
from app.model.drawing import Case
from app.model.kinds import Capacitor, Generator, Line, Load, Motor, Supply, Transformer
from app.study.memory import Columns
from app.study.overhead import put_in
from solver import line, load, motor, transformer

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
Row = tuple[float, ...]


def columns(rows: Sequence[Row], width: int) -> Real:
    """Rows of numbers as columns.

    rows : (row,) tuples of `width` numbers
    width : how many

    Returns : (width, row) float
    """
    return np.array(rows, dtype=np.float64).reshape(-1, width).T


def _line_row(run: Line) -> Row:
    temperature, c = assumed.value(run, "temperature_degc"), assumed.value(run, "capacitance_uf_per_km")
    alpha = line.ALPHA[run.conductor]
    return (
        run.resistance_ohm_per_km,
        run.reactance_ohm_per_km,
        run.length_m,
        temperature,
        alpha,
        run.side_by_side,
        c,
        is_hung(run),
    )


_lines: Columns[Line] = Columns(_line_row, 8)


def line_values(
    lines: Sequence[Line], two_wire: NDArray[np.bool_], frequency_hz: float, nominal_v: Real
) -> tuple[Complex, Complex]:
    """Series impedance and shunt admittance of whole lines, parallel runs merged; where a line states its
    spacing, out of that.

    lines : (line,) cables and overhead lines
    two_wire : (line,) bool; there the impedance counts out and back, and the capacitance, stated from one
        wire to the neutral plane, counts half
    frequency_hz : float [Hz]
    nominal_v : (line,) float [V]

    Returns : z (line,) complex [ohm], y (line,) complex [S]
    Source : see solver.line, overhead
    """
    r20, x, length, temperature, alpha, runs, c, spaced = _lines.of(lines)
    z = line.series(r20, x, length, temperature, alpha, runs, two_wire)
    put_in(z, np.flatnonzero(spaced), lines, two_wire, frequency_hz, nominal_v)
    return z, line.charging(c, length, frequency_hz, runs, two_wire)


def _plate_row(t: Transformer) -> Row:
    group = taps.group(t.vector_group)
    assert group is not None  # rows are made only of a layout whose groups were checked
    pk, p0 = assumed.value(t, "load_loss_w"), assumed.value(t, "no_load_loss_w")
    i0, first = assumed.value(t, "no_load_current_percent"), t.tapped == "winding 1"
    rating, factor = t.rating_kva * 1e3, taps.factor(t, t.tap if t.regulates == "no" else 0)
    return rating, t.v1_v, t.v2_v, t.uk_percent, pk, p0, i0, group[2], first, t.side_by_side, factor


_plates: Columns[Transformer] = Columns(_plate_row, 11)


def transformer_values(units: Sequence[Transformer]) -> tuple[Complex, Complex, Complex]:
    """Transformers at their taps, parallel units merged; at their nameplate where they step by themselves.

    units : (transformer,)

    Returns : ratio (transformer,) complex, U1/U2 with the lead of side 1 over side 2; z (transformer,)
        complex [ohm] seen at winding 2; y (2, transformer) complex [S] at the terminals of each winding
    Source : see solver.transformer
    """
    return _equivalent(_plates.of(units))


def notch_values(unit: Transformer, notches: Sequence[int]) -> tuple[Complex, Complex, Complex]:
    """One transformer at each of its notches.

    unit : the transformer
    notches : (notch,) int

    Returns : ratio (notch,) complex, z (notch,) complex [ohm], y (2, notch) complex [S]
    Source : see solver.transformer
    """
    plate = _plate_row(unit)
    return _equivalent(columns([(*plate[:-1], taps.factor(unit, n)) for n in notches], 11))


def _equivalent(plates: Real) -> tuple[Complex, Complex, Complex]:
    rating, v1, v2, uk, pk, p0, i0, clock, first, parallel, factor = plates
    z = transformer.short_circuit(uk, pk, rating, v2)
    y = transformer.magnetising(p0, i0, rating, v1)
    tap_1, tap_2 = np.where(first > 0, factor, 1.0), np.where(first > 0, 1.0, factor)
    return transformer.equivalent(v1, v2, z, y, clock, tap_1, tap_2, parallel)


def with_regulators(values: tuple[Complex, Complex, Complex], count: int) -> tuple[Complex, Complex, Complex]:
    """Transformers, and after them regulators: of ratio 1 and without impedance.

    values : ratio, z and y of the transformers
    count : of both together

    Returns : ratio (count,) complex, z (count,) complex [ohm], y (2, count) complex [S]
    """
    ratio, z, y = values
    none = np.zeros(count - len(ratio), dtype=np.complex128)
    return np.append(ratio, none + 1), np.append(z, none), np.append(y, [none, none], axis=1)


def held_values(supplies: Sequence[Supply], ids: Sequence[str], cases: Sequence[Case]) -> Complex:
    """Volts that each supply holds in each case: nominal · held % · case %, or its own % in that case.

    supplies : (source,)
    ids : (source,) of the supplies
    cases : (case,)

    Returns : (source, case) complex [V], between lines or between the two wires
    """
    nominal, held, angle = columns([(s.nominal_v, s.held_percent, s.angle_deg) for s in supplies], 3)
    level = np.array([[percent_of(c, i, s) for c in cases] for i, s in zip(ids, supplies, strict=True)])
    size: Real = nominal[:, None] * (held[:, None] * level.reshape(len(ids), len(cases)) / 1e4)
    return size * np.exp(1j * np.deg2rad(angle))[:, None]


Demand = Load | Generator | Motor
LOAD, MOTOR, STARTING, MAKER = range(4)  # what a case scales it by; a start is not scaled


def _demand_row(element: Demand) -> Row:
    """kVA, power factor, leading; kW and kvar besides; what it is; shares of constant current and impedance;
    reference."""
    if isinstance(element, Generator):
        return 0.0, 1.0, False, -element.output_kw, -element.output_kvar, MAKER, 0.0, 0.0, math.nan
    if isinstance(element, Motor):
        return motor_row(element, element.state == "starting")
    kva, pf, kw = element.demand_kva, element.power_factor, element.demand_kw
    if kva is None:
        kva = kw / pf if kw else 0.0
    current = assumed.value(element, "constant_current_percent") / 100
    impedance = assumed.value(element, "constant_impedance_percent") / 100
    reference = math.nan if element.reference_v is None else element.reference_v
    return kva, pf, element.leading, 0.0, 0.0, LOAD, current, impedance, reference


def motor_row(element: Motor, starts: bool) -> Row:
    """A motor as a load that runs, or that starts: straight on the line an impedance, else a held current.

    element : the motor; off it draws nothing
    starts : bool

    Returns : a row of demands: kVA, power factor, leading; kW and kvar besides; what a case scales it by;
        shares of constant current and impedance; rated V (nan where blank)
    Source : see solver.motor
    """
    drawn = motor.running(element.rated_kw * 1e3, element.efficiency, element.power_factor)
    limits, locked = element.starter != "direct", element.starting_current
    if starts:
        times = min(assumed.value(element, "limited_current"), locked)
        limits = limits and times < locked
        factor = assumed.value(element, "limited_power_factor") if limits else element.starting_power_factor
        drawn = motor.starting(drawn, times, factor)
    drawn = drawn * (element.state != "off")
    reference = math.nan if element.rated_v is None else element.rated_v
    shares = (float(limits), float(not limits)) if starts else (0.0, 0.0)
    kw, kvar = float(drawn.real) / 1e3, float(drawn.imag) / 1e3
    return 0.0, 1.0, False, kw, kvar, STARTING if starts else MOTOR, *shares, reference


_demands: Columns[Demand] = Columns(_demand_row, 9)


def load_values(
    drawn: Sequence[Demand], ids: Sequence[str], nominal_v: Real, cases: Sequence[Case]
) -> tuple[Complex, Real, Real]:
    """Power drawn at the reference voltage, that voltage, and the load mix.

    drawn : (load,) loads, generators and motors; a generator draws negative power
    ids : (load,) of these elements, by which a case states shares and power factors of their own
    nominal_v : (load,) float [V] of their nodes, the reference where none is stated
    cases : (case,) scale loads, running motors and generation

    Returns : power (load, case) complex [VA], whole; reference (load,) float [V]; mix (load, 3) shares of
        constant power, current, impedance
    Source : see solver.load, solver.motor
    """
    power, reference, mix = scaled_values(_demands.of(drawn), nominal_v, cases)
    row = {id: n for n, id in enumerate(ids)} if any(c.own for c in cases) else {}
    for case, id, _ in owned(cases):
        if id in row:
            power[row[id], case] = _own_power(drawn[row[id]], id, cases[case])
    return power, reference, mix


def _own_power(element: Demand, id: str, case: Case) -> complex:
    """Power of an element of which a case states something itself."""
    as_it_is = as_in(case, id, element) if isinstance(element, Load) else element
    whole = complex(_whole(columns([_demand_row(as_it_is)], 9))[0])
    return whole * (scale_of(case, id, element) / 100)


def scaled_values(demands: Real, nominal_v: Real, cases: Sequence[Case]) -> tuple[Complex, Real, Real]:
    """The same of demands that stand in columns already.

    demands : (9, load) float, columns of rows such as motor_row gives
    nominal_v : (load,) float [V] of their nodes
    cases : (case,)

    Returns : power (load, case) complex [VA], reference (load,) float [V], mix (load, 3)
    Source : common practice, no source
    """
    what, current, impedance, reference = demands[5:]
    loads = np.array([c.load_percent for c in cases], dtype=np.float64)
    motors = [c.load_percent if c.motor_percent is None else c.motor_percent for c in cases]
    makers = [c.generation_percent for c in cases]
    scale = np.array([loads, motors, np.full(len(cases), 100.0), makers], dtype=np.float64) / 100
    power = np.asarray(_whole(demands)[:, None] * scale[what.astype(int)], dtype=np.complex128)
    reference = np.asarray(np.where(np.isnan(reference), nominal_v, reference), dtype=np.float64)
    return power, reference, load.mix(current, impedance)


def _whole(demands: Real) -> Complex:
    """(load,) power as stated, VA."""
    kva, pf, leading, kw, kvar = demands[:5]
    return np.asarray((load.power(kva, pf, leading > 0) + kw + 1j * kvar) * 1e3, dtype=np.complex128)


def shunt_values(
    capacitors: Sequence[Capacitor], ids: Sequence[str], nominal_v: Real, cases: Sequence[Case]
) -> Complex:
    """Admittance of capacitors: Y = jQ/U² at the rated voltage, or the node's nominal where that is blank.

    capacitors : (shunt,)
    ids : (shunt,) of the capacitors, by which a case states what share of one is connected
    nominal_v : (shunt,) float [V] of their nodes
    cases : (case,)

    Returns : (shunt, case) complex [S], (shunt, 1) where all cases are alike; per phase or between the
        wires, which is the same number
    Source : common practice, no source
    """
    kvar, rated = columns(
        [(c.rating_kvar, math.nan if c.rated_v is None else c.rated_v) for c in capacitors], 2
    )
    whole: Complex = 1j * kvar * 1e3 / np.where(np.isnan(rated), nominal_v, rated) ** 2
    hung = list(zip(ids, capacitors, strict=True))
    if not {id for _, id, _ in owned(cases)}.intersection(ids):
        return whole[:, None] * np.array([[float(k.connected)] for k in capacitors]).reshape(-1, 1)
    share = np.array([[percent_of(case, id, k) for case in cases] for id, k in hung], dtype=np.float64)
    return whole[:, None] * share / 100
