"""Loads: apparent power from what is stated, and how it moves with the voltage."""

import numpy as np
from numpy.typing import ArrayLike

from solver.network import Complex, Real


def power(apparent: ArrayLike, power_factor: ArrayLike, leading: ArrayLike = False) -> Complex:
    """Complex power drawn by a load of stated apparent power.

    S = |S| · (cosφ ± j sinφ), minus where the current leads

    apparent : (...) float [VA]
    power_factor : (...) float, 0 to 1
    leading : (...) bool
    Returns : (...) complex [VA]
    Source : IEC 60050-131, 131-11-41 to 131-11-46
    """
    cos = np.asarray(power_factor, dtype=float)
    sin = np.sqrt(1 - cos**2)
    return np.asarray(apparent) * (cos + 1j * np.where(leading, -sin, sin))


def mix(constant_current: ArrayLike, constant_impedance: ArrayLike) -> Real:
    """Shares of constant power, constant current and constant impedance; power takes what is left over.

    constant_current : (...) float, share 0 to 1
    constant_impedance : (...) float, share 0 to 1
    Returns : (..., 3) float, summing to 1
    Raises : ValueError where a share is outside 0 to 1 or both are more than the whole
    Source : common practice, no source
    """
    current, impedance = np.broadcast_arrays(
        np.asarray(constant_current, dtype=float), np.asarray(constant_impedance, dtype=float)
    )
    rest = 1 - current - impedance
    if np.any(current < 0) or np.any(impedance < 0) or np.any(rest < -1e-12):
        raise ValueError("shares of a load lie between 0 and 1 and are not more than the whole")
    return np.stack((np.maximum(rest, 0.0), current, impedance), axis=-1)


def drawn(stated: ArrayLike, shares: ArrayLike, voltage: ArrayLike, reference: ArrayLike) -> Complex:
    """Power drawn at a voltage by a load stated at its reference voltage.

    S = S0 · [p + i · (|V|/V0) + z · (|V|/V0)²]

    stated : (...) complex [VA] S0
    shares : (..., 3) float, p, i, z
    voltage : (...) complex [V]
    reference : (...) float [V] V0
    Returns : (...) complex [VA]
    Source : IEEE Task Force, Load representation for dynamic performance analysis, IEEE Trans. Power
        Systems 8 (1993) 472-482
    """
    size = np.abs(voltage) / np.asarray(reference)
    share = np.asarray(shares)
    return np.asarray(stated) * (share[..., 0] + size * (share[..., 1] + size * share[..., 2]))
