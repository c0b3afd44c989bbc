"""The schedule to build: open points, cable list with totals, transformer order text, taps to set."""

from collections import defaultdict

from app.model import taps
from app.model.kinds import Line, Regulator, Switch, Transformer
from app.sheet.elements import Entry, Extreme, Plan, by_element
from app.sheet.lines import KEY as LINES
from app.sheet.lines import LOADING, MARGIN, judge_loading
from app.sheet.nodes import VERDICT
from app.sheet.phase_build import allocation_tables, line_words, unit_words
from app.sheet.phase_lines import branch_wires
from app.sheet.regulators import regulator_words, setting_words
from app.sheet.subject import FROM_TO, Subject, kind_name
from app.sheet.table import Cell, Cells, Column, Ref, SheetTable, Style, given, table, text
from app.sheet.transformers import supply_winding
from app.sheet.wires import amps, each, spread
from app.study.changers import is_changer

TAB = "Build list"
FIRST = Column("item", "What", style=Style.LONG, width=34)
WIRES = (
    Column("wires", "Conductors", "of one run", digits=0, width=11),
    Column("neutral", "Neutral", style=Style.TEXT, width=14),
)
MOST_TERMS = 150  # cells a total adds up before it is written as a plain figure


def switch_tables(subject: Subject) -> list[SheetTable]:
    """Every switch, closed or an open point."""
    switches = {i: e for i, e in subject.drawing.elements.items() if isinstance(e, Switch)}
    if not switches:
        return []
    by_phase = subject.outcome.wires is not None
    phases = each(subject, Column("i", "I", "A", style=Style.AMPS, width=8)) if by_phase else []
    plan = Plan(
        "switches",
        "Switches",
        "Switches and open points",
        (
            *FROM_TO,
            Column("state", "State", style=Style.TEXT, width=12),
            Column("rating", "Rating", "A", digits=0),
        ),
        (*phases, Column("current", "I", "A", style=Style.AMPS), LOADING),
        (Extreme("loading_max", "loading", True, "Loading, most"),),
        (MARGIN, VERDICT),
    )
    return by_element(subject, plan, [_switch(subject, i, e) for i, e in switches.items()])


def _switch(subject: Subject, id: str, switch: Switch) -> Entry:
    states = [subject.state(id, c) for c in range(len(subject.cases))]
    data = subject.identity(id) | subject.ends(id, switch)
    data |= {
        "state": given("closed" if switch.closed else "OPEN POINT"),
        "rating": subject.value(id, "rating_a"),
    }
    figures: list[Cells] = []
    for case, state in enumerate(states):
        found: Cells = {}
        if switch.closed and state.live:
            found["current"] = Cell(state.current_a)
            if subject.outcome.wires is not None:
                found |= spread("i", amps(branch_wires(subject, id, case)))
            found["most"] = Cell(subject.drawing.limits.most_loaded_percent)
            if switch.rating_a is not None:
                found["loading"] = Cell(state.loaded_percent, "{current}/{rating}*100")
        figures.append(found)
    if not switch.closed:
        return Entry(id, data, figures, lambda worst: {"verdict": text("open")})
    live = any(s.live for s in states)
    return Entry(id, data, figures, judge_loading(subject, live, switch.rating_a is not None))


def build_tables(subject: Subject) -> list[SheetTable]:
    """What to buy, lay and set."""
    found = [_cable_list(subject), _orders(subject), _settings(subject), _open_points(subject)]
    return [t for t in (*found, *allocation_tables(subject)) if t.rows]


def _cable_list(subject: Subject) -> SheetTable:
    by_phase = subject.outcome.wires is not None
    groups: dict[tuple[str, str, str, float, tuple[int, str]], list[str]] = defaultdict(list)
    for id, e in subject.drawing.elements.items():
        if isinstance(e, Line):
            wires = line_words(subject, id) if by_phase else (0, "")
            groups[(kind_name(e), e.type, e.conductor, e.area_mm2 or 0.0, wires)].append(id)
    columns = (
        FIRST,
        Column("conductor", "Metal", style=Style.TEXT, width=12),
        Column("area", "Section", "mm²", digits=0, width=10),
        *(WIRES if by_phase else ()),
        Column("routes", "Routes", digits=0, width=9),
        Column("length", "Length to lay, all runs", "m", digits=0, width=14),
        Column("ids", "Where", style=Style.LONG, width=40),
    )
    rows: dict[str, Cells] = {}
    for number, ((kind, type, metal, area, (wires_, neutral)), ids) in enumerate(sorted(groups.items())):
        rows[str(number)] = {
            "item": text(f"{type or 'type not stated'}, {kind}"),
            "conductor": text(metal),
            "area": given(area) if area else text(""),
            "wires": Cell(wires_),
            "neutral": text(neutral),
            "routes": Cell(len(ids)),
            "length": _total(subject, ids),
            "ids": text(", ".join(ids)),
        }
    note = "Route lengths as drawn times parallel runs; nothing added for ends, slack or waste."
    return table("cable_list", TAB, "Cable and line list", columns, rows, note=note, held=0)


def _total(subject: Subject, ids: list[str]) -> Cell:
    metres = sum(
        e.length_m * e.side_by_side for i in ids if isinstance(e := subject.drawing.elements[i], Line)
    )
    if len(ids) > MOST_TERMS:
        return Cell(metres)
    refs = {f"l{n}": Ref("length", LINES, i) for n, i in enumerate(ids)}
    refs |= {f"n{n}": Ref("runs", LINES, i) for n, i in enumerate(ids)}
    return Cell(metres, "+".join(f"{{l{n}}}*{{n{n}}}" for n in range(len(ids))), refs)


def _transformers(subject: Subject) -> dict[str, Transformer]:
    return {i: e for i, e in subject.drawing.elements.items() if isinstance(e, Transformer)}


def _orders(subject: Subject) -> SheetTable:
    columns = (
        FIRST,
        Column("count", "Units", digits=0, width=12),
        Column("text", "Order text", style=Style.LONG, width=60),
    )
    rows = {
        id: {
            "item": text(subject.tell(id)),
            "count": given(t.side_by_side * (2 if t.build.startswith("open") else 1)),
            "text": text(order_words(subject, id, t)),
        }
        for id, t in _transformers(subject).items()
    }
    return table("orders", TAB, "Transformers to order", columns, rows, held=0)


def order_words(subject: Subject, id: str, t: Transformer) -> str:
    """The order text of one unit; a value nobody stated says so."""

    def loss(field: str, mark: str, unit: str) -> str:
        value = subject.value(id, field)
        if not isinstance(value.value, float):
            return f"{mark} not stated"
        return f"{mark} {value.value:g} {unit}" + (" (assumed)" if value.origin.value == "assumed" else "")

    ladder = f"+{t.taps_up} −{t.taps_down} × {t.notch_percent:g} %"
    if t.taps_up == t.taps_down:
        ladder = f"±{t.taps_up} × {t.notch_percent:g} %"
    return ", ".join(
        (
            f"{t.rating_kva:g} kVA",
            *([unit_words(t)] if unit_words(t) else []),
            f"{t.v1_v:g}/{t.v2_v:g} V no-load",
            t.vector_group,
            f"{subject.drawing.frequency_hz:g} Hz",
            f"uk {t.uk_percent:g} %",
            loss("load_loss_w", "Pk", "W"),
            loss("no_load_loss_w", "P0", "W"),
            loss("no_load_current_percent", "i0", "%"),
            f"taps {ladder} on {t.tapped}" + (", on load" if is_changer(t) else ""),
        )
    )


def _settings(subject: Subject) -> SheetTable:
    columns = (
        FIRST,
        Column("winding", "Set on", style=Style.TEXT, width=12),
        Column("position", "Position from the top", digits=0, width=10),
        Column("of", "of", digits=0, width=9),
        Column("plate", "Nameplate volts", "V", digits=0, width=14),
        Column("words", "Tap to set", style=Style.LONG, width=40),
    )
    rows: dict[str, Cells] = {
        id: {
            "item": text(subject.tell(id)),
            "winding": given(t.tapped),
            "position": Cell(t.taps_up - t.tap + 1),
            "of": Cell(t.taps_up + t.taps_down + 1),
            "plate": given(round(taps.nameplate_v(t, t.tap), 3)),
            "words": text(
                setting_words(subject, id, t)
                if is_changer(t)
                else taps.words(t, t.tap, supply_winding(subject, id))
            ),
        }
        for id, t in _transformers(subject).items()
    }
    for id, e in subject.drawing.elements.items():
        if isinstance(e, Regulator):
            rows[id] = {"item": text(subject.tell(id)), "words": text(regulator_words(subject, id, e))}
    note = "Positions count from the highest nameplate volts. Makers number differently: go by the volts."
    return table("settings", TAB, "Taps and regulators to set on site", columns, rows, note=note, held=0)


def _open_points(subject: Subject) -> SheetTable:
    columns = (FIRST, Column("between", "Between", style=Style.LONG, width=60))
    rows = {
        id: {
            "item": text(subject.tell(id)),
            "between": text(f"{subject.tell(e.start)} and {subject.tell(e.end)}: keep open"),
        }
        for id, e in subject.drawing.elements.items()
        if isinstance(e, Switch) and not e.closed
    }
    return table("open_points", TAB, "Open points", columns, rows, held=0)
