"""Graph to supplied trees: what feeds what in the order of the sweep, and what closes rounds over them."""

from dataclasses import dataclass

import numpy as np

from solver.network import Flag, Index, Network
from solver.rounds import Joined, Trouble, branch_ends, neighbours, spanning
from solver.tour import Tour, tour

NONE = np.zeros(0, dtype=np.intp)


@dataclass(frozen=True, slots=True)
class Forest:
    """The supplied trees, cut into zones at the transformers.

    Zones stand in order of depth, which counts the transformers between a zone and its supply.
    Inside a zone the nodes stand in depth-first preorder, so all that a node feeds follows it.
    A branch that closes a round over the trees is cut at its far end: there it feeds a place of its own,
    and a tie joins that place to the node again.

    order : (live,) node at each place
    place : (node,) place of each node, -1 where it is dead; never the place of a cut end
    parent : (node,) node that feeds it, -1 for a supplied or a dead node
    end : (live,) one past the last place of the zone that is fed through this place
    feeder : (live,) line that feeds the place, -1 at the root of a zone
    line_place : (line,) place that each line feeds, -1 where it is dead
    zone : (live,) number of the zone
    zone_start : (zone + 1,) first place of each zone
    zone_source : (zone,) supply that feeds the zone
    zone_transformer : (zone,) transformer that feeds the zone, -1 where a supply does
    zone_fed : (zone,) place that the zone hangs on, -1 where it is a supply's
    depth_zone : (depth + 1,) first zone of each depth
    line_way : (line,) +1 fed from `line_from`, -1 from `line_to`, 0 dead
    transformer_way : (transformer,) +1 fed from winding 1, -1 from winding 2, 0 dead
    tie_place : (tie,) place of each cut end
    tie_node : (tie,) node that the end was cut from
    tie_branch : (tie,) branch that closes the round: a line, or lines + transformer
    """

    order: Index
    place: Index
    parent: Index
    end: Index
    feeder: Index
    line_place: Index
    zone: Index
    zone_start: Index
    zone_source: Index
    zone_transformer: Index
    zone_fed: Index
    depth_zone: Index
    line_way: Index
    transformer_way: Index
    tie_place: Index
    tie_node: Index
    tie_branch: Index

    @property
    def dead(self) -> Index:
        """(node,) nodes that no supply feeds."""
        return np.flatnonzero(self.place < 0)


def grow(network: Network) -> Forest | Trouble:
    """Finds the supplied trees of a network and the order in which the sweep walks them.

    network : Network, of which only the connections are read
    Returns : Forest, with a tie for each round; Trouble where two supplies stand on one node
    Source : see solver.tour and solver.rounds
    """
    first = np.concatenate((network.line_from, network.transformer_from))
    second = np.concatenate((network.line_to, network.transformer_to))
    walked = tour(network.node_count, first, second, network.source_node)
    if walked is not None:
        return _zoned(network, walked, NONE, NONE)
    doubled = _doubled(network.source_node.tolist())
    if doubled:
        return Trouble(joined=tuple(Joined(pair, (), ()) for pair in doubled))
    ties, far_second = _cut(network)
    nodes = np.where(far_second, second[ties], first[ties])
    cut = network.node_count + np.arange(ties.size)
    first[ties], second[ties] = (
        np.where(far_second, first[ties], cut),
        np.where(far_second, cut, second[ties]),
    )
    walked = tour(network.node_count + ties.size, first, second, network.source_node)
    assert walked is not None  # spanning trees are trees
    return _zoned(network, walked, ties, nodes)


def _doubled(nodes: list[int]) -> list[tuple[int, int]]:
    """Pairs of supplies that share a node."""
    first: dict[int, int] = {}
    pairs = [(first.setdefault(node, row), row) for row, node in enumerate(nodes)]
    return [pair for pair in pairs if pair[0] != pair[1]]


def _cut(network: Network) -> tuple[Index, Flag]:
    """The live branches outside spanning trees, and whether the end farther from a supply is their second."""
    ends = dict(enumerate(branch_ends(network)))
    feeder: dict[int, int] = {}
    spanning(neighbours(ends), network.source_node.tolist(), feeder)
    nearness = dict(zip(feeder, range(len(feeder)), strict=True))  # breadth first, so in order of distance
    ties = sorted(branch for branch in ends.keys() - feeder.values() if ends[branch][0] in feeder)
    far_second = [nearness[ends[t][0]] <= nearness[ends[t][1]] for t in ties]
    return np.array(ties, dtype=np.intp), np.array(far_second, dtype=bool)


def _zoned(network: Network, walked: Tour, ties: Index, cut: Index) -> Forest:
    """Cuts the trees into zones at the transformers and puts the zones in order of depth."""
    count, lines = network.node_count, network.line_from.size
    through = walked.edge >= lines
    depth, sequence, end = _by_depth(walked, through)
    order, edge, forward = walked.order[sequence], walked.edge[sequence], walked.forward[sequence]
    place = np.full(count + ties.size, -1)
    place[order] = np.arange(order.size)
    above = walked.order[walked.parent]
    parent = np.full(count + ties.size, -1)
    parent[walked.order] = np.where(walked.parent >= 0, above, -1)
    is_line = (edge >= 0) & (edge < lines)
    start = np.flatnonzero(~is_line)
    unit = edge[start] - lines
    deeper = edge[start] >= 0
    way = np.zeros(lines + network.transformer_from.size, dtype=np.intp)
    way[edge[edge >= 0]] = np.where(forward[edge >= 0], 1, -1)
    zone = np.cumsum(~is_line) - 1
    fed = np.where(deeper, place[parent[order[start]]], -1)
    fed_line = np.full(lines, -1)
    fed_line[edge[is_line]] = np.flatnonzero(is_line)
    depth_zone = np.searchsorted(depth[start], np.arange(int(depth[-1:].sum()) + 2))
    return Forest(
        order=np.append(np.arange(count), cut)[order] if ties.size else order,
        place=place[:count],
        parent=parent[:count],
        end=end,
        feeder=np.where(is_line, edge, -1),
        line_place=fed_line,
        zone=zone,
        zone_start=np.append(start, order.size),
        zone_source=_zone_sources(zone, fed, depth_zone),
        zone_transformer=np.where(deeper, unit, -1),
        zone_fed=fed,
        depth_zone=depth_zone,
        line_way=way[:lines],
        transformer_way=way[lines:],
        tie_place=place[count:],
        tie_node=cut,
        tie_branch=ties,
    )


def _by_depth(walked: Tour, through: Flag) -> tuple[Index, Index, Index]:
    """Depth at each place, the old place that goes there, and the end of what it feeds in its zone."""
    live = walked.order.size
    if not through.any():
        return np.zeros(live, dtype=np.intp), np.arange(live), walked.end
    step = np.zeros(live + 1, dtype=np.intp)
    step[:-1][through] = 1
    np.subtract.at(step, walked.end[through], 1)
    depth = np.cumsum(step[:-1])
    bits = live.bit_length()
    packed = np.sort((depth << bits) | np.arange(live))
    sequence = packed & ((1 << bits) - 1)
    end = np.searchsorted(packed, (depth << bits) | walked.end)
    return packed >> bits, sequence, end[sequence]


def _zone_sources(zone: Index, fed: Index, depth_zone: Index) -> Index:
    source = np.arange(fed.size)
    for start, stop in zip(depth_zone[1:-1], depth_zone[2:], strict=True):
        source[start:stop] = source[zone[fed[start:stop]]]
    return source
