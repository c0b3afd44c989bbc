"""Only what is in sight is written at once; once the hand rests all figures are those of a fresh board."""

import textwrap

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app.canvas.board import Board
from app.canvas.theme import Theme
from app.canvas.view import BoardView
from app.canvas.wording import wrapped
from app.live.attention import Attention
from app.live.session import Session
from app.live.solving import Solving
from app.model import edits
from app.model.drawing import Drawing
from app.model.kinds import Busbar, Cable, Joint, Load, Supply, Transformer

STREET = Drawing(
    elements={
        "S1": Supply(node="B1", name="Intake", nominal_v=11000.0, dx=-5.0, dy=0.0),
        "B1": Busbar(name="Gate"),
        "T1": Transformer(start="B1", end="B2", rating_kva=160.0, uk_percent=4.0),
        "B2": Busbar(x=16.0, name="Yard"),
        "C1": Cable(start="B2", end="J1", length_m=90.0, rating_a=200.0),
        "J1": Joint(x=60.0),
        "C2": Cable(start="J1", end="J2", length_m=70.0, rating_a=200.0),
        "J2": Joint(x=140.0, name="Far end"),
        "L1": Load(node="J2", demand_kva=40.0),
    }
)


class Sight:
    """A board with a view that shows the far end of the street alone."""

    def __init__(self, qtbot) -> None:
        self.session = Session(STREET)
        self.solving = Solving(self.session)
        self.attention, theme = Attention(), Theme()
        self.board = Board(self.session, self.solving, self.attention, theme)
        self.view = BoardView(self.board, self.session, self.attention, theme)
        qtbot.addWidget(self.view)
        self.view.resize(500, 300)
        self.view.show()
        self.view.resetTransform()
        self.view.centerOn(self.board.item_of("J2"))
        self.solving.settle()

    def edit(self, change) -> None:
        assert self.session.edit("edit", change) == ""
        self.solving.settle_solve()

    def texts(self) -> dict[str, tuple[str, ...]]:
        return texts(self.board)


def texts(board: Board) -> dict[str, tuple[str, ...]]:
    blocks = (board.captions, board.tags)
    return {id: tuple(b[id].text for b in blocks if id in b) for id in board.items_by_id}


@pytest.fixture
def sight(qtbot):
    made = Sight(qtbot)
    yield made
    made.solving.stop()


def test_only_words_in_sight_are_written_at_once(sight):
    sight.board.write_rest()
    before = sight.texts()
    sight.edit(lambda d: edits.set_tap(d, "T1", -2))
    now = sight.texts()
    assert now["J2"] != before["J2"]
    assert now["S1"] == before["S1"]
    assert now["B2"] == before["B2"]
    assert {"S1", "B2", "T1"} <= sight.board.owed.keys()
    assert "J2" not in sight.board.owed


def test_at_rest_every_figure_is_that_of_a_fresh_board(sight, qtbot):
    for notch in (1, -2, 2):
        sight.edit(lambda d, n=notch: edits.set_tap(d, "T1", n))
    sight.edit(lambda d: edits.change(d, "L1", demand_kva=55.0, name="Mill"))
    sight.edit(lambda d: edits.set_case(d, 0, load_percent=60.0))
    qtbot.waitUntil(lambda: not sight.board.owed)
    fresh = Session(sight.session.drawing)
    solving = Solving(fresh)
    solving.settle_solve()
    board = Board(fresh, solving, Attention(), Theme())
    assert sight.texts() == texts(board)
    for id, item in board.items_by_id.items():
        assert item.standing is sight.board.item_of(id).standing
        assert getattr(item, "flow", None) == getattr(sight.board.item_of(id), "flow", None)
    solving.stop()


def test_words_that_come_to_life_in_sight_are_written_at_once(sight):
    sight.edit(lambda d: edits.remove(d, ["T1"]))
    assert sight.board.tags["J2"].text == "dead" or not sight.board.tags["J2"].lines
    sight.session.history.undo()
    sight.solving.settle_solve()
    assert "V" in sight.board.tags["J2"].text


def test_the_light_follows_the_selection_and_comes_back_with_an_undo(sight):
    sight.attention.select(["C2"])
    sight.attention.select(["C1"])
    assert not sight.board.item_of("C2").selected
    assert sight.board.item_of("C1").selected
    sight.session.edit("remove", lambda d: edits.remove(d, ["C1"]))
    sight.session.history.undo()
    assert not sight.board.item_of("C1").selected  # it was let go with the element
    sight.attention.select(["C1"])
    assert sight.board.item_of("C1").selected


@settings(max_examples=60)
@given(st.text(max_size=40))
def test_short_words_are_wrapped_as_long_ones_are(text):
    assert wrapped(text, 26) == textwrap.wrap(text, 26, max_lines=2, placeholder=" …")
