"""Several conductors: which of them each element has, how loads hang between them, where they are earthed.

Three phases and the neutral stand in slots 0 to 3 of every array; volts are to earth. A transformer to 400 V
with its star point earthed, a cable with a neutral of its own, and phase a loaded most:

>>> import numpy as np
>>> from solver import Network, line, solve
>>> from solver.windings import Winding, stacked, three_phase
>>> z = 0.02 + 0.06j
>>> unit = three_phase(Winding("D"), Winding("Y", True, 0.0), 11, 11e3, 400, z)
>>> phases = 11e3 / 3**0.5 * np.exp(-2j * np.pi / 3 * np.arange(3))
>>> network = Network(
...     node_count=3,
...     conductors=4,
...     source_node=np.array([0]),
...     source_voltage=np.append(phases, 0)[None, :, None],
...     line_from=np.array([1]),
...     line_to=np.array([2]),
...     line_z=line.four_wire(0.064 + 0.015j, 0.064 + 0.015j)[None, ..., None],
...     line_y=np.zeros((1, 4, 4, 1), complex),
...     transformer_from=np.array([0]),
...     transformer_to=np.array([1]),
...     transformer_ratio=np.full((1, 1), 27.5 * np.exp(11j * np.pi / 6)),
...     transformer_z=np.full((1, 1), z),
...     transformer_y=np.zeros((1, 2, 1), complex),
...     load_node=np.array([2]),
...     load_power=np.array([8e3, 2e3, 2e3, 0]).reshape(1, 4, 1) + 0j,
...     load_reference=np.full((1, 4, 1), 230.0),
...     load_mix=np.array([[1.0, 0.0, 0.0]]),
...     shunt_node=np.array([], int),
...     shunt_y=np.zeros((0, 4, 4, 1), complex),
...     wires=Wires(
...         line_has=np.ones((1, 4), bool),
...         source_has=np.ones((1, 4), bool),
...         load_to=np.array([[3, 3, 3, -1]]),
...         earth_node=np.array([], int),
...         earth_conductor=np.array([], int),
...         earth_z=np.zeros((0, 1), complex),
...         units=stacked([unit]),
...     ),
... )
>>> volts = solve(network).voltage[2, :, 0]
>>> print(np.round(abs(volts[:3] - volts[3]), 1), "V, the neutral at", round(abs(volts[3]), 1), "V")
[226.2 231.4 230.7] V, the neutral at 1.7 V
"""

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
    star : (transformer, 2) complex [ohm], in series and own_z, from the star point of each winding to earth
        where no neutral is led out; 0 where there is none
    """

    gain: Complex
    series: Complex
    iron: Complex
    has: Flag
    loose: Real
    own: Real
    own_z: Complex
    star: Complex


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
            "star": pair,
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
