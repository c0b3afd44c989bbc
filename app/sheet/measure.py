"""How much paper a table takes: widths of columns, lines of wrapped text, what fits a page."""

from collections.abc import Sequence

from app.sheet.table import SheetTable, Style

LINE = 13.5  # points a line of text takes
CHARACTER = 0.88  # of a digit, by which widths are told, the usual letter is this wide
MARGINS = {"left": 0.4, "right": 0.4, "top": 0.4, "bottom": 0.6}  # inches
PAGE_PIXELS = (11.0 - 0.8) * 96  # across a landscape page; Letter is the narrower
PAGE_LINES = (8.27 - 1.0) * 72 / (LINE + 2)  # down a landscape page; A4 is the shorter
SMALLEST = 0.6  # of full size; what would print smaller stays apart
PRESSED = 0.7  # down to which lines are pressed onto one page
TITLE, BETWEEN = 1.7, 1.0  # lines that a title takes, and the gap before it


def widths(tables: Sequence[SheetTable]) -> list[float]:
    """Columns of a worksheet, as wide as the widest of its tables needs them. A last long column runs on to
    the edge, which is as far out as the longest of these asks."""
    found = [0.0] * max(len(t.columns) for t in tables)
    for t in tables:
        for i, column in enumerate(t.columns):
            found[i] = max(found[i], 0.0 if _runs_on(t, i, len(found)) else column.width)
    for t in tables:
        last = len(t.columns) - 1
        if _runs_on(t, last, len(found)):
            found[-1] += max(0.0, sum(found[:last]) + t.columns[last].width - sum(found))
    return found


def _runs_on(t: SheetTable, column: int, count: int) -> bool:
    return t.columns[column].style is Style.LONG and column == len(t.columns) - 1 < count - 1


def room(t: SheetTable, column: int, across: Sequence[float]) -> float:
    """Characters that a line of a cell holds; the last long column runs on to the edge."""
    return (sum(across[column:]) if _runs_on(t, column, len(across)) else across[column]) - 1


def lines_of(words: str, room: float) -> int:
    """How many lines a wrapped text takes, word by word."""
    count, room = 0, room / CHARACTER
    for paragraph in words.split("\n"):
        count, used = count + 1, 0.0
        for word in paragraph.split(" "):
            length = float(len(word))
            if used and used + length > room:
                count, used = count + 1, 0.0
            count += int(length // max(room, 1)) if length > room else 0
            used += length % max(room, 1) + 1 if length > room else length + 1
    return count


def fits(tables: Sequence[SheetTable]) -> bool:
    """Whether the tables print on one page, one below the other, not too small to read; wide ones may be
    smaller than many lines may press them to."""
    across = widths(tables)
    wide = min(1.0, PAGE_PIXELS / sum(7 * width + 5 for width in across))
    down = PAGE_LINES / (sum(_height(t, across) for t in tables) - BETWEEN)
    return wide >= SMALLEST and down >= min(wide, PRESSED)


def _height(t: SheetTable, across: Sequence[float]) -> float:
    """Lines that a table takes."""
    heads = 0 if t.plain else max(lines_of(f"{c.head}\n{c.unit}", c.width) for c in t.columns)
    note = lines_of(t.note, sum(across)) if t.note else 0
    return BETWEEN + TITLE + heads + note + sum(_lines(t, r, across) for r in range(len(t.rows)))


def _lines(t: SheetTable, row: int, across: Sequence[float]) -> int:
    cells = enumerate(t.rows[row].cells)
    texts = (lines_of(c.value, room(t, i, across)) for i, c in cells if isinstance(c.value, str))
    return max(texts, default=1)
