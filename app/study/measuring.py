"""What a tap changer or regulator measures: which phase, against what, and how large a percent of it is."""

from collections.abc import Callable

from msgspec import Struct

from app.model.kinds import Regulator, Transformer
from app.model.levels import SPLIT, TWO_WIRE
from app.study.layout import Layout
from app.study.rows import Rows
from app.study.wire_volts import TO_NEUTRAL, TO_NEXT, against, base_volts, phase_name
from app.study.wires import ABC, LETTERS, letters, slots
from app.study.zones import Zones

WHOLE = 0  # the only conductor where phases are alike


class Measure(Struct, frozen=True):
    """What one changer, or one phase of it, measures.

    conductor : whose volts; None for the mean of three
    to : conductor against which; None for the neutral, or earth
    one_percent : [V] of nominal, on the side it regulates and on the other
    back : by how much ohms of the line count, 2 for out and back
    alone : it steps that phase and no other
    phase : as people call it, blank where phases are alike
    """

    conductor: int | None
    to: int | None
    one_percent: tuple[float, float]
    back: int
    alone: bool = False
    phase: str = ""


def regulated_side(element: Transformer | Regulator) -> int:
    """The winding whose side a changer holds, power flowing forward.

    element : a transformer whose tap changer steps by itself, or a regulator

    Returns : 1 or 2
    """
    return 1 if isinstance(element, Transformer) and element.regulates == "winding 1" else 2


def measures_of(layout: Layout, zones: Zones, rows: Rows) -> Callable[[int], list[Measure]]:
    """What changers measure.

    Where phases are alike all of them. Else the phase that a changer states, or the first that reaches the
    side it regulates: against the neutral, earth, or the next phase, as loads hang there.

    layout : the graph
    zones : nominal_v (zone,) float [V]
    rows : of the solver

    Returns : branch row to list of Measure, one but where each phase steps by itself
    """
    conductors = rows.conductors
    if conductors is None:
        return lambda branch: [_alike(layout, zones, rows, branch)]
    kind = against(layout, zones, conductors)
    base = base_volts(layout, zones, kind)

    def measures(branch: int) -> list[Measure]:
        held, other = ends_of(layout, branch)
        system, reach = zones.system[layout.zone[held]], conductors.node[held] & conductors.node[other]
        here = slots((reach or conductors.node[held]) & ABC)
        lone = len(here) == 1 and kind[held] == TO_NEUTRAL and system != SPLIT
        unit = float(base[held]) / 100, float(base[other]) / 100
        back = 2 if system == TWO_WIRE or lone else 1

        def one(slot: int, alone: bool = False) -> Measure:
            following = (slot + 1) % 3
            between = kind[held] == TO_NEXT and not alone and following in here
            to = following if between else None
            phase = phase_name(slot, TO_NEXT if between else TO_NEUTRAL, system)
            size = unit if between or kind[held] != TO_NEXT else (unit[0] / 3**0.5, unit[1] / 3**0.5)
            return Measure(slot, to, size, back, alone, phase)

        chosen = getattr(layout.branches[branch], "measures", "first")
        if chosen == "each":
            return [one(slot, True) for slot in here]
        if chosen == "mean" and len(here) == 3:
            size = unit if kind[held] != TO_NEXT else (unit[0] / 3**0.5, unit[1] / 3**0.5)
            return [Measure(None, None, size, back)]
        stated = [slot for slot in here if LETTERS[slot] == chosen]
        return [one(slot) for slot in (stated or here)[:1]]

    return measures


def _alike(layout: Layout, zones: Zones, rows: Rows, branch: int) -> Measure:
    one, other = (
        float(zones.nominal_v[layout.zone[node]] / rows.wide[node] / 100) for node in ends_of(layout, branch)
    )
    return Measure(WHOLE, None, (one, other), 2 if rows.phases[layout.start[branch]] == 1 else 1)


def ends_of(layout: Layout, branch: int) -> tuple[int, int]:
    """The node whose volts a changer holds, power flowing forward, and the one at its other side.

    layout : the graph
    branch : row of a changer

    Returns : two node rows
    """
    element, ends = layout.branches[branch], (layout.start[branch], layout.end[branch])
    assert isinstance(element, Transformer | Regulator)
    side = regulated_side(element)
    return ends[side - 1], ends[2 - side]


def missed(layout: Layout, rows: Rows, branch: int) -> str:
    """The phase that a changer is to measure and that does not reach the side it regulates; else blank.

    layout : the graph
    rows : of the solver
    branch : row of a changer

    Returns : A, B, C or nothing
    """
    chosen = str(getattr(layout.branches[branch], "measures", "first"))
    if rows.conductors is None or chosen not in ("A", "B", "C"):
        return ""
    return "" if chosen in letters(rows.conductors.node[ends_of(layout, branch)[0]]) else chosen
