"""The live solution: one solve per turn of the event loop, in a worker where a solve outlasts a frame."""

from PySide6.QtCore import QObject, Signal

from app.live.session import Session
from app.study.outcome import Outcome


class Solving(QObject):
    """Listens to the session, solves, tells. Latest wins.

    outcome: the newest outcome whose status is solved, or the first unsolved one; shown grey when `stale`
    problem: the newest outcome when it is not solved, else None
    stale: the figures shown do not belong to the drawing as it stands
    reference: the outcome when the drag began, while one goes on, else None
    """

    solved = Signal(object)  # Outcome, solved or not
    went_stale = Signal()

    outcome: Outcome | None
    problem: Outcome | None
    stale: bool
    reference: Outcome | None

    def __init__(self, session: Session, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.outcome = self.problem = self.reference = None
        self.stale = True

    def begin_drag(self) -> None:
        """Remember the figures as they stand, for the change shown while dragging."""

    def end_drag(self) -> None:
        """Forget them."""

    def settle(self) -> None:
        """Finish whatever is pending at once (tests, export, exit)."""
