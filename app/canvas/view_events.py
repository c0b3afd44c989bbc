"""How the view hears pointer, keys, wheel, pinch and drops, and passes them to the tool in the hand."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QEvent, QPoint, QPointF, QRectF, Qt, Signal
from PySide6.QtGui import QKeyEvent, QMouseEvent, QNativeGestureEvent, QPainter, QResizeEvent, QWheelEvent
from PySide6.QtWidgets import QGestureEvent, QGraphicsScene, QGraphicsView, QPinchGesture, QWidget

from app.canvas import tools_travel as travel
from app.canvas.geometry import HitKind
from app.canvas.tools import Tool, Touch
from app.canvas.tools_clip import PART_MIME
from app.model.errors import FileError
from app.model.parts import decode_part

if TYPE_CHECKING:
    from app.canvas.view import BoardView

PAPER = QRectF(-1e5, -1e5, 2e5, 2e5)


class EventView(QGraphicsView):
    """Turns Qt's events into touches and keys; knows nothing of what tools do with them."""

    refused = Signal(str, QPointF)  # why, and where on the paper
    tool: Tool
    idle: Tool

    def __init__(self, scene: QGraphicsScene) -> None:
        super().__init__(scene)
        self.pointer: QPointF | None = None  # in viewport pixels, while it is over the board
        self.fitted = False  # shown whole, and the person has neither zoomed nor scrolled since
        self._panning: QPointF | None = None
        self._space = False
        self._to_scene = False  # the press went to a ladder, so the rest of the drag does too
        self.setSceneRect(PAPER)
        self.setFrameShape(QGraphicsView.Shape.NoFrame)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setRenderHints(QPainter.RenderHint.Antialiasing | QPainter.RenderHint.TextAntialiasing)
        self.setTransformationAnchor(QGraphicsView.ViewportAnchor.NoAnchor)
        self.setResizeAnchor(QGraphicsView.ViewportAnchor.AnchorViewCenter)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAcceptDrops(True)
        self.setViewport(QWidget())  # one of Qt's own making would make Python learn every sort of widget
        self.viewport().setMouseTracking(True)
        self.viewport().grabGesture(Qt.GestureType.PinchGesture)

    def hit(self, at: QPointF):
        """What lies under a point of the paper."""
        raise NotImplementedError

    def part_dragged(self, part) -> None:
        """A part from the shelf hovers over the board."""
        raise NotImplementedError

    def part_dropped(self, at: QPointF) -> None:
        """It was let go."""
        raise NotImplementedError

    def key_pressed(self, event: QKeyEvent) -> bool:
        """A key that no tool wanted; True where it was used."""
        raise NotImplementedError

    def key_released(self, event: QKeyEvent) -> bool:
        """The same on its way up."""
        raise NotImplementedError

    def select_next(self, step: int) -> bool:
        """Go on to the next element; False past the last."""
        raise NotImplementedError

    def show_menu(self, px: QPoint, keyed: bool) -> None:
        """Show the context menu."""
        raise NotImplementedError

    def paper(self, px: QPointF) -> QPointF:
        """The point of the paper under a viewport pixel, to a fraction of it."""
        return self.viewportTransform().inverted()[0].map(px)

    def touch(self, px: QPointF, modifiers: Qt.KeyboardModifier) -> Touch:
        """A moment of the pointer."""
        self.pointer = px
        return Touch(self.paper(px), px, modifiers)

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        if self.fitted:
            travel.fit(self)  # type: ignore[arg-type]

    # pointer ------------------------------------------------------------------------------------

    def mousePressEvent(self, event: QMouseEvent) -> None:
        left = event.button() == Qt.MouseButton.LeftButton
        if event.button() == Qt.MouseButton.MiddleButton or (left and self._space):
            self._panning = event.position()
            self.viewport().setCursor(Qt.CursorShape.ClosedHandCursor)
        elif left:
            touch = self.touch(event.position(), event.modifiers())
            self._to_scene = self.tool is self.idle and self.hit(touch.at).kind is HitKind.LADDER
            if self._to_scene:
                super().mousePressEvent(event)
            else:
                self.scene().clearFocus()
                self.tool.press(touch)

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        if event.button() != Qt.MouseButton.LeftButton:
            return
        touch = self.touch(event.position(), event.modifiers())
        if self.tool is not self.idle or self.hit(touch.at).kind is HitKind.LADDER:
            self.mousePressEvent(event)
        else:
            self.tool.double(touch)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        touch = self.touch(event.position(), event.modifiers())
        if self._panning is not None:
            travel.shift(self, self._panning - touch.px)
            self._panning = touch.px
        elif self._to_scene:
            super().mouseMoveEvent(event)
        else:
            self.tool.move(touch)
            if self.tool is self.idle and not event.buttons():
                super().mouseMoveEvent(event)  # ladders hear of the hover

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        touch = self.touch(event.position(), event.modifiers())
        if self._panning is not None:
            self._panning = None
            self.viewport().setCursor(self.tool.cursor)
        elif event.button() == Qt.MouseButton.LeftButton:
            if self._to_scene:
                self._to_scene = False
                super().mouseReleaseEvent(event)
                event.accept()  # the ladder may be gone meanwhile
            else:
                self.tool.release(touch)

    def contextMenuEvent(self, event) -> None:
        if self.tool is not self.idle:
            self.tool.cancel()
            return
        keyed = event.reason() == event.Reason.Keyboard
        self.show_menu(self.viewport().rect().center() if keyed else event.pos(), keyed)

    # keys ---------------------------------------------------------------------------------------

    def event(self, event: QEvent) -> bool:
        if event.type() == QEvent.Type.ShortcutOverride and self.tool is not self.idle:
            event.accept()  # no menu may act under a tool that is at work
            return True
        return super().event(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if self.tool is not self.idle:
            self.tool.key(event)
        elif event.key() == Qt.Key.Key_Space and not event.modifiers():
            if not event.isAutoRepeat():
                self._space = True
                self.viewport().setCursor(Qt.CursorShape.OpenHandCursor)
        elif not self.key_pressed(event):
            super().keyPressEvent(event)

    def keyReleaseEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Space and self._space and not event.isAutoRepeat():
            self._space = False
            self.viewport().setCursor(self.tool.cursor)
        elif not self.key_released(event):
            super().keyReleaseEvent(event)

    def focusNextPrevChild(self, next: bool) -> bool:
        if self.tool is not self.idle or self.select_next(1 if next else -1):
            return True
        return super().focusNextPrevChild(next)

    # wheel, pinch, drops -------------------------------------------------------------------------

    def wheelEvent(self, event: QWheelEvent) -> None:
        zooms = bool(event.modifiers() & Qt.KeyboardModifier.ControlModifier)
        at = self.touch(event.position(), event.modifiers()).at
        if not zooms and self.hit(at).kind is HitKind.LADDER:
            super().wheelEvent(event)
        else:
            travel.wheel(self, event)
        event.accept()

    def viewportEvent(self, event: QEvent) -> bool:
        if event.type() == QEvent.Type.Leave:
            self.pointer = None
            self.tool.leave()
        elif isinstance(event, QNativeGestureEvent):
            if event.gestureType() == Qt.NativeGestureType.ZoomNativeGesture:
                travel.zoom(self, 1.0 + event.value(), event.position())
                return True
        elif isinstance(event, QGestureEvent):
            pinch = event.gesture(Qt.GestureType.PinchGesture)
            if isinstance(pinch, QPinchGesture):
                middle = self.viewport().mapFromGlobal(pinch.centerPoint())
                travel.zoom(self, pinch.scaleFactor(), QPointF(middle))
                return True
        return super().viewportEvent(event)

    def dragEnterEvent(self, event) -> None:
        if not event.mimeData().hasFormat(PART_MIME):
            event.ignore()
            return
        try:
            part = decode_part(bytes(event.mimeData().data(PART_MIME).data()))
        except FileError as error:
            self.refused.emit(str(error), self.paper(event.position()))
            event.ignore()
            return
        self.touch(event.position(), event.modifiers())
        self.part_dragged(part)
        event.acceptProposedAction()

    def dragMoveEvent(self, event) -> None:
        self.tool.move(self.touch(event.position(), event.modifiers()))
        event.acceptProposedAction()

    def dragLeaveEvent(self, event) -> None:
        self.tool.cancel()

    def dropEvent(self, event) -> None:
        self.part_dropped(self.touch(event.position(), event.modifiers()).at)
        event.acceptProposedAction()

    def drawForeground(self, painter: QPainter, rect) -> None:
        view: BoardView = self  # type: ignore[assignment]
        self.tool.paint(painter, view.theme.palette)
