"""What is taken off the paper leaves nothing behind that the pointer could still find."""

from hand_desk import CTRL, blank, desk
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from app.model import edits
from app.model.kinds import Joint, Load, Transformer

__all__ = ["blank", "desk"]
KEY = Qt.Key


def sweep(desk, *heights):
    """The pointer all over the paper."""
    for y in heights:
        for x in range(-8, 46, 3):
            desk.hover(x, y)


def test_all_pasted_and_undone_again_and_again(desk):
    before = desk.drawing
    for _ in range(8):
        desk.click(-7, -6)
        for key in (KEY.Key_A, KEY.Key_C, KEY.Key_V):
            desk.key(key, CTRL)
            desk.solving.settle()
        assert len(desk.board.ladders) == 2
        desk.key(KEY.Key_Z, CTRL)
        if desk.drawing != before:  # where no menu hears the key
            desk.undo()
        desk.solving.settle()
        sweep(desk, -8, -4, 0)
        desk.click(-7, -6)
        assert desk.drawing == before
        assert not desk.board.ladders


def test_a_drawn_transformer_undone_under_the_hand(blank):
    desk = blank
    desk.session.edit("Begin", lambda d: edits.put(d, {"J1": Joint(), "J2": Joint(x=12.0)}))
    before = desk.drawing
    for _ in range(8):
        made = {"T1": Transformer(start="J1", end="J2"), "L1": Load(node="J2")}
        desk.session.edit("Draw", lambda d, made=made: edits.put(d, made))
        desk.solving.settle()
        desk.click(6, 0)
        ladder = desk.board.ladder_of("T1")
        rail = desk.view.mapFromScene(ladder.mapToScene(ladder.shape().boundingRect().center()))
        QTest.mouseMove(desk.view.viewport(), rail)
        QTest.mouseClick(desk.view.viewport(), Qt.MouseButton.LeftButton, pos=rail)
        QApplication.processEvents()
        while desk.drawing != before:
            desk.undo()
        sweep(desk, -6, -3, 0, 2)
        desk.click(6, -4)
        assert not desk.board.ladders


def test_a_pressed_ladder_may_go_while_it_is_held(desk):
    desk.select("T2")
    ladder = desk.board.ladder_of("T2")
    rail = desk.view.mapFromScene(ladder.mapToScene(ladder.shape().boundingRect().center()))
    del ladder
    QTest.mouseMove(desk.view.viewport(), rail)
    QTest.mousePress(desk.view.viewport(), Qt.MouseButton.LeftButton, pos=rail)
    desk.session.edit("Delete T2", lambda d: edits.remove(d, ["T2"]))
    sweep(desk, -4, 0)
    QTest.mouseRelease(desk.view.viewport(), Qt.MouseButton.LeftButton, pos=rail)
    sweep(desk, -4, 0)
    assert not desk.board.ladders


def test_a_load_is_changed_a_transformer_selected_and_the_change_undone(desk):
    desk.session.edit("Change", lambda d: edits.change(d, "L1", demand_kva=40.0))
    desk.solving.settle()
    desk.select("T2")
    for _ in range(3):
        QTest.qWait(20)
        desk.solving.settle()
    desk.undo()
    desk.solving.settle()
    assert desk.board.ladder_of("T2").prospect is not None
