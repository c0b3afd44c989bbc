"""A length that is typed while a line is drawn, or just after: a small field at the hand."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QPoint, Qt
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QLineEdit

from app.canvas.tools import ENTERS, Tool, Touch
from app.model import edits
from app.model.drawing import label

if TYPE_CHECKING:
    from app.canvas.view import BoardView

BESIDE = QPoint(16, 14)


class LengthField(QLineEdit):
    """Shows what is typed; the board keeps the keyboard, so that the hand can go on drawing."""

    def __init__(self, view: BoardView) -> None:
        super().__init__(view.viewport())
        self._room = view.viewport()
        self.setAccessibleName("Length of the line")
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.setReadOnly(True)
        self.setFixedWidth(96)
        self.hide()

    def feed(self, event: QKeyEvent) -> bool:
        """Take a key if it belongs to a length: a digit begins, then units may follow."""
        if event.key() == Qt.Key.Key_Backspace:
            self._show(self.text()[:-1])
            return True
        text = event.text()
        if not begins_length(event) and not (self.text() and text.isprintable() and text):
            return False
        self._show(self.text() + text)
        return True

    def follow(self, px: QPoint) -> None:
        """Stay beside the hand."""
        room = self._room.rect().bottomRight() - self.rect().bottomRight()
        to = px + BESIDE
        self.move(max(0, min(to.x(), room.x())), max(0, min(to.y(), room.y())))

    def _show(self, text: str) -> None:
        self.setText(text)
        self.setVisible(bool(text))


def begins_length(event: QKeyEvent) -> bool:
    """True for a key that can begin a length."""
    plain = event.modifiers() & ~(Qt.KeyboardModifier.KeypadModifier | Qt.KeyboardModifier.ShiftModifier)
    return not plain and bool(event.text()) and event.text() in "0123456789.,"


class LengthTool(Tool):
    """Types the length of one line that is already there. Enter or a press takes it, Esc does not."""

    def __init__(self, view: BoardView, id: str) -> None:
        super().__init__(view)
        self.id = id
        self.field = LengthField(view)
        self.field.follow(view.px_of(id))

    def key(self, event: QKeyEvent) -> bool:
        if event.key() == Qt.Key.Key_Escape:
            self.cancel()
        elif event.key() in ENTERS:
            self._take()
        else:
            self.field.feed(event)
            if not self.field.text():
                self.view.rest()
        return True

    def press(self, touch: Touch) -> None:
        if self._take():
            self.view.tool.press(touch)

    def end(self) -> None:
        self.field.deleteLater()
        self.field.hide()

    def _take(self) -> bool:
        text, name = self.field.text(), label(self.view.drawing, self.id)
        taken = self.view.edit(
            f"Length of {name} to {text}", lambda d: edits.change_text(d, self.id, "length_m", text)
        )
        if taken:
            self.view.rest()
        return taken
