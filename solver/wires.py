"""Several conductors: which of them each element has, how loads hang between them, where they are earthed."""

from dataclasses import dataclass, fields, replace
from typing import Any

from numpy.typing import NDArray

from solver.arrays import Complex, Flag, Index, Real

EARTH = -1


@dataclass(frozen=True, slots=True)
class Units:
    """Transformers as two-ports, first as they are fed from winding 1, then as fed from winding 2.

    The far side gets V' = A V - Z I', the fed side is drawn I = Aᵀ I'. What this leaves open stands beside:
    directions in which the far side has no reference, and currents that the fed side draws alone.

    gain : (transformer, 2, k, k, B or 1) complex, A
    series : (transformer, 2, k, k, B or 1) complex [ohm], Z
    iron : (transformer, 2, k, k, B or 1) complex [S] at the terminals of each winding
    has : (transformer, 2, k) bool, conductors at each winding
    loose : (transformer, 2, 2, k) float, directions of the far side in which no current can flow, so that its
        volts that way follow from what is connected; 0 where there is none
    own : (transformer, 2, 2, k) float, how the fed side draws each current of its own: the zero sequence of
        an earthed star beside a delta, an earthed neutral; 0 where there is none
    own_z : (transformer, 2, 2, B or 1) complex [ohm] of those
    """

    gain: Complex
    series: Complex
    iron: Complex
    has: Flag
    loose: Real
    own: Real
    own_z: Complex


@dataclass(frozen=True, slots=True)
class Wires:
    """What a network with more than one conductor holds beyond the rows of `Network`.

    line_has : (line, k) bool, conductors of each line
    source_has : (source, k) bool, conductors of each supply
    load_to : (load, k) int, the conductor to which the load in each slot goes from its own; -1 to earth.
        Star: the neutral; delta: the next phase
    earth_node : (earth,) nodes with an electrode
    earth_conductor : (earth,) the conductor it holds
    earth_z : (earth, B or 1) complex [ohm] of the electrode
    units : Units
    """

    line_has: Flag
    source_has: Flag
    load_to: Index
    earth_node: Index
    earth_conductor: Index
    earth_z: Complex
    units: Units

    @property
    def batch(self) -> int:
        """Number of operating points: the longest last axis."""
        return max(self.earth_z.shape[-1], *(getattr(self.units, name).shape[-1] for name in WIDE))

    def take(self, points: Index) -> "Wires":
        """The same with some operating points only."""
        wide = {name: _picked(getattr(self.units, name), points) for name in WIDE}
        return replace(self, earth_z=_picked(self.earth_z, points), units=replace(self.units, **wide))

    def check(self, k: int, rows: dict[str, int], batch: int) -> None:
        """Holds every array against its shape.

        k : conductors
        rows : number of lines, sources, loads and transformers
        batch : operating points
        Raises : ValueError that names the array
        """
        earths, units = self.earth_node.size, rows["transformer"]
        pair, square = (units, 2), (units, 2, k, k)
        wanted: dict[str, tuple[int, ...]] = {
            "line_has": (rows["line"], k),
            "source_has": (rows["source"], k),
            "load_to": (rows["load"], k),
            "earth_conductor": (earths,),
            "earth_z": (earths,),
            "gain": square,
            "series": square,
            "iron": square,
            "has": (*pair, k),
            "loose": (*pair, 2, k),
            "own": (*pair, 2, k),
            "own_z": (*pair, 2),
        }
        for name, shape in wanted.items():
            array = getattr(self if name in OWN else self.units, name)
            found = array.shape[:-1] if name in (*WIDE, "earth_z") else array.shape
            if found != shape or (name in (*WIDE, "earth_z") and array.shape[-1] not in (1, batch)):
                raise ValueError(f"{name} has shape {array.shape}, not {shape}")
        if self.load_to.size and not (self.load_to.min() >= EARTH and self.load_to.max() < k):
            raise ValueError(f"load_to names a conductor outside -1 to {k - 1}")


WIDE = ("gain", "series", "iron", "own_z")
OWN = tuple(f.name for f in fields(Wires))


def _picked(array: NDArray[Any], points: Index) -> NDArray[Any]:
    return array if array.shape[-1] == 1 else array.take(points, axis=-1)
