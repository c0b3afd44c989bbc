"""What the person looks at: one selection and one hovered element, shared by every panel."""

from collections.abc import Iterable

from PySide6.QtCore import QObject, Signal


class Attention(QObject):
    """Selection, hover and the case shown."""

    selected = Signal(object)  # frozenset of ids
    hovered = Signal(str)  # id, or "" for none
    case_shown = Signal(int)

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.selection: frozenset[str] = frozenset()
        self.hover = ""
        self.case = 0

    def select(self, ids: Iterable[str]) -> None:
        """Make these the selection."""
        chosen = frozenset(ids)
        if chosen != self.selection:
            self.selection = chosen
            self.selected.emit(chosen)

    def look_at(self, id: str) -> None:
        """Hover one element; an empty id looks away."""
        if id != self.hover:
            self.hover = id
            self.hovered.emit(id)

    def show_case(self, case: int) -> None:
        """Show the figures of another case."""
        if case != self.case:
            self.case = case
            self.case_shown.emit(case)
