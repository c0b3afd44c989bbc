"""Transformers: nameplate, tap in words, flow, loading, volts given out, iron and copper loss, excitation."""

import math

from app.model import taps
from app.model.kinds import Transformer
from app.sheet.elements import Entry, Extreme, Plan, by_element
from app.sheet.lines import LOADING, LOSS, MARGIN, judge_loading
from app.sheet.nodes import VERDICT, node_cell
from app.sheet.subject import FROM_TO, Subject
from app.sheet.table import Cell, Cells, Column, SheetTable, Style, given, text
from app.study.changers import is_changer
from app.study.outcome import BranchState, Verdict

KEY = "transformers"
DATA = (
    *FROM_TO,
    Column("kva", "Rating, one unit", "kVA", digits=0, width=8),
    Column("units", "Parallel", "units", digits=0, width=8),
    Column("v1", "Winding 1", "V", digits=0, width=9),
    Column("v2", "Winding 2", "V", digits=0, width=9),
    Column("group", "Vector group", style=Style.TEXT, width=8),
    Column("uk", "uk", "%", digits=1, width=6),
    Column("pk", "Pk", "W", digits=0, width=7),
    Column("p0", "P0", "W", digits=0, width=7),
    Column("i0", "i0", "%", digits=1, width=6),
    Column("tapped", "Taps on", style=Style.TEXT, width=10),
    Column("notch", "Tap", "notch", digits=0, width=6),
    Column("tap_percent", "Tap", "%", digits=1, width=6),
    Column("words", "Ratio as tapped", style=Style.LONG, width=24),
)
FIGURES = (
    Column("i1", "I, winding 1", "A", style=Style.AMPS),
    Column("i2", "I, winding 2", "A", style=Style.AMPS),
    Column("s", "S fed in", "kVA", digits=2),
    Column("stands", "Tap stands at", "notch", digits=0, width=8),
    LOADING,
    Column("u_idle", "U given out, no load", "V", style=Style.VOLTS, width=10),
    Column("u_out", "U given out", "V", style=Style.VOLTS, width=10),
    Column("iron", "Iron", "W", digits=0, width=7),
    Column("copper", "Copper", "W", digits=0, width=8),
    LOSS,
    Column("excitation", "Excitation", "% of rated", digits=1, width=10),
)
EXTREMES = (
    Extreme("loading_max", "loading", True, "Loading, most"),
    Extreme("loss_max", "loss", True, "Loss, most"),
    Extreme("excitation_max", "excitation", True, "Excitation, most"),
)
NOTE = (
    "Pk, P0, uk and i0 are of one unit. Loading is that of the worse winding. Iron = P0·(U/Ur)² of the "
    "winding of higher voltage, copper = Pk·(I/Ir)² of the other. S = √3·U·I of the fed one; excitation is "
    "its voltage over its rated voltage as tapped."
)


def transformer_tables(subject: Subject) -> list[SheetTable]:
    """Every transformer."""
    found = {i: e for i, e in subject.drawing.elements.items() if isinstance(e, Transformer)}
    plan = Plan(
        KEY, "Transformers", "Transformers", DATA, FIGURES, EXTREMES, (MARGIN, VERDICT), NOTE
    )  # fmt: skip
    return by_element(subject, plan, [_entry(subject, i, e) for i, e in found.items()])


def supply_winding(subject: Subject, id: str) -> int:
    """The winding that a supply holds; 1 where nothing feeds it."""
    cases = subject.outcome.solved_cases or range(len(subject.cases))
    return max(subject.outcome.supply_winding(id, case) for case in cases)


def _entry(subject: Subject, id: str, t: Transformer) -> Entry:
    states = [subject.state(id, c) for c in range(len(subject.cases))]
    figures = [_figures(subject, id, t, s, c) for c, s in enumerate(states)]
    beyond = any(f.verdict is Verdict.ADVICE and id in f.ids for f in subject.outcome.findings)
    held = Verdict.ADVICE.value if beyond else subject.held
    judge = judge_loading(subject, any(s.live for s in states), True, held)
    return Entry(id, data_cells(subject, id, t), figures, judge)


def data_cells(subject: Subject, id: str, t: Transformer) -> Cells:
    """What the nameplate says, and the tap in words."""
    percent = t.tap * t.notch_percent
    return (
        subject.identity(id)
        | subject.ends(id, t)
        | {
            "kva": subject.value(id, "rating_kva"),
            "units": given(t.side_by_side),
            "v1": subject.value(id, "v1_v"),
            "v2": subject.value(id, "v2_v"),
            "group": given(t.vector_group),
            "uk": subject.value(id, "uk_percent"),
            "pk": subject.value(id, "load_loss_w"),
            "p0": subject.value(id, "no_load_loss_w"),
            "i0": subject.value(id, "no_load_current_percent"),
            "tapped": given(t.tapped),
            "notch": given(t.tap),
            "tap_percent": Cell(percent, f"{{notch}}*{t.notch_percent!r}"),
            "words": text(taps.words(t, t.tap, supply_winding(subject, id))),
        }
    )


def _figures(subject: Subject, id: str, t: Transformer, state: BranchState, case: int) -> Cells:
    if not state.live:
        return {}
    fed, out = (t.start, t.end) if state.forward else (t.end, t.start)
    i_fed = "i1" if state.forward else "i2"
    root = subject.root(t.start)
    fed_volts = subject.outcome.nodes.at(fed, case).voltage_v
    s_kw, s_kvar = (state.start_kw, state.start_kvar) if state.forward else (state.end_kw, state.end_kvar)
    fed_cell = {"fed": node_cell(subject, fed, "u", case)}
    tapped = _tapped(t, 1 if state.forward else 2)
    away = 2 if state.forward else 1
    rated, given_out = taps.windings(t, int(state.notch))[:: 1 if state.forward else -1]
    high = 1 if t.v1_v >= t.v2_v else 2
    high_cell = {"high": node_cell(subject, t.start if high == 1 else t.end, "u", case)}
    iron = f"{{units}}*{{p0}}*({{high}}/({_tapped(t, high)}))^2"
    return {
        "i1": Cell(state.start_a),
        "i2": Cell(state.end_a),
        "stands": Cell(state.notch) if is_changer(t) else Cell(state.notch, "{notch}"),
        "s": Cell(math.hypot(s_kw, s_kvar), f"{root}*{{fed}}*{{{i_fed}}}/1000", fed_cell),
        "loading": Cell(state.loaded_percent, _loading(root)),
        "u_idle": Cell(fed_volts * given_out / rated, f"{{fed}}*({_tapped(t, away)})/({tapped})", fed_cell),
        "u_out": Cell(
            subject.outcome.nodes.at(out, case).voltage_v,
            "{out}",
            {"out": node_cell(subject, out, "u", case)},
        ),
        "iron": Cell(state.iron_kw * 1e3, iron, high_cell),
        "copper": Cell(state.copper_kw * 1e3, _copper(root, t, 3 - high)),
        "loss": Cell(state.loss_kw * 1e3, "{iron}+{copper}"),
        "excitation": Cell(fed_volts / rated * 100, f"{{fed}}/({tapped})*100", fed_cell),
        "most": Cell(subject.drawing.limits.most_loaded_percent),
    }


def _tapped(t: Transformer, winding: int) -> str:
    """Rated voltage of a winding at its tap, as a formula."""
    plain = f"{{v{winding}}}"
    if t.tapped != f"winding {winding}":
        return plain
    return (
        f"{plain}*(1+{{stands}}*{t.notch_percent!r}/100)"
        if is_changer(t)
        else f"{plain}*(1+{{tap_percent}}/100)"
    )


def _loading(root: str) -> str:
    """The winding nearer to its rated current; rated currents are those of the nameplate voltages."""
    return f"{root}*MAX({{v1}}*{{i1}},{{v2}}*{{i2}})/({{kva}}*1000*{{units}})*100"


def _copper(root: str, t: Transformer, w: int) -> str:
    """Load loss at the current of the winding that carries no magnetising current."""
    return f"{{units}}*{{pk}}*({root}*{_tapped(t, w)}*{{i{w}}}/({{kva}}*1000*{{units}}))^2"
