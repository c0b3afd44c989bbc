"""Drawing to solver rows: per-phase SI arrays, one column a loading case."""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.model.kinds import Capacitor, Generator, Line, Load, Switch, Transformer
from app.study.layout import Layout
from app.study.values import held_values, line_values, load_values, shunt_values, transformer_values
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
    units : (transformer,) branch rows
    sources : (source,) attachment rows
    loads : (load,) attachment rows of loads and generators
    shunts : (shunt,) attachment rows of capacitors
    phases : (node,) float, 3 in three-phase trees, 1 in two-wire trees
    wide : (node,) float, line volts over the solver's volts: √3 or 1
    """

    network: Network
    lines: Index
    units: Index
    sources: Index
    loads: Index
    shunts: Index
    phases: Real
    wide: Real


def rows_of(drawing: Drawing, layout: Layout, zones: Zones) -> Rows:
    """Every element as a row of the solver, every loading case as a column.

    Three-phase trees are solved per phase: line volts / √3, a third of the power. Two-wire trees are solved
    between the wires: whole power, the impedance of a line counts out and back, and its capacitance, stated
    from one wire to the neutral plane, counts half.

    drawing : the drawing
    layout : its graph
    zones : nominal_v (zone,) float [V], two_wire (tree,) bool

    Returns : Rows with the Network [V, ohm, S, VA]
    Source : common practice, no source
    """
    lines, units = _branch_rows(layout)
    tree = np.array(layout.tree, dtype=np.intp)
    two_wire = zones.two_wire[tree] if tree.size else np.zeros(0, dtype=bool)
    phases, wide = np.where(two_wire, 1.0, 3.0), np.where(two_wire, 1.0, ROOT3)
    start, end = np.array(layout.start, dtype=np.intp), np.array(layout.end, dtype=np.intp)
    at = np.array(layout.at, dtype=np.intp)
    nominal = zones.nominal_v[np.array(layout.zone, dtype=np.intp)] if tree.size else np.zeros(0)
    sources, loads, shunts = _attachment_rows(layout)
    line_z, line_y = _lines(drawing, layout, lines, two_wire[start[lines]])
    ratio, unit_z, unit_y = transformer_values(*_at_taps(layout, units))
    held = held_values([layout.attachments[i] for i in sources], drawing.cases)
    power, reference, mix = load_values(
        [layout.attachments[i] for i in loads], nominal[at[loads]], drawing.cases
    )
    shunt_y = shunt_values([layout.attachments[i] for i in shunts], nominal[at[shunts]])
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
        transformer_y=unit_y[:, None],
        load_node=at[loads],
        load_power=(power / phases[at[loads], None])[:, None, :],
        load_reference=(reference / wide[at[loads]])[:, None, None],
        load_mix=mix,
        shunt_node=at[shunts],
        shunt_y=shunt_y[:, None, None, None],
    )
    return Rows(network, lines, units, sources, loads, shunts, phases, wide)


def _lines(
    drawing: Drawing, layout: Layout, rows: Index, two_wire: NDArray[np.bool_]
) -> tuple[Complex, Complex]:
    """Impedance and admittance; zero where the row is a closed switch."""
    branches = [layout.branches[i] for i in rows]
    real = np.array([isinstance(b, Line) for b in branches], dtype=bool)
    z, y = np.zeros(len(rows), dtype=np.complex128), np.zeros(len(rows), dtype=np.complex128)
    lines = [b for b in branches if isinstance(b, Line)]
    z[real], y[real] = line_values(lines, two_wire[real], drawing.frequency_hz)
    return z, y


def _at_taps(layout: Layout, rows: Index) -> tuple[list[Transformer], list[int]]:
    units = [b for i in rows if isinstance(b := layout.branches[i], Transformer)]
    return units, [t.tap for t in units]


def _branch_rows(layout: Layout) -> tuple[Index, Index]:
    lines, units = [], []
    for row, branch in enumerate(layout.branches):
        if isinstance(branch, Transformer):
            units.append(row)
        elif not isinstance(branch, Switch) or branch.closed:
            lines.append(row)
    return np.array(lines, dtype=np.intp), np.array(units, dtype=np.intp)


def _attachment_rows(layout: Layout) -> tuple[Index, Index, Index]:
    loads, shunts = [], []
    for row, attachment in enumerate(layout.attachments):
        if isinstance(attachment, Load | Generator):
            loads.append(row)
        elif isinstance(attachment, Capacitor) and attachment.connected:
            shunts.append(row)
    kind = np.intp
    return np.array(layout.supplies, dtype=kind), np.array(loads, dtype=kind), np.array(shunts, dtype=kind)
