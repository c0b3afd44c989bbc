"""Getting about on the paper."""

import pytest
from hand_desk import CTRL, LEFT, NONE, SHIFT, blank, desk
from PySide6.QtCore import QEvent, QPoint, QPointF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QLineEdit

__all__ = ["blank", "desk"]


def under(desk, px):
    return desk.view.paper(QPointF(px))


def test_zoom_keeps_the_point_under_the_hand_to_a_pixel(desk):
    for px in (QPoint(100, 90), QPoint(1111, 640), QPoint(600, 350)):
        for clicks in (1, 3, -2, -5, 1):
            before = under(desk, px)
            scale = desk.view.scale_now()
            desk.wheel(px, clicks, CTRL)
            assert desk.view.scale_now() != scale
            strayed = under(desk, px) - before
            assert abs(strayed.x()) * desk.view.scale_now() <= 1.0
            assert abs(strayed.y()) * desk.view.scale_now() <= 1.0


def test_zoom_has_ends(desk):
    desk.wheel(QPoint(300, 300), 200, CTRL)
    assert desk.view.scale_now() == pytest.approx(8.0)
    desk.wheel(QPoint(300, 300), -400, CTRL)
    assert desk.view.scale_now() == pytest.approx(0.08)


def test_plus_and_minus_zoom_and_f_fits(desk):
    fitted = desk.view.scale_now()
    desk.key(Qt.Key.Key_Plus)
    assert desk.view.scale_now() == pytest.approx(fitted * 1.25)
    desk.key(Qt.Key.Key_Minus)
    desk.key(Qt.Key.Key_Minus, CTRL)
    assert desk.view.scale_now() == pytest.approx(fitted / 1.25)
    desk.wheel(QPoint(10, 10), 9)
    desk.key(Qt.Key.Key_F)
    assert desk.view.scale_now() == pytest.approx(fitted)
    shown = desk.view.mapToScene(desk.view.viewport().rect()).boundingRect()
    assert shown.contains(desk.board.itemsBoundingRect())


def test_the_wheel_scrolls_and_shift_goes_sideways(desk):
    at = QPoint(500, 60)
    before = under(desk, at)
    desk.wheel(at, -1)
    assert under(desk, at).y() > before.y()
    assert under(desk, at).x() == pytest.approx(before.x())
    desk.wheel(at, -1, SHIFT)
    assert under(desk, at).x() > before.x()


def test_space_or_the_middle_button_moves_the_paper(desk):
    port = desk.view.viewport()
    held = under(desk, QPoint(500, 300))
    QTest.keyPress(desk.view, Qt.Key.Key_Space)
    assert port.cursor().shape() == Qt.CursorShape.OpenHandCursor
    QTest.mousePress(port, LEFT, NONE, QPoint(500, 300))
    QTest.mouseMove(port, QPoint(560, 340))
    QTest.mouseRelease(port, LEFT, NONE, QPoint(560, 340))
    QTest.keyRelease(desk.view, Qt.Key.Key_Space)
    assert (under(desk, QPoint(560, 340)) - held).manhattanLength() < 2
    QTest.mousePress(port, Qt.MouseButton.MiddleButton, NONE, QPoint(560, 340))
    QTest.mouseMove(port, QPoint(500, 300))
    QTest.mouseRelease(port, Qt.MouseButton.MiddleButton, NONE, QPoint(500, 300))
    assert (under(desk, QPoint(500, 300)) - held).manhattanLength() < 2
    assert desk.steps == 0
    assert desk.attention.selection == frozenset()


def test_an_empty_board_fits_too(blank):
    blank.view.fit()
    assert 0.1 < blank.view.scale_now() < 2


def whole_in_view(desk):
    box = desk.view.mapFromScene(desk.board.content()).boundingRect()
    return desk.view.viewport().rect().contains(box)


def test_a_fitted_drawing_stays_fitted_while_the_view_changes_size(desk):
    for width, height in ((500, 300), (1600, 900), (700, 800)):
        desk.view.resize(width, height)
        QApplication.processEvents()
        assert whole_in_view(desk)
        held = desk.view.transform().m11()
        desk.view.fit()
        assert desk.view.transform().m11() == held


def test_a_zoom_or_a_scroll_ends_that_until_the_next_fit(desk):
    middle = desk.view.viewport().rect().center()
    for mods in (NONE, CTRL):
        desk.view.fit()
        desk.wheel(middle, 1, mods)
        held = desk.view.transform().m11()
        desk.view.resize(desk.view.width() - 300, 400)
        QApplication.processEvents()
        assert desk.view.transform().m11() == held
        desk.view.resize(1200, 700)
        QApplication.processEvents()
    desk.key(Qt.Key.Key_F)
    desk.view.resize(600, 400)
    QApplication.processEvents()
    assert whole_in_view(desk)


def test_nothing_stays_lit_when_the_pointer_leaves(desk):
    desk.hover(0, 0)
    assert desk.attention.hover == "B1"
    lit = desk.view.viewport().grab().toImage()
    QApplication.sendEvent(desk.view.viewport(), QEvent(QEvent.Type.Leave))
    assert desk.attention.hover == ""
    assert not desk.view.hand_is_here()
    assert desk.view.viewport().grab().toImage() != lit
    assert not desk.board.item_of("B1").hovered


def test_the_board_takes_the_keyboard_back(desk, qtbot):
    field = QLineEdit(desk.view)
    field.show()
    desk.view.activateWindow()
    field.setFocus()
    qtbot.waitUntil(field.hasFocus)
    desk.view.take_focus()
    assert desk.view.hasFocus()
