"""Transformers and regulators as two-ports between phases and neutral."""

import math
from typing import Any

import numpy as np
from numpy.typing import NDArray

from app.model import taps
from app.model.fault_data import corner_earth_ohm, figure, star_earth_ohm, stated_earth_ohm
from app.model.kinds import Transformer
from app.model.levels import SPLIT, THREE_PHASE
from app.model.wire_data import is_star_star, zero_value
from app.study.unit_wires import OPEN, UnitWires
from app.study.wires import ROOT3, N
from solver.banks import Coil, bank, centre_tapped
from solver.windings import Unit, Winding, passing, three_phase

Complex = NDArray[np.complex128]
APART = Winding("D")


def port_of(unit: Transformer, wires: UnitWires | None, z_at_2: complex, y: Complex) -> Unit:
    """The two-port of a transformer at its tap.

    unit : the transformer
    wires : its conductors; None where it is dead
    z_at_2 : [ohm] of the whole unit, all parallel ones merged, seen at winding 2
    y : (2,) complex [S] magnetising admittance at the terminals of each winding

    Returns : Unit
    Source : see solver.windings, solver.banks
    """
    v1, v2 = taps.windings(unit, unit.tap if unit.regulates == "no" else 0)
    iron: Any = np.asarray(y)[:, None]
    if wires is None:
        return three_phase(APART, APART, 0, v1, v2, z_at_2, iron)
    if unit.build in OPEN:
        star = unit.build != "open delta"
        turns = v1 / ROOT3 if star else v1
        half = (y[0] * (1.5 if star else 0.5), y[1] / 2)
        coils = [Coil(one, two, turns, v2, 2 * z_at_2, half) for one, two in wires.ends]
        return bank(coils, earth_2=_corner(unit))
    if unit.build == "centre-tapped":
        y1 = y[0] + y[1] * (v2 / v1) ** 2
        return centre_tapped(wires.ends[0][0], v1, v2, z_at_2, _earth(unit, 2), y1)
    if wires.ends:
        from_1, from_2 = wires.ends[0]
        earths = _held(from_1, unit, 1, wires.fed), _held(from_2, unit, 2, wires.fed)
        return bank([Coil(from_1, from_2, v1, v2, z_at_2, (y[0], y[1]))], *earths)
    group = taps.group(unit.vector_group)
    assert group is not None  # rows are made only of a layout whose groups were checked
    one, two = _windings(unit, group, wires)
    passes = passes_zero(unit, wires)
    zero = figure(zero_value(unit, passes))
    core = None if passes else z_at_2 * zero
    return three_phase(one, two, group[2], v1, v2, z_at_2, iron, core, zero if passes else 1.0)


def passes_zero(unit: Transformer, wires: UnitWires) -> bool:
    """Whether a three-phase unit lets a zero sequence pass its windings: not a star whose other is not held.

    unit : the transformer
    wires : its conductors

    Returns : bool
    """
    group = taps.group(unit.vector_group)
    if group is None or not is_star_star(unit):
        return True
    return all(winding.held for winding in _windings(unit, group, wires))


def ratio_of(unit: Transformer, wires: UnitWires | None, systems: list[str], turned: complex) -> complex:
    """Phase volts of winding 1 over those of winding 2 with nothing connected.

    unit : the transformer
    wires : its conductors
    systems : of the zones at winding 1 and 2
    turned : complex, ratio of rated volts with the clock

    Returns : complex
    Source : common practice, no source
    """
    if wires is None or not wires.ends or unit.build in OPEN:
        return turned
    over = []
    for ends, system in zip(wires.ends[0], systems, strict=True):
        between = ends[1] not in (N, -1)
        over.append((ROOT3 if system == THREE_PHASE else 2.0 if system == SPLIT else 1.0) if between else 1)
    return turned * over[1] / over[0]


def through(has: int) -> Unit:
    """A regulator of ratio 1, the neutral passing by.

    has : bits, its conductors

    Returns : Unit
    """
    return passing([bool(has >> slot & 1) for slot in range(4)])


def _windings(unit: Transformer, group: tuple[str, str, int], wires: UnitWires) -> list[Winding]:
    return [_winding(unit, (group[0], group[1])[side], side + 1, wires.neutral[side]) for side in (0, 1)]


def _winding(unit: Transformer, letters: str, number: int, neutral: bool) -> Winding:
    letter = letters[0].upper()
    star = letters.upper().endswith("N")
    earth = star_earth_ohm(unit, number) if letter != "D" else None
    return Winding(letter, star and neutral, None if earth is None else complex(earth))


def _earth(unit: Transformer, winding: int) -> complex | None:
    """Of a single-phase winding that feeds: solid where nothing is said."""
    given = stated_earth_ohm(unit, winding) or 0.0
    return complex(given) if given < math.inf else None


def _held(ends: tuple[int, int], unit: Transformer, winding: int, fed: int) -> tuple[int, complex] | None:
    """The neutral of the side that feeds, or that is stated, is earthed."""
    earth = _earth(unit, winding)
    held = ends[1] == N and (stated_earth_ohm(unit, winding) is not None or winding - 1 != fed)
    return (N, earth) if held and earth is not None else None


def _corner(unit: Transformer) -> tuple[int, complex] | None:
    """An open delta is earthed at its corner b where an impedance is given, else not at all."""
    earth = corner_earth_ohm(unit)
    return None if earth is None else (1, complex(earth))
