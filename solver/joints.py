"""Which places the ties join, conductor by conductor, and through what impedance."""

from dataclasses import dataclass, replace

import numpy as np

from solver.forest import Forest
from solver.network import Complex, Index, Real


@dataclass(frozen=True, slots=True)
class Joints:
    """Unknown currents of ties. Each is drawn at its places by their weights, so that Cᵀ V = z x.

    place : (entry,)
    conductor : (entry,)
    column : (entry,) which unknown current
    weight : (entry,) float, +1 where the current leaves the network, -1 where it comes back
    z : (tie current, batch or 1) complex [ohm]
    """

    place: Index
    conductor: Index
    column: Index
    weight: Real
    z: Complex

    def take(self, points: Index) -> "Joints":
        """The same with some operating points only."""
        return self if self.z.shape[-1] == 1 else replace(self, z=self.z.take(points, axis=-1))


def closing(forest: Forest, conductors: int) -> Joints | None:
    """The ties that close rounds: each conductor of a cut end joins the node it was cut from.

    forest : Forest
    conductors : k
    Returns : Joints, None where no round is closed
    """
    count = forest.tie_place.size * conductors
    if not count:
        return None
    place = np.concatenate((forest.tie_place, forest.place[forest.tie_node])).repeat(conductors)
    return Joints(
        place=place,
        conductor=np.tile(np.arange(conductors), place.size // conductors),
        column=np.tile(np.arange(count), 2),
        weight=np.repeat((1.0, -1.0), count),
        z=np.zeros((count, 1), dtype=np.complex128),
    )
