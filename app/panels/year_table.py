"""The tables of a year: a row an element, the worst in sight, a click or a key selects the element."""

from collections.abc import Callable, Sequence
from typing import Any

from msgspec import Struct
from PySide6.QtCore import QAbstractTableModel, QModelIndex, QPersistentModelIndex, Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QAbstractItemView, QApplication, QHeaderView, QTableView, QWidget

from app.canvas.palette import font
from app.canvas.theme import Theme
from app.model.drawing import Drawing, label
from app.model.figures import amps, percent, plain, volts
from app.model.kinds import KIND_WORDS, kind_of
from app.panels.style import mixed
from app.panels.verdicts import colour_of
from app.study.outcome import Table, Verdict
from app.study.year_outcome import YearOutcome
from app.study.year_points import date, when

LINE, LEAST, NAME_LEAST, NAME_MOST = 23, 88, 110, 220
Place = QModelIndex | QPersistentModelIndex


class Column(Struct, frozen=True):
    """One column: head, how a figure is written, by what it sorts, and whether it is beyond a limit."""

    head: str
    write: Callable[[Any, float], str]
    value: Callable[[Any], float]
    beyond: Callable[[Any], bool] = lambda state: False
    tip: str = ""
    more: Callable[[Any, float], str] | None = None  # what a tooltip adds
    spare: bool = False  # left out where it is nought throughout


def _number(
    head: str, name: str, write: Callable[[float], str], tip: str = "", beyond: str = "", spare: bool = False
) -> Column:
    return Column(
        head,
        lambda state, _year_h: write(getattr(state, name)),
        lambda state: float(getattr(state, name)),
        (lambda state: getattr(state, beyond) > 0) if beyond else (lambda state: False),
        tip,
        spare=spare,
    )


def _moment(name: str) -> Column:
    """The day and time in the cell, the hour of the year with it in the tooltip."""
    return Column(
        "When",
        lambda state, year_h: _date(getattr(state, name), year_h),
        lambda state: float(getattr(state, name)),
        more=lambda state, year_h: when(getattr(state, name), year_h),
    )


def _date(begin_h: float, year_h: float) -> str:
    return "–" if begin_h != begin_h else date(begin_h, year_h)


def _kwh(value: float) -> str:
    return plain(value, 0 if not abs(value) < 9.95 else 1) if value else "–"


def _hours(value: float) -> str:
    return plain(value, 0 if not abs(value) < 9.95 else 1) if value else "–"


BRANCHES = (
    _number("Through\nkWh", "through_kwh", _kwh, "Energy that entered it the way it is fed"),
    _number("Back\nkWh", "back_kwh", _kwh, "Energy that entered it the other way", spare=True),
    _number("Line loss\nkWh", "line_kwh", _kwh),
    _number("Copper\nkWh", "copper_kwh", _kwh, "Load loss of a transformer"),
    _number("Iron\nkWh", "iron_kwh", _kwh, "No-load loss of a transformer, all year round"),
    _number("Most", "most_a", amps),
    _number("Loading\nmost", "most_loaded_percent", percent, beyond="hours_over"),
    _moment("most_a_at_h"),
    _number("Over\nh", "hours_over", _hours, "Hours loaded beyond what is allowed", "hours_over"),
)
NODES = (
    _number("Lowest", "lowest_v", volts),
    _number("of nominal", "lowest_percent", lambda v: percent(v, 1), beyond="hours_below"),
    _moment("lowest_at_h"),
    _number("Below\nh", "hours_below", _hours, "Hours below the lowest voltage allowed", "hours_below"),
    _number("Highest", "highest_v", volts),
    _number("of nominal", "highest_percent", lambda v: percent(v, 1), beyond="hours_above"),
    _moment("highest_at_h"),
    _number("Above\nh", "hours_above", _hours, "Hours above the highest voltage allowed", "hours_above"),
)
ATTACHMENTS = (
    _number("Energy\nkWh", "kwh", _kwh, "Drawn by loads and motors, fed in by all others"),
    _number(
        "Taken back\nkWh", "back_kwh", _kwh, "By a supply, counted in its energy with a minus", spare=True
    ),
    _number("Mean\nkW", "mean_kw", lambda v: plain(v, 2)),
    _number("Most\nkW", "most_kw", lambda v: plain(v, 2)),
    _moment("most_at_h"),
    _number("Load\nfactor", "load_factor", lambda v: plain(v, 2), "Mean over most"),
)


class YearModel(QAbstractTableModel):
    """The rows of one table; a column can be sorted by."""

    def __init__(self, columns: Sequence[Column], theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.columns, self._theme = columns, theme
        self.rows: list[tuple[str, str, str, Any]] = []  # id, name, kind, state
        self.open: set[str] = set()  # switches
        self.year_h, self.faded = 8760.0, False

    def show_table(self, drawing: Drawing, table: Table[Any], year_h: float) -> None:
        """The rows of a year; elements that are no more in the drawing keep their id."""
        self.beginResetModel()
        self.year_h = year_h
        self.open = {i for i in table.ids if getattr(drawing.elements[i], "closed", True) is False}
        self.rows = [
            (i, label(drawing, i), KIND_WORDS[kind_of(drawing.elements[i])], table.at(i)) for i in table.ids
        ]
        self.endResetModel()

    def fade(self, faded: bool) -> None:
        """Grey while the drawing has moved on."""
        if faded != self.faded:
            self.faded = faded
            self.dataChanged.emit(self.index(0, 0), self.index(len(self.rows) - 1, self.columnCount() - 1))

    def rowCount(self, parent: Place | None = None) -> int:
        return len(self.rows)

    def columnCount(self, parent: Place | None = None) -> int:
        return len(self.columns) + 1

    def headerData(self, section: int, orientation: Qt.Orientation, role: int = 0) -> Any:
        if orientation is not Qt.Orientation.Horizontal:
            return None
        if role == Qt.ItemDataRole.DisplayRole:
            return "Element" if section == 0 else self.columns[section - 1].head
        if role == Qt.ItemDataRole.TextAlignmentRole:
            return _at_left() if section == 0 else _at_right()
        tip = "" if section == 0 else self.columns[section - 1].tip
        return tip if role == Qt.ItemDataRole.ToolTipRole and tip else None

    def data(self, index: Place, role: int = 0) -> Any:
        id, name, kind, state = self.rows[index.row()]
        column = None if index.column() == 0 else self.columns[index.column() - 1]
        if role == Qt.ItemDataRole.DisplayRole:
            if column is None:
                return name if name == id else f"{name}  {id}"
            if state.live:
                return column.write(state, self.year_h)
            return "" if index.column() != 1 else "open" if id in self.open else "dead"
        if role == Qt.ItemDataRole.TextAlignmentRole:
            return _at_left() if column is None else _at_right()
        if role == Qt.ItemDataRole.ToolTipRole:
            if column is None:
                return f"{name}, {kind} {id}"
            return column.more(state, self.year_h) if column.more is not None and state.live else None
        look = self._theme.palette
        beyond = column is not None and state.live and column.beyond(state)
        if role == Qt.ItemDataRole.ForegroundRole:
            if self.faded or not state.live:
                return mixed(look.soft, look.panel, 0.7)
            return colour_of(Verdict.FAILS, look) if beyond else look.ink
        if role == Qt.ItemDataRole.FontRole and (beyond or column is None):
            return font(9, bold=True)
        return None

    def sort(self, column: int, order: Qt.SortOrder = Qt.SortOrder.AscendingOrder) -> None:
        """By name or by figure; what has no figure comes last either way."""
        self.layoutAboutToBeChanged.emit()
        down = order == Qt.SortOrder.DescendingOrder
        if column == 0:
            self.rows.sort(key=lambda row: row[1].casefold(), reverse=down)
        else:
            value = self.columns[column - 1].value
            known = [row for row in self.rows if value(row[3]) == value(row[3])]
            rest = [row for row in self.rows if value(row[3]) != value(row[3])]
            self.rows = [*sorted(known, key=lambda row: value(row[3]), reverse=down), *rest]
        self.layoutChanged.emit()


def _at_left() -> int:
    return int(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)


def _at_right() -> int:
    return int(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)


class YearTable(QTableView):
    """One table; `chosen` tells the id of the row that the hand or the keys are on."""

    chosen = Signal(str)

    def __init__(self, name: str, columns: Sequence[Column], theme: Theme) -> None:
        super().__init__()
        self.rows = YearModel(columns, theme, self)
        self.setModel(self.rows)
        self.setAccessibleName(name)
        self.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setShowGrid(False)
        self.setTabKeyNavigation(False)
        self.setSortingEnabled(True)
        self.setWordWrap(False)
        self.verticalHeader().hide()
        self.verticalHeader().setDefaultSectionSize(LINE)
        head = self.horizontalHeader()
        head.setHighlightSections(False)
        head.setMinimumSectionSize(LEAST)
        head.setSectionResizeMode(QHeaderView.ResizeMode.Stretch)
        head.setSectionResizeMode(0, QHeaderView.ResizeMode.Fixed)
        head.setSortIndicator(-1, Qt.SortOrder.DescendingOrder)
        self.clicked.connect(self._tell)
        self.selectionModel().currentRowChanged.connect(self._moved)
        theme.changed.connect(self.viewport().update)

    def show_year(self, drawing: Drawing, table: Table[Any], year: YearOutcome) -> None:
        """Put the rows of a year in place."""
        self.rows.show_table(drawing, table, year.points.year_h)
        for place, column in enumerate(self.rows.columns, 1):
            idle = column.spare and not any(column.value(row[3]) > 0 for row in self.rows.rows)
            self.setColumnHidden(place, idle)
        self.setColumnWidth(0, min(max(self.sizeHintForColumn(0) + 8, NAME_LEAST), NAME_MOST))
        head = self.horizontalHeader()
        if head.sortIndicatorSection() >= 0:
            self.rows.sort(head.sortIndicatorSection(), head.sortIndicatorOrder())

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_C and event.modifiers() & Qt.KeyboardModifier.ControlModifier:
            QApplication.clipboard().setText(self.as_text())
        else:
            super().keyPressEvent(event)

    def as_text(self) -> str:
        """The table as lines of tab-parted text."""
        model = self.rows
        heads = [
            str(model.headerData(c, Qt.Orientation.Horizontal)).replace("\n", " ")
            for c in range(model.columnCount())
        ]
        lines = [
            [str(model.data(model.index(r, c))) for c in range(model.columnCount())]
            for r in range(model.rowCount())
        ]
        return "\n".join("\t".join(line) for line in [heads, *lines])

    def _moved(self, now: QModelIndex, _before: QModelIndex) -> None:
        if self.hasFocus():
            self._tell(now)

    def _tell(self, index: QModelIndex) -> None:
        if index.isValid():
            self.chosen.emit(self.rows.rows[index.row()][0])
