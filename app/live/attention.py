"""What the person looks at: one selection and one hovered element, shared by every panel."""

from collections.abc import Iterable

from PySide6.QtCore import QObject, Signal

from app.live.session import Session


class Attention(QObject):
    """Selection, hover and the case shown, which is one that the drawing of the session has."""

    selected = Signal(object)  # frozenset of ids
    hovered = Signal(str)  # id, or "" for none
    case_shown = Signal(int)

    def __init__(self, session: Session | None = None, parent: QObject | None = None) -> None:
        super().__init__(parent)
        if session is not None:
            session.changed.connect(lambda _change: self._keep_to(len(session.drawing.cases)))
            session.replaced.connect(lambda: self.show_case(0))
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

    def _keep_to(self, cases: int) -> None:
        self.show_case(min(self.case, cases - 1))
