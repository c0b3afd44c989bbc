"""Cables, overhead lines, transformers and switches: a route as broad as it is loaded."""

import math

from msgspec import Struct
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QPainterPath, QPainterPathStroker, QPen, QPolygonF, QTransform

from app.canvas import phase_mark
from app.canvas.element_item import ElementItem, dress, halo_colour, paint_worn
from app.canvas.geometry import along, distance, longest, pose, route
from app.canvas.standing import Standing, colour, pen
from app.canvas.symbol_shapes import Glyph
from app.canvas.user_symbol import Worn
from app.canvas.wording import step_of
from app.model.drawing import Drawing
from app.model.kinds import OverheadLine, Regulator, Switch

MARGIN = 14.0
HALO = 9.0
POLE = 3.5
ARROW = 13.0  # the arrow at the middle, half of it
NODE_ROOM = 9.0


class Flow(Struct, frozen=True):
    """What a branch shows: breadth in px, and the way power runs (True from start to end, None: no arrow)."""

    width: float = 2.0
    forward: bool | None = None


class BranchItem(ElementItem):
    """A line, with the symbol of a transformer or switch on its longest run."""

    def __init__(self, id: str, look) -> None:
        super().__init__(id, look)
        self.setZValue(1)
        self.points: list[QPointF] = []
        self.at = QPointF()
        self.angle = 0.0
        self.worn: Glyph | Worn | None = None
        self.flow = Flow()
        self.lossless = False  # a switch
        self.parted = False  # an open switch, dead itself and yet perhaps between live ends
        self.step: float | None = None  # percent of a notch of what steps by itself
        self._poles: list[QPointF] = []
        self._runs: list[list[QPointF]] = []
        self._halo = QPainterPath()

    def place(self, drawing: Drawing) -> None:
        self.points = route(drawing, self.id)
        self.at, self.angle = pose(self.points)

    def read(self, drawing: Drawing) -> None:
        element = drawing.elements[self.id]
        self.lossless = isinstance(element, Switch | Regulator)
        self.parted = isinstance(element, Switch) and not element.closed
        self.step = step_of(element)
        self.worn = dress(drawing, element, self.look.symbols)
        self._runs = self._cut()
        whole = sum(distance(a, b) for a, b in zip(self.points, self.points[1:], strict=False))
        poles = isinstance(element, OverheadLine) and self.worn is None
        self._poles = [along(self.points, whole * share) for share in (0.12, 0.88)] if poles else []
        self._halo = self._around()
        self.lay_mark()

    def lay_mark(self) -> None:
        """Before the symbol or the arrow, on the longest run."""
        self.mark = phase_mark.lay(self.phases, *self._free_run()) if self.phases is not None else None
        self._bound()

    def _free_run(self) -> tuple[QPointF, QPointF]:
        """From clear of the node or pole to clear of the symbol or arrow."""
        at = longest(self.points)
        a, b = self.points[at : at + 2]
        size = distance(a, b) or 1.0
        way = (b - a) / size
        half = self.worn.half + 2 if self.worn is not None else ARROW
        near = NODE_ROOM if at == 0 else 2.0
        if self._poles and at == 0:
            near = max(near, distance(self.points[0], self._poles[0]) + POLE + 6)
        near = min(near, size / 4)
        return a + way * near, self.at - way * min(half, size / 4)

    def _bound(self) -> None:
        box = QPolygonF(self.points).boundingRect().united(self.core())
        if self.mark is not None:
            box = box.united(self.mark.box)
        self.bound(box.adjusted(-MARGIN, -MARGIN, MARGIN, MARGIN))

    def show_flow(self, width: float, forward: bool | None) -> None:
        """Breadth and direction; repaints only where they are new."""
        if width != self.flow.width or forward is not self.flow.forward:
            self.flow = Flow(width, forward)
            self.update()

    def core(self) -> QRectF:
        if self.worn is None:
            return QRectF(self.at.x() - 5, self.at.y() - 5, 10, 10)
        turn = QTransform().translate(self.at.x(), self.at.y()).rotate(self.angle)
        return turn.mapRect(self.worn.box)

    def _cut(self) -> list[list[QPointF]]:
        """The route on either side of the symbol."""
        if self.worn is None:
            return [self.points]
        at = longest(self.points)
        half = min(self.worn.half, distance(*self.points[at : at + 2]) / 2)
        step = QPointF(math.cos(math.radians(self.angle)), math.sin(math.radians(self.angle))) * half
        return [[*self.points[: at + 1], self.at - step], [self.at + step, *self.points[at + 1 :]]]

    def _around(self) -> QPainterPath:
        line = QPainterPath(self.points[0])
        for point in self.points[1:]:
            line.lineTo(point)
        stroker = QPainterPathStroker()
        stroker.setWidth(2 * HALO)
        stroker.setCapStyle(Qt.PenCapStyle.RoundCap)
        stroker.setJoinStyle(Qt.PenJoinStyle.RoundJoin)
        halo = stroker.createStroke(line)
        if self.worn is not None:
            symbol = QPainterPath()
            symbol.addRoundedRect(self.core().adjusted(-HALO, -HALO, HALO, HALO), HALO, HALO)
            halo = halo.united(symbol)
        return halo.simplified()

    def paint(self, painter, option, widget=None) -> None:
        palette, stale = self.look.palette, self.look.aged(self.standing)
        if self.lit:
            painter.fillPath(self._halo, halo_colour(palette, self.selected))
        painter.setPen(pen(self.standing, self.flow.width, palette, stale))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        for run in self._runs:
            painter.drawPolyline(run)
        hue = colour(self.standing, palette, stale)
        if self._poles:
            painter.setPen(QPen(hue, 1.6))
            painter.setBrush(palette.paper)
            for point in self._poles:
                painter.drawEllipse(point, POLE + self.flow.width / 4, POLE + self.flow.width / 4)
        if self.worn is not None:
            alarmed = self.standing in (Standing.NEAR, Standing.FAILED, Standing.DEAD) and not stale
            paint_worn(
                painter, self.worn, self.at, self.angle, hue if alarmed else palette.ink, palette.paper
            )
        elif self.flow.forward is not None:
            self._paint_arrow(painter, hue)
        if self.mark is not None:
            phase_mark.paint(painter, self.mark, palette, self.look.printing)

    def _paint_arrow(self, painter, hue) -> None:
        turn = self.angle if self.flow.forward else self.angle + 180
        reach = 5.0 + self.flow.width * 0.7
        head = QPolygonF([QPointF(reach, 0), QPointF(-reach * 0.7, -reach), QPointF(-reach * 0.7, reach)])
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(hue)
        painter.drawPolygon(QTransform().translate(self.at.x(), self.at.y()).rotate(turn).map(head))
