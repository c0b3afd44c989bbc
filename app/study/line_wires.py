"""Lines between their conductors: impedance and admittance matrices, and which conductors each has."""

from collections.abc import Sequence

import numpy as np
from msgspec.structs import replace
from numpy.typing import NDArray

from app.model import assumed
from app.model.drawing import Drawing
from app.model.fault_data import Put, fault_value
from app.model.kinds import Branch, Line, OverheadLine
from app.model.levels import THREE_PHASE
from app.model.wire_data import neutral_of, neutral_value
from app.study.conductors import Conductors
from app.study.graph import Layout, arrays_of
from app.study.overhead import matrix_of
from app.study.wires import ABC, letters
from app.study.zones import Zones
from solver import line

K = 4
Complex = NDArray[np.complex128]
Index = NDArray[np.intp]
NOTHING = np.zeros((K, K), dtype=np.complex128)
NEUTRAL_FIELDS = ("neutral_resistance_ohm_per_km", "neutral_reactance_ohm_per_km")
ZERO_FIELDS = ("zero_resistance_ohm_per_km", "zero_reactance_ohm_per_km")


def line_matrices(
    drawing: Drawing, layout: Layout, zones: Zones, conductors: Conductors, rows: Index
) -> tuple[Complex, Complex, NDArray[np.bool_]]:
    """Matrices of whole lines, parallel runs merged; nothing but conductors where the row is a closed switch.

    A carried neutral has its own impedance, and no mutual to the phases, whose reactance is stated as for
    three phases or out and back. One earthed along is within Z0: Zs = (2 Z1 + Z0) / 3, Zm = (Z0 - Z1) / 3.

    drawing : the drawing, for its frequency
    layout : its graph
    zones : its voltage levels and systems
    conductors : bits of every branch
    rows : (line,) branch rows

    Returns : z (line, k, k, 1) complex [ohm], y (line, k, k, 1) complex [S], has (line, k) bool
    Source : see solver.line
    """
    global _last
    zone = arrays_of(layout).zone[arrays_of(layout).start[rows]]
    bits = np.array(conductors.branch, dtype=np.intp)[rows]
    nominal, single = zones.nominal_v[zone], np.array([s != THREE_PHASE for s in zones.system])[zone]
    runs = [layout.branches[row] for row in rows]
    told = [*zip(bits.tolist(), nominal.tolist(), single.tolist(), strict=True)]
    were, told_then, z, y, frequency = _last
    if len(were) != len(runs) or frequency != drawing.frequency_hz:
        were, told_then = [None] * len(runs), told
        z = np.zeros((len(rows), K, K, 1), dtype=np.complex128)
        y = np.zeros_like(z)
    moved = [n for n, run in enumerate(runs) if run is not were[n] or told[n] != told_then[n]]
    has = (bits[:, None] >> np.arange(K) & 1).astype(bool)
    if moved:
        z, y = z.copy(), y.copy()
        for n in moved:
            both = np.outer(has[n], has[n])
            for whole, part in zip((z, y), _matrices(runs[n], *told[n], drawing.frequency_hz), strict=True):
                whole[n, ..., 0] = part * both
    _last = (runs, told, z, y, drawing.frequency_hz)
    return z, y, has


Told = tuple[int, float, bool]  # what a matrix hangs on besides its line: bits, nominal volts, single-phase
_last: tuple[Sequence[Branch | None], list[Told], Complex, Complex, float]
_last = ([], [], np.zeros((0, K, K, 1), np.complex128), np.zeros((0, K, K, 1), np.complex128), 0.0)


def _matrices(
    run: Branch, bits: int, nominal_v: float, single: bool, frequency_hz: float
) -> tuple[Complex, Complex]:
    """Of one line; noughts for a switch, and where no phase reaches it."""
    if not isinstance(run, Line) or not bits & ABC:
        return NOTHING, NOTHING
    if isinstance(run, OverheadLine) and run.hung_at_m:
        return _hung(run, letters(bits & ABC), nominal_v, single, frequency_hz)
    return matrices(run, nominal_v, single, frequency_hz)


def _hung(
    run: OverheadLine, phases: str, nominal_v: float, single: bool, frequency_hz: float
) -> tuple[Complex, Complex]:
    """The same of a line that states its spacing; its places are those of the phases that reach it."""
    if run.phases == "all" and len(phases) < 3:
        run = replace(run, phases="CA" if phases == "AC" else phases)
    z, y = matrix_of(run, frequency_hz, 0.0 if single else nominal_v)
    length = run.length_m / 1e3
    return z * length / run.side_by_side, y * length * run.side_by_side


def matrices(run: Line, nominal_v: float, single: bool, frequency_hz: float) -> tuple[Complex, Complex]:
    """Series impedance and shunt admittance among A, B, C and N, as if it had all of them.

    run : cable or overhead line
    nominal_v : float [V] of its zone
    single : its system has no three phases
    frequency_hz : float [Hz]

    Returns : z (k, k) complex [ohm], y (k, k) complex [S]
    Source : see solver.line
    """
    r20, x, length = run.resistance_ohm_per_km, run.reactance_ohm_per_km, run.length_m
    hot, alpha, runs = assumed.value(run, "temperature_degc"), line.ALPHA[run.conductor], run.side_by_side

    def whole(r: float, reactance: float) -> Complex:
        return line.series(r, reactance, length, hot, alpha, runs)

    phase, kind = whole(r20, x), neutral_of(run, nominal_v, single)
    z = np.zeros((K, K), dtype=np.complex128)
    if kind == "earthed along":
        r0, x0 = (_plain(fault_value(run, name, nominal_v, frequency_hz)) for name in ZERO_FIELDS)
        back = line.series(r0 - r20, x0, length, 20.0, alpha, runs)  # the way back stays cold
        zero = back + whole(r20, 0.0)
        z[:3, :3] = line.symmetric(phase, zero)
    else:
        neutral = whole(*(_plain(neutral_value(run, name)) for name in NEUTRAL_FIELDS))
        z = line.four_wire(phase, neutral)
    farads = assumed.value(run, "capacitance_uf_per_km")
    y = line.charging(farads, length, frequency_hz, runs) * np.diag([1.0, 1.0, 1.0, 0.0])
    return z, np.asarray(y, dtype=np.complex128)


def _plain(value: float | Put) -> float:
    return value.value if isinstance(value, Put) else value
