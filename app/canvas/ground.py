"""The paper under the drawing, with the dots of its grid."""

from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QPainter, QPen

from app.canvas.element_item import Look
from app.canvas.geometry import GRID

DOTS_FROM = 0.4  # zoom below which the grid is left out


def paint_ground(painter: QPainter, rect: QRectF, look: Look) -> None:
    """Fill a part of the paper."""
    painter.fillRect(rect, look.palette.paper)
    zoom = painter.worldTransform().m11()
    if look.printing or zoom < DOTS_FROM:
        return
    step = GRID * (2 if zoom < 1.6 else 1)
    pen = QPen(look.palette.faint, 1.6)
    pen.setCosmetic(True)
    painter.setPen(pen)
    first, last = int(rect.left() // step), int(rect.right() // step) + 1
    for row in range(int(rect.top() // step), int(rect.bottom() // step) + 2):
        painter.drawPoints([QPointF(k * step, row * step) for k in range(first, last + 1)])
