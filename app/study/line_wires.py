"""Lines between their conductors: impedance and admittance matrices, and which conductors each has."""

import numpy as np
from msgspec.structs import replace
from numpy.typing import NDArray

from app.model import assumed
from app.model.drawing import Drawing
from app.model.fault_data import Put, fault_value
from app.model.kinds import Line, OverheadLine
from app.model.levels import THREE_PHASE
from app.model.wire_data import neutral_of, neutral_value
from app.study.conductors import Conductors
from app.study.graph import Layout
from app.study.overhead import matrix_of
from app.study.wires import ABC, letters
from app.study.zones import Zones
from solver import line

K = 4
Complex = NDArray[np.complex128]
Index = NDArray[np.intp]
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
    z = np.zeros((len(rows), K, K, 1), dtype=np.complex128)
    y = np.zeros_like(z)
    has = np.array([[conductors.branch[row] >> i & 1 for i in range(K)] for row in rows], dtype=bool)
    has = has.reshape(len(rows), K)
    for n, row in enumerate(rows):
        run = layout.branches[row]
        if isinstance(run, Line):
            zone = layout.zone[layout.start[row]]
            single, nominal = zones.system[zone] != THREE_PHASE, float(zones.nominal_v[zone])
            if isinstance(run, OverheadLine) and run.hung_at_m:
                phases = letters(conductors.branch[row] & ABC)
                z[n, ..., 0], y[n, ..., 0] = _hung(run, phases, nominal, single, drawing.frequency_hz)
            else:
                z[n, ..., 0], y[n, ..., 0] = matrices(run, nominal, single, drawing.frequency_hz)
    both = has[:, :, None] & has[:, None, :]
    return z * both[..., None], y * both[..., None], has


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
