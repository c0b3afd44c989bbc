"""Plain words on a panel: text is never read as markup, and gives way with an ellipsis instead of a cut."""

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtGui import QColor, QPainter, QPaintEvent
from PySide6.QtWidgets import QFrame, QLabel, QSizePolicy, QWidget

from app.panels.style import play

LEFT = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter
RIGHT = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter


class Words(QLabel):
    """One line that elides where it is short of room; the whole text is then its tooltip."""

    def __init__(self, text: str = "", role: str = "", parent: QWidget | None = None) -> None:
        super().__init__(text, parent)
        self.setTextFormat(Qt.TextFormat.PlainText)
        self.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Fixed)
        if role:
            play(self, role)
        self._tip = ""
        self._ink: QColor | None = None

    def colour(self, ink: QColor) -> None:
        """Letters in this colour rather than that of the sheet."""
        if self._ink is None or ink != self._ink:
            self._ink = ink
            self.update()

    def say(self, text: str, tip: str = "") -> None:
        """Change the text, and what is added in the tooltip."""
        self._tip = tip
        if text != self.text():
            self.setText(text)
        self._retip()

    def minimumSizeHint(self) -> QSize:
        return QSize(min(24, self.sizeHint().width()), super().sizeHint().height())

    def resizeEvent(self, event) -> None:
        super().resizeEvent(event)
        self._retip()

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setPen(self._ink or self.palette().color(self.foregroundRole()))
        room = self.contentsRect()
        shown = self.fontMetrics().elidedText(self.text(), Qt.TextElideMode.ElideRight, room.width())
        painter.drawText(room, int(self.alignment() | Qt.TextFlag.TextSingleLine), shown)

    def _retip(self) -> None:
        short = self.fontMetrics().horizontalAdvance(self.text()) > self.contentsRect().width()
        self.setToolTip(
            plain_tip("\n".join(part for part in (self.text() if short else "", self._tip) if part))
        )


class Sentence(QLabel):
    """Text over as many lines as it needs; gone while it has nothing to say."""

    def __init__(self, role: str = "", parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setTextFormat(Qt.TextFormat.PlainText)
        self.setWordWrap(True)
        if role:
            play(self, role)
        self.hide()

    def say(self, text: str) -> None:
        """Show the text, or hide where it is empty."""
        if text != self.text():
            self.setText(text)
        self.setVisible(bool(text))


class Rule(QFrame):
    """A quiet line between two parts of a panel."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        play(self, "rule")
        self.setFixedHeight(1)


def plain_tip(text: str) -> str:
    """The text for a tooltip, which Qt would read as markup where it looks like it."""
    if "<" not in text:
        return text
    plain = text.replace("&", "&amp;").replace("<", "&lt;").replace(">", "&gt;")
    return f"<span>{plain.replace(chr(10), '<br>')}</span>"


class Link(Words):
    """Words that can be clicked, or chosen with Enter."""

    clicked = Signal()

    def __init__(self, text: str = "", role: str = "", parent: QWidget | None = None) -> None:
        super().__init__(text, role, parent)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setCursor(Qt.CursorShape.PointingHandCursor)

    def mouseReleaseEvent(self, event) -> None:
        if event.button() == Qt.MouseButton.LeftButton and self.rect().contains(event.position().toPoint()):
            self.clicked.emit()

    def keyPressEvent(self, event) -> None:
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Space):
            self.clicked.emit()
        else:
            super().keyPressEvent(event)

    def paintEvent(self, event: QPaintEvent) -> None:
        super().paintEvent(event)
        if self.hasFocus():
            painter = QPainter(self)
            painter.setPen(self.palette().color(self.foregroundRole()))
            wide = min(self.fontMetrics().horizontalAdvance(self.text()), self.width())
            painter.drawLine(0, self.height() - 1, wide, self.height() - 1)
