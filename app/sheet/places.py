"""Where every table and cell stands in the workbook, and formulas written with those places."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from xlsxwriter.utility import quote_sheetname, xl_rowcol_to_cell

from app.sheet.table import Cell, Ref, Row, SheetTable

BETWEEN = 1  # blank rows between tables of one tab


@dataclass(frozen=True, slots=True)
class Place:
    """One table's corner: the row of its title; its head and its first figures follow."""

    table: SheetTable
    top: int
    columns: Mapping[str, int]
    rows: Mapping[str, int]

    @property
    def head(self) -> int:
        """The row of the column heads; of a plain table, the row before its first."""
        return _head(self.table, self.top)

    @property
    def below(self) -> int:
        """The first row after the table."""
        return self.head + 1 + len(self.table.rows)


Places = dict[str, Place]


def _head(t: SheetTable, top: int) -> int:
    return top + (1 if t.note else 0) + (0 if t.plain else 1)


def lay(tables: Iterable[SheetTable]) -> Places:
    """Tables of one tab one below the other, in their order."""
    next_row: dict[str, int] = {}
    places: Places = {}
    for t in tables:
        top = next_row.get(t.tab, 0)
        head = _head(t, top)
        columns = {c.key: i for i, c in enumerate(t.columns)}
        rows = {r.key: head + 1 + i for i, r in enumerate(t.rows)}
        places[t.key] = Place(t, top, columns, rows)
        next_row[t.tab] = places[t.key].below + BETWEEN
    return places


def formula(places: Places, place: Place, row: Row, cell: Cell) -> str:
    """The cell's formula with addresses in place of names."""
    at = place.rows[row.key]
    own = {key: xl_rowcol_to_cell(at, column) for key, column in place.columns.items()}
    reached = {name: _address(places, place, at, ref) for name, ref in cell.refs.items()}
    return "=" + cell.formula.format_map(own | reached)


def _address(places: Places, home: Place, at: int, ref: Ref) -> str:
    place = places[ref.table] if ref.table else home
    column = place.columns[ref.column]
    sheet = "" if place.table.tab == home.table.tab else quote_sheetname(place.table.tab) + "!"
    if not ref.table and not ref.row:
        return xl_rowcol_to_cell(at, column)
    if ref.row:
        first = place.rows[ref.row]
        last = place.rows[ref.last] if ref.last else first
    else:
        first, last = place.head + 1, max(place.below - 1, place.head + 1)
    start = xl_rowcol_to_cell(first, column, row_abs=True, col_abs=True)
    if first == last and ref.row and not ref.last:
        return sheet + start
    return f"{sheet}{start}:{xl_rowcol_to_cell(last, column, row_abs=True, col_abs=True)}"
