"""What a node or branch on the voltage strip says under the hand."""

import math

from app.canvas.phase_words import SLOTS, phase_name, volts_of
from app.model.drawing import Drawing, label
from app.model.figures import length, percent, volts
from app.model.taps import by_hand
from app.panels.results import tap_words
from app.study.outcome import Outcome


def spoken(drawing: Drawing, outcome: Outcome | None, case: int, id: str) -> str:
    """A node or branch in words, for the tooltip."""
    if outcome is None or id not in drawing.elements:
        return ""
    name = label(drawing, id)
    if id in outcome.nodes:
        state = outcome.nodes.at(id, case)
        level = phase_levels(outcome, id, case)
        level = level or f"{volts(state.voltage_v)}, {percent(state.percent)} of nominal"
        return f"{name}: {level} at {length(state.route_m)}"
    if by_hand(drawing.elements[id]):
        return f"{name}: {tap_words(drawing, outcome, id, case)}. Drag the dot to move the tap."
    if id in outcome.branches:
        return f"{name}: {percent(outcome.branches.at(id, case).drop_percent, 2)} lost along it"
    return name


def phase_levels(outcome: Outcome, id: str, case: int) -> str:
    """`A 106.2 V, B 118.0 V to neutral`; nothing where phases are alike."""
    if outcome.wires is None or id not in outcome.wires.nodes:
        return ""
    state = outcome.wires.nodes.at(id, case)
    known = [(c, volts_of(state, c)) for c in SLOTS if not math.isnan(volts_of(state, c))]
    told = ", ".join(f"{phase_name(c, state)} {volts(v)}" for c, v in known)
    return told if state.against == "next phase" or not told else f"{told} to {state.against}"
