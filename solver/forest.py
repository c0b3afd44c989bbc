"""Graph to supplied trees: what feeds what, in the order the sweep walks, or why there is no such order."""

from dataclasses import dataclass

import numpy as np

from solver.network import Flag, Index, Network
from solver.tour import Tour, tour
from solver.trouble import Trouble, find_trouble


@dataclass(frozen=True, slots=True)
class Forest:
    """The supplied trees, cut into zones at the transformers.

    Zones stand in order of depth, which counts the transformers between a zone and its supply.
    Inside a zone the nodes stand in depth-first preorder, so all that a node feeds follows it.

    order : (live,) node at each place
    place : (node,) place of each node, -1 where it is dead
    parent : (node,) node that feeds it, -1 for a supplied or a dead node
    end : (live,) one past the last place of the zone that is fed through this place
    feeder : (live,) line that feeds the place, -1 at the root of a zone
    zone : (live,) number of the zone
    zone_start : (zone + 1,) first place of each zone
    zone_source : (zone,) supply that feeds the zone
    zone_transformer : (zone,) transformer that feeds the zone, -1 where a supply does
    zone_fed : (zone,) place that the zone hangs on, -1 where it is a supply's
    depth_zone : (depth + 1,) first zone of each depth
    line_way : (line,) +1 fed from `line_from`, -1 from `line_to`, 0 dead
    transformer_way : (transformer,) +1 fed from winding 1, -1 from winding 2, 0 dead
    """

    order: Index
    place: Index
    parent: Index
    end: Index
    feeder: Index
    zone: Index
    zone_start: Index
    zone_source: Index
    zone_transformer: Index
    zone_fed: Index
    depth_zone: Index
    line_way: Index
    transformer_way: Index

    @property
    def dead(self) -> Index:
        """(node,) nodes that no supply feeds."""
        return np.flatnonzero(self.place < 0)


def grow(network: Network) -> Forest | Trouble:
    """Finds the supplied trees of a network and the order in which the sweep walks them.

    network : Network, of which only the connections are read
    Returns : Forest, or Trouble where loops are closed or supplies joined
    Source : see solver.tour
    """
    first = np.concatenate((network.line_from, network.transformer_from))
    second = np.concatenate((network.line_to, network.transformer_to))
    walked = tour(network.node_count, first, second, network.source_node)
    if walked is None:
        return find_trouble(network)
    return _zoned(network, walked)


def _zoned(network: Network, walked: Tour) -> Forest:
    """Cuts the trees into zones at the transformers and puts the zones in order of depth."""
    lines = network.line_from.size
    through = walked.edge >= lines
    depth, sequence, end = _by_depth(walked, through)
    order, edge, forward = walked.order[sequence], walked.edge[sequence], walked.forward[sequence]
    place = np.full(network.node_count, -1)
    place[order] = np.arange(order.size)
    above = walked.order[walked.parent]
    parent = np.full(network.node_count, -1)
    parent[walked.order] = np.where(walked.parent >= 0, above, -1)
    is_line = (edge >= 0) & (edge < lines)
    start = np.flatnonzero(~is_line)
    unit = edge[start] - lines
    deeper = edge[start] >= 0
    way = np.zeros(lines + network.transformer_from.size, dtype=np.intp)
    way[edge[edge >= 0]] = np.where(forward[edge >= 0], 1, -1)
    zone = np.cumsum(~is_line) - 1
    fed = np.where(deeper, place[parent[order[start]]], -1)
    depth_zone = np.searchsorted(depth[start], np.arange(int(depth[-1:].sum()) + 2))
    return Forest(
        order=order,
        place=place,
        parent=parent,
        end=end,
        feeder=np.where(is_line, edge, -1),
        zone=zone,
        zone_start=np.append(start, order.size),
        zone_source=_zone_sources(zone, fed, depth_zone),
        zone_transformer=np.where(deeper, unit, -1),
        zone_fed=fed,
        depth_zone=depth_zone,
        line_way=way[:lines],
        transformer_way=way[lines:],
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
