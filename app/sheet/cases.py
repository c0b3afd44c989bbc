"""The loading cases on the sheet: what each states for all, and of single elements."""

from app.model.by_case import Scaled, percent_of, stated, states_demand
from app.model.case_words import amount
from app.model.drawing import Case
from app.sheet.subject import Subject
from app.sheet.table import BLANK, Cell, Cells, Column, Ref, SheetTable, Style, given, table, text
from app.study.outcome import Verdict

OWN = "case_own"
SHARES = {
    "supply_percent": "Supply voltage",
    "load_percent": "Loads",
    "generation_percent": "Generation",
    "motor_percent": "Motors",
}
OF = {"supply_percent": "% of held", "motor_percent": "% of rated"}


def case_tables(subject: Subject, basis: str) -> list[SheetTable]:
    """The case list, and after it what single cases state of single elements."""
    columns = [Column("item", "Item", style=Style.LONG, width=26)]
    columns += [Column(n, head, OF.get(n, "% of stated"), digits=1, width=14) for n, head in SHARES.items()]
    columns += [] if subject.solved else [Column("outcome", "Outcome", style=Style.LONG, width=44)]
    rows: dict[str, Cells] = {}
    for number, case in enumerate(subject.drawing.cases):
        rows[str(number)] = {"item": given(case.name)} | {n: _share(case, n) for n in SHARES}
        rows[str(number)]["outcome"] = text(_outcome(subject, number))
    found = [table("cases", basis, "Cases", columns, rows, held=0)]
    own = _own(subject)
    return found + [_own_table(own, basis)] if own else found


def _outcome(subject: Subject, case: int) -> str:
    """`solved`, or why a case is not."""
    outcome = subject.outcome
    if outcome.solved(case):
        return "solved"
    why = [
        f.sentence for f in outcome.findings if f.verdict is Verdict.BLOCKS and f.in_case(case) is f.verdict
    ]
    return " ".join(["NOT SOLVED.", *(why or [outcome.case_status[case].value])])


def _share(case: Case, name: str) -> Cell:
    value = getattr(case, name)
    return Cell(case.load_percent, "{load_percent}") if value is None else given(value)


def _own(subject: Subject) -> dict[str, Cells]:
    rows: dict[str, Cells] = {}
    for number, case in enumerate(subject.drawing.cases):
        for id, own in case.own.items():
            element = subject.drawing.elements[id]
            if isinstance(element, Scaled):
                said = own.percent is not None or states_demand(own)
                rows[_row(id, number)] = {
                    "item": text(case.name),
                    "of": text(subject.tell(id)),
                    "stands": text(amount(case, id, element) if said else ""),
                    "percent": given(percent_of(case, id, element)) if said else BLANK,
                    "stated": text(f"{stated(element)[0]:g} {stated(element)[1]}"),
                    "pf": BLANK if own.power_factor is None else given(own.power_factor),
                }
    return rows


def _own_table(rows: dict[str, Cells], basis: str) -> SheetTable:
    columns = (
        Column("item", "Case", style=Style.LONG, width=26),
        Column("of", "Element", style=Style.LONG, width=30),
        Column("stands", "Stands at", style=Style.TEXT, width=14),
        Column("percent", "Share", "%", digits=2, width=10),
        Column("stated", "of what is stated", style=Style.TEXT, width=16),
        Column("pf", "Power factor", digits=3, width=9),
    )
    note = "Blank: as the case has it for all, or the drawing."
    return table(OWN, basis, "Elements that a case states for themselves", columns, rows, note=note, held=0)


def _row(id: str, case: int) -> str:
    return f"{case}\x1f{id}"


def share_ref(subject: Subject, id: str, case: int, general: str) -> Ref:
    """Where the share of an element in a case stands: its own, or that of all; `general` is its column."""
    own = subject.drawing.cases[case].own.get(id)
    if own is None or own.percent is None and not states_demand(own):
        return Ref(general, "cases", str(case))
    return Ref("percent", OWN, _row(id, case))


def factor_ref(subject: Subject, id: str, case: int) -> Ref | None:
    """Where the power factor of a load stands that a case states for itself, else None."""
    own = subject.drawing.cases[case].own.get(id)
    return None if own is None or own.power_factor is None else Ref("pf", OWN, _row(id, case))
