"""How cells look: number formats by rounding, ink by origin, verdicts by colour and by their word."""

from typing import Any

from xlsxwriter import Workbook
from xlsxwriter.format import Format

from app.sheet.table import KILO, Cell, Column, Origin, Style

INK, FLOW, GOOD, NEAR, FAILED = "#22303C", "#2B5C8A", "#2A7F78", "#8A5A06", "#A32A54"
PAPER, RULE, HEAD = "#FAF8F3", "#D8D3C7", "#EDE9DF"
GIVEN_FILL, ASSUMED_FILL = "#EAF1F8", "#FBF0DC"
FONT = {"font_name": "Calibri", "font_size": 10, "font_color": INK}
VERDICTS = (
    ("FAIL", {"bold": True, "font_color": FAILED, "bg_color": "#F6DEE7"}),
    ("not solved", {"bold": True, "font_color": FAILED, "bg_color": "#F6DEE7"}),
    ("near", {"font_color": NEAR, "bg_color": ASSUMED_FILL}),
    ("advice", {"font_color": NEAR, "bg_color": ASSUMED_FILL}),
    ("dead", {"italic": True, "font_color": "#5B6B79", "bg_color": HEAD}),
    ("NOT SOLVED", {"bold": True, "font_color": FAILED, "bg_color": "#F6DEE7"}),
    ("Solved. Every check holds, ", {"bold": True, "font_color": NEAR, "bg_color": ASSUMED_FILL}),
    ("Solved. Every check holds", {"bold": True, "font_color": GOOD, "bg_color": "#DDF0EE"}),
    ("Solved. Nothing is judged", {"italic": True, "font_color": "#5B6B79", "bg_color": HEAD}),
    ("Solved.", {"bold": True, "font_color": FAILED, "bg_color": "#F6DEE7"}),
    ("holds where", {"font_color": NEAR, "bg_color": ASSUMED_FILL}),
    ("holds", {"font_color": GOOD, "bg_color": "#DDF0EE"}),
)


class Formats:
    """The workbook's formats, each made once."""

    def __init__(self, book: Workbook) -> None:
        self._book = book
        self._made: dict[tuple[tuple[str, Any], ...], Format] = {}

    def of(self, **wanted: Any) -> Format:
        """The format with these properties over the plain one."""
        properties = FONT | {"valign": "vcenter"} | wanted
        key = tuple(sorted(properties.items()))
        if key not in self._made:
            self._made[key] = self._book.add_format(properties)
        return self._made[key]

    def cell(self, column: Column, cell: Cell, quoted: bool = False) -> Format:
        """The format of one cell."""
        look: dict[str, Any] = {"bottom": 1, "bottom_color": RULE}
        if cell.origin is Origin.GIVEN and cell.value not in (None, ""):
            look |= {"font_color": FLOW, "bg_color": GIVEN_FILL}
        elif cell.origin is Origin.ASSUMED:
            look |= {"font_color": NEAR, "bg_color": ASSUMED_FILL, "italic": True}
        if isinstance(cell.value, str):
            look |= {"num_format": "@"} if not cell.formula else {}
            look |= {"quote_prefix": True} if quoted else {}
            look |= {"text_wrap": True, "align": "left", "indent": 1}
        elif cell.value is not None:
            look |= {"num_format": number_format(column, cell), "align": "right"}
        if column.style is Style.VERDICT:
            look["align"] = "center"
        return self.of(**look)


def number_format(column: Column, cell: Cell) -> str:
    """The spreadsheet's format code of a figure: its rounding, and kV from 1 kV on."""
    if column.style is Style.TINY:
        return "0.0E+00"
    digits = column.digits if cell.digits is None else cell.digits
    code = "#,##0" + ("." + "0" * digits if digits else "")
    if column.style is Style.VOLTS and isinstance(cell.value, int | float) and abs(cell.value) >= KILO:
        return code + ',\\ "kV"'
    return code
