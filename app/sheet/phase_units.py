"""Transformers whose phases are solved one by one: build, earthing, amperes of each, the worst loaded."""

import math

from app.model import taps
from app.model.fault_data import star_earth_ohm
from app.model.kinds import Transformer
from app.sheet.elements import Entry, Plan, by_element, figure
from app.sheet.lines import MARGIN, judge_loading
from app.sheet.nodes import VERDICT
from app.sheet.phase_lines import branch_wires
from app.sheet.subject import Subject
from app.sheet.table import Cell, Cells, Column, SheetTable, Style, given, text
from app.sheet.transformers import DATA, EXTREMES, FIGURES, KEY, data_cells
from app.sheet.wires import amps, each, node_wires, redone, spread, volts
from app.study.changers import is_changer
from app.study.outcome import BranchState, Verdict
from app.study.wire_words import conductors

WIRES = (
    Column("build", "Build", style=Style.TEXT, width=13),
    Column("phases", "Winding 1 on", style=Style.TEXT, width=8),
    Column("star_1", "Star point 1", style=Style.TEXT, width=11),
    Column("star_2", "Star point 2", style=Style.TEXT, width=11),
)
NOTE = (
    "Pk, P0, uk and i0 are of one unit. Loading is that of the worst phase of the worse winding. I of the "
    "phases is of the winding that is fed; that of winding 1 and 2 is its worst phase. Iron and copper are "
    "the solver's, summed over the phases. Excitation is of the lowest phase, or of the one it hangs on."
)


def phase_unit_tables(subject: Subject) -> list[SheetTable]:
    """Every transformer, phase by phase."""
    found = {i: e for i, e in subject.drawing.elements.items() if isinstance(e, Transformer)}
    at = next(i for i, c in enumerate(DATA) if c.key == "group") + 1
    data = (*DATA[:at], *WIRES, *DATA[at:])
    fed = {
        letter
        for i in found
        for c in range(len(subject.cases))
        for letter in amps(branch_wires(subject, i, c))
    }
    phases = each(subject, Column("i", "I fed", "A", style=Style.AMPS, width=8), neutral="N" in fed)
    lowest = Column("u_out", "U given out, lowest", "% of base", digits=1, width=10)
    rest = tuple(lowest if c.key == "u_out" else c for c in FIGURES)
    plan = Plan(
        KEY, "Transformers", "Transformers, phase by phase", data, (*phases, *rest), EXTREMES,
        (MARGIN, VERDICT), NOTE,
    )  # fmt: skip
    return by_element(subject, plan, [_entry(subject, i, e) for i, e in found.items()])


def _entry(subject: Subject, id: str, t: Transformer) -> Entry:
    states = [subject.state(id, c) for c in range(len(subject.cases))]
    data = data_cells(subject, id, t) | {
        "build": given(t.build),
        "phases": _winding_1(subject, id, t, states[subject.first]),
        "star_1": text(earthing_words(t, 1)),
        "star_2": text(earthing_words(t, 2)),
    }
    beyond = any(f.verdict is Verdict.ADVICE and id in f.ids for f in subject.outcome.findings)
    judge = judge_loading(
        subject, any(s.live for s in states), True, Verdict.ADVICE.value if beyond else subject.held
    )
    return Entry(id, data, [_figures(subject, id, t, s, c) for c, s in enumerate(states)], judge)


def _winding_1(subject: Subject, id: str, t: Transformer, state: BranchState) -> Cell:
    """Where winding 1 is joined: as stated, else the conductors that it turns out to be fed from."""
    if t.phases != "all" or not state.live or not state.forward:
        return given(t.phases)
    has = "".join(amps(branch_wires(subject, id, subject.first)))
    return text(conductors(has, node_wires(subject, t.start).system))


def earthing_words(t: Transformer, winding: int) -> str:
    """How the star point of a winding is earthed; of a winding without one nothing is said."""
    if t.build == "centre-tapped":
        return "" if winding == 1 else "midpoint to neutral"
    group = taps.group(t.vector_group)
    if group is None or str(group[winding - 1])[0].upper() not in "YZ":
        return "none"
    ohms = star_earth_ohm(t, winding)
    return "not earthed" if ohms is None else "solid" if ohms == 0 else f"{ohms:g} Ω"


def _figures(subject: Subject, id: str, t: Transformer, state: BranchState, case: int) -> Cells:
    if not state.live:
        return {}
    fed, out = (t.start, t.end) if state.forward else (t.end, t.start)
    nodes = subject.outcome.nodes
    kva = math.hypot(
        *((state.start_kw, state.start_kvar) if state.forward else (state.end_kw, state.end_kvar))
    )
    rated = taps.windings(t, int(state.notch))[0 if state.forward else 1]
    leads = amps(branch_wires(subject, id, case))
    iron, copper = state.iron_kw * 1e3, state.copper_kw * 1e3
    return spread("i", leads) | {
        "i1": Cell(state.start_a),
        "i2": Cell(state.end_a),
        "s": Cell(kva),
        "stands": Cell(state.notch) if is_changer(t) else Cell(state.notch, "{notch}"),
        "loading": _loading(t, state),
        "u_out": Cell(
            nodes.at(out, case).percent, "{low}", {"low": figure(subject, "busbars", out, "percent", case)}
        ),
        "iron": Cell(iron),
        "copper": Cell(copper),
        "loss": redone(state.loss_kw * 1e3, "{iron}+{copper}", iron + copper),
        "excitation": Cell(_across(subject, fed, [p for p in leads if p != "N"], case) / rated * 100),
        "most": Cell(subject.drawing.limits.most_loaded_percent),
    }


def _across(subject: Subject, node: str, phases: list[str], case: int) -> float:
    """Volts across the winding that is fed: the lowest as between lines, of its own phase, or between its
    two; nan where those two are not told."""
    wires = node_wires(subject, node, case)
    if len(phases) == 3 or wires.system != "three-phase":
        return subject.outcome.nodes.at(node, case).voltage_v
    there, between = volts(wires), wires.against == "next phase"
    if len(phases) == 1:
        return math.nan if between else there.get(phases[0], math.nan)
    first = {"AB": "A", "BC": "B", "AC": "C"}.get("".join(phases), "")
    return there.get(first, math.nan) if between else math.nan


def _loading(t: Transformer, state: BranchState) -> Cell:
    """Worst current over the rated one: of three phases S/(√3·U), of one S/U; else the figure alone."""
    worst = max(t.v1_v * state.start_a, t.v2_v * state.end_a)
    share = worst / (t.rating_kva * 1e3 * t.side_by_side) * 100
    redo = "MAX({v1}*{i1},{v2}*{i2})/({kva}*1000*{units})*100"
    for factor, words in ((math.sqrt(3), "SQRT(3)*"), (1.0, "")):
        found = redone(state.loaded_percent, words + redo, factor * share)
        if found.formula:
            return found
    return Cell(state.loaded_percent)
