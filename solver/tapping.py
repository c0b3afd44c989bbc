"""Transformers moved to other taps, point by point."""

from collections.abc import Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from solver.arrays import Complex, Real
from solver.network import Network
from solver.windings import NEUTRAL
from solver.wires import Units

NONE = 1e-9  # of a gain, what rounding leaves of a zero sequence that does not pass


def retapped(
    network: Network,
    rows: Sequence[int],
    windings: Sequence[int],
    factor: Real,
    phases: Sequence[int | None] = (),
) -> Network:
    """The same network with some transformers at other taps.

    The tapped winding has `factor` times its rated volts; ohms stay constant on the other side, the
    magnetising branch of the tapped winding goes by 1 / factor²

    network : Network, these transformers at their nameplate
    rows : (tapped,) transformers
    windings : (tapped,) 1 or 2
    factor : (tapped, batch) float, tap factors
    phases : (tapped,) the conductor that alone is moved, of a regulator that passes each on by itself; None
        where all are, and for all where it is empty
    Returns : Network
    Source : see solver.transformer.equivalent
    """
    width = max(factor.shape[-1], 1)
    ratio, z, y = (_wide(getattr(network, f"transformer_{name}"), width) for name in ("ratio", "z", "y"))
    units = None if network.wires is None else _widened(network.wires.units, width)
    for row, winding, t, phase in zip(rows, windings, factor, phases or [None] * len(rows), strict=True):
        if phase is not None and units is not None:
            units.gain[row, winding - 1, phase, phase] /= t
            units.gain[row, 2 - winding, phase, phase] *= t
            _lead_neutral(units.gain[row])
            continue
        ratio[row] *= t if winding == 1 else 1 / t
        z[row] *= 1 if winding == 1 else t**2
        y[row, winding - 1] /= t**2
        if units is not None:
            own = winding - 1
            units.series[row, own] += _star_beyond(units, row, own) * (1 / t**2 - 1)
            units.gain[row, own] /= t  # fed from the tapped winding
            units.gain[row, 1 - own] *= t
            earth = _to_earth(units, row, own)
            units.series[row, 1 - own] = earth + (units.series[row, 1 - own] - earth) * t**2
            units.iron[row, own] /= t**2
            around = 9 * units.star[row, own] * units.own[row, own, 0].any()
            units.own_z[row, own, 0] = around + (units.own_z[row, own, 0] - around) * t**2
            _lead_neutral(units.gain[row])
    wires = network.wires
    if wires is not None and units is not None:
        wires = replace(wires, units=units)
    return replace(network, transformer_ratio=ratio, transformer_z=z, transformer_y=y, wires=wires)


def _to_earth(units: Units, row: int, own: int) -> Complex:
    """(k, k, batch) what of the tapped winding's ohms is no coil: from neutral or star point to earth."""
    has = 1.0 * units.has[row, own]
    ohms = units.own_z[row, own, 1] * units.own[row, own, 1].any()
    return np.asarray(np.multiply.outer(np.outer(has, has), ohms + units.star[row, own]))


def _star_beyond(units: Units, row: int, own: int) -> Complex:
    """(k, k, batch) ohms of the same star point seen at the other winding, where a zero sequence passes."""
    passed = units.gain[row, own, :NEUTRAL, :NEUTRAL].sum(axis=(0, 1)) / NEUTRAL
    passed = np.where(np.abs(passed) > NONE * np.abs(units.gain[row, own]).max(), np.abs(passed), 0)
    phases = np.append(np.ones(NEUTRAL), 0)
    return np.asarray(np.multiply.outer(np.outer(phases, phases), units.star[row, own] * passed**2))


def _lead_neutral(gain: Complex) -> None:
    """Where the neutral is led through, and is no end of a coil, phases are moved against it:
    V' - VN = g (V - VN)."""
    if gain[:, -1, -1].any() and not gain[:, -1, :-1].any():
        phases = np.arange(gain.shape[1] - 1)
        moved = gain[:, phases, phases]
        gain[:, phases, -1] = np.where(moved != 0, 1 - moved, 0)
        gain[:, -1, -1] = 1


def _wide(array: Complex, width: int) -> Complex:
    return np.broadcast_to(array, (*array.shape[:-1], max(width, array.shape[-1]))).copy()


def _widened(units: Units, width: int) -> Units:
    names = ("gain", "series", "iron", "own_z")
    wide: dict[str, Any] = {name: _wide(getattr(units, name), width) for name in names}
    return replace(units, **wide)
