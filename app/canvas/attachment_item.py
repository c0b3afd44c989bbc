"""Supplies, loads, motors, generators and capacitors on their stubs."""

import math

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QPen, QTransform

from app.canvas import phase_mark
from app.canvas.element_item import ElementItem, dress, halo_colour, paint_worn
from app.canvas.geometry import attachment_point, distance, stub
from app.canvas.standing import Standing, colour
from app.canvas.symbol_shapes import Glyph
from app.canvas.user_symbol import Worn
from app.model.drawing import Drawing

HALO = 8.0
NODE_ROOM = 7.0


class AttachmentItem(ElementItem):
    """A symbol and the stub to its node."""

    def __init__(self, id: str, look) -> None:
        super().__init__(id, look)
        self.setZValue(2)
        self.points: list[QPointF] = []
        self.at = QPointF()
        self.angle = 0.0  # of the symbol, which is drawn fed from above
        self.worn: Glyph | Worn | None = None

    def place(self, drawing: Drawing) -> None:
        self.points = stub(drawing, self.id)
        self.at = attachment_point(drawing, self.id)
        a, b = self.points[-2:]
        self.angle = math.degrees(math.atan2(b.y() - a.y(), b.x() - a.x())) - 90 if a != b else 0.0

    def read(self, drawing: Drawing) -> None:
        self.worn = dress(drawing, drawing.elements[self.id], self.look.symbols)
        self.lay_mark()

    def lay_mark(self) -> None:
        """On the last run of the stub, between node and symbol."""
        self.mark = None
        if self.phases is not None:
            a, b = self._stub_to_edge()[-2:]
            size = distance(a, b)
            near = (b - a) * (min(NODE_ROOM, size / 4) / size) if size else b - a
            self.mark = phase_mark.lay(self.phases, a + near, b)
        box = self.core().adjusted(-HALO, -HALO, HALO, HALO)
        if self.mark is not None:
            box = box.united(self.mark.box.adjusted(-2, -2, 2, 2))
        for point in self.points:
            box = box.united(QRectF(point.x() - 2, point.y() - 2, 4, 4))
        self.bound(box)

    @property
    def facing(self) -> str:
        """The side away from the node: b, a, l or r."""
        return "brla"[(0, 2, 3, 1)[round(self.angle / 90) % 4]] if self.points[0] != self.at else "b"

    def core(self) -> QRectF:
        if self.worn is None:
            return QRectF(self.at, self.at)
        turn = QTransform().translate(self.at.x(), self.at.y()).rotate(self.angle)
        return turn.mapRect(self.worn.box)

    def paint(self, painter, option, widget=None) -> None:
        palette = self.look.palette
        if self.lit:
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(halo_colour(palette, self.selected))
            painter.drawRoundedRect(self.core().adjusted(-HALO, -HALO, HALO, HALO), HALO, HALO)
        ink = palette.ink
        dotted = self.standing is Standing.DEAD
        aged = self.look.aged(self.standing)
        if self.standing in (Standing.NEAR, Standing.FAILED, Standing.DEAD) and not aged:
            ink = colour(self.standing, palette)
        style = Qt.PenStyle.DotLine if dotted else Qt.PenStyle.SolidLine
        painter.setPen(QPen(ink, 2.0, style, Qt.PenCapStyle.FlatCap))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.drawPolyline(self._stub_to_edge())
        if self.worn is not None:
            paint_worn(painter, self.worn, self.at, self.angle, ink, palette.paper)
        if self.mark is not None:
            phase_mark.paint(painter, self.mark, palette, self.look.printing)

    def _stub_to_edge(self) -> list[QPointF]:
        if self.worn is None:
            return self.points
        *before, a, b = self.points
        size = distance(a, b)
        edge = b + (a - b) * (min(self.worn.half, size) / size) if size else b
        return [*before, a, edge]
