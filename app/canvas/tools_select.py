"""The hand at rest: selects, hovers, and takes up the tool that a drag calls for."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QKeyEvent, QPainter

from app.canvas.geometry import Hit, HitKind, distance, node_point, pose, route
from app.canvas.palette import Palette
from app.canvas.tools import SLACK_PX, Tool, Touch
from app.canvas.tools_bend import EndTool, RunTool, with_bend, without_bend
from app.canvas.tools_handles import Handle, covers_words, handle_at, handles_of, paint_handles, strays
from app.canvas.tools_move import BandTool, BarTool, HangTool, MoveTool
from app.canvas.tools_pull import PullTool, Spot
from app.model.drawing import label
from app.model.kinds import Branch, Busbar, Line, Node

if TYPE_CHECKING:
    from app.canvas.view import BoardView

SYMBOL_REACH = 30.0  # a double click this near to a branch's symbol means its name


class SelectTool(Tool):
    """Click selects, Shift or Ctrl adds, a drag moves, bends, pulls or bands, a double click renames."""

    def __init__(self, view: BoardView) -> None:
        super().__init__(view)
        self._pressed: Touch | None = None
        self._hit = Hit(HitKind.PAPER)
        self._handle: Handle | None = None
        self._near = ""  # the node whose handles show
        self._hand = QPointF()
        self._narrow: str | None = None  # what a click without a drag selects alone

    # pressing ------------------------------------------------------------------------------------

    def press(self, touch: Touch) -> None:
        self._pressed, self._narrow = touch, None
        self._hit = self.view.hit_words(touch.at)
        grips = (HitKind.BEND, HitKind.END)
        self._handle = None if self._hit.kind in grips else self._handle_at(touch.at)
        if self._handle is None and self._hit.kind not in grips:
            self._choose(touch)

    def _choose(self, touch: Touch) -> None:
        attention, id = self.view.attention, self._hit.id
        chosen = attention.selection
        if not id:
            if not touch.adds:
                attention.select(())
        elif touch.adds:
            attention.select(chosen ^ {id})
        elif id not in chosen:
            attention.select([id])
        elif len(chosen) > 1:
            self._narrow = id

    def move(self, touch: Touch) -> None:
        self._hand = touch.at
        if self._pressed is None:
            self._hover(touch)
            return
        gone = touch.px - self._pressed.px
        if max(abs(gone.x()), abs(gone.y())) < SLACK_PX:
            return
        tool = self._tool_for_drag(self._pressed)
        self._pressed = None
        if tool is not None:
            self.view.use(tool)
            tool.move(touch)

    def release(self, touch: Touch) -> None:
        if self._pressed is not None and self._narrow is not None:
            self.view.attention.select([self._narrow])
        self._pressed = None

    def _tool_for_drag(self, touch: Touch) -> Tool | None:
        view, hit, chosen = self.view, self._hit, self.view.attention.selection
        if self._handle is not None:
            return self._handle_tool(self._handle)
        if hit.kind is HitKind.PAPER:
            return BandTool(view, touch.at, touch.adds)
        if hit.kind is HitKind.BEND:
            return RunTool(view, hit.id, touch.at, None, hit.index)
        if hit.kind is HitKind.END:
            return EndTool(view, hit.id, hit.index)
        if hit.id not in chosen:
            return None  # a Ctrl click took it off the selection
        if len(chosen) > 1 or hit.kind is HitKind.NODE:
            return MoveTool(view, chosen, touch.at)
        if hit.kind is HitKind.ATTACHMENT:
            return HangTool(view, hit.id, touch.at)
        return RunTool(view, hit.id, touch.at, hit.index, None) if hit.kind is HitKind.BRANCH else None

    def _handle_tool(self, handle: Handle) -> Tool:
        if handle.end is not None:
            return BarTool(self.view, handle.node, handle.end)
        middle = self.view.drawing.elements[handle.node]
        upright = isinstance(middle, Node) and abs(handle.at.x() - node_point(middle).x()) < 1
        return pull_from(self.view, handle.node, held=True, upright=upright)

    # double click, hover, keys ---------------------------------------------------------------------

    def double(self, touch: Touch) -> None:
        """On a bend: one less. On a line: one more. On anything with a symbol: its name."""
        hit, view = self.view.hit_words(touch.at), self.view
        self._pressed = None
        if not hit.id or hit.kind is HitKind.LADDER:
            return
        view.attention.select([hit.id])
        text = f"Reroute {label(view.drawing, hit.id)}"
        if hit.kind is HitKind.BEND:
            view.edit(text, lambda d: without_bend(d, hit.id, hit.index), at=touch.at)
        elif hit.kind is HitKind.BRANCH and not self._on_symbol(hit.id, touch.at):
            view.edit(text, lambda d: with_bend(d, hit.id, hit.index, touch.at), at=touch.at)
        else:
            view.rename_selection()

    def _on_symbol(self, id: str, at: QPointF) -> bool:
        one = self.view.drawing.elements[id]
        if not isinstance(one, Branch) or isinstance(one, Line):
            return False
        return distance(pose(route(self.view.drawing, id))[0], at) < SYMBOL_REACH

    def _hover(self, touch: Touch) -> None:
        hit = self.view.hit_words(touch.at)
        self.view.attention.look_at(hit.id)
        before = (self._near, self._handle)
        if hit.kind is HitKind.NODE:
            self._near = hit.id
        elif self._near and strays(self.view, self._near, touch.at):
            self._near = ""
        grips = (HitKind.BEND, HitKind.END)
        self._handle = None if hit.kind in grips else self._handle_at(touch.at)
        self.view.viewport().setCursor(self._cursor_over(hit))
        on_bar = isinstance(self.view.drawing.elements.get(self._near), Busbar)
        if before != (self._near, self._handle) or on_bar:
            self.view.float_again()

    def leave(self) -> None:
        self._near, self._handle = "", None
        self.view.attention.look_at("")
        self.view.float_again()

    def _cursor_over(self, hit: Hit) -> Qt.CursorShape:
        if self._handle is not None:
            return Qt.CursorShape.CrossCursor
        if hit.kind in (HitKind.BEND, HitKind.END, HitKind.NODE, HitKind.ATTACHMENT):
            return Qt.CursorShape.SizeAllCursor
        if hit.kind is HitKind.LADDER:
            return Qt.CursorShape.SizeVerCursor
        return Qt.CursorShape.PointingHandCursor if hit.kind is HitKind.BRANCH else self.cursor

    def key(self, event: QKeyEvent) -> bool:
        return False

    def cancel(self) -> None:
        self._pressed = None

    # handles -----------------------------------------------------------------------------------------

    def _handles(self) -> list[Handle]:
        shown = [self._near] if self._near else []
        if len(self.view.attention.selection) == 1:
            shown += [i for i in self.view.attention.selection if i != self._near]
        return [h for id in shown for h in handles_of(self.view, id, self._hand)]

    def _handle_at(self, point: QPointF) -> Handle | None:
        return handle_at(self._handles(), point, self.view.scale_now())

    def paint(self, painter: QPainter, palette: Palette) -> None:
        seen = [h for h in self._handles() if h == self._handle or not covers_words(self.view, h)]
        paint_handles(painter, seen, self._handle, palette)


def pull_from(view: BoardView, node: str, *, held: bool, upright: bool = False) -> PullTool:
    """The tool that draws on from a node with the last used branch part."""
    met = view.drawing.elements[node]
    assert isinstance(met, Node)
    return PullTool(view, Spot(met.x, met.y, node=node, upright=upright), view.brush, held=held)
