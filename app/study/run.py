"""The one path from a drawing to its outcome: window, headless commands and tests all walk it."""

from __future__ import annotations

from time import perf_counter
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.study.assumptions import assumptions_of
from app.study.changer_findings import barred_findings, hunting_findings, stop_findings
from app.study.changers import Moved, settled
from app.study.excitation import excitation_findings
from app.study.faults import NO_FAULTS, Faults, faults_of
from app.study.findings import judge
from app.study.layout import Layout, lay_out
from app.study.outcome import Finding, Outcome, Verdict
from app.study.results import Tables, tables_of
from app.study.rings import trouble_finding
from app.study.rise_findings import rise_findings
from app.study.rows import Rows, rows_of
from app.study.solved_cases import at_rest, blanked, partly_words, told
from app.study.start_findings import start_findings
from app.study.start_table import StartTable
from app.study.starts import start_table, starters
from app.study.structure import structure_findings
from app.study.trace import supply_sides
from app.study.words import tally_words
from app.study.zones import Zones, zones_of
from solver import Solution, Status, Trouble
from solver.control import Rest

if TYPE_CHECKING:
    from app.study.collapse import Collapse

Flag = NDArray[np.bool_]
WORST_FIRST = (Status.INVALID, Status.NO_OPERATING_POINT, Status.NOT_SETTLED)


def run(drawing: Drawing) -> Outcome:
    """Solve a drawing in all its loading cases at once and judge what comes out.

    drawing : the drawing; its values are taken as checked by the model

    Returns : Outcome with a row for every element; figures of the cases that are solved
    Source : see solver
    """
    clock = [perf_counter()]

    def lap() -> float:
        clock.append(perf_counter())
        return clock[-1] - clock[-2]

    layout = lay_out(drawing)
    zones = zones_of(drawing, layout)
    found = structure_findings(drawing, layout, zones)
    seconds = {"structure": lap()}
    barred = not layout.supplies or any(f.verdict is Verdict.BLOCKS for f in found)
    rows: Rows | None = None
    solution: Solution | None = None
    moved: Moved | None = None
    if not barred:
        rows = rows_of(drawing, layout, zones)
        seconds["rows"] = lap()
        rows, solution, moved = settled(drawing, layout, zones, rows)
        seconds["solve"] = lap()
    outcome = _outcome(drawing, layout, zones, found, rows, solution, moved, seconds)
    seconds["results"] = lap()
    seconds["total"] = clock[-1] - clock[0]
    return outcome


def _outcome(
    drawing: Drawing,
    layout: Layout,
    zones: Zones,
    found: list[Finding],
    rows: Rows | None,
    solution: Solution | None,
    moved: Moved | None,
    seconds: dict[str, float],
) -> Outcome:
    cases = tuple(case.name for case in drawing.cases)
    statuses = solution.status if solution is not None else (Status.INVALID,) * len(cases)
    solved = np.array([status is Status.SOLVED for status in statuses])
    collapses: list[Collapse] = []
    tables = tables_of(layout, zones, rows, solution if solved.any() else None, len(cases))
    starts: StartTable | None = None
    faulted = NO_FAULTS
    if rows is not None and solved.any():
        tables = tables if solved.all() else blanked(tables, solved)
        starts = start_table(drawing, layout, zones, rows, solved) if starters(layout) else None
        faulted = faults_of(drawing, layout, zones, False)
        found = found + _judged(drawing, layout, zones, rows, tables, starts, moved, faulted, solved)
    if rows is not None and solution is not None and not solved.all():
        barring, collapses = _barring(drawing, layout, zones, rows, solution, moved)
        found = barring + found
    found.sort(key=lambda f: f.verdict.rank)
    return Outcome(
        status=_worst(statuses),
        sentence=_sentence(statuses, found, cases),
        cases=cases,
        nodes=tables.nodes,
        branches=tables.branches,
        attachments=tables.attachments,
        balance=tables.balance,
        findings=tuple(found),
        assumptions=assumptions_of(
            drawing, layout, zones, None if rows is None else rows.conductors, faulted.assumptions
        ),
        upstream=layout.upstream,
        zones=layout.zone_of,
        largest_share=collapses[0].share if collapses else None,
        to_blame=collapses[0].branch if collapses else None,
        seconds=seconds,
        fed_from=layout.before,
        starts=starts,
        faults=faulted.nodes if faulted.worked_out else None,
        fault_basis=faulted.basis,
        wires=tables.wires,
        case_status=statuses,
        supply_sides=supply_sides(layout) if layout.rings else {},
    )


def _barring(
    drawing: Drawing, layout: Layout, zones: Zones, rows: Rows, solution: Solution, moved: Moved | None
) -> tuple[list[Finding], list[Collapse]]:
    """What bars the cases that are not solved: trouble in all, or case by case controls or the load."""
    if isinstance(solution.forest, Trouble):
        return [trouble_finding(layout, rows, solution.forest)], []
    hunting = [] if moved is None else hunting_findings(drawing, layout, moved)
    hunts = set() if moved is None else set(np.flatnonzero((moved.rest == Rest.HUNTING).any(axis=0)))
    bad = (case for case, status in enumerate(solution.status) if status is not Status.SOLVED)
    heavy = [case for case in bad if case not in hunts]
    if not heavy:
        return hunting, []
    from app.study.collapse import collapses_of  # loaded where a layout does not stand

    collapses = collapses_of(drawing, layout, zones, rows, heavy)
    return [*(collapse.finding for collapse in collapses), *hunting], collapses


def _judged(
    drawing: Drawing,
    layout: Layout,
    zones: Zones,
    rows: Rows,
    tables: Tables,
    starts: StartTable | None,
    moved: Moved | None,
    faulted: Faults,
    solved: Flag,
) -> list[Finding]:
    """Everything that is judged of a layout, in the cases that are solved."""
    cases = tuple(case.name for case in drawing.cases)
    found = [] if starts is None else start_findings(drawing, starts, cases, solved)
    found += judge(drawing, tables.nodes, tables.branches, cases, tables.wires)
    found += excitation_findings(drawing, layout, tables.nodes, tables.branches, cases, tables.wires)
    found += barred_findings(drawing, layout)
    found += rise_findings(drawing, layout, zones, rows, tables, cases)
    if moved is not None:
        found += stop_findings(drawing, layout, rows, tables, at_rest(moved, solved))
    found += faulted.findings
    if layout.rings:
        from app.study.idle import idle_findings  # loaded with the first ring

        found += idle_findings(drawing, layout, zones, rows, tables.attachments)
    return found if solved.all() else told(found, solved)


def _worst(statuses: tuple[Status, ...]) -> Status:
    """The worst of all cases."""
    return next((status for status in WORST_FIRST if status in statuses), Status.SOLVED)


def _sentence(statuses: tuple[Status, ...], found: list[Finding], cases: tuple[str, ...]) -> str:
    status = _worst(statuses)
    if status is Status.SOLVED:
        return f"Solved. {tally_words(found)}."
    if status is Status.INVALID and found and found[0].verdict is not Verdict.BLOCKS:
        return found[0].sentence
    if Status.SOLVED not in statuses:
        return status.value
    return partly_words(statuses, cases, found)
