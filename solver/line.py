"""Cables and overhead lines: resistance when hot, series impedance, charging."""

import math

import numpy as np
from numpy.typing import ArrayLike

from solver.network import Complex, Real

ALPHA = {"Cu": 0.00393, "Al": 0.00403}  # 1/K at 20 °C, IEC 60228 Annex B and IEC 60287-1-1 Table 1


def resistance(r20: ArrayLike, alpha: ArrayLike, temperature: ArrayLike) -> Real:
    """Resistance of a conductor at its operating temperature.

    R = R20 · [1 + α · (θ - 20)]

    r20 : (...) float [ohm or ohm/km] at 20 °C
    alpha : (...) float [1/K] temperature coefficient at 20 °C; ALPHA holds those of Cu and Al
    temperature : (...) float [°C] of the conductor
    Returns : (...) float, in the unit of r20
    Source : IEC 60287-1-1:2023, 5.1.2; α from its Table 1

    >>> round(float(resistance(0.125, ALPHA["Al"], 60)), 6)
    0.14515
    """
    return np.asarray(r20) * (1 + np.asarray(alpha) * (np.asarray(temperature, dtype=float) - 20))


def series(
    r20_ohm_per_km: ArrayLike,
    x_ohm_per_km: ArrayLike,
    length_m: ArrayLike,
    temperature: ArrayLike,
    alpha: ArrayLike,
    parallel: ArrayLike = 1,
    two_wire: ArrayLike = False,
) -> Complex:
    """Series impedance of a whole run: per phase, or out and back in a two-wire layout.

    Z = w · (R + jX) · L / n, with w = 2 for two wires, else 1

    r20_ohm_per_km : (...) float [ohm/km] of one conductor of one run at 20 °C
    x_ohm_per_km : (...) float [ohm/km] of one conductor
    length_m : (...) float [m] one way
    temperature : (...) float [°C] of the conductor
    alpha : (...) float [1/K] temperature coefficient at 20 °C
    parallel : (...) int, like runs side by side
    two_wire : (...) bool, the current comes back through a second, equal wire
    Returns : (...) complex [ohm]
    Source : common practice, no source; resistance as IEC 60287-1-1
    """
    per_km = resistance(r20_ohm_per_km, alpha, temperature) + 1j * np.asarray(x_ohm_per_km)
    wires = np.where(two_wire, 2.0, 1.0)
    return wires * per_km * np.asarray(length_m, dtype=float) / 1e3 / np.asarray(parallel)


def charging(
    c_uf_per_km: ArrayLike,
    length_m: ArrayLike,
    frequency: ArrayLike,
    parallel: ArrayLike = 1,
    two_wire: ArrayLike = False,
) -> Complex:
    """Shunt admittance of a whole run, half of which stands at each end.

    Y = j · 2π · f · C · L · n, half of it between two wires, whose capacitances stand in series

    c_uf_per_km : (...) float [µF/km] of one conductor of one run to neutral
    length_m : (...) float [m]
    frequency : (...) float [Hz]
    parallel : (...) int, like runs side by side
    two_wire : (...) bool, voltage is taken between two wires
    Returns : (...) complex [S]
    Source : common practice, no source; lumped π, good where a line is far shorter than its wavelength
    """
    farads = np.asarray(c_uf_per_km, dtype=float) * 1e-6 * np.asarray(length_m) / 1e3 * np.asarray(parallel)
    return 2j * math.pi * np.asarray(frequency) * farads / np.where(two_wire, 2.0, 1.0)


def symmetric(z1: ArrayLike, z0: ArrayLike) -> Complex:
    """Matrix of three phases out of positive and zero sequence, impedances or admittances.

    Zs = (2 Z1 + Z0) / 3 on the diagonal, Zm = (Z0 - Z1) / 3 beside it

    z1 : (...) complex, positive sequence
    z0 : (...) complex, zero sequence with the return that it was stated for
    Returns : (..., 3, 3) complex, in the unit of both
    Source : Fortescue, Trans. AIEE 37 (1918) 1027-1140
    """
    one, zero = np.asarray(z1)[..., None, None], np.asarray(z0)[..., None, None]
    return np.asarray(one * np.eye(3) + (zero - one) / 3 * np.ones((3, 3)), dtype=np.complex128)


def four_wire(phase: ArrayLike, neutral: ArrayLike, mutual: ArrayLike = 0.0) -> Complex:
    """Matrix of three phases and a neutral that carries its own current.

    The phase on the diagonal thrice, then the neutral; the mutual impedance beside it, none where it is
    within the figures, as with reactances of cables stated for three phases or for out and back.

    phase : (...) complex [ohm] of one phase conductor
    neutral : (...) complex [ohm] of the neutral
    mutual : (...) complex [ohm] between any two conductors
    Returns : (..., 4, 4) complex [ohm]; without a mutual its zero sequence, out and back, is that of the
        phase and three times the neutral
    Source : common practice, no source
    """
    own = np.stack(np.broadcast_arrays(phase, phase, phase, neutral), axis=-1)
    beside = np.asarray(mutual)[..., None, None] * (1 - np.eye(4))
    return np.asarray(own[..., None] * np.eye(4) + beside, dtype=np.complex128)
