"""Round a ring: which way it runs through its branches, and what is apart where it closes."""

import cmath
import math

import numpy as np
from numpy.typing import NDArray

from app.model import assumed, taps
from app.model.drawing import Drawing
from app.model.kinds import Line, Supply, Transformer
from app.model.levels import THREE_PHASE, TWO_WIRE, is_single, system_behind
from app.study.conductors import conductors_of
from app.study.graph import NONE, Layout, Ring, is_bare
from app.study.trace import ring_of
from app.study.values import line_values
from app.study.wires import PHASORS
from app.study.zones import Zones
from solver.rounds import neighbours, spanning

HOUR = 30.0  # degrees of one hour of a clock number


def bare_rings(layout: Layout) -> list[Ring]:
    """The live rounds through nothing but branches without impedance.

    layout : the graph

    Returns : list of Ring
    """
    ends = {
        row: (layout.start[row], layout.end[row])
        for row, branch in enumerate(layout.branches)
        if is_bare(branch) and getattr(branch, "closed", True) and layout.live[layout.start[row]]
    }
    near, supply = neighbours(ends), {layout.at[s]: s for s in layout.supplies}
    feeder: dict[int, int] = {}
    spanning(near, supply, feeder)
    for node in near:
        spanning(near, [node], feeder)
    return [ring_of(row, ends, feeder, supply) for row in sorted(ends.keys() - feeder.values())]


def orientation(layout: Layout, ring: Ring) -> list[bool]:
    """For each branch of a round whether the round runs through it from its start to its end.

    layout : the graph
    ring : a round of it

    Returns : list of bool, in the order of the round
    """
    first, last = ring.branches[0], ring.branches[-1]
    here = layout.start[first]
    if ring.supplies:
        here = layout.at[ring.supplies[0]]
    elif here not in (layout.start[last], layout.end[last]):
        here = layout.end[first]
    forward = []
    for branch in ring.branches:
        forward.append(layout.start[branch] == here)
        here = layout.end[branch] if forward[-1] else layout.start[branch]
    return forward


def units_of(layout: Layout, ring: Ring) -> list[int]:
    """The transformers of a round.

    layout : the graph
    ring : a round of it

    Returns : list of branch rows, in the order of the drawing
    """
    return sorted(b for b in ring.branches if isinstance(layout.branches[b], Transformer))


def turned_by(layout: Layout, zones: Zones, ring: Ring) -> float:
    """By how much the phases are turned where a round closes: supplies' angles less the clocks on the way,
    and from three phases into two wires and back the angle of the phases between which a winding lies.

    layout : the graph
    zones : system (zone,) of each zone
    ring : a round of it

    Returns : float [degrees] from 0 to 180; 0 where a vector group is not known, which is barred for itself
    """
    angle = 0.0
    for s, way in zip(ring.supplies or (), (1, -1), strict=False):
        held = layout.attachments[s]
        assert isinstance(held, Supply)
        angle += way * held.angle_deg
    for row, forward in zip(ring.branches, orientation(layout, ring), strict=True):
        branch = layout.branches[row]
        if isinstance(branch, Transformer):
            read = taps.group(branch.vector_group)
            if read is None:
                return 0.0
            clock = HOUR * read[2] + _lies_at(layout, zones, row, 2) - _lies_at(layout, zones, row, 1)
            angle -= clock * (1 if forward else -1)
    return abs((angle + 180) % 360 - 180)


def _lies_at(layout: Layout, zones: Zones, row: int, winding: int) -> float:
    """Degrees by which a single-phase winding leads phase A, or the first hot wire, of its zone."""
    unit, node = layout.branches[row], (layout.start[row], layout.end[row])[winding - 1]
    assert isinstance(unit, Transformer)
    system = zones.system[layout.zone[node]]
    if system == TWO_WIRE or not is_single(unit):
        return 0.0
    wires = conductors_of(layout, zones).units.get(row)
    if wires is None or not wires.ends:
        return 0.0
    volts = (*PHASORS[system][:3], 0.0, 0.0)  # the neutral, and earth as -1
    one, other = wires.ends[0][winding - 1]
    return math.degrees(cmath.phase(complex(volts[one] - volts[other])))


def systems_by_tree(layout: Layout, zones: Zones) -> list[str]:
    """The system of every node as the tree that reaches it makes it, were no round closed.

    layout : the graph
    zones : its voltage levels

    Returns : (node,) list of three-phase, two-wire or split-phase
    """
    found = [THREE_PHASE] * len(layout.nodes)
    for node in layout.order:
        by, supply = layout.fed_by[node], layout.supply_of[layout.tree[node]]
        if by == NONE:
            held = None if supply == NONE else layout.attachments[supply]
            found[node] = held.wires if isinstance(held, Supply) else zones.system[layout.zone[node]]
            continue
        unit, above = layout.branches[by], found[layout.fed_from[node]]
        winding = 2 if layout.end[by] == node else 1
        found[node] = system_behind(unit, winding, above) if isinstance(unit, Transformer) else above
    return found


def mismatch(layout: Layout, ring: Ring, ratio: NDArray[np.float64], rows: dict[int, int]) -> float:
    """How far the ratios round a loop are apart.

    layout : the graph
    ring : a closed loop of it
    ratio : (transformer,) float, U1/U2 at the tap
    rows : branch row to its row in ratio

    Returns : float [%], never negative
    """
    total = 0.0
    for row, forward in zip(ring.branches, orientation(layout, ring), strict=True):
        if row in rows:
            total += math.log(float(ratio[rows[row]])) * (1 if forward else -1)
    return 100 * math.expm1(abs(total))


def times_rated(
    drawing: Drawing, layout: Layout, zones: Zones, ring: Ring, apart: float
) -> tuple[float, str] | None:
    """What phases turned apart would drive round: |1 - e^jφ| / |z|, z on the smallest transformer's rating.

    drawing : the drawing
    layout : its graph
    zones : nominal_v (zone,) float [V]
    ring : a round of it
    apart : float [degrees]

    Returns : times the rated current of the smallest transformer, and its id; None where there is none
    Source : superposition of the volts that are apart
    """
    rows = units_of(layout, ring)
    z = sum((_per_unit(drawing, layout, zones, b) for b in ring.branches), 0j)
    if not rows or not 0 < abs(z) < math.inf:
        return None
    least = min(rows, key=lambda b: _rating_va(layout, b))
    times = abs(1 - cmath.rect(1, math.radians(apart))) / abs(z * _rating_va(layout, least))
    return times, layout.branch_ids[least]


def _rating_va(layout: Layout, row: int) -> float:
    unit = layout.branches[row]
    assert isinstance(unit, Transformer)
    return unit.rating_kva * 1e3 * unit.side_by_side


def _per_unit(drawing: Drawing, layout: Layout, zones: Zones, row: int) -> complex:
    """Impedance over U² of its level, 1/VA."""
    branch = layout.branches[row]
    if isinstance(branch, Transformer):
        uk, r = branch.uk_percent / 100, assumed.value(branch, "load_loss_w") / branch.rating_kva / 1e3
        return complex(r, math.sqrt(max(uk**2 - r**2, 0.0))) / _rating_va(layout, row)
    if isinstance(branch, Line):
        two_wire = np.array([zones.system[layout.zone[layout.start[row]]] != THREE_PHASE])
        nominal = zones.nominal_v[[layout.zone[layout.start[row]]]]
        z = complex(line_values([branch], two_wire, drawing.frequency_hz, nominal)[0][0])
        return z / float(nominal[0]) ** 2
    return 0j
