"""The loading cases as chips, each with the mark of its worst finding; a menu where there is little room."""

from functools import partial

from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QFontMetrics, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QButtonGroup, QHBoxLayout, QMenu, QPushButton, QSizePolicy, QWidget

from app.canvas.palette import font
from app.canvas.theme import Theme
from app.live.attention import Attention
from app.live.session import Session
from app.live.solving import Solving
from app.model.edits import Change
from app.panels.boxes import chevron
from app.panels.style import mixed
from app.panels.verdicts import paint_mark
from app.panels.words import LEFT, plain_tip
from app.study.outcome import Verdict
from solver.status import Status


class Chip(QPushButton):
    """A pill with the mark of a verdict and a case's name, which elides."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme = theme
        self.verdict = Verdict.NOTE
        self.setCheckable(True)
        self.setAttribute(Qt.WidgetAttribute.WA_Hover)
        theme.changed.connect(self.update)

    def say(self, name: str, verdict: Verdict) -> None:
        """Show a case."""
        self.verdict = verdict
        if name != self.text():
            self.setText(name)
            self.updateGeometry()
        self.setToolTip(plain_tip(f"{name}: {'no verdict' if verdict is Verdict.NOTE else verdict.value}"))
        self.update()

    def sizeHint(self) -> QSize:
        """Room for the name in bold, so that a chip does not grow when it is chosen."""
        wide = QFontMetrics(font(9, bold=True)).horizontalAdvance(self.text())
        return QSize(wide + 44 + (16 if self.menu() else 0), 27)

    def minimumSizeHint(self) -> QSize:
        return QSize(40, 27)

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        look, strong = self._theme.palette, self.isChecked() or self.menu() is not None
        edge = look.flow if self.hasFocus() else look.ink if strong else look.faint
        room = QRectF(self.rect()).adjusted(1, 1, -1, -1)
        painter.setPen(QPen(edge, 1.3))
        painter.setBrush(look.field if strong else mixed(look.ink, look.panel, 0.06 * self.underMouse()))
        painter.drawRoundedRect(room, room.height() / 2, room.height() / 2)
        paint_mark(painter, self.verdict, QPointF(18, self.height() / 2), 10, look)
        painter.setFont(font(9, bold=strong))
        painter.setPen(look.ink if strong or self.underMouse() else look.soft)
        text = self.rect().adjusted(29, 0, -28 if self.menu() else -12, 0)
        name = painter.fontMetrics().elidedText(self.text(), Qt.TextElideMode.ElideRight, text.width())
        painter.drawText(text, int(LEFT), name)
        if self.menu():
            chevron(painter, QPointF(self.width() - 17, self.height() / 2), look.soft)


class CaseChips(QWidget):
    """One chip a case; hidden while there is but one."""

    def __init__(self, session: Session, solving: Solving, attention: Attention, theme: Theme) -> None:
        super().__init__()
        self._session, self._solving, self._attention, self._theme = session, solving, attention, theme
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Preferred)
        self.setAccessibleName("Loading cases")
        self._across = QHBoxLayout(self)
        self._across.setContentsMargins(0, 0, 0, 0)
        self._across.setSpacing(8)
        self._across.addStretch(1)
        self._across.addStretch(1)
        self._group = QButtonGroup(self)
        self.chips: list[Chip] = []
        self.menu_chip = self._chip()
        self.menu_chip.setMenu(QMenu(self.menu_chip))
        session.changed.connect(self._changed)
        session.replaced.connect(self.follow)
        solving.solved.connect(self.follow)
        attention.case_shown.connect(self.follow)
        theme.changed.connect(self.follow)
        self.follow()

    def minimumSizeHint(self) -> QSize:
        return QSize(20, 30)

    def _chip(self) -> Chip:
        chip = Chip(self._theme)
        self._across.insertWidget(self._across.count() - 1, chip)
        return chip

    def _changed(self, change: Change) -> None:
        if change.rest:
            self.follow()

    def follow(self) -> None:
        """Show the cases as they stand."""
        names = [case.name for case in self._session.drawing.cases]
        while len(self.chips) < len(names):
            self._add(len(self.chips))
        shown = self._attention.case
        for k, chip in enumerate(self.chips):
            if k < len(names):
                chip.say(names[k], self._verdict(k))
                chip.setChecked(k == shown)
        self.menu_chip.say(names[shown], self._verdict(shown))
        menu = self.menu_chip.menu()
        menu.clear()
        for k, name in enumerate(names):
            menu.addAction(name.replace("&", "&&"), partial(self._attention.show_case, k))
        self._arrange()

    def _verdict(self, case: int) -> Verdict:
        """The worst in a case, that it is not solved among them; a note where nothing can be."""
        outcome = self._solving.newest
        if outcome is None or outcome.status is Status.INVALID or case >= len(outcome.cases):
            return Verdict.NOTE
        return outcome.verdict(case)

    def _add(self, case: int) -> None:
        chip = self._chip()
        self._group.addButton(chip)
        chip.clicked.connect(lambda _checked=False: self._attention.show_case(case))
        self.chips.append(chip)

    def _arrange(self) -> None:
        """Chips side by side where they fit, else one chip with a menu."""
        count = len(self._session.drawing.cases)
        need = sum(chip.sizeHint().width() + 8 for chip in self.chips[:count])
        fit = need <= self.width()
        for k, chip in enumerate(self.chips):
            chip.setVisible(count > 1 and fit and k < count)
        self.menu_chip.setVisible(count > 1 and not fit)

    def resizeEvent(self, event) -> None:
        self._arrange()
