"""A board with its hands on it, as the window would put it together, and a person to use it."""

import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QWheelEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from app.canvas.board import Board
from app.canvas.geometry import GRID
from app.canvas.theme import Theme
from app.canvas.view import BoardView
from app.live.attention import Attention
from app.live.session import Session
from app.live.solving import Solving
from app.model.drawing import Drawing
from app.model.kinds import Busbar, Cable, Joint, Load, Supply, Transformer

LEFT = Qt.MouseButton.LeftButton
NONE = Qt.KeyboardModifier.NoModifier
SHIFT = Qt.KeyboardModifier.ShiftModifier
CTRL = Qt.KeyboardModifier.ControlModifier
ALT = Qt.KeyboardModifier.AltModifier


def pair() -> Drawing:
    """An invented 400 V intake, a step-up and a step-down transformer, a house at the far end."""
    return Drawing(
        elements={
            "B1": Busbar(name="GH"),
            "S1": Supply(node="B1", dx=-4.0, dy=0.0),
            "J1": Joint(x=10.0),
            "T1": Transformer(
                start="B1",
                end="J1",
                rating_kva=160.0,
                v1_v=400.0,
                v2_v=11000.0,
                vector_group="YNd11",
                tapped="winding 2",
            ),
            "J2": Joint(x=24.0),
            "C1": Cable(start="J1", end="J2", length_m=1150.0, resistance_ohm_per_km=0.868),
            "B2": Busbar(name="HS", x=36.0),
            "T2": Transformer(start="J2", end="B2"),
            "L1": Load(name="House", node="B2", demand_kva=80.0, dx=4.0, dy=0.0),
        }
    )


class Desk:
    """Everything wired, and the gestures of a person in grid steps."""

    def __init__(self, drawing: Drawing) -> None:
        self.session = Session(drawing)
        self.solving = Solving(self.session)
        self.attention = Attention(self.session)
        self.theme = Theme()
        self.theme.wear("light")
        self.board = Board(self.session, self.solving, self.attention, self.theme)
        self.view = BoardView(self.board, self.session, self.attention, self.theme)
        self.refusals: list[str] = []
        self.view.refused.connect(lambda sentence, at: self.refusals.append(sentence))
        self.view.resize(1200, 700)
        self.view.show()
        self.solving.settle()
        self.board.write_rest()
        QApplication.processEvents()
        self.view.fit()

    @property
    def drawing(self) -> Drawing:
        return self.session.drawing

    @property
    def steps(self) -> int:
        return self.session.history.count()

    @property
    def last(self) -> str:
        return self.session.history.undoText()

    def undo(self) -> None:
        self.session.history.undo()

    def px(self, x: float, y: float) -> QPoint:
        """A grid point in the viewport."""
        return self.view.mapFromScene(QPointF(x * GRID, y * GRID))

    def hover(self, x: float, y: float) -> None:
        self._to(self.px(x, y))

    def click(self, x: float, y: float, mods=NONE) -> None:
        self.hover(x, y)
        QTest.mouseClick(self.view.viewport(), LEFT, mods, self.px(x, y))

    def double_click(self, x: float, y: float) -> None:
        self.click(x, y)
        QTest.mouseDClick(self.view.viewport(), LEFT, NONE, self.px(x, y))

    def take(self, x: float, y: float, mods=NONE) -> None:
        self.hover(x, y)
        QTest.mousePress(self.view.viewport(), LEFT, mods, self.px(x, y))

    def pull(self, x: float, y: float) -> None:
        """On with the button down, by way of a point in between."""
        self._to(self.px(x, y) - QPoint(7, 7))
        self._to(self.px(x, y))

    def let_go(self, x: float, y: float, mods=NONE) -> None:
        QTest.mouseRelease(self.view.viewport(), LEFT, mods, self.px(x, y))

    def drag(self, start, *stops, mods=NONE) -> None:
        self.take(*start, mods)
        for stop in stops:
            self.pull(*stop)
        self.let_go(*stops[-1], mods)

    def key(self, key, mods=NONE) -> None:
        QTest.keyClick(self.view, key, mods)

    def type(self, text: str) -> None:
        for letter in text:
            QTest.keyClick(self.view, letter)

    def wheel(self, at: QPoint, clicks: int, mods=NONE) -> None:
        where = QPointF(at)
        event = QWheelEvent(
            where,
            QPointF(self.view.viewport().mapToGlobal(at)),
            QPoint(),
            QPoint(0, 120 * clicks),
            Qt.MouseButton.NoButton,
            mods,
            Qt.ScrollPhase.NoScrollPhase,
            False,
        )
        QApplication.sendEvent(self.view.viewport(), event)

    def select(self, *ids: str) -> None:
        self.attention.select(ids)

    def _to(self, px: QPoint) -> None:
        QTest.mouseMove(self.view.viewport(), px)
        QApplication.processEvents()


@pytest.fixture
def desk(qtbot):
    """The pair on the board."""
    made = Desk(pair())
    qtbot.addWidget(made.view)
    yield made
    made.solving.stop()


@pytest.fixture
def blank(qtbot):
    """An empty board, 1:1, its middle at 0, 0."""
    made = Desk(Drawing())
    qtbot.addWidget(made.view)
    made.view.resetTransform()
    made.view.centerOn(0, 0)
    yield made
    made.solving.stop()
