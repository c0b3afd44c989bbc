"""Four-wire layouts for the tests, written down as rows of plain numbers."""

from dataclasses import dataclass, field

import numpy as np

from solver import Network
from solver.banks import Coil, bank, centre_tapped
from solver.windings import Winding, stacked, three_phase
from solver.wires import Wires

A, B, C, N, EARTH = 0, 1, 2, 3, -1
ABC, ABCN = (A, B, C), (A, B, C, N)
POWER, CURRENT, IMPEDANCE = (1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0)
TURN = np.exp(-2j * np.pi / 3)


@dataclass
class Unit:
    """Three-phase transformer as it is drawn."""

    start: int
    end: int
    one: Winding
    two: Winding
    clock: int
    v1: object
    v2: object
    z: object
    y: object = ((0.0,), (0.0,))
    zero: object = None

    def port(self):
        return three_phase(self.one, self.two, self.clock, self.v1, self.v2, self.z, self.y, self.zero)

    def ratio(self):
        turned = np.exp(1j * np.pi / 6 * self.clock)
        return np.atleast_1d(np.asarray(self.v1) / np.asarray(self.v2)) * turned, np.atleast_1d(self.z)


@dataclass
class Bank:
    """Single-phase units; the ratio that a balanced layout would see is given for the record."""

    start: int
    end: int
    coils: list
    earth_1: object = None
    earth_2: object = None

    def port(self):
        return bank([Coil(*c) for c in self.coils], self.earth_1, self.earth_2)

    def ratio(self):
        return np.atleast_1d(self.coils[0][2]) / np.atleast_1d(self.coils[0][3]) + 0j, np.ones(1)


@dataclass
class CentreTapped:
    start: int
    end: int
    one: tuple
    v1: object
    v2: object
    z: object
    earth: object = 0.0

    def port(self):
        return centre_tapped(self.one, self.v1, self.v2, self.z, self.earth)

    def ratio(self):
        return np.atleast_1d(self.v1) / (np.atleast_1d(self.v2) / 2) + 0j, np.ones(1)


@dataclass
class Layout:
    """sources: (node, four volts); lines: (from, to, conductors, Z among them[, Y]);
    loads: (node, conductor, conductor or EARTH, S, reference V, mix); earths: (node, conductor, Z);
    shunts: (node, Y 4 x 4)"""

    nodes: int
    sources: list
    lines: list = field(default_factory=list)
    units: list = field(default_factory=list)
    loads: list = field(default_factory=list)
    earths: list = field(default_factory=list)
    shunts: list = field(default_factory=list)

    def network(self):
        units = [u.ratio() for u in self.units]
        wires = Wires(
            line_has=masks([row[2] for row in self.lines]),
            source_has=np.ones((len(self.sources), 4), dtype=bool),
            load_to=np.array([slots(row, row[2], EARTH) for row in self.loads], dtype=int).reshape(-1, 4),
            earth_node=np.array([e[0] for e in self.earths], dtype=int),
            earth_conductor=np.array([e[1] for e in self.earths], dtype=int),
            earth_z=wide([np.atleast_1d(e[2]) for e in self.earths], ()),
            units=stacked([u.port() for u in self.units]),
        )
        return Network(
            node_count=self.nodes,
            conductors=4,
            source_node=np.array([s[0] for s in self.sources], dtype=int),
            source_voltage=wide([batched(s[1]) for s in self.sources], (4,)),
            line_from=np.array([row[0] for row in self.lines], dtype=int),
            line_to=np.array([row[1] for row in self.lines], dtype=int),
            line_z=wide([spread(row[2], row[3]) for row in self.lines], (4, 4)),
            line_y=wide([spread(row[2], row[4] if len(row) > 4 else 0) for row in self.lines], (4, 4)),
            transformer_from=np.array([u.start for u in self.units], dtype=int),
            transformer_to=np.array([u.end for u in self.units], dtype=int),
            transformer_ratio=wide([r for r, _ in units], ()),
            transformer_z=wide([z for _, z in units], ()),
            transformer_y=np.zeros((len(units), 2, 1), dtype=complex),
            load_node=np.array([row[0] for row in self.loads], dtype=int),
            load_power=wide([batched_slots(row) for row in self.loads], (4,)),
            load_reference=np.array([[[row[4]]] * 4 for row in self.loads], dtype=float).reshape(-1, 4, 1),
            load_mix=np.array([row[5] for row in self.loads], dtype=float).reshape(-1, 3),
            shunt_node=np.array([s[0] for s in self.shunts], dtype=int),
            shunt_y=wide([np.asarray(s[1])[..., None] for s in self.shunts], (4, 4)),
            wires=wires,
        )


def balanced(volts):
    """Phase volts a, b, c in that order, neutral at earth."""
    return np.array([volts, volts * TURN, volts / TURN, 0], dtype=complex)


def masks(rows):
    found = np.zeros((len(rows), 4), dtype=bool)
    for mask, row in zip(found, rows, strict=True):
        mask[list(row)] = True
    return found


def slots(row, value, rest):
    return [value if slot == row[1] else rest for slot in range(4)]


def batched(volts):
    volts = np.asarray(volts, dtype=complex)
    return volts if volts.ndim == 2 else volts[:, None]


def batched_slots(row):
    power = np.atleast_1d(np.asarray(row[3], dtype=complex))
    found = np.zeros((4, power.size), dtype=complex)
    found[row[1]] = power
    return found


def spread(conductors, matrix):
    """(4, 4, 1) out of a matrix among some conductors, or a number alike for each of them."""
    matrix = np.asarray(matrix, dtype=complex)
    if matrix.ndim == 0:
        matrix = matrix * np.eye(len(conductors))
    found = np.zeros((4, 4, 1), dtype=complex)
    found[np.ix_(conductors, conductors, [0])] = matrix[..., None]
    return found


def wide(arrays, inner):
    """(row, *inner, batch) as wide as the widest."""
    width = max((a.shape[-1] for a in arrays), default=1)
    stacked_ = [np.broadcast_to(a, (*inner, width)) for a in arrays]
    return np.array(stacked_, dtype=complex).reshape(len(arrays), *inner, width)
