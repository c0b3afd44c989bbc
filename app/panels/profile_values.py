"""Where the values of a profile are seen, pasted, typed and opened from a file."""

from collections.abc import Sequence
from pathlib import Path

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QHBoxLayout, QPlainTextEdit, QPushButton, QVBoxLayout, QWidget

from app.model.checks import EditRefused
from app.model.figures import typed
from app.model.profile_text import read_text, values_of
from app.panels.boxes import Box, Entry, Tick
from app.panels.dialogs import value_file
from app.panels.words import Sentence, Words

HELP = "One value a line, in % of what the drawing states; rows, and columns of a table, are read too."


class ProfileValues(QWidget):
    """Text and a button that takes it; a bad line is told in place and nothing is taken."""

    taken = Signal(object)  # tuple of values in %

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.text = QPlainTextEdit()
        self.text.setAccessibleName("Values")
        self.text.setTabChangesFocus(True)
        self.text.setPlaceholderText(HELP)
        self.text.setMinimumHeight(60)
        self.measured = Tick("Another unit: highest is 100 %")
        self.column = Entry()
        self.column.setAccessibleName("Column")
        self.column.setPlaceholderText("all")
        self.open, self.put = QPushButton("Open file…"), QPushButton("Take values")
        self.open.clicked.connect(self._open)
        self.put.clicked.connect(self.take)
        self.refusal = Sentence("refusal")
        down = QVBoxLayout(self)
        down.setContentsMargins(0, 0, 0, 0)
        down.setSpacing(6)
        down.addWidget(Words("Values", "strong"))
        down.addWidget(self.text, 1)
        down.addWidget(self.refusal)
        down.addLayout(self._foot())

    def _foot(self) -> QHBoxLayout:
        across = QHBoxLayout()
        box = Box(self.column)
        box.setFixedWidth(58)
        across.addWidget(self.measured, 1)
        name = Words("Column", "quiet")
        name.setMinimumWidth(name.sizeHint().width())
        across.addWidget(name)
        across.addWidget(box)
        for button in (self.open, self.put):
            button.setAutoDefault(False)
            across.addWidget(button)
        return across

    def show_values(self, values: Sequence[float]) -> None:
        """The values as they stand, one a line."""
        self.text.setPlainText("\n".join(typed(value) for value in values))
        self.measured.setChecked(False)
        self.refuse("")

    def begin(self) -> None:
        """Ready to be pasted over."""
        self.text.setFocus()
        self.text.selectAll()

    def refuse(self, sentence: str) -> None:
        """Why the text cannot be taken; empty: all is well."""
        self.refusal.say(sentence)

    def take(self) -> None:
        """Hand over the values in the text."""
        try:
            values = values_of(
                self.text.toPlainText(), column=self._column(), measured=self.measured.isChecked()
            )
        except EditRefused as refusal:
            self.refuse(str(refusal))
            return
        self.refuse("")
        self.taken.emit(values)

    def _column(self) -> int:
        written = self.column.text().strip()
        if written in ("", "all"):
            return 0
        if not written.isdecimal() or not int(written):
            raise EditRefused(f"Column is {written}, allowed is its number from 1, or blank for all.")
        return int(written)

    def _open(self) -> None:
        path = value_file(self)
        if path is not None:
            self.open_values(path)

    def open_values(self, path: Path) -> None:
        """Bring the text of a file in sight and take it."""
        try:
            self.text.setPlainText(read_text(path))
        except EditRefused as refusal:
            self.refuse(str(refusal))
            return
        self.take()
