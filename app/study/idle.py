"""What flows with all loads off: round loops whose transformers do not agree, and between supplies."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from app.model.drawing import Drawing
from app.model.figures import amps, nameplate, percent, power
from app.model.kinds import Transformer
from app.model.levels import TWO_WIRE
from app.study.around import mismatch, units_of
from app.study.layout import Layout
from app.study.outcome import AttachmentState, Finding, Table, Verdict
from app.study.results import Tables, tables_of
from app.study.rows import Rows
from app.study.solved_cases import blanked
from app.study.wires import NEUTRAL
from app.study.words import list_of, tell
from app.study.zones import Zones
from solver import Network, Status, solve

AGREE = 1e-7  # %, ratios closer than this are one ratio
UNLIKE = 1.001  # of two windings, by which the one is more loaded than the other
MUCH = 10.0  # % of rating
WHOSE = "common practice, no source"
NOTHING_KVA = 1e-3
BY_EARTH = (
    " Both hold their neutral at earth, so that earth stands beside the neutral between them as a way back "
    "without impedance: through the two wires alone less would pass, and their earths carry what the neutral "
    "is spared."
)


def idle_findings(
    drawing: Drawing, layout: Layout, zones: Zones, rows: Rows, loaded: Table[AttachmentState]
) -> list[Finding]:
    """The currents that circulate in loops of unequal ratios, and what joined supplies give each other.

    The layout is solved once more in every case with loads, generators, capacitors, charging and
    magnetising currents taken off, so that only what drives them is left. A current beyond 10 % of a
    rating is near; none fails, for the loading of each case is judged for itself.

    drawing : the drawing
    layout : its graph, with rings
    zones : its voltage levels
    rows : of the solver
    loaded : table, kw (attachment, case) [kW] as solved

    Returns : list of Finding
    Source : superposition; with one loop Ic = ΔE / (Z1 + Z2 + ...)
    """
    ratio = np.abs(rows.network.transformer_ratio[:, 0])
    row = {int(branch): n for n, branch in enumerate(rows.units)}
    loops = [(r, mismatch(layout, r, ratio, row)) for r in layout.rings if not r.supplies]
    apart = {tuple(units_of(layout, ring)): gap for ring, gap in reversed(loops) if gap > AGREE}
    apart.pop((), None)  # a loop of regulators alone: their loading is judged for itself
    pairs = {ring.supplies: None for ring in layout.rings if ring.supplies}
    if not apart and not pairs:
        return []
    solution = solve(_idle(rows.network), forest=layout.forest)
    solved = np.array([s is Status.SOLVED for s in solution.status])
    solved &= ~np.isnan(loaded.column("kw")).all(axis=0)
    if not solved.any():
        return []
    idle = blanked(tables_of(layout, zones, rows, solution, len(drawing.cases)), solved)
    found = [_circulating(drawing, layout, idle, list(units), gap) for units, gap in reversed(apart.items())]
    earthed = {pair for pair in pairs if _earth_between(layout, rows, pair)}
    return found + [
        _exchange(drawing, layout, idle, list(pair), loaded, BY_EARTH if pair in earthed else "")
        for pair in pairs
    ]


def _earth_between(layout: Layout, rows: Rows, pair: Sequence[int]) -> bool:
    """Whether earth is a way back between two two-wire supplies beside the neutral that joins them."""
    conductors = rows.conductors
    if conductors is None or any(getattr(layout.attachments[r], "wires", "") != TWO_WIRE for r in pair):
        return False
    reached: set[int] = set()
    first = {layout.at[pair[0]]}
    ends = [
        {layout.start[row], layout.end[row]}
        for row, has in enumerate(conductors.branch)
        if has & NEUTRAL and not isinstance(layout.branches[row], Transformer)
    ]
    while first != reached:
        reached = first
        first = reached.union(*(two for two in ends if two & reached))
    return layout.at[pair[1]] in reached


def _idle(network: Network) -> Network:
    """The same network with everything off that hangs on it."""
    names = ("load_power", "shunt_y", "line_y", "transformer_y")
    wires = network.wires
    if wires is not None:
        wires = replace(wires, units=replace(wires.units, iron=np.zeros_like(wires.units.iron)))
    return replace(network, wires=wires, **{name: np.zeros_like(getattr(network, name)) for name in names})


def _circulating(drawing: Drawing, layout: Layout, idle: Tables, units: list[int], apart: float) -> Finding:
    share = idle.branches.column("loaded_percent")[units]
    at, case = np.unravel_index(np.nanargmax(share), share.shape)
    unit, value = layout.branches[units[at]], float(share[at, case])
    assert isinstance(unit, Transformer)
    low = unit.v2_v <= unit.v1_v
    first, second = (float(idle.branches.column(end)[units[at], case]) for end in ("start_a", "end_a"))
    current = second if low else first
    loads = (first * unit.v1_v, second * unit.v2_v)
    by_other = loads[not low] > UNLIKE * loads[low]
    by = f" at its {nameplate(max(unit.v1_v, unit.v2_v))} winding" if by_other else ""
    ids = tuple(layout.branch_ids[u] for u in units)
    stand = "stand" if len(ids) > 1 else "stands"
    words = (
        f"{list_of(drawing, ids)} {stand} in a closed loop whose ratios are {percent(apart)} apart: with all "
        f"loads off {amps(float(current))} circulates at {nameplate(min(unit.v1_v, unit.v2_v))}, "
        f"{percent(value)} of the rating of {tell(drawing, ids[at])}{by}{_in_case(drawing, int(case))}."
    )
    name = drawing.cases[int(case)].name
    verdict = Verdict.ADVICE if value > MUCH else Verdict.NOTE
    if verdict is Verdict.NOTE:
        return Finding("circulating current", verdict, ids, words, value=value, unit="%", case=name)
    words += f" Advised: at most {percent(MUCH, 0)}."
    return Finding(
        "circulating current", verdict, ids, words, value, MUCH, MUCH - value, "%", f"advice, {WHOSE}", name
    )


def _in_case(drawing: Drawing, case: int) -> str:
    return f" in case {drawing.cases[case].name}" if len(drawing.cases) > 1 else ""


def _exchange(
    drawing: Drawing,
    layout: Layout,
    idle: Tables,
    rows: list[int],
    loaded: Table[AttachmentState],
    besides: str,
) -> Finding:
    """What two joined supplies do under load, and what one gives the other with all loads off."""
    ids = tuple(layout.attachment_ids[r] for r in rows)
    kw = loaded.column("kw")[rows]
    known = ~np.isnan(idle.attachments.column("kw")[rows]).any(axis=0)
    case = int(
        np.argmin(np.where(known, kw.min(axis=0), np.inf))
    )  # where one gives least, or takes most back
    told = " and ".join(f"{tell(drawing, i)} {_gives(float(kw[n, case]))}" for n, i in enumerate(ids))
    words = f"{told}{_in_case(drawing, case)}. {_passing(drawing, layout, idle, rows, case)}{besides}"
    return Finding("power exchanged", Verdict.NOTE, ids, words, case=drawing.cases[case].name)


def _gives(kw: float) -> str:
    return f"feeds in {power(kw)}" if kw >= 0 else f"takes back {power(-kw)}"


def _passing(drawing: Drawing, layout: Layout, idle: Tables, rows: list[int], case: int) -> str:
    kw, kvar, current = (idle.attachments.column(name)[rows, case] for name in ("kw", "kvar", "current_a"))
    if np.hypot(kw, kvar).max() < NOTHING_KVA:
        return "With all loads off nothing passes between them."
    giver = int(np.argmax(kw if np.ptp(kw) > np.ptp(kvar) else kvar))
    ids = [layout.attachment_ids[r] for r in (rows[giver], rows[1 - giver])]
    much = f"{power(float(kw[giver]))}, {power(float(kvar[giver]), 'kvar')} and {amps(float(current[giver]))}"
    if sum(supply >= 0 for supply in layout.supply_of) == 2:
        return f"With all loads off {much} pass from {tell(drawing, ids[0])} to {tell(drawing, ids[1])}."
    return f"With all loads off {tell(drawing, ids[0])} still feeds in {much}."
