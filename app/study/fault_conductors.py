"""Fault currents conductor by conductor, where sequence networks do not reach: laterals, single-phase and
split-phase parts, open banks; and the earth loop of two wires."""

from dataclasses import dataclass, field

import numpy as np
from msgspec import Struct
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.model.fault_data import PLAIN_V, corner_earth_ohm
from app.model.kinds import Supply, Transformer
from app.model.levels import TWO_WIRE
from app.study.conductors import Conductors
from app.study.fault_wire_rows import Way, fault_network, slowed_network
from app.study.graph import NONE, Layout
from app.study.unit_wires import OPEN
from app.study.wires import PER_PHASE, PHASORS, N, flags
from app.study.zones import Zones
from solver.fault_wires import Blocks, impedance_blocks, wire_faults
from solver.network import Network

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
Index = NDArray[np.intp]
NONE_BACK = 1e-4  # of the current between conductors, below which a fault to earth counts as not fed
EARTH_LAST = 1e-9  # keeps a fault to earth behind all others


class Loops(Struct, frozen=True):
    """Figures of some nodes; nan for what a node has not.

    three, two, neutral, earth : (node, 2) float [A] three-phase, between two phases, phase to neutral, phase
        to earth; columns: highest, least
    zs : (node,) float [ohm] earth loop, hot
    z : (node,) complex [ohm] loop of the highest current that is not to earth; half of it where all three
        phases meet
    rx : (node,) float, R/X of that loop at the equivalent frequency, brought back to the system's
    """

    three: Real
    two: Real
    neutral: Real
    earth: Real
    zs: Real
    z: Complex
    rx: Real


def loops(
    drawing: Drawing, layout: Layout, zones: Zones, factors: tuple[Real, Real], nodes: Index, slow: float
) -> Loops:
    """Fault currents of nodes out of the impedances between their conductors.

    Between two conductors I = c · U / (Zii + Zjj - Zij - Zji). To earth the same with the return conductor,
    or I = c · U / Zii where the way back is the earth.

    drawing : the drawing
    layout : its graph
    zones : nominal_v (zone,) float [V], system (zone,)
    factors : cmax, cmin (node,) float
    nodes : (node,) int, live node rows
    slow : equivalent frequency over the system's

    Returns : Loops
    Source : see solver.fault_wires
    """
    ask = _Asked(drawing, layout, zones, factors, nodes)
    most, least = _Currents.of(ask, largest=True), _Currents.of(ask, largest=False)
    pair = most.pair()
    slowed = _taken(_ways(*(ask.seen(Way(True, earth), slow)[0].z for earth in (False, True))), pair)
    with np.errstate(divide="ignore", invalid="ignore"):
        rx = slowed.real / slowed.imag * slow
    both = (most, np.fmax), (least, np.fmin)
    return Loops(
        three=np.stack([pick.reduce(c.three, axis=1) for c, pick in both], axis=1),
        two=np.stack([pick.reduce(c.two, axis=1) for c, pick in both], axis=1),
        neutral=np.stack([pick.reduce(c.neutral, axis=1) for c, pick in both], axis=1),
        earth=np.stack([pick.reduce(c.earth, axis=1) for c, pick in both], axis=1),
        zs=least.loop_to_earth(),
        z=_taken(most.loops, pair) / np.where(np.isnan(most.three).all(axis=1), 1, 2),
        rx=rx,
    )


class _Currents(Struct, frozen=True):
    """Currents [A] of nodes, phase by phase or pair by pair; loops between conductors; volts of a phase."""

    three: Real
    two: Real
    neutral: Real
    earth: Real
    loops: Complex
    phase_v: Real

    @staticmethod
    def of(ask: "_Asked", largest: bool) -> "_Currents":
        (between, has), (back, has_back) = (ask.seen(Way(largest, earth)) for earth in (False, True))
        volts = ask.volts(largest)
        found = wire_faults(between, np.where(has, volts, np.nan))
        pairs = has[:, :N] & np.roll(has[:, :N], -1, axis=1)
        two = np.where(pairs, found.phase_phase, np.nan)
        neutral = np.where(has[:, :N] & has[:, N:], found.phase_neutral, np.nan)
        earth = _to_earth(back, np.where(has_back, volts, np.nan))
        size = np.fmax.reduce(np.concatenate((two, neutral), axis=1), axis=1)
        earth = np.where(earth < NONE_BACK * size[:, None], 0.0, np.where(has[:, :N], earth, np.nan))
        earth = np.where(ask.untold()[:, None], np.nan, earth)
        return _Currents(
            found.three_phase, two, neutral, earth, _ways(between.z, back.z), np.abs(volts).max(axis=1)
        )

    def pair(self) -> Index:
        """(node,) between which conductors most flows; to earth only where nothing else is there."""
        among = np.concatenate((self.two, self.neutral, self.earth * EARTH_LAST), axis=1)
        return np.argmax(np.where(np.isnan(among), -1, among), axis=1)

    def loop_to_earth(self) -> Real:
        """(node,) ohm; nan where a fault to earth is not fed."""
        least = np.fmin.reduce(self.earth, axis=1)
        return np.where(least > 0, self.phase_v / np.where(least > 0, least, 1), np.nan)


def earth_loops(
    drawing: Drawing, layout: Layout, zones: Zones, factors: tuple[Real, Real], nodes: Index
) -> tuple[Real, Real]:
    """Only what goes to earth, for nodes whose other figures are known.

    drawing : the drawing
    layout : its graph
    zones : nominal_v (zone,) float [V], system (zone,)
    factors : cmax, cmin (node,) float
    nodes : (node,) int, live node rows on two wires

    Returns : currents (node, 2) float [A], highest and least; earth loop (node,) float [ohm]
    Source : IEC 60364-4-41, 411.4.4
    """
    ask = _Asked(drawing, layout, zones, factors, nodes)
    found = []
    for largest in (True, False):
        back, has = ask.seen(Way(largest, True))
        earth = _to_earth(back, np.where(has, ask.volts(largest), np.nan))
        found.append(np.where(ask.untold(), np.nan, np.fmax.reduce(earth, axis=1)))
    volts = np.abs(ask.volts(False)).max(axis=1)
    zs = np.where(found[1] > 0, volts / np.where(found[1] > 0, found[1], 1), np.nan)
    return np.stack(found, axis=1), zs


def _to_earth(back: Blocks, volts: Complex) -> Real:
    """(node, 3) A of each phase: by the return conductor where one is there, else through earth."""
    found = wire_faults(back, volts)
    closed = back.earthed[:, :N] & back.earthed[:, N:]
    return np.where(np.isfinite(volts[:, N:]), np.where(closed, found.phase_neutral, 0), found.phase_earth)


@dataclass(slots=True)
class _Asked:
    """Nodes of a drawing, and the networks that they were seen in so far."""

    drawing: Drawing
    layout: Layout
    zones: Zones
    factors: tuple[Real, Real]
    nodes: Index
    made: dict[Way, tuple[Network, Conductors]] = field(default_factory=dict)

    def seen(self, way: Way, slow: float = 1.0) -> tuple[Blocks, NDArray[np.bool_]]:
        """What the nodes see, and which conductors reach them."""
        if way not in self.made:
            self.made[way] = fault_network(self.drawing, self.layout, self.zones, self.factors, way)
        network, conductors = self.made[way]
        has = flags(np.array(conductors.node)[self.nodes] & np.array(conductors.drawn)[self.nodes])
        return impedance_blocks(network if slow == 1 else slowed_network(network, slow), self.nodes), has

    def volts(self, largest: bool) -> Complex:
        """(node, k) volts to earth before the fault: c times the nominal."""
        found = np.zeros((len(self.nodes), N + 1), dtype=np.complex128)
        for row, node in enumerate(self.nodes):
            zone = self.layout.zone[node]
            system = self.zones.system[zone]
            turned = np.array((1, 1, 1, 0) if system == TWO_WIRE else PHASORS[system])  # whichever it is
            size = self.factors[0 if largest else 1][node] * self.zones.nominal_v[zone]
            found[row] = turned * size / PER_PHASE[system]
        return found

    def untold(self) -> NDArray[np.bool_]:
        """Nodes where volts to earth are not known: on two wires of a supply that may be two phases, and
        behind a corner that is earthed."""
        layout = self.layout
        hidden = {
            layout.zone[node]
            for node, row in enumerate(layout.fed_by)
            if row != NONE
            and isinstance(unit := layout.branches[row], Transformer)
            and unit.build in OPEN
            and corner_earth_ohm(unit) is not None
        }
        for row in layout.supplies:
            supply = layout.attachments[row]
            assert isinstance(supply, Supply)
            if supply.wires == TWO_WIRE and supply.z0_ratio is None and supply.nominal_v > PLAIN_V:
                hidden.add(layout.zone[layout.at[row]])
        return np.array([layout.zone[node] in hidden for node in self.nodes], dtype=bool)


def _ways(z: Complex, back: Complex) -> Complex:
    """(node, 9) loops: between phases ab, bc, ca, from each to the neutral, from each to earth."""
    pairs = ((0, 1), (1, 2), (2, 0), (0, N), (1, N), (2, N))
    between = [z[:, i, i] + z[:, j, j] - z[:, i, j] - z[:, j, i] for i, j in pairs]
    return np.stack([*between, *(back[:, i, i] for i in range(N))], axis=1)


def _taken(of: Complex, pair: Index) -> Complex:
    return np.asarray(of[np.arange(len(pair)), pair])
