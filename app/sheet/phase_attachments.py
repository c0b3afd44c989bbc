"""Loads, motors and infeeds where phases are solved one by one: on which conductors, amperes in each lead."""

from collections.abc import Sequence
from dataclasses import replace

from app.model.by_case import as_in, percent_of
from app.model.kinds import Attachment, Capacitor, Load
from app.sheet.elements import Entry, Plan, by_element, figure
from app.sheet.subject import Subject
from app.sheet.table import Cell, Cells, Column, SheetTable, Style, text
from app.sheet.wires import amps, each, most, node_wires, redone, spread, volts
from app.study.outcome import AttachmentWires
from app.study.wire_words import conductors

ON = Column("on", "On", style=Style.TEXT, width=8)
CONNECTION = Column("connection", "Joined", style=Style.TEXT, width=9)
NOTE = " U is of the lowest lead, of several phases to the neutral as between lines; I, most: worst lead."


def hung_tables(subject: Subject, plan: Plan, entries: Sequence[Entry]) -> list[SheetTable]:
    """A plan of attachments as it is, or with phases and leads where they are solved one by one."""
    if subject.outcome.wires is None:
        return by_element(subject, plan, entries)
    leads = tuple(each(subject, Column("i", "I", "A", style=Style.AMPS, width=8)))
    figures: list[Column] = []
    for column in plan.figures:
        if column.key == "current":
            figures += [*leads, replace(column, head="I, most")]
        else:
            figures.append(replace(column, head="U, lowest") if column.key == "u" else column)
    told = [_entry(subject, entry) for entry in entries]
    joined = (CONNECTION,) if any("connection" in entry.data for entry in told) else ()
    at = next(i for i, column in enumerate(plan.data) if column.key == "node") + 1
    data = (*plan.data[:at], ON, *joined, *plan.data[at:])
    plan = replace(plan, data=data, figures=tuple(figures), note=(plan.note + NOTE).strip())
    return by_element(subject, plan, told)


def hung_wires(subject: Subject, id: str, case: int) -> AttachmentWires:
    """One attachment, conductor by conductor."""
    assert subject.outcome.wires is not None
    return subject.outcome.wires.attachments.at(id, case)


def _entry(subject: Subject, entry: Entry) -> Entry:
    hung = subject.drawing.elements[entry.id]
    assert isinstance(hung, Attachment)
    first = hung_wires(subject, entry.id, 0)
    system = node_wires(subject, hung.node).system
    data = entry.data | {"on": text(conductors(first.phases, system))}
    if isinstance(hung, Load | Capacitor) and len(first.phases.replace("N", "")) == 3:
        data["connection"] = text(hung.connection)
    figures = [_figures(subject, entry, hung, dict(cells), c) for c, cells in enumerate(entry.figures)]
    return replace(entry, data=data, figures=figures)


def _figures(subject: Subject, entry: Entry, hung: Attachment, cells: Cells, case: int) -> Cells:
    if not cells:
        return cells
    leads = amps(hung_wires(subject, entry.id, case))
    cells |= spread("i", leads)
    if "current" in cells:
        cells["current"] = most("i", leads, _number(cells["current"]))
    cells["u"] = _volts(subject, hung, _number(cells["u"]), case)
    for key in ("kw", "kvar"):
        if "{u}" in cells[key].formula:
            cells[key] = _followed(subject, entry, hung, cells, key, case)
    return cells


def _followed(subject: Subject, entry: Entry, hung: Attachment, cells: Cells, key: str, case: int) -> Cell:
    """Power that goes with the volts: by its formula where all of it hangs on the volts told, taken as
    between lines or as across one lead; else the figure alone."""
    cell = cells[key]
    stated = _number(entry.data.get("reference", Cell()))
    if key == "kvar" or not isinstance(hung, Load) or stated != stated:
        return Cell(cell.value)
    now = as_in(subject.drawing.cases[case], entry.id, hung)
    whole = now.demand_kw if now.demand_kw is not None else (now.demand_kva or 0.0) * now.power_factor
    whole *= percent_of(subject.drawing.cases[case], entry.id, hung) / 100
    i, z = (_number(entry.data[name]) / 100 for name in ("i_share", "z_share"))
    for words, factor in (("", 1.0), ("SQRT(3)*", 3**0.5), ("2*", 2.0)):
        ratio = factor * _number(cells["u"]) / stated
        redo = cell.formula.replace("{u}/", words + "{u}/")
        found = redone(_number(cell), redo, whole * (1 - i - z + i * ratio + z * ratio**2), cell.refs)
        if found.formula:
            return found
    return Cell(cell.value)


def _volts(subject: Subject, hung: Attachment, value: float, case: int) -> Cell:
    """The volts of the phase it hangs on, where they stand among those of its node."""
    for letter, there in volts(node_wires(subject, hung.node, case)).items():
        refs = {"at": figure(subject, "busbars", hung.node, f"u_{letter.lower()}", case)}
        found = redone(value, "{at}", there, refs)
        if found.formula:
            return found
    return Cell(value)


def _number(cell: Cell) -> float:
    return float(cell.value) if isinstance(cell.value, int | float) else float("nan")
