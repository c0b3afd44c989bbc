"""The year: energies, extremes with their hour, hours beyond limits, where something follows a profile."""

import math
from typing import Any

from app.model.drawing import label
from app.sheet.subject import FAIL, HOLDS, IDENTITY, Subject, kind_name
from app.sheet.table import Cell, Cells, Column, Ref, SheetTable, Style, given, table, text
from app.study.outcome import Table, Verdict
from app.study.year import follows_profiles, run_year
from app.study.year_outcome import YearOutcome
from app.study.year_points import when

TAB = "Year"  # tables on one tab share their widths, so each has its own
YEAR, BASIS, BRANCHES, NODES, HUNG = "year", "year_basis", "year_branches", "year_nodes", "year_attachments"
LONG = Column("words", "What the year stands on", style=Style.LONG, width=90)
WHEN = {"style": Style.TEXT, "width": 25}


def year_tables(subject: Subject) -> list[SheetTable]:
    """The year of a drawing whose loads, infeeds or supplies follow a profile; nothing else."""
    drawing = subject.drawing
    if not follows_profiles(drawing):
        return []
    year = run_year(drawing)
    bad = (f.sentence for f in year.findings if f.verdict.rank <= Verdict.ADVICE.rank)
    said = dict.fromkeys((year.sentence, *year.basis, *bad))
    rows = {str(n): {"words": text(words)} for n, words in enumerate(said)}
    basis = table(BASIS, "Year basis", "The year: basis, and what fails", (LONG,), rows, held=0)
    if not year.solved_h:
        return [basis]
    return [_balance(year), basis, _branches(subject, year), _nodes(subject, year), _hung(subject, year)]


def _balance(year: YearOutcome) -> SheetTable:
    columns = (
        Column("item", "Item", style=Style.TEXT, width=34),
        Column("value", "Value", digits=0, width=14),
        Column("unit", "Unit", style=Style.TEXT, width=16),
        Column("more", "How", style=Style.TEXT, width=44),
    )
    note = "Energies of the hours that solved. Supplies + generators = loads + losses."
    return table(YEAR, TAB, "The year", columns, _items(year), note=note, held=1)


def _items(year: YearOutcome) -> dict[str, Cells]:
    b, at = year.balance, when(year.balance.peak_at_h, year.points.year_h)
    left = b.supply_kwh + b.generation_kwh - b.load_kwh - b.loss_kwh
    rows = {
        "hours": _item("Hours solved", Cell(year.solved_h), "h"),
        "supply": _item("Supplies", _sum_of(b.supply_kwh, "supply"), "kWh", "fed in less taken back"),
        "generation": _item("Generators", _sum_of(b.generation_kwh, "generator"), "kWh"),
        "load": _item("Loads and motors", _sum_of(b.load_kwh, "load", "motor"), "kWh"),
        "line": _item("Loss in lines", _column(b.line_kwh, "line"), "kWh"),
        "copper": _item("Load loss of transformers", _column(b.copper_kwh, "copper"), "kWh", "copper"),
        "iron": _item("No-load loss of transformers", _column(b.iron_kwh, "iron"), "kWh", "iron"),
        "loss": _item("Losses, all", _from(b.loss_kwh, "{line}+{copper}+{iron}"), "kWh"),
        "left": _item(
            "Left over", _from(left, "{supply}+{generation}-{load}-{loss}", 3), "kWh", "of the sums here"
        ),
        "share": _item(
            "Losses", _from(b.loss_percent, "{loss}/({supply}+{generation})*100", 2), "% of fed in"
        ),
        "iron_share": _item("Iron loss", _from(b.iron_percent, "{iron}/{loss}*100", 1), "% of losses"),
        "peak": _item("Highest supply", Cell(b.peak_kw, digits=2), "kW", at),
        "factor": _item(
            "Load factor", _from(b.load_factor, "{supply}/({peak}*{hours})", 3), "", "mean / highest supply"
        ),
        "utilisation": _item("Utilisation", _from(b.utilisation_h, "{supply}/{peak}"), "h"),
        "peak_loss": _item("Highest loss in lines and windings", Cell(b.peak_loss_kw, digits=3), "kW"),
        "loss_factor": _item(
            "Loss load factor",
            _from(b.loss_factor, "({line}+{copper})/({peak_loss}*{hours})", 3),
            "",
            "mean / highest loss in lines and windings",
        ),
    }
    if year.price is not None:
        money = year.money or "unit of money not stated"
        rows["price"] = _item("Price of losses", given(year.price), f"{money} per kWh")
        rows["cost"] = _item("Cost of losses", _from(b.cost, "{loss}*{price}"), f"{money} a year")
    return rows


def _item(name: str, value: Cell, unit: str, more: str = "") -> Cells:
    return {"item": text(name), "value": value, "unit": text(unit), "more": text(more)}


def _from(value: float, formula: str, digits: int = 0) -> Cell:
    """A figure worked out from other rows of the same table, which the braces name."""
    names = [part.split("}")[0] for part in formula.split("{")[1:]]
    if math.isnan(value):
        return Cell(None)
    return Cell(value, formula, {name: Ref("value", YEAR, name) for name in names}, digits=digits)


def _sum_of(value: float, *kinds: str) -> Cell:
    terms = "+".join(f'SUMIF({{kind}},"{kind}",{{kwh}})' for kind in kinds)
    return Cell(value, terms, {"kind": Ref("kind", HUNG), "kwh": Ref("kwh", HUNG)})


def _column(value: float, column: str) -> Cell:
    return Cell(value, "SUM({all})", {"all": Ref(column, BRANCHES)})


def _kwh(key: str, head: str) -> Column:
    return Column(key, head, "kWh", digits=0, width=11)


def _branches(subject: Subject, year: YearOutcome) -> SheetTable:
    columns = (
        *IDENTITY,
        _kwh("through", "Through"),
        _kwh("back", "Back"),
        _kwh("line", "Line loss"),
        _kwh("copper", "Copper"),
        _kwh("iron", "Iron"),
        _kwh("loss", "Loss"),
        Column("share", "Of all losses", "%", digits=1),
        Column("amps", "Most", "A", style=Style.AMPS),
        Column("when", "When", **WHEN),  # type: ignore[arg-type]
        Column("loading", "Loading, most", "%", digits=1, near="most"),
        Column("most", "Allowed", "%", digits=1),
        Column("over", "Over it", "h", digits=0),
        Column("verdict", "Verdict", style=Style.VERDICT, width=11),
    )
    note = "Through: energy that entered the way it is fed. Back: that entered the other way."
    rows = {id: _branch(subject, year, id) for id in year.branches.ids}
    return table(BRANCHES, "Year branches", "The year: branches", columns, rows, note=note)


def _branch(subject: Subject, year: YearOutcome, id: str) -> Cells:
    state, found = year.branches.at(id), subject.identity(id)
    if not state.live:
        return found | {"verdict": text("dead")}
    found |= {
        "through": Cell(state.through_kwh),
        "back": Cell(state.back_kwh),
        "line": Cell(state.line_kwh),
        "copper": Cell(state.copper_kwh),
        "iron": Cell(state.iron_kwh),
        "loss": Cell(state.loss_kwh, "{line}+{copper}+{iron}"),
        "amps": Cell(state.most_a),
        "when": text(when(state.most_a_at_h, year.points.year_h)),
        "loading": Cell(state.most_loaded_percent),
        "over": Cell(state.hours_over),
    }
    if year.balance.loss_kwh:
        total = {"total": Ref("loss", BRANCHES)}
        found["share"] = Cell(100 * state.loss_kwh / year.balance.loss_kwh, "{loss}/SUM({total})*100", total)
    if math.isnan(state.most_loaded_percent):
        return found | {"verdict": text("not judged")}
    found["most"] = given(subject.drawing.limits.most_loaded_percent)
    return found | {"verdict": _verdict(state.hours_over > 0, "{over}>0")}


def _verdict(broken: bool, test: str) -> Cell:
    return Cell(FAIL if broken else HOLDS, f'IF({test},"{FAIL}","{HOLDS}")')


def _nodes(subject: Subject, year: YearOutcome) -> SheetTable:
    columns = (
        *IDENTITY,
        Column("nominal", "Un", "V", style=Style.NUMBER, digits=0),
        Column("low", "Lowest", "V", style=Style.VOLTS),
        Column("low_percent", "Of Un", "%", digits=2, near="low_limit"),
        Column("low_limit", "Allowed", "%", digits=2),
        Column("low_when", "When", **WHEN),  # type: ignore[arg-type]
        Column("below", "Below it", "h", digits=0),
        Column("high", "Highest", "V", style=Style.VOLTS),
        Column("high_percent", "Of Un", "%", digits=2, near="high_limit"),
        Column("high_limit", "Allowed", "%", digits=2),
        Column("high_when", "When", **WHEN),  # type: ignore[arg-type]
        Column("above", "Above it", "h", digits=0),
        Column("verdict", "Verdict", style=Style.VERDICT, width=11),
    )
    rows = {id: _node(subject, year, id) for id in year.nodes.ids}
    return table(NODES, "Year nodes", "The year: busbars and joints", columns, rows)


def _node(subject: Subject, year: YearOutcome, id: str) -> Cells:
    state, found, limits = year.nodes.at(id), subject.identity(id), subject.drawing.limits
    if not state.live:
        return found | {"verdict": text("dead")}
    year_h = year.points.year_h
    return found | {
        "nominal": Cell(state.nominal_v),
        "low": Cell(state.lowest_v),
        "low_percent": Cell(state.lowest_percent, "{low}/{nominal}*100"),
        "low_limit": given(limits.low_percent, 2),
        "low_when": text(when(state.lowest_at_h, year_h)),
        "below": Cell(state.hours_below),
        "high": Cell(state.highest_v),
        "high_percent": Cell(state.highest_percent, "{high}/{nominal}*100"),
        "high_limit": given(limits.high_percent, 2),
        "high_when": text(when(state.highest_at_h, year_h)),
        "above": Cell(state.hours_above),
        "verdict": _verdict(state.hours_below > 0 or state.hours_above > 0, "{below}+{above}>0"),
    }


def _hung(subject: Subject, year: YearOutcome) -> SheetTable:
    columns = (
        *IDENTITY,
        Column("kind", "Kind", style=Style.TEXT, width=12),
        Column("node", "Node", style=Style.TEXT, width=16),
        Column("mean", "Mean", "kW", digits=2),
        _kwh("kwh", "Energy"),
        Column("most", "Most", "kW", digits=2),
        Column("when", "When", **WHEN),  # type: ignore[arg-type]
        Column("factor", "Load factor", digits=3),
    )
    note = "Drawn by loads and motors, fed in by all others. Energy = mean · hours solved."
    rows = {id: _attachment(subject, year.attachments, year, id) for id in year.attachments.ids}
    return table(HUNG, "Year loads", "The year: loads and infeeds", columns, rows, note=note)


def _attachment(subject: Subject, table: Table[Any], year: YearOutcome, id: str) -> Cells:
    state, element = table.at(id), subject.drawing.elements[id]
    found = subject.identity(id) | {
        "kind": text(kind_name(element)),
        "node": text(label(subject.drawing, getattr(element, "node", ""))),
    }
    if not state.live:
        return found
    found |= {
        "mean": Cell(state.mean_kw),
        "kwh": Cell(state.kwh, "{mean}*{hours}", {"hours": Ref("value", YEAR, "hours")}),
        "most": Cell(state.most_kw),
        "when": text(when(state.most_at_h, year.points.year_h)),
    }
    if not math.isnan(state.load_factor):
        found["factor"] = Cell(state.load_factor, "{mean}/{most}")
    return found
