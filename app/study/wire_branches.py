"""Branches whose phases are solved one by one: amperes of each conductor, whole powers, worst loading."""

import math

import numpy as np
from numpy.typing import NDArray

from app.model.kinds import Branch, Line, Regulator, Switch, Transformer
from app.model.levels import TWO_WIRE
from app.study.flows import forward_of, notches_of, powers_of
from app.study.layout import Layout, arrays_of
from app.study.memory import Columns
from app.study.outcome import BranchState, BranchWires, NodeState, NodeWires, Table
from app.study.rows import Rows
from app.study.unit_wires import rated_current
from app.study.wires import N, flags, letters, slots
from solver import Solution
from solver.sweep import over_conductors

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
NOTCHES = ("a_notch", "b_notch", "c_notch")


def wire_branches(
    layout: Layout, rows: Rows, solution: Solution, nodes: Table[NodeState], phases: Table[NodeWires]
) -> tuple[Table[BranchState], Table[BranchWires]]:
    """Amperes in every conductor, the powers of all together, and the loading of the worst.

    layout : the graph
    rows : of the solver, with conductors
    solution : of these rows
    nodes : percent (node, case) of the lowest phase
    phases : a_v, b_v, c_v (node, case) [V] and base_v (node,) [V]

    Returns : Table of BranchState and Table of BranchWires, by branch id
    """
    conductors = rows.conductors
    assert conductors is not None
    count, cases = len(layout.branches), solution.voltage.shape[-1]
    graph = arrays_of(layout)
    into, out = np.full((2, count, 4, cases), complex(np.nan, np.nan))
    into[rows.lines], into[rows.units] = solution.line_in, solution.transformer_in
    out[rows.lines], out[rows.units] = solution.line_out, solution.transformer_out
    series, shunt = np.full((2, count, cases), complex(np.nan, np.nan))
    series[rows.lines], series[rows.units] = solution.line_series_loss, solution.transformer_series_loss
    shunt[rows.lines], shunt[rows.units] = solution.line_charging, solution.transformer_magnetising_loss
    ends = [np.where(np.isnan(solution.voltage), 0, solution.voltage)[e] for e in (graph.start, graph.end)]
    start_s, end_s = (over_conductors(v * i.conj()) / 1e3 for v, i in zip(ends, (into, out), strict=True))
    series, shunt = series / 1e3, shunt / 1e3
    at_start, at_end = np.abs(into), np.abs(out)
    forward = forward_of(layout, start_s + end_s)
    onward = forward if forward.ndim == 2 else forward[:, None]
    is_unit = np.zeros((count, 1), dtype=bool)
    is_unit[rows.units] = True
    fed = np.where(onward[:, None], at_start, at_end)
    amps = np.where(is_unit[:, None], fed, np.maximum(at_start, at_end))
    sides = _side_bits(rows, onward)
    has = flags(sides)[..., None]
    shown = np.where(has, amps, np.nan)
    start_a, end_a = _most(has, at_start), _most(has, at_end)
    ohms = _ohms(layout, rows, phases)
    known = ~np.isnan(start_s)
    columns = {
        "live": np.asarray(known.any(axis=1)),
        "forward": forward,
        "current_a": np.where(known, np.where(has, amps, 0.0).max(axis=1), np.nan),
        "start_a": np.where(known, start_a, np.nan),
        "end_a": np.where(known, end_a, np.nan),
        **powers_of(onward, is_unit, (start_s, end_s), (series, shunt)),
        "loaded_percent": np.where(known, _loading(layout, rows, at_start, at_end), np.nan),
        "drop_percent": _drop(layout, onward, nodes, phases),
        "resistance_ohm": ohms.real,
        "reactance_ohm": ohms.imag,
        "notch": notches_of(layout, rows, cases),
    }
    wires = {
        "phases": np.array([letters(bits) for bits in sides], dtype="U4"),
        **{f"{letter}_a": shown[:, i] for i, letter in enumerate("abcn")},
        **dict(zip(NOTCHES, _notches(layout, rows, cases), strict=True)),
    }
    ids, row = tuple(layout.branch_ids), layout.branch_row
    return Table(BranchState, ids, columns, row), Table(BranchWires, ids, wires, row)


def _most(has: NDArray[np.bool_], amps: Real) -> Real:
    """(branch, case) the most of the conductors that each has."""
    return np.where(has.any(axis=1), np.where(has, amps, 0.0).max(axis=1), np.nan)


def _notches(layout: Layout, rows: Rows, cases: int) -> Real:
    """(3, branch, case) notch of each phase, where each steps by itself."""
    found = np.full((3, len(layout.branches), cases), np.nan)
    for row, notches in rows.phase_notches.items():
        found[:, row] = notches
    return found


def _side_bits(rows: Rows, onward: NDArray[np.bool_]) -> list[int]:
    """Conductors of each branch; of a transformer those of the winding that is fed in the first case."""
    conductors = rows.conductors
    assert conductors is not None
    found = list(conductors.branch)
    for row, unit in conductors.units.items():
        found[row] = unit.one if onward[row, 0] else unit.two
    return found


def _ohms(layout: Layout, rows: Rows, nodes: Table[NodeWires]) -> Complex:
    """(branch,) impedance of a phase of a line without what it shares with the others, as stated or Z1; of
    one alone without what it shares with its neutral; of a two-wire system out and back, Zpp − 2 ZpN + ZNN;
    of a transformer seen at winding 2."""
    conductors, network = rows.conductors, rows.network
    assert conductors is not None
    found = np.full(len(layout.branches), complex(np.nan, np.nan))
    found[rows.units] = network.transformer_z[:, 0]
    runs = flags(conductors.branch, 3)[rows.lines].astype(np.float64)
    z, count = network.line_z[..., 0], runs.sum(axis=1)
    phases = z[:, :3, :3] * runs[:, :, None] * runs[:, None, :]
    own = np.einsum("ijj->i", phases)
    shared = (phases.sum(axis=(1, 2)) - own) / np.maximum(count - 1, 1)
    shared = np.where(count == 1, (z[:, :3, N] * runs).sum(axis=1), shared)
    each = (own - shared) / np.maximum(count, 1)
    system = nodes.column("system")[arrays_of(layout).start[rows.lines]]
    each = np.where(system == TWO_WIRE, own - 2 * shared + z[:, N, N], each)
    found[rows.lines] = np.where(count > 0, each, complex(np.nan, np.nan))
    return found


def _rating(branch: Branch) -> tuple[float]:
    """Rated amperes of all parallel runs together; nan where none are given."""
    given = branch.rating_a if isinstance(branch, Line | Regulator | Switch) else None
    runs = branch.side_by_side if isinstance(branch, Line) else 1
    return (math.nan if given is None else given * runs,)


_rated: Columns[Branch] = Columns(_rating, 1)


def _loading(layout: Layout, rows: Rows, at_start: Real, at_end: Real) -> Real:
    """(branch, case) current over rated current of the worst conductor, the neutral among them; of a
    transformer of the worst coil of both windings. nan where no rating is given."""
    conductors = rows.conductors
    assert conductors is not None
    has = flags(conductors.branch)[..., None]
    most = np.where(has, np.maximum(at_start, at_end), -math.inf).max(axis=1)
    rated = np.where(np.array(conductors.branch) > 0, _rated.of(layout.branches)[0], np.nan)
    found: Real = np.asarray(100 * most / rated[:, None])
    for row, wires in conductors.units.items():
        unit = layout.branches[row]
        assert isinstance(unit, Transformer)
        sides = [
            amps[row][slots(bits)].max(axis=0) / rated_current(unit, winding, wires)
            for winding, amps, bits in zip((1, 2), (at_start, at_end), wires.judged, strict=True)
        ]
        found[row] = 100 * np.maximum(*sides)
    return found


def _drop(
    layout: Layout, onward: NDArray[np.bool_], nodes: Table[NodeState], phases: Table[NodeWires]
) -> Real:
    """(branch, case) % lost along it, of the phase that loses most where both ends have it."""
    graph, percent = arrays_of(layout), nodes.column("percent")
    sign = np.where(onward, 1.0, -1.0)
    whole = sign * (percent[graph.start] - percent[graph.end])
    base = phases.column("base_v")[:, None, None]
    each = 100 * np.stack([phases.column(f"{letter}_v") for letter in "abc"], axis=1) / base
    lost = sign[:, None] * (each[graph.start] - each[graph.end])
    worst = np.where(np.isnan(lost), -math.inf, lost).max(axis=1)
    kind = phases.column("against")
    alike = kind[graph.start] == kind[graph.end]
    alike[layout.units] = False
    return np.where(alike[:, None] & np.isfinite(worst), worst, whole)
