"""Where there is no operating point: how much of the load could be carried, and what bars the rest."""

import math
from collections.abc import Sequence

import numpy as np
from msgspec import Struct

from app.model.drawing import Drawing
from app.model.figures import percent
from app.study.layout import Layout
from app.study.outcome import Finding, Verdict
from app.study.rows import Rows
from app.study.wire_findings import NO_NEUTRAL, on_lost_neutral
from app.study.wire_volts import against, base_volts, phase_name, phase_volts
from app.study.words import list_of, tell
from app.study.zones import Zones
from solver import Share, Solution, Status, largest_share, solve
from solver.share import pick, scaled


class Collapse(Struct, frozen=True):
    """What bars the operating point.

    share : float, largest share of the loads that still solves; None where the sweep only failed to settle
    branch : id of the branch to blame, or None
    finding : the sentence
    """

    share: float | None
    branch: str | None
    finding: Finding


def collapse_of(drawing: Drawing, layout: Layout, zones: Zones, rows: Rows, solution: Solution) -> Collapse:
    """The largest share of the load that still solves in the case that can carry least.

    drawing : the drawing, for names
    layout : its graph
    zones : its voltage levels
    rows : its rows
    solution : that has a case with no operating point

    Returns : Collapse
    Source : see solver.share
    """
    cases = [i for i, s in enumerate(solution.status) if s is not Status.SOLVED]
    return collapses_of(drawing, layout, zones, rows, cases)[0]


def collapses_of(
    drawing: Drawing, layout: Layout, zones: Zones, rows: Rows, cases: Sequence[int]
) -> list[Collapse]:
    """The largest share of the load that still solves in each of some cases, the least first.

    drawing : the drawing, for names
    layout : its graph
    zones : its voltage levels
    rows : its rows
    cases : (chosen,) those that have no operating point, at least one

    Returns : list of Collapse, one a case
    Source : see solver.share
    """
    found = sorted(((largest_share(rows.network, case), case) for case in cases), key=lambda f: f[0].share)
    return [_collapse(drawing, layout, zones, rows, share, case) for share, case in found]


def _collapse(drawing: Drawing, layout: Layout, zones: Zones, rows: Rows, most: Share, case: int) -> Collapse:
    branch = _branch(layout, rows, most)
    where = f" in case {drawing.cases[case].name}" if len(drawing.cases) > 1 else ""
    if most.share >= 1 or math.isinf(most.share):
        words = f"The sweep did not settle{where}, though the load seems bearable."
        return Collapse(None, None, _barring(drawing, "not settled", (), words, case))
    if most.share == 0 and rows.conductors is not None:
        at, hung = on_lost_neutral(layout, rows.conductors)
        if hung:
            words = _lost(drawing, at, hung, where)
            return Collapse(0.0, None, _barring(drawing, NO_NEUTRAL, (*at, *hung), words, case))
    if most.share == 0:
        words = f"No operating point{where}, not even with all loads off: the infeed or the charging is more "
        words += "than the layout can carry."
        return Collapse(0.0, None, _barring(drawing, "no operating point", (), words, case))
    words = f"The layout cannot carry its load{where}: only {percent(100 * most.share)} of it still solves"
    words += f", and {tell(drawing, branch)} stands in the way." if branch else "."
    words += _lowest(drawing, layout, zones, rows, most.share, case)
    ids = (branch,) if branch else ()
    return Collapse(most.share, branch, _barring(drawing, "no operating point", ids, words, case))


def _lost(drawing: Drawing, at: list[str], hung: list[str], where: str) -> str:
    verb, they = ("hangs", "it states") if len(hung) == 1 else ("hang", "they state")
    return (
        f"No operating point{where}: {list_of(drawing, hung)} {verb} on a lost neutral, whose volts nothing "
        f"holds against the power {they}. Lead a neutral from a supply or star point to "
        f"{list_of(drawing, at)}."
    )


def _barring(drawing: Drawing, check: str, ids: tuple[str, ...], words: str, case: int) -> Finding:
    """A finding that bars one case and says nothing of the others."""
    cases = drawing.cases
    each = tuple(Verdict.BLOCKS if k == case else Verdict.NOTE for k in range(len(cases)))
    by_case = each if len(cases) > 1 else ()
    return Finding(check, Verdict.BLOCKS, ids, words, case=cases[case].name, by_case=by_case)


def _branch(layout: Layout, rows: Rows, share: Share) -> str | None:
    if share.line is not None:
        return layout.branch_ids[rows.lines[share.line]]
    if share.transformer is not None:
        return layout.branch_ids[rows.units[share.transformer]]
    return None


def _lowest(drawing: Drawing, layout: Layout, zones: Zones, rows: Rows, share: float, case: int) -> str:
    """Which phase is lowest at the largest share, and where; nothing where phases are alike."""
    conductors = rows.conductors
    if conductors is None:
        return ""
    one = scaled(pick(rows.network, np.array([case])), np.array([share]))
    volts = solve(one, forest=layout.forest).voltage
    kind = against(layout, zones, conductors)
    size = np.abs(phase_volts(volts, np.array(conductors.node, dtype=np.intp), kind))[..., 0]
    level = np.where(np.isnan(size), np.inf, size) / base_volts(layout, zones, kind)[:, None]
    node, phase = np.unravel_index(np.nanargmin(level), level.shape)
    if not np.isfinite(level[node, phase]):
        return ""
    named = phase_name(int(phase), int(kind[node]), zones.system[layout.zone[int(node)]])
    at = tell(drawing, layout.node_ids[int(node)])
    return f" Lowest is then phase {named} of {at}, at {percent(100 * float(level[node, phase]))} of nominal."
