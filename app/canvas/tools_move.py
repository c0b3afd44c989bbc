"""Moving elements and the rubber band: one drag is one undo step, and the paper's grid holds."""

from __future__ import annotations

from collections.abc import Iterable
from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen

from app.canvas.geometry import attachment_point, bar_ends, distance, node_point, route, snap
from app.canvas.palette import Palette
from app.canvas.tools import Tool, Touch, named, node_at, paint_ring
from app.model import edits
from app.model.drawing import Drawing, label
from app.model.kinds import Attachment, Branch, Busbar, Node

if TYPE_CHECKING:
    from app.canvas.view import BoardView


class MoveTool(Tool):
    """Moves the selection by whole steps of the grid. A single node let go on another joins it."""

    cursor = Qt.CursorShape.SizeAllCursor

    def __init__(self, view: BoardView, ids: Iterable[str], origin: QPointF) -> None:
        super().__init__(view)
        self.ids = frozenset(ids)
        self._origin, self._before = origin, view.session.drawing
        self._gesture = view.session.new_gesture()
        self._text = f"Move {named(self._before, self.ids)}"
        self._by = (0.0, 0.0)
        self._carried = carried(self._before, self.ids)

    def move(self, touch: Touch) -> None:
        by = snap(touch.at - self._origin)
        if by == self._by:
            return
        self._by = by
        self._put(edits.move(self._before, self._carried, *by))

    def release(self, touch: Touch) -> None:
        target = self._target()
        if target is not None:
            (mine,) = self.ids
            text = f"Join {label(self._before, mine)} to {label(self._before, target)}"
            if self.view.edit(text, lambda d: edits.join(d, target, mine), self._gesture, touch.at):
                self.view.attention.select([target])
            else:
                self._put(self._before)
        self.view.rest()

    def cancel(self) -> None:
        self._put(self._before)
        self.view.rest()

    def paint(self, painter: QPainter, palette: Palette) -> None:
        target = self._target()
        if target is not None:
            node = self.view.drawing.elements[target]
            assert isinstance(node, Node)
            paint_ring(painter, node, palette)
        painter.setPen(QPen(palette.tap, 0, Qt.PenStyle.DashLine))
        for line in guides(self.view.drawing, self._carried):
            painter.drawLine(*line)

    def _put(self, drawing: Drawing) -> None:
        self.view.edit(self._text, lambda _: drawing, self._gesture, self._origin)

    def _target(self) -> str | None:
        """The other node that a lone moved joint has come to lie on."""
        drawing = self.view.drawing
        if len(self.ids) != 1 or self._by == (0.0, 0.0):
            return None
        mine = drawing.elements.get(next(iter(self.ids)))
        if not isinstance(mine, Node) or isinstance(mine, Busbar):
            return None
        return node_at(drawing, mine.x, mine.y, self.ids)


def carried(drawing: Drawing, ids: Iterable[str]) -> frozenset[str]:
    """What moves when these are dragged: a branch takes its two nodes along."""
    chosen = frozenset(ids)
    ends: set[str] = set()
    for id in chosen:
        one = drawing.elements[id]
        if isinstance(one, Branch):
            ends |= {one.start, one.end}
    return chosen | ends


def guides(drawing: Drawing, moved: frozenset[str]) -> list[tuple[QPointF, QPointF]]:
    """Lines from moved nodes to still ones that stand level with them or on their upright."""
    nodes = drawing.nodes()
    still = [n for i, n in nodes.items() if i not in moved]
    found: list[tuple[QPointF, QPointF]] = []
    for id in moved & nodes.keys():
        node = nodes[id]
        at = node_point(node)
        for group in ([n for n in still if n.y == node.y], [n for n in still if n.x == node.x]):
            points = sorted((node_point(n) for n in group), key=partial(distance, at))
            found += [(at, point) for point in points[:1]]
    return found


class BandTool(Tool):
    """The rubber band: what lies wholly or partly in it is selected."""

    cursor = Qt.CursorShape.CrossCursor

    def __init__(self, view: BoardView, origin: QPointF, adds: bool) -> None:
        super().__init__(view)
        self._origin, self._at = origin, origin
        self._kept = view.attention.selection if adds else frozenset()

    def move(self, touch: Touch) -> None:
        self._at = touch.at
        self.view.attention.select(self._kept | set(caught(self.view.drawing, self.box)))
        self.view.float_again()

    def release(self, touch: Touch) -> None:
        self.view.rest()

    def cancel(self) -> None:
        self.view.attention.select(self._kept)
        self.view.rest()

    @property
    def box(self) -> QRectF:
        """The band on the paper."""
        return QRectF(self._origin, self._at).normalized()

    def paint(self, painter: QPainter, palette: Palette) -> None:
        wash = QColor(palette.flow)
        wash.setAlpha(28)
        painter.setPen(QPen(palette.flow, 0, Qt.PenStyle.DashLine))
        painter.setBrush(wash)
        painter.drawRect(self.box)


def caught(drawing: Drawing, box: QRectF) -> list[str]:
    """Elements in a band: nodes and attachments by their middle, branches with both ends in it."""
    found = []
    for id, one in drawing.elements.items():
        if isinstance(one, Node):
            inside = box.contains(node_point(one))
        elif isinstance(one, Attachment):
            inside = box.contains(attachment_point(drawing, id))
        else:
            points = route(drawing, id)
            inside = box.contains(points[0]) and box.contains(points[-1])
        if inside:
            found.append(id)
    return found


class HangTool(Tool):
    """Moves an attachment round its node; let go on another node, it hangs there."""

    cursor = Qt.CursorShape.SizeAllCursor

    def __init__(self, view: BoardView, id: str, origin: QPointF) -> None:
        super().__init__(view)
        self.id, self._before = id, view.session.drawing
        self._gesture = view.session.new_gesture()
        self._grip = origin - attachment_point(self._before, id)
        self._onto: str | None = None

    def move(self, touch: Touch) -> None:
        one, node = self._one()
        hit = self.view.hit_node(touch.at)
        self._onto = hit if hit not in (None, one.node) else None
        x, y = snap(touch.at - self._grip)
        if self._onto is None and (x - node.x, y - node.y) != (0.0, 0.0):
            place = {"dx": x - node.x, "dy": y - node.y}
            self._put(lambda d: edits.change(d, self.id, **place))
        self.view.float_again()

    def release(self, touch: Touch) -> None:
        if self._onto is not None:
            onto, text = self._onto, f"Hang {self._name()} on {label(self._before, self._onto)}"
            self.view.edit(text, lambda _: self._hung(onto), self._gesture, touch.at)
        self.view.rest()

    def cancel(self) -> None:
        self._put(lambda _: self._before)
        self.view.rest()

    def paint(self, painter: QPainter, palette: Palette) -> None:
        if self._onto is not None:
            node = self.view.drawing.elements[self._onto]
            assert isinstance(node, Node)
            paint_ring(painter, node, palette)

    def _hung(self, node: str) -> Drawing:
        """On another node it keeps the place it had beside the first."""
        return edits.reattach(self._before, self.id, node)

    def _put(self, change) -> None:
        self.view.edit(f"Move {self._name()}", change, self._gesture)

    def _name(self) -> str:
        return label(self._before, self.id)

    def _one(self) -> tuple[Attachment, Node]:
        one = self._before.elements[self.id]
        assert isinstance(one, Attachment)
        node = self._before.elements[one.node]
        assert isinstance(node, Node)
        return one, node


class BarTool(Tool):
    """Lengthens or shortens a busbar by one of its ends."""

    cursor = Qt.CursorShape.SizeAllCursor

    def __init__(self, view: BoardView, id: str, end: int) -> None:
        super().__init__(view)
        self.id, self._end, self._before = id, end, view.session.drawing
        self._gesture = view.session.new_gesture()

    def move(self, touch: Touch) -> None:
        bar = self._before.elements[self.id]
        assert isinstance(bar, Busbar)
        side = 1 if self._end else -1
        reach = snap(touch.at)[1 if bar.upright else 0]
        middle = bar.y if bar.upright else bar.x
        still = middle - side * bar.length / 2
        length = max(2.0, side * (reach - still))
        centre = still + side * length / 2
        place = {"length": length, "y" if bar.upright else "x": centre}
        self._put(edits.change(self._before, self.id, **place))

    def release(self, touch: Touch) -> None:
        self.view.rest()

    def cancel(self) -> None:
        self._put(self._before)
        self.view.rest()

    def _put(self, drawing: Drawing) -> None:
        text = f"Length of {label(self._before, self.id)}"
        self.view.edit(text, lambda _: drawing, self._gesture)


def bar_handles(bar: Busbar) -> tuple[QPointF, QPointF]:
    """Where the two ends of a bar are taken hold of: on them, as its name stands beyond."""
    return bar_ends(bar)
