"""The one path from a drawing to its outcome: window, headless commands and tests all walk it."""

from __future__ import annotations

from time import perf_counter
from typing import TYPE_CHECKING

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
from app.study.start_findings import start_findings
from app.study.start_table import StartTable
from app.study.starts import start_table, starters
from app.study.structure import structure_findings
from app.study.words import tally_words
from app.study.zones import Zones, zones_of
from solver import Solution, Status, Trouble

if TYPE_CHECKING:
    from app.study.collapse import Collapse


def run(drawing: Drawing) -> Outcome:
    """Solve a drawing in all its loading cases at once and judge what comes out.

    drawing : the drawing; its values are taken as checked by the model

    Returns : Outcome with a row for every element; figures only where every case is solved
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
    status = _status(solution)
    collapse: Collapse | None = None
    tables = tables_of(layout, zones, rows, solution if status is Status.SOLVED else None, len(cases))
    starts: StartTable | None = None
    faulted = NO_FAULTS
    if status is Status.SOLVED and rows is not None and starters(layout):
        starts = start_table(drawing, layout, zones, rows)
        found = found + start_findings(drawing, starts, cases)
    if status is Status.SOLVED and rows is not None:
        faulted = faults_of(drawing, layout, zones, False)
        found = found + _judged(drawing, layout, zones, rows, tables, moved, faulted)
    elif rows is not None and solution is not None and isinstance(solution.forest, Trouble):
        found = [trouble_finding(layout, rows, solution.forest), *found]
    elif moved is not None and (hunting := hunting_findings(drawing, layout, moved)):
        found = hunting + found
    elif rows is not None and solution is not None:
        from app.study.collapse import collapse_of  # loaded where a layout does not stand

        collapse = collapse_of(drawing, layout, zones, rows, solution)
        found = [collapse.finding, *found]
    found.sort(key=lambda f: f.verdict.rank)
    return Outcome(
        status=status,
        sentence=_sentence(status, found),
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
        largest_share=collapse.share if collapse else None,
        to_blame=collapse.branch if collapse else None,
        seconds=seconds,
        fed_from=layout.before,
        starts=starts,
        faults=faulted.nodes if faulted.worked_out else None,
        fault_basis=faulted.basis,
        wires=tables.wires,
    )


def _judged(
    drawing: Drawing,
    layout: Layout,
    zones: Zones,
    rows: Rows,
    tables: Tables,
    moved: Moved | None,
    faulted: Faults,
) -> list[Finding]:
    """Everything that is judged of a layout that is solved."""
    cases = tuple(case.name for case in drawing.cases)
    found = judge(drawing, tables.nodes, tables.branches, cases, tables.wires)
    found += excitation_findings(drawing, layout, tables.nodes, tables.branches, cases, tables.wires)
    found += barred_findings(drawing, layout)
    found += rise_findings(drawing, layout, zones, rows, tables, cases)
    if moved is not None:
        found += stop_findings(drawing, layout, rows, tables, moved)
    found += faulted.findings
    if layout.rings:
        from app.study.idle import idle_findings  # loaded with the first ring

        found += idle_findings(drawing, layout, zones, rows, tables.attachments)
    return found


def _status(solution: Solution | None) -> Status:
    """The worst of all cases."""
    if solution is None:
        return Status.INVALID
    for status in (Status.INVALID, Status.NO_OPERATING_POINT, Status.NOT_SETTLED):
        if status in solution.status:
            return status
    return Status.SOLVED


def _sentence(status: Status, found: list[Finding]) -> str:
    if status is Status.SOLVED:
        return f"Solved. {tally_words(found)}."
    if status is Status.INVALID and found and found[0].verdict is not Verdict.BLOCKS:
        return found[0].sentence
    return status.value
