"""Cables and overhead lines whose conductors are solved one by one: amperes, loading and loss of each."""

from app.model import assumed
from app.model.conductors import is_hung
from app.model.kinds import Line, OverheadLine
from app.model.wire_data import neutral_of, neutral_value
from app.sheet.elements import Entry, Extreme, Plan, by_element, figure
from app.sheet.lines import DATA, DROP, KEY, LOADING, LOSS, MARGIN, judge_loading, stated
from app.sheet.nodes import VERDICT
from app.sheet.spacing import KEY as SPACING
from app.sheet.subject import Subject
from app.sheet.table import Cell, Cells, Column, Origin, Ref, SheetTable, Style, text
from app.sheet.wires import amps, each, greatest, most, node_wires, redone, spread, volts
from app.study.outcome import BranchState, BranchWires
from app.study.overhead_working import BASIS, working_in
from app.study.wire_words import conductors
from solver.line import ALPHA

WIRES = (
    Column("has", "Conductors", style=Style.TEXT, width=11),
    Column("neutral", "Neutral", style=Style.TEXT, width=13),
)
OWN = (
    Column("rn20", "R of N at 20 °C", "Ω/km", digits=3, width=8),
    Column("rn", "R of N hot, whole", "Ω", digits=5, width=9),
)
NOTE = (
    "Loss = Σ I²·R over the conductors, the neutral among them; where the formula is missing (charging, or a "
    "return through earth) the figure is the solver's. Loading: worst conductor, against Iz of a "
    "phase. ΔU is of the phase that loses most."
)


def phase_line_tables(subject: Subject) -> list[SheetTable]:
    """Every cable and overhead line, conductor by conductor."""
    found = {i: e for i, e in subject.drawing.elements.items() if isinstance(e, Line)}
    data = [*DATA[:3], *WIRES, *DATA[3:-1], *OWN, DATA[-1]]
    if any(subject.value(i, "capacitance_uf_per_km").value for i in found):
        data.insert(-1, Column("c", "C", "µF/km", digits=3, width=7))
    if any(is_hung(e) for e in found.values()):
        data.append(Column("basis", "R and X", style=Style.LONG, width=18))
    figures = (
        *each(subject, Column("i", "I", "A", style=Style.AMPS, width=8)),
        *each(subject, Column("load", "Loading", "%", near="most", width=8)),
        LOADING, *DROP, LOSS,
    )  # fmt: skip
    extremes = (
        Extreme("loading_max", "loading", True, "Loading, most"),
        Extreme("cumulative_max", "cumulative", True, "ΔU from supply, most"),
        Extreme("loss_max", "loss", True, "Loss, most"),
    )
    plan = Plan(
        KEY, "Cables", "Cables and overhead lines, conductor by conductor", tuple(data), figures,
        extremes, (MARGIN, VERDICT), NOTE,
    )  # fmt: skip
    return by_element(subject, plan, [_entry(subject, i, e) for i, e in found.items()])


def branch_wires(subject: Subject, id: str, case: int) -> BranchWires:
    """One branch, conductor by conductor."""
    assert subject.outcome.wires is not None
    return subject.outcome.wires.branches.at(id, case)


def _entry(subject: Subject, id: str, line: Line) -> Entry:
    states = [subject.state(id, c) for c in range(len(subject.cases))]
    ohms = _hot(line, line.resistance_ohm_per_km), _hot(line, _neutral_r20(line))
    figures = [_figures(subject, id, line, s, c, ohms) for c, s in enumerate(states)]
    judge = judge_loading(subject, any(s.live for s in states), line.rating_a is not None)
    return Entry(id, _data(subject, id, line, ohms), figures, judge)


def _neutral_r20(line: Line) -> float:
    found = neutral_value(line, "neutral_resistance_ohm_per_km")
    return found if isinstance(found, float) else found.value


def _hot(line: Line, r20: float) -> float:
    """Resistance of one conductor of the whole line, warm, its runs together."""
    theta = assumed.value(line, "temperature_degc")
    return r20 * (1 + ALPHA[line.conductor] * (theta - 20)) * line.length_m / 1e3 / line.side_by_side


def neutral_kind(subject: Subject, line: Line) -> str:
    """What its neutral is: carried, earthed along or none."""
    wires = node_wires(subject, line.start)
    return neutral_of(line, subject.outcome.nodes.at(line.start).nominal_v, wires.system != "three-phase")


def _data(subject: Subject, id: str, line: Line, ohms: tuple[float, float]) -> Cells:
    has, system = branch_wires(subject, id, 0).phases, node_wires(subject, line.start).system
    hot, size = (
        "*(1+{alpha}*({theta}-20))*{length}/1000/{runs}",
        {"alpha": Ref("value", "constants", line.conductor)},
    )
    found = stated(subject, id, line) | {
        "has": text(conductors(has, system)),
        "neutral": text(neutral_kind(subject, line)),
        "r": Cell(ohms[0], "{r20}" + hot, size),
    }
    found["basis"] = text("as stated")
    if isinstance(line, OverheadLine) and is_hung(line):
        found["x"] = Cell(working_in(subject.drawing, line).z.imag, "{x1}", {"x1": Ref("x1", SPACING, id)})
        found["basis"] = text(BASIS)
    x = float(found["x"].value or 0.0)
    found["xt"] = Cell(x * line.length_m / 1e3 / line.side_by_side, "{x}*{length}/1000/{runs}")
    if "N" in has:
        own = subject.value(id, "neutral_resistance_ohm_per_km")
        found["rn20"] = own if own.value is not None else Cell(_neutral_r20(line), origin=Origin.ASSUMED)
        found["rn"] = Cell(ohms[1], "{rn20}" + hot, size)
    return found


def _figures(
    subject: Subject, id: str, line: Line, state: BranchState, case: int, ohms: tuple[float, float]
) -> Cells:
    if not state.live:
        return {}
    carried = amps(branch_wires(subject, id, case))
    found = spread("i", carried) | {
        "loss": _loss(state, carried, ohms),
        "rating": Cell(line.rating_a * line.side_by_side if line.rating_a else None),
        "most": Cell(subject.drawing.limits.most_loaded_percent),
    }
    if line.rating_a is not None:
        rating = line.rating_a * line.side_by_side
        shares = {letter: ampere / rating * 100 for letter, ampere in carried.items()}
        for letter, share in shares.items():
            key = letter.lower()
            found[f"load_{key}"] = Cell(share, f"{{i_{key}}}/({{iz}}*{{runs}})*100")
        found["loading"] = most("load", shares, state.loaded_percent)
    return found | _dropped(subject, line, state, case, carried)


def _loss(state: BranchState, carried: dict[str, float], ohms: tuple[float, float]) -> Cell:
    """Σ I²·R of the phases and of the neutral, where that is what is lost."""
    terms, meant = [], 0.0
    for letter, ampere in carried.items():
        terms.append(f"{{i_{letter.lower()}}}^2*" + ("{rn}" if letter == "N" else "{r}"))
        meant += ampere**2 * ohms[letter == "N"]
    return redone(state.loss_kw * 1e3, "+".join(terms), meant)


def _dropped(subject: Subject, line: Line, state: BranchState, case: int, carried: dict[str, float]) -> Cells:
    """Volts that the worst phase loses, where both ends take them against the same."""
    fed, far = (line.start, line.end) if state.forward else (line.end, line.start)
    far_state = subject.outcome.nodes.at(far, case)
    there = {"drop": figure(subject, "busbars", far, "drop", case)}
    found = {
        "du_percent": Cell(state.drop_percent * (1 if state.forward else -1)),
        "cumulative": Cell(far_state.drop_percent, "{drop}", there),
    }
    near_end, far_end = node_wires(subject, fed, case), node_wires(subject, far, case)
    if near_end.against != far_end.against:
        return found
    first, last = volts(near_end), volts(far_end)
    lost = {p: first[p] - last[p] for p in first if p in last and p in carried}
    if not lost:
        return found
    refs, terms = {}, []
    for letter in lost:
        key = letter.lower()
        refs[f"fed_{key}"] = figure(subject, "busbars", fed, f"u_{key}", case)
        refs[f"far_{key}"] = figure(subject, "busbars", far, f"u_{key}", case)
        terms.append(f"{{fed_{key}}}-{{far_{key}}}")
    found["du"] = Cell(max(lost.values()), greatest(",".join(terms)), refs)
    base = {"base": Ref("base", "busbars", far)}
    meant = max(lost.values()) / far_end.base_v * 100
    found["du_percent"] = redone(float(found["du_percent"].value or 0.0), "{du}/{base}*100", meant, base)
    return found
