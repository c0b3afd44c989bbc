"""Busbars and joints whose phases are solved one by one: volts of each, neutral, unbalance, margins."""

import math
from collections.abc import Callable

from app.model.drawing import Limits
from app.sheet.elements import Entry, Extreme, Plan, by_element, figure
from app.sheet.subject import FAIL, PASSED, Subject, limit
from app.sheet.table import Cell, Cells, Column, Origin, SheetTable, Style, text
from app.sheet.wires import degrees, each, greatest, listed, node_wires, redone, spread, volts
from app.study.checking import margin_of
from app.study.outcome import NodeState, NodeWires
from app.study.wire_words import AGAINST, conductors

KEY = "busbars"
DATA = (
    Column("has", "Conductors", style=Style.TEXT, width=11),
    Column("against", "Volts", style=Style.TEXT, width=15),
    Column("un", "Un", "V", digits=0, width=8),
    Column("base", "Base", "V", digits=1, width=8),
)
NEUTRAL = Column("neutral", "N to earth", "V", digits=2, near="most_neutral", width=8)
UNBALANCE = Column("unbalance", "Unbalance V2/V1", "%", digits=2, near="most_unbalance", width=10)
SPREAD = Column("spread", "Largest off the mean", "% of mean", digits=2, width=10)
VERDICT = Column("verdict", "Verdict", style=Style.VERDICT, width=10)
NOTE = (
    "Base is the nominal voltage between a phase and what its volts are taken against; lowest and highest "
    "are of the phases there. V2/V1 is negative over positive sequence; largest off the mean is of the three "
    "line volts. Drop is the lowest phase below the supply."
)
JUDGED = (  # extreme, field of the limits, key of the limit's cell, key and head of the margin, unit
    ("drop_max", "drop_percent", "drop", "drop_margin", "Drop margin", "%"),
    ("unbalance_max", "unbalance_percent", "unbalance", "unbalance_margin", "Unbalance margin", "%"),
    ("neutral_max", "neutral_v", "neutral", "neutral_margin", "N margin", "V"),
)


def phase_node_tables(subject: Subject) -> list[SheetTable]:
    """Every node against the limits of voltage, drop, unbalance and neutral that are set."""
    low_high = [
        Column("percent", "U lowest", "% of base", digits=2, near="low"),
        Column("high_percent", "U highest", "% of base", digits=2, near="high"),
    ]
    bases = [Column("u_120", "U lowest, 120 V base", "V", digits=1, near="low_120", width=10)]
    figures = [
        *each(subject, Column("u", "U", "V", style=Style.VOLTS, width=9), neutral=False),
        *each(subject, Column("angle", "Angle", "°", digits=1, width=8), neutral=False),
        *low_high,
        *(bases if subject.american else ()),
        NEUTRAL,
        UNBALANCE,
        SPREAD,
        Column("drop", "Drop from supply", "%", digits=2, near="most_drop"),
        Column("route", "Route from supply", "m", digits=0, width=8),
    ]
    plan = Plan(
        KEY, "Busbars", "Busbars and joints, phase by phase", DATA, tuple(figures),
        _extremes(subject.drawing.limits), (*_margins(subject.drawing.limits), VERDICT), NOTE,
    )  # fmt: skip
    return by_element(subject, plan, [_entry(subject, id) for id in subject.drawing.nodes()])


def _extremes(limits: Limits) -> tuple[Extreme, ...]:
    found = [
        Extreme("low_min", "percent", False, "U lowest"),
        Extreme("high_max", "high_percent", True, "U highest"),
        Extreme("neutral_max", "neutral", True, "N to earth, most"),
        Extreme("unbalance_max", "unbalance", True, "V2/V1, most"),
    ]
    return tuple(found + ([Extreme("drop_max", "drop", True, "Drop, most")] if limits.drop_percent else []))


def _margins(limits: Limits) -> list[Column]:
    found = [
        Column("margin", "Margin", "% of base", digits=2, near="0"),
        Column("margin_v", "Margin", "V", digits=1, near="0", width=8),
    ]
    for _, field, _, key, head, unit in JUDGED:
        if getattr(limits, field) is not None:
            found.append(Column(key, head, unit, digits=2, near="0"))
    return found


def _entry(subject: Subject, id: str) -> Entry:
    cases = range(len(subject.cases))
    states = [subject.outcome.nodes.at(id, c) for c in cases]
    first = node_wires(subject, id)
    data = subject.identity(id)
    if not math.isnan(states[0].nominal_v):
        stated = subject.value(id, "nominal_v")
        data["un"] = stated if stated.value is not None else Cell(states[0].nominal_v, origin=Origin.GIVEN)
    if first.phases:
        has = first.phases + ("N" if first.neutral_v == first.neutral_v else "")
        data |= {
            "has": text(conductors(has, first.system)),
            "against": text(AGAINST.get(first.against, first.against)),
            "base": Cell(first.base_v),
        }
    figures = [_figures(subject, id, states[c], node_wires(subject, id, c), c) for c in cases]
    return Entry(id, data, figures, _judge(subject, first.base_v, any(s.live for s in states)))


def _figures(subject: Subject, id: str, state: NodeState, wires: NodeWires, case: int) -> Cells:
    if not state.live:
        return {}
    limits, there = subject.drawing.limits, volts(wires)
    lowest, highest = (f(there.values(), default=math.nan) / wires.base_v * 100 for f in (min, max))
    span = listed("u", there)
    least = greatest(span).replace("MAX", "MIN")
    phases = spread("u", there) | spread("angle", degrees(wires))
    return phases | {
        "percent": redone(state.percent, f"{least}/{{base}}*100", lowest),
        "high_percent": redone(state.high_percent, f"{greatest(span)}/{{base}}*100", highest),
        "u_120": Cell(1.2 * state.percent, "1.2*{percent}"),
        "neutral": Cell(wires.neutral_v),
        "unbalance": Cell(wires.unbalance_percent),
        "spread": _spread(wires, there, span),
        "drop": _drop(subject, id, state, case),
        "route": Cell(state.route_m),
        "low": Cell(limits.low_percent),
        "high": Cell(limits.high_percent),
        "low_120": Cell(1.2 * limits.low_percent),
        "most_drop": Cell(limits.drop_percent),
        "most_unbalance": Cell(limits.unbalance_percent),
        "most_neutral": Cell(limits.neutral_v),
    }


def _spread(wires: NodeWires, there: dict[str, float], span: str) -> Cell:
    """By NEMA, of line volts; a formula where these stand here."""
    if wires.against != "next phase" or len(there) < 3:
        return Cell(wires.spread_percent)
    mean = sum(there.values()) / 3
    meant = max(abs(v - mean) for v in there.values()) / mean * 100
    redo = f"MAX(MAX({span})-AVERAGE({span}),AVERAGE({span})-MIN({span}))/AVERAGE({span})*100"
    return redone(wires.spread_percent, redo, meant)


def _drop(subject: Subject, id: str, state: NodeState, case: int) -> Cell:
    layout = subject.layout
    root = layout.node_ids[layout.roots[layout.tree[layout.node_row[id]]]]
    meant = subject.outcome.nodes.at(root, case).percent - state.percent
    start = {"start": figure(subject, KEY, root, "percent", case)}
    return redone(state.drop_percent, "{start}-{percent}", meant, start)


def _judge(subject: Subject, base_v: float, live: bool) -> Callable[[dict[str, float]], Cells]:
    limits = subject.drawing.limits

    def judge(worst: dict[str, float]) -> Cells:
        if not live or "low_min" not in worst:
            return {"verdict": subject.unfed()}
        spares = (
            margin_of(worst["low_min"], limits.low_percent, True),
            margin_of(worst["high_max"], limits.high_percent, False),
        )
        low, high = {"low": limit("low")}, {"high": limit("high")}
        least = [float(min(spares))]
        found = {
            "margin": Cell(least[0], "MIN({low_min}-{low},{high}-{high_max})", low | high),
            "margin_v": Cell(least[0] * base_v / 100, "{margin}*{base}/100"),
        }
        for extreme, field, name, key, _, _ in JUDGED:
            allowed = getattr(limits, field)
            if allowed is not None and extreme in worst:
                least.append(float(margin_of(worst[extreme], allowed, False)))
                found[key] = Cell(least[-1], f"{{most}}-{{{extreme}}}", {"most": limit(name)})
        held = ",".join(f"{{{key}}}" for key in found if key != "margin_v")
        good = subject.held
        found["verdict"] = Cell(FAIL if min(least) < 0 else good, f'IF(MIN({held}){PASSED},"FAIL","{good}")')
        return found

    return judge
