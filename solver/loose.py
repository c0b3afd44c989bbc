"""What nothing holds: a side without earth, a lost neutral. Its volts follow from what is connected."""

from dataclasses import dataclass

import numpy as np

from solver.arrays import Complex, Flag, Index, Real
from solver.forest import Forest
from solver.network import Network
from solver.wires import Wires


@dataclass(frozen=True, slots=True)
class Loose:
    """Directions in which a place and all that it feeds may move, so that no current enters that way.

    place : (loose,)
    way : (loose, k) float, conductors that move together
    """

    place: Index
    way: Real

    def along(self, values: Complex) -> Complex:
        """(loose, batch) the part of (live, k, batch) values along each direction."""
        return np.einsum("fk,fkb->fb", self.way, values[self.place])


def conductors(network: Network, wires: Wires, forest: Forest) -> tuple[Flag, Flag]:
    """Which conductors reach each place, and which lead on from it.

    network : Network
    wires : Wires, of that network
    forest : Forest, of that network
    Returns : (live, k) bool twice: those of what feeds the place, through which they come; those of all
        lines and windings that meet there
    """
    by = np.zeros((forest.order.size, network.conductors), dtype=bool)
    is_line = forest.feeder >= 0
    by[is_line] = wires.line_has[forest.feeder[is_line]]
    supplied = int(forest.depth_zone[1])
    by[forest.zone_start[:supplied]] = wires.source_has[forest.zone_source[:supplied]]
    rows = forest.zone_transformer[supplied:]
    far = (forest.transformer_way[rows] > 0).astype(int)
    by[forest.zone_start[supplied:-1]] = wires.units.has[rows, far]
    meet = np.zeros((network.node_count, network.conductors), dtype=bool)
    for ends, has in (
        (network.line_from, wires.line_has),
        (network.line_to, wires.line_has),
        (network.transformer_from, wires.units.has[:, 0]),
        (network.transformer_to, wires.units.has[:, 1]),
    ):
        for conductor, some in enumerate(has.T):
            meet[ends[some], conductor] = True
    here = meet[forest.order]
    here[forest.tie_place] = by[forest.tie_place]
    return by, here


def find_loose(wires: Wires, forest: Forest, by: Flag, here: Flag) -> Loose | None:
    """Where a side has no reference, where a star has no balance, where a conductor begins out of nothing.

    wires : Wires
    forest : Forest
    by : (live, k) bool, conductors through which each place is fed
    here : (live, k) bool, conductors that meet there
    Returns : Loose, None where everything is held
    """
    supplied, k = int(forest.depth_zone[1]), by.shape[1]
    rows = forest.zone_transformer[supplied:]
    fed = (forest.transformer_way[rows] < 0).astype(int)
    sides = wires.units.loose[rows, fed]
    zone, which = np.nonzero(sides.any(axis=-1))
    lost, conductor = np.nonzero(here & ~by)
    if not zone.size + lost.size:
        return None
    return Loose(
        place=np.concatenate((forest.zone_start[supplied:-1][zone], lost)),
        way=np.concatenate((sides[zone, which], np.eye(k)[conductor])),
    )
