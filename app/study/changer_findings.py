"""What there is to say of changers and generators that hold volts: hunting, end stops, wrong ways round."""

from collections.abc import Sequence

from msgspec import Struct

from app.model import assumed
from app.model.drawing import Drawing
from app.model.figures import percent, plain
from app.model.kinds import Generator, Regulator, Transformer
from app.study.changers import Moved, holders
from app.study.layout import NONE, Layout
from app.study.measuring import ends_of, missed
from app.study.outcome import Finding, Verdict
from app.study.results import Tables
from app.study.rows import Rows
from app.study.words import among, tell
from solver.control import Rest


def hunting_findings(drawing: Drawing, layout: Layout, moved: Moved) -> list[Finding]:
    """The changers that never come to rest, each with the cases in which it does not.

    drawing : the drawing, for names
    layout : its graph
    moved : where what moves came to rest

    Returns : list of Finding that bar a solution
    """
    found = []
    for row, rest, phase in zip(moved.changers, moved.rest, moved.phases, strict=True):
        cases = [c for c, one in enumerate(rest) if one is Rest.HUNTING]
        if not cases:
            continue
        id, element = layout.branch_ids[row], layout.branches[row]
        assert isinstance(element, Transformer | Regulator)
        band = percent(assumed.value(element, "bandwidth_percent"), 2)
        words = (
            f"{tell(drawing, id)} hunts{_on(phase)}{_in(drawing, cases)}: it steps to and fro and never "
            f"comes to rest in its band of {band}, a step being {percent(_step(element), 3)}."
        )
        named, each = drawing.cases[cases[0]].name, _by_case(drawing, cases, Verdict.BLOCKS)
        found.append(Finding("hunting", Verdict.BLOCKS, (id,), words, case=named, by_case=each))
    return found


def _on(phase: str) -> str:
    return f" on phase {phase}" if phase else ""


def _case(drawing: Drawing, case: int) -> str:
    return _in(drawing, [case])


def _in(drawing: Drawing, cases: Sequence[int]) -> str:
    """In which cases, where there are several."""
    names = [drawing.cases[case].name for case in cases]
    return f" in {among(names)}" if len(drawing.cases) > 1 else ""


def _by_case(drawing: Drawing, cases: Sequence[int], verdict: Verdict) -> tuple[Verdict, ...]:
    """A verdict on some cases, and a note on the others; nothing where there is but one."""
    each = tuple(verdict if case in cases else Verdict.NOTE for case in range(len(drawing.cases)))
    return each if len(each) > 1 else ()


def _step(element: Transformer | Regulator) -> float:
    return element.notch_percent if isinstance(element, Transformer) else element.step_percent


def stop_findings(
    drawing: Drawing, layout: Layout, rows: Rows, tables: Tables, moved: Moved
) -> list[Finding]:
    """Changers at an end stop out of their band, and generators at a limit of their reactive power.

    A changer that holds the volts of the side its supply feeds moves the other side instead and runs away to
    its end stop: that fails.

    drawing : the drawing, for names
    layout : its graph
    rows : of the solver, with the notches
    tables : of the outcome
    moved : where what moves came to rest

    Returns : list of Finding, each in the first case in which it stands
    """
    found = []
    for number, row in enumerate(moved.changers):
        cases = [c for c, one in enumerate(moved.rest[number]) if one is Rest.AT_STOP]
        away = [c for c in cases if _source_side(layout, tables, row, c)]
        if cases:
            stop = _Stop(row, (away or cases)[0], bool(away), moved, number)
            found.append(_stop(drawing, layout, tables, stop))
    found += [
        _unmeasured(drawing, layout, row, rows)
        for row in dict.fromkeys(moved.changers)
        if missed(layout, rows, row)
    ]
    for number, row in enumerate(moved.generators):
        cases = [c for c, holds in enumerate(moved.holds[number]) if not holds]
        if cases:
            found.append(_limited(drawing, layout, tables, row, cases[0]))
    return found


def barred_findings(drawing: Drawing, layout: Layout) -> list[Finding]:
    """Generators that cannot hold the volts of their node, as something else does.

    drawing : the drawing, for names
    layout : its graph

    Returns : list of Finding
    """
    found = []
    for row, first in holders(layout)[1]:
        id, other = layout.attachment_ids[row], layout.attachment_ids[first]
        words = (
            f"{tell(drawing, id)} cannot hold the volts of its node, as {tell(drawing, other)} holds them "
            "already with no impedance between: it runs at its fixed reactive output."
        )
        found.append(Finding("held twice", Verdict.ADVICE, (id, other), words))
    return found


def _held_end(layout: Layout, tables: Tables, row: int, case: int) -> int:
    """Node row of the side whose volts a changer holds in a case."""
    element, ends = layout.branches[row], (layout.start[row], layout.end[row])
    if isinstance(element, Transformer):
        return ends[0] if element.regulates == "winding 1" else ends[1]
    backward = tables.branches.column("end_kw")[row, case] < 0
    return (
        ends[0]
        if isinstance(element, Regulator) and element.mode == "with the power" and backward
        else ends[1]
    )


def _source_side(layout: Layout, tables: Tables, row: int, case: int) -> bool:
    """True where the side that is held is the one that the supply feeds the changer from."""
    held = _held_end(layout, tables, row, case)
    other = layout.start[row] if held == layout.end[row] else layout.end[row]
    return layout.fed_by[other] == row and layout.fed_by[other] != NONE


class _Stop(Struct, frozen=True):
    """A changer at its end stop in a case; `away` where it ran there the wrong way round."""

    row: int
    case: int
    away: bool
    moved: Moved
    number: int


def _unmeasured(drawing: Drawing, layout: Layout, row: int, rows: Rows) -> Finding:
    id, node = layout.branch_ids[row], layout.node_ids[ends_of(layout, row)[0]]
    words = (
        f"{tell(drawing, id)} is to measure phase {missed(layout, rows, row)}, which does not reach "
        f"{tell(drawing, node)}: it measures the first that does."
    )
    return Finding("measured phase", Verdict.ADVICE, (id, node), words)


def _stop(drawing: Drawing, layout: Layout, tables: Tables, stop: _Stop) -> Finding:
    row, case, moved = stop.row, stop.case, stop.moved
    element, id, phase = layout.branches[row], layout.branch_ids[row], moved.phases[stop.number]
    assert isinstance(element, Transformer | Regulator)
    notch = int(moved.notch[stop.number, case])
    node = _held_end(layout, tables, row, case)
    level = _level(tables, node, case, phase)
    where = f"{plain(notch, 0, sign=True)} ({percent(notch * _step(element), 1, sign=True)}){_on(phase)}"
    if stop.away:
        words = (
            f"{tell(drawing, id)} has run away to its end stop {where}{_case(drawing, case)}: it holds "
            f"{tell(drawing, layout.node_ids[node])}, which lies toward its supply, and each step moves "
            "the other side instead. Let it hold the side away from the supply."
        )
        return Finding("runs away", Verdict.FAILS, (id,), words, case=drawing.cases[case].name)
    words = (
        f"{tell(drawing, id)} stands at its end stop {where}{_case(drawing, case)}: "
        f"{tell(drawing, layout.node_ids[node])} is at {percent(level, 1)} of nominal, it should hold "
        f"{percent(assumed.value(element, 'hold_percent'), 1)}."
    )
    return Finding("end stop", Verdict.ADVICE, (id,), words, case=drawing.cases[case].name)


def _level(tables: Tables, node: int, case: int, phase: str) -> float:
    """Percent of nominal of the phase that is measured; of the lowest where phases are alike or averaged."""
    wires = tables.wires
    if wires is None or not phase:
        return float(tables.nodes.column("percent")[node, case])
    letter = {"L1": "a", "L2": "b"}.get(phase, phase[0].lower())
    volts = wires.nodes.column(f"{letter}_v")[node, case]
    return 100 * float(volts / wires.nodes.column("base_v")[node])


def _limited(drawing: Drawing, layout: Layout, tables: Tables, row: int, case: int) -> Finding:
    element, id = layout.attachments[row], layout.attachment_ids[row]
    assert isinstance(element, Generator)
    kvar = float(tables.attachments.column("kvar")[row, case])
    level = float(tables.nodes.column("percent")[layout.at[row], case])
    words = (
        f"{tell(drawing, id)} is at its limit of {plain(kvar, 1, 'kvar', sign=True)}{_case(drawing, case)} "
        f"and leaves its node at {percent(level, 2)} of nominal, not {percent(element.hold_percent or 0, 2)}."
    )
    return Finding("reactive limit", Verdict.ADVICE, (id,), words, case=drawing.cases[case].name)
