"""The results on the card: a small table that repaints in place."""

from collections.abc import Sequence

from PySide6.QtCore import QEvent, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QGuiApplication, QPainter, QPaintEvent
from PySide6.QtWidgets import QMenu, QSizePolicy, QWidget

from app.canvas.palette import font
from app.canvas.theme import Theme
from app.panels.asked import Row
from app.panels.style import mixed
from app.panels.verdicts import colour_of
from app.panels.words import LEFT, RIGHT
from app.study.outcome import Verdict

LINE = 19.0
LABEL_WIDTH = 104.0


class NowTable(QWidget):
    """Labels at the left, a column a case, the change since the drag began at the right of its cell."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme = theme
        self.rows: list[Row] = []
        self.heads: tuple[str, ...] = ()
        self.shown = 0
        self.stale = False
        self.title = "Now"
        self.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Fixed)
        theme.changed.connect(self.update)

    def show_rows(self, rows: Sequence[Row], heads: Sequence[str], shown: int, stale: bool) -> None:
        """Put these results in place; nothing happens where they are the same."""
        now = (list(rows), tuple(heads), shown, stale)
        if now == (self.rows, self.heads, self.shown, self.stale):
            return
        self.rows, self.heads, self.shown, self.stale = now
        self.updateGeometry()
        self.setAccessibleName(self.title)
        self.setAccessibleDescription(self.as_text())
        self.update()

    def as_text(self) -> str:
        """The table as lines of tab-parted text, to be copied or read aloud."""
        lines = ["\t".join(("", *self.heads))] if len(self.heads) > 1 else []
        return "\n".join(lines + ["\t".join((row.label, *row.cells)) for row in self.rows])

    def columns(self) -> list[int]:
        """The cases that have room, the shown one among them."""
        room = max(1, int((self.width() - LABEL_WIDTH) // 78))
        if len(self.heads) <= room:
            return list(range(len(self.heads)))
        first = min(max(0, self.shown - room + 1), len(self.heads) - room)
        return list(range(first, first + room))

    def sizeHint(self) -> QSize:
        return QSize(240, int(LINE * (len(self.rows) + 1) + self._head_height() - LINE + 6))

    def minimumSizeHint(self) -> QSize:
        return QSize(120, self.sizeHint().height())

    def changeEvent(self, event: QEvent) -> None:
        super().changeEvent(event)
        if event.type() == QEvent.Type.FontChange:
            self.updateGeometry()

    def contextMenuEvent(self, event) -> None:
        menu = QMenu(self)
        menu.addAction("Copy figures", lambda: QGuiApplication.clipboard().setText(self.as_text()))
        menu.exec(event.globalPos())

    # -- painting -------------------------------------------------------------------------------
    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        look = self._theme.palette
        columns = self.columns()
        painter.setFont(font(9, bold=True))
        painter.setPen(look.ink)
        painter.drawText(QRectF(0, 0, LABEL_WIDTH, LINE), int(LEFT), self.title)
        self._paint_heads(painter, columns)
        for k, row in enumerate(self.rows):
            self._paint_row(painter, row, self._head_height() + 4 + LINE * k, columns)

    def _head_height(self) -> float:
        tall = len(self.heads) > 1 and any(_two_lines(head)[1] for head in self.heads)
        return LINE + (13 if tall else 0)

    def _column(self, place: int, count: int) -> QRectF:
        width = (self.width() - LABEL_WIDTH) / max(count, 1)
        return QRectF(LABEL_WIDTH + place * width, 0, width - (0 if place == count - 1 else 6), LINE)

    def _paint_heads(self, painter: QPainter, columns: list[int]) -> None:
        if self.stale:
            word = "not up to date" if self.rows else ""
            painter.setFont(font(8))
            painter.setPen(self._theme.palette.soft)
            painter.drawText(QRectF(0, 0, self.width(), LINE), int(RIGHT), word)
            return
        if len(self.heads) < 2:
            return
        for place, case in enumerate(columns):
            strong = case == self.shown
            painter.setFont(font(8, bold=strong))
            painter.setPen(self._theme.palette.ink if strong else self._theme.palette.soft)
            room = self._column(place, len(columns))
            for line, words in enumerate(_two_lines(self.heads[case])):
                _put(painter, room.translated(0, line * 13), words)

    def _paint_row(self, painter: QPainter, row: Row, top: float, columns: list[int]) -> None:
        look = self._theme.palette
        painter.setFont(font(9))
        painter.setPen(look.soft)
        _put(painter, QRectF(0, top, LABEL_WIDTH - 4, LINE), row.label, at_left=True)
        if len(row.cells) == 1:
            self._paint_cell(painter, self._column(0, 1).translated(0, top), row.cells[0], True, row)
            return
        for place, case in enumerate(columns):
            if case < len(row.cells):
                room = self._column(place, len(columns)).translated(0, top)
                self._paint_cell(painter, room, row.cells[case], case == self.shown, row)

    def _paint_cell(self, painter: QPainter, room: QRectF, text: str, strong: bool, row: Row) -> None:
        look = self._theme.palette
        right = room.right()
        if strong and row.change:
            painter.setFont(font(8, bold=True))
            painter.setPen(look.tap)
            moved = row.change if room.width() > 140 else _without_unit(row.change, text)
            width = QFontMetricsF(painter.font()).horizontalAdvance(moved)
            painter.drawText(QRectF(right - width - 1, room.top(), width + 1, LINE), int(RIGHT), moved)
            right -= width + 7
        painter.setFont(font(9, bold=strong and len(self.heads) > 0))
        painter.setPen(self._ink(row, strong))
        _put(painter, QRectF(room.left() - 40, room.top(), right - room.left() + 40, LINE), text)

    def _ink(self, row: Row, strong: bool) -> QColor:
        look = self._theme.palette
        if self.stale:
            return mixed(look.soft, look.panel, 0.7)
        if strong and row.verdict in (Verdict.FAILS, Verdict.ADVICE, Verdict.NEAR):
            return colour_of(row.verdict, look)
        return look.ink


def _without_unit(change: str, cell: str) -> str:
    """The change beside a figure in the same unit."""
    unit = cell.rpartition(" ")[2]
    return change.removesuffix(f" {unit}")


def _two_lines(text: str) -> tuple[str, str]:
    """A case's name over two lines, parted at the blank nearest its middle."""
    blanks = [k for k, letter in enumerate(text) if letter == " "]
    if len(text) < 13 or not blanks:
        return text, ""
    middle = min(blanks, key=lambda k: abs(k - len(text) / 2))
    return text[:middle], text[middle + 1 :]


def _put(painter: QPainter, room: QRectF, text: str, at_left: bool = False) -> None:
    metrics = QFontMetricsF(painter.font())
    shown = metrics.elidedText(text, Qt.TextElideMode.ElideRight, room.width() + 0.5)
    painter.drawText(room, int(LEFT if at_left else RIGHT) | Qt.TextFlag.TextSingleLine, shown)
