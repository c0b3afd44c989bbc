"""The phases of an element as a row of chips."""

from typing import Any

from PySide6.QtCore import QRectF, QSize, Qt
from PySide6.QtGui import QFontMetrics, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QAbstractButton, QButtonGroup, QHBoxLayout, QSizePolicy, QWidget

from app.canvas.palette import font
from app.canvas.phase_words import SPLIT, named
from app.canvas.theme import Theme
from app.model.fields import Field
from app.panels.field_row import VARIOUS, FieldRow, Take
from app.panels.style import mixed
from app.panels.words import plain_tip

HEIGHT = 24
QWIDGETSIZE_MAX = 16_777_215  # Qt's own, which the bindings leave out


class PhaseChip(QAbstractButton):
    """One choice; faint where those phases do not reach."""

    def __init__(self, theme: Theme, phases: str) -> None:
        super().__init__()
        self._theme = theme
        self.phases = phases
        self.reaches = True
        self.setText(phases)
        self.setCheckable(True)
        self.setAttribute(Qt.WidgetAttribute.WA_Hover)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        theme.changed.connect(self.update)

    def sizeHint(self) -> QSize:
        return QSize(QFontMetrics(font(9, bold=True)).horizontalAdvance(self.text()) + 14, HEIGHT)

    def say(self, text: str, reaches: bool) -> None:
        """What people call it here, and whether it reaches."""
        if (text, reaches) != (self.text(), self.reaches):
            self.setText(text)
            self.reaches = reaches
            self.updateGeometry()
            self.update()
        tip = "As many as reach it" if self.phases == "all" else text
        self.setToolTip(plain_tip(tip if reaches else f"{text} does not reach here"))

    def paintEvent(self, event: QPaintEvent) -> None:
        painter, look = QPainter(self), self._theme.palette
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        strong = self.isChecked()
        edge = look.flow if self.hasFocus() else look.ink if strong else look.faint
        painter.setPen(QPen(edge, 1.3 if strong or self.hasFocus() else 1.0))
        lit = mixed(look.ink, look.panel, 0.06 * self.underMouse())
        painter.setBrush(look.field if strong else lit)
        room = QRectF(self.rect()).adjusted(1, 1, -1, -1)
        painter.drawRoundedRect(room, room.height() / 2, room.height() / 2)
        painter.setFont(font(9, bold=strong))
        ink = look.ink if strong else look.soft
        painter.setPen(ink if self.reaches else mixed(ink, look.panel, 0.5))
        painter.drawText(room, int(Qt.AlignmentFlag.AlignCenter), self.text())


class PhaseRow(FieldRow):
    """All choices side by side; a click or an arrow key puts the elements on other phases at once."""

    def __init__(self, field: Field, take: Take, theme: Theme) -> None:
        self._theme = theme
        super().__init__(field, take, theme)
        for widget in (self.label, self.dot):  # the head of the fold says what it is
            self.grid.removeWidget(widget)
            widget.hide()
        self.grid.removeWidget(self.box)
        self.grid.addWidget(self.box, 1, 0, 1, 3)
        self.box.setMinimumWidth(0)
        self.box.setMaximumWidth(QWIDGETSIZE_MAX)

    def _make_box(self) -> QWidget:
        holder = QWidget()
        across = QHBoxLayout(holder)
        across.setContentsMargins(0, 0, 0, 0)
        across.setSpacing(4)
        self.group = QButtonGroup(holder)
        self.chips: dict[str, PhaseChip] = {}
        for phases in self.field.choices:
            chip = PhaseChip(self._theme, phases)
            chip.setAccessibleName(f"{self.field.label} {phases}")
            chip.setToolTip(plain_tip(self.field.help))
            chip.clicked.connect(lambda _checked=False, p=phases: self._committed(p))
            self.group.addButton(chip)
            self.chips[phases] = chip
            across.addWidget(chip)
        self.setFocusProxy(self.chips[self.field.choices[0]])
        return holder

    def show_value(self, value: Any, quiet: str = "", basis: str = "", other: str = "") -> None:
        """Check the chip that stands; none where the elements differ."""
        self._value = None if quiet == VARIOUS else value
        self.group.setExclusive(False)
        for phases, chip in self.chips.items():
            chip.setChecked(phases == self._value)
        self.group.setExclusive(True)

    def show_reach(self, letters: str, system: str) -> None:
        """Which phases reach the elements; all where nothing is known."""
        for phases, chip in self.chips.items():
            name = phases if phases == "all" else "".join(named(letter, system) for letter in phases)
            spare = system == SPLIT and "C" in phases
            chip.setVisible(not spare)
            chip.say(name, phases == "all" or not letters or set(phases) <= set(letters))
