"""When a solve happens, where, and whose figures are shown."""

from dataclasses import dataclass, field
from threading import Event, active_count

import pytest
from msgspec.structs import replace

from app.live.lane import Pace
from app.live.session import Session
from app.live.solving import Solving
from app.model import edits
from app.model.drawing import Drawing
from app.model.kinds import Joint, Supply, Transformer
from solver.status import Status


@dataclass(frozen=True)
class Answer:
    """Stands for an outcome: says which drawing it belongs to."""

    drawing: Drawing
    status: Status = Status.SOLVED
    cases = ("As drawn",)

    def solved(self, case):
        return self.status is Status.SOLVED

    @property
    def solved_cases(self):
        return (0,) if self.solved(0) else ()

    @property
    def tap(self):
        return self.drawing.elements["T1"].tap


@dataclass
class Bench:
    """A study whose pace and verdict the test decides."""

    runs: list = field(default_factory=list)
    curves: list = field(default_factory=list)
    told: list = field(default_factory=list)
    gate: Event | None = None
    status: Status = Status.SOLVED

    def run(self, drawing):
        self.runs.append(drawing)
        if self.gate is not None:
            assert self.gate.wait(5)
        return Answer(drawing, self.status)

    def tap_curve(self, drawing, id):
        self.curves.append((id, drawing))
        return (id, drawing)


def transformer(start, end):
    return Transformer(start=start, end=end, taps_up=9, taps_down=9)


@pytest.fixture
def bench():
    return Bench()


@pytest.fixture
def session(qapp):
    elements = {
        "J1": Joint(),
        "J2": Joint(x=8.0),
        "J3": Joint(x=16.0),
        "S1": Supply(node="J1"),
        "T1": transformer("J1", "J2"),
        "T2": transformer("J2", "J3"),
    }
    return Session(Drawing(elements=elements))


@pytest.fixture
def solving(session, bench):
    made = Solving(session, run=bench.run, tap_curve=bench.tap_curve)
    made.settle()
    made.solved.connect(lambda outcome: bench.told.append((outcome.tap, made.stale)))
    yield made
    made.stop()


@pytest.fixture
def slow(session, bench):
    """The same with every solve in the worker, held back by the gate."""
    made = Solving(session, run=bench.run, tap_curve=bench.tap_curve, pace=Pace(frame_s=-1.0))
    made.settle()
    made.solved.connect(lambda outcome: bench.told.append((outcome.tap, made.stale)))
    bench.gate = Event()
    yield made
    bench.gate.set()
    made.stop()


def tap(session, notch, id="T1"):
    session.edit("Tap", lambda d: edits.set_tap(d, id, notch))


def test_the_drawing_is_solved_at_the_start(session, bench, qtbot):
    made = Solving(session, run=bench.run, tap_curve=bench.tap_curve)
    assert made.outcome is None
    assert made.stale
    qtbot.waitUntil(lambda: made.outcome is not None)
    assert not made.stale
    made.stop()


def test_a_burst_is_one_solve_and_the_last_wins(session, solving, bench, qtbot):
    del bench.runs[:]
    for notch in (1, 2, 3):
        tap(session, notch)
    assert bench.runs == []
    assert solving.stale
    qtbot.waitUntil(lambda: not solving.stale)
    assert [d.elements["T1"].tap for d in bench.runs] == [3]
    assert bench.told == [(3, False)]


def test_geometry_alone_solves_nothing(session, solving, bench, qtbot):
    del bench.runs[:]
    session.edit("Move", lambda d: edits.move(d, ["J1"], 1, 0))
    assert not solving.stale
    qtbot.wait(5)
    assert bench.runs == []


def test_settle_finishes_at_once(session, solving, bench):
    tap(session, 2)
    solving.settle()
    assert solving.outcome.tap == 2
    assert not solving.stale


def test_the_worker_shows_old_figures_as_stale_then_the_newest_and_nothing_after(session, slow, bench, qtbot):
    del bench.runs[:]
    tap(session, 1)
    qtbot.waitUntil(lambda: len(bench.runs) == 1)
    for notch in (2, 3, 4):
        tap(session, notch)
        qtbot.wait(2)
    assert slow.outcome.tap == 0
    assert slow.stale
    bench.gate.set()
    qtbot.waitUntil(lambda: not slow.stale)
    qtbot.wait(20)
    assert [d.elements["T1"].tap for d in bench.runs] == [1, 4]
    assert bench.told == [(1, True), (4, False)]


def test_the_worker_drops_figures_of_an_older_topology(session, slow, bench, qtbot):
    tap(session, 1)
    qtbot.waitUntil(lambda: len(bench.runs) == 2)
    session.edit("Delete", lambda d: edits.remove(d, ["J3"]))
    bench.gate.set()
    qtbot.waitUntil(lambda: not slow.stale)
    assert [d.elements.keys() & {"T2"} for d in bench.runs[1:]] == [{"T2"}, set()]
    assert bench.told == [(1, False)]


def test_the_worker_drops_figures_of_another_file(session, slow, bench, qtbot):
    tap(session, 1)
    qtbot.waitUntil(lambda: len(bench.runs) == 2)
    elements = {**session.drawing.elements, "T1": transformer("J2", "J1")}
    session.open(replace(session.drawing, elements=elements))
    assert slow.outcome is None
    bench.gate.set()
    qtbot.waitUntil(lambda: not slow.stale)
    assert bench.told == [(0, False)]


def test_settle_takes_over_from_the_worker(session, slow, bench, qtbot):
    tap(session, 1)
    qtbot.waitUntil(lambda: len(bench.runs) == 2)
    tap(session, 2)
    bench.gate.set()
    slow.settle()
    assert not slow.stale
    qtbot.wait(20)
    assert bench.told == [(2, False)]


def test_no_thread_outlives_stop(session, slow, bench, qtbot):
    before = active_count()
    tap(session, 1)
    qtbot.waitUntil(lambda: active_count() == before + 1)
    bench.gate.set()
    slow.stop()
    assert active_count() == before
    qtbot.wait(5)
    assert bench.told == []


def test_fast_again_means_the_same_turn_again(session, bench, qtbot):
    pace = Pace(frame_s=0.01, last=(1.0, 1.0))
    made = Solving(session, run=bench.run, tap_curve=bench.tap_curve, pace=pace)
    qtbot.waitUntil(lambda: made.outcome is not None)
    assert not pace.slow
    made.stop()


def test_without_a_supply_no_old_figures_are_kept(session, solving, bench):
    bench.status = Status.INVALID
    session.edit("Delete", lambda d: edits.remove(d, ["S1"]))
    solving.settle()
    assert solving.outcome is solving.problem
    assert solving.figures is None


def test_not_solved_keeps_the_last_good_figures_as_stale(session, solving, bench):
    good = solving.outcome
    bench.status = Status.NO_OPERATING_POINT
    tap(session, 1)
    solving.settle()
    assert solving.outcome is good
    assert solving.stale
    assert solving.problem.status is Status.NO_OPERATING_POINT
    bench.status = Status.SOLVED
    tap(session, 2)
    solving.settle()
    assert solving.problem is None
    assert not solving.stale
    assert solving.outcome.tap == 2


def test_the_reference_stands_while_a_drag_goes_on_and_its_end_is_told(session, solving, bench):
    first = solving.outcome
    solving.begin_drag()
    tap(session, 1)
    solving.settle()
    assert solving.reference is first
    del bench.told[:]
    solving.end_drag()
    assert solving.reference is None
    assert bench.told == [(1, False)]


def test_a_tap_keeps_its_own_curve_and_ages_that_of_others(session, solving, bench):
    assert solving.curve("T1") is None
    assert solving.curve("T2") is None
    solving.settle()
    mine, other = solving.curve("T1"), solving.curve("T2")
    assert mine is not None
    tap(session, 3)
    solving.settle_solve()
    assert solving.curve_is_current("T1")
    assert not solving.curve_is_current("T2")
    assert solving.curve("T2") is other
    solving.settle()
    assert solving.curve("T1") is mine
    assert solving.curve("T2") is not other
    assert [id for id, _ in bench.curves] == ["T1", "T2", "T2"]


def test_a_curve_is_told_when_it_is_drawn_and_is_drawn_again_after_a_rest(session, solving, bench, qtbot):
    with qtbot.waitSignal(solving.curved) as told:
        solving.curve("T1")
    assert told.args == ["T1"]
    session.edit("Impedance", lambda d: edits.change(d, "T1", uk_percent=5.0))
    qtbot.waitUntil(lambda: not solving.stale)
    old = solving.curve("T1")
    assert old is not None
    qtbot.waitUntil(lambda: solving.curve_is_current("T1"))
    assert solving.curve("T1")[1].elements["T1"].uk_percent == 5.0


def test_curves_in_the_worker_do_not_hold_up_a_solve(session, slow, bench, qtbot):
    bench.gate.set()
    slow.curve("T1")
    tap(session, 1)
    qtbot.waitUntil(lambda: not slow.stale)
    qtbot.waitUntil(lambda: slow.curve("T1") is not None)
    assert slow.curve_is_current("T1")


def test_no_curve_for_what_is_no_transformer(solving, bench):
    assert solving.curve("J1") is None
    assert solving.curve("nothing") is None
    solving.settle()
    assert bench.curves == []


def test_a_solve_that_fits_in_a_frame_never_goes_grey(session, solving, bench, qtbot):
    told = []
    solving.went_stale.connect(lambda: told.append(solving.stale))
    tap(session, 1)
    qtbot.waitUntil(lambda: not solving.stale)
    qtbot.wait(80)
    assert told == []


def test_late_figures_go_grey_once(session, slow, bench, qtbot):
    told = []
    slow.went_stale.connect(lambda: told.append(slow.stale))
    tap(session, 1)
    tap(session, 2)
    qtbot.waitUntil(lambda: told == [True])
    bench.gate.set()
    qtbot.waitUntil(lambda: not slow.stale)
    qtbot.wait(80)
    assert told == [True]


def test_the_solve_comes_before_the_frame_that_shows_it(session, solving, qtbot):
    """A posted paint request is answered after the solve, so a step of a drag is painted once."""
    from PySide6.QtWidgets import QWidget

    painted = []

    class Paper(QWidget):
        def paintEvent(self, event):
            painted.append((session.drawing.elements["T1"].tap, solving.stale))

    paper = Paper()
    qtbot.addWidget(paper)
    session.changed.connect(lambda _: paper.update())
    paper.show()
    qtbot.waitUntil(lambda: painted != [])
    del painted[:]
    tap(session, 1)
    qtbot.waitUntil(lambda: painted != [])
    assert painted == [(1, False)]
