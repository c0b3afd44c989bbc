"""Results of several elements together, and of the drawing as a whole."""

from collections.abc import Callable
from functools import partial

import numpy as np

from app.model.figures import change, closure, length, loss, power, volts
from app.model.kinds import Branch, Line, Load, Node
from app.panels.asked import Asked, Row


def summary_rows(asked: Asked, ids: tuple[str, ...]) -> list[Row]:
    """Counts, total length, loss and demand of a selection; without one, the balance of the whole."""
    if not ids:
        return _whole(asked)
    elements = {i: asked.drawing.elements[i] for i in ids}
    lines = {i: e for i, e in elements.items() if isinstance(e, Line)}
    made = []
    if lines:
        total = sum(e.length_m for e in lines.values())
        made.append(Row("Length, all", (length(total),)))
        if any(e.side_by_side > 1 for e in lines.values()):
            laid = sum(e.length_m * e.side_by_side for e in lines.values())
            made.append(Row("Laid, all runs", (length(laid),)))
    branches = [i for i, e in elements.items() if isinstance(e, Branch) and i in asked.outcome.branches]
    if branches:
        made.append(_sum(asked, "branches", branches, "loss_kw", "Loss, all", loss))
    loads = [i for i, e in elements.items() if isinstance(e, Load) and i in asked.outcome.attachments]
    if loads:
        made.append(_sum(asked, "attachments", loads, "kw", "Drawn, all", power))
        made.append(_sum(asked, "attachments", loads, "kvar", "", partial(power, unit="kvar")))
    return made + _levels(asked, [i for i, e in elements.items() if isinstance(e, Node)])


def _sum(asked: Asked, table: str, ids: list[str], name: str, label: str, write) -> Row:
    def total(outcome, case: int) -> float:
        known = getattr(outcome, table)
        states = [known.at(i, case) for i in ids if i in known]
        return sum(getattr(state, name) for state in states if state.live)

    cases = range(len(asked.outcome.cases))
    moved = ""
    if asked.before is not None:
        moved = change(total(asked.outcome, asked.case), total(asked.before, asked.case), write)
    return Row(label, asked.cells([total(asked.outcome, case) for case in cases], write), moved)


def _levels(asked: Asked, nodes: list[str]) -> list[Row]:
    known = [i for i in nodes if i in asked.outcome.nodes]
    lowest: list[str] = []
    highest: list[str] = []
    for case in range(len(asked.outcome.cases)):
        states = [s for s in (asked.outcome.nodes.at(i, case) for i in known) if s.live]
        if not states and asked.outcome.solved(case):
            return []
        for kept, pick in ((lowest, min), (highest, max)):
            state = pick(states, key=lambda s: s.percent, default=None)
            kept.append(asked.lacking(case) if state is None else volts(state.voltage_v))
    return [Row("Lowest", tuple(lowest)), Row("Highest", tuple(highest))] if len(known) > 1 else []


def _whole(asked: Asked) -> list[Row]:
    rows: list[tuple[str, str, Callable[[float], str]]] = [
        ("Supply", "supply_kw", power),
        ("", "supply_kvar", partial(power, unit="kvar")),
        ("Infeed", "generation_kw", power),
        ("Loads", "load_kw", power),
        ("Lost", "loss_kw", loss),
        ("in lines", "line_kw", loss),
        ("in copper", "copper_kw", loss),
        ("in iron", "iron_kw", loss),
    ]
    if not asked.drawing.elements:
        return []
    made = []
    for label, name, write in rows:
        values = getattr(asked.outcome.balance, name)
        if name == "generation_kw" and not np.nan_to_num(values).any():
            continue
        moved = ""
        if asked.before is not None and asked.case < len(asked.before.cases):
            moved = change(values[asked.case], getattr(asked.before.balance, name)[asked.case], write)
        made.append(Row(label, asked.cells(values, write), moved))
    made.append(Row("Closes to", asked.cells(asked.outcome.balance.closure, closure)))
    return made
