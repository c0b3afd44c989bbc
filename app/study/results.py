"""Solution to tables by id: volts between lines, whole powers in kW and kvar, currents in a wire."""

import math
from dataclasses import fields
from typing import Any

import numpy as np
from msgspec import Struct
from numpy.typing import NDArray

from app.model.kinds import Branch, Line, Regulator, Switch, Transformer
from app.study.flows import balance_of, forward_of, notches_of, powers_of, roles, routes_of
from app.study.layout import Layout, arrays_of
from app.study.memory import Columns
from app.study.outcome import AttachmentState, Balance, BranchState, NodeState, Table, Wired
from app.study.rows import Rows
from app.study.sums import size
from app.study.zones import Zones, nominal_of
from solver import Solution

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]


class Tables(Struct, frozen=True):
    """The three tables and the balance of one solution."""

    nodes: Table[NodeState]
    branches: Table[BranchState]
    attachments: Table[AttachmentState]
    balance: Balance
    wires: Wired | None = None


def tables_of(
    layout: Layout, zones: Zones, rows: Rows | None, solution: Solution | None, cases: int
) -> Tables:
    """Every element with its figures; dead rows of nan where there is no solution to show.

    layout : the graph of the drawing
    zones : its voltage levels
    rows : which element each row of the solution is, or None
    solution : of the solver, or None where there is nothing to show
    cases : number of loading cases

    Returns : Tables, columns (row,) or (row, case)
    """
    if rows is None or solution is None:
        return _dead(layout, zones, cases)
    if rows.conductors is not None:
        return _wired(layout, zones, rows, solution)
    nodes = _nodes(layout, zones, rows, solution)
    branches = _branches(layout, rows, solution, nodes.column("percent"))
    attachments = _attachments(layout, rows, solution, nodes.column("voltage_v"))
    return Tables(nodes, branches, attachments, balance_of(layout, branches, attachments, solution))


def _wired(layout: Layout, zones: Zones, rows: Rows, solution: Solution) -> Tables:
    """Phases one by one, and of each element what counts in all: its worst phase, its whole power."""
    from app.study.wire_branches import wire_branches  # most layouts are balanced and never need them
    from app.study.wire_nodes import wire_attachments, wire_nodes

    nodes, node_wires = wire_nodes(layout, zones, rows, solution)
    branches, branch_wires = wire_branches(layout, rows, solution, nodes, node_wires)
    attachments, attachment_wires = wire_attachments(layout, rows, solution, node_wires)
    balance = balance_of(layout, branches, attachments, solution)
    return Tables(nodes, branches, attachments, balance, Wired(node_wires, branch_wires, attachment_wires))


def _dead(layout: Layout, zones: Zones, cases: int) -> Tables:
    known = {"nominal_v": nominal_of(layout, zones), "route_m": routes_of(layout)}
    none = np.full(cases, np.nan)
    return Tables(
        blank_table(NodeState, layout.node_row, known, cases),
        blank_table(BranchState, layout.branch_row, {"forward": arrays_of(layout).forward}, cases),
        blank_table(AttachmentState, layout.attachment_row, {}, cases),
        Balance(*[none] * len(fields(Balance))),
    )


def blank_table(
    state: Any, row: dict[str, int], known: dict[str, NDArray[Any]], cases: int | None = None
) -> Table[Any]:
    """A table in which nothing lives.

    state : class of its rows
    row : id to row
    known : columns that are known all the same
    cases : number of loading cases; None where figures have none

    Returns : Table of nan
    """
    size = (len(row),) if cases is None else (len(row), cases)
    nothing, no = np.full(size, np.nan), np.zeros(len(row), dtype=bool)
    columns = {f: known.get(f, no if f == "live" else nothing) for f in state.__annotations__}
    return Table(state, tuple(row), columns, row)


def _nodes(layout: Layout, zones: Zones, rows: Rows, solution: Solution) -> Table[NodeState]:
    voltage = solution.voltage[:, 0]
    nominal = nominal_of(layout, zones)
    level = size(voltage) * rows.wide[:, None]
    percent = 100 * level / nominal[:, None]
    columns = {
        "live": arrays_of(layout).live,
        "nominal_v": nominal,
        "voltage_v": level,
        "percent": percent,
        "high_percent": percent,
        "angle_deg": np.degrees(np.angle(voltage)),
        "drop_percent": percent[arrays_of(layout).root] - percent,
        "route_m": routes_of(layout),
    }
    return Table(NodeState, tuple(layout.node_ids), columns, layout.node_row)


def _branches(layout: Layout, rows: Rows, solution: Solution, percent: Real) -> Table[BranchState]:
    count, cases = len(layout.branches), percent.shape[1]
    graph = arrays_of(layout)
    start, end = graph.start, graph.end
    voltage, phases = solution.voltage[:, 0], rows.phases[start][:, None] / 1e3

    def scatter(of_lines: Any, of_units: Any) -> Any:
        found = np.full((count, cases), np.nan, dtype=of_lines.dtype)
        found[rows.lines], found[rows.units] = of_lines, of_units
        return found

    into = scatter(solution.line_in[:, 0], solution.transformer_in[:, 0])
    out = scatter(solution.line_out[:, 0], solution.transformer_out[:, 0])
    series = scatter(solution.line_series_loss, solution.transformer_series_loss)
    shunt = scatter(solution.line_charging, solution.transformer_magnetising_loss)
    start_s, end_s = voltage[start] * into.conj() * phases, voltage[end] * out.conj() * phases
    series, shunt = series * phases, shunt * phases
    start_a, end_a = size(into), size(out)
    forward = forward_of(layout, start_s + end_s)
    onward = forward if forward.ndim == 2 else forward[:, None]
    fed_a = np.where(onward, start_a, end_a)
    is_unit = np.zeros((count, 1), dtype=bool)
    is_unit[rows.units] = True
    ohms = np.full(count, complex(np.nan, np.nan))
    ohms[rows.lines], ohms[rows.units] = rows.network.line_z[:, 0, 0, 0], rows.network.transformer_z[:, 0]
    columns: dict[str, NDArray[Any]] = {
        "live": np.asarray(~np.isnan(start_a).all(axis=1)) if cases else np.zeros(count, dtype=bool),
        "forward": forward,
        "current_a": np.where(is_unit, fed_a, np.maximum(start_a, end_a)),
        "start_a": start_a,
        "end_a": end_a,
        **powers_of(onward, is_unit, (start_s, end_s), (series, shunt)),
        "loaded_percent": _loading(layout, rows, start_a, end_a),
        "drop_percent": np.where(onward, 1.0, -1.0) * (percent[start] - percent[end]),
        "resistance_ohm": ohms.real,
        "reactance_ohm": ohms.imag,
        "notch": notches_of(layout, rows, cases),
    }
    return Table(BranchState, tuple(layout.branch_ids), columns, layout.branch_row)


def _rating(branch: Branch) -> tuple[float, float, bool]:
    """Rated current at both ends, times √3 where it is a three-phase transformer, and whether it is one."""
    if isinstance(branch, Transformer):
        rated = branch.rating_kva * 1e3 * branch.side_by_side
        return rated / branch.v1_v, rated / branch.v2_v, True
    given = branch.rating_a if isinstance(branch, Line | Regulator | Switch) else None
    rated = math.nan if given is None else given
    rated *= branch.side_by_side if isinstance(branch, Line) else 1
    return rated, rated, False


_rated: Columns[Branch] = Columns(_rating, 3)


def _loading(layout: Layout, rows: Rows, start_a: Real, end_a: Real) -> Real:
    """Current over rated current, all parallel runs or units together; nan where no rating is given.

    A transformer's rated current is S / (√3 · U) at the nameplate voltage of each winding, S / U where
    two-wire; the larger of both counts.
    """
    first, second, is_unit = _rated.of(layout.branches)
    wide = np.where(is_unit > 0, rows.wide[arrays_of(layout).start], 1.0)
    first, second = first / wide, second / wide
    return 100 * np.maximum(start_a / first[:, None], end_a / second[:, None])


def _attachments(layout: Layout, rows: Rows, solution: Solution, level: Real) -> Table[AttachmentState]:
    at = arrays_of(layout).at
    voltage = level[at]
    power = np.where(np.isnan(voltage), np.nan, 0.0) + 0j
    phases = rows.phases[at][:, None] / 1e3
    makes = np.array(roles.of(layout.attachments), dtype="U1")[rows.loads] == "g"
    power[rows.loads] = solution.load_power[:, 0] * np.where(makes, -1.0, 1.0)[:, None]
    power[rows.shunts] = -solution.shunt_power[:, 0]
    power[rows.sources] = solution.source_power[:, 0]
    power = power * phases
    wide = rows.wide[at][:, None]
    with np.errstate(divide="ignore", invalid="ignore"):
        current = np.where(voltage > 0, size(power) * 1e3 / (voltage * wide), size(power))
    columns: dict[str, NDArray[Any]] = {
        "live": arrays_of(layout).live[at],
        "kw": power.real,
        "kvar": power.imag,
        "current_a": current,
        "voltage_v": voltage,
    }
    return Table(AttachmentState, tuple(layout.attachment_ids), columns, layout.attachment_row)
