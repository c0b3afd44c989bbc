"""Solution to tables by id: volts between lines, whole powers in kW and kvar, currents in a wire."""

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from app.model.kinds import Generator, Line, Load, Supply, Switch, Transformer
from app.study.layout import NONE, Layout
from app.study.outcome import AttachmentState, Balance, BranchState, NodeState, Table
from app.study.rows import Rows
from app.study.zones import Zones
from solver import Solution

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]


@dataclass(frozen=True, slots=True)
class Tables:
    """The three tables and the balance of one solution."""

    nodes: Table[NodeState]
    branches: Table[BranchState]
    attachments: Table[AttachmentState]
    balance: Balance


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
    nodes = _nodes(layout, zones, rows, solution)
    branches = _branches(layout, rows, solution, nodes.column("percent"))
    attachments = _attachments(layout, rows, solution, nodes.column("voltage_v"))
    return Tables(nodes, branches, attachments, _balance(layout, branches, attachments, solution))


def _dead(layout: Layout, zones: Zones, cases: int) -> Tables:
    def table(state: Any, ids: list[str], known: dict[str, NDArray[Any]]) -> Table[Any]:
        nothing = np.full((len(ids), cases), np.nan)
        no = np.zeros(len(ids), dtype=bool)
        columns = {n: known.get(n, no if n in ("live", "forward") else nothing) for n in _names(state)}
        return _table(state, ids, columns)

    known = {"nominal_v": _nominal(layout, zones), "route_m": _routes(layout)}
    none = np.full(cases, np.nan)
    return Tables(
        table(NodeState, layout.node_ids, known),
        table(BranchState, layout.branch_ids, {"forward": _forward(layout)}),
        table(AttachmentState, layout.attachment_ids, {}),
        Balance(*[none] * len(_names(Balance))),
    )


def _names(state: Any) -> list[str]:
    return list(state.__dataclass_fields__)


def _table(state: Any, ids: list[str], columns: dict[str, NDArray[Any]]) -> Table[Any]:
    return Table(state, tuple(ids), columns, {id: row for row, id in enumerate(ids)})


def _nominal(layout: Layout, zones: Zones) -> Real:
    return zones.nominal_v[np.array(layout.zone, dtype=np.intp)]


def _routes(layout: Layout) -> Real:
    """Route length from the supply; nan in dead parts."""
    route = [0.0] * len(layout.nodes)
    for node in layout.order:
        branch = layout.fed_by[node]
        if branch == NONE:
            route[node] = 0.0 if layout.live(node) else np.nan
            continue
        run = layout.branches[branch]
        along = run.length_m if isinstance(run, Line) else 0.0
        route[node] = route[layout.far(branch, node)] + along
    return np.array(route, dtype=np.float64)


def _forward(layout: Layout) -> NDArray[np.bool_]:
    fed_by = np.array([*layout.fed_by, NONE], dtype=np.intp)
    start = np.array(layout.start, dtype=np.intp)
    backward: NDArray[np.bool_] = fed_by[start] == np.arange(len(start))
    return ~backward


def _nodes(layout: Layout, zones: Zones, rows: Rows, solution: Solution) -> Table[NodeState]:
    voltage = solution.voltage[:, 0]
    nominal = _nominal(layout, zones)
    level = np.abs(voltage) * rows.wide[:, None]
    percent = 100 * level / nominal[:, None]
    roots = np.array(layout.roots, dtype=np.intp)[np.array(layout.tree, dtype=np.intp)]
    columns = {
        "live": np.array([layout.supply_of[t] != NONE for t in layout.tree], dtype=bool),
        "nominal_v": nominal,
        "voltage_v": level,
        "percent": percent,
        "angle_deg": np.degrees(np.angle(voltage)),
        "drop_percent": percent[roots] - percent,
        "route_m": _routes(layout),
    }
    return _table(NodeState, layout.node_ids, columns)


def _branches(layout: Layout, rows: Rows, solution: Solution, percent: Real) -> Table[BranchState]:
    count, cases = len(layout.branches), percent.shape[1]
    start, end = np.array(layout.start, dtype=np.intp), np.array(layout.end, dtype=np.intp)
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
    forward, start_a, end_a = _forward(layout), np.abs(into), np.abs(out)
    fed_a = np.where(forward[:, None], start_a, end_a)
    is_unit = np.zeros((count, 1), dtype=bool)
    is_unit[rows.units] = True
    ohms = np.full(count, complex(np.nan, np.nan))
    ohms[rows.lines], ohms[rows.units] = rows.network.line_z[:, 0, 0, 0], rows.network.transformer_z[:, 0]
    ratings = _ratings(layout, rows)
    columns = {
        "live": ~np.isnan(start_a).all(axis=1) if cases else np.zeros(count, dtype=bool),
        "forward": forward,
        "current_a": np.where(is_unit, fed_a, np.maximum(start_a, end_a)),
        "start_a": start_a,
        "end_a": end_a,
        "start_kw": start_s.real,
        "start_kvar": start_s.imag,
        "end_kw": end_s.real,
        "end_kvar": end_s.imag,
        "loss_kw": series.real + shunt.real,
        "copper_kw": series.real,
        "iron_kw": np.where(is_unit, shunt.real, np.where(np.isnan(start_a), np.nan, 0.0)),
        "loss_kvar": series.imag + shunt.imag,
        "loading_percent": 100 * np.maximum(start_a / ratings[0][:, None], end_a / ratings[1][:, None]),
        "drop_percent": np.where(forward[:, None], 1.0, -1.0) * (percent[start] - percent[end]),
        "resistance_ohm": ohms.real,
        "reactance_ohm": ohms.imag,
    }
    return _table(BranchState, layout.branch_ids, columns)


def _ratings(layout: Layout, rows: Rows) -> tuple[Real, Real]:
    """Rated current at both ends, of all parallel runs or units; nan where no rating is given.

    A transformer's is S / (√3 · U) at each winding's rated voltage, S / U where two-wire.
    """
    first, second = np.full(len(layout.branches), np.nan), np.full(len(layout.branches), np.nan)
    for row, branch in enumerate(layout.branches):
        if isinstance(branch, Transformer):
            rated = branch.rating_kva * 1e3 * branch.parallel / rows.wide[layout.start[row]]
            first[row], second[row] = rated / branch.v1_v, rated / branch.v2_v
        elif isinstance(branch, Line) and branch.rating_a is not None:
            first[row] = second[row] = branch.rating_a * branch.parallel
        elif isinstance(branch, Switch) and branch.rating_a is not None:
            first[row] = second[row] = branch.rating_a
    return first, second


def _attachments(layout: Layout, rows: Rows, solution: Solution, level: Real) -> Table[AttachmentState]:
    at = np.array(layout.at, dtype=np.intp)
    voltage = level[at] if at.size else np.zeros((0, level.shape[1]))
    power = np.where(np.isnan(voltage), np.nan, 0.0) + 0j
    phases = rows.phases[at][:, None] / 1e3 if at.size else np.zeros((0, 1))
    makes = np.array([isinstance(layout.attachments[i], Generator) for i in rows.loads], dtype=bool)
    power[rows.loads] = solution.load_power[:, 0] * np.where(makes, -1.0, 1.0)[:, None]
    power[rows.shunts] = -solution.shunt_power[:, 0]
    power[rows.sources] = solution.source_power[:, 0]
    power = power * phases
    wide = rows.wide[at][:, None] if at.size else np.ones((0, 1))
    with np.errstate(divide="ignore", invalid="ignore"):
        current = np.where(voltage > 0, np.abs(power) * 1e3 / (voltage * wide), np.abs(power))
    columns = {
        "live": np.array([layout.live(node) for node in layout.at], dtype=bool),
        "kw": power.real,
        "kvar": power.imag,
        "current_a": current,
        "voltage_v": voltage,
    }
    return _table(AttachmentState, layout.attachment_ids, columns)


def _balance(
    layout: Layout, branches: Table[BranchState], attachments: Table[AttachmentState], solution: Solution
) -> Balance:
    kind = np.array([_role(a) for a in layout.attachments], dtype="U1")
    kw, kvar = attachments.column("kw"), attachments.column("kvar")
    is_unit = np.array([isinstance(b, Transformer) for b in layout.branches], dtype=bool)
    copper, iron = branches.column("copper_kw"), branches.column("iron_kw")

    def total(column: Real, of: NDArray[np.bool_]) -> Real:
        return np.nansum(column[of], axis=0)

    every = np.ones(len(is_unit), dtype=bool)
    return Balance(
        supply_kw=total(kw, kind == "s"),
        supply_kvar=total(kvar, kind == "s"),
        generation_kw=total(kw, kind == "g"),
        load_kw=total(kw, kind == "l"),
        load_kvar=total(kvar, kind == "l"),
        line_kw=total(copper, ~is_unit),
        copper_kw=total(copper, is_unit),
        iron_kw=total(iron, is_unit),
        loss_kw=total(branches.column("loss_kw"), every),
        closure=solution.closure,
    )


def _role(attachment: Any) -> str:
    if isinstance(attachment, Generator):
        return "g"
    return "l" if isinstance(attachment, Load) else "s" if isinstance(attachment, Supply) else "c"
