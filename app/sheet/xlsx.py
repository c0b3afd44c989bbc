"""The sheet as a workbook with live formulas, ready to print."""

import math
from collections import defaultdict
from collections.abc import Iterable
from pathlib import Path

from xlsxwriter import Workbook
from xlsxwriter.worksheet import Worksheet

from app.model.drawing import Drawing
from app.model.parts import is_american
from app.sheet.formats import FAILED, HEAD, INK, VERDICTS, Formats
from app.sheet.gather import gathered
from app.sheet.head import program
from app.sheet.measure import LINE, MARGINS, fits, lines_of, room
from app.sheet.measure import widths as widths_of
from app.sheet.places import Place, Places, formula, lay
from app.sheet.safe import shown
from app.sheet.table import Row, SheetTable, Style

OPTIONS = {
    "strings_to_formulas": False,
    "strings_to_urls": False,
    "strings_to_numbers": False,
    "nan_inf_to_errors": False,
    "in_memory": True,
}
A4, LETTER = 9, 1
FOOTER_LONGEST = 60


def save(tables: Iterable[SheetTable], drawing: Drawing, path: Path) -> None:
    """Write the workbook. `tables` in reading order; those of one tab share a worksheet."""
    tables = gathered(tables)
    places = lay(tables)
    book = Workbook(str(path), OPTIONS)
    formats = Formats(book)
    _properties(book, drawing)
    tabs: dict[str, list[Place]] = defaultdict(list)
    for t in tables:
        tabs[t.tab].append(places[t.key])
    for tab, stacked in tabs.items():
        _tab(book, formats, places, tab, stacked, drawing)
    book.close()


def _properties(book: Workbook, drawing: Drawing) -> None:
    project = drawing.project
    book.set_properties(
        {
            "title": shown(project.title)[:200],
            "subject": "Electricity distribution layout: results sheet",
            "author": shown(project.author),
            "keywords": shown(f"{project.number} {project.revision}".strip()),
            "status": project.status,
            "comments": f"Worked out with {program()}.",
        }
    )


def _tab(
    book: Workbook, formats: Formats, places: Places, tab: str, stacked: list[Place], drawing: Drawing
) -> None:
    sheet = book.add_worksheet(tab)
    widths = widths_of([place.table for place in stacked])
    for column, width in enumerate(widths):
        sheet.set_column(column, column, width)
    for place in stacked:
        _table(sheet, formats, places, place, widths)
    _print_setup(sheet, stacked, len(widths), drawing)


def _table(sheet: Worksheet, formats: Formats, places: Places, place: Place, widths: list[float]) -> None:
    t = place.table
    title = shown(t.title)
    sheet.set_row(place.top, 24)
    sheet.write_string(place.top, 0, title, formats.of(bold=True, font_size=15, valign="vcenter"))
    if t.note:
        urgent = t.note.startswith("NOT SOLVED")
        ink = {"font_color": FAILED, "bold": True} if urgent else {"font_color": "#5B6B79", "italic": True}
        look = formats.of(**ink, text_wrap=True, valign="top")
        sheet.merge_range(place.top + 1, 0, place.top + 1, len(widths) - 1, shown(t.note), look)
        sheet.set_row(place.top + 1, LINE * lines_of(t.note, sum(widths)) + 2)
    if not t.rows:
        return
    if not t.plain:
        _heads(sheet, formats, place, widths)
    for row in t.rows:
        _row(sheet, formats, places, place, row, widths)
    for i, column in enumerate(t.columns):
        if column.style is Style.VERDICT or t.key == "head":
            _verdicts(sheet, formats, place, i)


def _heads(sheet: Worksheet, formats: Formats, place: Place, widths: list[float]) -> None:
    lines = 1
    for i, column in enumerate(place.table.columns):
        words = shown(column.head) + (f"\n{column.unit}" if column.unit else "")
        left = column.style in (Style.TEXT, Style.LONG)
        look = formats.of(
            bold=True, text_wrap=True, bg_color=HEAD, bottom=1, bottom_color=INK, valign="bottom",
            align="left" if left else "center" if column.style is Style.VERDICT else "right",
            indent=1 if left else 0,
        )  # fmt: skip
        _write(sheet, place, place.head, i, words, look, widths)
        lines = max(lines, lines_of(words, room(place.table, i, widths) + 1))
    sheet.set_row(place.head, LINE * lines + 3)


def _row(
    sheet: Worksheet, formats: Formats, places: Places, place: Place, row: Row, widths: list[float]
) -> None:
    at, lines = place.rows[row.key], 1
    for i, (column, cell) in enumerate(zip(place.table.columns, row.cells, strict=True)):
        value = shown(cell.value) if isinstance(cell.value, str) else cell.value
        quoted = isinstance(value, str) and value[:1] in tuple("=+-@'")
        look = formats.cell(column, cell, quoted)
        if cell.formula and value is not None:
            sheet.write_formula(at, i, formula(places, place, row, cell), look, value)
        else:
            _write(sheet, place, at, i, value, look, widths)
        if isinstance(value, str):
            lines = max(lines, lines_of(value, room(place.table, i, widths)))
    sheet.set_row(at, LINE * min(lines, 30) + 2)


def _write(
    sheet: Worksheet, place: Place, row: int, column: int, value: object, look: object, widths: list[float]
) -> None:
    """A value; the last long column runs on to the edge of the tab."""
    spec = place.table.columns[column]
    last = len(widths) - 1
    if spec.style is Style.LONG and column == len(place.table.columns) - 1 and column < last:
        sheet.merge_range(row, column, row, last, "", look)
    if isinstance(value, str):
        sheet.write_string(row, column, value, look)
    elif isinstance(value, bool | int | float) and math.isfinite(value):
        sheet.write_number(row, column, value, look)
    else:
        sheet.write_blank(row, column, None, look)


def _verdicts(sheet: Worksheet, formats: Formats, place: Place, column: int) -> None:
    for word, look in VERDICTS:
        sheet.conditional_format(
            place.head + 1, column, place.below - 1, column,
            {"type": "text", "criteria": "begins with", "value": word, "format": formats.of(**look)},
        )  # fmt: skip


def _print_setup(sheet: Worksheet, stacked: list[Place], across: int, drawing: Drawing) -> None:
    first = stacked[0]
    sheet.hide_gridlines(2)
    sheet.set_landscape()
    sheet.set_paper(LETTER if is_american(drawing.frequency_hz) else A4)
    sheet.set_margins(**MARGINS)
    sheet.fit_to_pages(1, 1 if fits([place.table for place in stacked]) else 0)
    sheet.print_area(0, 0, max(stacked[-1].below - 1, 0), across - 1)
    sheet.set_footer(_footer(drawing), {"scale_with_doc": False})
    if len(stacked) == 1 and first.table.rows:
        sheet.freeze_panes(first.head + 1, first.table.held)
        sheet.repeat_rows(first.head)
    sheet.set_zoom(100)


def _footer(drawing: Drawing) -> str:
    """Title and revision, the tab, page of pages; & doubled, as a footer's own codes begin with it."""
    project = drawing.project

    def plain(text: str) -> str:
        return " ".join(shown(text).split())[:FOOTER_LONGEST].replace("&", "&&")

    named = plain(project.title) or "Untitled drawing"
    revision = f", rev {plain(project.revision)}" if project.revision else ""
    return f"&L&9{named}{revision}&C&9&A&R&9Page &P of &N"
