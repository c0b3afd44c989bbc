"""At which conductors a transformer is joined on each side, and how its coils lie between them."""

from msgspec import Struct

from app.model import taps
from app.model.kinds import Transformer
from app.model.levels import SPLIT, THREE_PHASE, TWO_WIRE
from app.model.wire_data import is_low
from app.study.wires import ABC, NEUTRAL, ROOT3, N, bits, slots
from solver.wires import EARTH

Pair = tuple[int, int]
ROUND: dict[str, Pair] = {"AB": (0, 1), "BC": (1, 2), "CA": (2, 0)}
OPEN = ("open delta", "open star to open delta")


class UnitWires(Struct, frozen=True):
    """A transformer between conductors.

    one, two : bits, conductors at winding 1 and winding 2
    ends : (coil,) pairs of conductors at winding 1 and at winding 2, -1 for earth; empty where the windings
        are those of a three-phase unit
    neutral : whether the star point of winding 1, of winding 2 is joined to the neutral
    judged : bits at winding 1 and 2, conductors whose current is that of a coil
    fed : 0 where winding 1 is fed, 1 where winding 2 is
    """

    one: int
    two: int
    ends: tuple[tuple[Pair, Pair], ...] = ()
    neutral: tuple[bool, bool] = (False, False)
    judged: tuple[int, int] = (ABC, ABC)
    fed: int = 0


def unit_wires(
    unit: Transformer, systems: list[str], drawn: list[int], nominal_v: list[float], fed: int
) -> UnitWires | None:
    """At which conductors a transformer is joined.

    unit : the transformer
    systems : of the zones at winding 1 and 2
    drawn : bits, conductors that stand there
    nominal_v : [V] of these zones
    fed : 0 where winding 1 is fed, 1 where winding 2 is

    Returns : UnitWires; None where it cannot stand between these systems
    """
    if unit.build in OPEN:
        return _open(unit, drawn) if systems == [THREE_PHASE, THREE_PHASE] else None
    group = taps.group(unit.vector_group)
    if unit.build == "centre-tapped":
        return _tapped(unit, systems, drawn, nominal_v, fed)
    if group is None or group[0] == "I":
        return _single(unit, systems, drawn, nominal_v, fed)
    if systems != [THREE_PHASE, THREE_PHASE]:
        return None
    stars = [letter.upper().endswith("N") for letter in group[:2]]
    neutral = [
        star and (bool(has & NEUTRAL) or is_low(volts))
        for star, has, volts in zip(stars, drawn, nominal_v, strict=True)
    ]
    sides = [ABC | (NEUTRAL if out else 0) for out in neutral]
    return UnitWires(sides[0], sides[1], neutral=(neutral[0], neutral[1]))


def _single(
    unit: Transformer, systems: list[str], drawn: list[int], nominal_v: list[float], fed: int
) -> UnitWires | None:
    far = 1 - fed
    near_ends = _ends(unit, systems[fed], drawn[fed], nominal_v[fed], (unit.v1_v, unit.v2_v)[fed])
    if near_ends is None or systems[far] == THREE_PHASE:
        return None
    far_ends = (0, 1) if systems[far] == SPLIT else (near_ends[0], N)
    ends = (near_ends, far_ends) if fed == 0 else (far_ends, near_ends)
    one, two = (sum(1 << slot for slot in pair if slot != EARTH) for pair in ends)
    return UnitWires(one, two, (ends,), judged=(one & ABC, two & ABC), fed=fed)


def _tapped(
    unit: Transformer, systems: list[str], drawn: list[int], nominal_v: list[float], fed: int
) -> UnitWires | None:
    """Winding 2 has the hot wires A and B with the neutral between them."""
    if systems[1] != SPLIT or systems[0] == SPLIT:
        return None
    first = _ends(unit, systems[0], drawn[0], nominal_v[0], unit.v1_v) if fed == 0 else (0, N)
    if first is None:
        return None
    one = sum(1 << slot for slot in first if slot != EARTH)
    return UnitWires(one, 0b0011 | NEUTRAL, ((first, (0, 1)),), judged=(one & ABC, 0b0011))


def _ends(unit: Transformer, system: str, drawn: int, nominal_v: float, rated_v: float) -> Pair | None:
    """Conductors at which a single-phase winding begins and ends; by its rated volts where all are there."""
    here, chosen = slots(drawn & ABC), unit.phases
    back = N if drawn & NEUTRAL else EARTH
    if not here:
        return None
    if system == TWO_WIRE:
        return here[0], back
    over = ROOT3 if system == THREE_PHASE else 2.0
    if chosen == "all":
        between = len(here) > 1 and abs(rated_v / nominal_v - 1) < abs(rated_v * over / nominal_v - 1)
        return (here[0], here[1]) if between else (here[0], back)
    return ROUND[chosen] if len(chosen) == 2 else (bits(chosen).bit_length() - 1, back)


def _open(unit: Transformer, drawn: list[int]) -> UnitWires:
    """Two coils; the pair that is left open, or the two phases of the open star, are those it states."""
    order = list(ROUND)
    if unit.build == "open delta":
        left = "CA" if unit.phases not in ROUND else unit.phases
        first = order[(order.index(left) + 1) % 3], order[(order.index(left) + 2) % 3]
        pairs = ROUND[first[0]], ROUND[first[1]]
        ends = tuple((pair, pair) for pair in pairs)
        outer = ABC & ~(1 << pairs[0][1])
        return UnitWires(ABC, ABC, ends, judged=(outer, outer))
    chosen = ROUND[unit.phases if unit.phases in ROUND else "AB"]
    back = N if drawn[0] & NEUTRAL else EARTH
    twos = [ROUND[order[phase]] for phase in chosen]
    one = sum(1 << phase for phase in chosen) | (NEUTRAL if back == N else 0)
    ends = tuple(((phase, back), pair) for phase, pair in zip(chosen, twos, strict=True))
    return UnitWires(one, ABC, ends, judged=(one & ABC, ABC & ~(1 << twos[0][1])))


def rated_current(unit: Transformer, winding: int, wires: UnitWires) -> float:
    """Rated current of a coil in line amperes, of all parallel units together.

    I = S / (√3 · U) three-phase, S / U single-phase, S / (2 · U) of each of two units

    unit : the transformer
    winding : 1 or 2
    wires : its conductors

    Returns : float [A]
    Source : IEC 60076-1:2011, 3.4.6
    """
    apparent, volts = unit.rating_kva * 1e3 * unit.side_by_side, (unit.v1_v, unit.v2_v)[winding - 1]
    if unit.build in OPEN:
        star = unit.build != "open delta" and winding == 1
        return apparent / 2 / (volts / ROOT3 if star else volts)
    return apparent / volts / (1.0 if wires.ends else ROOT3)
