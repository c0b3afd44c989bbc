"""What every table looks up: names, values given or assumed, wires, limits, which cases there are."""

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, replace
from functools import cached_property

from app.model.drawing import Drawing, label
from app.model.kinds import KIND_WORDS, Branch, Element, Supply, kind_of
from app.sheet.table import (
    BLANK,
    Cell,
    Cells,
    Column,
    Origin,
    Ref,
    SheetTable,
    Style,
    given,
    names,
    table,
    text,
)
from app.study.layout import NONE, Layout, lay_out
from app.study.outcome import Assumption, BranchState, Outcome
from app.study.words import tell
from solver.status import Status

FAIL = "FAIL"
HOLDS = "holds"
CASE = (Column("number", "No.", digits=0, width=5), Column("case", "Case", style=Style.TEXT, width=20))


class Subject:
    """A drawing and its outcome, as the tables read them."""

    def __init__(self, drawing: Drawing, outcome: Outcome) -> None:
        self.drawing = drawing
        self.outcome = outcome
        self.cases = outcome.cases
        self.solved = outcome.status is Status.SOLVED

    @property
    def one_case(self) -> bool:
        """True where figures stand beside the data; with more cases they have a table of their own."""
        return len(self.cases) == 1

    @property
    def american(self) -> bool:
        """60 Hz: the 120 V base and Letter paper."""
        return self.drawing.frequency_hz >= 55

    @cached_property
    def layout(self) -> Layout:
        """The graph of the drawing."""
        return lay_out(self.drawing)

    @cached_property
    def _assumed(self) -> dict[tuple[str, str], Assumption]:
        return {(a.id, a.field): a for a in self.outcome.assumptions}

    def value(self, id: str, field: str) -> Cell:
        """What the drawing states of a field, else what was assumed for it, else blank."""
        stated = getattr(self.drawing.elements[id], field)
        if stated is not None:
            return given(float(stated) if not isinstance(stated, str | bool) else stated)
        put = self._assumed.get((id, field))
        return BLANK if put is None else replace(given(float(put.value)), origin=Origin.ASSUMED)

    def two_wire(self, node: str) -> bool:
        """True where the supply that feeds a node has two wires."""
        feeding = self.layout.supply_of[self.layout.tree[self.layout.node_row[node]]]
        supply = None if feeding == NONE else self.layout.attachments[feeding]
        return isinstance(supply, Supply) and supply.wires == "two-wire"

    @cached_property
    def wires(self) -> set[bool]:
        """Whether any node is of a two-wire part, and whether any is not."""
        return {self.two_wire(n) for n in self.drawing.nodes()}

    def root(self, node: str) -> str:
        """The factor between line volts and apparent power, as a formula writes it."""
        return "1" if self.two_wire(node) else "SQRT(3)"

    def identity(self, id: str) -> Cells:
        """Id and name."""
        return {"id": text(id), "name": text(self.drawing.elements[id].name)}

    def ends(self, id: str, branch: Branch) -> Cells:
        """The nodes at both ends of a branch."""
        return {"from": text(label(self.drawing, branch.start)), "to": text(label(self.drawing, branch.end))}

    def tell(self, id: str) -> str:
        """An element by name and id."""
        return tell(self.drawing, id)

    def state(self, id: str, case: int) -> BranchState:
        """The figures of a branch in a case."""
        return self.outcome.branches.at(id, case)

    def unfed(self) -> Cell:
        """The verdict of what carries no figures."""
        return text("dead" if self.solved else "not solved")


IDENTITY = (Column("id", "Id", style=Style.TEXT, width=7), Column("name", "Name", style=Style.TEXT, width=18))
FROM_TO = (Column("from", "From", style=Style.TEXT, width=14), Column("to", "To", style=Style.TEXT, width=14))


def limit(name: str) -> Ref:
    """The cell of the Basis that holds a limit."""
    return Ref("value", "limits", name)


def case_row(id: str, case: int) -> str:
    """The row of an element in a case where cases have rows of their own."""
    return f"{id}\x1f{case}"


@dataclass(frozen=True, slots=True)
class Entry:
    """An element's cells: what is stated once, what each case yields, and how it is judged.

    `judge` makes the judged cells from the extremes found over the cases.
    """

    id: str
    data: Cells
    figures: Sequence[Cells]
    judge: Callable[[dict[str, float]], Cells]


@dataclass(frozen=True, slots=True)
class Extreme:
    """The worst of a figure over the cases; `key` names it in judged formulas."""

    key: str
    of: str
    most: bool
    head: str


@dataclass(frozen=True, slots=True)
class Plan:
    """The columns of a table of elements, before it is known how many cases there are."""

    key: str
    tab: str
    title: str
    data: tuple[Column, ...]
    figures: tuple[Column, ...]
    extremes: tuple[Extreme, ...]
    judged: tuple[Column, ...]
    note: str = ""


def by_element(subject: Subject, plan: Plan, entries: Iterable[Entry]) -> list[SheetTable]:
    """One table with one case; with more, a table of the worst and one of every case."""
    entries = list(entries)
    return [_one_case(plan, entries)] if subject.one_case else _many_cases(subject, plan, entries)


def _one_case(plan: Plan, entries: list[Entry]) -> SheetTable:
    rows = {}
    for entry in entries:
        figures = entry.figures[0]
        worst = {e.key: v for e in plan.extremes if (v := _number(figures.get(e.of, BLANK))) is not None}
        own = {e.key: Ref(e.of) for e in plan.extremes if e.key != e.of}
        rows[entry.id] = entry.data | figures | _also(entry.judge(worst), own)
    columns = (*IDENTITY, *plan.data, *plan.figures, *plan.judged)
    return table(plan.key, plan.tab, plan.title, columns, rows, note=plan.note)


def _many_cases(subject: Subject, plan: Plan, entries: list[Entry]) -> list[SheetTable]:
    every = plan.key + "_by_case"
    shown = {c.key: c for c in plan.figures}
    extremes: list[Column] = []
    for e in plan.extremes:
        extremes.append(replace(shown[e.of], key=e.key, head=e.head))
        extremes.append(Column(e.key + "_case", "in case", style=Style.TEXT, width=16))
    rows, cases = {}, {}
    for entry in entries:
        worst = _worst(subject, plan, entry, every)
        known = {e.key: v for e in plan.extremes if (v := _number(worst.get(e.key, BLANK))) is not None}
        rows[entry.id] = entry.data | worst | entry.judge(known)
        for case, figures in enumerate(entry.figures):
            cells = {"id": entry.data["id"], "name": entry.data["name"]}
            cells |= {"number": Cell(case + 1), "case": text(subject.cases[case])} | figures
            cases[case_row(entry.id, case)] = _reaching(cells, plan, entry.id)
    columns = (*IDENTITY, *plan.data, *extremes, *plan.judged)
    case_columns = (*IDENTITY, *CASE, *plan.figures)
    return [
        table(plan.key, plan.tab, plan.title, columns, rows, note=plan.note),
        table(every, plan.tab + ", cases", plan.title + ": every case", case_columns, cases, held=4),
    ]


def _worst(subject: Subject, plan: Plan, entry: Entry, every: str) -> Cells:
    """The extremes of one element as formulas over its rows of the table of cases."""
    first, last = case_row(entry.id, 0), case_row(entry.id, len(entry.figures) - 1)
    found: Cells = {}
    for e in plan.extremes:
        values = {c: v for c, f in enumerate(entry.figures) if (v := _number(f.get(e.of, BLANK))) is not None}
        if not values:
            continue
        case = (max if e.most else min)(values, key=values.__getitem__)
        span = {"span": Ref(e.of, every, first, last)}
        word = "MAX" if e.most else "MIN"
        found[e.key] = Cell(values[case], word + "({span})", span)
        spans = span | {"cases": Ref("case", every, first, last)}
        pick = "INDEX({cases},MATCH({" + e.key + "},{span},0))"
        found[e.key + "_case"] = Cell(subject.cases[case], pick, spans)
    return found


def _number(cell: Cell) -> float | None:
    return float(cell.value) if isinstance(cell.value, int | float) and cell.value == cell.value else None


def _also(cells: Cells, refs: dict[str, Ref]) -> Cells:
    """Cells whose formulas may also name `refs`."""
    return {key: replace(c, refs={**refs, **c.refs}) if c.formula and refs else c for key, c in cells.items()}


def _reaching(cells: Cells, plan: Plan, id: str) -> Cells:
    """Figures of a case whose formulas name data that stands in the table of elements."""
    stated = {c.key for c in plan.data}
    return {
        key: replace(c, refs={**{n: Ref(n, plan.key, id) for n in names(c.formula) if n in stated}, **c.refs})
        if c.formula
        else c
        for key, c in cells.items()
    }


def span_of_case(subject: Subject, key: str, column: str, case: int) -> tuple[str, dict[str, Ref]]:
    """The sum of a column of a table of elements in one case, as a formula and what it reads."""
    if subject.one_case:
        return "SUM({span})", {"span": Ref(column, key)}
    every = key + "_by_case"
    return f"SUMIF({{numbers}},{case + 1},{{span}})", {
        "span": Ref(column, every),
        "numbers": Ref("number", every),
    }


def kind_name(element: Element) -> str:
    """The kind in words."""
    return KIND_WORDS[kind_of(element)]
