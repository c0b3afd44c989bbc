"""Cables and overhead lines: data, resistance as used, current, loading, drop, loss, verdict."""

import math
from collections.abc import Callable

from app.model import assumed
from app.model.conductors import is_hung
from app.model.kinds import Line, OverheadLine
from app.sheet.elements import Entry, Extreme, Plan, by_element
from app.sheet.nodes import VERDICT, node_cell
from app.sheet.spacing import KEY as SPACING
from app.sheet.subject import FAIL, FROM_TO, PASSED, Subject, kind_name, limit
from app.sheet.table import Cell, Cells, Column, Ref, SheetTable, Style, given, text
from app.study.checking import margin_of
from app.study.outcome import BranchState
from app.study.overhead_working import BASIS, working_in

KEY = "cables"
DATA = (
    *FROM_TO,
    Column("kind", "Kind", style=Style.TEXT, width=12),
    Column("type", "Type", style=Style.TEXT, width=14),
    Column("conductor", "Metal", style=Style.TEXT, width=6),
    Column("area", "Section", "mm²", digits=0, width=8),
    Column("runs", "Parallel", "runs", digits=0, width=8),
    Column("length", "Length", "m", digits=0, width=8),
    Column("r20", "R at 20 °C", "Ω/km", digits=3, width=8),
    Column("x", "X", "Ω/km", digits=3, width=7),
    Column("theta", "Conductor at", "°C", digits=0, width=9),
    Column("r", "R hot, whole", "Ω", digits=5, width=9),
    Column("xt", "X, whole", "Ω", digits=5, width=9),
    Column("iz", "Iz, one run", "A", digits=0, width=10),
)
DROP = (
    Column("du", "ΔU", "V", digits=1, width=8),
    Column("du_percent", "ΔU", "%", digits=2, width=7),
    Column("cumulative", "ΔU from supply", "%", digits=2, width=9),
)
LOADING = Column("loading", "Loading", "%", near="most", width=8)
LOSS = Column("loss", "Loss", "W", digits=0, width=8)
MARGIN = Column("margin", "Margin", "%", digits=1, near="0", width=8)


def line_tables(subject: Subject) -> list[SheetTable]:
    """Every cable and overhead line."""
    found = {i: e for i, e in subject.drawing.elements.items() if isinstance(e, Line)}
    charging = any(subject.value(i, "capacitance_uf_per_km").value for i in found)
    data = list(DATA)
    if charging:
        data.insert(-1, Column("c", "C", "µF/km", digits=3, width=7))
    if any(is_hung(e) for e in found.values()):
        data.append(Column("basis", "R and X", style=Style.LONG, width=18))
    current = [Column("current", "I", "A", style=Style.AMPS, near="rating", width=8)]
    if charging:
        current.append(Column("series", "I in R", "A", style=Style.AMPS, width=8))
    extremes = (
        Extreme("loading_max", "loading", True, "Loading, most"),
        Extreme("cumulative_max", "cumulative", True, "ΔU from supply, most"),
        Extreme("loss_max", "loss", True, "Loss, most"),
    )
    note = "Loss = 3·I²·R (two-wire: I²·R, R counts out and back). ΔU is the difference of both ends' volts."
    if charging:
        note += " I is the larger of both ends; I in R flows between the two halves of the charging current."
    plan = Plan(
        KEY, "Cables", "Cables and overhead lines", tuple(data), (*current, LOADING, *DROP, LOSS),
        extremes, (MARGIN, VERDICT), note,
    )  # fmt: skip
    return by_element(subject, plan, [_entry(subject, i, e) for i, e in found.items()])


def _entry(subject: Subject, id: str, line: Line) -> Entry:
    states = [subject.state(id, c) for c in range(len(subject.cases))]
    figures = [_figures(subject, id, line, s, c) for c, s in enumerate(states)]
    return Entry(
        id,
        _data(subject, id, line, states[0]),
        figures,
        judge_loading(subject, any(s.live for s in states), line.rating_a is not None),
    )


def stated(subject: Subject, id: str, line: Line) -> Cells:
    """What the drawing says of a line, however many of its conductors are solved."""
    return (
        subject.identity(id)
        | subject.ends(id, line)
        | {
            "kind": text(kind_name(line)),
            "type": given(line.type),
            "conductor": given(line.conductor),
            "area": subject.value(id, "area_mm2"),
            "runs": given(line.side_by_side),
            "length": subject.value(id, "length_m"),
            "r20": subject.value(id, "resistance_ohm_per_km"),
            "x": subject.value(id, "reactance_ohm_per_km"),
            "theta": subject.value(id, "temperature_degc"),
            "c": subject.value(id, "capacitance_uf_per_km"),
            "iz": subject.value(id, "rating_a"),
        }
    )


def _data(subject: Subject, id: str, line: Line, state: BranchState) -> Cells:
    ways = 2 if subject.two_wire(line.start) else 1
    twice = "2*" if ways == 2 else ""
    found = stated(subject, id, line)
    if is_hung(line):
        return found | _by_spacing(subject, id, state)
    found["basis"] = text("as stated")
    if not math.isnan(state.resistance_ohm):
        hot = "{r20}*(1+{alpha}*({theta}-20))"
        alpha = {"alpha": Ref("value", "constants", line.conductor)}
        found["r"] = Cell(state.resistance_ohm, f"{twice}{hot}*{{length}}/1000/{{runs}}", alpha)
        found["xt"] = Cell(state.reactance_ohm, twice + "{x}*{length}/1000/{runs}")
    return found


def _by_spacing(subject: Subject, id: str, state: BranchState) -> Cells:
    """Impedances out of the table of spacings: of one phase, or of a whole loop in a two-wire system."""
    line = subject.drawing.elements[id]
    assert isinstance(line, OverheadLine)
    found = {
        "x": Cell(working_in(subject.drawing, line).z.imag, "{x1}", {"x1": Ref("x1", SPACING, id)}),
        "basis": text(BASIS),
    }
    if not math.isnan(state.resistance_ohm):
        r1 = {"r1": Ref("r1", SPACING, id)}
        found["r"] = Cell(state.resistance_ohm, "{r1}*{length}/1000/{runs}", r1)
        found["xt"] = Cell(state.reactance_ohm, "{x}*{length}/1000/{runs}")
    return found


def _figures(subject: Subject, id: str, line: Line, state: BranchState, case: int) -> Cells:
    if not state.live:
        return {}
    fed, far = (line.start, line.end) if state.forward else (line.end, line.start)
    series = _series_current(subject, line, state, case)
    charged = bool(subject.value(id, "capacitance_uf_per_km").value)
    three = "" if subject.two_wire(line.start) else "3*"
    through = "series" if charged else "current"
    found = {
        "current": Cell(state.current_a),
        "series": Cell(series),
        "loss": Cell(state.loss_kw * 1e3, f"{three}{{{through}}}^2*{{r}}"),
        "rating": Cell(line.rating_a * line.side_by_side if line.rating_a else None),
        "most": Cell(subject.drawing.limits.most_loaded_percent),
    }
    if line.rating_a is not None:
        found["loading"] = Cell(state.loaded_percent, "{current}/({iz}*{runs})*100")
    return found | drop_cells(subject, fed, far, case)


def drop_cells(subject: Subject, fed: str, far: str, case: int) -> Cells:
    """Volts lost from one node to the next, in V and %, and from the supply to the far node."""
    near_end, far_end = subject.outcome.nodes.at(fed, case), subject.outcome.nodes.at(far, case)
    ends = {"fed": node_cell(subject, fed, "u", case), "far": node_cell(subject, far, "u", case)}
    lost = near_end.voltage_v - far_end.voltage_v
    un = {"un": Ref("un", "busbars", far)}
    return {
        "du": Cell(lost, "{fed}-{far}", ends),
        "du_percent": Cell(lost / far_end.nominal_v * 100, "{du}/{un}*100", un),
        "cumulative": Cell(far_end.drop_percent, "{drop}", {"drop": node_cell(subject, far, "drop", case)}),
    }


def _series_current(subject: Subject, line: Line, state: BranchState, case: int) -> float:
    """Current between the two halves of the charging: power at the start less what the half there feeds."""
    volts = subject.outcome.nodes.at(line.start, case).voltage_v
    c_total = assumed.value(line, "capacitance_uf_per_km") * 1e-6 * line.length_m / 1e3 * line.side_by_side
    two_wire = subject.two_wire(line.start)
    if two_wire:
        c_total /= 2  # stated from one wire to the neutral plane
    half_kvar = math.pi * subject.drawing.frequency_hz * c_total * volts**2 / 1e3
    root = 1.0 if two_wire else math.sqrt(3)
    return math.hypot(state.start_kw, state.start_kvar + half_kvar) * 1e3 / (root * volts)


def judge_loading(
    subject: Subject, live: bool, rated: bool, held: str = ""
) -> Callable[[dict[str, float]], Cells]:
    """Loading against its limit: margin and verdict, `held` where it holds; `no rating` where none is
    given."""
    most = subject.drawing.limits.most_loaded_percent
    held = held or subject.held

    def judge(worst: dict[str, float]) -> Cells:
        if not live:
            return {"verdict": subject.unfed()}
        if not rated or "loading_max" not in worst:
            return {"verdict": text("no rating")}
        margin = float(margin_of(worst["loading_max"], most, False))
        return {
            "margin": Cell(margin, "{most}-{loading_max}", {"most": limit("most_loaded")}),
            "verdict": Cell(FAIL if margin < 0 else held, f'IF({{margin}}{PASSED},"FAIL","{held}")'),
        }

    return judge
