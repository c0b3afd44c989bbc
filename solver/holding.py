"""Generators that hold the volts of their nodes, as far as their reactive power goes."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike

from solver.arrays import Complex, Flag, Index, Real
from solver.forest import Forest
from solver.network import Network
from solver.path import transfer_impedance
from solver.share import pick
from solver.solution import Solution
from solver.solving import solve
from solver.windings import NEUTRAL
from solver.wires import EARTH

ROUNDS = 60  # corrections of reactive power
NEAR = 1e-10  # of the setting, to which volts are held
NUDGE = 1e-4  # of V² in ohm, by which the reactance is felt


@dataclass(frozen=True, slots=True)
class Holding:
    """A generator that holds the volts of its node with what reactive power it has.

    With four conductors it holds the mean of the volts across its slots, as its load_to has them: phase to
    neutral, or from phase to phase. All of them make the same reactive power.

    load : row of the network, whose load_power is its negative output
    setting : (batch or 1,) float [V]
    lowest : [VA] least reactive power made, of all conductors; negative where it takes some
    highest : [VA] most
    slots : conductors of a machine among four, (0, 1, 2) or one of them; those with output where None
    on : (batch or 1,) bool, false where it stands still and makes no reactive power
    """

    load: int
    setting: ArrayLike
    lowest: float
    highest: float
    slots: tuple[int, ...] | None = None
    on: ArrayLike = True


@dataclass(frozen=True, slots=True)
class Held:
    """What the generators came to.

    solution : Solution
    reactive : (generator, batch) float [VA] made
    holds : (generator, batch) bool, whether it holds its setting; else it is at a limit, or stands still
    """

    solution: Solution
    reactive: Real
    holds: Flag


def hold(
    network: Network, forest: Forest, generators: Sequence[Holding], warm: Complex | None = None
) -> Held:
    """Solves a network whose generators make the reactive power that holds their volts.

    ΔQ = |V| · X⁻¹ · (setting - |V|), with X the reactances that their nodes see, for those within limits

    network : Network
    forest : Forest, of that network
    generators : each a Holding
    warm : (node, k, batch) complex [V] first guess, or None
    Returns : Held
    Source : common practice, no source
    """
    width = max(network.batch, *(max(np.size(g.setting), np.size(g.on)) for g in generators), 1)
    if not generators:
        nothing = np.zeros((0, width))
        return Held(solve(network, forest=forest, warm=warm), nothing, nothing > 0)
    rows = np.array([g.load for g in generators])
    share = _shares(network, generators)
    setting = np.array([np.broadcast_to(np.asarray(g.setting, dtype=float), width) for g in generators])
    on = np.array([np.broadcast_to(np.asarray(g.on, dtype=bool), width) for g in generators])
    low, high = (
        np.where(on, np.array([[getattr(g, n)] for g in generators]), 0.0) for n in ("lowest", "highest")
    )
    seen = _seen(network, forest, rows, share, setting[:, :1])
    made = np.clip(np.zeros((rows.size, width)), low, high)
    for _ in range(ROUNDS):
        solution = solve(_making(network, rows, share, made), forest=forest, warm=warm)
        warm = solution.voltage
        size = _volts(network, rows, share, warm)
        lacks = setting - size
        free = on & ~((made <= low) & (lacks < 0)) & ~((made >= high) & (lacks > 0)) & np.isfinite(size)
        if not (free & (np.abs(lacks) > NEAR * setting)).any():
            break
        made = np.clip(made + _steps(seen, free, np.where(free, size * lacks, 0.0)), low, high)
    return Held(solution, made, free)


def _shares(network: Network, generators: Sequence[Holding]) -> Real:
    """(generator, k) share of each slot in the reactive power made."""
    share = np.zeros((len(generators), network.conductors))
    for row, generator in zip(share, generators, strict=True):
        used = network.load_power[generator.load].any(axis=-1)
        row[np.flatnonzero(used) if generator.slots is None else list(generator.slots)] = 1
        if not row.any():
            row[: 1 if network.wires is None else NEUTRAL] = 1
    return share / share.sum(axis=1, keepdims=True)


def _volts(network: Network, rows: Index, share: Real, voltage: Complex) -> Real:
    """(generator, batch) volts that each measures."""
    at = voltage[network.load_node[rows]]
    if network.wires is not None:
        to = network.wires.load_to[rows][..., None]
        far = np.take_along_axis(at, np.maximum(to, 0), axis=1)
        at = at - np.where(to == EARTH, 0, far)
    return np.asarray((np.abs(at) * share[..., None]).sum(axis=1, where=share[..., None] > 0))


def _seen(network: Network, forest: Forest, rows: Index, share: Real, setting: Real) -> Real:
    """(generator, generator) reactances X of V ΔV = X ΔQ; of four wires felt with nothing else connected."""
    one = pick(network, np.array([0]))
    if network.wires is None:
        return np.asarray(transfer_impedance(one, network.load_node[rows]).imag)
    nudge = NUDGE * setting[:, 0] ** 2
    made = np.concatenate((np.zeros((rows.size, 1)), np.diag(nudge)), axis=1)
    idle = replace(one, load_power=np.zeros_like(one.load_power))
    felt = _volts(network, rows, share, solve(_making(idle, rows, share, made), forest=forest).voltage)
    return felt[:, :1] * (felt[:, 1:] - felt[:, :1]) / nudge


def _making(network: Network, rows: Index, share: Real, made: Real) -> Network:
    width = made.shape[-1]
    power = np.broadcast_to(network.load_power, (*network.load_power.shape[:-1], width)).copy()
    used = share[..., None] > 0
    power[rows] = np.where(used, power[rows].real - 1j * share[..., None] * made[:, None], power[rows])
    return replace(network, load_power=power)


def _steps(seen: Real, free: Flag, asked: Real) -> Real:
    """(generator, batch) corrections of those that are free to move."""
    both = free.T[:, :, None] & free.T[:, None, :]
    matrix = np.where(both, seen, np.eye(len(seen)))
    return np.asarray(np.linalg.solve(matrix, asked.T[..., None])[..., 0].T)
