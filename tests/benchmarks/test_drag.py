"""How long a tap drag takes from the hand's move to the painted frame, against a bare repaint of the scene.

Goal: at most 1.5 on 500 branches. Printed, never asserted: `FAREND_BENCHMARK=1 pytest -s tests/benchmarks`.
"""

import os
from pathlib import Path
from statistics import median
from time import perf_counter

import pytest
from PySide6.QtCore import QEvent, QPointF, Qt
from PySide6.QtGui import QImage, QMouseEvent
from PySide6.QtWidgets import QApplication

from app.canvas.board import Board
from app.canvas.ladder import EDGE, RAIL_X
from app.canvas.theme import Theme
from app.canvas.view import BoardView
from app.live.attention import Attention
from app.live.preferences import Preferences
from app.live.session import Session
from app.live.solving import Solving
from app.model.drawing import Drawing
from app.model.kinds import Busbar, Cable, Joint, Load, Supply, Transformer
from app.window import Window

FULL = os.environ.get("FAREND_BENCHMARK") == "1"
BRANCHES, ROUNDS = (500, 40) if FULL else (30, 4)
ARM = 25  # cables in a row, two arms a busbar


def estate(branches: int, phases: str = "alike") -> Drawing:
    """An invented layout: one transformer, arms of cable with a load at every other joint; each on one phase
    where these are not to be alike."""
    elements = {
        "B1": Busbar(),
        "S1": Supply(node="B1", nominal_v=11000.0, dx=-4.0, dy=0.0),
        "B2": Busbar(x=16.0, length=8.0 * branches / ARM),
        "T1": Transformer(start="B1", end="B2", rating_kva=1600.0, uk_percent=6.0),
    }
    for number in range(branches - 1):
        arm, place = divmod(number, ARM)
        start = f"J{number - 1}" if place else "B2"
        y = 8.0 * arm - 4.0 * branches / ARM
        elements[f"J{number}"] = Joint(x=28.0 + 12.0 * place, y=y)
        elements[f"C{number}"] = Cable(
            start=start, end=f"J{number}", length_m=12.0, side_by_side=4, rating_a=265.0
        )
        if place % 2:
            on = "all" if phases == "alike" else "ABC"[number // 2 % 3]
            elements[f"L{number}"] = Load(node=f"J{number}", demand_kva=4.0, phases=on)
    return Drawing(elements=elements)


def move(view: BoardView, at: QPointF, kind: QEvent.Type) -> None:
    """One mouse event on the board."""
    button = Qt.MouseButton.LeftButton
    pressed = Qt.MouseButton.NoButton if kind is QEvent.Type.MouseMove else button
    where = QPointF(view.viewport().mapToGlobal(at.toPoint()))
    event = QMouseEvent(kind, at, where, pressed, button, Qt.KeyboardModifier.NoModifier)
    QApplication.sendEvent(view.viewport(), event)


class Bench:
    """So many branches on the board, alone or in the window with every panel; one tap is taken."""

    def __init__(self, qtbot, folder: Path, surface: str, zoom: str, phases: str = "alike") -> None:
        drawing = estate(BRANCHES, phases)
        if surface == "window":
            self.shown = window = Window(Preferences(folder / "likes.ini"), folder)
            self.session, self.solving, self.view = window.session, window.solving, window.view
            board, attention = window.board, window.attention
            self.session.open(drawing)
        else:
            self.session = Session(drawing)
            self.solving, attention, theme = Solving(self.session), Attention(), Theme()
            board = Board(self.session, self.solving, attention, theme)
            self.shown = self.view = BoardView(board, self.session, attention, theme)
        qtbot.addWidget(self.shown)
        self.shown.resize(1440, 900)
        self.shown.show()
        QApplication.processEvents()
        self.view.fit()
        attention.select(["T1"])
        self.solving.settle()
        if zoom == "1:1":
            self.view.resetTransform()
            self.view.centerOn(board.ladder_of("T1"))
        QApplication.processEvents()
        self.ladder = board.ladder_of("T1")

    def spot(self, notch: int) -> QPointF:
        """Where a notch is in the viewport."""
        y = EDGE + self.ladder.notches.y(notch)
        return self.view.viewportTransform().map(self.ladder.mapToScene(RAIL_X, y))

    def drag(self, notch: int) -> float:
        """Seconds from the move of the hand to the painted frame with the new figures."""
        begun = perf_counter()
        move(self.view, self.spot(notch), QEvent.Type.MouseMove)
        while self.solving.stale:
            QApplication.processEvents()
        QApplication.processEvents()
        return perf_counter() - begun

    def frame(self) -> QImage:
        """What stands on the screen, without painting anything."""
        return self.shown.screen().grabWindow(self.shown.winId()).toImage()

    def repaint(self) -> float:
        """Seconds for the same scene alone."""
        begun = perf_counter()
        (self.view.viewport() if self.shown is self.view else self.shown).repaint()
        return perf_counter() - begun


@pytest.mark.parametrize("phases", ["alike", "not alike"])
@pytest.mark.parametrize("surface", ["board", "window"])
@pytest.mark.parametrize("zoom", ["whole drawing", "1:1"])
def test_drag_against_repaint(qtbot, capsys, tmp_path, surface, zoom, phases):
    """The frame of a drag, which paints only what changed, is also held against the whole painted anew."""
    bench = Bench(qtbot, tmp_path, surface, zoom, phases)
    move(bench.view, bench.spot(0), QEvent.Type.MouseButtonPress)
    drags, repaints, solves = [], [], []
    for number in range(ROUNDS):
        drags.append(bench.drag(1 if number % 2 else -1))
        solves.append(bench.solving.outcome.seconds["total"])
        dragged = bench.frame()
        repaints.append(bench.repaint())
        assert dragged == bench.frame()
        QApplication.processEvents()
    move(bench.view, bench.spot(1), QEvent.Type.MouseButtonRelease)
    assert bench.session.history.count() == 1
    assert bench.session.drawing.elements["T1"].tap == 1
    drag, repaint, solve = (1e3 * median(times) for times in (drags, repaints, solves))
    with capsys.disabled():
        print(f"\ntap drag, {BRANCHES} branches, phases {phases}, {surface}, {zoom}:", end=" ")
        print(f"{drag:.1f} ms to the painted frame, repaint {repaint:.1f} ms, ", end="")
        print(f"ratio {drag / repaint:.2f}; the study within it {solve:.1f} ms")
    bench.session.history.setClean()  # the window may close without asking
    bench.solving.stop()
