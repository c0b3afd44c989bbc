"""The band between the limits on the voltage strip, in percent at the left and, by phase, in volts."""

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QPainter, QPen

from app.canvas.palette import Palette, font
from app.model.drawing import Limits
from app.model.figures import plain
from app.panels.strip_axes import Axes
from app.panels.strip_phases import base_words
from app.panels.style import mixed
from app.panels.words import LEFT, RIGHT

LABEL = 13.0  # px from one figure of the axis to the next


def paint_band(painter: QPainter, axes: Axes, limits: Limits, palette: Palette, base_v: float) -> None:
    """The band, its edges and the nominal; `base_v` is what volts are told on, nan where none are."""
    room = axes.room
    top, bottom = axes.y(limits.high_percent), axes.y(limits.low_percent)
    band = QRectF(room.left() - 10, top, room.width() + 22, bottom - top)
    painter.fillRect(band, mixed(palette.good, palette.field, 0.13 if palette.dark else 0.07))
    painter.setFont(font(8))
    places = label_places(axes, limits)
    for percent, limit in ((limits.high_percent, True), (100.0, False), (limits.low_percent, True)):
        y = axes.y(percent)
        style = Qt.PenStyle.DashLine if limit else Qt.PenStyle.SolidLine
        painter.setPen(QPen(palette.soft if limit else palette.faint, 1, style))
        painter.drawLine(QPointF(band.left(), y), QPointF(band.right(), y))
        if percent not in places:
            continue
        painter.setPen(palette.soft)
        text, at = plain(percent, 0 if percent == round(percent) else 1), places[percent]
        painter.drawText(QRectF(0, at - 8, band.left() - 6, 16), int(RIGHT), text)
        if base_v == base_v:
            told = base_words(percent * base_v / 100)
            painter.drawText(QRectF(band.right() + 12, at - 8, 60, 16), int(LEFT), told)


def label_places(axes: Axes, limits: Limits) -> dict[float, float]:
    """Where the figures of the band stand: those of the limits apart, that of the nominal where there is
    room between."""
    top, foot = float(axes.y(limits.high_percent)), float(axes.y(limits.low_percent))
    push = max(LABEL - (foot - top), 0.0) / 2
    places = {limits.high_percent: top - push, limits.low_percent: foot + push}
    middle = float(axes.y(100.0))
    if all(abs(middle - y) >= LABEL for y in places.values()):
        places[100.0] = middle
    return places
