"""Overhead lines from what hangs on their poles: per kilometre, phase by phase, in sequences or as a loop."""

import math
from collections.abc import Sequence
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from app.model import assumed
from app.model.conductors import Hung, hung
from app.model.kinds import Line, OverheadLine
from app.model.wire_data import neutral_of
from solver import carson, line

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
ABCN = "ABCN"
CARRIED, ALONG = "carried", "earthed along"


def matrix_of(run: OverheadLine, frequency: float, nominal_v: float = math.nan) -> tuple[Complex, Complex]:
    """Impedance and admittance between the conductors of one run, per kilometre, at its temperature.

    Modified Carson between all that hangs; a neutral earthed along is taken out by Kron, one that is carried
    stays in slot N. Y = jω·P⁻¹ of the potential coefficients, or jωC of each phase where C is stated.
    Good where the conductors hang far lower than the depth of their return in the earth, as on any soil but
    sea water; ground wires, skin effect and sag are not looked at.

    run : states its spacing; its places fill the slots of its phases, those of a lateral on `all` from A on
    frequency : float [Hz]
    nominal_v : float [V] decides where its neutral says `usual`: carried up to 1 kV or where it is nan,
        earthed along above

    Returns : z (4, 4) complex [ohm/km], y (4, 4) complex [S/km] in slots A, B, C, N; nothing in the rows and
        columns of conductors that it does not have or that returns through earth
    Source : see solver.carson; Kersting, Distribution System Modeling and Analysis, chapters 4 and 5
    """
    it, kind = hung(run), kind_of_neutral(run, nominal_v)
    kept = len(it.letters) if kind == CARRIED else it.phases
    slots = [ABCN.index(letter) for letter in it.letters[:kept]]
    z, y = np.zeros((2, 4, 4), dtype=np.complex128)
    between = np.ix_(slots, slots)
    z[between] = _reduced(_series_of(run, it, frequency, math.nan), it, kind)
    if run.capacitance_uf_per_km is None:
        p = _reduced(carson.potential(it.radius_m, it.x_m, it.y_m).astype(np.complex128), it, kind)
        y[between] = 2j * math.pi * frequency * np.linalg.inv(p)
    else:
        each = slots[: it.phases]
        y[each, each] = 2j * math.pi * frequency * run.capacitance_uf_per_km * 1e-6
    return z, y


def kind_of_neutral(run: OverheadLine, nominal_v: float = math.nan) -> str:
    """How the neutral that hangs beside the phases is treated.

    run : states its spacing
    nominal_v : float [V]; nan counts as low

    Returns : `carried`, `earthed along`, or `none` where none hangs or none is wanted
    """
    if not hung(run).letters.endswith("N"):
        return "none"
    return neutral_of(run, 0.0 if math.isnan(nominal_v) else nominal_v, False)


def sequence_of(
    run: OverheadLine, frequency: float, nominal_v: float = math.nan, temperature: float = math.nan
) -> tuple[complex, complex]:
    """Positive and zero sequence per kilometre of one run whose phases change places along the way.

    Z1 = Zs - Zm, Z0 = Zs + 2 Zm of the means; a carried neutral brings all of the zero sequence back:
    Z0 = Zs + 2 Zm - 6 Zn + 3 Znn with Zn between phases and neutral. Of a single phase both are its loop.

    run : states its spacing
    frequency : float [Hz]
    nominal_v : float [V], see matrix_of
    temperature : float [°C] of all its conductors; nan: as it operates

    Returns : z1, z0 complex [ohm/km]
    Source : see solver.carson
    """
    it, kind = hung(run), kind_of_neutral(run, nominal_v)
    full = _series_of(run, it, frequency, temperature)
    z = _reduced(full, it, ALONG if kind == ALONG else "none")
    own = complex(np.trace(z)) / it.phases
    if it.phases == 1:
        zero = own if kind != CARRIED else complex(full[0, 0] - 2 * full[0, 1] + full[1, 1])
        return zero, zero
    mutual = (complex(z.sum()) - own * it.phases) / (it.phases * (it.phases - 1))
    zero = own + 2 * mutual
    if kind == CARRIED:
        zero += 3 * complex(full[-1, -1]) - 6 * complex(full[: it.phases, -1].mean())
    return own - mutual, zero


def loop_of(run: OverheadLine, frequency: float, temperature: float = math.nan) -> complex:
    """Impedance per kilometre of one run out and back in a two-wire system.

    Out on the first wire and back on the last: Z = Z11 - 2 Z12 + Z22. A single wire, or one beside a neutral
    earthed along, comes back through the earth: its own Z.

    run : states its spacing
    frequency : float [Hz]
    temperature : float [°C] of both wires; nan: as it operates

    Returns : complex [ohm/km]
    Source : see solver.carson
    """
    it = hung(run)
    full = _series_of(run, it, frequency, temperature)
    if run.neutral == ALONG or len(it.letters) == 1:
        return complex(_reduced(full, it, ALONG)[0, 0])
    return complex(full[0, 0] - 2 * full[0, -1] + full[-1, -1])


def series_of(
    run: OverheadLine, two_wire: bool, frequency: float, nominal_v: float, temperature: float = math.nan
) -> complex:
    """Series impedance of the whole line, runs side by side merged: of one phase, or out and back.

    run : states its spacing
    two_wire : out and back
    frequency : float [Hz]
    nominal_v : float [V], see matrix_of
    temperature : float [°C]; nan: as it operates

    Returns : complex [ohm]
    Source : see solver.carson
    """
    if two_wire:
        per_km = loop_of(run, frequency, temperature)
    else:
        per_km = sequence_of(run, frequency, nominal_v, temperature)[0]
    return per_km * run.length_m / 1e3 / run.side_by_side


Known = tuple[Line, bool, float, float, complex]
_last: dict[int, Known] = {}


def put_in(
    z: Complex,
    rows: NDArray[np.intp],
    lines: Sequence[Line],
    two_wire: NDArray[np.bool_],
    frequency: float,
    nominal_v: Real,
) -> None:
    """Puts the series impedances of lines that state their spacing among those of all lines; what is the same
    as last time is remembered.

    z : (line,) complex [ohm], written to
    rows : which of the lines state their spacing
    lines : (line,)
    two_wire : (line,) bool
    frequency : float [Hz]
    nominal_v : (line,) float [V]
    """
    global _last
    made: dict[int, Known] = {}
    for row in rows.tolist():
        run, how = lines[row], (bool(two_wire[row]), frequency, float(nominal_v[row]))
        was = _last.get(id(run))
        if was is None or was[0] is not run or was[1:4] != how:
            assert isinstance(run, OverheadLine)
            was = (run, *how, series_of(run, *how))
        made[id(run)] = was
        z[row] = was[4]
    if len(rows):
        _last = made


def _series_of(run: OverheadLine, it: Hung, frequency: float, temperature: float) -> Complex:
    degrees = assumed.value(run, "temperature_degc") if math.isnan(temperature) else temperature
    hot = line.resistance(it.r20_ohm_per_km, line.ALPHA[run.conductor], degrees)
    return _carson(tuple(hot.tolist()), it.gmr_m, it.x_m, it.y_m, frequency, it.soil_ohm_m)


@lru_cache(maxsize=4096)
def _carson(
    r: tuple[float, ...],
    gmr: tuple[float, ...],
    x: tuple[float, ...],
    y: tuple[float, ...],
    frequency: float,
    soil: float,
) -> Complex:
    made = carson.primitive(r, gmr, x, y, frequency, soil)
    made.flags.writeable = False
    return made


def _reduced(matrix: Complex, it: Hung, kind: str) -> Complex:
    """The phases alone with the neutral earthed along, or left out; all conductors where it is carried."""
    if kind == CARRIED or not it.letters.endswith("N"):
        return matrix
    return carson.kron(matrix, it.phases) if kind == ALONG else matrix[: it.phases, : it.phases]
