"""What balanced layouts and those with phases share: ways of flow, notches, routes, the balance."""

import math
from typing import Any

import numpy as np
from numpy.typing import NDArray

from app.model.kinds import Attachment, Branch, Generator, Line, Load, Motor, Supply, Transformer
from app.study.layout import NONE, Layout, arrays_of
from app.study.memory import Memory
from app.study.outcome import AttachmentState, Balance, BranchState, Table
from app.study.rows import Rows
from app.study.sums import size, total
from solver import Solution

FAINT = 1e-9  # of the largest power on any ring, below which a flow has no direction
Real = NDArray[np.float64]
Complex = NDArray[np.complex128]


_lengths: Memory[Branch, float] = Memory(lambda b: b.length_m if isinstance(b, Line) else 0.0)


def routes_of(layout: Layout) -> Real:
    """Route length from the supply to every node.

    layout : the graph

    Returns : (node,) float [m], nan in dead parts
    """
    route = [0.0] * len(layout.nodes)
    lengths, fed_by, fed_from = _lengths.of(layout.branches), layout.fed_by, layout.fed_from
    for node in layout.order:
        branch = fed_by[node]
        if branch != NONE:
            route[node] = route[fed_from[node]] + lengths[branch]
    return np.where(arrays_of(layout).live, route, np.nan)


def notches_of(layout: Layout, rows: Rows, cases: int) -> Real:
    """Where every tap stands: as drawn, or where a changer came to rest.

    layout : the graph
    rows : notches of what steps by itself
    cases : number of loading cases

    Returns : (branch, case) float, nan where there are no taps
    """
    drawn = [b.tap if isinstance(b, Transformer) else math.nan for b in layout.branches]
    found = np.repeat(np.array(drawn, dtype=np.float64)[:, None], cases, axis=1)
    for row, notch in rows.notches.items():
        found[row] = notch
    return found


def through_of(onward: NDArray[np.bool_], start_s: Complex, end_s: Complex) -> Complex:
    """Power that enters a branch, where it enters: at the end it is fed from, at the other end where it
    comes back. Its sign is that of the way it is fed; what is fed from both ends counts as it is fed.

    onward : (branch, case or 1) bool, fed from its start
    start_s : (branch, case) complex [kVA] entering at start
    end_s : (branch, case) complex [kVA] leaving at end

    Returns : (branch, case) complex [kVA]
    """
    here, there = np.where(onward, start_s, -end_s), np.where(onward, end_s, -start_s)
    return np.where(here.real >= 0, here, there)


def powers_of(
    onward: NDArray[np.bool_],
    is_unit: NDArray[np.bool_],
    ends: tuple[Complex, Complex],
    losses: tuple[NDArray[Any], NDArray[Any]],
) -> dict[str, Real]:
    """The powers of every branch.

    onward : (branch, case or 1) bool, fed from its start
    is_unit : (branch, 1) bool, transformers and regulators
    ends : (branch, case) complex [kVA] entering at start, and leaving at end; nan where dead
    losses : (branch, case) complex [kVA] in series, and in shunt

    Returns : columns of BranchState (branch, case) float [kW, kvar, kVA]
    """
    (start_s, end_s), (series, shunt) = ends, losses
    entering = through_of(onward, start_s, end_s)
    return {
        "start_kw": start_s.real,
        "start_kvar": start_s.imag,
        "end_kw": end_s.real,
        "end_kvar": end_s.imag,
        "through_kw": entering.real,
        "through_kva": np.abs(entering),
        "loss_kw": series.real + shunt.real,
        "copper_kw": series.real,
        "iron_kw": np.where(is_unit, shunt.real, np.where(np.isnan(start_s), np.nan, 0.0)),
        "loss_kvar": series.imag + shunt.imag,
    }


def forward_of(layout: Layout, through: Complex) -> NDArray[np.bool_]:
    """Whether a branch is fed from its start.

    On a ring and between supplies the power decides, unless next to none flows; elsewhere the tree does.

    layout : the graph
    through : (branch, case) complex [kVA], of both ends together

    Returns : (branch,) bool, or (branch, case) where there are rings
    """
    forward = arrays_of(layout).forward
    if not layout.rings:
        return forward
    either = sorted({branch for ring in layout.rings for branch in ring.branches})
    power = through[either]
    little = FAINT * size(power).max(axis=0, initial=0.0)
    found = np.repeat(forward[:, None], through.shape[1], axis=1)
    found[either] = np.where(np.abs(power.real) > little, power.real > 0, found[either])
    return found


def balance_of(
    layout: Layout, branches: Table[BranchState], attachments: Table[AttachmentState], solution: Solution
) -> Balance:
    """Where the power of all supplies goes.

    layout : the graph
    branches : table, losses (branch, case) [kW]
    attachments : table, kw and kvar (attachment, case)
    solution : of the solver, for its closure

    Returns : Balance, (case,) each
    """
    kind = np.array(roles.of(layout.attachments), dtype="U1")
    kw, kvar = attachments.column("kw"), attachments.column("kvar")
    is_unit = np.zeros(len(layout.branches), dtype=bool)
    is_unit[layout.units] = True
    copper, iron = branches.column("copper_kw"), branches.column("iron_kw")

    return Balance(
        supply_kw=total(kw, kind == "s"),
        supply_kvar=total(kvar, kind == "s"),
        generation_kw=total(kw, kind == "g"),
        load_kw=total(kw, kind == "l"),
        load_kvar=total(kvar, kind == "l"),
        line_kw=total(copper, ~is_unit),
        copper_kw=total(copper, is_unit),
        iron_kw=total(iron, is_unit),
        loss_kw=total(branches.column("loss_kw")),
        closure=solution.closure,
    )


def _role(attachment: Attachment) -> str:
    if isinstance(attachment, Generator):
        return "g"
    return "l" if isinstance(attachment, Load | Motor) else "s" if isinstance(attachment, Supply) else "c"


roles: Memory[Attachment, str] = Memory(_role)
