"""Joints and busbars."""

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QPainterPath, QPen

from app.canvas.element_item import ElementItem, dress, halo_colour, paint_worn
from app.canvas.geometry import bar_ends, node_point
from app.canvas.standing import Standing, colour
from app.canvas.symbol_shapes import Glyph
from app.canvas.symbol_units import earth
from app.canvas.user_symbol import Worn
from app.model.drawing import Drawing
from app.model.kinds import Busbar, Node

DOT = 4.5
BAR = 6.0
HALO = 9.0
LEAN = -13.0  # px that the lead to an electrode runs aside, clear of lines that leave square


class NodeItem(ElementItem):
    """A dot, or a bar with round ends; hollow where it is dead."""

    def __init__(self, id: str, look) -> None:
        super().__init__(id, look)
        self.setZValue(3)
        self.ends = (QPointF(), QPointF())
        self.worn: Glyph | Worn | None = None
        self.earth = QPainterPath()  # the electrode that holds its neutral

    @property
    def bar(self) -> bool:
        """True for a busbar."""
        return self.ends[0] != self.ends[1]

    @property
    def upright(self) -> bool:
        """True for a bar that stands."""
        return self.bar and self.ends[0].x() == self.ends[1].x()

    def place(self, drawing: Drawing) -> None:
        node = drawing.elements[self.id]
        assert isinstance(node, Node)
        self.ends = bar_ends(node) if isinstance(node, Busbar) else (node_point(node), node_point(node))

    def read(self, drawing: Drawing) -> None:
        node = drawing.elements[self.id]
        assert isinstance(node, Node)
        self.worn = dress(drawing, node, self.look.symbols)
        self.earth = QPainterPath()
        if node.earth_ohm is not None:
            self.earth = earth(self.ends[1].x(), self.ends[1].y(), LEAN)
        self.bound(self.core().adjusted(-HALO, -HALO, HALO, HALO))

    def core(self) -> QRectF:
        half = BAR / 2 if self.bar else DOT
        box = QRectF(self.ends[0], self.ends[1]).adjusted(-half, -half, half, half)
        if self.worn is not None:
            box = box.united(self.worn.box.translated((self.ends[0] + self.ends[1]) / 2))
        if not self.earth.isEmpty():
            box = box.united(self.earth.boundingRect().adjusted(-1, -1, 1, 1))
        return box

    def paint(self, painter, option, widget=None) -> None:
        palette = self.look.palette
        if self.lit:
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(halo_colour(palette, self.selected))
            painter.drawRoundedRect(self._bounds.adjusted(1, 1, -1, -1), HALO, HALO)
        ink = palette.ink
        aged = self.look.aged(self.standing)
        if self.standing in (Standing.NEAR, Standing.FAILED, Standing.DEAD) and not aged:
            ink = colour(self.standing, palette)
        if not self.earth.isEmpty():
            painter.strokePath(self.earth, QPen(palette.ink, 1.5))
        if self.worn is not None:
            paint_worn(painter, self.worn, (self.ends[0] + self.ends[1]) / 2, 0.0, ink, palette.paper)
        elif self.bar:
            self._paint_bar(painter, ink)
        else:
            dead = self.standing is Standing.DEAD
            painter.setPen(QPen(ink, 1.6) if dead else Qt.PenStyle.NoPen)
            painter.setBrush(palette.paper if dead else ink)
            painter.drawEllipse(self.ends[0], DOT, DOT)

    def _paint_bar(self, painter, ink) -> None:
        painter.setPen(QPen(ink, BAR, Qt.PenStyle.SolidLine, Qt.PenCapStyle.RoundCap))
        painter.drawLine(*self.ends)
        if self.standing is Standing.DEAD:
            painter.setPen(
                QPen(self.look.palette.paper, BAR - 3, Qt.PenStyle.SolidLine, Qt.PenCapStyle.RoundCap)
            )
            painter.drawLine(*self.ends)
