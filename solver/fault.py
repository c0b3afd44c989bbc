"""Prospective fault currents by the equivalent voltage source: from sequence impedances to amps."""

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from solver.arrays import Complex, Real
from solver.transformer import GROUP

TURN = np.exp(2j * np.pi / 3)


class ZeroPath(NamedTuple):
    """What a transformer is to the zero sequence.

    through : it passes from one winding to the other
    earth_1 : it is a way to earth at winding 1
    earth_2 : it is a way to earth at winding 2
    """

    through: bool
    earth_1: bool
    earth_2: bool


def zero_path(vector_group: str, earthed_1: bool, earthed_2: bool) -> ZeroPath:
    """Which way the zero sequence takes in a transformer, by its connection.

    An earthed star beside a delta, and an earthed zigzag beside anything, are ways to earth. Two earthed
    stars pass it through. A star that is not earthed, and a delta seen from outside, block it; so does an
    earthed star beside a star or zigzag that cannot balance it: what goes through the core is neglected.

    vector_group : such as Dyn11 or YNd5
    earthed_1 : bool, the star point of winding 1 is earthed
    earthed_2 : bool, the star point of winding 2 is earthed
    Returns : ZeroPath
    Raises : ValueError where it is not a vector group
    Source : IEC 60076-8:1997, 5; IEC TR 60909-4 (from memory)

    >>> zero_path("Dyn11", False, True)
    ZeroPath(through=False, earth_1=False, earth_2=True)
    >>> zero_path("Yyn0", False, True)
    ZeroPath(through=False, earth_1=False, earth_2=False)
    """
    found = GROUP.fullmatch(vector_group)
    if found is None:
        raise ValueError(f"{vector_group!r} is not a vector group such as Dyn11, YNd1 or Ii0")
    one, two = (found[n][0].upper() for n in (1, 2))
    held = (one in "YZ" and earthed_1, two in "YZ" and earthed_2)
    earth_1 = held[0] and (one == "Z" or two == "D")
    earth_2 = held[1] and (two == "Z" or one == "D")
    return ZeroPath(one == "Y" and two == "Y" and all(held), earth_1, earth_2)


def correction(rating: ArrayLike, rated_voltage: ArrayLike, z: ArrayLike, c_max: ArrayLike) -> Real:
    """Factor on the impedance of a transformer where the highest currents are sought; zero sequence too.

    KT = 0.95 · cmax / (1 + 0.6 xT),  xT = XT · S / U²

    rating : (...) float [VA]
    rated_voltage : (...) float [V] of the winding that z is seen from
    z : (...) complex [ohm]
    c_max : (...) float, voltage factor of the system at the lower voltage
    Returns : (...) float
    Source : IEC 60909-0:2016, 6.3.3
    """
    x = np.imag(np.asarray(z)) * np.asarray(rating) / np.asarray(rated_voltage, dtype=float) ** 2
    return np.asarray(0.95 * np.asarray(c_max) / (1 + 0.6 * x))


def feeder(voltage: ArrayLike, current: ArrayLike, c: ArrayLike, x_over_r: ArrayLike) -> Complex:
    """Impedance of a supply from its three-phase fault current.

    |Z| = c · U / (√3 · I),  X / R as stated

    voltage : (...) float [V] nominal, between lines
    current : (...) float [A] initial symmetrical
    c : (...) float, voltage factor that the current was stated with
    x_over_r : (...) float
    Returns : (...) complex [ohm] per phase
    Source : IEC 60909-0:2016, 6.2
    """
    size = np.asarray(c) * np.asarray(voltage) / (np.sqrt(3) * np.asarray(current, dtype=float))
    ratio = np.asarray(x_over_r, dtype=float)
    return np.asarray(size * (1 + 1j * ratio) / np.sqrt(1 + ratio**2))


def three_phase(source: ArrayLike, z1: ArrayLike) -> Real:
    """Current of a three-phase fault.

    I = E / |Z1|

    source : (...) float [V], c · U / √3
    z1 : (...) complex [ohm]
    Returns : (...) float [A], initial symmetrical; infinite where nothing limits it
    Source : IEC 60909-0:2016, 7.2
    """
    return _over(source, np.abs(z1))


def two_phase(source: ArrayLike, z1: ArrayLike) -> Real:
    """Current of a fault between two phases clear of earth, with Z2 = Z1.

    I = √3 · E / |2 Z1|

    source : (...) float [V], c · U / √3
    z1 : (...) complex [ohm]
    Returns : (...) float [A]
    Source : IEC 60909-0:2016, 7.3
    """
    return np.asarray(np.sqrt(3) / 2 * three_phase(source, z1))


def phase_earth(source: ArrayLike, z1: ArrayLike, z0: ArrayLike) -> Real:
    """Current of a fault between one phase and earth, with Z2 = Z1.

    I = 3 · E / |2 Z1 + Z0| = E / Zs

    source : (...) float [V], c · U / √3
    z1 : (...) complex [ohm]
    z0 : (...) complex [ohm]; infinite where the zero sequence has no way back
    Returns : (...) float [A]
    Source : IEC 60909-0:2016, 7.5
    """
    return _over(source, np.abs(earth_loop(z1, z0)))


def earth_loop(z1: ArrayLike, z0: ArrayLike) -> Complex:
    """Impedance of the earth-fault loop, source included.

    Zs = (2 Z1 + Z0) / 3

    z1 : (...) complex [ohm]
    z0 : (...) complex [ohm]
    Returns : (...) complex [ohm]; infinite where z0 is
    Source : IEC 60364-4-41, 411.4.4
    """
    whole = np.asarray(z1) + np.asarray(z1) + np.asarray(z0)
    return np.where(np.isinf(whole), whole, np.where(np.isinf(whole), 0, whole) / 3)


class TwoPhaseEarth(NamedTuple):
    """A fault between phases b, c and earth.

    b, c : (...) float [A] in the two phases
    earth : (...) float [A] into earth
    """

    b: Real
    c: Real
    earth: Real


def two_phase_earth(source: ArrayLike, z1: ArrayLike, z0: ArrayLike) -> TwoPhaseEarth:
    """Currents of a fault between two phases and earth, with Z2 = Z1.

    Ib, Ic = √3 · E · |Z0 - a Z1|, |Z0 - a² Z1| over |Z1² + 2 Z1 Z0|,  Ie = 3 · E / |Z1 + 2 Z0|

    source : (...) float [V], c · U / √3
    z1 : (...) complex [ohm]
    z0 : (...) complex [ohm]; infinite where the zero sequence has no way back
    Returns : TwoPhaseEarth
    Source : IEC 60909-0:2016, 7.4
    """
    one, zero, e = np.asarray(z1, dtype=complex), np.asarray(z0, dtype=complex), np.asarray(source)
    with np.errstate(divide="ignore", invalid="ignore"):
        y0 = np.where(np.isinf(zero), 0, 1 / zero)
        below = np.abs(one * (one * y0 + 2))
        b, c = (np.sqrt(3) * e * np.abs(1 - turn * one * y0) / below for turn in (TURN, TURN**2))
        earth = np.where(y0 == 0, 0.0, 3 * e * np.abs(y0) / np.abs(one * y0 + 2))
    return TwoPhaseEarth(b, c, earth)


def peak_factor(r_over_x: ArrayLike) -> Real:
    """How far the first peak stands above the symmetrical one.

    κ = 1.02 + 0.98 · e^(-3 R/X)

    r_over_x : (...) float; infinite where there is no reactance. On rings that of the equivalent frequency
    Returns : (...) float, 1.02 to 2.00
    Source : IEC 60909-0:2016, 8.1
    """
    return np.asarray(1.02 + 0.98 * np.exp(-3 * np.asarray(r_over_x, dtype=float)))


def peak(current: ArrayLike, r_over_x: ArrayLike) -> Real:
    """Peak of the fault current.

    ip = κ · √2 · I

    current : (...) float [A], initial symmetrical
    r_over_x : (...) float
    Returns : (...) float [A]
    Source : IEC 60909-0:2016, 8.1
    """
    return np.asarray(peak_factor(r_over_x) * np.sqrt(2) * np.asarray(current))


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


def _over(above: ArrayLike, below: ArrayLike) -> Real:
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(np.asarray(above, dtype=float) / below)
