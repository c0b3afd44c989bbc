"""A verdict as a mark: good, near and failed differ by shape as well as by colour."""

from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QIcon, QPainter, QPaintEvent, QPen, QPixmap
from PySide6.QtWidgets import QWidget

from app.canvas import standing
from app.canvas.palette import Palette
from app.canvas.standing import Standing
from app.canvas.theme import Theme
from app.study.outcome import Verdict

_STANDING = {Verdict.ADVICE: Standing.NEAR, Verdict.NEAR: Standing.NEAR, Verdict.FAILS: Standing.FAILED}


def colour_of(verdict: Verdict, palette: Palette) -> QColor:
    """The colour of a verdict."""
    return {
        Verdict.HOLDS: palette.good,
        Verdict.ADVICE: palette.near,
        Verdict.NEAR: palette.near,
        Verdict.FAILS: palette.failed,
        Verdict.BLOCKS: palette.failed,
        Verdict.NOTE: palette.soft,
    }[verdict]


def paint_mark(painter: QPainter, verdict: Verdict, centre: QPointF, size: float, palette: Palette) -> None:
    """Tick holds, triangle is near, crossed diamond fails (as on the board), barred ring is not solved."""
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    colour, r = colour_of(verdict, palette), size / 2
    pen = QPen(colour, max(1.4, size / 7), Qt.PenStyle.SolidLine, Qt.PenCapStyle.RoundCap)
    pen.setJoinStyle(Qt.PenJoinStyle.RoundJoin)
    painter.setPen(pen)
    at = lambda x, y: centre + QPointF(x * r, y * r)  # noqa: E731
    if verdict is Verdict.HOLDS:
        painter.drawPolyline([at(-0.9, 0.05), at(-0.3, 0.65), at(0.9, -0.7)])
    elif verdict in _STANDING:
        painter.translate(centre)
        painter.scale(size / 14, size / 14)
        standing.mark(painter, _STANDING[verdict], QPointF(), palette)
    elif verdict is Verdict.BLOCKS:
        painter.drawEllipse(centre, r * 0.85, r * 0.85)
        painter.drawLine(at(-0.45, 0), at(0.45, 0))
    else:
        painter.setBrush(colour)
        painter.drawEllipse(centre, r * 0.3, r * 0.3)
    painter.restore()


class Mark(QWidget):
    """A verdict's mark on its own."""

    def __init__(self, theme: Theme, size: int = 14, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme, self._size = theme, size
        self.verdict = Verdict.HOLDS
        self.setFixedSize(QSize(size + 2, size + 2))
        theme.changed.connect(self.update)

    def say(self, verdict: Verdict) -> None:
        """Show another verdict."""
        self.verdict = verdict
        self.setAccessibleName(verdict.value)
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        centre = QRectF(self.rect()).center()
        paint_mark(painter, self.verdict, centre, self._size * 0.86, self._theme.palette)


def icon(verdict: Verdict, palette: Palette, ratio: float = 2.0) -> QIcon:
    """The mark as an icon for lists and chips."""
    picture = QPixmap(QSize(int(14 * ratio), int(14 * ratio)))
    picture.setDevicePixelRatio(ratio)
    picture.fill(Qt.GlobalColor.transparent)
    painter = QPainter(picture)
    paint_mark(painter, verdict, QPointF(7, 7), 10, palette)
    painter.end()
    return QIcon(picture)
