"""Pulling a new branch: from a node or the paper, to a node, a line or the paper."""

from __future__ import annotations

from typing import TYPE_CHECKING

from msgspec import Struct
from msgspec.structs import replace
from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QKeyEvent, QPainter, QPen

from app.canvas.following import following
from app.canvas.geometry import GRID, HitKind, between, distance, meet, node_point, scene, snap
from app.canvas.lettering import Run, Style, paint
from app.canvas.palette import Palette
from app.canvas.tools import ARROWS, ENTERS, Tool, Touch, node_at, paint_ring, paint_spot
from app.canvas.tools_length import LengthField
from app.model import edits
from app.model.drawing import Drawing, Part, label
from app.model.edits import EditRefused
from app.model.kinds import KIND_WORDS, Branch, Busbar, Joint, Line, Node, Point, Transformer, kind_of

if TYPE_CHECKING:
    from app.canvas.view import BoardView


REACH = 8.0  # steps to the far end of a branch that nobody has aimed


class Brush(Struct, frozen=True):
    """What new branches are drawn with: a part, and the branch that was drawn with it last."""

    part: Part
    last: str | None = None

    def element(self, drawing: Drawing) -> tuple[Drawing, Branch]:
        """The element to draw: as the last one stands now where it is still there, else as on the shelf."""
        one = drawing.elements.get(self.last or "")
        if isinstance(one, Branch) and type(one) is type(self.part.element):
            fresh = {"tap": 0} if isinstance(one, Transformer) else {}
            again: Branch = replace(one, name="", note="", via=(), **fresh)
            line = self.part.element
            return drawing, with_length_of(again, line) if isinstance(line, Line) else again
        drawing, made = edits.made_from(drawing, self.part)
        if not isinstance(made, Branch):
            raise EditRefused(f"{self.part.name}: cannot be drawn from node to node, allowed is a branch.")
        return drawing, made


def with_length_of(one: Branch, line: Line) -> Branch:
    """A branch with the length of a shelf line, as unsure as it is there."""
    name = "length_m"
    unsure = (*(n for n in one.assumed if n != name), *(n for n in line.assumed if n == name))
    return replace(one, length_m=line.length_m, assumed=unsure)


class Spot(Struct, frozen=True):
    """Where one end of a new branch lands: on a node, on a line (which is parted there), or on paper."""

    x: float
    y: float
    node: str | None = None
    line: str | None = None
    upright: bool = False  # a branch that starts here leaves it up or down

    def met(self, drawing: Drawing) -> tuple[Drawing, str]:
        """The drawing with a node at the spot, and its id."""
        if self.node is not None:
            return drawing, self.node
        if self.line is not None:
            fresh = edits.split_branch(drawing, self.line, self.x, self.y)
        else:
            fresh = edits.drop(drawing, Joint(), self.x, self.y)
        return fresh, next(i for i in edits.added(drawing, fresh) if isinstance(fresh.elements[i], Node))

    def as_node(self, drawing: Drawing) -> Node:
        """The node there, or a stand-in for the one that will be made."""
        met = drawing.elements[self.node] if self.node is not None else None
        return met if isinstance(met, Node) else Joint(x=self.x, y=self.y)


def spot_at(view: BoardView, at: QPointF) -> Spot:
    """What an end would land on at a point of the paper."""
    hit, (x, y) = view.hit(at), snap(at)
    if hit.kind in (HitKind.NODE, HitKind.END):
        node = view.hit_node(at)
        if node is not None:
            return Spot(x, y, node=node)
    if hit.kind is HitKind.BRANCH and isinstance(view.drawing.elements[hit.id], Line):
        return Spot(x, y, line=hit.id)
    return Spot(x, y)


def corner(start: Spot, near: Node, far: Node) -> Point | None:
    """The bend of a branch that leaves its start upright, where its own way would be the other."""
    if not start.upright or isinstance(near, Busbar) or 0.0 in (far.x - near.x, far.y - near.y):
        return None
    return None if isinstance(far, Busbar) and not far.upright else (near.x, far.y)


def drawn(drawing: Drawing, start: Spot, end: Spot, brush: Brush, length: str) -> tuple[Drawing, str, str]:
    """The drawing with one more branch, that branch, and the node at its far end."""
    drawing, element = brush.element(drawing)
    drawing, near = start.met(drawing)
    far = end.node
    if end.line is not None:
        drawing, far = end.met(drawing)
    bend = corner(start, start.as_node(drawing), end.as_node(drawing))
    element = replace(element, via=(bend,) if bend is not None else ())
    before = drawing
    drawing = edits.extend(drawing, near, element, end.x, end.y, far)
    fresh = edits.added(before, drawing)
    branch = next(i for i in fresh if isinstance(drawing.elements[i], Branch))
    far = far or next(i for i in fresh if i != branch)
    if length and isinstance(element, Line):
        drawing = edits.change_text(drawing, branch, "length_m", length)
    return drawing, branch, far


class PullTool(Tool):
    """Draws on from a spot. Held: letting go ends it; not held: the next press or Enter does."""

    cursor = Qt.CursorShape.CrossCursor

    def __init__(
        self, view: BoardView, start: Spot, brush: Brush, *, held: bool, placing: bool = False
    ) -> None:
        super().__init__(view)
        self.start, self.brush = start, brush
        self._held, self._placing = held, placing
        self._from_px: QPointF | None = None
        self._aim = self._first_aim()
        self.field = LengthField(view)
        self.field.follow(view.mapFromScene(scene(start.x, start.y)))

    def _first_aim(self) -> Spot:
        return Spot(self.start.x, self.start.y, node=self.start.node)

    def press(self, touch: Touch) -> None:
        self._look(touch)
        if not self._held:
            self._finish(touch)

    def move(self, touch: Touch) -> None:
        self._from_px = self._from_px or touch.px
        self._look(touch)

    def release(self, touch: Touch) -> None:
        if not self._held:
            return
        self._look(touch)
        if self._aim == self._first_aim() or self._nowhere():
            self._held = False  # a click on the start: the next click is the end
        else:
            self._finish(touch)

    def key(self, event: QKeyEvent) -> bool:
        key = event.key()
        if key == Qt.Key.Key_Escape:
            self.cancel()
        elif key in ENTERS:
            if not event.isAutoRepeat():
                self._aim_ahead()
                self._finish(None)
        elif key in ARROWS and not self.field.text():
            self._step(*ARROWS[key], 5 if event.modifiers() & Qt.KeyboardModifier.ShiftModifier else 1)
        elif isinstance(self.brush.part.element, Line):
            self.field.feed(event)
            if self.field.text():
                self._aim_ahead()
            self.view.float_again()  # the hint gives way to what is typed, and comes back
        return True

    def _aim_ahead(self) -> None:
        """Where nothing was aimed at yet: the first free direction."""
        if self._nowhere():
            x, y = ahead(self.view.drawing, self.start)
            self._aim = Spot(x, y, node=node_at(self.view.drawing, x, y))
            self.view.float_again()

    def end(self) -> None:
        self.field.hide()
        self.field.deleteLater()
        if self._placing:
            self.view.placing_ended.emit()

    def paint(self, painter: QPainter, palette: Palette) -> None:
        drawing = self.view.drawing
        near, far = self.start.as_node(drawing), self._aim.as_node(drawing)
        painter.setPen(QPen(palette.flow, 2.5, Qt.PenStyle.DashLine))
        if not self._nowhere():
            painter.drawPolyline(self._way(near, far))
        for spot in (self.start, self._aim):
            if spot.node is not None:
                paint_ring(painter, spot.as_node(drawing), palette)
            else:
                paint_spot(painter, spot.x, spot.y, palette)
        if isinstance(self.brush.part.element, Line) and not self.field.text():
            hint = ((Run("type its length", Style.QUIET),),)
            paint(painter, hint, scene(self._aim.x, self._aim.y) + QPointF(16, 10), 120, palette)

    def _way(self, near: Node, far: Node) -> list[QPointF]:
        bend = corner(self.start, near, far)
        if bend is None:
            return between(near, far)
        return [node_point(near), scene(*bend), meet(far, scene(*bend))]

    def _look(self, touch: Touch) -> None:
        self._aim = spot_at(self.view, touch.at)
        self.field.follow(touch.px.toPoint())
        self.view.float_again()

    def _step(self, dx: int, dy: int, steps: int) -> None:
        at = scene(self._aim.x + dx * steps, self._aim.y + dy * steps)
        self._aim = spot_at(self.view, at)
        self.view.show_point(at)
        self.field.follow(self.view.mapFromScene(at))
        self.view.float_again()

    def _nowhere(self) -> bool:
        near, far = self.start.as_node(self.view.drawing), self._aim.as_node(self.view.drawing)
        same = self.start.node is not None and self.start.node == self._aim.node
        return same or distance(node_point(near), node_point(far)) < GRID / 2

    def _finish(self, touch: Touch | None) -> None:
        if self._nowhere():
            return
        made = draw(self.view, self.start, self._aim, self.brush, self.field.text())
        if made is None:
            return
        self.view.fresh = made
        if self._placing and touch is not None and touch.shift:
            self._placing = False
            self.view.place(self.brush.part)
        else:
            self.view.rest()


def ahead(drawing: Drawing, start: Spot) -> Point:
    """The far end of a branch that nobody has aimed: a usual length off, to the right if that is free, and
    square to a bar."""
    node = start.as_node(drawing)
    ways: list[Point] = [(1, 0), (0, 1), (0, -1), (-1, 0)]
    if isinstance(node, Busbar):
        ways.sort(key=lambda way: (way[0] == 0) is node.upright)
    runs = []
    for branch in drawing.branches().values():
        if start.node in (branch.start, branch.end):
            far = drawing.elements[branch.end if branch.start == start.node else branch.start]
            assert isinstance(far, Node)
            runs.append((far.x - node.x, far.y - node.y))
    for dx, dy in ways:
        x, y = start.x + dx * REACH, start.y + dy * REACH
        taken = any(dx * a + dy * b > abs(dy * a) + abs(dx * b) for a, b in runs)
        if not taken and node_at(drawing, x, y) is None:
            return x, y
    return start.x + REACH, start.y


def draw(view: BoardView, start: Spot, end: Spot, brush: Brush, length: str = "") -> str | None:
    """Draw a branch as one undo step and select its far node; returns its id, or None if refused."""
    made: list[str] = []

    def change(drawing: Drawing) -> Drawing:
        fresh, *made[:] = drawn(drawing, start, end, brush, length)
        return following(fresh, view.board.solving.outcome, made[0], start.node)

    word = KIND_WORDS[kind_of(brush.part.element)]
    if not view.edit(lambda after: f"Draw {word} {label(after, made[0])}", change, at=scene(end.x, end.y)):
        return None
    branch, far = made
    view.brush = Brush(brush.part, branch)
    view.attention.select([far])
    return branch
