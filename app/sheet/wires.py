"""What tables share where phases are solved one by one: columns a conductor, names, honest formulas."""

import math
from collections.abc import Iterable, Mapping
from dataclasses import replace

from app.sheet.subject import Subject
from app.sheet.table import Cell, Cells, Column, Ref
from app.study.outcome import AttachmentWires, BranchWires, NodeWires
from app.study.wire_words import conductor

PHASES = "ABC"
EXACT = 1e-10  # a formula that is farther off is not the one the figure came from


def redone(value: float, formula: str, meant: float, refs: Mapping[str, Ref] | None = None) -> Cell:
    """A figure with the formula a reviewer would redo, where that yields it; else the figure alone."""
    if not math.isclose(value, meant, rel_tol=EXACT, abs_tol=EXACT):
        return Cell(value)
    return Cell(value, formula, refs or {})


def node_wires(subject: Subject, node: str, case: int | None = None) -> NodeWires:
    """One node, conductor by conductor; in the first case that has figures where none is named."""
    assert subject.outcome.wires is not None
    return subject.outcome.wires.nodes.at(node, subject.first if case is None else case)


def volts(state: NodeWires) -> dict[str, float]:
    """Volts of the phases that are there."""
    every = {"A": state.a_v, "B": state.b_v, "C": state.c_v}
    return {letter: v for letter, v in every.items() if v == v}


def degrees(state: NodeWires) -> dict[str, float]:
    """Angles of the volts of the phases that are there."""
    every = {"A": state.a_deg, "B": state.b_deg, "C": state.c_deg}
    return {letter: angle for letter, angle in every.items() if angle == angle}


def amps(state: BranchWires | AttachmentWires) -> dict[str, float]:
    """Amperes in the conductors that are there."""
    every = {"A": state.a_a, "B": state.b_a, "C": state.c_a, "N": state.n_a}
    return {letter: ampere for letter, ampere in every.items() if ampere == ampere}


def notches(state: BranchWires) -> dict[str, float]:
    """Where a regulator stands that steps each phase by itself."""
    every = {"A": state.a_notch, "B": state.b_notch, "C": state.c_notch}
    return {letter: notch for letter, notch in every.items() if notch == notch}


def names(subject: Subject) -> dict[str, str]:
    """Every phase that is drawn anywhere: A, B, C; L1 and L2 behind a centre tap, `A, L1` where both are."""
    assert subject.outcome.wires is not None
    nodes = subject.outcome.wires.nodes
    states = [nodes.at(id) for id in nodes.ids]
    found: dict[str, str] = {}
    for letter in PHASES:
        systems = sorted({s.system for s in states if letter in s.phases}, reverse=True)
        if systems:
            found[letter] = ", ".join(dict.fromkeys(conductor(letter, system) for system in systems))
    return found


def each(subject: Subject, model: Column, neutral: bool = True) -> list[Column]:
    """A column a phase, and one of the neutral, after a model: its head says the rest."""
    made = [
        replace(model, key=f"{model.key}_{letter.lower()}", head=f"{model.head} {name}")
        for letter, name in names(subject).items()
    ]
    return made + ([replace(model, key=f"{model.key}_n", head=f"{model.head} N")] if neutral else [])


def spread(key: str, figures: Mapping[str, float]) -> Cells:
    """Figures of conductors as cells of the columns that `each` made."""
    return {f"{key}_{letter.lower()}": Cell(figure) for letter, figure in figures.items()}


def listed(key: str, letters: Iterable[str]) -> str:
    """The columns of some conductors as a formula lists them."""
    return ",".join(f"{{{key}_{letter.lower()}}}" for letter in letters)


def most(key: str, figures: Mapping[str, float], value: float) -> Cell:
    """The worst of all conductors."""
    return redone(value, greatest(listed(key, figures)), max(figures.values(), default=math.nan))


def greatest(terms: str) -> str:
    """The largest of some terms, of one the term itself."""
    return f"MAX({terms})" if "," in terms else terms
