"""Generators that hold the volts of their nodes, as far as their reactive power goes."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike

from solver.arrays import Complex, Flag, Real
from solver.forest import Forest
from solver.network import Network
from solver.path import transfer_impedance
from solver.share import pick
from solver.solution import Solution
from solver.solving import solve

ROUNDS = 60  # corrections of reactive power
NEAR = 1e-10  # of the setting, to which volts are held


@dataclass(frozen=True, slots=True)
class Holding:
    """A generator that holds the volts of its node with what reactive power it has.

    load : row of a network of k = 1, whose load_power is its negative output
    setting : (batch or 1,) float [V]
    lowest : [VA] least reactive power made, negative where it takes some
    highest : [VA] most
    """

    load: int
    setting: ArrayLike
    lowest: float
    highest: float


@dataclass(frozen=True, slots=True)
class Held:
    """What the generators came to.

    solution : Solution
    reactive : (generator, batch) float [VA] made
    holds : (generator, batch) bool, whether it holds its setting; else it is at a limit
    """

    solution: Solution
    reactive: Real
    holds: Flag


def hold(
    network: Network, forest: Forest, generators: Sequence[Holding], warm: Complex | None = None
) -> Held:
    """Solves a network whose generators make the reactive power that holds their volts.

    ΔQ = |V| · X⁻¹ · (setting - |V|), with X the reactances that their nodes see, for those within limits

    network : Network; k = 1 where there are generators
    forest : Forest, of that network
    generators : each a Holding
    warm : (node, k, batch) complex [V] first guess, or None
    Returns : Held
    Source : common practice, no source
    """
    width = max(network.batch, *(np.size(g.setting) for g in generators), 1)
    if not generators:
        nothing = np.zeros((0, width))
        return Held(solve(network, forest=forest, warm=warm), nothing, nothing > 0)
    rows = np.array([g.load for g in generators])
    nodes = network.load_node[rows]
    setting = np.array([np.broadcast_to(np.asarray(g.setting, dtype=float), width) for g in generators])
    low, high = (np.array([[getattr(g, n)] for g in generators]) for n in ("lowest", "highest"))
    seen = transfer_impedance(pick(network, np.array([0])), nodes).imag
    made = np.clip(np.zeros((rows.size, width)), low, high)
    for _ in range(ROUNDS):
        solution = solve(_making(network, rows, made), forest=forest, warm=warm)
        warm = solution.voltage
        size = np.abs(warm[nodes, 0])
        lacks = setting - size
        free = ~((made <= low) & (lacks < 0)) & ~((made >= high) & (lacks > 0)) & np.isfinite(size)
        if not (free & (np.abs(lacks) > NEAR * setting)).any():
            break
        made = np.clip(made + _steps(seen, free, np.where(free, size * lacks, 0.0)), low, high)
    return Held(solution, made, free)


def _making(network: Network, rows: Real, made: Real) -> Network:
    width = made.shape[-1]
    power = np.broadcast_to(network.load_power, (*network.load_power.shape[:-1], width)).copy()
    power[rows, 0] = power[rows, 0].real - 1j * made
    return replace(network, load_power=power)


def _steps(seen: Real, free: Flag, asked: Real) -> Real:
    """(generator, batch) corrections of those that are free to move."""
    both = free.T[:, :, None] & free.T[:, None, :]
    matrix = np.where(both, seen, np.eye(len(seen)))
    return np.asarray(np.linalg.solve(matrix, asked.T[..., None])[..., 0].T)
