"""Rounds of a graph: trees that span it, the branches that close rounds, and what each round runs through."""

from collections import deque
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from solver.network import Network

Ends = list[tuple[int, int]]


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
    """Why a layout has no solution. At most 200 of each are listed.

    loops : each a Loop without any impedance, whose current is not determined
    joined : each a Joined pair of supplies with no impedance in between
    groups : each a Loop or Joined whose transformers, all in all, turn the phases
    unfed : rows of loads on a conductor that is not there, or that nothing feeds
    """

    loops: tuple[Loop, ...] = ()
    joined: tuple[Joined, ...] = ()
    groups: tuple[Loop | Joined, ...] = ()
    unfed: tuple[int, ...] = ()

    def __bool__(self) -> bool:
        return bool(self.loops or self.joined or self.groups or self.unfed)


def branch_ends(network: Network) -> Ends:
    """Both nodes of every line, then of every transformer.

    network : Network
    Returns : pairs of nodes
    """
    return [
        *zip(network.line_from.tolist(), network.line_to.tolist(), strict=True),
        *zip(network.transformer_from.tolist(), network.transformer_to.tolist(), strict=True),
    ]


def spanning(near: Mapping[int, Ends], roots: Iterable[int], feeder: dict[int, int]) -> None:
    """Breadth-first trees from all roots at once, all that is not in a tree yet.

    near : for each node the branches there, each with the node at its other end
    roots : nodes
    feeder : branch that feeds each node, -1 at a root; is filled
    Source : Welch, A mechanical analysis of the cyclic structure of undirected linear graphs, J. ACM 13
        (1966) 205-210: one round for each branch outside a spanning tree
    """
    queue = deque(root for root in roots if root not in feeder)
    feeder.update(dict.fromkeys(queue, -1))
    while queue:
        for branch, other in near.get(queue.popleft(), ()):
            if other not in feeder:
                feeder[other] = branch
                queue.append(other)


def neighbours(ends: Mapping[int, tuple[int, int]]) -> dict[int, Ends]:
    """The branches at each node.

    ends : both nodes of each branch
    Returns : for each node pairs of a branch and the node at its other end
    """
    near: dict[int, Ends] = {}
    for branch, (a, b) in ends.items():
        near.setdefault(a, []).append((branch, b))
        near.setdefault(b, []).append((branch, a))
    return near


def round_of(
    branch: int, ends: Mapping[int, tuple[int, int]], feeder: Mapping[int, int]
) -> tuple[int, int, list[int]]:
    """The round that a branch closes over its spanning trees.

    branch : that is in no tree
    ends : both nodes of each branch
    feeder : branch that feeds each node, -1 at a root
    Returns : the roots above its two ends, and the branches in order; from root to root where those differ
    """
    up, down = (_way(node, ends, feeder) for node in ends[branch])
    while len(up) > 1 and len(down) > 1 and up[-1][0] == down[-1][0] and up[-2] == down[-2]:
        up.pop()
        down.pop()
    way = [f for _, f in reversed(up[:-1])] + [branch] + [f for _, f in down[:-1]]
    return up[-1][0], down[-1][0], way


def _way(node: int, ends: Mapping[int, tuple[int, int]], feeder: Mapping[int, int]) -> list[tuple[int, int]]:
    """Nodes from here to the root, each with the branch that feeds it."""
    way = [(node, feeder[node])]
    while (branch := feeder[node]) >= 0:
        a, b = ends[branch]
        node = a if node == b else b
        way.append((node, feeder[node]))
    return way
