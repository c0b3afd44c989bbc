"""Nodes and attachments whose phases are solved one by one: volts of each, neutral, unbalance, leads."""

from typing import Any

import numpy as np
from numpy.typing import NDArray

from app.model.kinds import Supply
from app.model.levels import THREE_PHASE
from app.study.earthing import held_zones
from app.study.flows import roles, routes_of
from app.study.layout import Layout, arrays_of
from app.study.leads import in_leads
from app.study.outcome import AttachmentState, AttachmentWires, NodeState, NodeWires, Table
from app.study.rows import Rows
from app.study.wire_volts import KINDS, TO_NEXT, against, base_volts, phase_volts
from app.study.wires import ABC, NEUTRAL, N, flags, letters
from app.study.zones import Zones, nominal_of
from solver import Solution
from solver.sweep import over_conductors
from solver.wires import EARTH

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
THIRD = np.exp(2j * np.pi / 3)
TO_SEQUENCE = (
    np.array([[1, 1, 1], [1, THIRD, THIRD**2], [1, THIRD**2, THIRD]]) / 3
)  # zero, positive, negative


def _told_to_earth(layout: Layout, three: NDArray[np.bool_]) -> NDArray[np.bool_]:
    """(node,) whether volts to earth mean anything: not where nothing holds three phases to it."""
    held, _ = held_zones(layout)
    return np.array([zone in held for zone in layout.zone], dtype=bool) | ~three


def wire_nodes(
    layout: Layout, zones: Zones, rows: Rows, solution: Solution
) -> tuple[Table[NodeState], Table[NodeWires]]:
    """Volts of every phase against what loads hang on there, and of the lowest and highest of them.

    Unbalance is negative over positive sequence, V2/V1; spread the largest deviation of a line voltage from
    the mean of the three, over that mean.

    layout : the graph
    zones : nominal_v (zone,) float [V], system (zone,)
    rows : of the solver, with conductors
    solution : of these rows

    Returns : Table of NodeState and Table of NodeWires, by node id
    Source : IEC 61000-2-2 for V2/V1 (from memory); NEMA MG 1 for the spread (from memory)
    """
    conductors = rows.conductors
    assert conductors is not None
    graph = arrays_of(layout)
    volts, nominal = solution.voltage, nominal_of(layout, zones)
    systems = [zones.system[zone] for zone in layout.zone]
    reach, drawn = np.array(conductors.node), np.array(conductors.drawn)
    three = np.array([system == THREE_PHASE for system in systems], dtype=bool)
    kind = against(layout, zones, conductors)
    base = base_volts(layout, zones, kind)
    pairs = phase_volts(volts, reach, kind)
    percent = 100 * np.abs(pairs) / base[:, None, None]
    low, high = _least(percent), -_least(-percent)
    sequence = np.abs(np.einsum("sp,npb->nsb", TO_SEQUENCE, volts[:, :3]))
    has_neutral = ((drawn & NEUTRAL > 0) & _told_to_earth(layout, three))[:, None]
    first = np.where((kind == TO_NEXT)[:, None], volts[:, 0], _least_of_first(pairs))
    nodes = {
        "live": graph.live,
        "nominal_v": nominal,
        "voltage_v": low * nominal[:, None] / 100,
        "percent": low,
        "high_percent": high,
        "angle_deg": np.degrees(np.angle(first)),
        "drop_percent": low[graph.root] - low,
        "route_m": routes_of(layout),
    }
    with np.errstate(divide="ignore", invalid="ignore"):
        unbalance = 100 * sequence[:, 2] / sequence[:, 1]
    sizes = np.abs(pairs)
    wires = {
        "system": np.array(systems, dtype="U11"),
        "phases": np.array([letters(has & ABC) for has in reach.tolist()], dtype="U3"),
        "against": np.array(KINDS, dtype="U10")[kind],
        "base_v": np.where(graph.live, base, np.nan),
        "a_v": sizes[:, 0],
        "b_v": sizes[:, 1],
        "c_v": sizes[:, 2],
        "neutral_v": np.where(has_neutral, np.abs(volts[:, N]), np.nan),
        "unbalance_percent": np.where(three[:, None], unbalance, np.nan),
        "spread_percent": np.where(three[:, None], _spread(volts), np.nan),
        **{f"{letter}_deg": np.degrees(np.angle(pairs[:, slot])) for slot, letter in enumerate("abc")},
    }
    ids = tuple(layout.node_ids)
    return Table(NodeState, ids, nodes, layout.node_row), Table(NodeWires, ids, wires, layout.node_row)


def _least(values: Real) -> Real:
    """(node, case) least of the phases, nan where there are none."""
    known = np.where(np.isnan(values), np.inf, values).min(axis=1)
    return np.where(np.isinf(known), np.nan, known)


def _least_of_first(pairs: Complex) -> Complex:
    """(node, case) volts of the first phase that is there."""
    found = pairs[:, 0]
    for phase in (1, 2):
        found = np.where(np.isnan(found), pairs[:, phase], found)
    return found


def _spread(volts: Complex) -> Real:
    lines = np.abs(volts[:, :3] - np.roll(volts[:, :3], -1, axis=1))
    mean = lines.mean(axis=1)
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(100 * np.abs(lines - mean[:, None]).max(axis=1) / mean)


def wire_attachments(
    layout: Layout, rows: Rows, solution: Solution, nodes: Table[NodeWires]
) -> tuple[Table[AttachmentState], Table[AttachmentWires]]:
    """Whole power of every attachment, the amperes in each of its leads, the lowest volts across it.

    layout : the graph
    rows : of the solver, with conductors
    solution : of these rows
    nodes : base_v (node,) [V] of the phases at each node

    Returns : Table of AttachmentState and Table of AttachmentWires, by attachment id
    """
    conductors = rows.conductors
    assert conductors is not None
    at, network = arrays_of(layout).at, rows.network
    cases = solution.voltage.shape[-1]
    power = np.full((len(at), cases), np.nan, dtype=complex)
    amps = np.full((len(at), 4, cases), np.nan, dtype=complex)
    live = arrays_of(layout).live[at]
    power[live], amps[live] = 0, 0
    makes = np.array(roles.of(layout.attachments), dtype="U1")[rows.loads] == "g"
    sign = np.where(makes, -1.0, 1.0)[:, None]
    power[rows.loads] = over_conductors(solution.load_power) * sign
    power[rows.shunts] = -over_conductors(solution.shunt_power)
    power[rows.sources] = over_conductors(solution.source_power)
    assert network.wires is not None
    amps[rows.loads] = in_leads(solution.load_current, network.wires.load_to)
    y = network.shunt_y
    amps[rows.shunts] = np.einsum(
        "rijb,rjb->rib", y + np.zeros(cases), _known(solution.voltage[at[rows.shunts]])
    )
    amps[rows.sources] = solution.source_current
    size = np.abs(amps)
    has = _hung_on(layout, rows)
    shown = np.where(has[..., None], size, np.nan)
    columns: dict[str, NDArray[Any]] = {
        "live": live,
        "kw": power.real / 1e3,
        "kvar": power.imag / 1e3,
        "current_a": np.where(live[:, None], np.where(has[..., None], size, 0).max(axis=1), np.nan),
        "voltage_v": _across(layout, rows, solution, nodes),
    }
    wires: dict[str, NDArray[Any]] = {
        "phases": np.array([letters(int(bits)) for bits in has @ (1 << np.arange(4))], dtype="U4"),
        **{f"{letter}_a": shown[:, i] for i, letter in enumerate("abcn")},
    }
    ids, row = tuple(layout.attachment_ids), layout.attachment_row
    return Table(AttachmentState, ids, columns, row), Table(AttachmentWires, ids, wires, row)


def _known(values: Complex) -> Complex:
    return np.where(np.isnan(values), 0, values)


def _hung_on(layout: Layout, rows: Rows) -> NDArray[np.bool_]:
    """(attachment, k) conductors between which each hangs; a supply on all that lead away."""
    conductors = rows.conductors
    assert conductors is not None
    has, ways = np.zeros((len(layout.attachments), 4), dtype=bool), conductors.ways
    has[ways.row, ways.one] = True
    between = ways.other != EARTH
    has[ways.row[between], ways.other[between]] = True
    at = arrays_of(layout).at[rows.sources]
    has[rows.sources] = flags(np.array(conductors.node)[at] & np.array(conductors.drawn)[at])
    return has


def _across(layout: Layout, rows: Rows, solution: Solution, nodes: Table[NodeWires]) -> Real:
    """(attachment, case) lowest volts across the leads; of three phases as line volts."""
    conductors, volts = rows.conductors, solution.voltage
    assert conductors is not None
    ways, at = conductors.ways, _known(volts)[arrays_of(layout).at[conductors.ways.row]]
    lead = np.arange(len(at))
    other = np.where((ways.other == EARTH)[:, None], 0, at[lead, ways.other])
    size = np.abs(at[lead, ways.one] - other) * np.where(ways.alone, 1.0, ways.over)[:, None]
    lowest = np.full((len(layout.attachments), volts.shape[-1]), np.inf)
    np.minimum.at(lowest, ways.row, size)
    found = np.where(np.isinf(lowest), np.nan, lowest)
    for row in rows.sources:
        node, supply = layout.at[row], layout.attachments[row]
        assert isinstance(supply, Supply)
        base = nodes.column("base_v")[node]
        each = np.array([nodes.column(f"{letter}_v")[node] for letter in "abc"])
        found[row] = _least(each[None])[0] / base * float(supply.nominal_v)
    return found
