"""A year as text: what it stands on, the balance in kWh, tables by id, findings, cautions."""

from collections.abc import Callable, Sequence
from typing import Any

from app.model.drawing import Drawing
from app.model.figures import closure, plain
from app.model.kinds import KIND_WORDS, kind_of
from app.printed import aligned, listed_findings
from app.study.cautions import CAUTIONS
from app.study.outcome import Table
from app.study.year_outcome import YearOutcome
from app.study.year_points import when

Write = Callable[[Any, float], str]
Column = tuple[str, Write]


def _figure(name: str, digits: int) -> Write:
    return lambda state, _year_h: plain(float(getattr(state, name)), digits)


def _at(name: str) -> Write:
    return lambda state, year_h: when(getattr(state, name), year_h)


def _volts(name: str) -> Write:
    return lambda state, _year_h: plain(getattr(state, name), 1 if state.nominal_v < 1000 else 0)


NODES: tuple[Column, ...] = (
    ("lowest V", _volts("lowest_v")),
    ("% nom.", _figure("lowest_percent", 2)),
    ("when", _at("lowest_at_h")),
    ("h below", _figure("hours_below", 0)),
    ("highest V", _volts("highest_v")),
    ("% nom.", _figure("highest_percent", 2)),
    ("when", _at("highest_at_h")),
    ("h above", _figure("hours_above", 0)),
)
BRANCHES: tuple[Column, ...] = (
    ("kWh through", _figure("through_kwh", 0)),
    ("kWh back", _figure("back_kwh", 0)),
    ("line kWh", _figure("line_kwh", 0)),
    ("copper kWh", _figure("copper_kwh", 0)),
    ("iron kWh", _figure("iron_kwh", 0)),
    ("most A", _figure("most_a", 1)),
    ("loading %", _figure("most_loaded_percent", 1)),
    ("when", _at("most_a_at_h")),
    ("h over", _figure("hours_over", 0)),
)
ATTACHMENTS: tuple[Column, ...] = (
    ("kWh", _figure("kwh", 0)),
    ("mean kW", _figure("mean_kw", 2)),
    ("most kW", _figure("most_kw", 2)),
    ("when", _at("most_at_h")),
    ("load factor", _figure("load_factor", 2)),
)


def printed_year(drawing: Drawing, year: YearOutcome) -> str:
    """The whole text."""
    parts = [_head(drawing, year)]
    if year.solved_h:
        parts += [
            _table(drawing, "Nodes", year.nodes, NODES, year),
            _table(drawing, "Branches", year.branches, BRANCHES, year),
            _table(drawing, "Loads and infeeds", year.attachments, ATTACHMENTS, year),
            "Balance\n" + "\n".join(f"  {line}" for line in balance_lines(year)),
        ]
    parts += [listed_findings(year.findings), "Cautions\n" + "\n".join(f"  {c}" for c in CAUTIONS)]
    return "\n\n".join(part for part in parts if part) + "\n"


def _head(drawing: Drawing, year: YearOutcome) -> str:
    title = drawing.project.title or "Untitled drawing"
    return "\n".join([f"{title}: the year", year.sentence, *year.basis])


def _table(
    drawing: Drawing, title: str, table: Table[Any], columns: Sequence[Column], year: YearOutcome
) -> str:
    if not table.ids:
        return ""
    lines = [["id", "name", "kind", *(head for head, _ in columns)]]
    for id in table.ids:
        element, state = drawing.elements[id], table.at(id)
        figures = [write(state, year.points.year_h) for _, write in columns]
        if not state.live:
            figures = ["dead", *[""] * (len(columns) - 1)]
        lines.append([id, element.name, KIND_WORDS[kind_of(element)], *figures])
    return f"{title}\n{aligned(lines, len(columns))}"


def balance_lines(year: YearOutcome) -> list[str]:
    """The balance and its factors, a line each."""
    b = year.balance

    def kwh(value: float) -> str:
        return plain(value, 0, "kWh")

    fed = kwh(b.supply_kwh) + (f" + generators {kwh(b.generation_kwh)}" if b.generation_kwh else "")
    lines = [
        f"supplies {fed} = loads {kwh(b.load_kwh)} + losses {kwh(b.loss_kwh)}; "
        f"closure {closure(b.closure)}, worst point {closure(b.worst_closure)}",
        f"losses: lines {kwh(b.line_kwh)}, copper {kwh(b.copper_kwh)}, iron {kwh(b.iron_kwh)}; "
        f"{plain(b.loss_percent, 2, '%')} of what is fed in, "
        f"iron {plain(b.iron_percent, 1, '%')} of all losses",
        f"most from the supplies {plain(b.peak_kw, 2, 'kW')} at {when(b.peak_at_h, year.points.year_h)}; "
        f"load factor {plain(b.load_factor, 3)}, loss load factor {plain(b.loss_factor, 3)}, "
        f"utilisation {plain(b.utilisation_h, 0, 'h')}",
    ]
    if year.price is not None:
        lines.append(f"losses cost {money(year)}")
    return lines


def money(year: YearOutcome) -> str:
    """What the losses cost, with the price: `1 082 EUR a year, at 0.25 EUR per kWh`."""
    unit = f" {year.money}" if year.money else " (unit of money not stated)"
    price = f"{year.price:g}{unit if year.money else ''} per kWh"
    return f"{plain(year.balance.cost, 0)}{unit} a year, at {price}"
