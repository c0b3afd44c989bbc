"""The row in which an element, or the drawing, chooses the profile that it follows."""

from typing import Any

from PySide6.QtCore import Signal

from app.model.profiles import CONSTANT
from app.panels.boxes import Choice, Entry, Note, Tick
from app.panels.field_row import VARIOUS, FieldRow

EDIT = "Profiles…"


class ProfileRow(FieldRow):
    """A choice of the drawing's profiles. `wanted` asks for the page of profiles, on the one chosen."""

    wanted = Signal(str)

    def _make_editor(self) -> Entry | Note | Choice | Tick:
        editor = Choice()
        editor.setAccessibleName(self.field.label)
        editor.setAccessibleDescription(self.field.help)
        editor.activated.connect(self._chosen)
        self.names: list[str] = []
        return editor

    def offer(self, names: list[str], blank: str, constant: bool = True) -> None:
        """The profiles there are; `blank` says what it is to name none."""
        editor = self.editor
        assert isinstance(editor, Choice)
        self.names = ["", *([CONSTANT] if constant else []), *names]
        words = [blank, *(["constant 100 %"] if constant else []), *names]
        if [editor.itemText(i) for i in range(editor.count() - 2)] != words:
            editor.clear()
            editor.addItems(words)
            editor.insertSeparator(len(words))
            editor.addItem(EDIT)

    def show_value(self, value: Any, quiet: str = "", basis: str = "", other: str = "") -> None:
        """The profile that is followed."""
        self._value = value
        editor = self.editor
        assert isinstance(editor, Choice)
        known = value in self.names and quiet != VARIOUS
        editor.setCurrentIndex(self.names.index(value) if known else -1)
        editor.setToolTip(self.field.help)

    def _chosen(self, index: int) -> None:
        if index < len(self.names):
            self._committed(self.names[index])
            return
        self.show_value(self._value)
        self.wanted.emit(self._value if isinstance(self._value, str) else "")
