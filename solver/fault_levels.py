"""Fault currents at every node of a balanced network at once, out of its own rows."""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike

from solver import fault
from solver.arrays import Complex, Real
from solver.network import Network
from solver.sequence import seen, sequence_of

SLOW = 0.4  # equivalent frequency of the peak over that of the system, 20 Hz of 50


@dataclass(frozen=True, slots=True)
class Faults:
    """Initial symmetrical short-circuit currents at every node; nan where a node is dead.

    z1 : (node, batch) complex [ohm] positive sequence at the fault, which stands for the negative as well
    z0 : (node, batch) complex [ohm] zero sequence; infinite where nothing earths the node
    three_phase : (node, batch) float [A]
    two_phase : (node, batch) float [A]
    phase_earth : (node, batch) float [A]
    two_phase_earth : TwoPhaseEarth, each (node, batch) float [A]
    loop : (node, batch) complex [ohm] earth loop
    kappa : (node, batch) float, peak over √2 times the initial current
    """

    z1: Complex
    z0: Complex
    three_phase: Real
    two_phase: Real
    phase_earth: Real
    two_phase_earth: fault.TwoPhaseEarth
    loop: Complex
    kappa: Real

    @property
    def peak(self) -> Real:
        """(node, batch) float [A], κ √2 times the three-phase current."""
        return np.asarray(self.kappa * 2**0.5 * self.three_phase)


def faults(positive: Network, zero: Network | None, nominal: ArrayLike, factor: ArrayLike) -> Faults:
    """Fault currents at every node of a balanced network, on rings as well.

    E = c · U / √3 stands at the fault, with all other sources shorted, loads, capacitors and charging left
    out, and Z2 = Z1; currents as in solver.fault

    positive : Network of k = 1 with source_z; its impedances as the calculation asks: cold and corrected for
        the largest currents, hot for the least
    zero : Network of the zero sequence, see `earth_paths.zero_sequence`; None where nothing is earthed
    nominal : (node,) or one float [V] nominal volts between lines
    factor : (node,) or one float, voltage factor c
    Returns : Faults
    Source : IEC 60909-0:2016, 4.3 and 7 to 8 (from memory); far from generators
    """
    z1 = seen(sequence_of(positive))
    dead = np.isinf(z1)
    z1 = np.where(dead, complex(np.nan, np.nan), z1)
    z0 = np.full_like(z1, complex(np.inf, 0.0)) if zero is None else seen(sequence_of(zero))
    z0 = np.broadcast_to(z0, np.broadcast_shapes(z0.shape, z1.shape))
    pushed = np.asarray(factor) * np.asarray(nominal, dtype=float) / np.sqrt(3)
    source = np.where(dead, np.nan, np.broadcast_to(pushed, z1.shape[:1])[:, None])
    return Faults(
        z1=z1,
        z0=z0,
        three_phase=fault.three_phase(source, z1),
        two_phase=fault.two_phase(source, z1),
        phase_earth=fault.phase_earth(source, z1, z0),
        two_phase_earth=fault.two_phase_earth(source, z1, z0),
        loop=fault.earth_loop(z1, z0),
        kappa=fault.peak_factor(_slow_ratio(positive)),
    )


def _slow_ratio(network: Network) -> Real:
    """(node, batch) R/X of the peak, by the equivalent frequency."""

    def slowed(z: Complex) -> Complex:
        return z.real + SLOW * 1j * z.imag

    slow = replace(
        network,
        line_z=slowed(network.line_z),
        transformer_z=slowed(network.transformer_z),
        source_z=None if network.source_z is None else slowed(network.source_z),
    )
    z = seen(sequence_of(slow))
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(z.real / z.imag * SLOW)
