"""Moving laterals and loads to other phases by key and by menu: one action, one undo step."""

import pytest
from hand_desk import SHIFT, Desk, blank
from phase_drawings import camp
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QMenu

from app.canvas.tools_keys import SHORTCUTS
from app.canvas.tools_menu import menu_at
from app.model.kinds import Cable, Load

__all__ = ["blank"]
Key = Qt.Key


@pytest.fixture
def desk(qtbot):
    made = Desk(camp())
    qtbot.addWidget(made.view)
    yield made
    made.solving.stop()


def phases(desk, *ids: str) -> list[str]:
    return [desk.drawing.elements[i].phases for i in ids]


def test_a_lateral_goes_to_another_phase_with_one_key_and_back_with_one_undo(desk):
    desk.click(34, -8)
    assert desk.attention.selection == {"N"}
    desk.key(Key.Key_B, SHIFT)
    assert phases(desk, "N", "N2C") == ["B", "all"]  # what lies beyond follows by itself
    assert desk.last == "Phases of N to B"
    assert desk.board.items_by_id["N"].phases.letters.startswith("B")
    desk.undo()
    assert phases(desk, "N") == ["A"]


def test_p_goes_round_all_choices_and_shift_p_back(desk):
    desk.select("W")
    seen = []
    for _ in range(7):
        desk.key(Key.Key_P)
        seen += phases(desk, "W")
    assert seen == ["AB", "BC", "CA", "all", "A", "B", "C"]
    desk.key(Key.Key_P, SHIFT)
    assert phases(desk, "W") == ["B"]


def test_several_at_once_are_one_step_and_what_has_no_phases_is_left_alone(desk):
    desk.select("N", "W", "L2", "T1", "LODGE", "S1")
    steps = desk.steps
    desk.key(Key.Key_C, SHIFT)
    assert phases(desk, "N", "W", "L2") == ["C", "C", "C"]
    assert phases(desk, "T1") == ["all"]  # a three-phase unit has no choice
    assert desk.steps == steps + 1
    assert desk.last == "Phases of 3 elements to C"


def test_shares_go_with_a_load_that_leaves_three_phases(qtbot):
    made = Desk(camp(L1=Load(node="LODGE", share_a_percent=50.0, share_b_percent=30.0, dx=-4, dy=6)))
    qtbot.addWidget(made.view)
    made.select("L1")
    made.key(Key.Key_A, SHIFT)
    load = made.drawing.elements["L1"]
    assert (load.phases, load.share_a_percent, load.share_b_percent) == ("A", None, None)
    assert not made.refusals
    made.solving.stop()


def test_the_line_just_drawn_takes_its_phase_while_its_far_node_is_selected(blank):
    blank.key(Key.Key_B)
    blank.key(Key.Key_Return)
    blank.key(Key.Key_Right, Qt.KeyboardModifier.AltModifier)
    blank.key(Key.Key_B, SHIFT)
    lines = [e for e in blank.drawing.elements.values() if isinstance(e, Cable)]
    assert [line.phases for line in lines] == ["B"]


def test_where_nothing_has_phases_the_keys_do_nothing(desk):
    desk.select("LODGE")
    before = desk.drawing
    desk.key(Key.Key_A, SHIFT)
    desk.key(Key.Key_P)
    assert desk.drawing is before


def test_the_letters_alone_still_take_parts(desk):
    desk.select("N")
    desk.key(Key.Key_B)
    assert phases(desk, "N") == ["A"]


def unfolded(desk, x, y) -> tuple[QMenu, dict]:
    menu = menu_at(desk.view, desk.view.mapToScene(desk.px(x, y)))
    choices = next(m for m in menu.findChildren(QMenu) if m.title() == "Phases")
    return menu, {a.text(): a for a in choices.actions()}


def test_the_menu_offers_the_phases_with_those_that_stand_ticked(desk):
    menu, offered = unfolded(desk, 34, -8)
    assert list(offered) == ["As many as reach it", "A", "B", "C", "AB", "BC", "CA"]
    assert [text for text, action in offered.items() if action.isChecked()] == ["A"]
    offered["C"].trigger()
    assert phases(desk, "N") == ["C"]
    menu.deleteLater()


def test_the_menu_of_several_moves_them_all(desk):
    desk.select("N", "W")
    menu, offered = unfolded(desk, 34, -8)
    assert not any(action.isChecked() for action in offered.values())
    offered["B"].trigger()
    assert phases(desk, "N", "W") == ["B", "B"]
    menu.deleteLater()


def test_a_node_offers_no_phases(desk):
    menu = menu_at(desk.view, desk.view.mapToScene(desk.px(40, -8)))
    assert "Phases" not in [m.title() for m in menu.findChildren(QMenu)]
    menu.deleteLater()


def test_the_list_of_keys_says_how(desk):
    keys = dict(SHORTCUTS)
    assert {"Shift + A, B, C", "P, Shift + P"} <= set(keys)
    QTest.qWait(1)
