"""Overhead lines by what hangs on their poles: distances, GMR, and the impedance that follows, live."""

import math

from app.model import assumed
from app.model.conductors import hung
from app.model.kinds import OverheadLine
from app.sheet.spacing_pairs import pair_tables
from app.sheet.subject import IDENTITY, Subject
from app.sheet.table import Cell, Cells, Column, Origin, Ref, SheetTable, Style, given, table, text
from app.study.overhead_working import BASIS, SOURCE, Working, working_in

KEY = "spacing"
TAB = "Spacing"
COLUMNS = (
    Column("hung", "x and height of A, B, C, N", "m", style=Style.LONG, width=24),
    Column("r20", "R at 20 °C", "Ω/km", digits=4, width=8),
    Column("theta", "Conductor at", "°C", digits=0, width=11),
    Column("r", "R hot", "Ω/km", digits=4, width=8),
    Column("dab", "A to B", "m", digits=3, width=7),
    Column("dbc", "B to C", "m", digits=3, width=7),
    Column("dca", "C to A", "m", digits=3, width=7),
    Column("over", "Mean distance or depth", "m", digits=3, width=14),
    Column("gmr", "GMR", "mm", digits=3, width=7),
    Column("gmr_back", "GMR, wire back", "mm", digits=3, width=10),
    Column("frequency", "f", "Hz", digits=0, width=5),
    Column("share_r", "R, way back", "Ω/km", digits=4, width=11),
    Column("share_x", "X, way back", "Ω/km", digits=4, width=11),
    Column("r1", "R1, or loop", "Ω/km", digits=4, width=8),
    Column("x1", "X1, or loop", "Ω/km", digits=4, width=8),
    Column("r0", "R0", "Ω/km", digits=4, width=8),
    Column("x0", "X0", "Ω/km", digits=4, width=8),
    Column("soil", "Soil", "Ω·m", digits=0, width=7),
    Column("c", "C", "µF/km", digits=5, width=8),
    Column("back", "The rest comes", style=Style.LONG, width=24),
)
NOTE = (
    "X1 = 2·π·f·2·10⁻⁴·ln(GMD/GMR), with both GMR where one wire leads out and another back, or the depth of "
    "the return in the earth in place of the distance; and what the way back adds, which is taken out of the "
    "matrix by Kron's reduction where the neutral is earthed along. Phases change places along the way. "
    f"{SOURCE}."
)


def spacing_tables(subject: Subject) -> list[SheetTable]:
    """Every line that states its spacing; none where there is none."""
    found = {i: e for i, e in subject.drawing.elements.items() if isinstance(e, OverheadLine) and e.hung_at_m}
    if not found:
        return []
    rows = {id: _row(subject, id, line) for id, line in found.items()}
    shown = table(KEY, TAB, f"Overhead lines {BASIS}", (*IDENTITY, *COLUMNS), rows, note=NOTE)
    return [shown, *pair_tables(subject)]


def _row(subject: Subject, id: str, line: OverheadLine) -> Cells:
    made = working_in(subject.drawing, line)
    alpha = {"alpha": Ref("value", "constants", line.conductor)}
    found = subject.identity(id) | {
        "hung": given(line.hung_at_m),
        "r20": subject.value(id, "resistance_ohm_per_km"),
        "theta": _value(line, "temperature_degc"),
        "r": Cell(made.r, "{r20}*(1+{alpha}*({theta}-20))", alpha),
        "gmr": _value(line, "gmr_mm"),
        "frequency": given(subject.drawing.frequency_hz),
        "share_r": Cell(made.share.real),
        "share_x": Cell(made.share.imag),
        "r1": Cell(made.z.real, "{r}+{share_r}"),
        "x1": Cell(made.z.imag, _reactance(made)),
        "soil": _value(line, "soil_ohm_m"),
        "c": _value(line, "capacitance_uf_per_km"),
        "back": text(made.back),
    }
    if len(made.under_mm) > 1:
        found["gmr_back"] = Cell(made.under_mm[1])
    if made.zero is not None:
        found |= {"r0": Cell(made.zero.real), "x0": Cell(made.zero.imag)}
    return found | _distances(line, made)


def _reactance(made: Working) -> str:
    logs = "LN({over}*1000/{gmr})"
    if len(made.under_mm) > 1:
        logs = f"({logs}+LN({{over}}*1000/{{gmr_back}}))"
    return f"2*PI()*{{frequency}}*0.0002*{logs}+{{share_x}}"


def _distances(line: OverheadLine, made: Working) -> Cells:
    """Those between three phases, and their mean; else the one distance or depth that counts."""
    it = hung(line)
    if it.phases != 3 or made.zero is None:
        return {"over": Cell(made.over_m)}
    spots = [complex(x, y) for x, y in zip(it.x_m, it.y_m, strict=True)]
    apart = {"dab": spots[0] - spots[1], "dbc": spots[1] - spots[2], "dca": spots[2] - spots[0]}
    found = {name: Cell(abs(way)) for name, way in apart.items()}
    mean = math.prod(abs(way) for way in apart.values()) ** (1 / 3)
    return found | {"over": Cell(mean, "({dab}*{dbc}*{dca})^(1/3)")}


def _value(line: OverheadLine, field: str) -> Cell:
    """Stated, or what is assumed for it."""
    stated = getattr(line, field)
    origin = Origin.GIVEN if stated is not None and field not in line.assumed else Origin.ASSUMED
    return Cell(assumed.value(line, field), origin=origin)
