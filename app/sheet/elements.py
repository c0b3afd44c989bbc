"""Tables of elements: what is stated, what was found, the worst of all cases, and how it is judged.

With one case the figures stand beside the data, or below it where both together would not fit a page.
With more, every case has a row of its own in the table of results, and the worst is picked from there.
"""

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, replace

from app.sheet.subject import CASE, IDENTITY, Subject
from app.sheet.table import BLANK, Cell, Cells, Column, Ref, SheetTable, Style, names, table, text

WIDE = frozenset({"cables", "transformers"})  # their data fill a page


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


def results_key(subject: Subject, key: str) -> str:
    """The table in which the figures of a kind stand."""
    return key if subject.one_case and key not in WIDE else key + "_results"


def figure(subject: Subject, key: str, id: str, column: str, case: int) -> Ref:
    """Where a figure of an element in a case stands."""
    return Ref(column, results_key(subject, key), _case_row(subject, id, case))


def sum_of_case(subject: Subject, key: str, column: str, case: int) -> tuple[str, dict[str, Ref]]:
    """The sum of a column of figures in one case, as a formula and what it reads."""
    results = results_key(subject, key)
    if subject.one_case:
        return "SUM({span})", {"span": Ref(column, results)}
    refs = {"span": Ref(column, results), "numbers": Ref("number", results)}
    return f"SUMIF({{numbers}},{case + 1},{{span}})", refs


def _case_row(subject: Subject, id: str, case: int) -> str:
    return id if subject.one_case else f"{id}\x1f{case}"


def by_element(subject: Subject, plan: Plan, entries: Iterable[Entry]) -> list[SheetTable]:
    """The tables of one kind of element, each column in the one that is its place."""
    entries = list(entries)
    if not entries:
        return []
    wide, one, stated = plan.key in WIDE, subject.one_case, plan.data
    found = (*plan.figures, *plan.judged) if one else plan.figures
    worst = () if one else (*_worst_columns(plan), *plan.judged)
    if one and not wide:
        return [_table(subject, plan, plan.key, "", (*stated, *found), entries)]
    results = results_key(subject, plan.key)
    if not wide:
        return [
            _table(subject, plan, plan.key, "", (*stated, *worst), entries),
            _table(subject, plan, results, ": every case", found, entries),
        ]
    tables = [_table(subject, plan, results, ": results" if one else ": every case", found, entries)]
    if not one:
        tables.insert(0, _table(subject, plan, plan.key + "_worst", ": worst of all cases", worst, entries))
    return [*tables, _table(subject, plan, plan.key, ": as stated", stated, entries)]


def _worst_columns(plan: Plan) -> tuple[Column, ...]:
    shown = {c.key: c for c in plan.figures}
    columns: list[Column] = []
    for e in plan.extremes:
        columns.append(replace(shown[e.of], key=e.key, head=e.head))
        columns.append(Column(e.key + "_case", "in case", style=Style.TEXT, width=14))
    return tuple(columns)


def _table(
    subject: Subject, plan: Plan, key: str, title: str, columns: tuple[Column, ...], entries: list[Entry]
) -> SheetTable:
    """One of the tables of a plan: its rows, with formulas that reach what stands in the others."""
    by_case = not subject.one_case and key == results_key(subject, plan.key)
    rows: dict[str, Cells] = {}
    for entry in entries:
        for case in range(len(entry.figures) if by_case else 1):
            cells = _cells(subject, plan, entry, case)
            if by_case:
                cells |= {"number": Cell(case + 1), "case": text(subject.case_name(case))}
            row = _case_row(subject, entry.id, case) if by_case else entry.id
            rows[row] = _reaching(subject, plan, entry.id, key, columns, cells)
    tab = plan.tab + ", cases" if by_case else plan.tab
    if plan.key in WIDE and key == plan.key:
        tab = plan.tab.removesuffix("s") + " data"
    noted = plan.note if key == (results_key(subject, plan.key) if plan.key in WIDE else plan.key) else ""
    judged = any(column in plan.judged or column in plan.figures for column in columns)
    note = subject.short(noted) if judged else noted
    lead = (*IDENTITY, *CASE) if by_case else IDENTITY
    return table(key, tab, plan.title + title, (*lead, *columns), rows, note=note, held=len(lead))


def _cells(subject: Subject, plan: Plan, entry: Entry, case: int) -> Cells:
    """Every cell of an element, figures of one case among them; a table takes those of its columns."""
    worst = _worst(subject, plan, entry)
    known = {e.key: v for e in plan.extremes if (v := _number(worst.get(e.key, BLANK))) is not None}
    judged = entry.judge(known)
    return entry.data | judged | worst | dict(entry.figures[case])


def _worst(subject: Subject, plan: Plan, entry: Entry) -> Cells:
    """The extremes of one element: with one case the figures themselves, else formulas over its rows."""
    results = results_key(subject, plan.key)
    first = _case_row(subject, entry.id, 0)
    last = _case_row(subject, entry.id, len(entry.figures) - 1)
    found: Cells = {}
    for e in plan.extremes:
        values = {c: v for c, f in enumerate(entry.figures) if (v := _number(f.get(e.of, BLANK))) is not None}
        if not values:
            continue
        case = (max if e.most else min)(values, key=values.__getitem__)
        span = {"span": Ref(e.of, results, first, last)}
        found[e.key] = Cell(values[case], ("MAX" if e.most else "MIN") + "({span})", span)
        spans = span | {"cases": Ref("case", results, first, last)}
        pick = "INDEX({cases},MATCH({" + e.key + "},{span},0))"
        found[e.key + "_case"] = Cell(subject.cases[case], pick, spans)
    return found


def _number(cell: Cell) -> float | None:
    return float(cell.value) if isinstance(cell.value, int | float) and cell.value == cell.value else None


def _reaching(
    subject: Subject, plan: Plan, id: str, key: str, columns: Sequence[Column], cells: Cells
) -> Cells:
    """The cells, with references for every name of a formula that is no column of this table."""
    own = {c.key for c in columns}
    elsewhere = _homes(subject, plan, id)
    made: Cells = {}
    for name, cell in cells.items():
        missing = {n: elsewhere[n] for n in names(cell.formula) if n not in own and n in elsewhere}
        made[name] = replace(cell, refs={**missing, **cell.refs}) if missing else cell
    return made


def _homes(subject: Subject, plan: Plan, id: str) -> Mapping[str, Ref]:
    """Where the columns of a plan stand when they stand in another table: the data, and the extremes."""
    homes = {c.key: Ref(c.key, plan.key, id) for c in plan.data}
    for e in plan.extremes:
        if subject.one_case:
            own = plan.key not in WIDE
            homes[e.key] = Ref(e.of) if own else Ref(e.of, results_key(subject, plan.key), id)
        elif plan.key in WIDE:
            homes[e.key] = Ref(e.key, plan.key + "_worst", id)
    return homes
