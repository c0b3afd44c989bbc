"""Sequence networks: what a fault sees from every node at once, on trees and on rings alike."""

from dataclasses import dataclass

import numpy as np

from solver.arrays import Complex, Index
from solver.network import Network
from solver.rounds import neighbours, spanning

SAME = 1e-12  # a loop whose impedance is this small beside the others of its kind carries nothing new


@dataclass(frozen=True, slots=True)
class Sequence:
    """One sequence network with all sources short-circuited and all loads removed; B variants side by side.

    node_count : number of nodes
    branch_from, branch_to : (branch,) nodes
    branch_z : (branch, B) complex [ohm] seen at `branch_to`; zero for a closed switch
    branch_ratio : (branch,) complex, volts of `branch_from` over those of `branch_to`; 1 for a line
    earth_node : (earth,) nodes with a way back to the source, or in the zero sequence to earth
    earth_z : (earth, B) complex [ohm] of that way
    """

    node_count: int
    branch_from: Index
    branch_to: Index
    branch_z: Complex
    branch_ratio: Complex
    earth_node: Index
    earth_z: Complex


@dataclass(frozen=True, slots=True)
class _Trees:
    """Trees that grow from earth. Row `node_count` is earth itself.

    order : nodes after those that they hang on
    above : (node + 1,) node that each hangs on
    gain : (node + 1,) complex, volts · gain are alike along a tree at no load
    z : (node + 1, B) complex [ohm] of the edge to the node above, times |gain|² of its side
    ties : rows of edges outside the trees, earth ways first
    """

    order: list[int]
    above: Index
    gain: Complex
    z: Complex
    ties: list[int]


def sequence_of(network: Network) -> Sequence:
    """The rows of a balanced network as a sequence network; charging, iron and loads are left out.

    network : Network of k = 1; a supply without source_z is one without impedance
    Returns : Sequence
    """
    z = network.source_z
    held = np.zeros((network.source_node.size, 1), dtype=complex) if z is None else z[:, 0, 0]
    width = max(network.line_z.shape[-1], network.transformer_z.shape[-1], held.shape[-1])
    rows = [np.broadcast_to(z, (len(z), width)) for z in (network.line_z[:, 0, 0], network.transformer_z)]
    ratio = np.append(np.ones(network.line_from.size), network.transformer_ratio[:, 0])
    return Sequence(
        node_count=network.node_count,
        branch_from=np.append(network.line_from, network.transformer_from),
        branch_to=np.append(network.line_to, network.transformer_to),
        branch_z=np.concatenate(rows),
        branch_ratio=np.abs(ratio) + 0j,
        earth_node=network.source_node,
        earth_z=np.broadcast_to(held, (len(held), width)),
    )


def seen(network: Sequence) -> Complex:
    """The impedance that each node sees into a sequence network.

    Z = Zt - Zt dᴴ (z + d Zt dᴴ)⁻¹ d Zt, of which only the diagonal is worked out: Zt is the sum along a
    tree that grows from earth, d the volts that each branch outside the tree would close over

    network : Sequence
    Returns : (node, B) complex [ohm]; infinite where no way leads back
    Source : compensation, as Tinney, Compensation methods for network solutions by optimally ordered
        triangular factorization, IEEE Trans. PAS-91 (1972) 123-127
    """
    count, width = network.node_count, network.branch_z.shape[-1]
    ends = {row: (count, int(node)) for row, node in enumerate(network.earth_node)}
    first = len(ends)
    pairs = zip(network.branch_from.tolist(), network.branch_to.tolist(), strict=True)
    ends |= {first + row: pair for row, pair in enumerate(pairs)}
    trees = _grow(network, ends)
    path = np.zeros((count + 1, width), dtype=complex)
    for node in trees.order:
        path[node] = path[trees.above[node]] + trees.z[node]
    if trees.ties:
        path = path - _closed(network, trees, ends)
    found = np.full((count, width), complex(np.inf, 0.0))
    rows = np.array(trees.order, dtype=np.intp)
    found[rows] = path[rows] / np.abs(trees.gain[rows, None]) ** 2
    return found


def _grow(network: Sequence, ends: dict[int, tuple[int, int]]) -> _Trees:
    count, first = network.node_count, network.earth_node.size
    feeder: dict[int, int] = {}
    spanning(neighbours(ends), [count], feeder)
    above = np.full(count + 1, -1, dtype=np.intp)
    gain = np.ones(count + 1, dtype=complex)
    z = np.zeros((count + 1, network.branch_z.shape[-1]), dtype=complex)
    order = list(feeder)[1:]
    for node in order:
        row = feeder[node]
        one, two = ends[row]
        above[node] = parent = one if node == two else two
        if row < first:
            z[node] = network.earth_z[row]
            continue
        ratio = network.branch_ratio[row - first]
        gain[node] = gain[parent] * (ratio if node == two else 1 / ratio)
        z[node] = network.branch_z[row - first] * abs(gain[two]) ** 2
    tied = sorted(ends.keys() - feeder.values())
    return _Trees(order, above, gain, z, [row for row in tied if ends[row][1] in feeder])


def _closed(network: Sequence, trees: _Trees, ends: dict[int, tuple[int, int]]) -> Complex:
    """(node + 1, B) what the branches outside the trees take off."""
    first, ties = network.earth_node.size, trees.ties
    shape = (network.node_count + 1, len(ties))
    open_volts, on_way = np.zeros(shape, dtype=complex), np.zeros(shape, dtype=complex)
    for tie, row in enumerate(ties):
        one, two = ends[row]
        ratio = network.branch_ratio[row - first] if row >= first else 1.0
        for node, volts in ((one, 1 / (ratio * trees.gain[one])), (two, -1 / trees.gain[two])):
            open_volts[node, tie] += volts
            while node != network.node_count:
                on_way[node, tie] += volts
                node = int(trees.above[node])
    open_volts[network.node_count] = 0
    own = np.concatenate((network.earth_z, network.branch_z))[ties]
    left, right = _along(trees, on_way), _along(trees, on_way.conj())
    loops = np.einsum("na,nbw->wab", open_volts, right)
    loops += np.einsum("aw,ab->wab", own, np.eye(len(ties)))
    return np.einsum("naw,wab,nbw->nw", right, _inverse(loops), left, optimize=True)


def _along(trees: _Trees, current: Complex) -> Complex:
    """(node + 1, tie, B) volts along the trees of the current in each edge."""
    volts = np.zeros((*current.shape, trees.z.shape[-1]), dtype=complex)
    for node in trees.order:
        volts[node] = volts[trees.above[node]] + current[node, :, None] * trees.z[node]
    return volts


def _inverse(loops: Complex) -> Complex:
    """(B, tie, tie) inverse, in which loops that say the same twice count once."""
    size = np.sqrt(np.abs(np.einsum("waa->wa", loops)))
    size = np.where(size == 0, 1.0, size)
    scale = size[:, :, None] * size[:, None, :]
    return np.asarray(np.linalg.pinv(loops / scale, rcond=SAME) / scale)
