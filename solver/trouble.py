"""The rounds of a meshed network by name, and those among them that have no solution."""

from collections.abc import Iterable, Mapping

import numpy as np

from solver.forest import Forest
from solver.network import Complex, Flag, Network
from solver.placed import Placed, no_load_phasor
from solver.reached import unfed_loads
from solver.rounds import Joined, Loop, Trouble, branch_ends, neighbours, round_of, spanning

MOST = 200  # rounds that are worth listing
CLOCK = np.pi / 6  # the angle of one hour of a clock number


def rounds(network: Network, forest: Forest, ties: Iterable[int] | None = None) -> tuple[Loop | Joined, ...]:
    """What the round of each tie runs through.

    network : Network
    forest : Forest, of that network
    ties : rows of the ties of the forest, all of them where it is None
    Returns : a Loop for each tie that closes a loop, a Joined where it joins two supplies
    Source : see solver.rounds
    """
    lines, ends = network.line_from.size, dict(enumerate(branch_ends(network)))
    above = forest.zone_transformer[forest.zone]
    by = np.where(forest.feeder >= 0, forest.feeder, np.where(above >= 0, above + lines, -1))
    feeder = {node: int(by[place]) for node, place in enumerate(forest.place.tolist()) if place >= 0}
    chosen = range(forest.tie_place.size) if ties is None else ties
    found = (round_of(int(forest.tie_branch[tie]), ends, feeder) for tie in chosen)
    supply = _supplies(network)
    return tuple(_named(*r, supply, lines) for r in found)


def find_trouble(network: Network, forest: Forest, placed: Placed) -> Trouble:
    """What makes a network impossible to solve.

    network : Network
    forest : Forest, of that network
    placed : Placed, of both
    Returns : Trouble, empty where it can be solved
    Source : common practice, no source
    """
    unfed = tuple(unfed_loads(network, forest, placed).tolist())
    if not forest.tie_place.size:
        return Trouble(unfed=unfed)
    bare = _bare_rounds(network)
    return Trouble(
        tuple(r for r in bare if isinstance(r, Loop)),
        tuple(r for r in bare if isinstance(r, Joined)),
        _turned(network, forest, placed),
        unfed,
    )


def _bare_rounds(network: Network) -> list[Loop | Joined]:
    """Rounds through nothing but branches that have no impedance in some operating point."""
    bare = np.flatnonzero(np.concatenate((_bare(network.line_z), _bare(network.transformer_z))))
    first = np.concatenate((network.line_from, network.transformer_from))[bare].tolist()
    second = np.concatenate((network.line_to, network.transformer_to))[bare].tolist()
    ends = dict(zip(bare.tolist(), zip(first, second, strict=True), strict=True))
    near, supply = neighbours(ends), _supplies(network)
    if network.source_z is not None:
        stiff = _bare(network.source_z)
        supply = {node: row for node, row in supply.items() if stiff[row]}
    feeder: dict[int, int] = {}
    spanning(near, supply, feeder)
    for node in near:
        spanning(near, [node], feeder)
    closing = sorted(ends.keys() - feeder.values())[:MOST]
    found = (round_of(row, ends, feeder) for row in closing)
    return [_named(*r, supply, network.line_from.size) for r in found]


def _bare(z: Complex) -> Flag:
    return np.asarray((z == 0).all(axis=tuple(range(1, z.ndim - 1))).any(axis=-1))


def _supplies(network: Network) -> dict[int, int]:
    return dict(zip(network.source_node.tolist(), range(network.source_node.size), strict=True))


def _named(one: int, other: int, way: list[int], supply: Mapping[int, int], lines: int) -> Loop | Joined:
    rows = tuple(b for b in way if b < lines), tuple(b - lines for b in way if b >= lines)
    if one == other:
        return Loop(*rows)
    return Joined((supply[one], supply[other]), *rows)


def _turned(network: Network, forest: Forest, placed: Placed) -> tuple[Loop | Joined, ...]:
    """Rounds on which the no-load volts come back turned by an hour or more."""
    phasor = no_load_phasor(forest, placed)
    one, other = forest.zone[forest.tie_place], forest.zone[forest.place[forest.tie_node]]
    angle = np.abs(np.angle(phasor[one] * np.conj(phasor[other]))).max(axis=-1)
    wrong = np.flatnonzero(np.rint(angle / CLOCK))
    return rounds(network, forest, wrong[:MOST].tolist()) if wrong.size else ()
