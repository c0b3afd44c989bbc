"""The part of a card that only layouts need whose phases are not alike: folded away for all others."""

from collections.abc import Sequence

from PySide6.QtCore import QPointF, QSize, Qt
from PySide6.QtGui import QFontMetrics, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QAbstractButton, QSizePolicy, QVBoxLayout, QWidget

from app.canvas.palette import font
from app.canvas.theme import Theme
from app.model.drawing import Drawing
from app.model.kinds import AnyElement, Element
from app.model.rephasing import GROUPED, states_phases
from app.panels.boxes import chevron
from app.panels.page import Page
from app.panels.words import LEFT, RIGHT
from app.study.memory import Memory

TITLE = "Phases and neutral"
_STATES: Memory[AnyElement, bool] = Memory(states_phases)


class FoldHead(QAbstractButton):
    """A line with a chevron: what is folded, and in a word how it stands."""

    def __init__(self, title: str, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme = theme
        self.summary = ""
        self.setText(title)
        self.setCheckable(True)
        self.setFocusPolicy(Qt.FocusPolicy.TabFocus)
        self.setCursor(Qt.CursorShape.PointingHandCursor)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setAttribute(Qt.WidgetAttribute.WA_Hover)
        theme.changed.connect(self.update)

    def sizeHint(self) -> QSize:
        return QSize(QFontMetrics(font(9)).horizontalAdvance(self.text()) + 90, 22)

    def say(self, summary: str) -> None:
        """How it stands, shown while it is folded."""
        if summary != self.summary:
            self.summary = summary
            self.setAccessibleDescription(summary)
            self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        painter, look = QPainter(self), self._theme.palette
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        lit = self.underMouse() or self.hasFocus()
        chevron(painter, QPointF(5, self.height() / 2), look.ink if lit else look.soft, up=self.isChecked())
        painter.setFont(font(9))
        painter.setPen(look.ink if lit else look.soft)
        room = self.rect().adjusted(16, 0, -2, 0)
        painter.drawText(room, int(LEFT), self.text())
        if not self.isChecked():
            painter.drawText(room, int(RIGHT), self.summary)
        if self.hasFocus():
            painter.setPen(QPen(look.flow, 1))
            wide = painter.fontMetrics().horizontalAdvance(self.text())
            painter.drawLine(16, self.height() - 2, 16 + wide, self.height() - 2)


class Fold(QWidget):
    """Open where the drawing says anything of phases or neutral, or the person opened it."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.page = Page(theme)
        self.head = FoldHead(TITLE, theme)
        self._by_hand: bool | None = None
        down = QVBoxLayout(self)
        down.setContentsMargins(0, 4, 0, 0)
        down.setSpacing(5)
        down.addWidget(self.head)
        down.addWidget(self.page)
        self.page.hide()
        self.head.clicked.connect(self._clicked)

    def _clicked(self, opened: bool) -> None:
        self._by_hand = opened
        self.page.setVisible(opened)

    def open(self) -> None:
        """Unfold, as where one of its fields is sought."""
        self.head.setChecked(True)
        self._clicked(True)

    def follow(self, drawing: Drawing, elements: Sequence[Element]) -> None:
        """Open or close by what the drawing says, unless a person did."""
        wanted = self._by_hand if self._by_hand is not None else needs_phases(drawing)
        self.head.setChecked(wanted)
        self.page.setVisible(wanted)
        said = {getattr(element, "phases", "") for element in elements}
        phases = said.pop() if len(said) == 1 else "various"
        self.head.say("as they reach it" if phases == "all" else phases)


def needs_phases(drawing: Drawing) -> bool:
    """Whether anything in a drawing says that its phases are not alike."""
    return any(_STATES.of(list(drawing.elements.values())))


def is_folded(kind: type[Element], field: str) -> bool:
    """Whether a field stands in the fold on the card of its kind."""
    return field in GROUPED and "phases" in kind.__struct_fields__
