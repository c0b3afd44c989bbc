"""The judged checks: every voltage, drop and loading against its limit, unrounded, worst case named."""

import numpy as np
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.model.figures import volts
from app.model.kinds import Generator
from app.study.checking import LOADING, NEAR_SHARE, NEAR_VOLTAGE, SET_HERE, Check, findings_of, unrated
from app.study.outcome import BranchState, Finding, NodeState, Table, Wired
from app.study.wire_findings import branch_words, node_words, wire_checks
from app.study.words import tell

Real = NDArray[np.float64]


def judge(
    drawing: Drawing,
    nodes: Table[NodeState],
    branches: Table[BranchState],
    cases: tuple[str, ...],
    wires: Wired | None = None,
) -> list[Finding]:
    """Hold node voltages, drops and branch loadings against the drawing's limits.

    Each element that fails or is near gets a finding for its own worst case; where none does, the worst
    element of the check gets one that says it holds. Near is within 1 % of nominal for a voltage, beyond
    90 % of the limit for a drop or a loading. A value on its limit holds.

    drawing : the drawing, for its limits and names
    nodes : table, percent (node, case) [% of nominal], drop_percent (node, case) [%]
    branches : table, loaded_percent (branch, case) [% of rating]
    cases : names of the cases
    wires : phases one by one, where they are not alike; then their unbalance is judged as well

    Returns : list of Finding with value, limit and signed margin [%]
    Source : the limits are the drawing's; what counts as near is ours
    """
    limits = drawing.limits
    checks = [
        (_voltage(drawing, nodes, limits.low_percent, True, wires), limits.name or SET_HERE),
        (_voltage(drawing, nodes, limits.high_percent, False, wires), limits.name or SET_HERE),
    ]
    if limits.drop_percent is not None:
        checks.append((_drop(drawing, nodes, limits.drop_percent), limits.drop_name or SET_HERE))
    checks.append((_loading(drawing, branches, limits.most_loaded_percent, wires), LOADING))
    if wires is not None:
        checks += wire_checks(drawing, wires)
    found = [one for check, whose in checks for one in findings_of(check, whose, cases)]
    return found + unrated(drawing, _without_rating(branches))


def _without_rating(branches: Table[BranchState]) -> tuple[str, ...]:
    if not branches.ids:
        return ()
    live = branches.column("live").reshape(len(branches.ids), -1).any(axis=1)
    unknown = live & np.isnan(branches.column("loaded_percent")).all(axis=1)
    return tuple(branches.ids[row] for row in np.flatnonzero(unknown))


def _voltage(
    drawing: Drawing, nodes: Table[NodeState], limit: float, low: bool, wires: Wired | None
) -> Check:
    ids, level = nodes.ids, nodes.column("voltage_v")

    def subject(row: int, case: int, value: str) -> str:
        return f"{tell(drawing, ids[row])} is at {value} of nominal, {volts(level[row, case])}"

    name, side = ("voltage low", "lowest") if low else ("voltage high", "highest")
    rule = f"the {side} allowed is"
    told = subject if wires is None else node_words(drawing, wires.nodes, low)
    value = nodes.column("percent" if low else "high_percent")
    return Check(name, ids, value, limit, low, NEAR_VOLTAGE, told, rule)


def _drop(drawing: Drawing, nodes: Table[NodeState], limit: float) -> Check:
    ids = nodes.ids

    def subject(row: int, case: int, value: str) -> str:
        return f"{tell(drawing, ids[row])} lies {value} of nominal below its supply"

    near = limit * (1 - NEAR_SHARE)
    value = nodes.column("drop_percent")
    return Check("voltage drop", ids, value, limit, False, near, subject, "the most allowed is")


def _loading(drawing: Drawing, branches: Table[BranchState], limit: float, wires: Wired | None) -> Check:
    ids = branches.ids

    def subject(row: int, case: int, value: str) -> str:
        return f"{tell(drawing, ids[row])} is loaded to {value} of its rating"

    near = limit * (1 - NEAR_SHARE)
    value = branches.column("loaded_percent")
    told = subject if wires is None else branch_words(drawing, wires.branches)
    return Check("loading", ids, value, limit, False, near, told, "the most allowed is")


def checks_made(drawing: Drawing, nodes: Table[NodeState], branches: Table[BranchState]) -> int:
    """How many checks `judge` makes: each live node low, high, its drop and its rise by
    generation where limited, each rated branch.

    drawing : the drawing, for its limits
    nodes : table, percent (node, case) [% of nominal]
    branches : table, loaded_percent (branch, case) [% of rating]

    Returns : number of elements and checks, whatever the number of cases
    """
    levels = _known(nodes.column("percent"))
    drops = levels if drawing.limits.drop_percent is not None else 0
    makes = any(isinstance(e, Generator) for e in drawing.elements.values())
    rises = levels if makes and drawing.limits.rise_percent is not None else 0
    return 2 * levels + drops + rises + _known(branches.column("loaded_percent"))


def _known(value: Real) -> int:
    return int(np.isfinite(value).any(axis=1).sum())
