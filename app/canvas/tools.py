"""What the hand does with the pointer just now: one tool at a time answers mouse and keys."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable
from typing import TYPE_CHECKING

from msgspec import Struct
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QKeyEvent, QPainter, QPen

from app.canvas.geometry import GRID, bar_ends, node_point, scene
from app.canvas.palette import Palette
from app.model import edits
from app.model.drawing import Drawing, label
from app.model.kinds import KIND_WORDS, Branch, Busbar, Node, kind_of

if TYPE_CHECKING:
    from app.canvas.view import BoardView

SLACK_PX = 4.0  # a press that moves less than this is a click
ARROWS: dict[int, tuple[int, int]] = {
    Qt.Key.Key_Left: (-1, 0),
    Qt.Key.Key_Right: (1, 0),
    Qt.Key.Key_Up: (0, -1),
    Qt.Key.Key_Down: (0, 1),
}
ENTERS: tuple[int, ...] = (Qt.Key.Key_Return, Qt.Key.Key_Enter)


class Touch(Struct, frozen=True):
    """The pointer at one moment: on the paper, on the screen, and the keys held with it."""

    at: QPointF
    px: QPointF
    modifiers: Qt.KeyboardModifier = Qt.KeyboardModifier.NoModifier

    @property
    def adds(self) -> bool:
        """True where a click adds to the selection."""
        return bool(
            self.modifiers & (Qt.KeyboardModifier.ShiftModifier | Qt.KeyboardModifier.ControlModifier)
        )

    @property
    def shift(self) -> bool:
        """True while Shift is held."""
        return bool(self.modifiers & Qt.KeyboardModifier.ShiftModifier)


class Tool:
    """Does nothing with everything; the tools say what they do otherwise."""

    cursor = Qt.CursorShape.ArrowCursor

    def __init__(self, view: BoardView) -> None:
        self.view = view

    def press(self, touch: Touch) -> None:
        """The left button went down."""

    def move(self, touch: Touch) -> None:
        """The pointer moved, with the button down or not."""

    def release(self, touch: Touch) -> None:
        """The left button went up."""

    def double(self, touch: Touch) -> None:
        """The second press of a double click."""

    def leave(self) -> None:
        """The pointer left the board."""

    def key(self, event: QKeyEvent) -> bool:
        """A key went down; True where the tool has used it."""
        if event.key() == Qt.Key.Key_Escape:
            self.cancel()
        return True

    def cancel(self) -> None:
        """Let go and leave all as it was."""
        self.view.rest()

    def end(self) -> None:
        """The tool is put away: what it holds on the screen goes too."""

    def paint(self, painter: QPainter, palette: Palette) -> None:
        """What floats over the drawing while the tool is in the hand."""


PLURALS = {"branch": "branches", "supply": "supplies"}


def named(drawing: Drawing, ids: Iterable[str]) -> str:
    """`T2`, or `3 elements`."""
    listed = list(ids)
    return label(drawing, listed[0]) if len(listed) == 1 else f"{len(listed)} elements"


def removed(drawing: Drawing, ids: Iterable[str]) -> str:
    """What goes with a deletion: `Lodge with 2 branches and 1 load`, or `T2` alone."""
    chosen = set(ids)
    left = edits.remove(drawing, chosen).elements
    gone = [e for i, e in drawing.elements.items() if i not in left and i not in chosen]
    words = Counter("branch" if isinstance(e, Branch) else KIND_WORDS[kind_of(e)] for e in gone)
    told = [f"{many} {word if many == 1 else PLURALS.get(word, word + 's')}" for word, many in words.items()]
    listed = " and ".join(filter(None, (", ".join(told[:-1]), told[-1]))) if told else ""
    return f"{named(drawing, chosen)} with {listed}" if listed else named(drawing, chosen)


def node_at(drawing: Drawing, x: float, y: float, but: Iterable[str] = ()) -> str | None:
    """The node that covers a grid point, if any."""
    passed = set(but)
    for id, node in drawing.nodes().items():
        if id not in passed and covers(node, x, y):
            return id
    return None


def covers(node: Node, x: float, y: float) -> bool:
    """True where a node stands on a grid point; a bar stands on all of its length."""
    half = node.length / 2 if isinstance(node, Busbar) else 0.0
    reach = (0.0, half) if isinstance(node, Busbar) and node.upright else (half, 0.0)
    return abs(x - node.x) <= reach[0] + 0.25 and abs(y - node.y) <= reach[1] + 0.25


def paint_ring(painter: QPainter, node: Node, palette: Palette) -> None:
    """Marks the node that the hand would land on."""
    painter.setPen(QPen(palette.flow, 2.0))
    painter.setBrush(Qt.BrushStyle.NoBrush)
    if isinstance(node, Busbar):
        first, last = bar_ends(node)
        wide = QPointF(8, 8)
        painter.drawRoundedRect(QRectF(first - wide, last + wide), 8.0, 8.0)
    else:
        painter.drawEllipse(node_point(node), 10.0, 10.0)


def paint_spot(painter: QPainter, x: float, y: float, palette: Palette) -> None:
    """Marks the grid point where a joint would be made."""
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(palette.flow)
    painter.drawEllipse(scene(x, y), GRID / 5, GRID / 5)
