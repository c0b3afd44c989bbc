"""A year on demand, in a worker: it tells how far it is, can be stopped, ages when the drawing changes."""

from __future__ import annotations

from collections.abc import Callable
from threading import Event
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, Qt, Signal

from app.live.lane import Job, Lane
from app.live.session import Session
from app.model.drawing import Drawing
from app.model.edits import diff

if TYPE_CHECKING:
    from app.study.year_outcome import YearOutcome

Progress = Callable[[int, int], bool]


def _run(drawing: Drawing, progress: Progress) -> YearOutcome:
    from app.study.year import run_year  # loaded when the first year is asked for

    return run_year(drawing, progress)


class YearRun(QObject):
    """year: the newest whole year, or None; of: the drawing it belongs to. stale: the drawing has changed
    since in what bears on it. running: one is being solved."""

    progressed = Signal(int, int)  # points done, points in all
    changed = Signal()  # begun, finished, stopped, aged or forgotten
    _told = Signal(int, int)
    _arrived = Signal(object)  # Job, from the worker

    def __init__(
        self,
        session: Session,
        parent: QObject | None = None,
        *,
        run: Callable[[Drawing, Progress], YearOutcome] = _run,
    ) -> None:
        super().__init__(parent)
        self._session, self._run = session, run
        self._lane = Lane(self._arrived.emit)
        self._halt = Event()
        self._number = 0
        self.year: YearOutcome | None = None
        self.of: Drawing | None = None
        self.was_stopped = False  # the last one that was asked for
        self._told.connect(self._tell, Qt.ConnectionType.QueuedConnection)
        self._arrived.connect(self._land, Qt.ConnectionType.QueuedConnection)
        session.changed.connect(lambda _change: self.changed.emit())
        session.replaced.connect(self._forget)
        self.destroyed.connect(self._lane.close)

    @property
    def running(self) -> bool:
        """True while a year is being solved."""
        return self._lane.flight is not None

    @property
    def stale(self) -> bool:
        """True where the year is of a drawing that has changed since in what bears on it."""
        return self.of is not None and bears_on_year(self.of, self._session.drawing)

    def start(self) -> None:
        """Solve the drawing as it stands; one that is under way is stopped first."""
        self._end()
        self.was_stopped = False
        drawing, halt = self._session.drawing, Event()
        self._halt, self._number = halt, self._number + 1

        def progress(done: int, whole: int) -> bool:
            self._told.emit(done, whole)
            return not halt.is_set()

        self._lane.start(Job("year", self._number, lambda: (drawing, self._run(drawing, progress))))
        self.changed.emit()

    def cancel(self) -> None:
        """Stop the one under way after its next block; what there was before stays."""
        if self.running:
            self._halt.set()
            self.was_stopped = True
            self.changed.emit()

    def settle(self) -> None:
        """Wait for the one under way (tests, exit)."""
        job = self._lane.land()
        if job is not None:
            self._take(job)

    def stop(self) -> None:
        """Nothing is solved or told after this."""
        self._halt.set()
        self._lane.close()

    def _end(self) -> None:
        self._halt.set()
        self._lane.land()

    def _forget(self) -> None:
        self._end()
        self.year = self.of = None
        self.was_stopped = False
        self.changed.emit()

    def _tell(self, done: int, whole: int) -> None:
        if self.running:
            self.progressed.emit(done, whole)

    def _land(self, job: Job) -> None:
        if job is self._lane.flight:
            self._lane.land()
            self._take(job)

    def _take(self, job: Job) -> None:
        drawing, year = job.answer()
        if not year.stopped:
            self.of, self.year, self.was_stopped = drawing, year, False
        self.changed.emit()


def bears_on_year(before: Drawing, after: Drawing) -> bool:
    """True where the year of two drawings may differ; places, cases and the head of the sheet do not bear."""
    if before is after:
        return False
    change = diff(before, after)
    rest = ("limits", "year", "profiles", "frequency_hz")
    return bool(
        change.topology
        or change.parameter
        or any(getattr(before, name) != getattr(after, name) for name in rest)
    )
