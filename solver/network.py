"""The layout as frozen arrays in SI units: one row an element, one column an operating point."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Complex = NDArray[np.complex128]
Real = NDArray[np.float64]
Index = NDArray[np.intp]


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
    transformer_y : (transformer, B or 1) complex [S], magnetising admittance seen at winding 1;
        it stands on whichever side is fed
    load_node : (load,)
    load_power : (load, k, B or 1) complex [VA] drawn at the reference voltage; a generator is negative
    load_reference : (load, k, B or 1) float [V] at which load_power is drawn
    load_mix : (load, 3) float, shares of constant power, constant current, constant impedance
    shunt_node : (shunt,)
    shunt_y : (shunt, k, k, B or 1) complex [S] to earth or neutral
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
