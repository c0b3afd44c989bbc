"""A year held against the drawing's limits: how far, when, and for how many hours."""

import numpy as np
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.model.figures import plain, volts
from app.study.checking import LOADING, NEAR_SHARE, NEAR_VOLTAGE, SET_HERE, Check, findings_of, unrated
from app.study.layout import Layout
from app.study.outcome import Finding, Table, Verdict
from app.study.words import tell
from app.study.year_outcome import BranchYear, Gap, NodeYear
from app.study.year_points import Points, when

NAMED = 4  # gaps that are named one by one


def year_findings(
    drawing: Drawing,
    nodes: Table[NodeYear],
    branches: Table[BranchYear],
    gaps: tuple[Gap, ...],
    points: Points,
) -> list[Finding]:
    """Hold the extremes of a year against the limits, and name the points without an answer.

    drawing : the drawing, for its limits and names
    nodes : lowest_percent, highest_percent [% of nominal], most_drop_percent [%] and hours beyond
    branches : most_loaded_percent [% of rating] and hours beyond
    gaps : points without an answer
    points : of the year

    Returns : list of Finding with value, limit and signed margin [%]
    Source : the limits are the drawing's; what counts as near is ours
    """
    limits, year_h = drawing.limits, points.year_h
    found = _gaps(gaps, points)
    checks = [
        (_voltage(drawing, nodes, True, year_h), limits.name or SET_HERE),
        (_voltage(drawing, nodes, False, year_h), limits.name or SET_HERE),
    ]
    if limits.drop_percent is not None:
        checks.append((_drop(drawing, nodes, limits.drop_percent, year_h), limits.drop_name or SET_HERE))
    checks.append((_loading(drawing, branches, year_h), LOADING))
    found += [one for check, whose in checks for one in findings_of(check, whose, ("The year",))]
    unknown = branches.column("live") & np.isnan(branches.column("most_loaded_percent"))
    ids = tuple(branches.ids[row] for row in np.flatnonzero(unknown))
    return found + _stops(drawing, branches) + unrated(drawing, ids)


def _for(hours: float, what: str) -> str:
    return f", {what} for {plain(hours, 0 if hours >= 10 else 1)} h of the year" if hours > 0 else ""


def _voltage(drawing: Drawing, nodes: Table[NodeYear], low: bool, year_h: float) -> Check:
    side, name = ("lowest", "voltage low") if low else ("highest", "voltage high")
    verb, beyond, hours = ("falls", "below", "hours_below") if low else ("rises", "above", "hours_above")
    limit = drawing.limits.low_percent if low else drawing.limits.high_percent

    def subject(row: int, _case: int, value: str) -> str:
        level, at = nodes.column(f"{side}_v")[row], nodes.column(f"{side}_at_h")[row]
        long = _for(float(nodes.column(hours)[row]), f"{beyond} the limit")
        who = tell(drawing, nodes.ids[row])
        return f"{who} {verb} to {value} of nominal, {volts(level)}, at {when(at, year_h)}{long}"

    value = nodes.column(f"{side}_percent")[:, None]
    return Check(name, nodes.ids, value, limit, low, NEAR_VOLTAGE, subject, f"the {side} allowed is")


def _drop(drawing: Drawing, nodes: Table[NodeYear], limit: float, year_h: float) -> Check:
    def subject(row: int, _case: int, value: str) -> str:
        at = when(nodes.column("most_drop_at_h")[row], year_h)
        long = _for(float(nodes.column("hours_drop")[row]), "beyond the limit")
        return f"{tell(drawing, nodes.ids[row])} lies {value} of nominal below its supply at {at}{long}"

    value, near = nodes.column("most_drop_percent")[:, None], limit * (1 - NEAR_SHARE)
    return Check("voltage drop", nodes.ids, value, limit, False, near, subject, "the most allowed is")


def _loading(drawing: Drawing, branches: Table[BranchYear], year_h: float) -> Check:
    limit = drawing.limits.most_loaded_percent

    def subject(row: int, _case: int, value: str) -> str:
        at = when(branches.column("most_loaded_at_h")[row], year_h)
        long = _for(float(branches.column("hours_over")[row]), "overloaded")
        return f"{tell(drawing, branches.ids[row])} is loaded to {value} of its rating at {at}{long}"

    value, near = branches.column("most_loaded_percent")[:, None], limit * (1 - NEAR_SHARE)
    return Check("loading", branches.ids, value, limit, False, near, subject, "the most allowed is")


def _gaps(gaps: tuple[Gap, ...], points: Points) -> list[Finding]:
    """One finding for each way in which points have no answer."""
    found = []
    for status in dict.fromkeys(gap.status for gap in gaps):
        those = [gap for gap in gaps if gap.status is status]
        hours = sum(gap.hours for gap in those)
        named = [_gap(gap, points) for gap in those[:NAMED]]
        if len(those) > NAMED:
            named.append(f"{len(those) - NAMED} more stretches")
        words = f"{plain(hours, 0 if hours >= 10 else 1)} h of the year have no answer: {'; '.join(named)}. "
        words += f"{status.value} The figures of the year leave these hours out."
        found.append(Finding("no answer", Verdict.FAILS, (), words, value=hours, unit="h"))
    return found


def _gap(gap: Gap, points: Points) -> str:
    first = when(float(points.begin[gap.first]), points.year_h)
    return first if gap.first == gap.last else f"{first} and {plain(gap.hours, 0)} h in all from there"


def _stops(drawing: Drawing, branches: Table[BranchYear]) -> list[Finding]:
    hours = branches.column("hours_at_stop")
    return [
        Finding(
            "end stop",
            Verdict.ADVICE,
            (branches.ids[row],),
            f"{tell(drawing, branches.ids[row])} stands at its end stop, out of its band, for "
            f"{plain(hours[row], 0 if hours[row] >= 10 else 1)} h of the year.",
            value=float(hours[row]),
            unit="h",
        )
        for row in np.flatnonzero(hours > 0)
    ]


def hunting_findings(drawing: Drawing, layout: Layout, hours: NDArray[np.float64]) -> list[Finding]:
    """Tap changers and regulators that never come to rest.

    drawing : the drawing, for names
    layout : its graph
    hours : (branch,) float [h] that each hunts

    Returns : list of Finding that fail
    """
    return [
        Finding(
            "hunting",
            Verdict.FAILS,
            (id,),
            f"{tell(drawing, id)} hunts for {plain(hours[row], 0)} h of the year: it steps to and fro and "
            "never comes to rest in its band.",
            value=float(hours[row]),
            unit="h",
        )
        for row, id in enumerate(layout.branch_ids)
        if hours[row] > 0
    ]
