"""The matrix behind a spacing, pair by pair: each conductor with its return in the earth, live, and what is
left of it where the neutral is taken in."""

from itertools import combinations_with_replacement

import numpy as np

from app.model import assumed
from app.model.conductors import Hung, hung
from app.model.kinds import OverheadLine
from app.model.levels import THREE_PHASE, nominal_levels
from app.sheet.subject import Subject
from app.sheet.table import Cell, Cells, Column, Ref, SheetTable, Style, given, table, text
from app.study.overhead import Complex, kind_of_neutral, matrix_of
from solver import carson
from solver.line import ALPHA, resistance

KEY = "spacing_pairs"
ABCN = "ABCN"
COLUMNS = (
    Column("lines", "Lines", style=Style.LONG, width=24),
    Column("pair", "Between", style=Style.TEXT, width=10),
    Column("apart", "Distance, or GMR", "m", digits=5, width=10),
    Column("r20", "R at 20 °C", "Ω/km", digits=4, width=8),
    Column("theta", "Conductor at", "°C", digits=0, width=9),
    Column("soil", "Soil", "Ω·m", digits=0, width=7),
    Column("frequency", "f", "Hz", digits=0, width=5),
    Column("depth", "Depth De", "m", digits=1, width=9),
    Column("r", "R", "Ω/km", digits=5, width=9),
    Column("x", "X", "Ω/km", digits=5, width=9),
    Column("used_r", "R as used", "Ω/km", digits=5, width=9),
    Column("used_x", "X as used", "Ω/km", digits=5, width=9),
)
DEPTH = "2*EXP(0.5-0.5772156649015329)/SQRT(2*PI()*{frequency}*4E-7*PI()/{soil})"
NOTE = (
    "Zii = R + π²·f·10⁻⁴ + j·2·π·f·2·10⁻⁴·ln(De/GMR), Zij likewise with the distance and without R (modified "
    "Carson's equations). As used: after Kron's reduction where the neutral is earthed along; with phases "
    "where they hang, not changing places."
)


def pair_tables(subject: Subject) -> list[SheetTable]:
    """Every pair of conductors of every spacing; lines that are alike stand together."""
    levels = nominal_levels(subject.drawing)
    alike: dict[tuple[Hung, float, str, str], list[tuple[str, OverheadLine, float]]] = {}
    for id, line in subject.drawing.elements.items():
        if isinstance(line, OverheadLine) and line.hung_at_m:
            level = levels.get(line.start)
            three = level is not None and level.wires == THREE_PHASE
            nominal = level.volts if level is not None and three else 0.0
            theta = assumed.value(line, "temperature_degc")
            key = hung(line), theta, line.conductor, kind_of_neutral(line, nominal)
            alike.setdefault(key, []).append((id, line, nominal))
    rows: dict[str, Cells] = {}
    for (it, theta, _, _), found in alike.items():
        _, line, nominal = found[0]
        ids = text(", ".join(id for id, _, _ in found))
        z = matrix_of(line, subject.drawing.frequency_hz, nominal)[0]
        for i, j in combinations_with_replacement(range(len(it.letters)), 2):
            rows[f"{found[0][0]} {it.letters[i]}{it.letters[j]}"] = {"lines": ids} | _pair(
                subject, line, it, theta, z, (i, j)
            )
    if not rows:
        return []
    return [table(KEY, "Spacing", "Impedances between conductors", COLUMNS, rows, note=NOTE, held=2)]


def _pair(
    subject: Subject, line: OverheadLine, it: Hung, theta: float, z: Complex, pair: tuple[int, int]
) -> Cells:
    i, j = pair
    hertz, own = subject.drawing.frequency_hz, i == j
    apart = it.gmr_m[i] if own else abs(complex(it.x_m[i] - it.x_m[j], it.y_m[i] - it.y_m[j]))
    depth = carson.earth_depth(hertz, it.soil_ohm_m)
    earth = 2 * np.pi * hertz * 2e-4
    hot = float(resistance(it.r20_ohm_per_km[i], ALPHA[line.conductor], theta)) if own else 0.0
    cells = {
        "pair": text(it.letters[i] if own else f"{it.letters[i]} and {it.letters[j]}"),
        "apart": Cell(apart),
        "soil": given(it.soil_ohm_m),
        "frequency": given(hertz),
        "depth": Cell(depth, DEPTH),
        "r": Cell(hot + earth * np.pi / 4, "PI()^2*{frequency}*0.0001"),
        "x": Cell(earth * np.log(depth / apart), "2*PI()*{frequency}*0.0002*LN({depth}/{apart})"),
    }
    if own:
        alpha = {"alpha": Ref("value", "constants", line.conductor)}
        warm = "{r20}*(1+{alpha}*({theta}-20))+PI()^2*{frequency}*0.0001"
        cells |= {"r20": given(it.r20_ohm_per_km[i]), "theta": given(theta)}
        cells["r"] = Cell(hot + earth * np.pi / 4, warm, alpha)
    slots = ABCN.index(it.letters[i]), ABCN.index(it.letters[j])
    if z[slots]:
        cells |= {"used_r": Cell(float(z[slots].real)), "used_x": Cell(float(z[slots].imag))}
    return cells
