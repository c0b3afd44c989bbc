"""What a field is edited in: a line of text, a choice, a tick, a longer note."""

from PySide6.QtCore import QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QColor, QFocusEvent, QKeyEvent, QPainter, QPaintEvent, QPen, QWheelEvent
from PySide6.QtWidgets import (
    QCheckBox,
    QComboBox,
    QFrame,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPlainTextEdit,
    QWidget,
)

from app.panels.style import play
from app.panels.words import LEFT, RIGHT

BOX_HEIGHT = 25
UNIT_WIDTH = 30


class Entry(QLineEdit):
    """A line that commits on Enter or when it is left, and goes back on Esc."""

    committed = Signal(str)
    given_up = Signal()
    entered = Signal(bool)  # the focus came or went

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._settled = self._before = ""
        self.brief = ""  # what stands for a long number while nobody edits it
        self.returnPressed.connect(self.commit)

    @property
    def busy(self) -> bool:
        """Something was typed that is not committed."""
        return self.isModified() and self.text() != self._settled

    def settle(self, text: str) -> None:
        """Show the value as it stands, unless the person is in the middle of typing another."""
        if self.busy:
            return
        self._settled = text
        if text != self.text():
            self.setText(text)
            self.setCursorPosition(0)
            if self.hasFocus():
                self.selectAll()
        self.setModified(False)

    def commit(self) -> None:
        """Hand over what was typed, be it the same again. It counts as taken, unless `reopen` says
        otherwise."""
        if self.isModified():
            self._before, self._settled = self._settled, self.text()
            self.setModified(False)
            self.committed.emit(self.text())

    def reopen(self) -> None:
        """What was handed over cannot stand: it waits to be put right, or for Esc."""
        self._settled = self._before
        self.setModified(True)

    def give_up(self) -> None:
        """Back to the value as it stands."""
        self.setText(self._settled)
        self.setModified(False)
        self.selectAll()
        self.given_up.emit()

    def paintEvent(self, event: QPaintEvent) -> None:
        """Text that is too long for its box is elided while nobody edits it."""
        text = self.at_rest
        wide = self.fontMetrics().horizontalAdvance(text)
        if self.hasFocus() or (text == self.text() and wide <= self.contentsRect().width() - 4):
            super().paintEvent(event)
            return
        painter = QPainter(self)
        painter.setPen(self.palette().color(self.foregroundRole()))
        room = self.contentsRect().adjusted(2, 0, -2, 0)
        shown = self.fontMetrics().elidedText(text, Qt.TextElideMode.ElideRight, room.width())
        painter.drawText(room, int(RIGHT if text == self.brief else LEFT), shown)

    @property
    def at_rest(self) -> str:
        """What is painted while nobody edits it: the value, rounded where it is long."""
        return self.text() if self.busy or not self.brief else self.brief

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape and self.isModified():
            self.give_up()
            return
        super().keyPressEvent(event)

    def focusInEvent(self, event: QFocusEvent) -> None:
        super().focusInEvent(event)
        self.entered.emit(True)
        if event.reason() in (Qt.FocusReason.TabFocusReason, Qt.FocusReason.BacktabFocusReason):
            self.selectAll()

    def focusOutEvent(self, event: QFocusEvent) -> None:
        super().focusOutEvent(event)
        self.entered.emit(False)
        if event.reason() != Qt.FocusReason.PopupFocusReason:
            self.commit()


class Note(QPlainTextEdit):
    """A few lines of text; Ctrl+Enter or leaving commits."""

    committed = Signal(str)
    entered = Signal(bool)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._settled = self._before = ""
        self.setTabChangesFocus(True)
        self.setFixedHeight(54)

    @property
    def busy(self) -> bool:
        """Something was typed that is not committed."""
        return self.toPlainText() != self._settled

    def settle(self, text: str) -> None:
        """Show the text as it stands, unless the person is in the middle of typing."""
        if self.hasFocus() and self.busy:
            return
        self._settled = text
        if text != self.toPlainText():
            self.setPlainText(text)

    def commit(self) -> None:
        """Hand over what was typed. It counts as taken, unless `reopen` says otherwise."""
        if self.busy:
            self._before, self._settled = self._settled, self.toPlainText()
            self.committed.emit(self.toPlainText())

    def reopen(self) -> None:
        """What was handed over cannot stand."""
        self._settled = self._before

    def keyPressEvent(self, event: QKeyEvent) -> None:
        enter = event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter)
        if enter and event.modifiers() & Qt.KeyboardModifier.ControlModifier:
            self.commit()
        elif event.key() == Qt.Key.Key_Escape and self.busy:
            self.setPlainText(self._settled)
        else:
            super().keyPressEvent(event)

    def focusInEvent(self, event: QFocusEvent) -> None:
        super().focusInEvent(event)
        self.entered.emit(True)

    def focusOutEvent(self, event: QFocusEvent) -> None:
        super().focusOutEvent(event)
        self.entered.emit(False)
        self.commit()


class Choice(QComboBox):
    """A choice, its word at the right as figures are; the wheel scrolls the card, not the choice."""

    def sizeHint(self) -> QSize:
        return QSize(super().sizeHint().width(), BOX_HEIGHT - 4)

    def wheelEvent(self, event: QWheelEvent) -> None:
        event.ignore()

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        ink = self.palette().color(self.foregroundRole())
        room = self.rect().adjusted(2, 0, -17, 0)
        shown = self.fontMetrics().elidedText(self.currentText(), Qt.TextElideMode.ElideRight, room.width())
        painter.setPen(ink)
        painter.drawText(room, int(RIGHT), shown)
        chevron(painter, QPointF(self.width() - 8, self.height() / 2 + 0.5), ink)


class Tick(QCheckBox):
    """Yes or no."""

    def sizeHint(self) -> QSize:
        text = self.fontMetrics().horizontalAdvance(self.text())
        return QSize(18 + (text + 6 if text else 0), 22)

    def hitButton(self, pos) -> bool:
        return self.rect().contains(pos)

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        look = self.palette()
        ink = look.color(self.foregroundRole())
        square = QRectF(1.5, self.height() / 2 - 7.5, 15, 15)
        edge = QColor(ink)
        edge.setAlphaF(0.9 if self.hasFocus() else 0.45)
        painter.setPen(QPen(edge, 1.6 if self.hasFocus() else 1.0))
        painter.setBrush(look.color(look.ColorRole.Base))
        painter.drawRoundedRect(square, 4, 4)
        pen = QPen(ink, 2.0, Qt.PenStyle.SolidLine, Qt.PenCapStyle.RoundCap, Qt.PenJoinStyle.RoundJoin)
        painter.setPen(pen)
        x, y = square.left(), square.center().y()
        if self.checkState() == Qt.CheckState.Checked:
            painter.drawPolyline([QPointF(x + 3.8, y), QPointF(x + 6.6, y + 3), QPointF(x + 11.4, y - 3.2)])
        elif self.checkState() == Qt.CheckState.PartiallyChecked:
            painter.drawLine(QPointF(x + 4, y), QPointF(x + 11, y))
        painter.setPen(ink)
        painter.drawText(self.rect().adjusted(23, 0, 0, 0), int(LEFT), self.text())


class Box(QFrame):
    """The white rounded box: an editor, and the unit inside at the right."""

    def __init__(self, editor: QWidget, unit: QWidget | str = "", parent: QWidget | None = None) -> None:
        super().__init__(parent)
        play(self, "box")
        self.editor = editor
        self._base = ""
        across = QHBoxLayout(self)
        across.setContentsMargins(8, 1, 8, 1)
        across.setSpacing(6)
        across.addWidget(editor, 1)
        if isinstance(unit, str) and unit:
            shown = QLabel(unit)
            shown.setTextFormat(Qt.TextFormat.PlainText)
            shown.setAlignment(RIGHT)
            shown.setMinimumWidth(UNIT_WIDTH)
            play(shown, "quiet")
            across.addWidget(shown)
        elif isinstance(unit, QWidget):
            across.addWidget(unit)
        if not isinstance(editor, QPlainTextEdit):
            self.setFixedHeight(BOX_HEIGHT)
        self.setFocusProxy(editor)
        if isinstance(editor, Entry | Note):
            editor.entered.connect(self._light)

    def wear(self, state: str) -> None:
        """`refused`, `tap` or nothing; the focus ring comes by itself."""
        self._base = state
        self._light(self.editor.hasFocus())

    def _light(self, focused: bool) -> None:
        play(self, "box", self._base or ("focus" if focused else ""))


def chevron(painter: QPainter, at: QPointF, colour: QColor, up: bool = False) -> None:
    """A small mark that something folds out."""
    way = -1 if up else 1
    pen = QPen(colour, 1.4, Qt.PenStyle.SolidLine, Qt.PenCapStyle.RoundCap, Qt.PenJoinStyle.RoundJoin)
    painter.setPen(pen)
    tips = (QPointF(-3.5, -1.8 * way), QPointF(0, 1.8 * way), QPointF(3.5, -1.8 * way))
    painter.drawPolyline([at + tip for tip in tips])
