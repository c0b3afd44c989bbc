"""A table of the sheet before it is a workbook, a text file or a page: columns, rows, cells, formulas."""

import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace
from enum import Enum
from string import Formatter

Value = float | int | str | None


class Origin(Enum):
    """Where the content of a cell comes from; a reader of the sheet can tell them apart."""

    GIVEN = "given"
    ASSUMED = "assumed"
    SOLVED = "solved"


class Style(Enum):
    """How a column writes its cells."""

    TEXT = "text"
    LONG = "long text"  # wraps
    VERDICT = "verdict"
    NUMBER = "number"
    VOLTS = "volts"  # under 1 kV in V, above in kV
    AMPS = "amps"  # one digit more under 100 A
    TINY = "tiny"  # powers of ten


@dataclass(frozen=True, slots=True)
class Ref:
    """Cells a formula reads: one cell, a run of rows, or (no row) a whole column. `table` blank: its own."""

    column: str
    table: str = ""
    row: str = ""
    last: str = ""


@dataclass(frozen=True, slots=True)
class Cell:
    """One cell: its value, and the formula that yields the same value where a reviewer would redo it.

    `formula` names columns of its own row in braces, or entries of `refs`; `digits` overrides its column.
    """

    value: Value = None
    formula: str = ""
    refs: Mapping[str, Ref] = field(default_factory=dict)
    digits: int | None = None
    origin: Origin = Origin.SOLVED


@dataclass(frozen=True, slots=True)
class Column:
    """A column: the key formulas use, its head, its unit, its rounding. `near`: key of the column that
    its figures are judged against, so that a figure short of it never prints equal to it."""

    key: str
    head: str
    unit: str = ""
    digits: int = 1
    style: Style = Style.NUMBER
    width: float = 9.0
    near: str = ""

    @property
    def title(self) -> str:
        """Head and unit in one line: `Loading [%]`."""
        return f"{self.head} [{self.unit}]" if self.unit else self.head


@dataclass(frozen=True, slots=True)
class Row:
    """One row, found by its key from formulas elsewhere."""

    key: str
    cells: tuple[Cell, ...]


@dataclass(frozen=True, slots=True)
class SheetTable:
    """One table; tables of one `tab` share a worksheet. `held`: columns that stay in sight;
    `plain`: its columns need no heads, as each row says what it is."""

    key: str
    tab: str
    title: str
    columns: tuple[Column, ...]
    rows: tuple[Row, ...]
    note: str = ""
    held: int = 2
    plain: bool = False

    def position(self, column: str) -> int:
        """Where a column stands."""
        return next(i for i, c in enumerate(self.columns) if c.key == column)

    def at(self, row: str, column: str) -> Cell:
        """One cell by the keys of its row and column."""
        return next(r for r in self.rows if r.key == row).cells[self.position(column)]


Cells = dict[str, Cell]


def table(
    key: str,
    tab: str,
    title: str,
    columns: Iterable[Column],
    rows: Mapping[str, Cells],
    *,
    note: str = "",
    held: int = 2,
    plain: bool = False,
) -> SheetTable:
    """Rows given cell by cell, put in the order of the columns; a cell left out stays blank."""
    columns = tuple(columns)
    made = tuple(Row(name, tuple(_rounded(c, cells) for c in columns)) for name, cells in rows.items())
    return SheetTable(key, tab, title, columns, made, note, held, plain)


def _rounded(column: Column, cells: Cells) -> Cell:
    """The cell with the digits it needs so as not to look like what it is judged against."""
    cell = cells.get(column.key, BLANK)
    if not isinstance(cell.value, float):
        return cell
    if not math.isfinite(cell.value):
        return replace(cell, value=None, formula="")
    if cell.digits is not None:
        return replace(cell, digits=min(cell.digits, _most_digits(column, cell.value)))
    digits = base_digits(column, cell.value)
    for key in column.near.split():
        limit = 0.0 if key == "0" else cells.get(key, BLANK).value
        if isinstance(limit, int | float):
            digits = max(
                digits,
                apart(cell.value / scale(column, cell.value), limit / scale(column, cell.value), digits),
            )
    return replace(cell, digits=digits)


def _most_digits(column: Column, value: float) -> int:
    """The decimals that there is room for beside the whole digits, at least those of the column."""
    return max(column.digits, int(column.width) - 2 - len(f"{abs(value):,.0f}"))


def base_digits(column: Column, value: float) -> int:
    """The digits a figure prints with when nothing is close."""
    if column.style is Style.VOLTS:
        return 2 if abs(value) >= KILO else 1
    if column.style is Style.AMPS:
        return 1 if abs(value) < 99.95 else 0
    return column.digits


def scale(column: Column, value: float) -> float:
    """1000 where a voltage prints in kV, else 1."""
    return 1000.0 if column.style is Style.VOLTS and abs(value) >= KILO else 1.0


KILO = 999.95
MOST_DIGITS = 9


def apart(value: float, limit: float, digits: int) -> int:
    """The fewest digits, from `digits` on, at which what is printed tells how far two figures are apart."""
    gap = value - limit
    while digits < MOST_DIGITS and gap:
        if abs(round(value, digits) - round(limit, digits) - gap) <= abs(gap) / 2:
            break
        digits += 1
    return digits


BLANK = Cell()


def text(value: str, origin: Origin = Origin.SOLVED) -> Cell:
    """A cell of plain text."""
    return Cell(value, origin=origin)


def given(value: Value, digits: int | None = None) -> Cell:
    """What the drawing states, with as many digits as it states."""
    if isinstance(value, float) and digits is None:
        digits = typed_digits(value)
    return Cell(value, digits=digits, origin=Origin.GIVEN)


def typed_digits(value: float) -> int:
    """How many decimals it takes to write a stated number in full, at most nine."""
    close = (d for d in range(MOST_DIGITS) if math.isclose(round(value, d), value, rel_tol=1e-14))
    return next(close, MOST_DIGITS)


def put_in(value: float) -> Cell:
    """What was assumed for a blank; of one that was worked out the last digits say nothing."""
    return Cell(value, digits=short_digits(value), origin=Origin.ASSUMED)


def short_digits(value: float) -> int:
    """How many decimals a number takes to four figures."""
    return typed_digits(float(f"{value:.4g}"))


def names(formula: str) -> tuple[str, ...]:
    """The names in braces of a formula."""
    return tuple(name for _, name, _, _ in Formatter().parse(formula) if name)
