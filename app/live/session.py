"""The open drawing and its history: every change is one undo command that holds before and after."""

from collections.abc import Callable

from PySide6.QtCore import QObject, Signal
from PySide6.QtGui import QUndoCommand, QUndoStack

from app.model.drawing import Drawing
from app.model.edits import Change, EditRefused, diff

GESTURE_COMMAND = 1


class Session(QObject):
    """Owns the drawing. `edit` is the only door through which it changes."""

    changed = Signal(object)  # Change
    replaced = Signal()  # another drawing was opened

    def __init__(self, drawing: Drawing | None = None, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._drawing = drawing or Drawing()
        self.revision = 0
        self.history = history = QUndoStack(self)
        self.destroyed.connect(lambda: history.blockSignals(True))  # nobody is left to hear its end
        self._gestures = 0

    @property
    def drawing(self) -> Drawing:
        """The drawing as it stands."""
        return self._drawing

    def open(self, drawing: Drawing) -> None:
        """Put another drawing in place; its history starts empty."""
        self._drawing = drawing
        self.revision += 1
        self.history.clear()
        self.replaced.emit()

    def new_gesture(self) -> int:
        """A token; edits that carry the same one become one undo step."""
        self._gestures += 1
        return self._gestures

    def edit(
        self, text: str | Callable[[Drawing], str], change: Callable[[Drawing], Drawing], gesture: int = 0
    ) -> str:
        """Apply a pure edit; answers the sentence of a refusal, which leaves all as it was, or nothing.
        `text` names the step, or makes its name from the changed drawing.

        The edit runs before anything is pushed: an error inside `redo` would stay on the stack.
        """
        before = self._drawing
        try:
            after = change(before)
        except EditRefused as refusal:
            return str(refusal)
        if after != before:
            said = text if isinstance(text, str) else text(after)
            self.history.push(_Edit(self, before, after, said, gesture))
        return ""

    def _put(self, drawing: Drawing) -> None:
        change: Change = diff(self._drawing, drawing)
        self._drawing = drawing
        self.revision += 1
        self.changed.emit(change)


class _Edit(QUndoCommand):
    def __init__(self, session: Session, before: Drawing, after: Drawing, text: str, gesture: int) -> None:
        super().__init__(text)
        self._session, self._before, self._after, self._gesture = session, before, after, gesture

    def redo(self) -> None:
        self._session._put(self._after)

    def undo(self) -> None:
        self._session._put(self._before)

    def id(self) -> int:
        return GESTURE_COMMAND if self._gesture else -1

    def mergeWith(self, other: QUndoCommand) -> bool:
        """Join the edits of one gesture; Qt asks only where no save lies between them."""
        if not isinstance(other, _Edit) or other._gesture != self._gesture:
            return False
        self._after = other._after
        self.setText(other.text())
        self.setObsolete(self._after == self._before)
        return True
