"""Renaming in place: a small field over the element's caption."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtGui import QFocusEvent, QKeyEvent
from PySide6.QtWidgets import QLineEdit

from app.model import edits

if TYPE_CHECKING:
    from app.canvas.view import BoardView

WIDE = 150
LONGEST = 80  # the model says so too, with a sentence


class NameField(QLineEdit):
    """Enter or leaving it takes the name, Esc does not."""

    def __init__(self, view: BoardView, id: str) -> None:
        super().__init__(view.viewport())
        self._view, self.id, self._open = view, id, True
        element = view.drawing.elements[id]
        self.setText(element.name or id)
        self.setAccessibleName(f"Name of {id}")
        self.setMaxLength(LONGEST)
        self.setAlignment(Qt.AlignmentFlag.AlignHCenter)
        self.resize(WIDE, self.sizeHint().height())
        at = view.px_of_name(id)
        self.move(at.x() - WIDE // 2, at.y() - self.height() // 2)
        self.selectAll()
        self.show()
        self.setFocus(Qt.FocusReason.OtherFocusReason)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.close_field()
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self._take()
        else:
            super().keyPressEvent(event)

    def focusOutEvent(self, event: QFocusEvent) -> None:
        super().focusOutEvent(event)
        if event.reason() != Qt.FocusReason.PopupFocusReason:
            self._take()

    def close_field(self) -> None:
        """Put the field away."""
        if self._open:
            self._open = False
            self._view.setFocus(Qt.FocusReason.OtherFocusReason)
            self.hide()
            self.deleteLater()

    def _take(self) -> None:
        if not self._open:
            return
        id = self.id
        name = "" if self.text().strip() == id else self.text().strip()
        if id in self._view.drawing.elements:
            text = f"Rename {id} to {name}" if name else f"Take the name off {id}"
            self._view.edit(text, lambda d: edits.rename(d, id, name))
        self.close_field()
