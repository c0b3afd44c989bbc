"""The board inside its window: first start fits the screen, and the drawing fits the board."""

from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from app.live.preferences import Preferences
from app.window import Window

SAMPLE = Path(__file__).parents[2] / "samples" / "fernhollow_pair.farend"


@pytest.fixture
def window(qtbot, tmp_path):
    made = Window(Preferences(tmp_path / "likes.ini"), tmp_path / "recovery")
    qtbot.addWidget(made)
    yield made
    made.session.history.setClean()
    made.close()


def test_a_first_start_is_no_larger_than_the_screen(window):
    room = window.screen().availableSize()
    window.show()
    assert window.width() <= max(room.width(), window.minimumWidth())
    assert window.height() <= max(room.height(), window.minimumHeight())


def test_the_drawing_fits_whatever_size_the_board_comes_to(window, qtbot):
    window.show()
    window.menus.open_path(SAMPLE)
    qtbot.waitUntil(lambda: window.view.fitted)
    for size in ((1440, 900), (1024, 640)):
        window.resize(*size)
        QApplication.processEvents()
        box = window.view.mapFromScene(window.board.content()).boundingRect()
        assert window.view.viewport().rect().contains(box)
    window.middle.setSizes([150, 500])
    QApplication.processEvents()
    box = window.view.mapFromScene(window.board.content()).boundingRect()
    assert window.view.viewport().rect().contains(box)


def test_escape_in_a_field_of_the_card_gives_the_keyboard_back_to_the_board(window, qtbot):
    window.show()
    window.activateWindow()
    qtbot.waitUntil(window.isActiveWindow)
    window.menus.open_path(SAMPLE)
    window.attention.select(["T2"])
    for typed in ("", "12"):
        window.view.setFocus()
        QTest.keyClick(window.view, Qt.Key.Key_Return)
        field = QApplication.focusWidget()
        assert window.card.isAncestorOf(field)
        QTest.keyClicks(field, typed)
        if typed:
            QTest.keyClick(field, Qt.Key.Key_Escape)  # the first puts the value back
            assert QApplication.focusWidget() is field
        QTest.keyClick(field, Qt.Key.Key_Escape)
        assert window.view.hasFocus()
        assert window.attention.selection == {"T2"}
    assert not window.session.history.canUndo()
