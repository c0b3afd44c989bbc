"""Placing a part from the shelf: its ghost follows the hand on the grid until it is put down."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from msgspec.structs import replace
from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QColor, QKeyEvent, QPainter, QPen

from app.canvas.following import following
from app.canvas.geometry import bar_ends, scene, to_point
from app.canvas.palette import Palette
from app.canvas.symbols import paint_symbol
from app.canvas.tools import ARROWS, ENTERS, Tool, Touch, paint_ring, paint_spot
from app.canvas.tools_pull import Brush, PullTool, Spot, spot_at
from app.model import edits
from app.model.drawing import Drawing, Part, label
from app.model.kinds import KIND_WORDS, Attachment, Branch, Busbar, Node, kind_of

if TYPE_CHECKING:
    from app.canvas.view import BoardView

AHEAD = 8.0  # steps from a node to the far end of a branch that is dropped on it
BESIDE = 1.5  # let go nearer than this many steps to where it was pressed: it finds its own place


class PlaceTool(Tool):
    """A click puts the part down; Shift keeps it in the hand; Esc puts it away.

    An attachment snaps onto the node or line under the hand and can be dragged out from it to where it is
    to stand. A branch is dragged, or clicked, from its one end to the other.
    """

    cursor = Qt.CursorShape.CrossCursor

    def __init__(self, view: BoardView, part: Part) -> None:
        super().__init__(view)
        self.part = part
        self._aim = spot_at(view, view.hand())
        self._pressed: Spot | None = None

    def press(self, touch: Touch) -> None:
        self._aim = spot_at(self.view, touch.at)
        if isinstance(self.part.element, Branch):
            self.view.use(PullTool(self.view, self._aim, Brush(self.part), held=True, placing=True))
        else:
            self._pressed = self._aim

    def move(self, touch: Touch) -> None:
        self._aim = spot_at(self.view, touch.at)
        self.view.float_again()

    def release(self, touch: Touch) -> None:
        if self._pressed is None:
            return
        self._aim = spot_at(self.view, touch.at)
        held_on, self._pressed = self._pressed, None
        self._put(held_on, self._aim, touch.shift)

    def key(self, event: QKeyEvent) -> bool:
        if event.key() == Qt.Key.Key_Escape:
            self.cancel()
        elif event.key() in ENTERS and isinstance(self.part.element, Branch):
            self.view.use(PullTool(self.view, self._aim, Brush(self.part), held=False, placing=True))
        elif event.key() in ENTERS:
            self._put(self._aim, self._aim, bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier))
        elif event.key() in ARROWS:
            dx, dy = ARROWS[event.key()]
            steps = 5 if event.modifiers() & Qt.KeyboardModifier.ShiftModifier else 1
            at = scene(self._aim.x + dx * steps, self._aim.y + dy * steps)
            self._aim = spot_at(self.view, at)
            self.view.show_point(at)
            self.view.float_again()
        return True

    def cancel(self) -> None:
        super().cancel()
        self.view.placing_ended.emit()

    def drop(self, at: QPointF) -> None:
        """Put the part down where it was let go after being dragged from the shelf."""
        spot = spot_at(self.view, at)
        self._put(spot, spot, False)

    def _put(self, on: Spot, at: Spot, again: bool) -> None:
        made = put_down(self.view, self.part, on, at)
        if made is None:
            return
        if not again:
            self.view.rest()
            self.view.placing_ended.emit()

    def paint(self, painter: QPainter, palette: Palette) -> None:
        element, drawing = self.part.element, self.view.drawing
        at = scene(self._aim.x, self._aim.y)
        ghost = QColor(palette.ink)
        ghost.setAlpha(150)
        if isinstance(element, Busbar):
            painter.setPen(QPen(ghost, 5.0))
            painter.drawLine(*bar_ends(replace(element, x=self._aim.x, y=self._aim.y)))
        elif isinstance(element, Node):
            paint_spot(painter, self._aim.x, self._aim.y, palette)
        elif isinstance(element, Attachment):
            self._paint_hanging(painter, palette, element, ghost)
        else:
            paint_symbol(
                painter, kind_of(element), element, self.view.theme.symbols, ghost, palette.paper, at
            )
        if self._aim.node is not None and not isinstance(element, Node):
            paint_ring(painter, self._aim.as_node(drawing), palette)

    def _paint_hanging(self, painter: QPainter, palette: Palette, element: Attachment, ghost: QColor) -> None:
        on = self._pressed or self._aim
        node = on.as_node(self.view.drawing)
        x, y = place_beside(self.view.drawing, element, on, self._aim)
        painter.setPen(QPen(ghost, 1.5))
        painter.drawPolyline(to_point(node, scene(x, y)))
        if on.node is None:
            paint_spot(painter, on.x, on.y, palette)
        paint_symbol(
            painter, kind_of(element), element, self.view.theme.symbols, ghost, palette.paper, scene(x, y)
        )


def place_beside(drawing: Drawing, element: Attachment, on: Spot, at: Spot) -> tuple[float, float]:
    """Where an attachment stands: where it was dragged to, or at its usual place beside its node."""
    if math.dist((on.x, on.y), (at.x, at.y)) >= BESIDE and at.node is None:
        return at.x, at.y
    if on.node is None:
        return on.x + element.dx, on.y + element.dy
    met = on.as_node(drawing)
    dx, dy = edits.free_place(drawing, on.node, element, at.x, at.y)
    return met.x + dx, met.y + dy


def put_down(view: BoardView, part: Part, on: Spot, at: Spot) -> str | None:
    """Put a part on the drawing as one undo step and select it; returns its id, or None if refused."""
    made: list[str] = []

    def change(drawing: Drawing) -> Drawing:
        fresh, id = placed(drawing, part, on, at)
        made[:] = [id]
        one = fresh.elements[id]
        node = one.node if isinstance(one, Attachment) else on.node
        return following(fresh, view.board.solving.outcome, id, node)

    word = KIND_WORDS[kind_of(part.element)]
    if not view.edit(lambda after: f"Place {word} {label(after, made[0])}", change, at=scene(at.x, at.y)):
        return None
    view.attention.select(made)
    if isinstance(part.element, Branch):
        view.brush = Brush(part, made[0])
    return made[0]


def placed(drawing: Drawing, part: Part, on: Spot, at: Spot) -> tuple[Drawing, str]:
    """The drawing with one more element of a part, and its id."""
    drawing, element = edits.made_from(drawing, part)
    if isinstance(element, Branch):
        ahead = AHEAD if on.node is not None else 0.0
        fresh = edits.drop(drawing, element, on.x + ahead, on.y, on.node)
    elif isinstance(element, Attachment):
        drawing, node, at = _hung_on(drawing, on, at)
        fresh = edits.drop(drawing, element, at.x, at.y, node)
    elif on.line is not None and not isinstance(element, Busbar):
        fresh = edits.split_branch(drawing, on.line, on.x, on.y)
    else:
        fresh = edits.drop(drawing, element, on.x, on.y)
    ids = edits.added(drawing, fresh)
    return fresh, next(i for i in reversed(ids) if type(fresh.elements[i]) is type(element))


def _hung_on(drawing: Drawing, on: Spot, at: Spot) -> tuple[Drawing, str | None, Spot]:
    """The node an attachment hangs on, or None for a new joint, and where it is to stand."""
    if on.node is not None or on.line is not None:
        return *on.met(drawing), at
    if at.node is not None:
        return drawing, at.node, on  # pressed on paper, let go on a node: it stays where it was pressed
    if math.dist((on.x, on.y), (at.x, at.y)) < BESIDE:
        return drawing, None, at
    return *on.met(drawing), at
