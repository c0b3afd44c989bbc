"""The figures of nodes, with the gauge at their side."""

from PySide6.QtCore import QPointF

from app.canvas import gauge, lettering
from app.canvas.element_item import Look
from app.canvas.lettering import LEFT, RIGHT, Line, Run, Style
from app.canvas.placing import Spot
from app.canvas.standing import Standing, mark
from app.canvas.tag import Caption


class NodeFigures(Caption):
    """Volts and percent with the gauge at their left."""

    USUAL = ((Run("400.0 V"),), (Run("100.0 %", Style.QUIET),))
    USUAL_CHANGE: Line = (Run("▲ 0.0 V", Style.CHANGE),)

    def __init__(self, id: str, look: Look) -> None:
        super().__init__(id, look)
        self.reading: gauge.Reading | None = None

    def read(self, reading: gauge.Reading | None) -> None:
        """Take new limits and voltages; repaints only where they are new."""
        if reading != self.reading:
            self.reading = reading
            self.update()

    def _hold(self, spot: Spot) -> float:
        return RIGHT if spot.align == RIGHT else LEFT  # the gauge stays, the words grow away from it

    @property
    def _mirrored(self) -> bool:
        """True where the words stand left of their node: the gauge is at their right, next to it."""
        return self.spot.align == RIGHT

    def _extra(self, lines: tuple[Line, ...]) -> float:
        marked = 16.0 if self.standing in (Standing.NEAR, Standing.FAILED) else 0.0
        return gauge.WIDTH + 4 + marked if len(lines) > 1 else 0.0

    def _height(self, lines: tuple[Line, ...], bare: float) -> float:
        return max(bare, gauge.HEIGHT) if len(lines) > 1 else bare

    def _paint(self, painter) -> None:
        palette, stale = self.look.palette, self.look.stale
        box = self.spot.box
        bare = lettering.size(self.lines)
        extra, figures = self._extra(self.lines), len(self.lines) > 1
        if self.reading is not None and figures:
            self._paint_gauge(painter, self.reading)
        down = (box.height() - bare.height()) / 2 - self.PAD.height()
        text = box.adjusted(0, down, -extra, 0) if self._mirrored else box.adjusted(extra, down, 0, 0)
        if self.standing in (Standing.NEAR, Standing.FAILED) and figures:
            beside = text.right() + 8 if self._mirrored else text.left() - 8
            mark(painter, self.standing, QPointF(beside, box.center().y()), palette, stale)
        w, h = self.PAD.width(), self.PAD.height()
        over = palette.soft if stale else None
        align = RIGHT if self._mirrored else LEFT
        room = text.width() - 2 * w if self._mirrored else bare.width()
        lettering.paint(painter, self.lines, text.topLeft() + QPointF(w, h), room, palette, align, over)

    def _paint_gauge(self, painter, reading: gauge.Reading) -> None:
        box = self.spot.box
        painter.save()
        painter.translate(box.right() if self._mirrored else box.left(), box.center().y() - gauge.HEIGHT / 2)
        painter.scale(-1 if self._mirrored else 1, 1)
        gauge.paint(painter, QPointF(), reading, self.standing, self.look.palette, self.look.stale)
        painter.restore()
