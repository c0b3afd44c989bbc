"""The small gauge at a node: lowest to highest voltage of all cases, inside the limits."""

from msgspec import Struct
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen, QPolygonF

from app.canvas.palette import Palette
from app.canvas.standing import Standing, colour

WIDTH = 20.0  # bar and pointer
HEIGHT = 46.0
BAR = 5.0
LIMIT_SHARE = 0.18  # the limits stand this far in from either end of the track


class Reading(Struct, frozen=True):
    """All in percent of nominal."""

    low: float
    high: float
    lowest: float
    highest: float
    shown: float
    upper: float | None = None  # of the highest phase in the case shown, where it is another


def height_of(percent: float, reading: Reading) -> float:
    """Where a voltage stands on the track: 0 at its foot, 1 at its top, never off it."""
    room = 1 - 2 * LIMIT_SHARE
    share = LIMIT_SHARE + room * (percent - reading.low) / max(reading.high - reading.low, 1e-9)
    return min(max(share, 0.0), 1.0)


def paint(
    painter: QPainter, at: QPointF, reading: Reading, standing: Standing, palette: Palette, stale: bool
) -> None:
    """The gauge with its top left corner at a point."""
    x = at.x() + 6.0

    def y(percent: float) -> float:
        return at.y() + HEIGHT * (1 - height_of(percent, reading))

    _bar(painter, x, at.y(), at.y() + HEIGHT, palette.faint)
    tint = QColor(colour(standing, palette, stale) if standing is not Standing.GOOD else palette.good)
    tint = palette.soft if stale else tint
    inside = QColor(tint)
    inside.setAlphaF(0.25)
    painter.fillRect(QRectF(x - BAR / 2, y(reading.high), BAR, y(reading.low) - y(reading.high)), inside)
    painter.setPen(QPen(palette.soft, 1.0))
    for limit in (reading.low, reading.high):
        painter.drawLine(QPointF(x - 6, y(limit)), QPointF(x + 6, y(limit)))
    middle = (y(reading.highest) + y(reading.lowest)) / 2
    reach = max(y(reading.lowest) - y(reading.highest), BAR) / 2  # one case alone is a dot
    _bar(painter, x, middle - reach, middle + reach, tint)
    ink = palette.soft if stale else palette.ink
    if reading.upper is not None:
        _pointer(painter, x + BAR, y(reading.upper), palette.paper, ink)
    _pointer(painter, x + BAR, y(reading.shown), ink)


def _bar(painter: QPainter, x: float, top: float, foot: float, fill: QColor) -> None:
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(fill)
    painter.drawRoundedRect(QRectF(x - BAR / 2, top, BAR, foot - top), BAR / 2, BAR / 2)


def _pointer(painter: QPainter, x: float, y: float, fill: QColor, edge: QColor | None = None) -> None:
    """Filled at what the words tell, hollow at the highest phase."""
    painter.setPen(QPen(edge, 1.0) if edge is not None else Qt.PenStyle.NoPen)
    painter.setBrush(fill)
    painter.drawPolygon(QPolygonF([QPointF(x, y), QPointF(x + 7, y - 4), QPointF(x + 7, y + 4)]))
