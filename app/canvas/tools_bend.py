"""Rerouting a branch: its runs and bends are dragged, its ends are put on other nodes."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QPainter, QPen

from app.canvas.geometry import GRID, NEAR_ENOUGH, distance, grid, node_point, route, scene, snap
from app.canvas.palette import Palette
from app.canvas.tools import Tool, Touch, paint_ring, paint_spot
from app.model import edits
from app.model.drawing import Drawing, label
from app.model.kinds import Branch, Joint, Node, Point

if TYPE_CHECKING:
    from app.canvas.view import BoardView


class RunTool(Tool):
    """Drags one straight run of a branch sideways, or one bend anywhere."""

    cursor = Qt.CursorShape.SizeAllCursor

    def __init__(self, view: BoardView, id: str, origin: QPointF, run: int | None, bend: int | None) -> None:
        super().__init__(view)
        self.id, self._origin, self._run, self._bend = id, origin, run, bend
        self._before = view.session.drawing
        self._gesture = view.session.new_gesture()
        self._via: tuple[Point, ...] | None = None

    def move(self, touch: Touch) -> None:
        if self._run is not None:
            via = shifted_run(route(self._before, self.id), self._run, snap(touch.at - self._origin))
        else:
            assert self._bend is not None
            via = list(bends(self._before, self.id))
            via[self._bend] = snap(touch.at)
        if tuple(via) != self._via:
            self._via = tuple(via)
            self._put(edits.reroute(self._before, self.id, via))

    def release(self, touch: Touch) -> None:
        if self._via is not None:
            self._put(tidied(self.view.drawing, self.id))
        self.view.rest()

    def cancel(self) -> None:
        self._put(self._before)
        self.view.rest()

    def _put(self, drawing: Drawing) -> None:
        self.view.edit(f"Reroute {label(self._before, self.id)}", lambda _: drawing, self._gesture)


def bends(drawing: Drawing, id: str) -> tuple[Point, ...]:
    """The bends of a branch as drawn, those of its default route included."""
    branch = drawing.elements[id]
    assert isinstance(branch, Branch)
    return branch.via or tuple(grid(p) for p in route(drawing, id)[1:-1])


def shifted_run(points: Sequence[QPointF], run: int, by: Point) -> list[Point]:
    """Bends after one run has moved sideways: a level run up or down, an upright one left or right, a
    slanting one freely."""
    a, b = points[run], points[run + 1]
    dx, dy = by[0] * GRID, by[1] * GRID
    if abs(a.y() - b.y()) < NEAR_ENOUGH:
        dx = 0.0
    elif abs(a.x() - b.x()) < NEAR_ENOUGH:
        dy = 0.0
    step = QPointF(dx, dy)
    before = points[1:run] if run > 0 else []
    after = points[run + 2 : -1]
    return [grid(p) for p in [*before, a + step, b + step, *after]]


def tidied(drawing: Drawing, id: str) -> Drawing:
    """Without bends that make no difference to the line."""
    shape = _corners(route(drawing, id))
    tidy = edits.reroute(drawing, id, ())
    if _corners(route(tidy, id)) == shape:
        return tidy
    k = 0
    while True:
        branch = drawing.elements[id]
        assert isinstance(branch, Branch)
        if k >= len(branch.via):
            return drawing
        fewer = edits.reroute(drawing, id, branch.via[:k] + branch.via[k + 1 :])
        if len(branch.via) > 1 and _corners(route(fewer, id)) == shape:
            drawing = fewer
        else:
            k += 1


def _corners(points: Sequence[QPointF]) -> list[tuple[float, float]]:
    """The polyline without points that lie on a straight run."""
    kept = [points[0]]
    for a, b, c in zip(points, points[1:], points[2:], strict=False):
        u, v = b - a, c - b
        if abs(u.x() * v.y() - u.y() * v.x()) > NEAR_ENOUGH or QPointF.dotProduct(u, v) < 0:
            kept.append(b)
    kept.append(points[-1])
    return [(round(p.x(), 3), round(p.y(), 3)) for p in kept]


def with_bend(drawing: Drawing, id: str, run: int, at: QPointF) -> Drawing:
    """One bend more, on a run of the line."""
    via = list(bends(drawing, id))
    points = route(drawing, id)
    on_bar = bool(via) and distance(scene(*via[0]), points[0]) < NEAR_ENOUGH  # no point of its own
    via.insert(min(run + on_bar, len(via)), snap(at))
    return edits.reroute(drawing, id, via)


def without_bend(drawing: Drawing, id: str, bend: int) -> Drawing:
    """One bend less."""
    via = bends(drawing, id)
    return edits.reroute(drawing, id, via[:bend] + via[bend + 1 :])


class EndTool(Tool):
    """Puts one end of a branch on another node, or on a new joint where it is let go on empty paper."""

    cursor = Qt.CursorShape.CrossCursor

    def __init__(self, view: BoardView, id: str, end: int) -> None:
        super().__init__(view)
        self.id, self._end = id, ("start", "end")[end]
        points = route(view.drawing, id)
        self._fixed = points[-1] if end == 0 else points[0]
        self._at = points[0] if end == 0 else points[-1]

    def move(self, touch: Touch) -> None:
        self._at = touch.at
        self.view.float_again()

    def release(self, touch: Touch) -> None:
        drawing, node = self.view.drawing, self.view.hit_node(touch.at)
        branch = drawing.elements[self.id]
        if node != getattr(branch, self._end):
            where = label(drawing, node) if node is not None else "a new joint"
            text = f"Put {label(drawing, self.id)} on {where}"
            self.view.edit(text, lambda d: self._connected(d, node, touch.at), at=touch.at)
        self.view.rest()

    def _connected(self, drawing: Drawing, node: str | None, at: QPointF) -> Drawing:
        if node is None:
            before, (x, y) = drawing, snap(at)
            drawing = edits.drop(drawing, Joint(), x, y)
            (node,) = edits.added(before, drawing)
        return edits.reconnect(drawing, self.id, self._end, node)

    def paint(self, painter: QPainter, palette: Palette) -> None:
        painter.setPen(QPen(palette.flow, 2.0, Qt.PenStyle.DashLine))
        target = self.view.hit_node(self._at)
        node = self.view.drawing.elements[target] if target is not None else None
        painter.drawLine(self._fixed, node_point(node) if isinstance(node, Node) else self._at)
        if isinstance(node, Node):
            paint_ring(painter, node, palette)
        else:
            paint_spot(painter, *snap(self._at), palette)
