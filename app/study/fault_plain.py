"""Which branches sequence networks can hold: alike in all three phases, or one circuit of two wires."""

import numpy as np
from numpy.typing import NDArray

from app.model.kinds import Branch, Line, Transformer
from app.model.levels import SPLIT, THREE_PHASE, TWO_WIRE
from app.study.conductors import conductors_of
from app.study.graph import Layout
from app.study.wires import ABC
from app.study.zones import Zones


def plain_branches(layout: Layout, zones: Zones) -> NDArray[np.bool_]:
    """Branches that belong into sequence networks; all of them where no phase is left out anywhere.

    layout : the graph
    zones : system (zone,)

    Returns : (branch,) bool
    """
    root = [zones.system[layout.zone[node]] for node in layout.roots]
    start = [layout.tree[node] for node in layout.start]
    alike = all(zones.system[layout.zone[head]] == root[layout.tree[head]] for head in layout.zone_heads)
    if alike and SPLIT not in root and all(_whole(branch) for branch in layout.branches):
        return np.ones(len(layout.branches), dtype=bool)
    conductors = conductors_of(layout, zones)
    found = np.zeros(len(layout.branches), dtype=bool)
    for row, branch in enumerate(layout.branches):
        system = root[start[row]]
        ends = {zones.system[layout.zone[node]] for node in (layout.start[row], layout.end[row])}
        unit = conductors.units.get(row)
        if ends != {system}:
            continue
        if isinstance(branch, Transformer):
            single = unit is None or bool(unit.ends)
            found[row] = single if system == TWO_WIRE else not single
        else:
            found[row] = system == TWO_WIRE or conductors.branch[row] & ABC == ABC
        found[row] &= system in (THREE_PHASE, TWO_WIRE)
    return found


def _whole(branch: Branch) -> bool:
    if isinstance(branch, Transformer):
        return branch.build == "as its group"
    return not isinstance(branch, Line) or branch.phases == "all"
