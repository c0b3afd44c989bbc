"""The layout as frozen arrays in SI units: one row an element, one column an operating point."""

from dataclasses import dataclass

import numpy as np

from solver.arrays import Complex as Complex
from solver.arrays import Flag as Flag
from solver.arrays import Index as Index
from solver.arrays import Real as Real
from solver.wires import Wires


@dataclass(frozen=True, slots=True)
class Network:
    """Everything the sweep needs, per conductor; B operating points side by side.

    A balanced three-phase layout has k = 1: volts are phase to neutral, powers are per phase,
    impedances are per phase. A two-wire layout has k = 1 as well: volts are between the two
    wires, powers are whole, impedances count out and back. The last axis of every physical
    array is the batch; length 1 there means the same in every operating point.

    node_count : number of nodes
    conductors : k
    source_node : (source,) node held by each supply
    source_voltage : (source, k, B or 1) complex [V]
    line_from, line_to : (line,) nodes; a closed switch is a line of zero impedance
    line_z : (line, k, k, B or 1) complex [ohm], whole length, parallel runs merged
    line_y : (line, k, k, B or 1) complex [S], whole shunt admittance, half put at each end
    transformer_from, transformer_to : (transformer,) nodes of winding 1 and winding 2
    transformer_ratio : (transformer, B or 1) complex, U1/U2 at the tap, angle = lead of side 1 over side 2
    transformer_z : (transformer, B or 1) complex [ohm], series impedance seen at winding 2
    transformer_y : (transformer, 2, B or 1) complex [S], magnetising admittance at the terminals of each
        winding, whichever side is fed
    load_node : (load,)
    load_power : (load, k, B or 1) complex [VA] drawn at the reference voltage; a generator is negative
    load_reference : (load, k, B or 1) float [V] at which load_power is drawn
    load_mix : (load, 3) float, shares of constant power, constant current, constant impedance
    shunt_node : (shunt,)
    shunt_y : (shunt, k, k, B or 1) complex [S] to earth or neutral
    wires : Wires where k > 1: three phases and the neutral, each conductor on its own, volts to earth.
        Its `units` stand in for transformer_z and transformer_y; transformer_ratio is then that between the
        phases of balanced volts
    source_z : (source, k, k, B or 1) complex [ohm] behind which source_voltage stands, so that the volts of
        the node move; None where each supply holds its node
    """

    node_count: int
    conductors: int
    source_node: Index
    source_voltage: Complex
    line_from: Index
    line_to: Index
    line_z: Complex
    line_y: Complex
    transformer_from: Index
    transformer_to: Index
    transformer_ratio: Complex
    transformer_z: Complex
    transformer_y: Complex
    load_node: Index
    load_power: Complex
    load_reference: Real
    load_mix: Real
    shunt_node: Index
    shunt_y: Complex
    wires: Wires | None = None
    source_z: Complex | None = None

    @property
    def batch(self) -> int:
        """Number of operating points: the longest last axis."""
        own = max(getattr(self, name).shape[-1] for name in PHYSICAL)
        own = own if self.source_z is None else max(own, self.source_z.shape[-1])
        return own if self.wires is None else max(own, self.wires.batch)

    def check(self) -> None:
        """Holds every array against its shape, its bounds and the number of nodes.

        Raises : ValueError that names the array and what is wrong with it: a programmer's mistake
        """
        batch = self.batch
        for name, (rows, axes) in PHYSICAL.items():
            array = getattr(self, name)
            inner = tuple(self.conductors if axis == "k" else int(axis) for axis in axes)
            count = getattr(self, rows).shape[0]
            if array.shape[:-1] != (count, *inner) or array.shape[-1] not in (1, batch):
                wanted = ", ".join(str(n) for n in (count, *inner))
                raise ValueError(f"{name} has shape {array.shape}, not ({wanted}, 1 or {batch})")
            if not np.isfinite(array.sum()):
                raise ValueError(f"{name} holds a number that is not finite")
        for first, second in CONNECTED:
            _check_rows(self, first, second)
        if self.load_mix.shape != (self.load_node.size, 3):
            raise ValueError(f"load_mix has shape {self.load_mix.shape}, not ({self.load_node.size}, 3)")
        power, current, impedance = self.load_mix.T
        if not np.abs(power + current + impedance - 1).max(initial=0) < 1e-9:
            raise ValueError("load_mix has a row whose shares do not sum to 1")
        held = self.source_voltage if self.wires is None else self.source_voltage.any(axis=1)
        if not (self.load_reference.min(initial=np.inf) > 0 and np.all(held)):
            raise ValueError("load_reference and source_voltage must not hold zeros")
        if not np.all(self.transformer_ratio):
            raise ValueError("transformer_ratio must not hold zeros")
        if self.source_z is not None:
            inner = (self.source_node.size, self.conductors, self.conductors)
            if self.source_z.shape[:-1] != inner or self.source_z.shape[-1] not in (1, batch):
                raise ValueError(f"source_z has shape {self.source_z.shape}, not {inner} and 1 or {batch}")
        if self.wires is not None:
            ends = {"line": "line_from", "transformer": "transformer_from"}
            ends |= {"source": "source_node", "load": "load_node"}
            counts = {what: getattr(self, name).size for what, name in ends.items()}
            self.wires.check(self.conductors, counts, batch)


PHYSICAL = {  # array: (array with as many rows, axes between the rows and the batch)
    "source_voltage": ("source_node", "k"),
    "line_z": ("line_from", "kk"),
    "line_y": ("line_from", "kk"),
    "transformer_ratio": ("transformer_from", ""),
    "transformer_z": ("transformer_from", ""),
    "transformer_y": ("transformer_from", "2"),
    "load_power": ("load_node", "k"),
    "load_reference": ("load_node", "k"),
    "shunt_y": ("shunt_node", "kk"),
}
CONNECTED = (
    ("source_node", "source_node"),
    ("line_from", "line_to"),
    ("transformer_from", "transformer_to"),
    ("load_node", "load_node"),
    ("shunt_node", "shunt_node"),
)


def _check_rows(network: Network, first: str, second: str) -> None:
    for name in {first: 0, second: 0}:
        rows = getattr(network, name)
        if rows.ndim != 1 or rows.dtype.kind != "i" or rows.size != getattr(network, first).size:
            raise ValueError(f"{name} must be whole numbers in one row, as many as in {first}")
        if rows.size and not (0 <= rows.min() and rows.max() < network.node_count):
            raise ValueError(f"{name} names a node outside 0 to {network.node_count - 1}")
