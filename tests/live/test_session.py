"""History: gestures merge, come-backs leave nothing, a save is a wall between steps."""

import pytest

from app.live.session import Session
from app.model import edits
from app.model.drawing import Drawing
from app.model.edits import EditRefused
from app.model.kinds import Joint, Transformer


@pytest.fixture
def session(qapp):
    elements = {"J1": Joint(), "J2": Joint(x=8.0), "T1": Transformer(start="J1", end="J2")}
    return Session(Drawing(elements=elements))


def tap(session, notch, gesture=0):
    return session.edit(f"Tap of T1 to {notch}", lambda d: edits.set_tap(d, "T1", notch), gesture)


def test_forty_notches_of_one_gesture_are_one_step_and_undo_is_exact(session):
    before, gesture = session.drawing, session.new_gesture()
    for k in range(40):
        tap(session, 1 + k % 2, gesture)
    assert session.history.count() == 1
    after = session.drawing
    assert after.elements["T1"].tap == 2
    session.history.undo()
    assert session.drawing == before
    session.history.redo()
    assert session.drawing == after


def test_a_gesture_that_comes_back_leaves_nothing_and_no_unsaved_mark(session):
    gesture = session.new_gesture()
    tap(session, -1, gesture)
    assert not session.history.isClean()
    tap(session, 0, gesture)
    assert session.history.count() == 0
    assert session.history.isClean()
    tap(session, 1, gesture)
    assert session.history.count() == 1
    session.history.undo()
    assert session.drawing.elements["T1"].tap == 0


def test_two_gestures_are_two_steps_and_the_text_is_the_last(session):
    tap(session, 1, session.new_gesture())
    second = session.new_gesture()
    tap(session, 2, second)
    tap(session, -2, second)
    assert session.history.count() == 2
    assert session.history.undoText() == "Tap of T1 to -2"


def test_a_save_in_the_middle_of_a_gesture_starts_a_new_step(session):
    gesture = session.new_gesture()
    tap(session, 1, gesture)
    session.history.setClean()
    tap(session, 2, gesture)
    assert session.history.count() == 2
    session.history.undo()
    assert session.drawing.elements["T1"].tap == 1
    assert session.history.isClean()


def test_a_gesture_back_at_the_saved_place_is_clean_only_where_it_is(session):
    gesture = session.new_gesture()
    tap(session, 1, gesture)
    session.history.setClean()
    tap(session, 0, gesture)
    assert session.history.count() == 2
    assert not session.history.isClean()


def test_a_refusal_pushes_nothing_and_is_answered(session):
    def refuse(drawing):
        raise EditRefused("T1: Tap is 9, allowed is −2 to +2.")

    assert session.edit("Tap", refuse) == "T1: Tap is 9, allowed is −2 to +2."
    assert session.history.count() == 0


def test_an_edit_that_changes_nothing_pushes_nothing(session):
    assert tap(session, 0) == ""
    assert session.history.count() == 0


def test_a_step_may_be_named_by_what_came_of_it(session):
    session.edit(lambda after: f"{len(after.elements)} left", lambda d: edits.remove(d, {"T1"}))
    assert session.history.undoText() == "2 left"


def test_a_new_drawing_has_no_history(session, qtbot):
    tap(session, 1)
    with qtbot.waitSignal(session.replaced):
        session.open(Drawing())
    assert session.history.count() == 0
    assert session.history.isClean()
    assert session.drawing == Drawing()
