"""The head of a pole as its spacing tells it, to scale: conductors, cross-arms, the height above ground."""

from itertools import groupby

from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QSizePolicy, QWidget

from app.canvas.palette import font
from app.canvas.theme import Theme
from app.model.conductors import Hung
from app.model.figures import plain
from app.panels.style import mixed

HEIGHT = 118
TOP, FOOT, SIDE = 16.0, 40.0, 62.0  # room for letters above, for the foot of the pole, and for dimensions
DOT = 3.2
SPREAD = 0.75  # m, the least that fills the room, so that one wire alone is not drawn huge


class Pole(QWidget):
    """Shows what hangs; nothing where nothing does."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme = theme
        self.hung: Hung | None = None
        self.setFixedHeight(HEIGHT)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setAccessibleName("Head of the pole")
        self.hide()
        theme.changed.connect(self.update)

    def sizeHint(self) -> QSize:
        return QSize(260, HEIGHT)

    def show_hung(self, hung: Hung | None) -> None:
        """Draw this head, or hide."""
        if hung != self.hung:
            self.hung = hung
            self.setAccessibleDescription("" if hung is None else _told(hung))
            self.update()
        self.setVisible(hung is not None)

    def spots(self) -> list[QPointF]:
        """Where the conductors are drawn, in their order; x and height at one scale."""
        assert self.hung is not None
        xs, ys = self.hung.x_m, self.hung.y_m
        left, right, high = min(*xs, 0.0), max(*xs, 0.0), max(ys)
        width, height = self.width() - 2 * SIDE, HEIGHT - TOP - FOOT
        scale = min(width / max(right - left, SPREAD), height / max(high - min(ys), SPREAD))
        middle = self.width() / 2 - (left + right) / 2 * scale
        return [
            QPointF(middle + x * scale, TOP + (high - y) * scale) for x, y in zip(xs, ys, strict=True)
        ] + [QPointF(middle, 0)]

    def paintEvent(self, event: QPaintEvent) -> None:
        if self.hung is None:
            return
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        *spots, foot = self.spots()
        look = self._theme.palette
        wood = mixed(look.soft, look.panel, 0.75)
        self._paint_pole(painter, spots, foot.x(), wood)
        self._paint_wires(painter, spots, foot.x())
        self._paint_sizes(painter, spots)

    def _paint_pole(self, painter: QPainter, spots: list[QPointF], x: float, wood: QColor) -> None:
        top, ground = min(s.y() for s in spots) + 1, HEIGHT - 12.0
        broken = ground - 13
        painter.setPen(QPen(wood, 3, Qt.PenStyle.SolidLine, Qt.PenCapStyle.FlatCap))
        painter.drawLine(QPointF(x, top), QPointF(x, broken - 2))
        painter.drawLine(QPointF(x, broken + 3), QPointF(x, ground))
        painter.setPen(QPen(wood, 1))
        for y in (broken - 2, broken + 3):  # the pole is longer than drawn
            painter.drawLine(QPointF(x - 5, y + 2), QPointF(x + 5, y - 2))
        painter.drawLine(QPointF(x - 34, ground), QPointF(x + 34, ground))
        for k in range(-4, 5):
            painter.drawLine(QPointF(x + 8 * k, ground), QPointF(x + 8 * k - 4, ground + 4))
        painter.setPen(QPen(wood, 2, Qt.PenStyle.SolidLine, Qt.PenCapStyle.RoundCap))
        for y, level in groupby(sorted(spots, key=lambda s: s.y()), key=lambda s: round(s.y(), 1)):
            xs = [s.x() for s in level]
            painter.drawLine(QPointF(min(*xs, x), y + DOT + 3), QPointF(max(*xs, x), y + DOT + 3))

    def _paint_wires(self, painter: QPainter, spots: list[QPointF], pole: float) -> None:
        assert self.hung is not None
        look = self._theme.palette
        for letter, spot in zip(self.hung.letters, spots, strict=True):
            painter.setPen(QPen(look.ink, 1.2))
            painter.drawLine(spot, spot + QPointF(0, DOT + 3))
            painter.setBrush(look.panel if letter == "N" else look.copper)
            painter.drawEllipse(spot, DOT, DOT)
            painter.setFont(font(8, bold=letter != "N"))
            aside = -1 if spot.x() < pole - 1 else 1
            room = QRectF(spot.x() + aside * 10 - 8, spot.y() - 8, 16, 14)
            painter.drawText(room, int(Qt.AlignmentFlag.AlignCenter), letter)

    def _paint_sizes(self, painter: QPainter, spots: list[QPointF]) -> None:
        """How far the conductors are apart across, and how high the lowest hangs."""
        assert self.hung is not None
        xs, ys = self.hung.x_m, self.hung.y_m
        painter.setFont(font(8))
        painter.setPen(self._theme.palette.soft)
        low = min(range(len(ys)), key=lambda k: ys[k])
        across, tall = max(xs) - min(xs), max(ys) - min(ys)
        lines = [f"{_metres(across)} across"] if across else []
        lines += [f"{_metres(tall)} down"] if tall else []
        for k, words in enumerate(lines):
            painter.drawText(QRectF(0, HEIGHT - 38 + 13 * k, 90, 13), int(Qt.AlignmentFlag.AlignLeft), words)
        words = f"{self.hung.letters[low]} {_metres(ys[low])} up"
        painter.drawText(
            QRectF(self.width() - 100, HEIGHT - 25, 100, 13), int(Qt.AlignmentFlag.AlignRight), words
        )


def _metres(value: float) -> str:
    return plain(value, 2 if value < 10 else 1, "m")


def _told(hung: Hung) -> str:
    """The same in words, to be read aloud."""
    spots = zip(hung.letters, hung.x_m, hung.y_m, strict=True)
    return "; ".join(f"{letter} {plain(x, 2, 'm')} across, {plain(y, 2, 'm')} up" for letter, x, y in spots)
