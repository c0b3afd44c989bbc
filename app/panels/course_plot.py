"""A course through the year as a small picture: a band from least to most of each day, months at the foot."""

from collections.abc import Sequence
from typing import Any

import numpy as np
from msgspec import Struct
from numpy.typing import NDArray
from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter, QPaintEvent, QPen, QPolygonF
from PySide6.QtWidgets import QSizePolicy, QWidget

from app.canvas.palette import font
from app.canvas.theme import Theme
from app.model.figures import plain
from app.panels.style import mixed
from app.panels.words import LEFT, RIGHT

MONTHS = "JFMAMJJASOND"
DAYS = (31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31)
FOOT, HEAD, SIDE = 18.0, 10.0, 8.0
FEW_DAYS = 40  # a course no longer than this is drawn value by value
Real = NDArray[np.float64]


class Band(Struct, frozen=True):
    """Least, most and mean of every day that has values."""

    day: Any
    least: Any
    most: Any
    mean: Any
    count: int


def band_of(values: Real, hours: Real) -> Band:
    """The days of a course."""
    day = ((np.cumsum(hours) - hours / 2) // 24).astype(int)
    known = np.isfinite(values)
    count = int(day.max(initial=0)) + 1
    least, most = np.full(count, np.inf), np.full(count, -np.inf)
    np.minimum.at(least, day[known], values[known])
    np.maximum.at(most, day[known], values[known])
    spans = np.bincount(day[known], hours[known], count)
    days = np.flatnonzero(spans > 0)
    mean = np.bincount(day[known], (values * hours)[known], count)[days] / spans[days]
    return Band(days, least[days], most[days], mean, count)


class CoursePlot(QWidget):
    """A short course is drawn as steps, a year as a band."""

    def __init__(self, theme: Theme, unit: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme, self._unit = theme, unit
        self._hours, self._values = np.zeros(0), np.zeros(0)
        self._band: Band | None = None
        self.faded = False
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Preferred)
        self.setMinimumHeight(84)
        theme.changed.connect(self.update)

    def sizeHint(self) -> QSize:
        return QSize(360, 130)

    def show_course(self, values: Sequence[float] | Real, hours: float | Real, faded: bool = False) -> None:
        """Draw these values, in the unit of the plot, and how long each lasts, in hours."""
        self._values = np.asarray(values, dtype=np.float64)
        self._hours = np.broadcast_to(np.asarray(hours, dtype=np.float64), self._values.shape)
        self.faded = faded
        self._band = band_of(self._values, self._hours) if self._days() > FEW_DAYS else None
        self.setAccessibleDescription(self.as_text())
        self.update()

    def as_text(self) -> str:
        """Peak, mean and least in words."""
        known = np.isfinite(self._values)
        if not known.any():
            return "nothing to show"
        values, hours = self._values[known], self._hours[known]
        mean = float(values @ hours / hours.sum())
        return (
            f"most {plain(float(values.max()), 1, self._unit)}, mean {plain(mean, 1, self._unit)}, "
            f"least {plain(float(values.min()), 1, self._unit)}"
        )

    # -- painting -------------------------------------------------------------------------------
    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        look = self._theme.palette
        painter.setPen(QPen(mixed(look.faint, look.field, 0.9), 1))
        painter.setBrush(look.field)
        painter.drawRoundedRect(QRectF(self.rect()).adjusted(0.5, 0.5, -0.5, -0.5), 6, 6)
        known = np.isfinite(self._values)
        if not known.any():
            painter.setPen(look.soft)
            painter.setFont(font(8.5))
            painter.drawText(self.rect(), int(Qt.AlignmentFlag.AlignCenter), "Nothing to show yet")
            return
        room = self._room(painter)
        low, high = self._span(known)
        self._paint_scale(painter, room, low, high)
        flow = mixed(look.soft, look.field, 0.5) if self.faded else look.flow
        if self._band is not None:
            self._paint_band(painter, room, low, high, flow)
        else:
            self._paint_steps(painter, room, low, high, flow)

    def _days(self) -> float:
        return float(self._hours.sum()) / 24

    def _span(self, known: NDArray[np.bool_]) -> tuple[float, float]:
        high, low = float(self._values[known].max()), min(0.0, float(self._values[known].min()))
        return low, high if high > low else low + 1

    def _room(self, painter: QPainter) -> QRectF:
        painter.setFont(font(8))
        wide = QFontMetricsF(painter.font()).horizontalAdvance("1 000 000 kW") * 0.8
        return QRectF(SIDE + wide, HEAD, self.width() - 2 * SIDE - wide, self.height() - HEAD - FOOT)

    def _paint_scale(self, painter: QPainter, room: QRectF, low: float, high: float) -> None:
        look = self._theme.palette
        for value in {low, 0.0, high}:
            y = room.bottom() - (value - low) / (high - low) * room.height()
            painter.setPen(QPen(look.faint, 1))
            painter.drawLine(QPointF(room.left(), y), QPointF(room.right(), y))
            painter.setPen(look.soft)
            words = plain(value, 0 if abs(value) >= 10 or value == 0 else 2, self._unit)
            painter.drawText(QRectF(0, y - 8, room.left() - 6, 16), int(RIGHT), words)
        if self._band is not None:
            self._paint_months(painter, room)
        else:
            self._paint_hours(painter, room)

    def _paint_months(self, painter: QPainter, room: QRectF) -> None:
        at = 0
        for letter, days in zip(MONTHS, DAYS, strict=True):
            left = room.left() + room.width() * at / 365
            painter.drawText(QRectF(left, room.bottom() + 2, room.width() * days / 365, 14),
                             int(Qt.AlignmentFlag.AlignCenter), letter)  # fmt: skip
            at += days

    def _paint_hours(self, painter: QPainter, room: QRectF) -> None:
        whole = float(self._hours.sum())
        foot = QRectF(room.left(), room.bottom() + 2, room.width(), 14)
        painter.drawText(foot, int(LEFT), "0 h")
        painter.drawText(foot, int(RIGHT), f"{plain(whole, 0 if whole >= 10 else 1)} h, then again")

    def _paint_band(self, painter: QPainter, room: QRectF, low: float, high: float, ink: QColor) -> None:
        """Least to most of each day as a band, its mean as a line."""
        band = self._band
        assert band is not None
        x = room.left() + (band.day + 0.5) * room.width() / band.count

        def spots(values: Real) -> list[QPointF]:
            y = room.bottom() - (values - low) / (high - low) * room.height()
            return [QPointF(a, b) for a, b in zip(x, y, strict=True)]

        ground = QColor(ink)
        ground.setAlphaF(0.22)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(ground)
        painter.drawPolygon(QPolygonF([*spots(band.most), *reversed(spots(band.least))]))
        painter.setPen(QPen(ink, 1.4))
        painter.drawPolyline(QPolygonF(spots(band.mean)))

    def _paint_steps(self, painter: QPainter, room: QRectF, low: float, high: float, ink: QColor) -> None:
        ends = np.cumsum(self._hours)
        scale = room.width() / float(ends[-1])
        points = []
        for start, end, value in zip(ends - self._hours, ends, self._values, strict=True):
            y = room.bottom() - (value - low) / (high - low) * room.height()
            points += [QPointF(room.left() + start * scale, y), QPointF(room.left() + end * scale, y)]
        painter.setPen(QPen(ink, 1.6))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.drawPolyline(QPolygonF(points))
