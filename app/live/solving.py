"""The live solution: one solve per turn of the event loop, in a worker where a solve outlasts a frame."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, Qt, QTimer, Signal

from app.live.curves import Curves
from app.live.lane import Job, Lane, Pace
from app.live.session import Session
from app.model.drawing import Drawing
from app.model.edits import Change
from app.model.kinds import Supply
from app.study.outcome import Outcome

if TYPE_CHECKING:
    from app.study import TapCurve

PATIENCE_MS = 60  # figures that are older than this are shown grey; a shorter wait would only flicker
PAUSE_MS = 120  # the hand must rest this long before curves of other transformers are drawn anew


def _run(drawing: Drawing) -> Outcome:
    from app.study import run  # the window is up before the first solve loads the physics

    return run(drawing)


def _tap_curve(drawing: Drawing, id: str) -> TapCurve:
    from app.study import tap_curve

    return tap_curve(drawing, id)


class Solving(QObject):
    """Listens to the session, solves, tells. Latest wins.

    newest: the newest outcome, whatever its status
    reference: the outcome when the drag began, while one goes on, else None
    """

    solved = Signal(object)  # Outcome, solved or not; also when a drag ends, as the changes shown go away
    went_stale = Signal()  # told when old figures have stood for longer than the eye should be kept waiting
    curved = Signal(str)  # the tap curve of this transformer is new
    _arrived = Signal(object)  # Job, from the worker
    _asked = Signal()

    newest: Outcome | None
    reference: Outcome | None

    def __init__(
        self,
        session: Session,
        parent: QObject | None = None,
        *,
        run: Callable[[Drawing], Outcome] = _run,
        tap_curve: Callable[[Drawing, str], TapCurve] = _tap_curve,
        pace: Pace | None = None,
    ) -> None:
        super().__init__(parent)
        self._session, self._run, self._tap_curve = session, run, tap_curve
        self._pace = pace or Pace()
        self._lane = Lane(self._arrived.emit)
        self._curves = Curves(session.drawing)
        self._waiting = False
        self._count = 0  # counts the drawings that differ electrically
        self._case = 0
        self._forget()
        self._stopped = False
        self._rest = QTimer(self, singleShot=True, interval=PAUSE_MS)
        self._rest.timeout.connect(self._begin_curve)
        self._late = QTimer(self, singleShot=True, interval=PATIENCE_MS)
        self._late.timeout.connect(self.went_stale)
        self._asked.connect(self._begin, Qt.ConnectionType.QueuedConnection)
        self._arrived.connect(self._land, Qt.ConnectionType.QueuedConnection)
        session.changed.connect(self._follow)
        session.replaced.connect(self._start_over)
        self.destroyed.connect(self._lane.close)
        self._ask()

    @property
    def outcome(self) -> Outcome | None:
        """What is shown of the case looked at: the newest outcome where the case is solved in it or nothing
        feeds the drawing, else the last in which it was, which is `stale`, else the newest all the same."""
        newest = self.newest
        if newest is None or newest.solved(self._case_of(newest)) or not self._is_fed():
            return newest
        last = self._good.get(self._case_of(newest))
        return newest if last is None else last

    @property
    def problem(self) -> Outcome | None:
        """The newest outcome where the case looked at is not solved in it, else None."""
        newest = self.newest
        return None if newest is None or newest.solved(self._case_of(newest)) else newest

    @property
    def figures(self) -> Outcome | None:
        """The outcome shown, where it has figures of the case looked at."""
        shown = self.outcome
        return shown if shown is not None and shown.solved(self._case_of(shown)) else None

    @property
    def stale(self) -> bool:
        """Whether the figures shown do not belong to the drawing as it stands."""
        return self._aged or self.outcome is not self.newest

    def look(self, case: int) -> None:
        """Tell of another case: of one that is not solved its last figures stand, grey."""
        self._case = case

    def _case_of(self, outcome: Outcome) -> int:
        return min(self._case, len(outcome.cases) - 1)

    def begin_drag(self) -> None:
        """Remember the figures as they stand, for the change shown while dragging."""
        self.settle_solve()
        self.reference = self.outcome

    def end_drag(self) -> None:
        """Forget them."""
        if self.reference is not None:
            self.reference = None
            if self.outcome is not None:
                self.solved.emit(self.outcome)

    def curve(self, id: str) -> TapCurve | None:
        """The newest tap curve known of a transformer; a newer one is drawn soon where it has aged."""
        if self._curves.want(id) and not self._rest.isActive():
            self._rest.start(0 if self._curves.known(id) is None else PAUSE_MS)
        return self._curves.known(id)

    def curve_is_current(self, id: str) -> bool:
        """True where the curve belongs to the drawing as it stands."""
        return self._curves.current(id)

    def settle(self) -> None:
        """Finish whatever is pending at once (tests, export, exit)."""
        self.settle_solve()
        while (id := self._curves.wanted()) is not None:
            self._take(self._here(self._curve_job(id)))

    def settle_solve(self) -> None:
        """Finish a pending solve at once; curves may wait."""
        job = self._lane.land()
        if job is not None and not self._owed:
            self._take(job)
        if self._owed:
            self._take(self._here(self._solve_job()))

    def stop(self) -> None:
        """Stop: nothing is solved or told after this."""
        self._stopped = True
        self._rest.stop()
        self._late.stop()
        self._lane.close()

    # what happens -------------------------------------------------------------------------------

    def _forget(self) -> None:
        self.newest = self.reference = None
        self._good: dict[int, Outcome] = {}  # by case, the last outcome in which it was solved
        self._aged = True
        self._shape = self._count  # since which of them the topology stands
        self._owed = True

    def _start_over(self) -> None:
        self._count += 1
        self._forget()
        self._curves = Curves(self._session.drawing)
        self.went_stale.emit()
        self._ask()

    def _follow(self, change: Change) -> None:
        self._curves.follow(self._session.drawing, change)
        if not (change.topology or change.parameter or change.rest):
            return
        self._count += 1
        if change.topology or change.rest:
            self._shape = self._count
        self._owed = self._aged = True
        self._rest.stop()
        self._ask()

    def _ask(self) -> None:
        """Solve in this turn of the event loop: a posted call comes after the rest of a burst of input and
        before the frame is painted, so that a step of a drag is painted once."""
        if not self._waiting:
            self._waiting = True
            self._asked.emit()

    def _begin(self) -> None:
        self._waiting = False
        if self._stopped or not self._owed:
            return
        if not self._late.isActive() and (self._pace.slow or self._lane.flight is not None):
            self._late.start()
        if self._lane.flight is not None:
            return
        job = self._solve_job()
        if self._pace.slow:
            self._lane.start(job)
        else:
            self._take(self._here(job))

    def _begin_curve(self) -> None:
        if self._lane.flight is not None or self._owed:
            return  # asked again when the solve has landed
        id = self._curves.wanted()
        if id is None:
            return
        job = self._curve_job(id)
        if self._pace.slow:
            self._lane.start(job)
        else:
            self._take(self._here(job))

    def _solve_job(self) -> Job:
        self._owed = False
        drawing = self._session.drawing
        return Job("", self._count, lambda: self._run(drawing))

    def _curve_job(self, id: str) -> Job:
        drawing = self._session.drawing
        return Job(id, self._curves.begin(id), lambda: self._tap_curve(drawing, id))

    @staticmethod
    def _here(job: Job) -> Job:
        job.run()
        return job

    def _land(self, job: Job) -> None:
        if job is not self._lane.flight:
            return  # `settle` has taken it already
        self._lane.land()
        if self._owed:
            self._ask()
        self._take(job)

    def _take(self, job: Job) -> None:
        if job.key:
            self._take_curve(job)
        else:
            self._take_outcome(job)
        if self._curves.wanted() is not None and not self._rest.isActive():
            self._rest.start(0 if job.key else PAUSE_MS)

    def _take_outcome(self, job: Job) -> None:
        self._pace.note(job.seconds)
        outcome: Outcome = job.answer()
        if job.number < self._shape:
            return
        self.newest, self._aged = outcome, job.number < self._count
        kept = {c: o for c, o in self._good.items() if o.cases[c : c + 1] == outcome.cases[c : c + 1]}
        self._good = kept | dict.fromkeys(outcome.solved_cases, outcome)
        if not self.stale or self.problem is not None:
            self._late.stop()
        if self.stale:
            self.went_stale.emit()
        self.solved.emit(outcome)

    def _is_fed(self) -> bool:
        """False where the drawing has no supply: old figures would stand on dead conductors."""
        return any(isinstance(one, Supply) for one in self._session.drawing.elements.values())

    def _take_curve(self, job: Job) -> None:
        if self._curves.put(job.key, job.number, job.answer()):
            self.curved.emit(job.key)
