"""Graph to supplied trees: what feeds what, in the order the sweep walks, or why there is no such order."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from solver.network import Index, Network

Flag = NDArray[np.bool_]
MOST = 200  # loops or joined supplies worth listing
ROOT, UNSEEN = -1, -2


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


@dataclass(frozen=True, slots=True)
class Loop:
    """A closed loop: the lines and transformers it runs through, in the order of the round."""

    lines: tuple[int, ...]
    transformers: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Joined:
    """Two supplies that feed into each other, and what lies between them."""

    sources: tuple[int, int]
    lines: tuple[int, ...]
    transformers: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Trouble:
    """Why the layout is not a set of trees. At most 200 of each are listed."""

    loops: tuple[Loop, ...]
    joined: tuple[Joined, ...]


def grow(network: Network) -> Forest | Trouble:
    """Finds the supplied trees of a network and the order in which the sweep walks them.

    network : Network, of which only the connections are read
    Returns : Forest, or Trouble where loops are closed or supplies joined
    Source : Tarjan, Depth-first search and linear graph algorithms, SIAM J. Comput. 1 (1972) 146-160,
        for preorder and contiguous subtrees
    """
    walk = _walk(network)
    return _tidy(network, walk) if walk.whole else _trouble(network, walk)


@dataclass(frozen=True, slots=True)
class _Walk:
    """Spanning trees as they were walked."""

    order: Index
    parent: Index  # (node,) -1 at roots, -2 where never reached
    roots: tuple[Index, ...]  # (zone,) of each depth
    cuts: tuple[Index, ...]  # (zone,) transformer that feeds each root; supply rows at depth 0
    whole: bool  # every live branch is part of a tree


def _walk(network: Network) -> _Walk:
    first, second = network.transformer_from, network.transformer_to
    neighbours, start = _adjacency(network)
    parent, order = [UNSEEN] * network.node_count, []  # type: list[int], list[int]
    reached = np.zeros(network.node_count, dtype=bool)
    waiting = np.ones(first.size, dtype=bool)
    roots, cuts = np.unique(network.source_node, return_index=True)
    whole = roots.size == network.source_node.size
    fed = np.full(roots.size, ROOT)
    all_roots: list[Index] = []
    all_cuts: list[Index] = []
    while roots.size or not all_roots:
        all_roots.append(roots)
        all_cuts.append(cuts)
        for root, feeding in zip(roots.tolist(), fed.tolist(), strict=True):
            parent[root] = feeding
        before = len(order)
        _preorder(neighbours, start, parent, roots.tolist(), order)
        reached[order[before:]] = True
        rows = np.flatnonzero(waiting & (reached[first] | reached[second]))
        waiting[rows] = False
        new = rows[reached[first[rows]] != reached[second[rows]]]
        forward = reached[first[new]]
        roots, pick = np.unique(np.where(forward, second[new], first[new]), return_index=True)
        fed = np.where(forward, first[new], second[new])[pick]
        cuts = new[pick]
        whole &= rows.size == cuts.size
    tree_lines = len(order) - sum(r.size for r in all_roots)
    whole &= int(np.count_nonzero(reached[network.line_from])) == tree_lines
    parents = np.array(parent, dtype=np.intp)
    return _Walk(np.array(order, dtype=np.intp), parents, tuple(all_roots), tuple(all_cuts), whole)


def _adjacency(network: Network) -> tuple[list[int], list[int]]:
    ends = np.concatenate((network.line_from, network.line_to))
    others = np.concatenate((network.line_to, network.line_from))
    start = np.zeros(network.node_count + 1, dtype=np.intp)
    np.cumsum(np.bincount(ends, minlength=network.node_count), out=start[1:])
    return others[_grouped(ends)].tolist(), start.tolist()


def _grouped(key: Index) -> Index:
    """Rows in order of their key; equal keys in order of row. Sorting packed keys beats a stable argsort."""
    return np.sort(key * key.size + np.arange(key.size)) % max(key.size, 1)


def _preorder(
    neighbours: list[int], start: list[int], parent: list[int], roots: list[int], order: list[int]
) -> None:
    stack = roots[::-1]
    pop, push, put = stack.pop, stack.append, order.append
    while stack:
        node = pop()
        put(node)
        for other in neighbours[start[node] : start[node + 1]]:
            if parent[other] == UNSEEN:
                parent[other] = node
                push(other)


def _tidy(network: Network, walk: _Walk) -> Forest:
    live, order, parent = walk.order.size, walk.order, walk.parent
    place = np.full(network.node_count, -1)
    place[order] = np.arange(live)
    roots, cuts = np.concatenate(walk.roots), np.concatenate(walk.cuts)
    supplied = walk.roots[0].size
    zone_start = np.append(place[roots], live)
    zone = np.repeat(np.arange(roots.size), np.diff(zone_start))
    zone_fed = np.append(np.full(supplied, -1), place[parent[roots[supplied:]]])
    line_way, feeder = _line_ways(network, parent, place)
    end = _ends(place, parent[order], zone_start[:-1])
    depth_zone = np.cumsum([0] + [r.size for r in walk.roots])
    return Forest(
        order=order,
        place=place,
        parent=np.maximum(parent, -1),
        end=end,
        feeder=feeder,
        zone=zone,
        zone_start=zone_start,
        zone_source=_zone_sources(cuts, zone, zone_fed, depth_zone),
        zone_transformer=np.append(np.full(supplied, -1), cuts[supplied:]),
        zone_fed=zone_fed,
        depth_zone=depth_zone,
        line_way=line_way,
        transformer_way=_transformer_ways(network, roots, cuts, supplied),
    )


def _line_ways(network: Network, parent: Index, place: Index) -> tuple[Index, Index]:
    forward = parent[network.line_to] == network.line_from
    child = np.where(forward, network.line_to, network.line_from)
    alive = place[child] >= 0
    feeder = np.full(int(np.count_nonzero(place >= 0)), -1)
    feeder[place[child[alive]]] = np.flatnonzero(alive)
    return np.where(alive, np.where(forward, 1, -1), 0), feeder


def _transformer_ways(network: Network, roots: Index, cuts: Index, supplied: int) -> Index:
    way = np.zeros(network.transformer_from.size, dtype=np.intp)
    rows = cuts[supplied:]
    way[rows] = np.where(network.transformer_to[rows] == roots[supplied:], 1, -1)
    return way


def _zone_sources(cuts: Index, zone: Index, zone_fed: Index, depth_zone: Index) -> Index:
    source = cuts.copy()
    for start, stop in zip(depth_zone[1:-1], depth_zone[2:], strict=True):
        source[start:stop] = source[zone[zone_fed[start:stop]]]
    return source


def _ends(place: Index, parents: Index, root_places: Index) -> Index:
    """One past the last descendant of every place.

    The height of the stack after a node was popped falls by at most one a pop, and first falls below
    its own value when the subtree is done. So the end is the next place one lower.
    """
    live = parents.size
    inner = np.ones(live, dtype=bool)
    inner[root_places] = False
    children = np.bincount(place[parents[inner]], minlength=live)
    height = root_places.size + np.cumsum(children) - children - np.arange(1, live + 1)
    packed = np.sort(height * live + np.arange(live))
    lowest = int(np.searchsorted(packed, live))
    lower = packed[np.searchsorted(packed, packed[lowest:] - live)]
    end = np.full(live, live)
    end[packed[lowest:] % live] = lower % live
    return end


def _trouble(network: Network, walk: _Walk) -> Trouble:
    """What closes the loops and joins the supplies, each with the branches it runs through."""
    tree = _Tree(network, walk)
    loops, joined = [], [Joined(pair, (), ()) for pair in _doubled(network.source_node)]
    for branch in tree.extra():
        lines, transformers, supplies = tree.round(branch)
        if supplies[0] == supplies[1]:
            loops.append(Loop(lines, transformers))
        else:
            joined.append(Joined(supplies, lines, transformers))
    return Trouble(tuple(loops[:MOST]), tuple(joined[:MOST]))


def _doubled(source_node: Index) -> list[tuple[int, int]]:
    first: dict[int, int] = {}
    pairs = ((first.setdefault(node, row), row) for row, node in enumerate(source_node.tolist()))
    return [pair for pair in pairs if pair[0] != pair[1]]


class _Tree:
    """The walked trees with the branch that feeds each node; a branch is (is transformer, row, from, to)."""

    def __init__(self, network: Network, walk: _Walk) -> None:
        self.parent = walk.parent.tolist()
        self.supply = {
            int(node): row for row, node in reversed(list(enumerate(network.source_node.tolist())))
        }
        self.network = network
        roots = np.concatenate(walk.roots[1:]) if len(walk.roots) > 1 else np.array([], dtype=np.intp)
        cuts = np.concatenate(walk.cuts[1:]) if len(walk.cuts) > 1 else np.array([], dtype=np.intp)
        self.feeder: dict[int, tuple[bool, int]] = {
            node: (True, row) for node, row in zip(roots.tolist(), cuts.tolist(), strict=True)
        }
        self.spare: list[tuple[bool, int, int, int]] = []
        for row, (a, b) in enumerate(_pairs(network.line_from, network.line_to)):
            self._sort(False, row, a, b)
        used = set(cuts.tolist())
        for row, (a, b) in enumerate(_pairs(network.transformer_from, network.transformer_to)):
            if self.parent[a] != UNSEEN and row not in used:
                self.spare.append((True, row, a, b))

    def _sort(self, is_transformer: bool, row: int, a: int, b: int) -> None:
        if self.parent[a] == UNSEEN:
            return
        for node, other in ((b, a), (a, b)):
            if self.parent[node] == other and node not in self.feeder:
                self.feeder[node] = (is_transformer, row)
                return
        self.spare.append((is_transformer, row, a, b))

    def extra(self) -> list[tuple[bool, int, int, int]]:
        """Branches over and above the trees, as many as are worth listing."""
        return self.spare[: 2 * MOST]

    def round(
        self, branch: tuple[bool, int, int, int]
    ) -> tuple[tuple[int, ...], tuple[int, ...], tuple[int, int]]:
        """Lines, transformers and the two supplies of the round that an extra branch closes."""
        is_transformer, row, a, b = branch
        up, down = self._path(a), self._path(b)
        supplies = (self.supply[up[-1]], self.supply[down[-1]])
        while len(up) > 1 and len(down) > 1 and up[-2:] == down[-2:]:
            up.pop()
            down.pop()
        if supplies[0] == supplies[1] and up[-1] == down[-1]:
            up.pop()
            down.pop()
        nodes = [n for n in reversed(up) if n in self.feeder] + [n for n in down if n in self.feeder]
        here = len([n for n in up if n in self.feeder])
        walked = [self.feeder[n] for n in nodes]
        walked.insert(here, (is_transformer, row))
        lines = tuple(r for t, r in walked if not t)
        return lines, tuple(r for t, r in walked if t), supplies

    def _path(self, node: int) -> list[int]:
        path = [node]
        while self.parent[node] >= 0:
            node = self.parent[node]
            path.append(node)
        return path


def _pairs(first: Index, second: Index) -> Iterator[tuple[int, int]]:
    return zip(first.tolist(), second.tolist(), strict=True)
