"""A canary for the toolkit: some of its releases lose a reference to None with every paint call."""

import sys

import pytest
from PySide6.QtGui import QPainter, QPixmap
from PySide6.QtWidgets import QGraphicsItem, QGraphicsRectItem, QGraphicsScene

PAINTS = 3000


class Spot(QGraphicsRectItem):
    """Painted in Python, as everything on the board is."""

    painted = 0

    def paint(self, painter: QPainter, option, widget=None) -> None:
        Spot.painted += 1
        painter.drawRect(self.rect())


@pytest.mark.skipif(sys.version_info >= (3, 12), reason="None cannot be lost from Python 3.12 on")
def test_painting_loses_no_reference_to_none(qtbot):
    scene = QGraphicsScene()
    spot = Spot(0, 0, 8, 8)
    spot.setFlag(QGraphicsItem.GraphicsItemFlag.ItemIsSelectable)
    scene.addItem(spot)
    page = QPixmap(8, 8)
    before = sys.getrefcount(None)
    for _ in range(PAINTS):
        painter = QPainter(page)
        scene.render(painter)
        painter.end()
    assert Spot.painted >= PAINTS
    assert before - sys.getrefcount(None) < PAINTS / 10
