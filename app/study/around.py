"""Round a ring: which way it runs through its branches, and what is apart where it closes."""

import cmath
import math

import numpy as np
from numpy.typing import NDArray

from app.model import assumed, taps
from app.model.drawing import Drawing
from app.model.kinds import Line, Supply, Transformer
from app.study.graph import Layout, Ring, is_bare
from app.study.trace import ring_of
from app.study.values import line_values
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


def turned_by(layout: Layout, ring: Ring) -> float:
    """By how much the phases are turned where a round closes: supplies' angles less the clocks on the way.

    layout : the graph
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
            angle -= HOUR * read[2] * (1 if forward else -1)
    return abs((angle + 180) % 360 - 180)


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
        two_wire = zones.two_wire[[layout.tree[layout.start[row]]]]
        nominal = zones.nominal_v[[layout.zone[layout.start[row]]]]
        z = complex(line_values([branch], two_wire, drawing.frequency_hz, nominal)[0][0])
        return z / float(nominal[0]) ** 2
    return 0j
