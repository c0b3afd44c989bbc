"""Transformers whose core is driven beyond what is advised for continuous running."""

import numpy as np
from numpy.typing import NDArray

from app.model import taps
from app.model.drawing import Drawing
from app.model.kinds import Transformer
from app.model.levels import THREE_PHASE
from app.study.checking import Check, findings_of
from app.study.layout import Layout, arrays_of
from app.study.outcome import BranchState, Finding, NodeState, Table, Verdict, Wired
from app.study.words import tell

AT_LOAD, AT_NO_LOAD = 105.0, 110.0  # % of the rated voltage at the tap
IDLE = 5.0  # % loading, below which a transformer counts as unloaded
RULE = "advised for continuous running: at most"
WHOSE = "advice after IEC 60076-1, from memory"


def excitation_findings(
    drawing: Drawing,
    layout: Layout,
    nodes: Table[NodeState],
    branches: Table[BranchState],
    cases: tuple[str, ...],
    wires: Wired | None = None,
) -> list[Finding]:
    """Voltage of the fed winding over its rated voltage at the tap: 105 % at load, 110 % at no load.

    Advice, so that it never fails: beyond it a finding says so. Where phases are not alike, that of the
    highest, or of the one at which a single-phase unit stands.

    drawing : the drawing, for names
    layout : its graph
    nodes : table, high_percent (node, case) [% of nominal] and nominal_v (node,) [V]
    branches : table, loaded_percent (branch, case) [%]
    cases : names of the cases
    wires : phases one by one, where they are not alike

    Returns : list of Finding, none where every transformer is within
    Source : IEC 60076-1, operation at a higher than rated voltage (from memory)
    """
    rows = layout.units
    if not rows:
        return []
    forward = branches.column("forward")
    rated = np.array([_rated(layout, row, branches) for row in rows])
    graph, nominal = arrays_of(layout), nodes.column("nominal_v")
    first, second = (
        _level(layout, nodes, at[rows], wires)
        / (rated[..., n] * _over(layout, n, nominal[at[rows]])[:, None])
        for n, at in enumerate((graph.start, graph.end))
    )
    driven = 100 * np.where(forward.reshape(len(forward), -1)[rows], first, second)
    idle = branches.column("loaded_percent")[rows] < IDLE
    ids = tuple(branches.ids[row] for row in rows)

    def subject(row: int, case: int, value: str) -> str:
        state = "at no load" if idle[row, case] else "at load"
        return f"{tell(drawing, ids[row])} is driven at {value} of its rated voltage {state}"

    found: list[Finding] = []
    for limit, off in ((AT_LOAD, idle), (AT_NO_LOAD, ~idle)):
        value = np.where(off, np.nan, driven)
        check = Check("over-excitation", ids, value, limit, False, 0.0, subject, RULE)
        found += [f for f in findings_of(check, WHOSE, cases, Verdict.ADVICE) if f.verdict is Verdict.ADVICE]
    return found


def _level(
    layout: Layout, nodes: Table[NodeState], at: NDArray[np.intp], wires: Wired | None
) -> NDArray[np.float64]:
    """(transformer, case) line volts at these nodes, of the highest phase or that at which a unit stands."""
    if wires is None:
        return np.asarray(nodes.column("voltage_v")[at])
    nominal = nodes.column("nominal_v")[at]
    found = nodes.column("high_percent")[at] * nominal[:, None] / 100
    for k, row in enumerate(layout.units):
        unit, node = layout.branches[row], at[k]
        phase = str(getattr(unit, "phases", "all")).lower()
        if phase in ("a", "b", "c") and wires.nodes.column("system")[node] == THREE_PHASE:
            own = wires.nodes.column(f"{phase}_v")[node] * nominal[k] / wires.nodes.column("base_v")[node]
            found[k] = np.where(np.isnan(own), found[k], own)
    return np.asarray(found)


def _over(layout: Layout, winding: int, nominal: NDArray[np.float64]) -> NDArray[np.float64]:
    """Volts of its node for one volt across a winding: √3 where a single-phase unit stands at a phase, 2 at
    half of a split phase."""
    made = np.ones(len(layout.units))
    for k, row in enumerate(layout.units):
        unit = layout.branches[row]
        assert isinstance(unit, Transformer)
        single = unit.build == "centre-tapped" or unit.vector_group[:1] == "I"
        rated = unit.v1_v if winding == 0 else unit.v2_v
        if single and nominal[k] > 0:
            made[k] = min((1.0, 3**0.5, 2.0), key=lambda over: abs(np.log(nominal[k] / rated / over)))
    return made


def _rated(layout: Layout, row: int, branches: Table[BranchState]) -> list[tuple[float, float]]:
    """Rated volts of both windings at the tap of each case."""
    unit = layout.branches[row]
    assert isinstance(unit, Transformer)
    return [taps.windings(unit, notch) for notch in branches.column("notch")[row]]
