"""Drawing to solver rows where phases are solved one by one: four conductors, one column a loading case."""

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from app.model import assumed
from app.model.drawing import Drawing
from app.model.kinds import Capacitor, Supply
from app.study.conductors import Conductors
from app.study.graph import Layout, arrays_of
from app.study.leads import Leads, across
from app.study.line_wires import line_matrices
from app.study.unit_ports import port_of, ratio_of, through
from app.study.values import held_values, load_values, shunt_values, transformer_values, with_regulators
from app.study.wires import PER_PHASE, PHASORS, N
from app.study.zones import Zones
from solver.network import Network
from solver.windings import stacked
from solver.wires import EARTH, Wires

K = 4
Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
Index = NDArray[np.intp]


def wire_network(
    drawing: Drawing,
    layout: Layout,
    zones: Zones,
    conductors: Conductors,
    kinds: tuple[Index, Index, Index, Index, Index],
) -> Network:
    """The network of a drawing with three phases and a neutral; volts are to earth.

    drawing : the drawing
    layout : its graph
    zones : nominal_v (zone,) float [V], system (zone,)
    conductors : of every node, branch and attachment
    kinds : rows of lines and closed switches, of transformers and then regulators, of supplies, of loads,
        motors and generators, of capacitors

    Returns : Network with k = 4 [V, ohm, S, VA]
    Source : see solver.wires
    """
    lines, units, sources, loads, shunts = kinds
    graph = arrays_of(layout)
    start, end, at = graph.start, graph.end, graph.at
    nominal = np.where(np.isnan(zones.nominal_v), 1.0, zones.nominal_v)[graph.zone]
    line_z, line_y, line_has = line_matrices(drawing, layout, zones, conductors, lines)
    ratio, unit_z, unit_y, ports = _units(layout, zones, conductors, units)
    hung, ids = _of(layout.attachments, loads), _of(layout.attachment_ids, loads)
    whole, stated, mix = load_values(hung, ids, nominal[at[loads]], drawing.cases)
    power, reference, to = loads_between(conductors, loads, whole, stated, nominal[at[loads]])
    electrodes = [
        row
        for row, node in enumerate(layout.nodes)
        if node.earth_ohm is not None and layout.live[row] and conductors.drawn[row] >> N & 1
    ]
    return Network(
        node_count=len(layout.nodes),
        conductors=K,
        source_node=at[sources],
        source_voltage=_held(drawing, layout, sources),
        line_from=start[lines],
        line_to=end[lines],
        line_z=line_z,
        line_y=line_y,
        transformer_from=start[units],
        transformer_to=end[units],
        transformer_ratio=ratio[:, None],
        transformer_z=unit_z[:, None],
        transformer_y=unit_y.T[..., None],
        load_node=at[loads],
        load_power=power,
        load_reference=reference,
        load_mix=mix,
        shunt_node=at[shunts],
        shunt_y=_shunts(drawing, layout, conductors, shunts, nominal),
        wires=Wires(
            line_has=line_has,
            source_has=np.ones((len(sources), K), dtype=bool),
            load_to=to,
            earth_node=np.array(electrodes, dtype=np.intp),
            earth_conductor=np.full(len(electrodes), N, dtype=np.intp),
            earth_z=np.array([layout.nodes[row].earth_ohm for row in electrodes], complex).reshape(-1, 1),
            units=stacked(ports),
        ),
    )


def _of(elements: Sequence[Any], rows: Index) -> list[Any]:
    return [elements[i] for i in rows]


def _held(drawing: Drawing, layout: Layout, rows: Index) -> Complex:
    """(source, k, case) volts to earth of each conductor."""
    supplies: list[Supply] = _of(layout.attachments, rows)
    held = held_values(supplies, _of(layout.attachment_ids, rows), drawing.cases)
    size = np.array([PER_PHASE[s.wires] for s in supplies], dtype=float).reshape(-1, 1)
    turned = np.array([PHASORS[s.wires] for s in supplies], complex).reshape(-1, K)
    return np.asarray((held / size)[:, None, :] * turned[..., None])


def _units(
    layout: Layout, zones: Zones, conductors: Conductors, rows: Index
) -> tuple[Complex, Complex, Complex, list[Any]]:
    """Ratio, impedance and magnetising admittance as for balanced volts, and the two-port of each."""
    real = rows[: len(layout.units)]
    ratio, z, y = transformer_values(_of(layout.branches, real))
    ports = []
    for n, row in enumerate(real):
        unit, wires = layout.branches[row], conductors.units.get(int(row))
        ends = layout.start[row], layout.end[row]
        systems = [zones.system[layout.zone[node]] for node in ends]
        ports.append(port_of(unit, wires, z[n], y[:, n]))
        ratio[n] = ratio_of(unit, wires, systems, ratio[n])
    ports += [through(conductors.branch[row]) for row in rows[len(real) :]]
    return *with_regulators((ratio, z, y), len(rows)), ports


def loads_between(
    conductors: Conductors, rows: Index | list[int], whole: Complex, reference_v: Real, nominal_v: Real
) -> tuple[Complex, Real, Index]:
    """Whole powers shared among the leads between which they hang.

    conductors : leads of every attachment
    rows : (load,) attachment rows
    whole : (load, case) complex [VA]
    reference_v : (load,) float [V] at which they are stated
    nominal_v : (load,) float [V] of their nodes

    Returns : power (load, k, case) complex [VA], reference (load, k, 1) float [V], conductor (load, k) to
        which each lead goes
    """
    power = np.zeros((len(whole), K, whole.shape[-1]), dtype=np.complex128)
    volts, to = np.ones((len(whole), K, 1)), np.full((len(whole), K), EARTH)
    to[:, :N] = N
    ways, place = conductors.ways, np.full(max(conductors.ways.row.max(initial=-1), *rows, 0) + 1, -1)
    place[np.asarray(rows, dtype=np.intp)] = np.arange(len(rows))
    chosen = place[ways.row] >= 0
    n, one = place[ways.row][chosen], ways.one[chosen]
    power[n, one] = ways.share[chosen, None] * whole[n]
    to[n, one] = ways.other[chosen]
    volts[n, one, 0] = across(reference_v[n], nominal_v[n], ways.over[chosen], ways.alone[chosen])
    return power, volts, to


def _shunts(drawing: Drawing, layout: Layout, conductors: Conductors, rows: Index, nominal: Real) -> Complex:
    """(shunt, k, k, case) admittance of capacitors: each lead Y = jQ/U², with its share of Q."""
    capacitors: list[Capacitor] = _of(layout.attachments, rows)
    levels = nominal[arrays_of(layout).at[rows]]
    whole = shunt_values(capacitors, _of(layout.attachment_ids, rows), levels, drawing.cases)
    found = np.zeros((len(rows), K, K, whole.shape[-1]), dtype=np.complex128)
    for n, row in enumerate(rows):
        leads = conductors.leads.get(int(row))
        if leads is not None:
            rated = assumed.value(capacitors[n], "rated_v", float(levels[n]))
            found[n] = _stamped(leads, rated, float(levels[n]))[..., None] * whole[n]
    return found


def _stamped(leads: Leads, rated_v: float, nominal_v: float) -> Real:
    """(k, k) which part of jQ/U² stands between which conductors."""
    matrix = np.zeros((K, K))
    for (one, other), share, over in zip(leads.pairs, leads.shares, leads.over, strict=True):
        volts = float(across(rated_v, nominal_v, over, len(leads.pairs) == 1))
        part = share * (rated_v / volts) ** 2
        matrix[one, one] += part
        if other != EARTH:
            matrix[other, other] += part
            matrix[one, other] -= part
            matrix[other, one] -= part
    return matrix
