"""The case shown is always one of the drawing."""

import pytest
from msgspec.structs import replace

from app.live.attention import Attention
from app.live.session import Session
from app.model.drawing import Case, Drawing

ONE, TWO = (Case(),), (Case(), Case(name="Night"))


@pytest.fixture
def session(qapp):
    return Session(Drawing(cases=ONE))


def test_a_case_that_is_taken_back_is_shown_no_longer(session):
    attention, told = Attention(session), []
    attention.case_shown.connect(told.append)
    session.edit("Add a case", lambda d: replace(d, cases=TWO))
    attention.show_case(1)
    session.history.undo()
    assert attention.case == 0
    session.history.redo()
    assert told == [1, 0]


def test_another_drawing_begins_with_its_first_case(session):
    attention = Attention(session)
    session.open(Drawing(cases=TWO))
    attention.show_case(1)
    session.open(Drawing(cases=TWO))
    assert attention.case == 0
