"""What a current drawn at one node does to the volts of others, rings counted in."""

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
