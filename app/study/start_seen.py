"""Volts and amperes that a motor start shows: between lines, or of each phase where they are not alike."""

from collections.abc import Callable

import numpy as np
from msgspec import Struct
from numpy.typing import NDArray

from app.study.layout import Layout, arrays_of
from app.study.leads import across, in_leads
from app.study.rows import ROOT3, Rows
from app.study.start_rows import motors_of, nominal_at
from app.study.wire_volts import against, base_volts, phase_name, phase_volts
from app.study.wire_words import conductor
from app.study.wires import LETTERS, N
from app.study.zones import Zones, nominal_of
from solver import Solution
from solver.wires import EARTH

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
Index = NDArray[np.intp]
Names = list[list[str]]


class Seen(Struct, frozen=True):
    """How to read the figures of started motors out of a solution.

    rated_v : (motor,) float [V] rated volts across the motor, between lines where it has three phases
    wide : (motor,) float, running VA over rated volts and amperes: √3 or 1
    motors : volts (node, k, batch) to volts (motor, way, batch) across each way through a motor
    nodes : (motor,) node rows to the same at these nodes, of every phase, as line volts
    amps : solution to amperes (motor, 1, batch) in the lead that carries most; the motors are its last loads
    over : (node,) float, the volts of `nodes` over those of a phase itself
    motor_ways : names of the ways (motor, way), such as B or B–C; None where phases are alike
    node_ways : node rows to the same at these nodes
    """

    rated_v: Real
    wide: Real
    motors: Callable[[Complex], Real]
    nodes: Callable[[Index], Callable[[Complex], Real]]
    amps: Callable[[Solution], Real]
    over: Real | None = None
    motor_ways: Names | None = None
    node_ways: Callable[[Index], Names] | None = None


def start_seen(layout: Layout, zones: Zones, rows: Rows, started: list[int]) -> Seen:
    """How to read the figures of some motors.

    layout : the graph
    zones : nominal_v (zone,) float [V]
    rows : of the solver
    started : attachment rows of the motors

    Returns : Seen
    """
    return (
        _balanced(layout, zones, rows, started)
        if rows.conductors is None
        else _wired(layout, zones, rows, started)
    )


def _rated(layout: Layout, started: list[int]) -> Real:
    stated = [np.nan if m.rated_v is None else m.rated_v for m in motors_of(layout, started)]
    return np.array(stated, dtype=np.float64)


def _balanced(layout: Layout, zones: Zones, rows: Rows, started: list[int]) -> Seen:
    at = arrays_of(layout).at[started]
    nominal, rated = nominal_at(layout, zones, started), _rated(layout, started)

    def nodes(which: Index) -> Callable[[Complex], Real]:
        return lambda volts: np.abs(volts[which]) * rows.wide[which, None, None]

    def amps(solution: Solution) -> Real:
        drawn, level = np.abs(solution.load_power[-len(at) :]), nodes(at)(solution.voltage)
        return np.asarray(drawn * (rows.phases[at] / rows.wide[at])[:, None, None] / level)

    return Seen(np.where(np.isnan(rated), nominal, rated), rows.wide[at], nodes(at), nodes, amps)


def _wired(layout: Layout, zones: Zones, rows: Rows, started: list[int]) -> Seen:
    conductors = rows.conductors
    assert conductors is not None
    reach, kind = np.array(conductors.node, dtype=np.intp), against(layout, zones, conductors)
    over = nominal_of(layout, zones) / base_volts(layout, zones, kind)
    leads = [conductors.leads[row] for row in started]
    three = np.array([len(found.pairs) == 3 for found in leads], dtype=bool)
    stated, level = _rated(layout, started), nominal_at(layout, zones, started)
    rated = [
        float(across(volts, at, found.over[0] if len(found.pairs) == 1 else 1.0, True))
        for volts, at, found in zip(stated, level, leads, strict=True)
    ]

    def motors(volts: Complex) -> Real:
        found = np.full((len(started), 3, volts.shape[-1]), np.nan)
        for n, row in enumerate(started):
            here, pairs = np.nan_to_num(volts[layout.at[row]]), leads[n].pairs
            for way, (one, other) in enumerate(pairs):
                wide = leads[n].over[way] if len(pairs) > 1 else 1.0
                found[n, way] = np.abs(here[one] - (0 if other == EARTH else here[other])) * wide
        return found

    def nodes(which: Index) -> Callable[[Complex], Real]:
        def seen(volts: Complex) -> Real:
            phases = phase_volts(volts[which], reach[which], kind[which])
            return np.asarray(np.abs(phases) * over[which, None, None])

        return seen

    def amps(solution: Solution) -> Real:
        wires, last = solution.network.wires, slice(-len(started), None)
        assert wires is not None
        total = in_leads(solution.load_current[last], wires.load_to[last])
        return np.asarray(np.abs(total).max(axis=1, keepdims=True))

    systems = [zones.system[zone] for zone in layout.zone]

    def node_ways(which: Index) -> Names:
        return [[phase_name(p, int(kind[n]), systems[n]) for p in range(3)] for n in which]

    ways = [
        [_way(*pair, systems[layout.at[row]]) for pair in found.pairs]
        for row, found in zip(started, leads, strict=True)
    ]
    return Seen(
        np.array(rated), np.where(three, ROOT3, 1.0), motors, nodes, amps, over, ways, node_ways
    )  # fmt: skip


def _way(one: int, other: int, system: str) -> str:
    """Between which conductors, such as B, or B–C."""
    ends = (one, other) if 0 <= other < N else (one,)
    return "–".join(conductor(LETTERS[slot], system) for slot in ends)
