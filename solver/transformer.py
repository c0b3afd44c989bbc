"""Two-winding transformers: from nameplate and test figures to ratio, impedance and magnetising branch."""

import re
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from solver.network import Complex, Real

GROUP = re.compile(r"(D|YN|Y|ZN|Z|I)(d|yn|y|zn|z|i)(1[01]|[0-9])")


class Equivalent(NamedTuple):
    """A transformer as the network holds it.

    ratio : (...) complex, U1/U2 at the tap; its angle is the lead of side 1 over side 2
    z : (...) complex [ohm] seen at winding 2
    y : (2, ...) complex [S] at the terminals of winding 1 and of winding 2, one of them zero
    """

    ratio: Complex
    z: Complex
    y: Complex


def short_circuit(
    uk_percent: ArrayLike, load_loss: ArrayLike, rating: ArrayLike, rated_voltage: ArrayLike
) -> Complex:
    """Series impedance from the nameplate, per phase where the rated voltage is between lines.

    |Z| = uk/100 · U² / S,  R = Pk · U² / S²,  X = √(|Z|² - R²)

    uk_percent : (...) float [%] short-circuit voltage at rated current
    load_loss : (...) float [W] of the whole unit at rated current
    rating : (...) float [VA]
    rated_voltage : (...) float [V] of the winding it is seen from
    Returns : (...) complex [ohm]
    Raises : ValueError where the load loss asks for more resistance than uk has impedance
    Source : IEC 60076-1:2011, 3.7.1 and 10.4
    """
    base = np.asarray(rated_voltage, dtype=float) ** 2 / np.asarray(rating)
    z = np.asarray(uk_percent) / 100
    r = np.asarray(load_loss) / np.asarray(rating)
    if np.any(r > z * (1 + 1e-12)):
        raise ValueError("the load loss over the rating must not be more than uk")
    return base * (r + 1j * np.sqrt(np.maximum(z**2 - r**2, 0)))


def magnetising(
    no_load_loss: ArrayLike, no_load_current_percent: ArrayLike, rating: ArrayLike, rated_voltage: ArrayLike
) -> Complex:
    """Magnetising admittance from the no-load test, so that the no-load loss goes with U².

    G = P0 / U²,  |Y| = i0/100 · S / U²,  Y = G - j √(|Y|² - G²)

    no_load_loss : (...) float [W] of the whole unit at rated voltage
    no_load_current_percent : (...) float [%] of rated current
    rating : (...) float [VA]
    rated_voltage : (...) float [V] of the winding it is seen from
    Returns : (...) complex [S]
    Raises : ValueError where the no-load current is too small to carry the no-load loss
    Source : IEC 60076-1:2011, 3.6.2 and 11.5
    """
    base = np.asarray(rating) / np.asarray(rated_voltage, dtype=float) ** 2
    g = np.asarray(no_load_loss) / np.asarray(rating)
    y = np.asarray(no_load_current_percent) / 100
    if np.any(g > y * (1 + 1e-12)):
        raise ValueError("the no-load loss over the rating must not be more than the no-load current")
    return base * (g - 1j * np.sqrt(np.maximum(y**2 - g**2, 0)))


def tap_factor(notch: ArrayLike, step_percent: ArrayLike) -> Real:
    """Rated voltage of the tapped winding at a notch over its nameplate.

    t = 1 + notch · step / 100

    notch : (...) int, notches above (+) or below (-) the nameplate voltage
    step_percent : (...) float [%]
    Returns : (...) float
    Source : IEC 60076-1:2011, 3.5
    """
    return 1 + np.asarray(notch) * np.asarray(step_percent) / 100


def clock(vector_group: str) -> int:
    """Clock number of a vector group: winding 2 lags winding 1 by that many times 30°.

    vector_group : such as Dyn11, YNd5, Yzn11, Dd0; Ii0 or Ii6 for a single-phase unit
    Returns : 0 to 11
    Raises : ValueError where the letters and the number do not go together: an odd number needs exactly
        one star winding, an even number two or none
    Source : IEC 60076-1:2011, 7.1 and Annex D

    >>> clock("Dyn11"), clock("YNd1"), clock("Ii6")
    (11, 1, 6)
    """
    found = GROUP.fullmatch(vector_group)
    if found is None:
        raise ValueError(f"{vector_group!r} is not a vector group such as Dyn11, YNd1 or Ii0")
    one, two, number = found[1], found[2].upper(), int(found[3])
    if (one == "I") != (two == "I"):
        raise ValueError(f"{vector_group!r} mixes a single-phase and a three-phase winding")
    if one == "I" and number not in (0, 6):
        raise ValueError(f"{vector_group!r}: a single-phase unit has clock number 0 or 6")
    if one != "I" and number % 2 != ((one[0] == "Y") != (two[0] == "Y")):
        raise ValueError(f"{vector_group!r}: these windings cannot have clock number {number}")
    return number


def equivalent(
    v1: ArrayLike,
    v2: ArrayLike,
    z_at_2: ArrayLike,
    y_at_1: ArrayLike,
    clock_number: ArrayLike = 0,
    tap_1: ArrayLike = 1.0,
    tap_2: ArrayLike = 1.0,
    parallel: ArrayLike = 1,
) -> Equivalent:
    """A transformer at its tap as the network holds it; ohms stay constant on the untapped winding's side.

    a = U1·t1 / (U2·t2) ∠ clock·30°,  z = z2 · t2² / n,  y = n · y1 / t1², or n · y1 · (U1/U2)² / t2²

    With taps on winding 1 the impedance seen at winding 2 does not move, nor does, with taps on winding 2,
    the one seen at winding 1; seen at winding 2 that is t2². The magnetising branch stands at the terminals
    of the winding of higher rated voltage, winding 1 where they are equal, and takes its no-load loss and
    current at the voltage of that winding's tap.

    v1 : (...) float [V] rated no-load voltage of winding 1
    v2 : (...) float [V] rated no-load voltage of winding 2
    z_at_2 : (...) complex [ohm] at nameplate, seen at winding 2
    y_at_1 : (...) complex [S] at nameplate, seen at winding 1
    clock_number : (...) int
    tap_1 : (...) float, tap factor of winding 1
    tap_2 : (...) float, tap factor of winding 2
    parallel : (...) int, like units side by side
    Returns : Equivalent
    Source : common practice, no source
    """
    t1, t2, n = np.asarray(tap_1, dtype=float), np.asarray(tap_2, dtype=float), np.asarray(parallel)
    ratio = np.asarray(v1) * t1 / (np.asarray(v2) * t2) * np.exp(1j * np.pi / 6 * np.asarray(clock_number))
    high, y = np.asarray(v1) >= np.asarray(v2), np.asarray(y_at_1) * n
    at_2 = y * (np.asarray(v1) / np.asarray(v2)) ** 2 / t2**2
    iron = np.broadcast_arrays(np.where(high, y / t1**2, 0), np.where(high, 0, at_2))
    return Equivalent(ratio, np.asarray(z_at_2) * t2**2 / n, np.stack(iron))


def referred(impedance: ArrayLike, from_voltage: ArrayLike, to_voltage: ArrayLike) -> Complex:
    """An impedance as it is seen from the other side of a transformer.

    Z' = Z · (U' / U)²

    impedance : (...) complex [ohm] on the side of from_voltage
    from_voltage : (...) float [V] no-load voltage there
    to_voltage : (...) float [V] no-load voltage of the side it is seen from
    Returns : (...) complex [ohm]
    Source : IEC 60076-8:1997, 7.1
    """
    return np.asarray(impedance) * (np.asarray(to_voltage, dtype=float) / np.asarray(from_voltage)) ** 2


def short_circuit_test(voltage: ArrayLike, current: ArrayLike, power: ArrayLike) -> Complex:
    """Series impedance from a single-phase short-circuit test, seen from the side it was made on.

    |Z| = U / I,  R = P / I²

    voltage : (...) float [V]
    current : (...) float [A]
    power : (...) float [W]
    Returns : (...) complex [ohm]
    Source : Chapman, Electric Machinery Fundamentals, section 2.5
    """
    r = np.asarray(power, dtype=float) / np.asarray(current) ** 2
    return r + 1j * np.sqrt((np.asarray(voltage) / np.asarray(current)) ** 2 - r**2)


def open_circuit_test(voltage: ArrayLike, current: ArrayLike, power: ArrayLike) -> Complex:
    """Magnetising admittance from a single-phase open-circuit test, seen from the side it was made on.

    |Y| = I / U,  G = P / U²

    voltage : (...) float [V]
    current : (...) float [A]
    power : (...) float [W]
    Returns : (...) complex [S]; Rc = 1/Re Y, Xm = -1/Im Y
    Source : Chapman, Electric Machinery Fundamentals, section 2.5
    """
    g = np.asarray(power, dtype=float) / np.asarray(voltage) ** 2
    return g - 1j * np.sqrt((np.asarray(current) / np.asarray(voltage)) ** 2 - g**2)


def regulation(loading: ArrayLike, ur_percent: ArrayLike, ux_percent: ArrayLike, phi: ArrayLike) -> Real:
    """Exact regulation: rise of the secondary voltage from loaded at rated voltage to no load.

    ΔU = 100 · (|1 + β · (uR + j uX)/100 · e^(-jφ)| - 1)

    loading : (...) float, β, current over rated current
    ur_percent : (...) float [%] resistive part of uk
    ux_percent : (...) float [%] reactive part of uk
    phi : (...) float [rad], lag of the current, negative where it leads
    Returns : (...) float [%] of rated voltage
    Source : Chapman, Electric Machinery Fundamentals, section 2.7
    """
    u = (np.asarray(ur_percent) + 1j * np.asarray(ux_percent)) / 100
    return 100 * (np.abs(1 + np.asarray(loading) * u * np.exp(-1j * np.asarray(phi))) - 1)


def regulation_kapp(loading: ArrayLike, ur_percent: ArrayLike, ux_percent: ArrayLike, phi: ArrayLike) -> Real:
    """Regulation by Kapp's triangle with its second-order term.

    ΔU = β · (uR cosφ + uX sinφ) + β² · (uX cosφ - uR sinφ)² / 200

    loading : (...) float, β, current over rated current
    ur_percent : (...) float [%]
    ux_percent : (...) float [%]
    phi : (...) float [rad], lag of the current, negative where it leads
    Returns : (...) float [%]; off by about uk³/10⁴, so below 0.01 % for uk up to 4 %
    Source : IEC 60076-8:1997, 7.4
    """
    beta, cos, sin = np.asarray(loading), np.cos(phi), np.sin(phi)
    ur, ux = np.asarray(ur_percent), np.asarray(ux_percent)
    return beta * (ur * cos + ux * sin) + beta**2 * (ux * cos - ur * sin) ** 2 / 200


def efficiency(
    loading: ArrayLike,
    rating: ArrayLike,
    power_factor: ArrayLike,
    no_load_loss: ArrayLike,
    load_loss: ArrayLike,
) -> Real:
    """Power delivered over power taken in, at rated voltage.

    η = 100 · β S cosφ / (β S cosφ + P0 + β² Pk)

    loading : (...) float, β
    rating : (...) float [VA]
    power_factor : (...) float
    no_load_loss : (...) float [W]
    load_loss : (...) float [W] at rated current
    Returns : (...) float [%]
    Source : IEC 60076-20:2017, 4.2, conventional efficiency
    """
    beta = np.asarray(loading)
    out = beta * np.asarray(rating) * np.asarray(power_factor)
    return 100 * out / (out + np.asarray(no_load_loss) + beta**2 * np.asarray(load_loss))


def best_loading(no_load_loss: ArrayLike, load_loss: ArrayLike) -> Real:
    """Loading at which the efficiency is best: where load loss equals no-load loss.

    β = √(P0 / Pk)

    no_load_loss : (...) float [W]
    load_loss : (...) float [W] at rated current
    Returns : (...) float
    Source : IEC 60076-20:2017, 4.2
    """
    return np.sqrt(np.asarray(no_load_loss, dtype=float) / np.asarray(load_loss))
