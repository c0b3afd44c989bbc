"""Prospective fault currents at every node: what boards must bear, and what devices are left to trip on.

They hang on impedances and not on loads or taps, so the last answer is kept and a step of a tap drag costs
nothing. They have no loading case.
"""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from msgspec.structs import replace
from numpy.typing import NDArray

from app.model.drawing import Drawing, Limits
from app.model.kinds import Branch, Element, Line, Node, Supply, Transformer
from app.study.fault_findings import fault_findings, unstated
from app.study.fault_rows import EQUIVALENT, FaultRows, fault_rows, is_stated
from app.study.graph import Layout
from app.study.layout import lay_out
from app.study.outcome import Assumption, FaultState, Finding, Table, Verdict
from app.study.structure import structure_findings
from app.study.zones import Zones, zones_of
from solver import fault
from solver.sequence import seen

Real = NDArray[np.float64]


@dataclass(frozen=True)
class Faults:
    """Fault currents of a drawing.

    nodes : Table of FaultState by node id; nan where nothing is worked out
    findings : boards and devices judged; a NOTE where it could not be
    assumptions : what only fault currents need and was not given
    worked_out : whether any node has figures
    """

    nodes: Table[FaultState]
    findings: tuple[Finding, ...]
    assumptions: tuple[Assumption, ...]
    worked_out: bool


Bearing = dict[str, Element]
_last: tuple[Bearing, Limits, float, Faults] | None = None


def faults(drawing: Drawing) -> Faults:
    """Fault currents at every node of a drawing.

    drawing : the drawing; its values are taken as checked by the model

    Returns : Faults; figures only where nothing bars a solution and supplies state a fault level
    Source : IEC 60909-0:2016 (from memory)
    """
    layout = lay_out(drawing)
    zones = zones_of(drawing, layout)
    found = structure_findings(drawing, layout, zones)
    barred = not layout.supplies or any(f.verdict is Verdict.BLOCKS for f in found)
    return faults_of(drawing, layout, zones, barred)


def faults_of(drawing: Drawing, layout: Layout, zones: Zones, barred: bool) -> Faults:
    """The same where the graph is known already.

    drawing : the drawing
    layout : its graph
    zones : its voltage levels
    barred : something bars a solution

    Returns : Faults
    """
    global _last
    if barred or not any(isinstance(s, Supply) and is_stated(s) for s in layout.attachments):
        told = unstated(drawing, layout, barred)
        return Faults(_table(layout, None, np.zeros(0)), told, (), False)
    bearing = _bearing(drawing)
    last = _last
    if last is not None and last[1:3] == (drawing.limits, drawing.frequency_hz) and _same(last[0], bearing):
        return last[3]
    rows = fault_rows(drawing, layout, zones)
    table = _table(layout, rows, _source(rows))
    findings = fault_findings(drawing, layout, table)
    made = Faults(table, findings, rows.assumptions, bool(rows.known.any()))
    _last = (bearing, drawing.limits, drawing.frequency_hz, made)
    return made


def asked_for(drawing: Drawing) -> bool:
    """Whether any board or device of a drawing wants its fault currents judged.

    drawing : the drawing

    Returns : bool
    """
    return any(
        e.withstand_ka is not None if isinstance(e, Node) else isinstance(e, Line) and e.trip_a is not None
        for e in drawing.elements.values()
    )


def _bearing(drawing: Drawing) -> Bearing:
    """All that fault currents hang on."""
    return {i: e for i, e in drawing.elements.items() if isinstance(e, Node | Branch | Supply)}


def _same(old: Mapping[str, Element], new: Mapping[str, Element]) -> bool:
    if list(old) != list(new):
        return False
    return all(was is now or _alike(was, now) for was, now in zip(old.values(), new.values(), strict=True))


def _alike(was: Element, now: Element) -> bool:
    """The same transformer at another tap."""
    both = isinstance(was, Transformer) and isinstance(now, Transformer)
    return both and replace(was, tap=now.tap) == now  # type: ignore[attr-defined]


def _source(rows: FaultRows) -> Real:
    """(node, 2) the equivalent source [V]: between the two wires, or phase to neutral; highest and least."""
    wide = np.where(rows.two_wire, 1.0, np.sqrt(3))
    return np.stack((rows.c_max, rows.c_min), axis=1) * (rows.nominal_v / wide)[:, None]


def _table(layout: Layout, rows: FaultRows | None, source: Real) -> Table[FaultState]:
    ids = tuple(layout.node_ids)
    if rows is None:
        columns = {name: np.full(len(ids), np.nan) for name in FIGURES}
        columns["live"] = np.zeros(len(ids), dtype=bool)
    else:
        columns = _columns(rows, source)
    return Table(FaultState, ids, columns, dict(layout.node_row))


FIGURES = (
    "ik3_max_ka", "ip_ka", "xr", "ik2_max_ka", "ik1_max_ka", "ik2e_max_ka", "ik3_min_ka", "ik2_min_ka",
    "ik1_min_ka", "zs_ohm", "c_max", "c_min", "r_ohm", "x_ohm", "rx_peak",
)  # fmt: skip


def _columns(rows: FaultRows, source: Real) -> dict[str, NDArray[np.generic]]:
    z1, z0 = seen(rows.one), seen(rows.zero)
    most, least, e_most, e_least = z1[:, 0], z1[:, 1], source[:, 0], source[:, 1]
    three = fault.three_phase(e_most, most), fault.three_phase(e_least, least)
    # between two wires the loop counts out and back already
    two = [np.where(rows.two_wire, i, np.sqrt(3) / 2 * i) for i in three]
    both = fault.two_phase_earth(e_most, most, z0[:, 0])
    zs = np.abs(fault.earth_loop(least, z0[:, 1]))
    peaked = np.where(rows.two_wire, two[0], three[0])
    ratio = _over(z1[:, 2].real, z1[:, 2].imag) * EQUIVALENT
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
    }
    for name in ("ik3_max_ka", "ik3_min_ka", "ik1_max_ka", "ik1_min_ka", "ik2e_max_ka", "zs_ohm"):
        found[name] = np.where(rows.two_wire, np.nan, found[name])
    columns: dict[str, NDArray[np.generic]] = {
        name: np.where(rows.known, value, np.nan) for name, value in found.items()
    }
    columns["live"] = rows.known
    return columns


def _over(above: Real, below: Real) -> Real:
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(above / below)
