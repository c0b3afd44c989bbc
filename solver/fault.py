"""Prospective fault currents by the equivalent voltage source at the place of the fault."""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike

from solver.arrays import Complex, Real
from solver.network import Network
from solver.path import path_impedance

ROOT3 = 3**0.5


@dataclass(frozen=True, slots=True)
class Faults:
    """Initial symmetrical short-circuit currents at every node; nan where a node is dead.

    z1 : (node, batch) complex [ohm] positive sequence at the fault, which stands for the negative as well
    z0 : (node, batch) complex [ohm] zero sequence; infinite where nothing earths the node
    three_phase : (node, batch) float [A]
    two_phase : (node, batch) float [A]
    phase_earth : (node, batch) float [A]
    two_phase_earth : (node, batch) float [A] the larger of the two phase currents
    two_phase_to_earth : (node, batch) float [A] into earth
    loop : (node, batch) complex [ohm] earth loop, (2 Z1 + Z0) / 3
    kappa : (node, batch) float, peak over √2 times the initial current
    """

    z1: Complex
    z0: Complex
    three_phase: Real
    two_phase: Real
    phase_earth: Real
    two_phase_earth: Real
    two_phase_to_earth: Real
    loop: Complex
    kappa: Real

    @property
    def peak(self) -> Real:
        """(node, batch) float [A], κ √2 times the three-phase current."""
        return np.asarray(self.kappa * 2**0.5 * self.three_phase)


def faults(
    positive: Network, zero: Network | None, nominal: ArrayLike, factor: ArrayLike, frequency: float
) -> Faults:
    """Fault currents at every node of a balanced network, on rings as well.

    I3 = c U / (√3 |Z1|), I2 = c U / |2 Z1|, I1 = √3 c U / |2 Z1 + Z0|, to earth √3 c U / |Z1 + 2 Z0|,
    with all other sources shorted, loads, capacitors and charging left out, and Z2 = Z1

    positive : Network of k = 1 with source_z; its impedances as the calculation asks: cold and with K_T for
        the largest currents, hot for the least
    zero : Network of the zero sequence, see `earth_paths.zero_sequence`; None where nothing is earthed
    nominal : (node,) float [V] nominal volts between lines
    factor : (node,) or one float, voltage factor c
    frequency : [Hz]
    Returns : Faults
    Raises : ValueError where the network cannot be solved at all
    Source : IEC 60909-0:2016, 4.3 and 7 to 8 (from memory); far from generators
    """
    z1 = path_impedance(positive)
    z0 = np.full_like(z1, np.inf) if zero is None else path_impedance(zero)
    z0 = np.where(np.isnan(z0), np.inf, z0) + 0 * z1
    turn = np.exp(2j * np.pi / 3)
    with np.errstate(all="ignore"):
        pushed = np.broadcast_to(np.asarray(factor) * np.asarray(nominal), z1.shape[:1])[:, None]
        earthed = np.isfinite(z0)
        z = np.where(earthed, z0, 1.0)
        both = z1**2 + 2 * z1 * z
        phases = [np.abs((z - turn**sign * z1) / both) for sign in (1, 2)]
        two = pushed / np.abs(2 * z1)
        one = np.where(earthed, ROOT3 * pushed / np.abs(2 * z1 + z), np.where(np.isnan(z1), np.nan, 0.0))
        into = np.where(earthed, ROOT3 * pushed / np.abs(z1 + 2 * z), 0 * one)
        return Faults(
            z1=z1,
            z0=z0,
            three_phase=pushed / (ROOT3 * np.abs(z1)),
            two_phase=two,
            phase_earth=one,
            two_phase_earth=np.where(earthed, pushed * np.maximum(*phases), two),
            two_phase_to_earth=into,
            loop=np.where(earthed, (2 * z1 + z) / 3, np.inf),
            kappa=kappa(_ratio_at_low_frequency(positive, frequency)),
        )


def _ratio_at_low_frequency(network: Network, frequency: float) -> Real:
    """(node, batch) R/X of the peak, by the equivalent frequency of 0.4 times that of the system."""
    share = 0.4

    def slowed(z: Complex) -> Complex:
        return z.real + share * 1j * z.imag

    slow = replace(
        network,
        line_z=slowed(network.line_z),
        transformer_z=slowed(network.transformer_z),
        source_z=None if network.source_z is None else slowed(network.source_z),
    )
    z = path_impedance(slow)
    return np.asarray(z.real / z.imag * share)


def kappa(ratio: ArrayLike) -> Real:
    """Peak factor.

    κ = 1.02 + 0.98 · e^(-3 R/X)

    ratio : (...) float, R/X
    Returns : (...) float, 1.02 to 2
    Source : IEC 60909-0:2016, 8.1 (from memory)

    >>> round(float(kappa(0.1)), 3)
    1.746
    """
    return np.asarray(1.02 + 0.98 * np.exp(-3 * np.asarray(ratio, dtype=float)))


def supply_impedance(
    fault_level: ArrayLike, nominal: ArrayLike, factor: ArrayLike, x_over_r: ArrayLike
) -> Complex:
    """Impedance of a supply out of its fault level.

    |ZQ| = c U² / S, shared out as X/R says

    fault_level : (...) float [VA], √3 · U · Ik
    nominal : (...) float [V] between lines at the supply
    factor : (...) float, voltage factor c there
    x_over_r : (...) float
    Returns : (...) complex [ohm] per phase
    Source : IEC 60909-0:2016, 6.2 (from memory)

    >>> z = supply_impedance(200e6, 20e3, 1.1, 10)
    >>> round(abs(complex(z)), 3), round(complex(z).imag / complex(z).real, 3)
    (2.2, 10.0)
    """
    size = np.asarray(factor) * np.asarray(nominal, dtype=float) ** 2 / np.asarray(fault_level)
    r = 1 / np.sqrt(1 + np.asarray(x_over_r, dtype=float) ** 2)
    return np.asarray(size * r * (1 + 1j * np.asarray(x_over_r)), dtype=np.complex128)


def transformer_correction(ux_percent: ArrayLike, factor: ArrayLike) -> Real:
    """Correction of a network transformer's impedances for the largest fault currents.

    K_T = 0.95 · cmax / (1 + 0.6 · xT)

    ux_percent : (...) float [%] reactive part of uk
    factor : (...) float, cmax of the side of lower voltage
    Returns : (...) float that multiplies positive, negative and zero sequence
    Source : IEC 60909-0:2016, 6.3.3, equation 12a
    """
    return np.asarray(0.95 * np.asarray(factor) / (1 + 0.006 * np.asarray(ux_percent, dtype=float)))


def voltage_factor(nominal: ArrayLike, largest: ArrayLike, tolerance_percent: ArrayLike = 10.0) -> Real:
    """Voltage factor c.

    Up to 1000 V 1.05, or 1.10 at +10 % tolerance, for the largest, 0.95, or 0.90 at -10 %, for the least
    current; above, 1.10 and 1.00

    nominal : (...) float [V] between lines
    largest : (...) bool, for the largest currents
    tolerance_percent : (...) float [%] by which low volts may differ from nominal
    Returns : (...) float
    Source : IEC 60909-0:2016, Table 1 (from memory; the least factor at low voltage was 0.95 in 2001)

    >>> [float(voltage_factor(volts, True)) for volts in (400, 11e3)]
    [1.1, 1.1]
    >>> float(voltage_factor(400, True, tolerance_percent=6)), float(voltage_factor(11e3, False))
    (1.05, 1.0)
    """
    low, wide = np.asarray(nominal) <= 1000, np.asarray(tolerance_percent) > 6
    most = np.where(low & ~wide, 1.05, 1.10)
    least = np.where(low, np.where(wide, 0.90, 0.95), 1.0)
    return np.asarray(np.where(largest, most, least))


def hot(r20: ArrayLike, temperature: ArrayLike) -> Real:
    """Resistance of a conductor at the end of a fault, for the least currents.

    R = R20 · [1 + 0.004 · (θe - 20)]

    r20 : (...) float [ohm] at 20 °C
    temperature : (...) float [°C]
    Returns : (...) float [ohm]
    Source : IEC 60909-0:2016, 6.4 (from memory)
    """
    return np.asarray(r20) * (1 + 0.004 * (np.asarray(temperature, dtype=float) - 20))


def motor_impedance(
    rated_voltage: ArrayLike, rated_power: ArrayLike, start_ratio: ArrayLike, r_over_x: ArrayLike
) -> Complex:
    """Impedance with which an induction motor feeds a fault.

    |ZM| = U² / (S · Istart/I)

    rated_voltage : (...) float [V] between lines
    rated_power : (...) float [VA] apparent
    start_ratio : (...) float, starting current over rated current
    r_over_x : (...) float, about 0.42 at low voltage, 0.15 or 0.1 above
    Returns : (...) complex [ohm] per phase
    Source : IEC 60909-0:2016, 6.10 (from memory)
    """
    size = np.asarray(rated_voltage, dtype=float) ** 2 / (np.asarray(rated_power) * np.asarray(start_ratio))
    x = 1 / np.sqrt(1 + np.asarray(r_over_x, dtype=float) ** 2)
    return np.asarray(size * x * (np.asarray(r_over_x) + 1j), dtype=np.complex128)
