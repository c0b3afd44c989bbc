"""From the sums of a year to its tables by id, its balance and its sentence."""

import math
from dataclasses import fields

import numpy as np
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.study.changer_findings import barred_findings
from app.study.layout import Layout, arrays_of
from app.study.outcome import Finding, Table, Verdict
from app.study.results import blank_table
from app.study.words import tally_words
from app.study.year_basis import basis_of
from app.study.year_findings import year_findings
from app.study.year_outcome import (
    AttachmentYear,
    BranchYear,
    Course,
    Gap,
    NodeYear,
    YearBalance,
    YearOutcome,
)
from app.study.year_points import Points
from app.study.year_tally import Most, Tally
from app.study.zones import Zones, nominal_of
from solver.status import Status

Real = NDArray[np.float64]


def blank_year(drawing: Drawing, layout: Layout, zones: Zones, found: list[Finding]) -> YearOutcome:
    """A year that cannot be solved: every element, no figures, and why.

    drawing : the drawing
    layout : its graph
    zones : its voltage levels
    found : findings, some of which bar a solution

    Returns : YearOutcome whose status is INVALID
    """
    none = Points(np.zeros(0), np.zeros(0), 0.0, {})
    found = sorted(found, key=lambda f: f.verdict.rank)
    barred = next((f.sentence for f in found if f.verdict is Verdict.BLOCKS), Status.INVALID.value)
    empty = np.zeros(0)
    return YearOutcome(
        status=Status.INVALID,
        sentence=barred,
        basis=(),
        points=none,
        done=0,
        solved_h=0.0,
        nodes=blank_table(NodeYear, layout.node_row, {"nominal_v": nominal_of(layout, zones)}),
        branches=blank_table(BranchYear, layout.branch_row, {}),
        attachments=blank_table(AttachmentYear, layout.attachment_row, {}),
        balance=YearBalance(*[math.nan] * len(fields(YearBalance))),
        course=Course(*[empty] * len(fields(Course))),  # type: ignore[arg-type]
        gaps=(),
        findings=tuple(found),
        price=drawing.year.price_per_kwh,
        money=drawing.year.money,
    )


def year_outcome(
    drawing: Drawing, layout: Layout, zones: Zones, tally: Tally, done: int, found: list[Finding]
) -> YearOutcome:
    """The tables of a year, its balance and what there is to say of it.

    drawing : the drawing
    layout : its graph
    zones : its voltage levels
    tally : sums and extremes of its points
    done : points that were reached
    found : findings of its structure

    Returns : YearOutcome
    """
    nodes, branches, attachments = _nodes(layout, zones, tally), _branches(tally), _attachments(tally)
    gaps = tally.gaps()
    found = found + barred_findings(drawing, layout)
    found += year_findings(drawing, nodes, branches, gaps, tally.points)
    found.sort(key=lambda f: f.verdict.rank)
    status = Status.SOLVED
    if gaps:
        never = not tally.hours
        status = gaps[0].status if never else next((g.status for g in gaps), Status.SOLVED)
    return YearOutcome(
        status=status,
        sentence=_sentence(found, gaps, tally, done),
        basis=basis_of(drawing, tally.points, bool(tally.moving)),
        points=tally.points,
        done=done,
        solved_h=tally.hours,
        nodes=nodes,
        branches=branches,
        attachments=attachments,
        balance=_balance(drawing, tally),
        course=tally.whole(),
        gaps=gaps,
        findings=tuple(found),
        price=drawing.year.price_per_kwh,
        money=drawing.year.money,
    )


def _sentence(found: list[Finding], gaps: tuple[Gap, ...], tally: Tally, done: int) -> str:
    if done < tally.points.count:
        return "Stopped before its end: the figures are of a part of the year."
    if not tally.hours:
        return gaps[0].status.value if gaps else "Nothing was solved."
    if gaps:
        return f"Solved but for {sum(g.hours for g in gaps):g} h. Of the year: {tally_words(found).lower()}."
    return f"Solved. Of the year: {tally_words(found).lower()}."


def _at(most: Most, points: Points) -> Real:
    """When the extremes were, in hours since the year began; nan where never."""
    begin = points.begin[np.maximum(most.point, 0)]
    return np.where(most.point >= 0, begin, np.nan)


def _nodes(layout: Layout, zones: Zones, tally: Tally) -> Table[NodeYear]:
    nominal, most, sums = nominal_of(layout, zones), tally.most, tally.sum
    live = tally.node_live
    low, high = -most["low"].value, most["high"].value
    limited = tally.limits.drop_percent is not None
    columns = {
        "live": live,
        "nominal_v": nominal,
        "lowest_v": low * nominal / 100,
        "lowest_percent": low,
        "lowest_at_h": _at(most["low"], tally.points),
        "highest_v": high * nominal / 100,
        "highest_percent": high,
        "highest_at_h": _at(most["high"], tally.points),
        "hours_below": np.where(live, sums["below"], np.nan),
        "hours_above": np.where(live, sums["above"], np.nan),
        "most_drop_percent": most["drop"].value,
        "most_drop_at_h": _at(most["drop"], tally.points),
        "hours_drop": np.where(live & limited, sums["dropped"], np.nan),
    }
    return Table(NodeYear, tuple(layout.node_ids), columns, layout.node_row)


def _branches(tally: Tally) -> Table[BranchYear]:
    layout, most, sums, live = tally.layout, tally.most, tally.sum, tally.branch_live
    unit = tally.rows_that("transformer")
    steps = ~np.isnan(tally.notch["least"])

    def fed(values: Real) -> Real:
        return np.where(live, values, np.nan)

    columns = {
        "live": live,
        "through_kwh": fed(sums["through"]),
        "back_kwh": fed(sums["back"]),
        "loss_kwh": fed(sums["loss"]),
        "line_kwh": fed(np.where(unit, 0.0, sums["copper"])),
        "copper_kwh": fed(np.where(unit, sums["copper"], 0.0)),
        "iron_kwh": fed(np.where(unit, sums["iron"], 0.0)),
        "most_a": most["amps"].value,
        "most_a_at_h": _at(most["amps"], tally.points),
        "most_loaded_percent": most["loaded"].value,
        "most_loaded_at_h": _at(most["loaded"], tally.points),
        "hours_over": np.where(np.isnan(most["loaded"].value), np.nan, sums["over"]),
        "least_notch": tally.notch["least"],
        "most_notch": tally.notch["most"],
        "hours_at_stop": np.where(steps, sums["stopped"], np.nan),
    }
    return Table(BranchYear, tuple(layout.branch_ids), columns, layout.branch_row)


def _attachments(tally: Tally) -> Table[AttachmentYear]:
    layout, most, sums = tally.layout, tally.most["kw"], tally.sum
    live = arrays_of(layout).live[arrays_of(layout).at] & (tally.hours > 0)
    mean = sums["kwh"] / tally.hours if tally.hours else np.full(len(layout.attachments), np.nan)
    with np.errstate(divide="ignore", invalid="ignore"):
        factor = np.where(most.value > 0, mean / most.value, np.nan)
    columns = {
        "live": live,
        "kwh": np.where(live, sums["kwh"], np.nan),
        "back_kwh": np.where(live, np.where(tally.rows_that("supply"), sums["kwh_back"], 0.0), np.nan),
        "mean_kw": np.where(live, mean, np.nan),
        "most_kw": most.value,
        "most_at_h": _at(most, tally.points),
        "load_factor": np.where(live, factor, np.nan),
    }
    return Table(AttachmentYear, tuple(layout.attachment_ids), columns, layout.attachment_row)


def _balance(drawing: Drawing, tally: Tally) -> YearBalance:
    kwh, sums, hours = tally.sum["kwh"], tally.sum, tally.hours
    unit = tally.rows_that("transformer")
    supply, made, drawn = (math.fsum(kwh[tally.rows_that(kind)]) for kind in ("supply", "generator", "load"))
    line, copper = math.fsum(sums["copper"][~unit]), math.fsum(sums["copper"][unit])
    iron, loss = math.fsum(sums["iron"][unit]), math.fsum(sums["loss"])
    peak, at = _peak(tally.course["supply_kw"])
    series_kw = tally.course["line_kw"] + tally.course["copper_kw"]
    most_series, _ = _peak(series_kw)
    fed, price = supply + made, drawing.year.price_per_kwh
    return YearBalance(
        supply_kwh=supply,
        generation_kwh=made,
        load_kwh=drawn,
        line_kwh=line,
        copper_kwh=copper,
        iron_kwh=iron,
        loss_kwh=loss,
        closure=_share(abs(fed - drawn - loss), max(abs(fed), abs(drawn))),
        worst_closure=tally.closure,
        peak_kw=peak,
        peak_at_h=float(tally.points.begin[at]) if at >= 0 else math.nan,
        peak_loss_kw=most_series,
        load_factor=_share(supply, peak * hours),
        loss_factor=_share(line + copper, most_series * hours),
        utilisation_h=_share(supply, peak),
        iron_percent=100 * _share(iron, loss),
        loss_percent=100 * _share(loss, fed),
        cost=math.nan if price is None else price * loss,
    )


def _peak(values: Real) -> tuple[float, int]:
    if not np.isfinite(values).any():
        return math.nan, -1
    at = int(np.nanargmax(values))
    return float(values[at]), at


def _share(part: float, whole: float) -> float:
    return part / whole if whole > 0 else math.nan
