"""The rows of a sequence network as they come, and what feeds it besides."""

from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from app.study.fault_feeders import Feeder
from solver.sequence import Sequence

Complex = NDArray[np.complex128]
EQUIVALENT = 0.4  # frequency at which R/X of a ring is taken, over the system's: 20 of 50 Hz, IEC 60909-0 8.1


@dataclass(slots=True)
class Ways:
    """The rows of one sequence network as they come."""

    width: int
    ends: list[tuple[int, int]] = field(default_factory=list)
    z: list[Complex] = field(default_factory=list)
    ratio: list[complex] = field(default_factory=list)
    earth_node: list[int] = field(default_factory=list)
    earth_z: list[Complex] = field(default_factory=list)

    def branch(self, ends: tuple[int, int], z: Complex, ratio: complex = 1.0) -> None:
        self.ends.append(ends)
        self.z.append(z)
        self.ratio.append(ratio)

    def earth(self, node: int, z: Complex) -> None:
        self.earth_node.append(node)
        self.earth_z.append(z)

    def network(self, nodes: int) -> Sequence:
        ends = np.array(self.ends, dtype=np.intp).reshape(-1, 2)
        return Sequence(
            node_count=nodes,
            branch_from=ends[:, 0],
            branch_to=ends[:, 1],
            branch_z=np.array(self.z, dtype=complex).reshape(-1, self.width),
            branch_ratio=np.array(self.ratio, dtype=complex),
            earth_node=np.array(self.earth_node, dtype=np.intp),
            earth_z=np.array(self.earth_z, dtype=complex).reshape(-1, self.width),
        )


def with_feeders(one: Sequence, also: list[Feeder]) -> Sequence:
    """The network with more ways that feed it.

    one : Sequence, columns: highest currents, least currents, highest at the equivalent frequency
    also : what feeds it

    Returns : Sequence
    """
    nodes = np.array([feeder.node for feeder in also], dtype=np.intp)
    z = np.array([with_equivalent(np.full(3, feeder.z)) for feeder in also])
    return replace(one, earth_node=np.append(one.earth_node, nodes), earth_z=np.concatenate((one.earth_z, z)))


def with_equivalent(z: Complex) -> Complex:
    """The last column at the equivalent frequency.

    z : (3,) complex [ohm]

    Returns : (3,) complex [ohm]
    """
    made = z.copy()
    made[2] = complex(z[2].real, z[2].imag * EQUIVALENT)
    return made
