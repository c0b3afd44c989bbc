"""Handles that the hand finds beside a node: to pull a new branch, and to lengthen a busbar."""

from __future__ import annotations

from typing import TYPE_CHECKING

from msgspec import Struct
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QPainter, QPen

from app.canvas.geometry import GRID, distance, meet, node_point
from app.canvas.palette import Palette
from app.canvas.tag import Caption
from app.canvas.tools_move import bar_handles
from app.model.kinds import Busbar, Node

if TYPE_CHECKING:
    from app.canvas.view import BoardView

AWAY = 1.3 * GRID  # from the node's middle, or from the bar
REACH = 8.0
RING = 6.0
LINGER = 2.2 * GRID  # how far the hand may stray before the handles of a node go away


class Handle(Struct, frozen=True):
    """One handle. end: 0 or 1 of a busbar to be lengthened, or None to pull a branch."""

    node: str
    at: QPointF
    end: int | None = None


def handles_of(view: BoardView, id: str, hand: QPointF) -> list[Handle]:
    """The handles of one node; on a bar the ones to pull stay level with the hand."""
    node = view.drawing.elements.get(id)
    if isinstance(node, Busbar):
        level = meet(node, hand)
        side = QPointF(AWAY, 0) if node.upright else QPointF(0, AWAY)
        pulls = [Handle(id, level - side), Handle(id, level + side)]
        ends = [Handle(id, p, k) for k, p in enumerate(bar_handles(node))]
        return pulls + (ends if id in view.attention.selection else [])
    if isinstance(node, Node):
        middle = node_point(node)
        around = (QPointF(AWAY, 0), QPointF(-AWAY, 0), QPointF(0, AWAY), QPointF(0, -AWAY))
        return [Handle(id, middle + step) for step in around]
    return []


def covers_words(view: BoardView, handle: Handle) -> bool:
    """True where a handle would hide words; such a one shows only under the hand."""
    ring = QRectF(handle.at.x() - RING, handle.at.y() - RING, 2 * RING, 2 * RING)
    found = (i for i in view.board.items(ring) if isinstance(i, Caption) and i.lines)
    return any(words.spot.box.intersects(ring) for words in found)


def handle_at(handles: list[Handle], point: QPointF, scale: float) -> Handle | None:
    """The handle under a point; scale is screen pixels a scene pixel."""
    near = [h for h in handles if distance(h.at, point) <= REACH / min(scale, 1.0)]
    return min(near, key=lambda h: distance(h.at, point), default=None)


def strays(view: BoardView, id: str, point: QPointF) -> bool:
    """True where the hand has left the neighbourhood of a node."""
    node = view.drawing.elements.get(id)
    return not isinstance(node, Node) or distance(meet(node, point), point) > LINGER


def paint_handles(painter: QPainter, handles: list[Handle], held: Handle | None, palette: Palette) -> None:
    """Small rings with a plus to pull a branch, small bars to lengthen; the one under the hand is full."""
    for handle in handles:
        full = handle == held
        painter.setPen(QPen(palette.flow, 1.5))
        painter.setBrush(palette.flow if full else palette.paper)
        at = handle.at
        if handle.end is not None:
            painter.drawRect(int(at.x()) - 4, int(at.y()) - 4, 8, 8)
            continue
        painter.setOpacity(1.0 if full else 0.6)
        painter.drawEllipse(at, RING, RING)
        painter.setPen(QPen(palette.paper if full else palette.flow, 1.5, Qt.PenStyle.SolidLine))
        painter.drawLine(at - QPointF(3, 0), at + QPointF(3, 0))
        painter.drawLine(at - QPointF(0, 3), at + QPointF(0, 3))
        painter.setOpacity(1.0)
