"""The handles of the one selected branch: squares at its bends, rings at its ends."""

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QPen
from PySide6.QtWidgets import QGraphicsItem

from app.canvas.element_item import Look
from app.canvas.geometry import HitKind, Outline

RING = 4.5
HALF = 4.0


class Handles(QGraphicsItem):
    """The bends and ends of the one selected branch."""

    def __init__(self, look: Look) -> None:
        super().__init__()
        self.look = look
        self.outlines: list[Outline] = []
        self._bounds = QRectF()
        self.setZValue(9)
        self.setAcceptedMouseButtons(Qt.MouseButton.NoButton)

    def hold(self, outlines: list[Outline]) -> None:
        """Show these."""
        self.prepareGeometryChange()
        self.outlines = outlines
        self._bounds = QRectF()
        for outline in outlines:
            point = outline.points[0]
            self._bounds |= QRectF(point.x() - 8, point.y() - 8, 16, 16)

    def boundingRect(self) -> QRectF:
        return self._bounds

    def paint(self, painter, option, widget=None) -> None:
        painter.setPen(QPen(self.look.palette.flow, 1.5))
        painter.setBrush(self.look.palette.paper)
        for outline in self.outlines:
            point = outline.points[0]
            if outline.kind is HitKind.END:
                painter.drawEllipse(point, RING, RING)
            else:
                painter.drawRect(QRectF(point.x() - HALF, point.y() - HALF, 2 * HALF, 2 * HALF))
