"""Drawing to solver rows: per-phase SI arrays, one column a loading case."""

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from msgspec import Struct
from numpy.typing import NDArray

from app.model.by_case import owned
from app.model.drawing import Drawing
from app.model.kinds import Capacitor, Generator, Line, Load, Motor, Regulator, Switch
from app.study.conductors import Conductors, conductors_of, is_wired
from app.study.layout import Layout, arrays_of
from app.study.values import (
    held_values,
    line_values,
    load_values,
    shunt_values,
    transformer_values,
    with_regulators,
)
from app.study.wires import PER_PHASE
from app.study.zones import Zones
from solver.network import Network

ROOT3 = math.sqrt(3.0)
Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
Index = NDArray[np.intp]


@dataclass(frozen=True, slots=True)
class Rows:
    """The network and which element each of its rows is.

    network : Network with k = 1; volts and powers per phase in three-phase trees, whole in two-wire trees
    lines : (line,) branch rows of the layout; closed switches stand among them
    units : (transformer,) branch rows, transformers and then regulators
    sources : (source,) attachment rows
    loads : (load,) attachment rows of loads, motors and generators
    shunts : (shunt,) attachment rows of capacitors
    phases : (node,) float, 3 in three-phase trees, 1 in two-wire trees
    wide : (node,) float, line volts over the solver's volts: √3 or 1
    notches : branch row of what steps by itself to (case,) int, once it has come to rest
    phase_notches : the same of regulators that step each phase by itself, to (3, case) float
    conductors : where phases are solved one by one, with k = 4 and volts to earth; powers are then whole
    """

    network: Network
    lines: Index
    units: Index
    sources: Index
    loads: Index
    shunts: Index
    phases: Real
    wide: Real
    notches: dict[int, NDArray[np.intp]] = field(default_factory=dict)
    phase_notches: dict[int, Real] = field(default_factory=dict)
    conductors: Conductors | None = None


def rows_of(drawing: Drawing, layout: Layout, zones: Zones) -> Rows:
    """Every element as a row of the solver, every loading case as a column.

    Three-phase trees are solved per phase: line volts / √3, a third of the power. Two-wire trees are solved
    between the wires: whole power, the impedance of a line counts out and back, and its capacitance, stated
    from one wire to the neutral plane, counts half. Where phases are not alike they are solved one by one.

    drawing : the drawing
    layout : its graph
    zones : nominal_v (zone,) float [V], two_wire (tree,) bool

    Returns : Rows with the Network [V, ohm, S, VA]
    Source : common practice, no source
    """
    if is_wired(drawing, layout, zones):
        return _wired(drawing, layout, zones)
    graph = arrays_of(layout)
    start, end, at = graph.start, graph.end, graph.at
    two_wire, nominal = zones.two_wire[graph.tree], zones.nominal_v[graph.zone]
    nominal = np.where(np.isnan(nominal), 1.0, nominal)  # a dead part of no known level draws nothing
    phases, wide = np.where(two_wire, 1.0, 3.0), np.where(two_wire, 1.0, ROOT3)
    kinds, sources = _sort(layout, drawing), np.array(layout.supplies, dtype=np.intp)
    lines, units, loads, shunts = kinds.lines, kinds.units, kinds.loads, kinds.shunts
    line_z, line_y = _lines(drawing, layout, lines, two_wire[start[lines]], nominal[start[lines]])
    plates = transformer_values(_of(layout.branches, units[: len(layout.units)]))
    ratio, unit_z, unit_y = with_regulators(plates, len(units))
    ids, cases = layout.attachment_ids, drawing.cases
    held = held_values(_of(layout.attachments, sources), _of(ids, sources), cases)
    hung = _of(layout.attachments, loads)
    power, reference, mix = load_values(hung, _of(ids, loads), nominal[at[loads]], cases)
    capacitors = _of(layout.attachments, shunts)
    shunt_y = shunt_values(capacitors, _of(ids, shunts), nominal[at[shunts]], cases)
    network = Network(
        node_count=len(layout.nodes),
        conductors=1,
        source_node=at[sources],
        source_voltage=(held / wide[at[sources], None])[:, None, :],
        line_from=start[lines],
        line_to=end[lines],
        line_z=line_z[:, None, None, None],
        line_y=line_y[:, None, None, None],
        transformer_from=start[units],
        transformer_to=end[units],
        transformer_ratio=ratio[:, None],
        transformer_z=unit_z[:, None],
        transformer_y=unit_y.T[..., None],
        load_node=at[loads],
        load_power=(power / phases[at[loads], None])[:, None, :],
        load_reference=(reference / wide[at[loads]])[:, None, None],
        load_mix=mix,
        shunt_node=at[shunts],
        shunt_y=shunt_y[:, None, None, :],
    )
    return Rows(network, lines, units, sources, loads, shunts, phases, wide)


def _wired(drawing: Drawing, layout: Layout, zones: Zones) -> Rows:
    from app.study.wire_rows import wire_network  # most layouts are balanced and never need it

    kinds, sources = _sort(layout, drawing), np.array(layout.supplies, dtype=np.intp)
    rows = kinds.lines, kinds.units, sources, kinds.loads, kinds.shunts
    conductors = conductors_of(layout, zones)
    network = wire_network(drawing, layout, zones, conductors, rows)
    wide = np.array([PER_PHASE[zones.system[zone]] for zone in layout.zone])
    return Rows(network, *rows, np.ones(len(wide)), wide, conductors=conductors)


def _lines(
    drawing: Drawing, layout: Layout, rows: Index, two_wire: NDArray[np.bool_], nominal_v: Real
) -> tuple[Complex, Complex]:
    """Impedance and admittance; zero where the row is a closed switch."""
    branches = [layout.branches[i] for i in rows]
    real = np.array([isinstance(b, Line) for b in branches], dtype=bool)
    z, y = np.zeros(len(rows), dtype=np.complex128), np.zeros(len(rows), dtype=np.complex128)
    lines = [b for b in branches if isinstance(b, Line)]
    z[real], y[real] = line_values(lines, two_wire[real], drawing.frequency_hz, nominal_v[real])
    return z, y


def _of(elements: Sequence[Any], rows: Index) -> list[Any]:
    return [elements[i] for i in rows]


class _Kinds(Struct, frozen=True):
    lines: Index
    units: Index
    loads: Index
    shunts: Index


def _sort(layout: Layout, drawing: Drawing) -> _Kinds:
    """Rows of the branches and attachments by what they are to the solver; open switches are nothing."""
    owning = {id for _, id, _ in owned(drawing.cases)}
    lines = [
        i for i, b in enumerate(layout.branches) if isinstance(b, Line) or isinstance(b, Switch) and b.closed
    ]
    regulators = [i for i, b in enumerate(layout.branches) if isinstance(b, Regulator)]
    hung = layout.attachments
    loads = [i for i, a in enumerate(hung) if isinstance(a, Load | Generator | Motor)]
    ids = layout.attachment_ids
    shunts = [i for i, a in enumerate(hung) if isinstance(a, Capacitor) and (a.connected or ids[i] in owning)]
    return _Kinds(
        *(np.array(rows, dtype=np.intp) for rows in (lines, [*layout.units, *regulators], loads, shunts))
    )
