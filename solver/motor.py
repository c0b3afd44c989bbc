"""Motors: what one draws while it runs and while it starts, and the torque it starts with."""

import numpy as np
from numpy.typing import ArrayLike

from solver.load import power
from solver.network import Complex, Real


def running(output: ArrayLike, efficiency: ArrayLike, power_factor: ArrayLike) -> Complex:
    """Power drawn at an output at the shaft, whatever the voltage.

    S = P / (η · cosφ) · (cosφ + j sinφ)

    output : (...) float [W]
    efficiency : (...) float, more than 0 to 1
    power_factor : (...) float, more than 0 to 1
    Returns : (...) complex [VA]
    Source : IEC 60034-1, rated output and efficiency (from memory)
    """
    cos = np.asarray(power_factor, dtype=float)
    return power(np.asarray(output, dtype=float) / (np.asarray(efficiency) * cos), cos)


def starting(rated: ArrayLike, times: ArrayLike, power_factor: ArrayLike) -> Complex:
    """Power drawn at the rated voltage while a motor starts.

    S = |S rated| · (I / I rated) · (cosφ + j sinφ)

    Straight on the line it goes with the square of the voltage, as the locked rotor is an impedance; behind
    a soft starter or a drive with the voltage, as these hold the current.

    rated : (...) complex or float [VA] drawn at rated output
    times : (...) float, current over the rated current
    power_factor : (...) float at the start
    Returns : (...) complex [VA]
    Source : locked rotor as an impedance: IEC 60909-0, 3.8 (from memory)
    """
    return power(np.abs(np.asarray(rated)) * np.asarray(times, dtype=float), power_factor)


def direct_torque(voltage: ArrayLike, rated: ArrayLike) -> Real:
    """Torque of a start straight on the line over that at rated voltage: (U / Ur)².

    voltage : (...) float [V] at the terminals
    rated : (...) float [V]
    Returns : (...) float
    Source : IEC 60034-12 (from memory): torque goes with the square of the voltage
    """
    return np.asarray((np.asarray(voltage, dtype=float) / np.asarray(rated, dtype=float)) ** 2)


def limited_torque(times: ArrayLike, locked: ArrayLike) -> Real:
    """Torque of a start with limited current over that straight on the line: (I / I locked rotor)².

    times : (...) float, limited current over the rated current
    locked : (...) float, locked-rotor current at rated voltage over the rated current
    Returns : (...) float, at most 1
    Source : torque goes with the square of the rotor current; common practice, saturation neglected
    """
    share = np.minimum(np.asarray(times, dtype=float) / np.asarray(locked, dtype=float), 1.0)
    return np.asarray(share**2)
