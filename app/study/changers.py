"""What moves by itself in a drawing: tap changers, regulators, generators that hold a voltage."""

from dataclasses import dataclass, replace

import numpy as np
from msgspec import Struct
from msgspec.structs import replace as replaced
from numpy.typing import NDArray

from app.model import assumed
from app.model.by_case import percent_of
from app.model.drawing import Drawing
from app.model.kinds import Branch, Generator, Regulator, Transformer
from app.study.layout import Layout, arrays_of, is_bare
from app.study.measuring import Measure, measures_of, regulated_side
from app.study.rows import Rows
from app.study.zones import Zones
from solver import Solution, Trouble, grow, solve
from solver import control as controls
from solver.holding import Holding

REVERSE = {
    "forward": controls.Reverse.FORWARD,
    "with the power": controls.Reverse.OTHER_SIDE,
    "idle in reverse": controls.Reverse.IDLE,
}
Real = NDArray[np.float64]
Index = NDArray[np.intp]


@dataclass(frozen=True, slots=True)
class Moved:
    """Where what moves by itself came to rest.

    changers : (changer,) branch rows, thrice where each phase steps by itself
    rest : (changer, case) each a controls.Rest
    generators : (generator,) attachment rows
    holds : (generator, case) bool, holds its volts, or is off; else it is at a limit of its reactive power
    notch : (changer, case) int
    phases : (changer,) the phase that each measures, such as A; blank where phases are alike, or their mean
    """

    changers: tuple[int, ...]
    rest: NDArray[np.object_]
    generators: tuple[int, ...]
    holds: NDArray[np.bool_]
    notch: NDArray[np.intp]
    phases: tuple[str, ...]


def is_changer(branch: Branch) -> bool:
    """True for a regulator, and for a transformer whose tap changer steps by itself.

    branch : any branch

    Returns : bool
    """
    return isinstance(branch, Regulator) or isinstance(branch, Transformer) and branch.regulates != "no"


def settled(
    drawing: Drawing, layout: Layout, zones: Zones, rows: Rows, fixed: int | None = None
) -> tuple[Rows, Solution, Moved | None]:
    """Solve with everything that moves by itself come to rest.

    drawing : the drawing
    layout : its graph
    zones : nominal_v (zone,) float [V]
    rows : its rows, changers at their nameplate
    fixed : branch row of a changer that is to stay where the rows have it

    Returns : Rows at the notches that were found, Solution of them, and Moved; None where nothing moves
    Source : see solver.control
    """
    layout.forest = layout.forest or grow(rows.network)
    network, moving = rows.network, moving_of(layout, zones, rows, fixed)
    on = _running(drawing, layout, moving, network.batch)
    moving = replaced(moving, holdings=stood_still(moving.holdings, on))
    if isinstance(layout.forest, Trouble) or not moving:
        return rows, solve(network, forest=layout.forest), None
    found = controls.control(network, moving.regulators, moving.holdings)
    notches, by_phase = branch_notches(moving, found.notch)
    rows = replace(rows, network=found.solution.network, notches=notches, phase_notches=by_phase)
    held = found.held | ~on
    moved = Moved(moving.changers, found.rest, moving.generators, held, found.notch, moving.phases)
    return rows, found.solution, moved


class Moving(Struct, frozen=True):
    """What moves by itself, as the solver takes it; false where nothing does.

    changers : (changer,) branch rows
    phases : (changer,) the phase that each measures; blank where phases are alike, or their mean
    regulators : (changer,) each a controls.Regulator
    generators : (generator,) attachment rows
    holdings : (generator,) each a Holding
    """

    changers: tuple[int, ...]
    phases: tuple[str, ...]
    regulators: tuple[controls.Regulator, ...]
    generators: tuple[int, ...]
    holdings: tuple[Holding, ...]

    def __bool__(self) -> bool:
        return bool(self.changers or self.generators)


def stood_still(holdings: tuple[Holding, ...], on: NDArray[np.bool_]) -> tuple[Holding, ...]:
    """Generators that hold volts only where they run: at nought percent of what is drawn one is off.

    One that is drawn with no output runs all the same, as a condenser.

    holdings : (generator,) each a Holding
    on : (generator, batch) bool, it runs

    Returns : (generator,) each a Holding
    """
    return tuple(replace(one, on=own) for one, own in zip(holdings, on, strict=True))


def _running(drawing: Drawing, layout: Layout, moving: Moving, width: int) -> NDArray[np.bool_]:
    """(generator, batch) whether it runs, cases over and over."""
    cases = drawing.cases * max(1, width // len(drawing.cases))
    found = [
        [percent_of(case, layout.attachment_ids[row], layout.attachments[row]) != 0 for case in cases]
        for row in moving.generators
    ]
    return np.array(found, dtype=bool).reshape(len(found), len(cases))


def branch_notches(moving: Moving, found: NDArray[np.intp]) -> tuple[dict[int, Index], dict[int, Real]]:
    """Where changers stand: of those that step phase by phase the notch furthest from nought, and all three.

    moving : what moves
    found : (changer, batch) int, notches

    Returns : by branch row (batch,) int; and (3, batch) float, of those that step phase by phase
    """
    notches: dict[int, Index] = {}
    by_phase: dict[int, Real] = {}
    for row, own, notch in zip(moving.changers, moving.regulators, found, strict=True):
        before = notches.get(row, notch)
        notches[row] = np.where(np.abs(notch) > np.abs(before), notch, before)
        if own.alone and own.conductor is not None:
            phases = by_phase.setdefault(row, np.full((3, len(notch)), np.nan))
            phases[own.conductor] = notch
    return notches, by_phase


def moving_of(layout: Layout, zones: Zones, rows: Rows, fixed: int | None = None) -> Moving:
    """What moves by itself where power reaches it.

    layout : the graph
    zones : nominal_v (zone,) float [V]
    rows : its rows, changers at their nameplate
    fixed : branch row of a changer that is to stay where the rows have it

    Returns : Moving
    """
    live = arrays_of(layout).live
    rowed = [int(b) for b in rows.units if b != fixed and is_changer(layout.branches[b])]
    measure = measures_of(layout, zones, rows)
    found = [(b, m) for b in rowed if live[layout.start[b]] for m in measure(b)]
    held = tuple(holders(layout)[0])
    return Moving(
        tuple(b for b, _ in found),
        tuple(m.phase for _, m in found),
        tuple(_changer(layout, rows, b, m) for b, m in found),
        held,
        tuple(_holding(layout, zones, rows, a) for a in held),
    )


def holders(layout: Layout) -> tuple[list[int], list[tuple[int, int]]]:
    """The generators that hold volts, and those that cannot, as another holds them through no impedance.

    layout : the graph

    Returns : attachment rows that hold; and pairs of one that cannot and the supply or generator that does
    """
    hung = [i for i in range(len(layout.attachments)) if _holds(layout, i) and layout.live[layout.at[i]]]
    if not hung:
        return [], []
    group = _joined(layout)
    taken = {group[layout.at[s]]: s for s in reversed(layout.supplies)}
    held, barred = [], []
    for row in hung:
        first = taken.setdefault(group[layout.at[row]], row)
        if first == row:
            held.append(row)
        else:
            barred.append((row, first))
    return held, barred


def _joined(layout: Layout) -> list[int]:
    """A number for each node, the same where no impedance is between."""
    group = list(range(len(layout.nodes)))

    def root(node: int) -> int:
        while group[node] != node:
            node = group[node]
        return node

    for row, branch in enumerate(layout.branches):
        stiff = is_bare(branch) or isinstance(branch, Transformer) and branch.uk_percent == 0
        if stiff and getattr(branch, "closed", True):
            group[root(layout.start[row])] = root(layout.end[row])
    return [root(node) for node in range(len(group))]


def _holds(layout: Layout, row: int) -> bool:
    hung = layout.attachments[row]
    return isinstance(hung, Generator) and hung.hold_percent is not None


def _changer(layout: Layout, rows: Rows, branch: int, measure: Measure) -> controls.Regulator:
    """One changer as the solver takes it."""
    element = layout.branches[branch]
    assert isinstance(element, Transformer | Regulator)
    unit = measure.one_percent
    hold = assumed.value(element, "hold_percent")
    about = (
        (
            element.tapped == "winding 1",
            element.notch_percent,
            element.taps_down,
            element.taps_up,
            element.tap,
        )
        if isinstance(element, Transformer)
        else (False, element.step_percent, element.steps_down, element.steps_up, 0)
    )
    first, step, down, up, start = about
    return controls.Regulator(
        transformer=int(np.flatnonzero(rows.units == branch)[0]),
        tapped=1 if first else 2,
        step=step / 100,
        lowest=-down,
        highest=up,
        setting=hold * unit[0],
        bandwidth=assumed.value(element, "bandwidth_percent") * unit[0],
        regulated=regulated_side(element),
        compensation=complex(element.drop_r_ohm or 0.0, element.drop_x_ohm or 0.0) * measure.back,
        reverse=REVERSE[element.mode] if isinstance(element, Regulator) else controls.Reverse.FORWARD,
        reverse_setting=hold * unit[1],
        start=start,
        conductor=measure.conductor,
        to=measure.to,
        alone=measure.alone,
    )


def _holding(layout: Layout, zones: Zones, rows: Rows, row: int) -> Holding:
    element = layout.attachments[row]
    assert isinstance(element, Generator)
    node = layout.at[row]
    least, most = (assumed.value(element, name) for name in ("q_min_kvar", "q_max_kvar"))
    leads = rows.conductors.leads[row] if rows.conductors is not None else None
    over = rows.wide[node] if leads is None else leads.over[0]
    return Holding(
        load=int(np.flatnonzero(rows.loads == row)[0]),
        setting=(element.hold_percent or 0.0) * float(zones.nominal_v[layout.zone[node]]) / over / 100,
        lowest=min(least, most) * 1e3 / rows.phases[node],
        highest=max(least, most) * 1e3 / rows.phases[node],
        slots=None if leads is None else tuple(one for one, _ in leads.pairs),
    )
