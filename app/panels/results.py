"""What an element's results say, as rows of text: one cell a case, and the change while dragging."""

import math
from collections.abc import Callable, Iterable
from functools import partial

from app.model import assumed, taps
from app.model.drawing import Drawing
from app.model.figures import amps, change, length, loss, percent, plain, power, volts
from app.model.kinds import (
    Attachment,
    Generator,
    Line,
    Load,
    Motor,
    Node,
    OverheadLine,
    Regulator,
    Supply,
    Switch,
    Transformer,
)
from app.panels import wire_rows
from app.panels.asked import Asked, Row, Write
from app.study.fault_findings import greatest
from app.study.outcome import Finding, NodeState, Outcome, Table
from app.study.overhead_working import ohms as per_km
from app.study.overhead_working import working_in

VOLTAGE, DROP, LOADING = ("voltage low", "voltage high"), ("voltage drop",), ("loading",)


def rows(asked: Asked, id: str) -> list[Row]:
    """The results of one element; none where the outcome does not know it."""
    element = asked.drawing.elements.get(id)
    if element is None:
        return []
    for kind, make in _MAKERS:
        if isinstance(element, kind):
            return make(asked, id)
    return []


def findings_about(outcome: Outcome, ids: Iterable[str]) -> list[Finding]:
    """The findings that name one of these, worst first."""
    wanted = set(ids)
    return sorted((f for f in outcome.findings if wanted & set(f.ids)), key=lambda f: f.verdict.rank)


def _row(
    asked: Asked, table: str, id: str, label: str, figure, write: Write, check: tuple[str, ...] = ()
) -> Row:
    """A row from one figure of a table's state; `figure` is a column name or a function of the state."""
    read = figure if callable(figure) else lambda state: getattr(state, figure)
    states = _states(getattr(asked.outcome, table), id, len(asked.outcome.cases))
    cells = tuple(write(read(s)) if s.live else asked.lacking(case) for case, s in enumerate(states))
    moved = ""
    if asked.before is not None and asked.case < len(states):
        then = getattr(asked.before, table)
        if id in then and asked.case < len(asked.before.cases):
            moved = change(read(states[asked.case]), read(then.at(id, asked.case)), write)
    return Row(label, cells, moved, asked.verdict(id, check))


def _states(table: Table, id: str, cases: int) -> list:
    return [table.at(id, case) for case in range(cases)]


_degrees = partial(plain, digits=1, unit="°")


def _node(asked: Asked, id: str) -> list[Row]:
    if id not in asked.outcome.nodes:
        return []
    row = partial(_row, asked, "nodes", id)
    return [
        *(wire_rows.of_node(asked, id) or [row("Volts", "voltage_v", volts, VOLTAGE)]),
        row(wire_rows.lowest_label(asked, id), "percent", partial(percent, digits=2)),
        *wire_rows.highest(asked, id),
        row("Margin to limit", partial(_margin, asked), partial(percent, digits=2, sign=True)),
        row("Total drop", "drop_percent", partial(percent, digits=2), DROP),
        *wire_rows.evenness(asked, id),
        *(wire_rows.angles(asked, id, _degrees) or [row("Angle", "angle_deg", _degrees)]),
        _once(row("Route", "route_m", length)),
        *_faults(asked, id),
    ]


FAULTS = {
    "a three-phase fault": "Fault, most",
    "a fault between the wires": "Fault between wires",
    "a fault from phase to neutral": "Fault to neutral",
    "a fault to earth": "Fault to earth",
}


def _faults(asked: Asked, id: str) -> list[Row]:
    """Fault currents at a node, which know no case; none where no supply states a fault level."""
    table = asked.outcome.faults
    if table is None or not table.at(id).live:
        return []
    state, kiloamps, ohms = (
        table.at(id),
        partial(plain, digits=2, unit="kA"),
        partial(plain, digits=3, unit="Ω"),
    )
    words, most = greatest(state)
    rows = (
        (FAULTS[words], kiloamps(most)),
        ("Its peak", kiloamps(state.ip_ka)),
        ("Earth fault, least", kiloamps(state.ik1_min_ka)),
        ("Earth loop", ohms(state.zs_ohm)),
    )
    return [Row(label, (text,), "", None) for label, text in rows]


def _margin(asked: Asked, state: NodeState) -> float:
    """Distance to the nearer voltage limit, unrounded; negative is beyond it."""
    limits = asked.drawing.limits
    return min(state.percent - limits.low_percent, limits.high_percent - state.high_percent)


def _once(row: Row) -> Row:
    """The same in every case: said once."""
    return row if len(set(row.cells)) > 1 else Row(row.label, row.cells[:1], row.change, row.verdict)


def _line(asked: Asked, id: str) -> list[Row]:
    if id not in asked.outcome.branches:
        return []
    element, row = asked.drawing.elements[id], partial(_row, asked, "branches", id)
    assert isinstance(element, Line)
    degrees = assumed.value(element, "temperature_degc")
    ohms = partial(plain, digits=4, unit="Ω")
    return [
        *(wire_rows.of_leads(asked, id) or [row("Current", "current_a", amps)]),
        row("Loading", "loaded_percent", percent, LOADING),
        row("Through", "through_kw", power),
        row("Drop", "drop_percent", partial(percent, digits=2)),
        row("Loss", "loss_kw", loss),
        _once(row(f"R at {degrees:g} °C", "resistance_ohm", ohms)),
        _once(row("X", "reactance_ohm", ohms)),
        *_spacing(asked, element),
    ]


def _spacing(asked: Asked, line: Line) -> list[Row]:
    """What a kilometre of one run has by its spacing, which knows no case."""
    if not isinstance(line, OverheadLine) or not line.hung_at_m:
        return []
    made = working_in(asked.drawing, line)
    if made.zero is None:
        return [Row("Loop a km", (per_km(made.z),))]
    return [Row("Z1 a km", (per_km(made.z),)), Row("Z0 a km", (per_km(made.zero),))]


def _transformer(asked: Asked, id: str) -> list[Row]:
    if id not in asked.outcome.branches:
        return []
    element, row = asked.drawing.elements[id], partial(_row, asked, "branches", id)
    assert isinstance(element, Transformer)
    low = element.end if element.v2_v <= element.v1_v else element.start
    made = [
        row("Through", "through_kw", power),
        row("", "through_kva", partial(power, unit="kVA")),
        row("Loading", "loaded_percent", percent, LOADING),
        *wire_rows.of_leads(asked, id),
    ]
    if low in asked.outcome.nodes:
        made.append(_row(asked, "nodes", low, "Lower side", _voltage, volts, VOLTAGE))
    if element.regulates != "no":
        made.append(_stands(asked, id, element.notch_percent))
    return made + [
        row("Copper loss", "copper_kw", loss),
        row("Iron loss", "iron_kw", loss),
        row("Drop in it", "drop_percent", partial(percent, digits=2)),
    ]


def _stands(asked: Asked, id: str, step: float) -> Row:
    """Where what steps by itself stands."""
    return _row(asked, "branches", id, "Stands at", "notch", _notch(step), ("end stop", "runs away"))


def _notch(step: float) -> Write:
    return lambda notch: f"{plain(notch, 0, sign=True)} ({percent(notch * step, 1, sign=True)})"


def _regulator(asked: Asked, id: str) -> list[Row]:
    element = asked.drawing.elements[id]
    assert isinstance(element, Regulator)
    made = _switch(asked, id)
    if not made:
        return []
    sides = (("Volts, start", element.start), ("Volts, end", element.end))
    seen = [_row(asked, "nodes", n, label, _voltage, volts) for label, n in sides if n in asked.outcome.nodes]
    each = wire_rows.of_notches(asked, id, _notch(element.step_percent))
    return [*(each or [_stands(asked, id, element.step_percent)]), *seen, *made]


def _voltage(state: NodeState) -> float:
    return state.voltage_v


def _switch(asked: Asked, id: str) -> list[Row]:
    if id not in asked.outcome.branches:
        return []
    element = asked.drawing.elements[id]
    if isinstance(element, Switch) and not element.closed:  # its ends may be live all the same
        return [Row("Contacts", ("open",) * len(asked.outcome.cases), "", None)]
    row = partial(_row, asked, "branches", id)
    return [
        *(wire_rows.of_leads(asked, id) or [row("Current", "current_a", amps)]),
        row("Loading", "loaded_percent", percent, LOADING),
        row("Through", "through_kw", power),
    ]


def _attachment(asked: Asked, id: str) -> list[Row]:
    if id not in asked.outcome.attachments:
        return []
    element, row = asked.drawing.elements[id], partial(_row, asked, "attachments", id)
    assert isinstance(element, Attachment)
    feeds = not isinstance(element, Load | Motor)
    made = [
        row("Feeds in" if feeds else "Draws", "kw", power),
        row("" if isinstance(element, Load | Motor | Supply | Generator) else "Reactive", "kvar", _kvar),
        *(wire_rows.of_leads(asked, id) or [row("Current", "current_a", amps)]),
        row("Volts", "voltage_v", volts),
    ]
    return made + _start(asked, id)


def _start(asked: Asked, id: str) -> list[Row]:
    """What the start of a motor does, to itself, its board and its supply."""
    table = asked.outcome.starts
    if table is None or id not in table:
        return []
    states = _states(table, id, len(asked.outcome.cases))
    before = asked.before.starts if asked.before is not None else None
    then = before.at(id, asked.case) if before is not None and id in before else None
    made = []
    for label, name, write, check in _START:
        figures = [getattr(s, name) for s in states]
        if all(math.isnan(figure) for figure in figures):
            continue
        cells = asked.cells(figures, partial(_of_start, write))
        moved = change(getattr(states[asked.case], name), getattr(then, name), write) if then else ""
        made.append(Row(label, cells, moved, asked.verdict(id, check)))
    return made


def _of_start(write: Write, figure: float) -> str:
    return "no start" if math.isnan(figure) else write(figure)


_kvar = partial(power, unit="kvar")
_step = partial(percent, digits=2)
_START: tuple[tuple[str, str, Write, tuple[str, ...]], ...] = (
    ("At start", "current_a", amps, ()),
    ("Volts at start", "motor_v", volts, ("start volts",)),
    ("Of rated", "motor_percent", percent, ("start volts",)),
    ("Step at board", "board_step_percent", _step, ("start step, board",)),
    ("Step at supply", "supply_step_percent", _step, ("start step, supply",)),
    ("Start torque", "torque_percent", partial(percent, digits=0), ()),
)
_MAKERS: tuple[tuple[type, Callable[[Asked, str], list[Row]]], ...] = (
    (Node, _node),
    (Line, _line),
    (Transformer, _transformer),
    (Regulator, _regulator),
    (Switch, _switch),
    (Attachment, _attachment),
)


def tap_words(drawing: Drawing, outcome: Outcome | None, id: str, case: int) -> str:
    """What the tap does: `tap −2.5 %: 10725/400, raises winding 2`."""
    element = drawing.elements[id]
    assert isinstance(element, Transformer)
    if element.regulates != "no":
        return "begins here and steps by itself"
    fed = outcome.supply_winding(id, case) if outcome is not None else 1
    return taps.words(element, element.tap, fed)
