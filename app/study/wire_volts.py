"""What phase volts are taken against, and how large they are there: to neutral, to earth, between phases."""

import numpy as np
from numpy.typing import NDArray

from app.model.levels import THREE_PHASE
from app.study.conductors import Conductors
from app.study.layout import Layout, arrays_of
from app.study.wire_words import conductor
from app.study.wires import ABC, LETTERS, NEUTRAL, PER_PHASE, N, flags
from app.study.zones import Zones

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
Index = NDArray[np.intp]
TO_NEUTRAL, TO_EARTH, TO_NEXT = range(3)
KINDS = ("neutral", "earth", "next phase")  # the same as tables have it


def against(layout: Layout, zones: Zones, conductors: Conductors) -> Index:
    """What the phase volts of every node are taken against, as loads hang there.

    layout : the graph
    zones : system (zone,) of each zone
    conductors : of every node

    Returns : (node,) int: 0 the neutral, 1 earth, 2 the next phase
    """
    reach, drawn = np.array(conductors.node, dtype=np.intp), np.array(conductors.drawn, dtype=np.intp)
    three = np.array([zones.system[zone] == THREE_PHASE for zone in layout.zone], dtype=bool)
    lone = np.array([(has & ABC).bit_count() == 1 for has in conductors.node], dtype=bool)
    earthed = np.zeros(len(reach), dtype=bool)
    earthed[conductors.earthed] = True
    found = np.where(drawn & NEUTRAL > 0, TO_NEUTRAL, np.where(earthed | lone | ~three, TO_EARTH, TO_NEXT))
    return np.asarray(found, dtype=np.intp)


def base_volts(layout: Layout, zones: Zones, kind: Index) -> Real:
    """Nominal volts of a phase against what it is taken against.

    layout : the graph
    zones : nominal_v (zone,) float [V], system (zone,)
    kind : (node,) int, as `against` gives it

    Returns : (node,) float [V]
    """
    per_phase = np.array([PER_PHASE[system] for system in zones.system])
    zone = arrays_of(layout).zone
    return np.asarray(zones.nominal_v[zone] / np.where(kind == TO_NEXT, 1.0, per_phase[zone]))


def phase_name(phase: int, kind: int, system: str) -> str:
    """A phase as people call it, such as B, L1 or B–C.

    phase : 0 to 2
    kind : what its volts are taken against, as `against` gives it
    system : three-phase, two-wire or split-phase

    Returns : str
    """
    own = conductor(LETTERS[phase], system)
    return f"{own}–{LETTERS[(phase + 1) % 3]}" if kind == TO_NEXT else own


def phase_volts(volts: Complex, reach: Index, kind: Index) -> Complex:
    """Volts of each phase that reaches a node, against what it is taken against.

    volts : (node, k, batch) complex [V] to earth
    reach : (node,) int, bits of the conductors that reach it
    kind : (node,) int, as `against` gives it

    Returns : (node, 3, batch) complex [V], nan where no such phase reaches
    """
    there = flags(reach, 3)
    neutral = np.where(np.isnan(volts[:, N]), 0, volts[:, N])
    to_neutral = volts[:, :3] - np.where((kind == TO_NEUTRAL)[:, None], neutral, 0)[:, None]
    between = volts[:, :3] - np.roll(volts[:, :3], -1, axis=1)
    both = there & np.roll(there, -1, axis=1)
    by_phase = (kind == TO_NEXT)[:, None]
    shown = np.where(by_phase, both, there)[..., None]
    chosen = np.where(by_phase[..., None], between, to_neutral)
    return np.where(shown, chosen, complex(np.nan, np.nan))
