"""Where branches meet the user's own symbol: the picture with its terminals, to be dragged."""

from msgspec.structs import replace
from PySide6.QtCore import QByteArray, QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QKeyEvent, QMouseEvent, QPainter, QPaintEvent, QPen
from PySide6.QtSvg import QSvgRenderer
from PySide6.QtWidgets import QDialog, QDialogButtonBox, QVBoxLayout, QWidget

from app.canvas.palette import font
from app.canvas.theme import Theme
from app.canvas.user_symbol import default_terminals
from app.model.drawing import Part, Symbol
from app.model.kinds import Branch
from app.panels.words import Sentence

TENTHS = 10
ROOM = 260.0
MARGIN = 30.0
DOT = 7.0


class Picture(QWidget):
    """The symbol on a grid of tenths; terminals snap to it. Tab takes the next one, arrows move it."""

    moved = Signal()

    def __init__(self, symbol: Symbol, branch: bool, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._symbol, self._theme = symbol, theme
        self._renderer = QSvgRenderer(QByteArray(symbol.svg.encode()), self)
        self.points = [QPointF(*point) for point in default_terminals(symbol, branch)]
        self.held = 0
        self._dragging = False
        self._scale = ROOM / max(symbol.width, symbol.height)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAccessibleName("Terminals of the symbol")
        wide, tall = symbol.width * self._scale, symbol.height * self._scale
        self.setFixedSize(QSize(round(wide + 2 * MARGIN), round(tall + 2 * MARGIN)))

    def to_widget(self, point: QPointF) -> QPointF:
        """Picture units to pixels here."""
        return point * self._scale + QPointF(MARGIN, MARGIN)

    def snapped(self, at: QPointF) -> QPointF:
        """The nearest crossing of the tenths, inside the picture."""
        wide, tall = self._symbol.width, self._symbol.height
        spot = (at - QPointF(MARGIN, MARGIN)) / self._scale
        x = min(max(round(spot.x() / wide * TENTHS), 0), TENTHS) * wide / TENTHS
        y = min(max(round(spot.y() / tall * TENTHS), 0), TENTHS) * tall / TENTHS
        return QPointF(x, y)

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        look = self._theme.palette
        painter.fillRect(self.rect(), look.paper)
        room = QRectF(MARGIN, MARGIN, self.width() - 2 * MARGIN, self.height() - 2 * MARGIN)
        painter.setPen(QPen(look.faint, 1))
        for k in range(TENTHS + 1):
            x, y = room.left() + room.width() * k / TENTHS, room.top() + room.height() * k / TENTHS
            painter.drawLine(QPointF(x, room.top()), QPointF(x, room.bottom()))
            painter.drawLine(QPointF(room.left(), y), QPointF(room.right(), y))
        self._renderer.render(painter, room)
        painter.setFont(font(8, bold=True))
        for k, point in enumerate(self.points):
            at = self.to_widget(point)
            painter.setPen(QPen(look.tap, 2.5 if k == self.held else 1.5))
            painter.setBrush(look.paper)
            painter.drawEllipse(at, DOT, DOT)
            box = QRectF(at.x() - DOT, at.y() - DOT, 2 * DOT, 2 * DOT)
            painter.drawText(box, int(Qt.AlignmentFlag.AlignCenter), str(k + 1))

    def mousePressEvent(self, event: QMouseEvent) -> None:
        away = [(event.position() - self.to_widget(p)).manhattanLength() for p in self.points]
        if away and min(away) <= 2.5 * DOT:
            self.held = away.index(min(away))
            self._dragging = True
            self.update()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        if self._dragging:
            self._put(self.snapped(event.position()))

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        self._dragging = False

    def keyPressEvent(self, event: QKeyEvent) -> None:
        steps = {
            Qt.Key.Key_Left: (-1, 0),
            Qt.Key.Key_Right: (1, 0),
            Qt.Key.Key_Up: (0, -1),
            Qt.Key.Key_Down: (0, 1),
        }
        step = steps.get(Qt.Key(event.key()))
        if step is None:
            super().keyPressEvent(event)
            return
        way = QPointF(step[0] * self._symbol.width / TENTHS, step[1] * self._symbol.height / TENTHS)
        self._put(self.snapped(self.to_widget(self.points[self.held] + way)))

    def focusNextPrevChild(self, forward: bool) -> bool:
        following = self.held + (1 if forward else -1)
        if 0 <= following < len(self.points):
            self.held = following
            self.update()
            return True
        return super().focusNextPrevChild(forward)

    def _put(self, point: QPointF) -> None:
        if point != self.points[self.held]:
            self.points[self.held] = point
            self.moved.emit()
            self.update()


class Terminals(QDialog):
    """The picture, a line of help, Save and Cancel."""

    def __init__(self, part: Part, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        assert part.symbol is not None
        self._symbol = part.symbol
        branch = isinstance(part.element, Branch)
        self.setWindowTitle(f"Terminals of {part.name}")
        self.picture = Picture(part.symbol, branch, theme)
        help_line = Sentence("quiet")
        help_line.say(
            "1 is where the branch starts, 2 where it ends. Drag them, or Tab and the arrow keys."
            if branch
            else "1 is where the symbol meets its node. Drag it, or use the arrow keys."
        )
        buttons = QDialogButtonBox(
            QDialogButtonBox.StandardButton.Save | QDialogButtonBox.StandardButton.Cancel
        )
        buttons.accepted.connect(self.accept)
        buttons.rejected.connect(self.reject)
        down = QVBoxLayout(self)
        down.setSpacing(10)
        down.addWidget(self.picture, 0, Qt.AlignmentFlag.AlignHCenter)
        down.addWidget(help_line)
        down.addWidget(buttons)

    def symbol(self) -> Symbol:
        """The symbol with its terminals as they stand."""
        points = tuple((round(p.x(), 4), round(p.y(), 4)) for p in self.picture.points)
        return replace(self._symbol, terminals=points)
