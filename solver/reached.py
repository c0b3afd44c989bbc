"""What is not reached: conductors that no supply feeds, and sides that have lost their earth reference."""

from collections.abc import Iterable

import numpy as np

from solver.arrays import Flag, Index
from solver.forest import Forest
from solver.joints import joints_of
from solver.network import Network
from solver.placed import Placed
from solver.rounds import Ends, neighbours
from solver.wires import EARTH, Wires


def fed_conductors(network: Network, forest: Forest, placed: Placed) -> Flag:
    """Which conductors of which node a supply reaches, through lines, windings and their star points.

    network : Network, with wires
    forest : Forest, of that network
    placed : Placed, of both
    Returns : (node, k) bool; without wires all conductors of live nodes
    """
    wires, k = network.wires, network.conductors
    live = forest.place >= 0
    by, here = placed.by, placed.here
    if wires is None or by is None or here is None:
        return np.repeat(live[:, None], k, axis=1)
    if not (here & ~by).any():
        return (by | here)[forest.place] & live[:, None]
    fed = np.zeros((network.node_count, k), dtype=bool)
    fed[network.source_node] = wires.source_has
    units = wires.units.has & (forest.transformer_way != 0)[:, None, None]
    while True:
        before = np.count_nonzero(fed)
        both = wires.line_has & (fed[network.line_from] | fed[network.line_to])
        np.logical_or.at(fed, network.line_from, both)
        np.logical_or.at(fed, network.line_to, both)
        through = (fed[network.transformer_from] & units[:, 0]) | (fed[network.transformer_to] & units[:, 1])
        any_ = through.any(axis=1)[:, None]
        np.logical_or.at(fed, network.transformer_from, any_ & units[:, 0])
        np.logical_or.at(fed, network.transformer_to, any_ & units[:, 1])
        if np.count_nonzero(fed) == before:
            return fed


def unfed_loads(network: Network, forest: Forest, placed: Placed) -> Index:
    """Loads that hang on a phase which nothing feeds, or on a conductor that is not there.

    network : Network, with wires
    forest : Forest, of that network
    placed : Placed, of both
    Returns : (row,) of the live loads concerned
    """
    wires, k = network.wires, network.conductors
    if wires is None or placed.by is None or placed.here is None:
        return np.zeros(0, dtype=np.intp)
    good = fed_conductors(network, forest, placed)
    if good.all():
        return np.zeros(0, dtype=np.intp)
    live = forest.place >= 0
    good[live, k - 1] |= (placed.by | placed.here)[
        forest.place[live], k - 1
    ]  # a lost neutral still joins its loads
    row, near = np.nonzero(network.load_power.any(axis=-1) & live[network.load_node][:, None])
    node, far = network.load_node[row], wires.load_to[row, near]
    lacks = ~good[node, near] | ((far != EARTH) & ~good[node, far])
    return np.unique(row[lacks])


def unreferenced(network: Network, forest: Forest) -> Index:
    """Transformers whose far side nothing earths: there an earth fault cannot be cleared.

    network : Network, with wires
    forest : Forest, of that network
    Returns : (row,) of transformers; of sides that hang on one another through two earthed stars the first
    Source : common practice, no source
    """
    wires = network.wires
    if wires is None:
        return np.zeros(0, dtype=np.intp)
    zones, supplied = forest.zone_transformer.size, int(forest.depth_zone[1])
    rows = forest.zone_transformer[supplied:]
    side = (forest.transformer_way[rows] < 0).astype(int)
    earthed = ~wires.units.loose[rows, side, 0].any(axis=-1)
    blocked = wires.units.loose[rows, side, 1].any(axis=-1)
    passing = earthed & ~blocked & _passing(wires, rows, side)
    closing = np.isin(forest.zone_start[supplied:-1], forest.tie_place)
    held = np.append(np.ones(supplied, dtype=bool), earthed & ~passing & ~(closing & blocked))
    joints = joints_of(network, forest, None)
    if joints is not None:
        sums = np.zeros(joints.z.shape[0])
        np.add.at(sums, joints.column, joints.weight)
        held[forest.zone[joints.place[np.abs(sums[joints.column]) > 1e-9]]] = True
    fed = forest.zone[forest.zone_fed[supplied:]]
    beyond = (supplied + np.flatnonzero(passing)).tolist()
    pairs = [*_met(forest), *zip(fed[passing].tolist(), beyond, strict=True)]
    near = neighbours(dict(enumerate(pairs)))
    reached = _joined(near, np.flatnonzero(held).tolist())
    lost: list[int] = []
    for zone in range(supplied, zones):
        if zone not in reached:
            lost.append(zone)
            reached |= _joined(near, [zone])
    return np.unique(forest.zone_transformer[lost])


def _joined(near: dict[int, Ends], first: list[int]) -> set[int]:
    """All that can be reached from some zones."""
    reached, waiting = set(first), list(first)
    while waiting:
        for _, other in near.get(waiting.pop(), ()):
            if other not in reached:
                reached.add(other)
                waiting.append(other)
    return reached


def _passing(wires: Wires, rows: Index, side: Index) -> Flag:
    """Whether a zero sequence passes through each transformer, from one earthed star to the other."""
    units, phases = wires.units, slice(0, 3)
    sums = units.gain[rows, side, phases, phases].sum(axis=(1, 2))
    three = units.has[rows][:, :, phases].all(axis=(1, 2))
    least = 1e-9 * np.abs(units.gain[rows, side]).max(axis=(1, 2))
    return np.asarray(three & (np.abs(sums) > least).any(axis=-1))


def _met(forest: Forest) -> Iterable[tuple[int, int]]:
    """Zones that closing branches join."""
    one, other = forest.zone[forest.tie_place], forest.zone[forest.place[forest.tie_node]]
    return zip(one.tolist(), other.tolist(), strict=True)
