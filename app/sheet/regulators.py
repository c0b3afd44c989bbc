"""Regulators, and the transformers whose tap changer steps by itself: what is set and where each stands."""

from collections.abc import Iterable

from app.model.drawing import label
from app.model.kinds import Branch, Regulator, Transformer
from app.sheet.elements import Entry, Extreme, Plan, by_element
from app.sheet.lines import LOADING, MARGIN, judge_loading
from app.sheet.nodes import VERDICT, volts_cell
from app.sheet.subject import FROM_TO, Subject
from app.sheet.table import Cell, Cells, Column, Origin, SheetTable, Style, given
from app.sheet.wires import each, notches, redone, spread
from app.study.changers import is_changer
from app.study.outcome import BranchState

KEY = "regulators"
MODES = {
    "forward": "always its end",
    "with the power": "where the power goes",
    "idle in reverse": "its end; stays in reverse",
}
NOTE = (
    "Notches count from the middle; one up raises the winding or the end whose taps it has. R and X are of "
    "the line to the place whose volts are held. Each steps notch by notch until its volts are in its band."
)
BY_PHASE = (
    " U is of the lowest phase, as between lines; I of the worst. Where each phase steps by itself, all are "
    "told, and the one that is furthest from the middle."
)


def regulator_tables(subject: Subject) -> list[SheetTable]:
    """Everything that steps by itself."""
    found = {i: e for i, e in subject.drawing.branches().items() if is_changer(e)}
    by_phase = subject.outcome.wires is not None
    measures = (Column("measures", "Measures", style=Style.TEXT, width=9),) if by_phase else ()
    stand = Column("notch", "Stands at", "notch", digits=0, width=7)
    own = each(subject, stand, False) if by_phase and _each(found.values()) else []
    data = (
        *FROM_TO,
        Column("holds", "Holds", style=Style.TEXT, width=12),
        *measures,
        Column("hold", "Setting", "% of nominal", digits=1, width=8),
        Column("band", "Bandwidth", "% of nominal", digits=2, width=9),
        Column("r", "R", "Ω", digits=3, width=7),
        Column("x", "X", "Ω", digits=3, width=7),
        Column("step", "Step", "%", digits=3, width=7),
        Column("down", "Down", "notches", digits=0, width=8),
        Column("up", "Up", "notches", digits=0, width=8),
        Column("rating", "Rating", "A", digits=0, width=7),
    )
    figures = (
        *own,
        stand,
        Column("percent", "Stands at", "%", digits=2, width=8),
        Column("u1", "U, from", "V", style=Style.VOLTS, width=9),
        Column("u2", "U, to", "V", style=Style.VOLTS, width=9),
        Column("current", "I", "A", style=Style.AMPS, width=8),
        LOADING,
        Column("stop", "End stop", style=Style.TEXT, width=9),
    )
    extremes = (
        Extreme("low", "notch", False, "Lowest notch"),
        Extreme("high", "notch", True, "Highest notch"),
        Extreme("loading_max", "loading", True, "Loading, most"),
    )
    note = NOTE + BY_PHASE if by_phase else NOTE
    plan = Plan(
        KEY, "Regulators", "Regulators and tap changers", data, figures, extremes, (MARGIN, VERDICT), note
    )
    return by_element(subject, plan, [_entry(subject, i, e) for i, e in found.items()])  # type: ignore[arg-type]


def _entry(subject: Subject, id: str, changer: Transformer | Regulator) -> Entry:
    step, down, up = _ladder(changer)
    data = (
        subject.identity(id)
        | subject.ends(id, changer)
        | {
            "holds": given(changer.regulates)
            if isinstance(changer, Transformer)
            else given(MODES[changer.mode]),
            "measures": given(changer.measures),
            "hold": subject.value(id, "hold_percent"),
            "band": subject.value(id, "bandwidth_percent"),
            "r": given(changer.drop_r_ohm or 0.0),
            "x": given(changer.drop_x_ohm or 0.0),
            "step": given(step),
            "down": given(down),
            "up": given(up),
        }
        | ({"rating": subject.value(id, "rating_a")} if isinstance(changer, Regulator) else {})
    )
    states = [subject.state(id, c) for c in range(len(subject.cases))]
    figures = [_figures(subject, id, changer, s, c) for c, s in enumerate(states)]
    rated = isinstance(changer, Transformer) or changer.rating_a is not None
    return Entry(id, data, figures, judge_loading(subject, any(s.live for s in states), rated))


def _each(changers: Iterable[Branch]) -> bool:
    """Whether any steps phase by phase."""
    return any(getattr(changer, "measures", "") == "each" for changer in changers)


def _ladder(changer: Transformer | Regulator) -> tuple[float, int, int]:
    """Step in %, notches down and up."""
    if isinstance(changer, Transformer):
        return changer.notch_percent, changer.taps_down, changer.taps_up
    return changer.step_percent, changer.steps_down, changer.steps_up


def _figures(
    subject: Subject, id: str, changer: Transformer | Regulator, state: BranchState, case: int
) -> Cells:
    if not state.live:
        return {}
    step, down, up = _ladder(changer)
    at_end = state.notch in (-down, up)
    found: Cells = {}
    if subject.outcome.wires is not None:
        found = spread("notch", notches(subject.outcome.wires.branches.at(id, case)))
    return found | {
        "notch": Cell(state.notch),
        "percent": Cell(state.notch * step, "{notch}*{step}"),
        "u1": volts_cell(subject, changer.start, case),
        "u2": volts_cell(subject, changer.end, case),
        "current": Cell(state.current_a),
        "loading": _loading(changer, state),
        "most": Cell(subject.drawing.limits.most_loaded_percent),
        "stop": Cell("END STOP" if at_end else "no", 'IF(OR({notch}=-{down},{notch}={up}),"END STOP","no")'),
    }


def _loading(changer: Transformer | Regulator, state: BranchState) -> Cell:
    """Of a regulator by its rating; a transformer has its own in the table of transformers."""
    rated = changer.rating_a if isinstance(changer, Regulator) else None
    if rated is None:
        return Cell(state.loaded_percent)
    return redone(state.loaded_percent, "{current}/{rating}*100", state.current_a / rated * 100)


def regulator_words(subject: Subject, id: str, regulator: Regulator) -> str:
    """`holds Lane at 99 % of nominal in a band of 1.667 % (assumed), line drop R 2.5 Ω, X 1.35 Ω`."""

    def told(field: str) -> str:
        cell = subject.value(id, field)
        return f"{cell.value:.4g} %" + (" (assumed)" if cell.origin is Origin.ASSUMED else "")

    held = {
        "with the power": "the end that power goes to",
        "idle in reverse": "{end}, stays in reverse power",
    }
    words = f"holds {held.get(regulator.mode, '{end}').format(end=label(subject.drawing, regulator.end))} at "
    words += f"{told('hold_percent')} of nominal in a band of {told('bandwidth_percent')}"
    if regulator.drop_r_ohm or regulator.drop_x_ohm:
        words += f", line drop R {regulator.drop_r_ohm or 0:g} Ω, X {regulator.drop_x_ohm or 0:g} Ω"
    return words


def setting_words(subject: Subject, id: str, changer: Transformer) -> str:
    """`steps by itself: holds winding 2 at 100 % in a band of 2.5 %`."""
    hold, band = (subject.value(id, f"{name}_percent").value for name in ("hold", "bandwidth"))
    return f"steps by itself: holds {changer.regulates} at {hold:g} % of nominal in a band of {band:g} %"
