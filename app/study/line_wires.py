"""Lines between their conductors: impedance and admittance matrices, and which conductors each has."""

from collections.abc import Sequence

import numpy as np
from msgspec.structs import replace
from numpy.typing import NDArray

from app.model import assumed
from app.model.drawing import Drawing
from app.model.fault_data import fault_value, figure
from app.model.kinds import Branch, Line, OverheadLine
from app.model.levels import THREE_PHASE, TWO_WIRE
from app.model.wire_data import neutral_of, neutral_value
from app.study.conductors import Conductors
from app.study.graph import Layout, arrays_of
from app.study.memory import Columns
from app.study.overhead import matrix_of
from app.study.wires import ABC, flags, letters
from app.study.zones import Zones
from solver import line

K = 4
Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
Index = NDArray[np.intp]
PAIR = np.array([[1, 0, 0, -1], [0, 1, 0, -1], [0, 0, 1, -1], [-1, -1, -1, 1]])  # whichever phase there is
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
    nominal, systems = zones.nominal_v[zone], [zones.system[z] for z in zone]
    runs = [layout.branches[row] for row in rows]
    told = [*zip(bits.tolist(), nominal.tolist(), systems, strict=True)]
    were, told_then, z, y, frequency = _last
    if len(were) != len(runs) or frequency != drawing.frequency_hz:
        were, told_then = [None] * len(runs), told
        z = np.zeros((len(rows), K, K, 1), dtype=np.complex128)
        y = np.zeros_like(z)
    moved = [n for n, run in enumerate(runs) if run is not were[n] or told[n] != told_then[n]]
    has = flags(bits)
    if moved:
        z, y = z.copy(), y.copy()
        z[moved], y[moved] = _of_lines(
            [runs[n] for n in moved], [told[n] for n in moved], drawing.frequency_hz
        )
        both = (has[:, :, None] & has[:, None, :])[moved][..., None]
        z[moved], y[moved] = z[moved] * both, y[moved] * both
    _last = (runs, told, z, y, drawing.frequency_hz)
    return z, y, has


Told = tuple[int, float, str]  # what a matrix hangs on besides its line: bits, nominal volts, system
_last: tuple[Sequence[Branch | None], list[Told], Complex, Complex, float]
_last = ([], [], np.zeros((0, K, K, 1), np.complex128), np.zeros((0, K, K, 1), np.complex128), 0.0)


def _of_lines(runs: list[Branch], told: list[Told], frequency_hz: float) -> tuple[Complex, Complex]:
    """Matrices of some lines; noughts for a switch, and where no phase reaches it."""
    z = np.zeros((len(runs), K, K, 1), dtype=np.complex128)
    y = np.zeros_like(z)
    plain: list[int] = []
    for n, (run, (bits, nominal, system)) in enumerate(zip(runs, told, strict=True)):
        if isinstance(run, OverheadLine) and run.hung_at_m and bits & ABC:
            z[n, ..., 0], y[n, ..., 0] = _hung(run, letters(bits & ABC), nominal, system, frequency_hz)
        elif isinstance(run, Line) and bits & ABC:
            plain.append(n)
    if plain:
        lines = [run for n in plain if isinstance(run := runs[n], Line)]
        levels = [told[n][1:] for n in plain]
        z[plain, ..., 0], y[plain, ..., 0] = matrices(lines, levels, frequency_hz)
    return z, y


def _hung(
    run: OverheadLine, phases: str, nominal_v: float, system: str, frequency_hz: float
) -> tuple[Complex, Complex]:
    """The same of a line that states its spacing; its places are those of the phases that reach it."""
    if run.phases == "all" and len(phases) < 3:
        run = replace(run, phases="CA" if phases == "AC" else phases)
    z, y = matrix_of(run, frequency_hz, nominal_v if system == THREE_PHASE else 0.0)
    length = run.length_m / 1e3
    return z * length / run.side_by_side, y * length * run.side_by_side


def matrices(
    runs: Sequence[Line], levels: Sequence[tuple[float, str]], frequency_hz: float
) -> tuple[Complex, Complex]:
    """Series impedance and shunt admittance among A, B, C and N, as if each had all of them.

    A capacitance is that of a phase to earth; on two wires half of it stands between them, as both have it to
    the neutral plane.

    runs : (line,) cables and overhead lines that state no spacing
    levels : (line,) nominal volts of the zone, and its system
    frequency_hz : float [Hz]

    Returns : z (line, k, k) complex [ohm], y (line, k, k) complex [S]
    Source : see solver.line
    """
    r20, x, length, hot, alpha, many, farads, rn, xn = _stated.of(runs)

    def whole(r: Real, reactance: Real) -> Complex:
        return line.series(r, reactance, length, hot, alpha, many)

    phase = whole(r20, x)
    z = line.four_wire(phase, whole(rn, xn))
    kinds = [neutral_of(run, v, system != THREE_PHASE) for run, (v, system) in zip(runs, levels, strict=True)]
    along = [n for n, kind in enumerate(kinds) if kind == "earthed along"]
    if along:
        zero = [
            [figure(fault_value(runs[n], f, levels[n][0], frequency_hz)) for f in ZERO_FIELDS] for n in along
        ]
        r0, x0 = np.array(zero).T
        back = line.series(r0 - r20[along], x0, length[along], 20.0, alpha[along], many[along])
        z[along] = 0  # the way back stays cold, and has no conductor of its own
        z[along, :3, :3] = line.symmetric(phase[along], back + whole(r20, 0 * x)[along])
    y = line.charging(farads, length, frequency_hz, many)[:, None, None] * np.diag([1.0, 1.0, 1.0, 0.0])
    pair = [n for n, (_, system) in enumerate(levels) if system == TWO_WIRE and kinds[n] == "carried"]
    y[pair] = y[pair, :1, :1] / 2 * PAIR
    return z, np.asarray(y, dtype=np.complex128)


def _stated_row(run: Line) -> tuple[float, ...]:
    hot, c = assumed.value(run, "temperature_degc"), assumed.value(run, "capacitance_uf_per_km")
    own = run.resistance_ohm_per_km, run.reactance_ohm_per_km, run.length_m
    neutral = (figure(neutral_value(run, name)) for name in NEUTRAL_FIELDS)
    return *own, hot, line.ALPHA[run.conductor], run.side_by_side, c, *neutral


_stated: Columns[Line] = Columns(_stated_row, 9)
