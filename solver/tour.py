"""Rooting many trees at once by their Euler tours, array by array and without a walk node by node."""

from dataclasses import dataclass

import numpy as np

from solver.network import Index


@dataclass(frozen=True, slots=True)
class Tour:
    """Trees rooted at given nodes, all their nodes in depth-first preorder, tree after tree.

    order : (live,) node at each place
    end : (live,) one past the last descendant of each place
    parent : (live,) place that each hangs on, -1 at a root
    edge : (live,) edge that leads there, -1 at a root
    forward : (live,) whether that edge runs from the parent to the place, as it was given
    """

    order: Index
    end: Index
    parent: Index
    edge: Index
    forward: Index


def tour(count: int, first: Index, second: Index, roots: Index) -> Tour | None:
    """Roots the trees that hold the given nodes; None where they are no trees, or hold two of them.

    Every edge is walked once in each direction; after the arc u → v comes the next arc out of v behind
    v → u. That makes one round of a tree. The round is cut open at the root and every arc finds its
    distance to the cut by jumping pointers, in as many steps as the length has binary digits.

    count : number of nodes
    first : (edge,) node at one end
    second : (edge,) node at the other end
    roots : (root,) nodes
    Returns : Tour of all that hangs together with the roots, or None
    Source : Tarjan, Vishkin, An efficient parallel biconnectivity algorithm, SIAM J. Comput. 14 (1985)
        862-874
    """
    tails = np.concatenate((first, second))
    arcs, edges = tails.size, first.size
    following, start, out = _round(count, tails)
    begun = roots[start[roots] < start[roots + 1]]
    cut = _twin(out[start[begun + 1] - 1], edges)  # the last arc back into each root
    following[cut] = cut
    last, distance = _distances(following)
    owner = np.full(arcs, -1)
    owner[cut] = np.flatnonzero(start[roots] < start[roots + 1])
    root = owner[last]
    if not _whole(count, first, second, roots, root):
        return None
    return _ordered(tails, roots, root, distance)


def _twin(arc: Index, edges: int) -> Index:
    return np.where(arc < edges, arc + edges, arc - edges)


def _round(count: int, tails: Index) -> tuple[Index, Index, Index]:
    """The arc after each arc, and the arcs out of every node: where they start and which they are."""
    arcs, edges = tails.size, tails.size // 2
    bits = max(arcs, 1).bit_length()
    out = np.sort((tails << bits) | np.arange(arcs)) & ((1 << bits) - 1)
    start = np.zeros(count + 1, dtype=np.intp)
    np.cumsum(np.bincount(tails, minlength=count), out=start[1:])
    beside = np.empty(arcs, dtype=np.intp)
    beside[out[:-1]] = out[1:]
    used = np.flatnonzero(start[:-1] < start[1:])
    beside[out[start[used + 1] - 1]] = out[start[used]]
    return np.concatenate((beside[edges:], beside[:edges])), start, out


def _distances(following: Index) -> tuple[Index, Index]:
    """Last arc of each arc's way and the number of steps to it."""
    distance = (following != np.arange(following.size, dtype=np.intp)).astype(np.int32)
    for _ in range(max(following.size, 1).bit_length()):
        distance += distance.take(following)
        following = following.take(following)
    return following, distance


def _whole(count: int, first: Index, second: Index, roots: Index, root: Index) -> bool:
    """True where each live edge is walked both ways from one root, and the edges make trees."""
    live = np.zeros(count, dtype=bool)
    live[roots] = True
    if np.count_nonzero(live) < roots.size:
        return False
    there, back = root[: first.size], root[first.size :]
    walked = there >= 0
    live[first[walked]] = live[second[walked]] = True
    if (there != back).any() or (live[first] != walked).any():
        return False
    return int(np.count_nonzero(live)) == int(np.count_nonzero(walked)) + roots.size


def _ordered(tails: Index, roots: Index, root: Index, distance: Index) -> Tour:
    edges = tails.size // 2
    rows = np.flatnonzero(root[:edges] >= 0)
    there, back = distance[rows], distance[rows + edges]
    forward = there > back
    owner = root[rows]
    length = 2 * np.bincount(owner, minlength=roots.size)
    base = np.cumsum(length)  # the tours side by side, each counted backwards from its last arc
    slot = np.full(2 * rows.size, -1)
    slot[base[owner] - 1 - np.maximum(there, back)] = np.arange(rows.size)
    down = slot[slot >= 0]
    nodes = np.concatenate(([0], np.cumsum(length // 2 + 1)))
    at_root = nodes[:-1]
    live = int(nodes[-1])
    inner = np.ones(live, dtype=bool)
    inner[at_root] = False
    places = np.flatnonzero(inner)
    row, along = rows[down], forward[down]
    order, edge, way = np.empty(live, dtype=np.intp), np.full(live, -1), np.zeros(live, dtype=bool)
    order[at_root] = roots
    order[places] = tails[np.where(along, row + edges, row)]
    edge[places], way[places] = row, along
    end = np.empty(live, dtype=np.intp)
    end[at_root] = nodes[1:]
    end[places] = places + (np.abs(there - back)[down] + 1) // 2
    place = np.empty(int(order.max(initial=-1)) + 1, dtype=np.intp)
    place[order] = np.arange(live)
    parent = np.full(live, -1)
    parent[places] = place[tails[np.where(along, row, row + edges)]]
    return Tour(order, end, parent, edge, way)
