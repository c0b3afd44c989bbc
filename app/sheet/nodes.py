"""Busbars and joints: volts, percent of nominal, drop from the supply, limits, signed margin, verdict."""

import math
from collections.abc import Callable

from app.sheet.elements import Entry, Extreme, Plan, by_element, figure
from app.sheet.subject import FAIL, PASSED, Subject, limit
from app.sheet.table import Cell, Cells, Column, Origin, Ref, SheetTable, Style
from app.study.checking import margin_of
from app.study.outcome import NodeState

KEY = "busbars"
PHASE = Column("u_phase", "U phase", "V", style=Style.VOLTS, near="low_phase high_phase", width=10)
BASE = Column("u_120", "U, 120 V base", "V", digits=1, near="low_120 high_120")
VERDICT = Column("verdict", "Verdict", style=Style.VERDICT, width=10)


def node_tables(subject: Subject) -> list[SheetTable]:
    """Every node against the voltage limits and, where one is set, the drop limit."""
    limits = subject.drawing.limits
    figures = [Column("u", "U", "V", style=Style.VOLTS, near="low_v high_v", width=10)]
    figures += [PHASE] if False in subject.wires else []
    figures += [BASE] if subject.american else []
    figures += [
        Column("percent", "U", "% of Un", near="low high"),
        Column("angle", "Angle", "°", digits=1, width=7),
        Column("drop", "Drop from supply", "%", digits=2, near="most_drop"),
        Column("route", "Route from supply", "m", digits=0),
    ]
    judged = [
        Column("low_v", "Lowest allowed", "V", style=Style.VOLTS, width=10, near="u_min"),
        Column("high_v", "Highest allowed", "V", style=Style.VOLTS, width=10, near="u_max"),
        Column("margin", "Margin", "% of Un", digits=2, near="0"),
        Column("margin_v", "Margin", "V", digits=1, near="0"),
    ]
    judged += [Column("drop_margin", "Drop margin", "%", digits=2, near="0")] if limits.drop_percent else []
    extremes = [Extreme("u_min", "u", False, "U lowest"), Extreme("u_max", "u", True, "U highest")]
    extremes += [Extreme("drop_max", "drop", True, "Drop, most")] if limits.drop_percent else []
    plan = Plan(
        KEY,
        "Busbars",
        "Busbars and joints",
        (Column("un", "Un", "V", digits=0, width=9),),
        tuple(figures),
        tuple(extremes),
        (*judged, VERDICT),
        note="Three-phase: U and Un are between lines, U phase is U/√3. Two-wire: between the two wires.",
    )
    return by_element(subject, plan, [_entry(subject, id) for id in subject.drawing.nodes()])


def node_cell(subject: Subject, node: str, column: str, case: int) -> Ref:
    """Where a figure of a node in a case stands."""
    return figure(subject, KEY, node, column, case)


def volts_cell(subject: Subject, node: str, case: int) -> Cell:
    """The volts of a node in a case, read from its row where it has one figure for all phases."""
    volts = subject.outcome.nodes.at(node, case).voltage_v
    if subject.outcome.wires is not None:
        return Cell(volts)
    return Cell(volts, "{at}", {"at": node_cell(subject, node, "u", case)})


def _entry(subject: Subject, id: str) -> Entry:
    states = [subject.outcome.nodes.at(id, c) for c in range(len(subject.cases))]
    un = states[0].nominal_v
    data = subject.identity(id)
    if not math.isnan(un):
        stated = subject.value(id, "nominal_v")
        data["un"] = stated if stated.value is not None else Cell(un, origin=Origin.GIVEN)
    figures = [_figures(subject, id, state, case) for case, state in enumerate(states)]
    return Entry(id, data, figures, _judge(subject, un, any(s.live for s in states)))


def _figures(subject: Subject, id: str, state: NodeState, case: int) -> Cells:
    if not state.live:
        return {}
    layout, limits = subject.layout, subject.drawing.limits
    root = layout.node_ids[layout.roots[layout.tree[layout.node_row[id]]]]
    start = {"start": node_cell(subject, root, "percent", case)}
    found = {
        "u": Cell(state.voltage_v),
        "u_120": Cell(120 * state.voltage_v / state.nominal_v, "120*{u}/{un}"),
        "percent": Cell(state.percent, "{u}/{un}*100"),
        "angle": Cell(state.angle_deg),
        "drop": Cell(state.drop_percent, "{start}-{percent}", start),
        "route": Cell(state.route_m),
        "low": Cell(limits.low_percent),
        "high": Cell(limits.high_percent),
        "most_drop": Cell(limits.drop_percent),
    }
    if not subject.two_wire(id):
        found["u_phase"] = Cell(state.voltage_v / math.sqrt(3), "{u}/SQRT(3)")
    for side, percent in (("low", limits.low_percent), ("high", limits.high_percent)):
        volts = state.nominal_v * percent / 100
        found[side + "_v"] = Cell(volts)
        found[side + "_phase"] = Cell(volts / math.sqrt(3))
        found[side + "_120"] = Cell(1.2 * percent)
    return found


def _judge(subject: Subject, un: float, live: bool) -> Callable[[dict[str, float]], Cells]:
    limits = subject.drawing.limits

    def judge(worst: dict[str, float]) -> Cells:
        low, high = {"low": limit("low")}, {"high": limit("high")}
        found = {"verdict": subject.unfed()}
        if not math.isnan(un):
            found["low_v"] = Cell(un * limits.low_percent / 100, "{un}*{low}/100", low)
            found["high_v"] = Cell(un * limits.high_percent / 100, "{un}*{high}/100", high)
        if not live:
            return found
        spares = (
            margin_of(worst["u_min"] / un * 100, limits.low_percent, True),
            margin_of(worst["u_max"] / un * 100, limits.high_percent, False),
        )
        margin = float(min(spares))
        redo = "MIN({u_min}/{un}*100-{low},{high}-{u_max}/{un}*100)"
        found["margin"] = Cell(margin, redo, low | high)
        found["margin_v"] = Cell(margin * un / 100, "{margin}*{un}/100")
        least, verdict = margin, f'IF({{margin}}{PASSED},"FAIL","{subject.held}")'
        if limits.drop_percent is not None:
            spare = float(margin_of(worst["drop_max"], limits.drop_percent, False))
            found["drop_margin"] = Cell(spare, "{most}-{drop_max}", {"most": limit("drop")})
            least = min(margin, spare)
            verdict = f'IF(MIN({{margin}},{{drop_margin}}){PASSED},"FAIL","{subject.held}")'
        found["verdict"] = Cell(FAIL if least < 0 else subject.held, verdict)
        return found

    return judge
