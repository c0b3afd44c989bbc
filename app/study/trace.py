"""The trees that grow from the supplies, the zones they run through, the rounds that are closed over them."""

from collections import Counter
from collections.abc import Iterable, Mapping

from app.model.kinds import Switch, Transformer
from app.study.graph import NONE, Layout, Ring
from solver.rounds import Ends, neighbours, round_of, spanning


def trace(layout: Layout) -> None:
    """Find out what feeds what: fills everything of a layout that follows from what is joined to what.

    layout : with its rows; closed switches join, open ones do not

    Returns : nothing
    """
    ends = {
        row: (layout.start[row], layout.end[row])
        for row, branch in enumerate(layout.branches)
        if not isinstance(branch, Switch) or branch.closed
    }
    near = neighbours(ends)
    feeder = _roots(layout, near)
    _hang(layout, ends, feeder)
    _zones(layout, ends, near)
    layout.live = [layout.supply_of[t] != NONE for t in layout.tree]
    if len(feeder) - len(layout.roots) < len(ends):
        _rings(layout, ends, feeder)
    _name(layout)


def _roots(layout: Layout, near: dict[int, Ends]) -> dict[int, int]:
    """Feeder of each node: in trees from all supplies at once, then in one from every node not reached."""
    rooted: dict[int, int] = {}
    for supply in layout.supplies:
        node = layout.at[supply]
        if node in rooted:
            layout.doubled.append((rooted[node], supply))
        rooted.setdefault(node, supply)
    feeder: dict[int, int] = {}
    spanning(near, rooted, feeder)
    layout.roots, layout.supply_of = list(rooted), list(rooted.values())
    for node in range(len(layout.nodes)):
        if node not in feeder:
            spanning(near, [node], feeder)
            layout.roots.append(node)
            layout.supply_of.append(NONE)
    return feeder


def _hang(layout: Layout, ends: dict[int, tuple[int, int]], feeder: dict[int, int]) -> None:
    """Every node below the one that feeds it."""
    count = len(layout.nodes)
    tree, fed_by, fed_from = [NONE] * count, [NONE] * count, [NONE] * count
    for number, root in enumerate(layout.roots):
        tree[root] = number
    for node, branch in feeder.items():
        if branch != NONE:
            start, end = ends[branch]
            above = start if node == end else end
            tree[node], fed_by[node], fed_from[node] = tree[above], branch, above
    layout.tree, layout.fed_by, layout.fed_from, layout.order = tree, fed_by, fed_from, list(feeder)


def _zones(layout: Layout, ends: dict[int, tuple[int, int]], near: dict[int, Ends]) -> None:
    """Number what is joined without a transformer, in the order of the nodes that lead there."""
    is_unit = [isinstance(b, Transformer) for b in layout.branches]
    meshed = len(ends) > len(layout.order) - len(layout.roots)
    zone = layout.zone = [NONE] * len(layout.nodes)
    for node in layout.order:
        if zone[node] != NONE:
            continue
        by = layout.fed_by[node]
        if by != NONE and not is_unit[by]:
            zone[node] = zone[layout.fed_from[node]]
            continue
        number = len(layout.zone_heads)
        layout.zone_heads.append(node)
        zone[node] = number
        if meshed:
            for other in _joined(node, near, is_unit):
                zone[other] = number


def _joined(node: int, near: dict[int, Ends], is_unit: list[bool]) -> Iterable[int]:
    """All nodes that are joined to one without a transformer."""
    found, waiting = {node}, [node]
    while waiting:
        for branch, other in near.get(waiting.pop(), ()):
            if other not in found and not is_unit[branch]:
                found.add(other)
                waiting.append(other)
    return found


def supply_sides(layout: Layout) -> dict[str, int]:
    """Which winding of each transformer lies nearer to a supply, by the transformers between.

    layout : the graph of the drawing, traced

    Returns : dict of transformer id to winding, 1 or 2; without those that lie between zones equally near
    Source : common practice, no source
    """
    ends = {unit: (layout.zone[layout.start[unit]], layout.zone[layout.end[unit]]) for unit in layout.units}
    beside: dict[int, list[int]] = {}
    for one, other in ends.values():
        beside.setdefault(one, []).append(other)
        beside.setdefault(other, []).append(one)
    fed = [root for root, supply in zip(layout.roots, layout.supply_of, strict=True) if supply != NONE]
    depth = {layout.zone[root]: 0 for root in fed}
    waiting = list(depth)
    for zone in waiting:
        for other in beside.get(zone, ()):
            if other not in depth:
                depth[other] = depth[zone] + 1
                waiting.append(other)
    known = {unit: (depth[a], depth[b]) for unit, (a, b) in ends.items() if a in depth and b in depth}
    return {layout.branch_ids[unit]: 1 if a < b else 2 for unit, (a, b) in known.items() if a != b}


def _rings(layout: Layout, ends: dict[int, tuple[int, int]], feeder: dict[int, int]) -> None:
    supply = dict(zip(layout.roots, layout.supply_of, strict=True))
    for branch in sorted(ends.keys() - feeder.values()):
        if layout.live[ends[branch][0]]:
            layout.rings.append(ring_of(branch, ends, feeder, supply))


def ring_of(
    branch: int, ends: Mapping[int, tuple[int, int]], feeder: Mapping[int, int], supply: Mapping[int, int]
) -> Ring:
    """The round that a branch closes over trees, from the supply drawn first where it joins two.

    branch : row of a branch that is in no tree
    ends : both node rows of each branch
    feeder : branch that feeds each node, -1 at a root
    supply : attachment row of the supply at a node

    Returns : Ring
    """
    one, other, way = round_of(branch, ends, feeder)
    if one == other:
        return Ring(tuple(sorted(way) if len(way) == 2 else way), None)
    if supply[one] > supply[other]:
        one, other, way = other, one, way[::-1]
    return Ring(tuple(way), (supply[one], supply[other]))


def _name(layout: Layout) -> None:
    """The same by ids, and the live nodes where one branch ends and nothing hangs."""
    ids = layout.node_ids
    for node, (branch, above) in enumerate(zip(layout.fed_by, layout.fed_from, strict=True)):
        if branch != NONE and layout.live[node]:
            layout.upstream[ids[node]] = layout.branch_ids[branch]
            layout.before[ids[node]] = ids[above]
    layout.zone_of = dict(zip(ids, layout.zone, strict=True))
    meetings = Counter([*layout.start, *layout.end])
    hung = set(layout.at)
    layout.loose = [n for n in range(len(ids)) if meetings[n] == 1 and n not in hung and layout.live[n]]
