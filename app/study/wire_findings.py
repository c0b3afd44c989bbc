"""What there is to say of phases and neutral: those that are not there, and how unlike the phases are."""

import math
from collections.abc import Collection

import numpy as np

from app.model.drawing import Drawing
from app.model.figures import volts
from app.model.kinds import Line, Transformer
from app.study.checking import NEAR_SHARE, SET_HERE, Check, Subject
from app.study.conductors import Conductors, conductors_of, is_wired
from app.study.graph import NONE, Layout
from app.study.outcome import BranchWires, Finding, NodeWires, Table, Verdict, Wired
from app.study.unit_wires import OPEN
from app.study.wire_volts import KINDS, TO_NEXT, phase_name
from app.study.wires import ABC, NEUTRAL, N, bits, letters
from app.study.words import list_of, tell
from app.study.zones import Zones

NO_PHASE, NO_NEUTRAL = "no such phase", "no neutral"
OF_BANK = {
    OPEN[0]: "AB, BC or CA, the pair that no coil bridges, or all, which leaves CA open",
    OPEN[1]: "AB, BC or CA, the phases of its star, or all, which takes A and B",
}


def phase_findings(
    drawing: Drawing, layout: Layout, zones: Zones, blamed: Collection[str] = ()
) -> list[Finding]:
    """Phases and neutrals that elements are drawn on and that do not reach them.

    What only follows is left out: of elements that are blamed for more, and where no phase reaches at all.

    drawing : the drawing
    layout : its graph
    zones : system (zone,) of each zone
    blamed : ids of elements that something else bars already

    Returns : list of Finding; BLOCKS where a phase or a way back is missing, FAILS where a neutral is lost
    Source : common practice, no source
    """
    if not is_wired(drawing, layout, zones) and not _stated(layout):
        return []
    conductors = conductors_of(layout, zones)
    barring = [
        *_lines(drawing, layout, conductors),
        *_units(drawing, layout, conductors),
        *_hung(drawing, layout, conductors),
    ]
    causes = [f for f in barring if f.ids[0] not in blamed and not _follows(layout, conductors, f)]
    return [*(causes if causes or blamed else barring), *_lost(drawing, layout, conductors)]


def _follows(layout: Layout, conductors: Conductors, finding: Finding) -> bool:
    """Whether no phase at all reaches where something lacks one: what is amiss lies before it."""
    return any(not conductors.node[layout.node_row[id]] & ABC for id in finding.ids[1:])


def _stated(layout: Layout) -> bool:
    both = (*layout.branches, *layout.attachments)
    return any(getattr(element, "phases", "all") != "all" for element in both)


def _here(conductors: Conductors, node: int) -> str:
    found = letters(conductors.node[node] & ABC)
    return f"only {found} reaches" if found else "no phase reaches"


def _missing(
    drawing: Drawing, layout: Layout, conductors: Conductors, id: str, node: int, has: int
) -> Finding:
    at = layout.node_ids[node]
    words = (
        f"{tell(drawing, id)} is drawn on phase {letters(has)}, but {_here(conductors, node)} "
        f"{tell(drawing, at)}. Allowed are phases that reach it, or all."
    )
    return Finding(NO_PHASE, Verdict.BLOCKS, (id, at), words)


def _lines(drawing: Drawing, layout: Layout, conductors: Conductors) -> list[Finding]:
    found = []
    for node in layout.order:
        row = layout.fed_by[node]
        if row == NONE or not layout.live[node]:
            continue
        run, above = layout.branches[row], layout.fed_from[node]
        stated = bits(run.phases) if isinstance(run, Line) and run.phases != "all" else 0
        if stated & ~conductors.node[above]:
            found.append(_missing(drawing, layout, conductors, layout.branch_ids[row], above, stated))
    return found


def _units(drawing: Drawing, layout: Layout, conductors: Conductors) -> list[Finding]:
    found = []
    for row in layout.units:
        unit, node = layout.branches[row], layout.start[row]
        if not layout.live[node] or not layout.live[layout.end[row]]:
            continue
        assert isinstance(unit, Transformer)
        id, wires = layout.branch_ids[row], conductors.units.get(row)
        if unit.build in OPEN and len(unit.phases) == 1:
            words = (
                f"{tell(drawing, id)} ({unit.build}) states phase {unit.phases}, but has two coils. "
                f"Allowed are {OF_BANK[unit.build]}."
            )
            found.append(Finding(NO_PHASE, Verdict.BLOCKS, (id,), words))
            continue
        fed = layout.end[row] if layout.fed_by[node] == row else node
        if wires is None:
            words = (
                f"{tell(drawing, id)} ({unit.build}, {unit.vector_group}) does not fit the phases that reach "
                f"{tell(drawing, layout.node_ids[fed])}. Allowed are a single-phase unit, Ii0, on one or two "
                "phases, and three-phase groups and open deltas on all three."
            )
            found.append(Finding(NO_PHASE, Verdict.BLOCKS, (id,), words))
            continue
        has = (wires.two if fed == layout.end[row] else wires.one) & ABC
        if has & ~conductors.node[fed]:
            found.append(_missing(drawing, layout, conductors, id, fed, has))
    return found


def _hung(drawing: Drawing, layout: Layout, conductors: Conductors) -> list[Finding]:
    found = []
    for row, leads in conductors.leads.items():
        id, node = layout.attachment_ids[row], layout.at[row]
        at = layout.node_ids[node]
        if leads.missing:
            chosen = bits(str(getattr(layout.attachments[row], "phases", "")))
            found.append(_missing(drawing, layout, conductors, id, node, chosen))
        elif leads.no_back:
            words = (
                f"{tell(drawing, id)} hangs between a phase and the neutral, but no neutral is led to "
                f"{tell(drawing, at)}. Allowed is a line whose neutral is carried or earthed along, or "
                "phases AB, BC or CA."
            )
            found.append(Finding(NO_NEUTRAL, Verdict.BLOCKS, (id, at), words))
    return found


def _lost(drawing: Drawing, layout: Layout, conductors: Conductors) -> list[Finding]:
    """Loads on a neutral that no supply or star point reaches: they share the volts between phases."""
    at, hung = on_lost_neutral(layout, conductors)
    if not hung:
        return []
    words = (
        f"No neutral leads from a supply or star point to {list_of(drawing, at)}: {list_of(drawing, hung)} "
        f"{'hangs' if len(hung) == 1 else 'hang'} on a lost neutral. The lighter loaded phase rises, towards "
        "line voltage; close the neutral before anything is energised."
    )
    return [Finding(NO_NEUTRAL, Verdict.FAILS, (*at, *hung), words)]


def on_lost_neutral(layout: Layout, conductors: Conductors) -> tuple[list[str], list[str]]:
    """Where a neutral stands that no supply or star point reaches, and what hangs on it.

    layout : the graph
    conductors : of every node and attachment

    Returns : ids of nodes and of attachments; none of either where nothing hangs there
    """
    nodes = [
        node
        for node, drawn in enumerate(conductors.drawn)
        if layout.live[node] and drawn & NEUTRAL and not conductors.node[node] & NEUTRAL
        if conductors.node[node] & ABC
    ]
    hung = [
        layout.attachment_ids[row]
        for row, leads in conductors.leads.items()
        if layout.at[row] in nodes and any(N in pair for pair in leads.pairs)
    ]
    return ([layout.node_ids[node] for node in nodes], hung) if hung else ([], [])


def node_words(drawing: Drawing, nodes: Table[NodeWires], low: bool) -> Subject:
    """Words for the phase that is lowest or highest, such as `phase A of N2 is at 82.3 % of nominal, 98.9 V
    to neutral`.

    drawing : the drawing
    nodes : a_v, b_v, c_v (node, case) [V] and against (node,)
    low : true for the lowest

    Returns : (row, case, value as text) to words
    """
    each = np.stack([nodes.column(f"{letter}_v") for letter in "abc"], axis=1)
    sort = np.where(np.isnan(each), math.inf if low else -math.inf, each)
    worst = sort.argmin(axis=1) if low else sort.argmax(axis=1)
    against = nodes.column("against")

    def subject(row: int, case: int, value: str) -> str:
        phase, kind = int(worst[row, case]), KINDS.index(against[row])
        named = phase_name(phase, kind, str(nodes.column("system")[row]))
        behind = "between phases" if kind == TO_NEXT else f"to {KINDS[kind]}"
        told = f"{tell(drawing, nodes.ids[row])} is at {value} of nominal on {named}, "
        return told + f"{volts(float(each[row, phase, case]))} {behind}"

    return subject


def branch_words(drawing: Drawing, branches: Table[BranchWires]) -> Subject:
    """Words for the conductor that carries most, such as `the neutral of C1 is loaded to 102 %`.

    drawing : the drawing
    branches : a_a, b_a, c_a, n_a (branch, case) [A]

    Returns : (row, case, value as text) to words
    """
    each = np.stack([branches.column(f"{letter}_a") for letter in "abcn"], axis=1)
    worst = np.where(np.isnan(each), -1.0, each).argmax(axis=1)

    def subject(row: int, case: int, value: str) -> str:
        at = int(worst[row, case])
        which = "neutral" if at == N else f"phase {'ABC'[at]}"
        return f"{tell(drawing, branches.ids[row])} is loaded to {value} of its rating by its {which}"

    return subject


def wire_checks(drawing: Drawing, wires: Wired) -> list[tuple[Check, str]]:
    """The checks that only phases and neutral have: unbalance of the volts, volts of the neutral.

    drawing : the drawing, for its limits
    wires : unbalance_percent (node, case) [%], neutral_v (node, case) [V]

    Returns : list of Check and whose limit it is
    """
    limits, ids, found = drawing.limits, wires.nodes.ids, []

    def unbalanced(row: int, case: int, value: str) -> str:
        return f"{tell(drawing, ids[row])} has an unbalance V2/V1 of {value}"

    def neutral(row: int, case: int, value: str) -> str:
        return f"The neutral of {tell(drawing, ids[row])} is at {value} to earth"

    for name, column, limit, unit, subject, whose in (
        ("unbalance", "unbalance_percent", limits.unbalance_percent, "%", unbalanced, limits.unbalance_name),
        ("neutral volts", "neutral_v", limits.neutral_v, "V", neutral, limits.neutral_name),
    ):
        if limit is not None:
            value, near = wires.nodes.column(column), limit * (1 - NEAR_SHARE)
            check = Check(name, ids, value, limit, False, near, subject, "the most allowed is", unit)
            found.append((check, whose or SET_HERE))
    return found
