"""Which places the ties join, conductor by conductor, and through what impedance."""

from dataclasses import dataclass, replace

import numpy as np

from solver.arrays import Complex, Flag, Index, Real
from solver.forest import Forest
from solver.network import Network
from solver.wires import Wires


@dataclass(frozen=True, slots=True)
class Joints:
    """Unknown currents of ties. Each is drawn at its places by their weights, so that Cᵀ V = z x.

    place : (entry,)
    conductor : (entry,)
    column : (entry,) which unknown current
    weight : (entry,) float, +1 where the current leaves the network, -1 where it comes back
    z : (tie current, batch or 1) complex [ohm]
    earth : (earth,) tie current of each electrode, -1 where it is dead
    own : (transformer, 2) tie currents that its fed side draws alone, -1 where there is none
    """

    place: Index
    conductor: Index
    column: Index
    weight: Real
    z: Complex
    earth: Index
    own: Index

    def take(self, points: Index) -> "Joints":
        """The same with some operating points only."""
        return self if self.z.shape[-1] == 1 else replace(self, z=self.z.take(points, axis=-1))


Entry = tuple[int, int, float]  # place, conductor, weight


def joints_of(network: Network, forest: Forest, by: Flag | None) -> Joints | None:
    """All ties of a network: cut ends, electrodes, currents that transformers draw of their own.

    network : Network
    forest : Forest, of that network
    by : (live, k) bool, conductors through which each place is fed; None where all are
    Returns : Joints, None where there is none
    """
    wires = network.wires
    columns: list[tuple[list[Entry], Complex]] = _closing(network, forest, by)
    earth = np.full(0 if wires is None else wires.earth_node.size, -1)
    own = np.full((network.transformer_from.size, 2), -1)
    if wires is not None:
        for row in np.flatnonzero(forest.place[wires.earth_node] >= 0).tolist():
            earth[row] = len(columns)
            held = int(forest.place[wires.earth_node[row]]), int(wires.earth_conductor[row])
            columns.append(([(*held, 1.0)], wires.earth_z[row]))
        _add_own(wires, forest, own, columns)
    if not columns:
        return None
    entries = [(*entry, column) for column, (found, _) in enumerate(columns) for entry in found]
    place, conductor, weight, column = (np.array([e[i] for e in entries]) for i in range(4))
    width = max(z.shape[-1] for _, z in columns)
    z = np.array([np.broadcast_to(z, width) for _, z in columns], dtype=np.complex128)
    return Joints(place, conductor, column, weight.astype(float), z, earth, own)


def _closing(network: Network, forest: Forest, by: Flag | None) -> list[tuple[list[Entry], Complex]]:
    """Each conductor of a cut end joins the node it was cut from.

    Where both neutrals are held at earth without impedance, how they share is not determined by volts: there
    the neutral of each transformer brings back what its phases take out, as star points on one bar do.
    """
    if not forest.tie_place.size:
        return []
    k, nothing = network.conductors, np.zeros(1, dtype=np.complex128)
    has = np.ones((forest.order.size, k), dtype=bool) if by is None else by
    stiff = _stiff(network.wires, forest)
    columns: list[tuple[list[Entry], Complex]] = []
    for cut, whole in zip(forest.tie_place.tolist(), forest.place[forest.tie_node].tolist(), strict=True):
        conductors = np.flatnonzero(has[cut]).tolist()
        back: list[Entry] = []
        if cut in stiff and whole in stiff and k - 1 in conductors:
            conductors.remove(k - 1)
            back = [(cut, k - 1, -1.0), (whole, k - 1, 1.0)]
        columns += [([(cut, i, 1.0), (whole, i, -1.0), *back], nothing) for i in conductors]
    return columns


def _stiff(wires: Wires | None, forest: Forest) -> set[int]:
    """Roots of zones whose neutral is the star point of their transformer, earthed without impedance."""
    if wires is None:
        return set()
    supplied = int(forest.depth_zone[1])
    rows = forest.zone_transformer[supplied:]
    side = (forest.transformer_way[rows] < 0).astype(int)
    units = wires.units
    held = ~units.loose[rows, side, 0].any(axis=-1) & (units.series[rows, side, -1, -1] == 0).all(axis=-1)
    held &= units.has[rows, 1 - side, -1]
    return set(forest.zone_start[supplied:-1][held].tolist())


def _add_own(wires: Wires, forest: Forest, own: Index, columns: list[tuple[list[Entry], Complex]]) -> None:
    supplied = int(forest.depth_zone[1])
    rows, fed = forest.zone_transformer[supplied:], forest.zone_fed[supplied:]
    side = (forest.transformer_way[rows] < 0).astype(int)
    how = wires.units.own[rows, side]
    for zone, which in zip(*(part.tolist() for part in np.nonzero(how.any(axis=-1))), strict=True):
        weights, place = how[zone, which], int(fed[zone])
        own[rows[zone], which] = len(columns)
        entries = [(place, int(i), float(weights[i])) for i in np.flatnonzero(weights)]
        columns.append((entries, wires.units.own_z[rows[zone], side[zone], which]))
