"""Questions in the real dialogs: what Escape, Enter and the buttons answer; and that lists can be read."""

import pytest
from PySide6.QtCore import Qt, QTimer
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QLabel, QMessageBox, QPushButton, QWidget

from app.canvas.palette import LIGHT
from app.panels.about import About, Keys
from app.panels.dialogs import Dialogs
from app.panels.style import qt_palette, sheet


@pytest.fixture
def desk(qtbot):
    made = QWidget()
    qtbot.addWidget(made)
    made.setPalette(qt_palette(LIGHT))
    made.setStyleSheet(sheet(LIGHT))
    made.setGeometry(100, 80, 900, 700)
    made.show()
    return made


def answering(do) -> list[str]:
    """Do something to the question as soon as it stands; its text and its buttons are noted."""
    seen: list[str] = []

    def act() -> None:
        box = QApplication.activeModalWidget()
        assert isinstance(box, QMessageBox)
        seen.extend([box.text(), *(b.text() for b in box.findChildren(QPushButton))])
        assert all(button.icon().isNull() for button in box.findChildren(QPushButton))
        do(box)

    QTimer.singleShot(0, act)
    return seen


def press(name: str):
    def do(box: QMessageBox) -> None:
        button = next(b for b in box.findChildren(QPushButton) if b.text() == name)
        QTest.mouseClick(button, Qt.MouseButton.LeftButton)

    return do


def key(which: Qt.Key):
    return lambda box: QTest.keyClick(box, which)


@pytest.mark.parametrize(
    ("do", "answer"),
    [
        (key(Qt.Key.Key_Escape), "keep"),
        (key(Qt.Key.Key_Return), "keep"),
        (lambda box: box.close(), "keep"),
        (press("Open it"), "open"),
        (press("Throw it away"), "throw"),
        (press("Keep it for later"), "keep"),
    ],
)
def test_recovered_work_is_thrown_away_only_by_its_own_button(desk, do, answer):
    seen = answering(do)
    assert Dialogs(desk).recovery("Estate") == answer
    assert "Estate" in seen[0]


@pytest.mark.parametrize(
    ("do", "agreed"),
    [
        (key(Qt.Key.Key_Return), False),
        (key(Qt.Key.Key_Escape), False),
        (press("Yes"), True),
        (press("No"), False),
    ],
)
def test_writing_over_another_hands_work_needs_a_yes(desk, do, agreed):
    answering(do)
    assert Dialogs(desk).agree("Write over it?") is agreed


def test_leaving_is_cancelled_by_escape(desk):
    answering(key(Qt.Key.Key_Escape))
    assert Dialogs(desk).keep_changes("a.farend") == "cancel"


def test_a_question_stands_over_the_middle_of_its_window(desk):
    off = []
    answering(lambda box: (off.append(box.geometry().center() - desk.frameGeometry().center()), box.close()))
    Dialogs(desk).agree("Write over it?")
    assert off[0].manhattanLength() < 60


@pytest.mark.parametrize("kind", [About, Keys])
def test_lists_stand_in_ink_on_the_panel(desk, kind):
    made = kind(desk)
    made.show()
    shot = made.grab().toImage()
    spot = made.findChild(QLabel).mapTo(made, made.findChild(QLabel).rect().bottomRight())
    assert shot.pixelColor(spot) == LIGHT.panel
    assert made.findChild(QLabel).palette().windowText().color() == LIGHT.ink
    assert (made.geometry().center() - desk.frameGeometry().center()).manhattanLength() < 60
    made.close()
