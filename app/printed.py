"""The results as text: aligned tables with units in their heads, findings, assumptions, cautions."""

from collections.abc import Callable, Iterable, Sequence
from typing import Any

from app.model.case_words import settings
from app.model.drawing import Drawing
from app.model.fields import fields_of
from app.model.figures import plain, typed
from app.model.kinds import KIND_WORDS, Branch, Regulator, Transformer, kind_of
from app.printed_faults import fault_lines, fault_notes
from app.printed_wires import wire_tables
from app.sheet.table import short_digits
from app.study.cautions import CAUTIONS
from app.study.outcome import Assumption, Finding, Outcome, Table, Verdict
from app.study.words import tell

Column = tuple[str, Callable[[Any], str]]
SHOWN_ASSUMPTIONS = 40


def figure(name: str, digits: int) -> Callable[[Any], str]:
    """How one column is written."""
    return lambda state: plain(float(getattr(state, name)), digits)


def level(state: Any) -> str:
    """Volts to 0.1 V where nominal is under 1 kV, else whole volts."""
    return plain(state.voltage_v, 1 if state.nominal_v < 1000 else 0)


NODE_COLUMNS: tuple[Column, ...] = (
    ("nominal V", figure("nominal_v", 0)),
    ("V", level),
    ("% nom.", figure("percent", 2)),
    ("angle °", figure("angle_deg", 2)),
    ("drop %", figure("drop_percent", 2)),
    ("route m", figure("route_m", 0)),
)
WIRED_NODE_COLUMNS: tuple[Column, ...] = (  # where phases are solved one by one
    ("nominal V", figure("nominal_v", 0)),
    ("% lowest", figure("percent", 2)),
    ("% highest", figure("high_percent", 2)),
    ("drop %", figure("drop_percent", 2)),
    ("route m", figure("route_m", 0)),
)
BRANCH_COLUMNS: tuple[Column, ...] = (
    ("A", figure("current_a", 1)),
    ("kW in", figure("start_kw", 2)),
    ("kvar in", figure("start_kvar", 2)),
    ("kW out", figure("end_kw", 2)),
    ("kvar out", figure("end_kvar", 2)),
    ("loss kW", figure("loss_kw", 3)),
    ("loading %", figure("loaded_percent", 1)),
    ("drop %", figure("drop_percent", 2)),
)
ATTACHMENT_COLUMNS: tuple[Column, ...] = (
    ("V", figure("voltage_v", 1)),
    ("kW", figure("kw", 2)),
    ("kvar", figure("kvar", 2)),
    ("A", figure("current_a", 1)),
)


START_COLUMNS: tuple[Column, ...] = (
    ("A", figure("current_a", 1)),
    ("× rated", figure("times_rated", 2)),
    ("V before", figure("motor_before_v", 1)),
    ("V", figure("motor_v", 1)),
    ("% rated", figure("motor_percent", 1)),
    ("board step %", figure("board_step_percent", 2)),
    ("supply step %", figure("supply_step_percent", 2)),
    ("torque %", figure("torque_percent", 0)),
)


def printed(drawing: Drawing, outcome: Outcome) -> str:
    """The whole text."""
    parts = [_head(drawing, outcome)]
    if outcome.solved_cases:
        for case, name in enumerate(outcome.cases):
            told = _case if outcome.solved(case) else _no_figures
            parts += told(drawing, outcome, case, name)
        parts += _faults(drawing, outcome)
    parts += [listed_findings(outcome.findings), _assumptions(drawing, outcome)]
    parts.append("Cautions\n" + "\n".join(f"  {c}" for c in CAUTIONS))
    return "\n\n".join(part for part in parts if part) + "\n"


def _head(drawing: Drawing, outcome: Outcome) -> str:
    project = drawing.project
    title = project.title or "Untitled drawing"
    about = ", ".join(w for w in (project.place, project.number, _revision(project.revision)) if w)
    return "\n".join(line for line in (title, about, outcome.sentence) if line)


def _revision(revision: str) -> str:
    return f"revision {revision}" if revision else ""


def _case(drawing: Drawing, outcome: Outcome, case: int, name: str) -> list[str]:
    nodes = NODE_COLUMNS if outcome.wires is None else WIRED_NODE_COLUMNS
    wires = wire_tables(drawing, outcome, case)
    hung = "Loads and infeeds"
    if outcome.wires is not None:
        hung += "; V of the lowest lead, of several phases to the neutral as between lines"
    return [
        f"Case: {name}\n  {settings(drawing.cases[case], drawing)}",
        _table(drawing, "Nodes", outcome.nodes, nodes, case),
        _table(drawing, "Branches", outcome.branches, BRANCH_COLUMNS, case),
        _table(drawing, hung, outcome.attachments, ATTACHMENT_COLUMNS, case),
        *(f"{title}\n{aligned(lines, figures)}" for title, lines, figures in wires),
        _starts(drawing, outcome, case),
        _balance(outcome, case),
    ]


def _no_figures(drawing: Drawing, outcome: Outcome, case: int, name: str) -> list[str]:
    """A case without an operating point: why, in place of its tables."""
    blocks = (f for f in outcome.findings if f.verdict is Verdict.BLOCKS and f.in_case(case) is f.verdict)
    why = [f"  {f.sentence}" for f in blocks]
    return ["\n".join([f"Case: {name}: NOT SOLVED", f"  {settings(drawing.cases[case], drawing)}", *why])]


def _table(drawing: Drawing, title: str, table: Table[Any], columns: Sequence[Column], case: int) -> str:
    if not table.ids:
        return ""
    lines = [["id", "name", "kind", "from", "to", *(head for head, _ in columns)]]
    for id in table.ids:
        element, state = drawing.elements[id], table.at(id, case)
        ends = (element.start, element.end) if isinstance(element, Branch) else ("", "")
        kind = KIND_WORDS[kind_of(element)]
        if isinstance(element, Transformer | Regulator) and state.live:
            kind += f" tap {plain(state.notch, 0, sign=True)}"
        figures = (
            [write(state) for _, write in columns] if state.live else ["dead"] + [""] * (len(columns) - 1)
        )
        lines.append([id, element.name, kind, *ends, *figures])
    return f"{title}\n{aligned(_without_empty(lines), len(columns))}"


def _without_empty(lines: list[list[str]]) -> list[list[str]]:
    kept = [i for i in range(len(lines[0])) if any(line[i] for line in lines[1:])]
    return [[line[i] for i in kept] for line in lines]


def aligned(lines: Sequence[Sequence[str]], figures: int) -> str:
    """Columns side by side; the last `figures` of them to the right."""
    widths = [max(len(line[i]) for line in lines) for i in range(len(lines[0]))]
    first = len(widths) - figures
    rows = (
        "  ".join(
            t.rjust(w) if i >= first else t.ljust(w)
            for i, (t, w) in enumerate(zip(line, widths, strict=True))
        )
        for line in lines
    )
    return "\n".join(f"  {row}".rstrip() for row in rows)


def _faults(drawing: Drawing, outcome: Outcome) -> list[str]:
    """Prospective fault currents, which know no case."""
    if outcome.faults is None:
        return []
    lines, figures = fault_lines(drawing, outcome)
    return [f"Fault currents\n{aligned(_without_empty(lines), figures)}", *fault_notes(drawing, outcome)]


def _starts(drawing: Drawing, outcome: Outcome, case: int) -> str:
    """Motor starts, those of the case that there are."""
    table = outcome.starts
    states = [] if table is None else [(id, table.at(id, case)) for id in table.ids]
    lines = [
        [id, drawing.elements[id].name, *(write(state) for _, write in START_COLUMNS)]
        for id, state in states
        if state.motor_v == state.motor_v
    ]
    if not lines:
        return ""
    heads = ["id", "name", *(head for head, _ in START_COLUMNS)]
    return f"Motor starts, one at a time\n{aligned([heads, *lines], len(START_COLUMNS))}"


def _balance(outcome: Outcome, case: int) -> str:
    b = outcome.balance
    rows = (
        ("supply", b.supply_kw), ("generation", b.generation_kw), ("loads", b.load_kw),
        ("loss", b.loss_kw), ("  lines", b.line_kw), ("  windings", b.copper_kw), ("  iron", b.iron_kw),
    )  # fmt: skip
    lines = [["", "kW"], *([word, plain(float(column[case]), 3)] for word, column in rows)]
    closure = f"  closure {b.closure[case]:.1e} of the supply"
    return f"Balance\n{aligned(lines, 1)}\n{closure}"


def listed_findings(findings: Sequence[Finding]) -> str:
    """Findings under their head, one a line."""
    if not findings:
        return ""
    lines = (f"  {f.verdict.value.upper()}: {f.sentence}{_margin(f)}" for f in findings)
    return "Findings\n" + "\n".join(lines)


def _margin(finding: Finding) -> str:
    if finding.margin is None:
        return ""
    digits = next((d for d in range(1, 7) if abs(finding.margin) >= 10**-d), 6)
    return f" Margin {plain(finding.margin, max(digits, 1), finding.unit, sign=True)}."


def _assumptions(drawing: Drawing, outcome: Outcome) -> str:
    told = [
        f"  {tell(drawing, a.id)}: {_field(drawing, a)} {_short(a)} ({a.basis})"
        for a in outcome.assumptions[:SHOWN_ASSUMPTIONS]
    ]
    return "Assumed, to be confirmed\n" + "\n".join([*told, *_more(outcome.assumptions)]) if told else ""


def _short(put: Assumption) -> str:
    """What was put in, to four figures where it was worked out, with its unit."""
    return f"{typed(round(put.value, short_digits(put.value)))} {put.unit}".rstrip()


def _field(drawing: Drawing, assumption: Assumption) -> str:
    known = fields_of(type(drawing.elements[assumption.id])).get(assumption.field)
    if known is None:
        return assumption.field
    return known.label if not known.label[1:2].islower() else known.label[0].lower() + known.label[1:]


def _more(assumptions: Sequence[Assumption]) -> Iterable[str]:
    over = len(assumptions) - SHOWN_ASSUMPTIONS
    return [f"  and {over} more, see --json"] if over > 0 else []
