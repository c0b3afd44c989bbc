"""The figures of every node: out of sequence networks, and conductor by conductor where they do not reach."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.model.levels import TWO_WIRE
from app.study.fault_rows import FaultRows
from app.study.fault_ways import EQUIVALENT
from app.study.graph import Layout
from app.study.outcome import FaultState, Table
from app.study.zones import Zones
from solver import fault
from solver.sequence import seen

if TYPE_CHECKING:
    from app.study.fault_conductors import Loops  # loaded where phases are missing or wires are two

Real = NDArray[np.float64]
Flag = NDArray[np.bool_]
FIGURES = (
    "ik3_max_ka", "ip_ka", "xr", "ik2_max_ka", "ik1_max_ka", "ik2e_max_ka", "ik3_min_ka", "ik2_min_ka",
    "ik1_min_ka", "zs_ohm", "c_max", "c_min", "r_ohm", "x_ohm", "rx_peak", "ikn_max_ka", "ikn_min_ka",
)  # fmt: skip
TO_EARTH = ("ik1_max_ka", "ik1_min_ka", "zs_ohm")


def fault_table(drawing: Drawing, layout: Layout, zones: Zones, rows: FaultRows | None) -> Table[FaultState]:
    """Fault currents by node.

    drawing : the drawing
    layout : its graph
    zones : its voltage levels and systems
    rows : its sequence networks; None where nothing is worked out

    Returns : Table of FaultState by node id
    Source : IEC 60909-0:2016, 7 and 8 (from memory)
    """
    ids = tuple(layout.node_ids)
    columns: dict[str, NDArray[np.generic]] = {name: np.full(len(ids), np.nan) for name in FIGURES}
    known = np.zeros(len(ids), dtype=bool)
    if rows is not None:
        known = rows.known
        z1, z0 = seen(rows.one), seen(rows.zero)
        if rows.fed is not None:
            z1[:, [0, 2]] = seen(rows.fed)[:, [0, 2]]
        found = _sequences(rows, z1, z0)
        lacking = known & np.isinf(z1[:, 0])
        two = np.array([zones.system[zone] == TWO_WIRE for zone in layout.zone], dtype=bool)
        factors, nodes = (rows.c_max, rows.c_min), np.flatnonzero(lacking)
        if nodes.size:
            from app.study.fault_conductors import loops

            by_loop = loops(drawing, layout, zones, factors, nodes, EQUIVALENT)
            _put(found, _by_loop(by_loop, two[nodes]), nodes)
        nodes = np.flatnonzero(known & two & ~lacking)
        if nodes.size:
            from app.study.fault_conductors import earth_loops

            earth, zs = earth_loops(drawing, layout, zones, factors, nodes)
            _put(found, dict(zip(TO_EARTH, (*(earth.T / 1e3), zs), strict=True)), nodes)
        columns |= {name: np.where(known, value, np.nan) for name, value in found.items()}
    return Table(FaultState, ids, {**columns, "live": known}, dict(layout.node_row))


def _sequences(rows: FaultRows, z1: NDArray[np.complex128], z0: NDArray[np.complex128]) -> dict[str, Real]:
    """Figures where all three phases are alike, or between two wires; there nothing to earth."""
    wide = np.where(rows.two_wire, 1.0, np.sqrt(3))
    e_most, e_least = rows.c_max * rows.nominal_v / wide, rows.c_min * rows.nominal_v / wide
    most, least = z1[:, 0], z1[:, 1]
    three = fault.three_phase(e_most, most), fault.three_phase(e_least, least)
    # between two wires the loop counts out and back already
    two = [np.where(rows.two_wire, i, np.sqrt(3) / 2 * i) for i in three]
    both = fault.two_phase_earth(e_most, most, z0[:, 0])
    zs = np.abs(fault.earth_loop(least, z0[:, 1]))
    peaked = np.where(rows.two_wire, two[0], three[0])
    ratio = _over(z1[:, 2].real, z1[:, 2].imag) * EQUIVALENT
    nothing = np.full(len(zs), np.nan)
    found = {
        "ik3_max_ka": three[0] / 1e3,
        "ip_ka": fault.peak(peaked, ratio) / 1e3,
        "xr": _over(most.imag, most.real),
        "ik2_max_ka": two[0] / 1e3,
        "ik1_max_ka": fault.phase_earth(e_most, most, z0[:, 0]) / 1e3,
        "ik2e_max_ka": np.maximum(both.b, both.c) / 1e3,
        "ik3_min_ka": three[1] / 1e3,
        "ik2_min_ka": two[1] / 1e3,
        "ik1_min_ka": fault.phase_earth(e_least, least, z0[:, 1]) / 1e3,
        "zs_ohm": np.where(np.isinf(zs), np.nan, zs),
        "c_max": rows.c_max,
        "c_min": rows.c_min,
        "r_ohm": most.real,
        "x_ohm": most.imag,
        "rx_peak": ratio,
        "ikn_max_ka": nothing,
        "ikn_min_ka": nothing,
    }
    for name in ("ik3_max_ka", "ik3_min_ka", "ik2e_max_ka", *TO_EARTH):
        found[name] = np.where(rows.two_wire, np.nan, found[name])
    return found


def _by_loop(seen_: Loops, two_wire: Flag) -> dict[str, Real]:
    """The same figures out of the loops between conductors; what two wires carry stands as between phases."""
    two = np.where(two_wire[:, None], seen_.neutral, seen_.two)
    neutral = np.where(two_wire[:, None], np.nan, seen_.neutral)
    greatest = np.fmax(np.fmax(seen_.two[:, 0], seen_.neutral[:, 0]), seen_.three[:, 0])
    greatest = np.where(np.isnan(greatest), seen_.earth[:, 0], greatest)
    return {
        "ik3_max_ka": seen_.three[:, 0] / 1e3,
        "ip_ka": fault.peak(greatest, seen_.rx) / 1e3,
        "xr": _over(seen_.z.imag, seen_.z.real),
        "ik2_max_ka": two[:, 0] / 1e3,
        "ik1_max_ka": seen_.earth[:, 0] / 1e3,
        "ik2e_max_ka": np.full(len(two), np.nan),
        "ik3_min_ka": seen_.three[:, 1] / 1e3,
        "ik2_min_ka": two[:, 1] / 1e3,
        "ik1_min_ka": seen_.earth[:, 1] / 1e3,
        "zs_ohm": seen_.zs,
        "r_ohm": seen_.z.real,
        "x_ohm": seen_.z.imag,
        "rx_peak": seen_.rx,
        "ikn_max_ka": neutral[:, 0] / 1e3,
        "ikn_min_ka": neutral[:, 1] / 1e3,
    }


def _put(found: dict[str, Real], values: dict[str, Real], nodes: NDArray[np.intp]) -> None:
    """Figures of some nodes in place of what stood there."""
    for name, fresh in values.items():
        found[name] = np.array(found[name])
        found[name][nodes] = fresh


def _over(above: Real, below: Real) -> Real:
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(above / below)
