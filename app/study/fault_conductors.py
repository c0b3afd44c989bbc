"""Fault currents conductor by conductor, where sequence networks do not reach: laterals, single-phase and
split-phase parts, open banks; and the earth loop of two wires."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.model.kinds import Supply, Transformer
from app.model.levels import TWO_WIRE
from app.study.fault_wire_rows import Way, fault_network
from app.study.graph import NONE, Layout
from app.study.unit_wires import OPEN
from app.study.wires import PER_PHASE, PHASORS, N, slots
from app.study.zones import Zones
from solver.fault_wires import Blocks, impedance_blocks, wire_faults

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
Index = NDArray[np.intp]
NONE_BACK = 1e-4  # of the current between conductors, below which a fault to earth counts as not fed
EARTH_LAST = 1e-9  # keeps a fault to earth behind all others
PLAIN_V = 300.0  # up to here one of two wires is taken for the neutral, above it may be two phases


@dataclass(frozen=True, slots=True)
class Loops:
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
    ask = (drawing, layout, zones, factors, nodes)
    most, least = _Currents.of(*ask, largest=True), _Currents.of(*ask, largest=False)
    pair = most.pair()
    slowed = _taken(_ways(*(_seen(*ask, Way(True, earth, slow))[0].z for earth in (False, True))), pair)
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


@dataclass(frozen=True, slots=True)
class _Currents:
    """Currents [A] of nodes, phase by phase or pair by pair; loops between conductors; volts of a phase."""

    three: Real
    two: Real
    neutral: Real
    earth: Real
    loops: Complex
    phase_v: Real

    @staticmethod
    def of(
        drawing: Drawing,
        layout: Layout,
        zones: Zones,
        factors: tuple[Real, Real],
        nodes: Index,
        largest: bool,
    ) -> "_Currents":
        ask = (drawing, layout, zones, factors, nodes)
        between, has = _seen(*ask, Way(largest, False))
        back, has_back = _seen(*ask, Way(largest, True))
        volts = _volts(layout, zones, factors[0 if largest else 1], nodes)
        found = wire_faults(between, np.where(has, volts, np.nan))
        away = wire_faults(back, np.where(has_back, volts, np.nan))
        closed = back.earthed[:, :N] & back.earthed[:, N:]
        earth = np.where(has_back[:, N:], np.where(closed, away.phase_neutral, 0), away.phase_earth)
        earth = np.where(has[:, :N], earth, np.nan)
        size = np.fmax.reduce(np.concatenate((found.phase_phase, found.phase_neutral), axis=1), axis=1)
        earth = np.where(earth < NONE_BACK * size[:, None], 0.0, earth)
        earth = np.where(_untold(layout, zones, nodes)[:, None], np.nan, earth)
        return _Currents(
            found.three_phase,
            found.phase_phase,
            found.phase_neutral,
            earth,
            _ways(between.z, back.z),
            np.abs(volts[:, 0]),
        )

    def pair(self) -> Index:
        """(node,) between which conductors most flows; to earth only where nothing else is there."""
        among = np.concatenate((self.two, self.neutral, self.earth * EARTH_LAST), axis=1)
        return np.argmax(np.where(np.isnan(among), -1, among), axis=1)

    def loop_to_earth(self) -> Real:
        """(node,) ohm; nan where a fault to earth is not fed."""
        least = np.fmin.reduce(self.earth, axis=1)
        return np.where(least > 0, self.phase_v / np.where(least > 0, least, 1), np.nan)


def _seen(
    drawing: Drawing, layout: Layout, zones: Zones, factors: tuple[Real, Real], nodes: Index, way: Way
) -> tuple[Blocks, NDArray[np.bool_]]:
    """What nodes see, and which conductors reach them."""
    network, conductors = fault_network(drawing, layout, zones, factors, way)
    reached = [slots(conductors.node[node] & conductors.drawn[node]) for node in nodes]
    has = np.zeros((len(nodes), N + 1), dtype=bool)
    for row, found in enumerate(reached):
        has[row, found] = True
    return impedance_blocks(network, nodes), has


def _volts(layout: Layout, zones: Zones, c: Real, nodes: Index) -> Complex:
    """(node, k) volts to earth before the fault: c times the nominal."""
    found = np.zeros((len(nodes), N + 1), dtype=np.complex128)
    for row, node in enumerate(nodes):
        zone = layout.zone[node]
        system = zones.system[zone]
        turned = np.array((1, 1, 1, 0) if system == TWO_WIRE else PHASORS[system])  # whichever phase it is
        found[row] = turned * c[node] * zones.nominal_v[zone] / PER_PHASE[system]
    return found


def _ways(z: Complex, back: Complex) -> Complex:
    """(node, 9) loops: between phases ab, bc, ca, from each to the neutral, from each to earth."""
    pairs = ((0, 1), (1, 2), (2, 0), (0, N), (1, N), (2, N))
    between = [z[:, i, i] + z[:, j, j] - z[:, i, j] - z[:, j, i] for i, j in pairs]
    return np.stack([*between, *(back[:, i, i] for i in range(N))], axis=1)


def _taken(of: Complex, pair: Index) -> Complex:
    return np.asarray(of[np.arange(len(pair)), pair])


def _untold(layout: Layout, zones: Zones, nodes: Index) -> NDArray[np.bool_]:
    """Nodes where volts to earth are not known: on two wires of a supply that may be two phases, and behind a
    corner that is earthed."""
    hidden = {
        layout.zone[node]
        for node, row in enumerate(layout.fed_by)
        if row != NONE
        and isinstance(unit := layout.branches[row], Transformer)
        and unit.build in OPEN
        and unit.earth_2_ohm is not None
    }
    for row in layout.supplies:
        supply = layout.attachments[row]
        assert isinstance(supply, Supply)
        if supply.wires == TWO_WIRE and supply.z0_ratio is None and supply.nominal_v > PLAIN_V:
            hidden.add(layout.zone[layout.at[row]])
    return np.array([layout.zone[node] in hidden for node in nodes], dtype=bool)
