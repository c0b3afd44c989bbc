"""The impedance that each node sees towards all supplies, rings counted in."""

from dataclasses import replace

import numpy as np
from numpy.typing import ArrayLike

from solver.arrays import Complex
from solver.forest import Forest, grow
from solver.network import Network
from solver.placed import Placed, put
from solver.rounds import Trouble
from solver.sweep import Sweep
from solver.ties import Ties
from solver.trouble import find_trouble


def path_impedance(network: Network) -> Complex:
    """Impedance at every node with all supplies shorted behind their own impedance, and nothing connected.

    Along the trees Z = Σ z, times 1/a² through each transformer; ties take T C (z + Cᵀ T C)⁻¹ Cᵀ T off it.

    network : Network of k = 1; angles of its ratios do not count
    Returns : (node, batch) complex [ohm]; nan at dead nodes
    Raises : ValueError where the network has two supplies on one node, or a round without impedance
    Source : Kron's reduction of the tie currents out of the loop equations
    """
    quiet, forest, placed = _quiet(network)
    seen = np.full((network.node_count, quiet.batch), complex(np.nan, np.nan))
    if not forest.order.size:
        return seen
    z = _along(placed, forest)
    if placed.joints is not None:
        ties = Ties(placed, forest)
        drop = ties.drop[:, 0]
        z = z - np.einsum("ptb,btu,pub->pb", drop, _wide(ties.inverse, drop), drop)
    live = forest.place >= 0
    seen[live] = z[forest.place[live]]
    return seen


def _wide(inverse: Complex, drop: Complex) -> Complex:
    return np.broadcast_to(inverse, (max(len(inverse), drop.shape[-1]), *inverse.shape[1:]))


def _along(placed: Placed, forest: Forest) -> Complex:
    """(live, batch) sum of the impedances from the supply to each place, seen from there."""
    supplied = int(forest.depth_zone[1])
    width = max(placed.z.shape[-1], placed.ratio.shape[-1], placed.series.shape[-1])
    own = np.broadcast_to(placed.z[:, 0, 0], (forest.order.size, width))
    sums = np.zeros((forest.order.size + 1, width), dtype=np.complex128)
    sums[:-1] += own
    np.subtract.at(sums, forest.end, own)
    z = np.cumsum(sums[:-1], axis=0)
    for start, stop in zip(forest.depth_zone[1:-1], forest.depth_zone[2:], strict=True):
        fed = slice(start - supplied, stop - supplied)
        above = z[forest.zone_fed[start:stop]] / placed.ratio[fed, 0] ** 2 + placed.series[fed, 0]
        places = slice(forest.zone_start[start], forest.zone_start[stop])
        z[places] += above[forest.zone[places] - start]
    return z


def transfer_impedance(network: Network, nodes: ArrayLike) -> Complex:
    """Impedances between some nodes with all supplies shorted: volts here for each ampere there.

    network : Network of k = 1 and one operating point; angles of its ratios do not count
    nodes : (chosen,) int, live
    Returns : (chosen, chosen) complex [ohm]
    Raises : ValueError where the network has two supplies on one node, or a round without impedance
    Source : Kron's reduction of the tie currents out of the loop equations
    """
    _, forest, placed = _quiet(network)
    place = forest.place[np.asarray(nodes, dtype=np.intp)]
    sweep = Sweep(replace(placed, root=np.zeros_like(placed.root)), forest, place.size)
    sweep.current[...] = 0
    sweep.current[place, 0, np.arange(place.size)] = 1
    sweep.backward()
    sweep.drops()
    volts = sweep.forward(np.empty_like(sweep.current))
    if placed.joints is not None:
        Ties(placed, forest).correct(volts, volts, None)
    return -volts[place, 0]


def _quiet(network: Network) -> tuple[Network, Forest, Placed]:
    """The network with nothing connected, its trees, and its rows at their places."""
    quiet = replace(
        network,
        transformer_ratio=np.abs(network.transformer_ratio) + 0j,
        transformer_y=np.zeros((network.transformer_from.size, 2, 1), dtype=np.complex128),
        line_y=np.zeros((network.line_from.size, 1, 1, 1), dtype=np.complex128),
    )
    forest = grow(quiet)
    if isinstance(forest, Trouble):
        raise ValueError("two supplies stand on one node")
    placed = put(quiet, forest)
    trouble = find_trouble(quiet, forest, placed)
    if trouble.loops or trouble.joined:
        raise ValueError("a round has no impedance")
    return quiet, forest, placed
