"""How much of the load a layout can carry, and which branch sets the limit."""

from dataclasses import dataclass, replace

import numpy as np

from solver.forest import Forest, grow
from solver.network import PHYSICAL, Index, Network, Real
from solver.placed import put
from solver.solution import Solution
from solver.solving import solve
from solver.status import Status
from solver.windings import NEUTRAL

NARROW = 5e-4  # of the share, to which it is found


@dataclass(frozen=True, slots=True)
class Share:
    """The largest load that still solves, and what stands in the way of more.

    share : of the loads as drawn, to 0.1 % or better; infinite where impedances alone draw, or where
        a thousandfold still solves
    line : row of the line to blame, None where it is a transformer or nothing
    transformer : row of the transformer to blame, None where it is a line or nothing
    """

    share: float
    line: int | None
    transformer: int | None


def largest_share(network: Network, point: int = 0) -> Share:
    """Largest share of all demands at one operating point that still has an operating point.

    Every demand (a positive load_power) is scaled alike; generators stay as they are. The gap between the
    last share that solves and the first that does not is halved until it is below 0.05 %. To blame is the
    branch with the largest drop on the way from the supply to the lowest node, percent of no-load voltage,
    at the largest share.

    network : Network
    point : which operating point of its batch
    Returns : Share
    Raises : ValueError where the network has no forest
    Source : common practice, no source
    """
    forest = grow(network)
    if not isinstance(forest, Forest):
        raise ValueError("a layout in trouble has no share")
    one = pick(network, np.array([point]))
    if not one.load_mix[:, :2].any():
        return Share(np.inf, None, None)
    low, high = 0.0, 1.0
    while solve(scaled(one, np.array([high])), forest=forest).status[0] is Status.SOLVED:
        low, high = high, high * 4
        if high > 1e3:
            return Share(np.inf, None, None)
    while high - low > NARROW * high:
        middle = (low + high) / 2
        solved = solve(scaled(one, np.array([middle])), forest=forest).solved
        low, high = (middle, high) if solved else (low, middle)
        if high < 1e-9:
            return Share(0.0, None, None)
    line, transformer = blame(solve(scaled(one, np.array([low])), forest=forest))
    return Share(low, line, transformer)


def pick(network: Network, points: Index) -> Network:
    """The same network at some operating points only.

    network : Network
    points : (chosen,) int
    Returns : Network
    """
    wide = {n: getattr(network, n) for n in PHYSICAL if getattr(network, n).shape[-1] > 1}
    wires = network.wires and network.wires.take(points)
    behind = network.source_z
    if behind is not None and behind.shape[-1] > 1:
        behind = behind[..., points]
    return replace(network, wires=wires, source_z=behind, **{n: a[..., points] for n, a in wide.items()})


def scaled(network: Network, shares: Real) -> Network:
    """The same network at several shares of its demands, one operating point a share.

    network : Network of one operating point
    shares : (batch,) float
    Returns : Network of that batch
    """
    power = network.load_power
    demand = (power.real > 0) | ((power.real == 0) & (power.imag > 0))
    return replace(network, load_power=np.where(demand, power * shares, power))


def blame(solution: Solution, point: int = 0) -> tuple[int | None, int | None]:
    """Branch with the largest drop on the way from the supply to the lowest node.

    solution : Solution
    point : which operating point
    Returns : line row or None, transformer row or None
    Raises : ValueError where the network has no forest
    """
    forest, network = solution.forest, solution.network
    if not isinstance(forest, Forest):
        raise ValueError("a layout in trouble has no share")
    level = put(network, forest).level
    level = level[forest.zone, min(point, level.shape[1] - 1)]
    phases = solution.voltage[forest.order, :, point]
    if network.conductors > 1:  # against the neutral, as loads hang there
        phases = phases[:, :NEUTRAL] - np.nan_to_num(phases[:, NEUTRAL:])
    share = np.where(np.isnan(phases), np.inf, np.abs(phases)).min(axis=1) / level
    place = int(forest.place[forest.order[np.argmin(share)]])
    worst, to_blame = -np.inf, (None, None)  # type: float, tuple[int | None, int | None]
    while (above := int(forest.parent[forest.order[place]])) >= 0:
        drop = float(share[forest.place[above]] - share[place])
        if drop > worst:
            line = int(forest.feeder[place])
            unit = int(forest.zone_transformer[forest.zone[place]])
            worst, to_blame = drop, (line, None) if line >= 0 else (None, unit)
        place = int(forest.place[above])
    return to_blame
