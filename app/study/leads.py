"""Between which conductors an attachment hangs, and how its power is shared among them."""

from collections.abc import Mapping

import numpy as np
from msgspec import Struct
from numpy.typing import ArrayLike, NDArray

from app.model.kinds import Attachment, Load, Motor
from app.model.levels import TWO_WIRE
from app.study.wires import ABC, PER_PHASE, bits, slots
from solver.wires import EARTH

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
THIRDS = (1 / 3, 1 / 3, 1 / 3)
ROUND = ((0, 1), (1, 2), (2, 0))


class Leads(Struct, frozen=True):
    """The ways from conductor to conductor through an attachment.

    pairs : (lead,) of conductors, 0 to 3, the second -1 for earth
    shares : (lead,) float, share of the power in each
    over : (lead,) float, nominal voltage of the zone over the nominal volts of each
    missing : phases it is drawn on that do not reach its node, as bits
    no_back : it hangs between phase and neutral where there is no way back
    """

    pairs: tuple[tuple[int, int], ...]
    shares: tuple[float, ...]
    over: tuple[float, ...]
    missing: int = 0
    no_back: bool = False


class Ways(Struct, frozen=True):
    """All leads of all attachments one below the other.

    row : (way,) attachment row
    one : (way,) conductor at which it begins
    other : (way,) conductor at which it ends, -1 for earth
    share : (way,) float of the power
    over : (way,) float, nominal voltage of the zone over the nominal volts of it
    alone : (way,) bool, the attachment has no other
    """

    row: NDArray[np.intp]
    one: NDArray[np.intp]
    other: NDArray[np.intp]
    share: NDArray[np.float64]
    over: NDArray[np.float64]
    alone: NDArray[np.bool_]


def ways_of(leads: Mapping[int, Leads]) -> Ways:
    """The leads of attachments as arrays.

    leads : by attachment row

    Returns : Ways
    """
    found = [
        (row, *pair, share, over, len(one.pairs) == 1)
        for row, one in leads.items()
        for pair, share, over in zip(one.pairs, one.shares, one.over, strict=True)
    ]
    table = np.array(found, dtype=np.float64).reshape(-1, 6).T
    row, begin, end = (column.astype(np.intp) for column in table[:3])
    return Ways(row, begin, end, table[3], table[4], table[5] > 0)


def leads_of(hung: Attachment, system: str, reach: int, back: int | None) -> Leads:
    """Where an attachment hangs at a node.

    All phases: star to the neutral, or round the phases in delta, for a motor, and where there is no
    neutral. One phase: to the neutral or earth. Two: between them.

    hung : load, motor, generator or capacitor
    system : of its zone
    reach : bits, conductors that reach its node
    back : conductor that takes what a phase brings, -1 earth, None where there is none

    Returns : Leads
    """
    chosen = str(getattr(hung, "phases", "all"))
    here = reach & ABC
    if system == TWO_WIRE:
        wanted = here if chosen == "all" else bits(chosen)
        if back is None:
            return Leads((), (), (), wanted & ~here, no_back=True)
        pairs = tuple((p, back) for p in slots(wanted)[:1])
        return Leads(pairs, (1.0,) * len(pairs), (1.0,) * len(pairs), wanted & ~here)
    wanted = here if chosen == "all" else bits(chosen)
    missing = wanted & ~here
    phases = slots(wanted)
    closed = isinstance(hung, Motor) or getattr(hung, "connection", "star") == "delta" or back is None
    if len(phases) == 3 and closed:
        return Leads(ROUND, _shares(hung), (1.0, 1.0, 1.0))
    if len(phases) == 2 and (closed or chosen != "all"):
        pair = (2, 0) if phases == [0, 2] else (phases[0], phases[1])
        return Leads((pair,), (1.0,), (1.0,), missing)
    if back is None:
        return Leads((), (), (), missing, no_back=True)
    shares = _shares(hung) if len(phases) == 3 else (1 / max(len(phases), 1),) * len(phases)
    over = PER_PHASE[system]
    return Leads(tuple((p, back) for p in phases), shares, (over,) * len(phases), missing)


def _shares(hung: Attachment) -> tuple[float, ...]:
    if not isinstance(hung, Load) or hung.share_a_percent is None or hung.share_b_percent is None:
        return THIRDS
    a, b = hung.share_a_percent / 100, hung.share_b_percent / 100
    return a, b, 1 - a - b


def in_leads(drawn: Complex, to: NDArray[np.intp]) -> Complex:
    """Amperes into each conductor's lead: what one brings the other takes back.

    drawn : (load, k, batch) complex [A] into the lead that begins at each conductor; nan counts as none
    to : (load, k) int, conductor at which that lead ends, -1 for earth

    Returns : (load, k, batch) complex [A]
    """
    drawn = np.where(np.isnan(drawn), 0, drawn)
    total = drawn.copy()
    row, slot = np.nonzero(to != EARTH)
    np.subtract.at(total, (row, to[row, slot]), drawn[row, slot])
    return total


def across(stated_v: ArrayLike, nominal_v: ArrayLike, over: ArrayLike, alone: ArrayLike) -> Real:
    """Volts across one lead out of a stated voltage, which is that between lines; where an element has one
    lead alone, that of the lead or between lines, as is nearer.

    stated_v : (...) float [V], nan where nothing is stated
    nominal_v : (...) float [V] of the zone
    over : (...) float, nominal voltage of the zone over that of the lead
    alone : (...) bool, the element has no other lead

    Returns : (...) float [V]
    Source : common practice, no source
    """
    stated, nominal = np.asarray(stated_v, dtype=np.float64), np.asarray(nominal_v, dtype=np.float64)
    times = np.asarray(over, dtype=np.float64)
    base = nominal / times
    own = np.asarray(alone) & (np.abs(stated / base - 1) <= np.abs(stated / nominal - 1))
    return np.where(np.isnan(stated), base, np.where(own, stated, stated / times))
