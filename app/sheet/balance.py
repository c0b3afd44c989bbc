"""Where the power goes: supply = loads + losses for every case, and what each branch loses."""

import numpy as np

from app.model.kinds import Generator, Regulator, Supply, Switch
from app.sheet.attachments import LOADS, SOURCES
from app.sheet.elements import figure, sum_of_case
from app.sheet.lines import KEY as LINES
from app.sheet.motors import MOTORS
from app.sheet.subject import Subject, kind_name
from app.sheet.table import Cell, Cells, Column, Ref, SheetTable, Style, table, text
from app.sheet.transformers import KEY as TRANSFORMERS

TAB = "Balance"
COLUMNS = (
    Column("case", "Case", style=Style.TEXT, width=26),
    Column("supply", "Supplies", "kW", digits=2),
    Column("generation", "Generators", "kW", digits=2, width=10),
    Column("load", "Loads", "kW", digits=2),
    Column("line", "Loss in lines", "kW", digits=2),
    Column("copper", "Copper loss", "kW", digits=2),
    Column("iron", "Iron loss", "kW", digits=2),
    Column("loss", "Loss, all", "kW", digits=2),
    Column("share", "Loss", "% of fed in", digits=2),
    Column("supply_kvar", "Supplies", "kvar", digits=2),
    Column("load_kvar", "Loads", "kvar", digits=2),
    Column("left", "Left over", "kW", style=Style.TINY, width=10),
    Column("closure", "Closure", "of supply", style=Style.TINY, width=10),
)


def balance_tables(subject: Subject) -> list[SheetTable]:
    """The power balance, one row a case, and the losses branch by branch."""
    note = (
        "Supplies + generators = loads + losses. Left over is what the sums of this workbook leave; closure "
        "is the solver's own, of complex power."
    )
    rows: dict[str, Cells] = {str(c): _case(subject, c) for c in range(len(subject.cases))}
    found = [table("balance", TAB, "Power balance", COLUMNS, rows, note=note, held=1)]
    return [*found, _split(subject)] if subject.figures else found


def _case(subject: Subject, case: int) -> Cells:
    if not subject.outcome.solved(case):
        return {"case": text(subject.case_name(case))}
    b = subject.outcome.balance
    fed, lost = float(b.supply_kw[case] + b.generation_kw[case]), float(b.loss_kw[case])
    left = fed - float(b.load_kw[case]) - lost
    found = {
        "case": text(subject.cases[case]),
        "supply": _fed(subject, Supply, float(b.supply_kw[case]), case),
        "generation": _fed(subject, Generator, float(b.generation_kw[case]), case),
        "load": _drawn(subject, "kw", float(b.load_kw[case]), case),
        "line": _sum(subject, LINES, "loss", float(b.line_kw[case]), case, "/1000"),
        "copper": _sum(subject, TRANSFORMERS, "copper", float(b.copper_kw[case]), case, "/1000"),
        "iron": _sum(subject, TRANSFORMERS, "iron", float(b.iron_kw[case]), case, "/1000"),
        "loss": Cell(lost, "{line}+{copper}+{iron}"),
        "supply_kvar": Cell(float(b.supply_kvar[case])),
        "load_kvar": _drawn(subject, "kvar", float(b.load_kvar[case]), case),
        "left": Cell(left, "{supply}+{generation}-{load}-{loss}"),
        "closure": Cell(float(b.closure[case])),
    }
    if fed:
        found["share"] = Cell(lost / fed * 100, "{loss}/({supply}+{generation})*100")
    return found


def _drawn(subject: Subject, column: str, value: float, case: int) -> Cell:
    """What loads and motors draw together."""
    found = {kind_name(e) for e in subject.drawing.elements.values()}
    keys = [key for key, kind in ((LOADS, "load"), (MOTORS, "motor")) if kind in found]
    sums = [sum_of_case(subject, key, column, case) for key in keys]
    terms, refs = [], {}
    for number, (formula, read) in enumerate(sums):
        for name, ref in read.items():
            formula = formula.replace(f"{{{name}}}", f"{{{name}{number}}}")
            refs[f"{name}{number}"] = ref
        terms.append(formula)
    return Cell(value, "+".join(terms), refs)


def _sum(subject: Subject, key: str, column: str, value: float, case: int, scale: str = "") -> Cell:
    """The sum of a column elsewhere in the workbook, which must be the study's own figure."""
    kinds = {LINES: ("cable", "overhead line"), TRANSFORMERS: ("transformer",)}
    if not any(kind_name(e) in kinds[key] for e in subject.drawing.elements.values()):
        return Cell(value)
    formula, refs = sum_of_case(subject, key, column, case)
    return Cell(value, formula + scale, refs)


def _fed(subject: Subject, kind: type[Supply] | type[Generator], value: float, case: int) -> Cell:
    """The power fed in by one kind, cell by cell as the kinds share a table."""
    ids = [i for i, e in subject.drawing.elements.items() if isinstance(e, kind)]
    if not ids or len(ids) > MOST_TERMS:
        return Cell(value)
    refs = {f"p{n}": figure(subject, SOURCES, i, "kw", case) for n, i in enumerate(ids)}
    return Cell(value, "SUM(" + ",".join("{" + name + "}" for name in refs) + ")", refs)


MOST_TERMS = 200  # a spreadsheet program takes 255 in one SUM


def _split(subject: Subject) -> SheetTable:
    """Loss of every branch that loses anything, the largest first."""
    columns = [
        Column("branch", "Branch", style=Style.TEXT, width=26),
        Column("kind", "Kind", style=Style.TEXT, width=12),
    ]
    table_ = subject.outcome.branches
    loss = table_.column("loss_kw")
    order = sorted(
        (i for i in table_.ids if not isinstance(subject.drawing.elements[i], Switch | Regulator)),
        key=lambda i: -max(np.nan_to_num(loss[table_.rows[i]]).ravel(), default=0.0),
    )
    cases = range(len(subject.cases))
    for case in cases:
        columns.append(Column(f"kw{case}", subject.case_name(case), "kW", digits=2))
        columns.append(Column(f"share{case}", "of all", "%", digits=1))
    rows = {i: _lost(subject, i) for i in order}
    return table("losses", "Losses", "Losses, branch by branch", columns, rows, held=1)


def _lost(subject: Subject, id: str) -> Cells:
    element = subject.drawing.elements[id]
    found = {"branch": text(subject.tell(id)), "kind": text(kind_name(element))}
    key = TRANSFORMERS if kind_name(element) == "transformer" else LINES
    for case in range(len(subject.cases)):
        state = subject.state(id, case)
        if not state.live:
            continue
        own = figure(subject, key, id, "loss", case)
        found[f"kw{case}"] = Cell(state.loss_kw, "{own}/1000", {"own": own})
        total = float(subject.outcome.balance.loss_kw[case])
        if total:
            every = {"total": Ref("loss", "balance", str(case))}
            found[f"share{case}"] = Cell(state.loss_kw / total * 100, f"{{kw{case}}}/{{total}}*100", every)
    return found
