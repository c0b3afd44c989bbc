"""Panels inside the window: what they ask of the board and of the files."""

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from app.live.preferences import Preferences
from app.window import Window


@pytest.fixture
def window(qtbot, tmp_path):
    made = Window(Preferences(tmp_path / "likes.ini"), tmp_path / "recovery")
    qtbot.addWidget(made)
    made.show()
    yield made
    made.session.history.setClean()
    made.close()


def test_a_recent_drawing_that_is_gone_is_told_and_drops_off_the_list(window, tmp_path, monkeypatch):
    told = []
    monkeypatch.setattr(window.menus.dialogs, "tell", told.append)
    gone, bad = tmp_path / "gone.farend", tmp_path / "bad.farend"
    bad.write_text("{")
    for path in (gone, bad):
        window.preferences.add_recent(path)
        assert not window.menus.open_path(path)
    assert len(told) == 2
    assert window.preferences.recent == [bad]


def test_the_tool_goes_back_with_the_part(window):
    tile = window.shelf.tiles[3]
    QTest.mouseClick(tile, Qt.MouseButton.LeftButton)
    assert window.view.tool is not window.view.idle
    QTest.mouseClick(tile, Qt.MouseButton.LeftButton)
    assert window.view.tool is window.view.idle
    assert not tile.isChecked()
