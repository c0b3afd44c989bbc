"""What phases and neutral do each for themselves, as text; only where a layout is solved so."""

from collections.abc import Iterable, Mapping

from app.model.drawing import Drawing
from app.model.figures import plain
from app.model.kinds import Attachment, Branch, Element
from app.study.outcome import AttachmentWires, BranchWires, NodeWires, Outcome, Wired
from app.study.wire_words import AGAINST, conductor, conductors, worst_of

Line = list[str]
Written = tuple[str, list[Line], int]  # title, lines with their heads, how many columns are figures
PHASES = "ABC"


def wire_tables(drawing: Drawing, outcome: Outcome, case: int) -> list[Written]:
    """Nodes, branches and attachments of one case, conductor by conductor."""
    wired = outcome.wires
    if wired is None:
        return []
    found = [
        _nodes(drawing, wired, case),
        _branches(drawing, outcome, wired, case),
        _hung(drawing, wired, case),
    ]
    return [table for table in found if len(table[1]) > 1]


def heads_of(systems: Iterable[str]) -> dict[str, str]:
    """Heads of the phases: A, B, C; L1 and L2 where nothing else is drawn, `A, L1` where both are."""
    found = sorted(set(systems) - {""}, reverse=True)
    made = {}
    for letter in PHASES:
        names = {conductor(letter, system): None for system in found} or {letter: None}
        made[letter] = ", ".join(names)
    return made


def _nodes(drawing: Drawing, wired: Wired, case: int) -> Written:
    states = {id: wired.nodes.at(id, case) for id in wired.nodes.ids}
    named = heads_of(s.system for s in states.values())
    heads = ["id", "name", "conductors", "volts", "base V"]
    for letter in PHASES:
        heads += [f"{named[letter]} V", "% of base"]
    heads += ["N to earth V", "V2/V1 %", "spread %"]
    lines = [_node(id, drawing.elements[id], state) for id, state in states.items() if state.phases]
    return "Nodes, conductor by conductor", *_filled([heads, *lines], 4)


def _node(id: str, element: Element, s: NodeWires) -> Line:
    low = s.base_v < 1000
    has = s.phases + ("N" if s.neutral_v == s.neutral_v else "")
    found = [id, element.name, conductors(has, s.system), AGAINST[s.against]]
    found.append(_figure(s.base_v, 1 if low else 0))
    for volts in (s.a_v, s.b_v, s.c_v):
        found += [_figure(volts, 1 if low else 0), _figure(volts / s.base_v * 100, 2)]
    return [
        *found,
        _figure(s.neutral_v, 2),
        _figure(s.unbalance_percent, 2),
        _figure(s.spread_percent, 2),
    ]


def _branches(drawing: Drawing, outcome: Outcome, wired: Wired, case: int) -> Written:
    shown = {id: s for id in wired.branches.ids if (s := wired.branches.at(id, case)).phases}
    systems = {}
    for id in shown:
        branch = drawing.elements[id]
        assert isinstance(branch, Branch)
        fed = branch.start if outcome.branches.at(id, case).forward else branch.end
        systems[id] = wired.nodes.at(fed, case).system
    title = "Branches, conductor by conductor; of a transformer, of the winding that is fed"
    return title, *_carried(drawing, shown, systems)


def _hung(drawing: Drawing, wired: Wired, case: int) -> Written:
    shown = {id: s for id in wired.attachments.ids if (s := wired.attachments.at(id, case)).phases}
    systems = {}
    for id in shown:
        hung = drawing.elements[id]
        assert isinstance(hung, Attachment)
        systems[id] = wired.nodes.at(hung.node, case).system
    return "Loads and infeeds, conductor by conductor", *_carried(drawing, shown, systems)


def _carried(
    drawing: Drawing,
    shown: Mapping[str, BranchWires | AttachmentWires],
    systems: dict[str, str],
) -> tuple[list[Line], int]:
    """Amperes in each conductor; of a branch also which carries most, and where its regulators stand."""
    named = heads_of(systems.values())
    lines = [["id", "name", "conductors", *(f"{named[p]} A" for p in PHASES), "N A"]]
    for id, state in shown.items():
        amps = {"A": state.a_a, "B": state.b_a, "C": state.c_a, "N": state.n_a}
        has = "".join(letter for letter in state.phases if amps[letter] == amps[letter])
        told = [id, drawing.elements[id].name, conductors(has, systems[id])]
        lines.append([*told, *(_figure(ampere, 1) for ampere in amps.values())])
        if isinstance(state, BranchWires):
            lines[-1] += [conductor(worst_of(amps), systems[id]), _notches(state)]
    if isinstance(next(iter(shown.values()), None), BranchWires):
        lines[0] += ["most in", "notch of each"]
    return _filled(lines, 3)


def _notches(state: BranchWires) -> str:
    """`+16 +1 −1` of a regulator that steps each phase by itself."""
    every = (state.a_notch, state.b_notch, state.c_notch)
    return " ".join(plain(notch, 0, sign=True) for notch in every if notch == notch)


def _figure(value: float, digits: int) -> str:
    return plain(value, digits) if value == value else ""


def _filled(lines: list[Line], words: int) -> tuple[list[Line], int]:
    """Without the columns that nothing fills, and how many of the rest are figures; the first are `words`."""
    kept = [i for i in range(len(lines[0])) if any(line[i] for line in lines[1:])]
    return [[line[i] for i in kept] for line in lines], sum(i >= words for i in kept)
