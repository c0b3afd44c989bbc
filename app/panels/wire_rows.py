"""Results conductor by conductor, as rows of the card; none where all phases are alike."""

import math
from collections.abc import Callable
from functools import partial
from typing import Any

from app.canvas import phase_words
from app.model.drawing import Drawing
from app.model.figures import amps, change, percent, volts
from app.model.kinds import Attachment, Branch
from app.panels.asked import Asked, Row, Write
from app.study.outcome import Outcome

UNBALANCE, NEUTRAL, VOLTAGE, HIGH = ("unbalance",), ("neutral volts",), ("voltage low",), ("voltage high",)
THREE_PHASE = "three-phase"


def reach(drawing: Drawing, outcome: Outcome | None, id: str) -> tuple[str, str]:
    """The phases that reach an element from its supply, and the system they belong to; blank where nothing
    is known."""
    element = drawing.elements.get(id)
    at = ""
    if outcome is not None and isinstance(element, Attachment):
        at = element.node
    elif outcome is not None and isinstance(element, Branch):
        at = element.start if outcome.upstream.get(element.start) != id else element.end
    if outcome is None or outcome.wires is None or at not in outcome.wires.nodes:
        return "", THREE_PHASE
    state = outcome.wires.nodes.at(at)
    return state.phases, state.system


def of_node(asked: Asked, id: str) -> list[Row]:
    """Volts of every phase, such as `A to neutral`; a failing check colours the lowest."""
    state = _first(asked.outcome, "nodes", id)
    if state is None:
        return []
    letters = [c for c in phase_words.SLOTS if not math.isnan(phase_words.volts_of(state, c))]
    lowest = phase_words.lowest_of(_state(asked.outcome, "nodes", id, asked.case))
    return [
        _row(
            asked, "nodes", id, _against(state, letter), partial(_slot, f"{letter.lower()}_v"), volts,
            VOLTAGE if letter == lowest else (),
        )
        for letter in letters
    ]  # fmt: skip


def lowest_label(asked: Asked, id: str) -> str:
    """What the percent of a node is called: of its nominal volts, or those of the lowest of its phases."""
    return "Lowest" if highest(asked, id) else "Of nominal"


def highest(asked: Asked, id: str) -> list[Row]:
    """The percent of the highest phase, where there are several."""
    state = _first(asked.outcome, "nodes", id)
    if state is None or len(state.phases) < 2:
        return []
    column = asked.outcome.nodes.column("high_percent")[asked.outcome.nodes.rows[id]]
    return [Row("Highest", asked.cells(column, partial(percent, digits=2)), "", asked.verdict(id, HIGH))]


def angles(asked: Asked, id: str, write: Write) -> list[Row]:
    """The angle of the volts of each phase, where there are several."""
    state = _first(asked.outcome, "nodes", id)
    slots = {} if state is None else {c: f"{c.lower()}_deg" for c in phase_words.SLOTS}
    known = {c: slot for c, slot in slots.items() if not math.isnan(getattr(state, slot))}
    return [
        _row(
            asked, "nodes", id, f"Angle, {phase_words.phase_name(c, state)}", partial(_slot, slot), write, ()
        )
        for c, slot in known.items()
        if len(known) > 1
    ]


def _against(state: Any, letter: str) -> str:
    """`A to neutral`, `A to B`, `L1 to neutral`."""
    name = phase_words.phase_name(letter, state)
    return name.replace("–", " to ") if state.against == "next phase" else f"{name} to {state.against}"


def evenness(asked: Asked, id: str) -> list[Row]:
    """How far the phases are from alike, and the neutral from earth."""
    state = _first(asked.outcome, "nodes", id)
    if state is None:
        return []
    rows: tuple[tuple[str, str, Write, tuple[str, ...]], ...] = (
        ("Unbalance", "unbalance_percent", partial(percent, digits=2), UNBALANCE),
        ("Off the mean", "spread_percent", partial(percent, digits=2), ()),
        ("Neutral to earth", "neutral_v", volts, NEUTRAL),
    )
    return [
        _row(asked, "nodes", id, label, partial(_slot, column), write, check)
        for label, column, write, check in rows
        if not math.isnan(getattr(state, column))
    ]


def of_leads(asked: Asked, id: str) -> list[Row]:
    """Amperes in every conductor of a branch or attachment."""
    element, letters = asked.drawing.elements[id], "ABCN"
    table = "attachments" if isinstance(element, Attachment) else "branches"
    state = _first(asked.outcome, table, id)
    if state is None:
        return []
    has = [c for c in letters if not math.isnan(phase_words.amps_of(state, c))]
    system = reach(asked.drawing, asked.outcome, id)[1]
    return [
        _row(
            asked, table, id, f"In {phase_words.named(c, system)}", partial(_slot, f"{c.lower()}_a"), amps, ()
        )
        for c in has
    ]


def of_notches(asked: Asked, id: str, write: Write) -> list[Row]:
    """Where each phase stands of a regulator whose phases step by themselves; else none."""
    state, system = _first(asked.outcome, "branches", id), reach(asked.drawing, asked.outcome, id)[1]
    slots = {f"{c.lower()}_notch": phase_words.named(c, system) for c in phase_words.SLOTS}
    return [
        _row(asked, "branches", id, f"Stands at, {name}", partial(_slot, slot), write, ())
        for slot, name in slots.items()
        if state is not None and not math.isnan(getattr(state, slot))
    ]


def _first(outcome: Outcome, table: str, id: str) -> Any:
    """The conductors in a case in which they are live; None where phases are alike or none is live."""
    states = [_state(outcome, table, id, case) for case in range(len(outcome.cases))]
    slots = ("a_v", "b_v", "c_v") if table == "nodes" else ("a_a", "b_a", "c_a")
    live = (s for s in states if s is not None and not all(math.isnan(getattr(s, n)) for n in slots))
    return next(live, None)


def _state(outcome: Outcome | None, table: str, id: str, case: int) -> Any:
    if outcome is None or outcome.wires is None or case >= len(outcome.cases):
        return None
    found = getattr(outcome.wires, table)
    return found.at(id, case) if id in found else None


def _slot(name: str, state: Any) -> float:
    return float(getattr(state, name))


def _row(
    asked: Asked,
    table: str,
    id: str,
    label: str,
    read: Callable[[Any], float],
    write: Write,
    check: tuple[str, ...],
) -> Row:
    states = [_state(asked.outcome, table, id, case) for case in range(len(asked.outcome.cases))]
    then, now = _state(asked.before, table, id, asked.case), states[asked.case]
    moved = change(read(now), read(then), write) if then is not None else ""
    return Row(label, asked.cells(map(read, states), write), moved, asked.verdict(id, check))
