"""A lane for slow work: one job in flight, the newest waits, what is overtaken never begins. No Qt."""

from collections.abc import Callable
from dataclasses import dataclass, field
from threading import Lock, Thread
from time import perf_counter
from typing import Any

FRAME_S = 0.016  # work that lasts longer than this would be felt by the hand


@dataclass
class Job:
    """One piece of work on a frozen drawing; `key` says what it is, `number` how new it is."""

    key: str
    number: int
    work: Callable[[], Any]
    result: Any = None
    error: BaseException | None = None
    seconds: float = 0.0

    def run(self) -> None:
        """Do the work and keep what came of it, an error included."""
        begun = perf_counter()
        try:
            self.result = self.work()
        except BaseException as error:
            self.error = error
        self.seconds = perf_counter() - begun

    def answer(self) -> Any:
        """The result; an error of the work is raised here, in the caller's thread."""
        if self.error is not None:
            raise self.error
        return self.result


@dataclass
class Pace:
    """Whether work fits in a frame. Two slow jobs in a row say no, one fast job says yes again."""

    frame_s: float = FRAME_S
    last: tuple[float, float] = (0.0, 0.0)

    @property
    def slow(self) -> bool:
        """True while work belongs in a worker."""
        return min(self.last) > self.frame_s

    def note(self, seconds: float) -> None:
        """Remember how long the newest job took."""
        self.last = (self.last[1], seconds)


@dataclass
class Lane:
    """Runs one job at a time in a thread that ends with it, so that none is left behind."""

    done: Callable[[Job], None]  # called in the worker's thread
    flight: Job | None = None
    _thread: Thread | None = None
    _gate: Lock = field(default_factory=Lock)
    _closed: bool = False

    def start(self, job: Job) -> None:
        """Send a job off; the lane must be free."""
        if self.flight is not None:
            raise RuntimeError("the lane is taken")
        self.flight = job
        self._thread = Thread(target=self._run, args=(job,), name="farend-solve")
        self._thread.start()

    def land(self) -> Job | None:
        """Wait for the job in flight, if any, and free the lane."""
        job, thread = self.flight, self._thread
        if thread is not None:
            thread.join()
        self.flight = self._thread = None
        return job

    def close(self) -> None:
        """Let nothing be told any more and wait for the thread to end."""
        with self._gate:
            self._closed = True
        self.land()

    def _run(self, job: Job) -> None:
        job.run()
        with self._gate:
            if not self._closed:
                self.done(job)
