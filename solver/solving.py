"""From a network to its solution: trees, sweeps, then every branch and load from the settled voltages."""

import numpy as np

from solver.answer import answer, unsolved
from solver.forest import Forest, grow
from solver.network import Complex, Network
from solver.placed import Placed, put
from solver.rounds import Trouble
from solver.settle import settle
from solver.solution import Solution
from solver.status import Status
from solver.sweep import times
from solver.trouble import find_trouble

OPEN = 1e-6  # closure from which an answer is none


def solve(
    network: Network, *, forest: Forest | Trouble | None = None, warm: Complex | None = None
) -> Solution:
    """Solves every operating point of a network: trees, and any number of rounds over them.

    network : Network
    forest : Forest or Trouble of a network with the same connections, where it is known already
    warm : (node, k, batch) complex [V] first guess; no-load voltages where it is None or not finite
    Returns : Solution; status NO_OPERATING_POINT where the loads ask more than the layout can carry,
        NOT_SETTLED where the sweeps still moved or the closure is worse than 1e-6, INVALID where nothing is
        supplied, or where the forest is Trouble: a loop has no impedance at all, supplies are joined
        through none, or the transformers of a round turn the phases
    Raises : ValueError for arrays that do not fit together, a programmer's mistake
    Source : see solver.sweep
    """
    network.check()
    forest = grow(network) if forest is None else forest
    width = network.batch
    if isinstance(forest, Trouble) or not forest.order.size:
        return unsolved(network, forest, width)
    placed = put(network, forest)
    if trouble := find_trouble(network, forest, placed):
        return unsolved(network, trouble, width)
    start = no_load(placed, forest, network.conductors, width)
    if warm is not None:
        guess = np.broadcast_to(warm[forest.order], start.shape)
        start = np.where(np.isfinite(guess), guess, start)
    settled = settle(placed, forest, start)
    found = settled.voltage, settled.status, settled.iterations, settled.tied
    solution = answer(network, forest, placed, *found)
    if not (loose := solution.closure > OPEN).any():
        return solution
    status = tuple(Status.NOT_SETTLED if x else s for s, x in zip(settled.status, loose, strict=True))
    voltage = np.where(loose, complex(np.nan, np.nan), settled.voltage)
    return answer(network, forest, placed, voltage, status, settled.iterations, settled.tied)


def no_load(placed: Placed, forest: Forest, k: int, width: int) -> Complex:
    """Voltage of every place with nothing connected: the supply's, divided by every ratio on the way.

    placed : Placed
    forest : Forest
    k : conductors
    width : number of operating points
    Returns : (live, k, batch) complex [V]
    """
    supplied = placed.root.shape[0]
    zone = np.empty((forest.zone_source.size, k, width), dtype=np.complex128)
    zone[:supplied] = placed.root
    for start, stop in zip(forest.depth_zone[1:-1], forest.depth_zone[2:], strict=True):
        above, fed = zone[forest.zone[forest.zone_fed[start:stop]]], slice(start - supplied, stop - supplied)
        if placed.gain is None:
            zone[start:stop] = above / placed.ratio[fed]
        else:
            zone[start:stop] = times(placed.gain[fed], above)
    return zone[forest.zone]
