"""The rows that are more than a box: the tap with its steps and words, the demand with its unit."""

from collections.abc import Sequence
from functools import partial

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QHBoxLayout, QMenu, QToolButton, QWidget

from app.canvas.theme import Theme
from app.model.assumed import FROM_SHELF
from app.model.fields import Field
from app.model.figures import MINUS
from app.model.kinds import Element, Load
from app.panels.boxes import Box, Entry
from app.panels.field_row import VARIOUS, FieldRow, Take
from app.panels.words import Sentence


class TapRow(FieldRow):
    """The notch, with steps to either side, and below it what the tap does."""

    step = Signal(int)

    def __init__(self, field: Field, take: Take, theme: Theme) -> None:
        super().__init__(field, take, theme)
        self.words = Sentence("tapped")
        self.words.setAlignment(Qt.AlignmentFlag.AlignRight)
        self.grid.addWidget(self.words, 3, 0, 1, 3)
        self.stress("tap")

    def _make_box(self) -> QWidget:
        steps = QWidget()
        across = QHBoxLayout(steps)
        across.setContentsMargins(0, 0, 0, 0)
        across.setSpacing(1)
        for sign, notches, name in ((MINUS, -1, "One notch down"), ("+", 1, "One notch up")):
            button = QToolButton()
            button.setText(sign)
            button.setFixedSize(18, 18)
            button.setAutoRepeat(False)
            button.setAccessibleName(name)
            button.setToolTip(name)
            button.setFocusPolicy(Qt.FocusPolicy.TabFocus)
            button.clicked.connect(lambda _checked=False, n=notches: self.step.emit(n))
            across.addWidget(button)
        return Box(self.editor, steps)

    def say(self, words: str) -> None:
        """What the tap does."""
        self.words.say(words)


class DemandRow(FieldRow):
    """The demand, given in kVA or in kW; the unit is a button. The number stays when the unit changes."""

    def __init__(self, kva: Field, kw: Field, take: Take, theme: Theme) -> None:
        self._fields = {"kVA": kva, "kW": kw}
        super().__init__(kva, take, theme)
        self.setObjectName("demand")

    def _make_box(self) -> QWidget:
        self.unit = QToolButton()
        self.unit.setText("kVA")
        self.unit.setAccessibleName("Unit of the demand")
        self.unit.setToolTip("Give the demand in kVA or in kW")
        self.unit.setPopupMode(QToolButton.ToolButtonPopupMode.InstantPopup)
        self.unit.setFocusPolicy(Qt.FocusPolicy.TabFocus)
        menu = QMenu(self.unit)
        for unit in self._fields:
            menu.addAction(unit, partial(self._turn_to, unit))
        self.unit.setMenu(menu)
        return Box(self.editor, self.unit)

    def _turn_to(self, unit: str) -> None:
        assert isinstance(self.editor, Entry)
        if unit != self.field.unit and self.editor.text():
            self.refuse(self._take(self._fields[unit], self.editor.text()))

    def show_demand(self, loads: Sequence[Element]) -> None:
        """The demand of these loads."""
        given = [(e.demand_kva, e.demand_kw) for e in loads if isinstance(e, Load)]
        unit = "kW" if all(kva is None for kva, _kw in given) else "kVA"
        assert isinstance(self.editor, Entry)
        if not self.editor.busy:
            self.field = self._fields[unit]
            self.unit.setText(unit)
        if any(pair != given[0] for pair in given[1:]):
            self.show_value(None, quiet=VARIOUS)
        else:
            unsure = any({"demand_kva", "demand_kw"} & set(load.assumed) for load in loads)
            self.show_value(given[0][unit == "kW"], basis=FROM_SHELF if unsure else "")
