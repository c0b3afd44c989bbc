"""Overhead lines from what hangs on the pole: impedances with earth return, earthed neutrals, charging."""

import numpy as np
from numpy.typing import ArrayLike

from solver.arrays import Complex, Real

MU = 4e-7 * np.pi  # H/m
EPSILON = 8.8541878128e-12  # F/m
EULER = 0.5772156649015329


def earth_depth(frequency: float, resistivity: float = 100.0) -> float:
    """Depth of the equivalent earth return, 659 m · √(ρ/f).

    De = 2 e^(1/2 - γ) / √(ω μ0 / ρ)

    frequency : [Hz]
    resistivity : [ohm m] of the soil
    Returns : [m]
    Source : Carson, Wave propagation in overhead wires with ground return, Bell System Tech. J. 5 (1926)
        539-554, first terms of the series; IEC 60909-3

    >>> round(earth_depth(50)), round(earth_depth(60))
    (932, 851)
    """
    return float(2 * np.exp(0.5 - EULER) / np.sqrt(2 * np.pi * frequency * MU / resistivity))


def primitive(
    r_ohm_per_km: ArrayLike,
    gmr_m: ArrayLike,
    x_m: ArrayLike,
    y_m: ArrayLike,
    frequency: float,
    resistivity: float = 100.0,
) -> Complex:
    """Series impedances of conductors above earth, each with its return in the earth.

    zii = ri + ωμ0/8 + j ωμ0/2π · ln(De / GMRi),  zij = ωμ0/8 + j ωμ0/2π · ln(De / Dij)

    r_ohm_per_km : (conductor,) float [ohm/km] at operating temperature
    gmr_m : (conductor,) float [m] geometric mean radius
    x_m : (conductor,) float [m] across the pole
    y_m : (conductor,) float [m] above ground
    frequency : [Hz]; all constants follow from it
    resistivity : [ohm m] of the soil
    Returns : (conductor, conductor) complex [ohm/km]
    Source : modified Carson's equations, Kersting, Distribution System Modeling and Analysis, section 4.1
    """
    gmr = np.asarray(gmr_m, dtype=float)
    place = np.asarray(x_m, dtype=float) + 1j * np.asarray(y_m, dtype=float)
    between = np.abs(place[:, None] - place) + np.diag(gmr)
    omega_mu = 2e3 * np.pi * frequency * MU  # per km
    earth = omega_mu / 8 + 1j * omega_mu / (2 * np.pi) * np.log(earth_depth(frequency, resistivity) / between)
    return np.asarray(earth + np.diag(np.asarray(r_ohm_per_km, dtype=float)), dtype=np.complex128)


def kron(matrix: ArrayLike, kept: int) -> Complex:
    """Takes conductors that are earthed all along out of a matrix of impedances or potentials.

    Z = Zij - Zin · Znn⁻¹ · Znj

    matrix : (conductor, conductor) complex
    kept : the first so many conductors stay, the others are earthed
    Returns : (kept, kept) complex
    Source : Kersting, Distribution System Modeling and Analysis, section 4.1.8
    """
    z = np.asarray(matrix, dtype=np.complex128)
    inner = np.linalg.solve(z[kept:, kept:], z[kept:, :kept])
    return np.asarray(z[:kept, :kept] - z[:kept, kept:] @ inner, dtype=np.complex128)


def potential(radius_m: ArrayLike, x_m: ArrayLike, y_m: ArrayLike) -> Real:
    """Potential coefficients of conductors above earth, by their images below it.

    Pij = ln(Sij / Dij) / (2π ε0), with the radius for Dii and Sij to the image of j

    radius_m : (conductor,) float [m]
    x_m : (conductor,) float [m] across the pole
    y_m : (conductor,) float [m] above ground
    Returns : (conductor, conductor) float [km/F]; its inverse, after `kron`, is the capacitance a km
    Source : Kersting, Distribution System Modeling and Analysis, section 5.1
    """
    place = np.asarray(x_m, dtype=float) + 1j * np.asarray(y_m, dtype=float)
    between = np.abs(place[:, None] - place) + np.diag(np.asarray(radius_m, dtype=float))
    image = np.abs(place[:, None] - np.conj(place))
    return np.asarray(np.log(image / between) / (2e3 * np.pi * EPSILON), dtype=np.float64)


def sequence(matrix: ArrayLike) -> Complex:
    """Zero, positive and negative sequence out of phases.

    Z012 = A⁻¹ · Zabc · A

    matrix : (3, 3) complex
    Returns : (3, 3) complex, in the order 0, 1, 2
    Source : Fortescue, Trans. AIEE 37 (1918) 1027-1140
    """
    turn = np.exp(2j * np.pi / 3)
    a = np.array([[1, 1, 1], [1, turn**2, turn], [1, turn, turn**2]])
    return np.asarray(np.linalg.inv(a) @ np.asarray(matrix) @ a, dtype=np.complex128)
