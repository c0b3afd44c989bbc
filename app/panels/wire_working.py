"""How the figures of phases on the card come about, in numbers that can be worked out again by hand."""

import math
from typing import Any

from app.canvas import phase_words
from app.canvas.phase_words import SPLIT
from app.model.drawing import Drawing
from app.model.figures import amps, percent, plain, volts
from app.model.kinds import Line, Node
from app.study.outcome import Outcome

EVEN = (
    "Unbalance: negative over positive sequence of the volts, V2/V1. Off the mean: largest distance of a "
    "line voltage from the mean of the three, over that mean (NEMA MG 1, from memory)."
)


def working(drawing: Drawing, outcome: Outcome, id: str, case: int) -> str:
    """Sentences on one node or line; nothing where all phases are alike."""
    if outcome.wires is None:
        return ""
    element = drawing.elements.get(id)
    if isinstance(element, Node) and id in outcome.wires.nodes and outcome.nodes.at(id, case).live:
        return _of_node(outcome.nodes.at(id, case), outcome.wires.nodes.at(id, case))
    if isinstance(element, Line) and id in outcome.wires.branches and outcome.branches.at(id, case).live:
        return _of_line(element, outcome, id, case)
    return ""


def _of_node(state: Any, wires: Any) -> str:
    letter = phase_words.lowest_of(wires)
    if not letter:
        return ""
    name, v = phase_words.phase_name(letter, wires), phase_words.volts_of(wires, letter)
    told = f"{name}: {volts(v)} ÷ {volts(wires.base_v)} = {percent(state.percent, 2)}."
    if wires.system == SPLIT:
        told += f" {volts(wires.base_v)} is half of {volts(state.nominal_v)}."
    elif not math.isclose(wires.base_v, state.nominal_v):
        told += f" {volts(wires.base_v)} is {volts(state.nominal_v)} ÷ √3."
    return told if math.isnan(wires.unbalance_percent) else f"{told} {EVEN}"


def _of_line(line: Line, outcome: Outcome, id: str, case: int) -> str:
    """The loading of the conductor that carries most."""
    wires, state = outcome.wires, outcome.branches.at(id, case)
    assert wires is not None
    if line.rating_a is None or math.isnan(state.loaded_percent):
        return ""
    row = wires.branches.at(id, case)
    known = {c: phase_words.amps_of(row, c) for c in "ABCN" if not math.isnan(phase_words.amps_of(row, c))}
    if not known:
        return ""
    worst = max(known, key=known.__getitem__)
    name = phase_words.named(worst, wires.nodes.at(line.start, case).system)
    runs = f"{line.side_by_side} × " if line.side_by_side > 1 else ""
    rated = f"({runs}{plain(line.rating_a, 0, 'A')})" if runs else plain(line.rating_a, 0, "A")
    return f"Loading: {amps(known[worst])} in {name} ÷ {rated} = {percent(state.loaded_percent)}."
