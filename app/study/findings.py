"""The judged checks: every voltage, drop and loading against its limit, unrounded, worst case named."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.model.figures import percent as percent_text
from app.model.figures import volts
from app.study.outcome import BranchState, Finding, NodeState, Table, Verdict
from app.study.words import list_of, tell

NEAR_VOLTAGE = 1.0  # % of nominal: a voltage this close to its limit is near it
NEAR_SHARE = 0.9  # of the limit: a drop or a loading beyond this is near it
FROM_MEMORY = ", from memory"  # of a source: stands beside the finding, not in its sentence
NOISE = 1e-9  # %, what the arithmetic leaves open: a value this close to its limit is on it
SET_HERE = "the limit set for this drawing"
LOADING = "the loading limit set for this drawing"
Real = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Check:
    """One kind of check on many elements.

    name : such as "voltage low"
    ids : (element,) what is judged
    value : (element, case) float [%]; nan is not judged
    limit : float [%]
    low : true where the value must not fall below the limit
    near : float [%], a margin smaller than this is near the limit
    subject : (row, case, value as text) to words such as `House (B3) is at 93.6 % of nominal, 374.5 V`
    rule : words before the limit, such as `the lowest allowed is`
    """

    name: str
    ids: tuple[str, ...]
    value: Real
    limit: float
    low: bool
    near: float
    subject: Callable[[int, int, str], str]
    rule: str


def judge(
    drawing: Drawing, nodes: Table[NodeState], branches: Table[BranchState], cases: tuple[str, ...]
) -> list[Finding]:
    """Hold node voltages, drops and branch loadings against the drawing's limits.

    Each element that fails or is near gets a finding for its own worst case; where none does, the worst
    element of the check gets one that says it holds. Near is within 1 % of nominal for a voltage, beyond
    90 % of the limit for a drop or a loading. A value on its limit holds.

    drawing : the drawing, for its limits and names
    nodes : table, percent (node, case) [% of nominal], drop_percent (node, case) [%]
    branches : table, loaded_percent (branch, case) [% of rating]
    cases : names of the cases

    Returns : list of Finding with value, limit and signed margin [%]
    Source : the limits are the drawing's; what counts as near is ours
    """
    limits = drawing.limits
    checks = [
        (_voltage(drawing, nodes, limits.low_percent, True), limits.name or SET_HERE),
        (_voltage(drawing, nodes, limits.high_percent, False), limits.name or SET_HERE),
    ]
    if limits.drop_percent is not None:
        checks.append((_drop(drawing, nodes, limits.drop_percent), limits.drop_name or SET_HERE))
    checks.append((_loading(drawing, branches, limits.most_loaded_percent), LOADING))
    found = [one for check, whose in checks for one in findings_of(check, whose, cases)]
    return found + _unrated(drawing, branches)


def _unrated(drawing: Drawing, branches: Table[BranchState]) -> list[Finding]:
    """One note on all live branches whose loading nobody can judge."""
    if not branches.ids:
        return []
    live = branches.column("live").reshape(len(branches.ids), -1).any(axis=1)
    unknown = live & np.isnan(branches.column("loaded_percent")).all(axis=1)
    ids = tuple(branches.ids[row] for row in np.flatnonzero(unknown))
    if not ids:
        return []
    words = f"The loading of {list_of(drawing, ids)} is not judged: no rating is given."
    return [Finding("not judged", Verdict.NOTE, ids, words)]


def _voltage(drawing: Drawing, nodes: Table[NodeState], limit: float, low: bool) -> Check:
    ids, level = nodes.ids, nodes.column("voltage_v")

    def subject(row: int, case: int, value: str) -> str:
        return f"{tell(drawing, ids[row])} is at {value} of nominal, {volts(level[row, case])}"

    name, side = ("voltage low", "lowest") if low else ("voltage high", "highest")
    rule = f"the {side} allowed is"
    return Check(name, ids, nodes.column("percent"), limit, low, NEAR_VOLTAGE, subject, rule)


def _drop(drawing: Drawing, nodes: Table[NodeState], limit: float) -> Check:
    ids = nodes.ids

    def subject(row: int, case: int, value: str) -> str:
        return f"{tell(drawing, ids[row])} lies {value} of nominal below its supply"

    near = limit * (1 - NEAR_SHARE)
    value = nodes.column("drop_percent")
    return Check("voltage drop", ids, value, limit, False, near, subject, "the most allowed is")


def _loading(drawing: Drawing, branches: Table[BranchState], limit: float) -> Check:
    ids = branches.ids

    def subject(row: int, case: int, value: str) -> str:
        return f"{tell(drawing, ids[row])} is loaded to {value} of its rating"

    near = limit * (1 - NEAR_SHARE)
    value = branches.column("loaded_percent")
    return Check("loading", ids, value, limit, False, near, subject, "the most allowed is")


def findings_of(
    check: Check, whose: str, cases: tuple[str, ...], broken: Verdict = Verdict.FAILS
) -> list[Finding]:
    """Judge one check on every element; the margin is value − limit where low, limit − value where not.

    check : values (element, case) and their limit [%]
    whose : whose limit it is
    cases : names of the cases
    broken : the verdict where the limit is passed

    Returns : list of Finding, smallest margin first
    """
    margin = margin_of(check.value, check.limit, check.low)
    judged = np.where(np.isnan(margin), np.inf, margin)
    if judged.size == 0:
        return []
    worst_case = judged.argmin(axis=1)
    worst = judged[np.arange(len(judged)), worst_case]
    rows = np.flatnonzero(worst < check.near)
    rows = rows[np.argsort(worst[rows], kind="stable")]
    if len(rows) == 0:
        rows = np.array([worst.argmin()])
        if np.isinf(worst[rows[0]]):
            return []
    by_case = _verdicts(margin[rows], check.near, broken)
    return [
        _finding(check, int(row), int(worst_case[row]), float(worst[row]), whose, cases, tuple(verdicts))
        for row, verdicts in zip(rows, by_case, strict=True)
    ]


def margin_of(value: Real | float, limit: float, low: bool) -> Real:
    """Distance to a limit, value − limit where low, limit − value where not; a value on its limit has none.

    value : (...) float [%]
    limit : float [%]
    low : the value must not fall below the limit

    Returns : (...) float [%], negative where the limit is passed
    """
    margin = value - limit if low else limit - value
    return np.where(np.abs(margin) < NOISE, 0.0, margin)


def _verdicts(margin: Real, near: float, broken: Verdict) -> NDArray[np.object_]:
    rung = np.where(np.isnan(margin), 3, np.where(margin < 0, 0, np.where(margin < near, 1, 2)))
    return np.array((broken, Verdict.NEAR, Verdict.HOLDS, Verdict.NOTE), dtype=object)[rung]


def _finding(
    check: Check,
    row: int,
    case: int,
    margin: float,
    whose: str,
    cases: tuple[str, ...],
    by_case: tuple[Verdict, ...],
) -> Finding:
    value = float(check.value[row, case])
    shown, allowed = apart(value, check.limit)
    named = f" in case {cases[case]}" if len(cases) > 1 else ""
    cited = whose.removesuffix(FROM_MEMORY)
    words = f"{check.subject(row, case, shown)}{named}; {check.rule} {allowed} ({cited})."
    return Finding(
        check=check.name,
        verdict=by_case[case],
        ids=(check.ids[row],),
        sentence=words,
        value=value,
        limit=check.limit,
        margin=margin,
        unit="%",
        whose=whose,
        case=cases[case],
        by_case=by_case,
    )


def checks_made(drawing: Drawing, nodes: Table[NodeState], branches: Table[BranchState]) -> int:
    """How many checks `judge` makes: each live node low, high and its drop where limited, each rated branch.

    drawing : the drawing, for its limits
    nodes : table, percent (node, case) [% of nominal]
    branches : table, loaded_percent (branch, case) [% of rating]

    Returns : number of elements and checks, whatever the number of cases
    """
    levels = _known(nodes.column("percent"))
    drops = levels if drawing.limits.drop_percent is not None else 0
    return 2 * levels + drops + _known(branches.column("loaded_percent"))


def _known(value: Real) -> int:
    return int(np.isfinite(value).any(axis=1).sum())


def apart(value: float, limit: float) -> tuple[str, str]:
    """Value and limit with enough digits to tell them apart: `93.611 %` against `93.617 %`.

    value : float [%]
    limit : float [%]

    Returns : both as text, with at least one and at most six digits after the point
    """
    for digits in range(1, 7):
        shown, allowed = percent_text(value, digits), percent_text(limit, digits)
        if shown != allowed or value == limit:
            break
    return shown, allowed
