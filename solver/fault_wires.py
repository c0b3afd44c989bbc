"""Fault currents on conductors of their own: laterals, lost phases, neutrals, whatever is not balanced."""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike

from solver.arrays import Complex, Flag, Index, Real
from solver.forest import Forest, grow
from solver.network import Network
from solver.placed import Placed, put
from solver.rounds import Trouble
from solver.share import pick
from solver.sweep import Sweep
from solver.ties import Ties, gathered

AT_ONCE = 48  # nodes asked in one batch, so that memory stays small
OPEN = 1e-9  # A of 1 A that find no way back, from which a conductor counts as not earthed


@dataclass(frozen=True, slots=True)
class Blocks:
    """What a node sees of the network, conductor by conductor, with the supplies shorted.

    z : (node, k, k) complex [ohm] volts that fall on a conductor for each ampere drawn from another
    earthed : (node, k) bool, a current into earth finds its way back; where it does not, only volts between
        conductors of that side mean anything
    """

    z: Complex
    earthed: Flag


def impedance_blocks(network: Network, nodes: ArrayLike, point: int = 0) -> Blocks:
    """Impedance matrix of each of some nodes.

    Along the trees Z = Σ z, and A Z Aᵀ + Z' through each transformer; ties take T C (z + Cᵀ T C)⁻¹ (T C)ᵀ off
    it. Where something is loose, out of unit currents drawn at the nodes, some dozens at once.

    network : Network with wires
    nodes : (chosen,) int
    point : which operating point of its batch
    Returns : Blocks, one row a chosen node; nan at dead nodes
    Raises : ValueError where the network cannot be solved at all
    Source : Kron's reduction of the tie currents out of the loop equations
    """
    quiet = _quiet(pick(network, np.array([point])))
    forest = grow(quiet)
    if isinstance(forest, Trouble):
        raise ValueError("two supplies stand on one node")
    placed = put(quiet, forest)
    chosen, k = np.asarray(nodes, dtype=np.intp), network.conductors
    place = forest.place[chosen]
    live = np.flatnonzero(place >= 0)
    z = np.full((chosen.size, k, k), complex(np.nan, np.nan))
    earthed = np.ones((chosen.size, k), dtype=bool)
    ties = Ties(placed, forest) if _tied(placed) else None
    if placed.loose is None:
        z[live] = _summed(placed, forest, ties)[place[live]]
        return Blocks(z, earthed)
    for some in np.split(live, range(AT_ONCE, live.size, AT_ONCE)):
        z[some], earthed[some] = _driven(placed, forest, ties, place[some])
    return Blocks(z, earthed)


def _summed(placed: Placed, forest: Forest, ties: Ties | None) -> Complex:
    """(live, k, k) what each place sees, summed along the trees, with what ties take off it."""
    supplied = int(forest.depth_zone[1])
    sums = np.zeros((forest.order.size + 1, *placed.z.shape[1:3]), dtype=np.complex128)
    sums[:-1] += placed.z[..., 0]
    np.subtract.at(sums, forest.end, np.broadcast_to(placed.z[..., 0], sums[:-1].shape))
    z = np.cumsum(sums[:-1], axis=0)
    for start, stop in zip(forest.depth_zone[1:-1], forest.depth_zone[2:], strict=True):
        assert placed.gain is not None
        fed = slice(start - supplied, stop - supplied)
        gain = placed.gain[fed, ..., 0]
        above = gain @ z[forest.zone_fed[start:stop]] @ np.swapaxes(gain, 1, 2) + placed.series[fed, ..., 0]
        places = slice(forest.zone_start[start], forest.zone_start[stop])
        z[places] += above[forest.zone[places] - start]
    if ties is not None:
        drop = ties.drop[..., 0]
        z -= np.einsum("pit,tu,pju->pij", drop, ties.inverse[0], drop, optimize=True)
    return z


def _driven(placed: Placed, forest: Forest, ties: Ties | None, place: Index) -> tuple[Complex, Flag]:
    """(chosen, k, k) what some places see, out of unit currents; which of these find their way back."""
    count, k = place.size, placed.z.shape[1]
    sweep = Sweep(replace(placed, root=np.zeros_like(placed.root)), forest, count * k)
    sweep.current[...] = 0
    unit = sweep.current.reshape(forest.order.size, k, count, k)
    unit[place, :, np.arange(count)] = np.eye(k)
    volts, open_ways = _answered(sweep, placed, ties)
    z = -volts.reshape(unit.shape)[place, :, np.arange(count)]
    return z, ~open_ways.reshape(count, k)


def _tied(placed: Placed) -> bool:
    return placed.joints is not None or placed.loose is not None


def _quiet(network: Network) -> Network:
    """Nothing connected: no loads, no capacitors, no charging, no iron."""
    assert network.wires is not None
    units = network.wires.units
    return replace(
        network,
        line_y=0 * network.line_y,
        shunt_y=0 * network.shunt_y,
        load_power=0 * network.load_power,
        wires=replace(network.wires, units=replace(units, iron=0 * units.iron)),
    )


def _answered(sweep: Sweep, placed: Placed, ties: Ties | None) -> tuple[Complex, Flag]:
    """Volts that the drawn currents leave, and which of the currents find no way back."""
    sweep.backward()
    flow = None if placed.loose is None else placed.loose.along(sweep.inflow)
    sweep.drops()
    volts = sweep.forward(np.empty_like(sweep.current))
    width = volts.shape[-1]
    if ties is None:
        return volts, np.zeros(width, dtype=bool)
    current = ties.correct(volts, np.zeros_like(volts), flow)
    if flow is None:
        return volts, np.zeros(width, dtype=bool)
    joined = gathered(ties.joints, ties.lift)[..., 0]
    return volts, np.asarray((np.abs(ties.apart[0].T @ flow + joined.T @ current) > OPEN).any(axis=0))


@dataclass(frozen=True, slots=True)
class WireFaults:
    """Currents of faults of no impedance; nan where a conductor is not there.

    phase_earth : (node, 3) float [A] of each phase; 0 where nothing earths it
    phase_neutral : (node, 3) float [A]
    phase_phase : (node, 3) float [A] a to b, b to c, c to a
    three_phase : (node, 3) float [A] of each phase, all three joined
    """

    phase_earth: Real
    phase_neutral: Real
    phase_phase: Real
    three_phase: Real


def wire_faults(blocks: Blocks, volts: Complex) -> WireFaults:
    """Fault currents out of the volts before the fault and the impedances there.

    Ii = Vi / Zii; between two conductors (Vi - Vj) / (Zii + Zjj - Zij - Zji)

    blocks : Blocks
    volts : (node, k) complex [V] before the fault, to earth; nan where a conductor is not there. After
        IEC 60909-0 c times the nominal
    Returns : WireFaults
    Source : Kersting, Distribution System Modeling and Analysis, ch. 11 (from memory)
    """
    z = blocks.z
    own = np.einsum("nii->ni", z)

    def between(i: int, j: int) -> Real:
        loop = own[:, i] + own[:, j] - z[:, i, j] - z[:, j, i]
        return np.asarray(np.abs((volts[:, i] - volts[:, j]) / loop))

    with np.errstate(all="ignore"):
        earth = np.where(blocks.earthed[:, :3], np.abs(volts[:, :3] / own[:, :3]), 0 * np.abs(volts[:, :3]))
        pairs = np.stack([between(i, (i + 1) % 3) for i in range(3)], axis=-1)
        neutral = np.stack([between(i, 3) for i in range(3)], axis=-1)
    return WireFaults(earth, neutral, pairs, _three(z, volts))


def _three(z: Complex, volts: Complex) -> Real:
    """(node, 3) A where the three phases meet: currents that sum to nothing and leave no volts between."""
    found = np.full((len(z), 3), np.nan)
    whole = np.isfinite(volts[:, :3]).all(axis=1) & np.isfinite(z).all(axis=(1, 2))
    stiff = whole & (np.abs(z[:, :3, :3]).max(axis=(1, 2)) == 0)  # a supply without impedance of its own
    found[stiff], whole = np.inf, whole & ~stiff
    apart = np.array([[1.0, -1, 0], [0, 1, -1]])
    system = np.zeros((int(whole.sum()), 3, 3), dtype=np.complex128)
    system[:, :2] = apart @ z[whole, :3, :3]
    system[:, 2] = 1
    asked = np.concatenate((volts[whole, :3] @ apart.T, np.zeros((len(system), 1))), axis=1)
    found[whole] = np.abs(np.linalg.solve(system, asked[..., None])[..., 0])
    return found
