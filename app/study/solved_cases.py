"""Where some cases of a drawing have no operating point: figures and verdicts of those that have."""

from collections.abc import Iterable, Sequence
from dataclasses import fields, replace
from typing import Any

import numpy as np
from msgspec.structs import replace as replaced
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.study.changers import Moved
from app.study.outcome import Finding, Table, Verdict, Wired
from app.study.results import Tables
from app.study.rows import Rows
from app.study.start_table import StartTable
from app.study.words import among, tally_words
from solver import Status
from solver.control import Rest
from solver.share import pick

Flag = NDArray[np.bool_]
JUDGED = (Verdict.HOLDS, Verdict.NEAR)
HOLDS_THERE = "Holds in the cases that are solved."


def blanked(tables: Tables, solved: Flag) -> Tables:
    """The tables without a figure in the cases that are not solved, where nothing is live.

    tables : of all cases
    solved : (case,) bool

    Returns : Tables, nan in these columns
    """
    balance = {
        f.name: np.where(solved, getattr(tables.balance, f.name), np.nan) for f in fields(tables.balance)
    }
    wires = tables.wires
    return Tables(
        _blank(tables.nodes, solved),
        _blank(tables.branches, solved),
        _blank(tables.attachments, solved),
        replace(tables.balance, **balance),
        wires
        and Wired(
            _blank(wires.nodes, solved), _blank(wires.branches, solved), _blank(wires.attachments, solved)
        ),
    )


def _blank(table: Table[Any], solved: Flag) -> Table[Any]:
    columns = dict(table.columns)
    for name, column in columns.items():
        if name == "live":
            columns[name] = column.reshape(len(table.ids), -1) & solved
        elif column.ndim == 2 and column.dtype.kind == "f":
            columns[name] = np.where(solved, column, np.nan)
    return replace(table, columns=columns)


def at_rest(moved: Moved, solved: Flag) -> Moved:
    """Where what moves came to rest, with nothing to say of the cases that are not solved.

    moved : of all cases
    solved : (case,) bool

    Returns : Moved
    """
    rest = moved.rest.copy()
    rest[:, ~solved] = Rest.UNKNOWN
    return replace(moved, rest=rest, holds=moved.holds | ~solved)


def of_solved(drawing: Drawing, rows: Rows, solved: Flag) -> tuple[Drawing, Rows]:
    """The drawing and its rows with the cases alone that are solved.

    drawing : with all its cases
    rows : of all cases, at rest
    solved : (case,) bool

    Returns : Drawing and Rows of these cases
    """
    chosen = np.flatnonzero(solved)
    own = replaced(drawing, cases=tuple(drawing.cases[case] for case in chosen))
    return own, replace(
        rows,
        network=pick(rows.network, chosen),
        notches={row: notch[chosen] for row, notch in rows.notches.items()},
        phase_notches={row: notch[:, chosen] for row, notch in rows.phase_notches.items()},
    )


def spread_starts(table: StartTable, solved: Flag) -> StartTable:
    """Motor starts of the solved cases as those of all: nan, and not solved, in the others.

    table : columns (motor, solved case)
    solved : (case,) bool

    Returns : StartTable, columns (motor, case)
    """
    columns: dict[str, NDArray[Any]] = {}
    for name, column in table.columns.items():
        shape = (len(table.ids), len(solved))
        known = column.dtype.kind == "f"
        whole: NDArray[Any] = np.full(shape, np.nan) if known else np.zeros(shape, dtype=column.dtype)
        whole[:, solved] = column
        columns[name] = whole
    return replace(table, columns=columns)


def told(findings: list[Finding], solved: Flag) -> list[Finding]:
    """The findings with each case that is not solved judged so, and what holds only without it saying so.

    findings : of the solved cases
    solved : (case,) bool

    Returns : list of Finding; those that know no case as they are
    """
    return [_told(finding, solved) if finding.case else finding for finding in findings]


def partly_words(statuses: Sequence[Status], cases: Sequence[str], findings: Iterable[Finding]) -> str:
    """What came out where some cases are solved and some are not.

    statuses : (case,) of the solver
    cases : names of the cases
    findings : of the outcome

    Returns : sentences
    """
    made = []
    for status in dict.fromkeys(s for s in statuses if s is not Status.SOLVED):
        names = [name for name, own in zip(cases, statuses, strict=True) if own is status]
        head, _, why = status.value.partition(":")
        made.append(f"{head} in {among(names)}:{why}")
    judged = tally_words(f for f in findings if f.verdict is not Verdict.BLOCKS)
    count = sum(status is Status.SOLVED for status in statuses)
    rest = "The other case is solved" if count == 1 else f"The other {count} cases are solved"
    return " ".join([*made, f"{rest}: {judged[0].lower()}{judged[1:]}."])


def _told(finding: Finding, solved: Flag) -> Finding:
    each = finding.by_case or (finding.verdict,) * len(solved)
    by_case = tuple(v if s else Verdict.BLOCKS for v, s in zip(each, solved, strict=True))
    words = f"{finding.sentence} {HOLDS_THERE}" if finding.verdict in JUDGED else finding.sentence
    return replaced(finding, by_case=by_case, sentence=words)
