"""Why a layout is not a set of trees: closed loops and joined supplies, named by their rows."""

from collections import deque
from dataclasses import dataclass

from solver.network import Network

MOST = 200  # loops, or joined supplies, that are worth listing


@dataclass(frozen=True, slots=True)
class Loop:
    """A closed loop: the lines and transformers it runs through, in the order of the round.

    lines : rows
    transformers : rows
    """

    lines: tuple[int, ...]
    transformers: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Joined:
    """Two supplies that feed into each other, and what lies between them, in order.

    sources : rows of the two supplies
    lines : rows
    transformers : rows
    """

    sources: tuple[int, int]
    lines: tuple[int, ...]
    transformers: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Trouble:
    """Why the layout is not a set of trees. At most 200 of each are listed.

    loops : each a Loop
    joined : each a Joined
    """

    loops: tuple[Loop, ...]
    joined: tuple[Joined, ...]


def find_trouble(network: Network) -> Trouble:
    """Names what closes the loops and joins the supplies, each with the branches it runs through.

    network : Network, of which only the connections are read
    Returns : Trouble, empty where the network is a set of trees
    Source : Welch, A mechanical analysis of the cyclic structure of undirected linear graphs, J. ACM 13
        (1966) 205-210: one loop for each branch outside a spanning tree
    """
    ends = [
        *zip(network.line_from.tolist(), network.line_to.tolist(), strict=True),
        *zip(network.transformer_from.tolist(), network.transformer_to.tolist(), strict=True),
    ]
    lines = network.line_from.size
    supply, doubled = _supplies(network.source_node.tolist())
    feeder = _spanning(network.node_count, ends, list(supply))
    used = set(feeder.values())
    loops, joined = [], [Joined(pair, (), ()) for pair in doubled]
    for branch, (a, b) in enumerate(ends):
        if branch in used or a not in feeder:
            continue
        up, down = _way(a, ends, feeder), _way(b, ends, feeder)
        roots = supply[up[-1][0]], supply[down[-1][0]]
        while roots[0] == roots[1] and len(up) > 1 and len(down) > 1 and up[-2] == down[-2]:
            up.pop()
            down.pop()
        round_ = [f for _, f in reversed(up[:-1])] + [branch] + [f for _, f in down[:-1]]
        rows = tuple(f for f in round_ if f < lines), tuple(f - lines for f in round_ if f >= lines)
        if roots[0] == roots[1]:
            loops.append(Loop(*rows))
        else:
            joined.append(Joined(roots, *rows))
        if len(loops) >= MOST or len(joined) >= MOST:
            break
    return Trouble(tuple(loops), tuple(joined))


def _supplies(nodes: list[int]) -> tuple[dict[int, int], list[tuple[int, int]]]:
    """First supply on each supplied node, and the pairs that share a node."""
    first: dict[int, int] = {}
    pairs = [(first.setdefault(node, row), row) for row, node in enumerate(nodes)]
    return first, [pair for pair in pairs if pair[0] != pair[1]]


def _spanning(count: int, ends: list[tuple[int, int]], roots: list[int]) -> dict[int, int]:
    """Branch that feeds each live node in breadth-first trees; -1 at a root."""
    near: list[list[tuple[int, int]]] = [[] for _ in range(count)]
    for branch, (a, b) in enumerate(ends):
        near[a].append((b, branch))
        near[b].append((a, branch))
    feeder, queue = dict.fromkeys(roots, -1), deque(roots)
    while queue:
        for other, branch in near[queue.popleft()]:
            if other not in feeder:
                feeder[other] = branch
                queue.append(other)
    return feeder


def _way(node: int, ends: list[tuple[int, int]], feeder: dict[int, int]) -> list[tuple[int, int]]:
    """Nodes from here to the root, each with the branch that feeds it."""
    way = [(node, feeder[node])]
    while (branch := feeder[node]) >= 0:
        a, b = ends[branch]
        node = a if node == b else b
        way.append((node, feeder[node]))
    return way
