"""Getting about on the paper: zoom round the hand, pan, fit."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, QRectF, Qt

from app.canvas.geometry import GRID

if TYPE_CHECKING:
    from PySide6.QtGui import QWheelEvent

    from app.canvas.view import BoardView
    from app.canvas.view_events import EventView

SMALLEST, LARGEST = 0.08, 8.0
ENOUGH = 1.4  # a small drawing is not blown up beyond this
MARGIN = 1.5 * GRID
A_KEY = 1.25  # one press of + or −
A_WHEEL_CLICK = 1.15
EMPTY = QRectF(-20 * GRID, -12 * GRID, 40 * GRID, 24 * GRID)


def zoom(view: EventView, factor: float, at: QPointF) -> None:
    """Scale the view; the point of the paper under `at`, in viewport pixels, stays there."""
    now = view.transform().m11()
    factor = min(max(now * factor, SMALLEST), LARGEST) / now
    held = view.viewportTransform().inverted()[0].map(at)
    view.fitted = False
    view.scale(factor, factor)
    strayed = view.viewportTransform().map(held) - at
    shift(view, strayed)


def shift(view: EventView, by: QPointF) -> None:
    """Move the paper under the window by viewport pixels."""
    view.fitted = False
    level, upright = view.horizontalScrollBar(), view.verticalScrollBar()
    level.setValue(level.value() + round(by.x()))
    upright.setValue(upright.value() + round(by.y()))


def wheel(view: EventView, event: QWheelEvent) -> None:
    """Ctrl zooms, Shift goes sideways, else the paper scrolls; touch pads by their own pixels."""
    if event.modifiers() & Qt.KeyboardModifier.ControlModifier:
        zoom(view, A_WHEEL_CLICK ** (event.angleDelta().y() / 120), event.position())
        return
    fine = event.pixelDelta()
    by = QPointF(fine) if not fine.isNull() else QPointF(event.angleDelta()) * (3 * GRID / 120)
    if event.modifiers() & Qt.KeyboardModifier.ShiftModifier and by.x() == 0:
        by = by.transposed()
    shift(view, -by)


def fit(view: BoardView) -> None:
    """Show the whole drawing, small ones not larger than life; until zoomed or scrolled it stays fitted."""
    box = view.board.itemsBoundingRect() if view.drawing.elements else EMPTY
    box = box.adjusted(-MARGIN, -MARGIN, MARGIN, MARGIN)
    room = view.viewport().rect()
    scale = min(room.width() / box.width(), room.height() / box.height(), ENOUGH)
    scale = min(max(scale, SMALLEST), LARGEST)
    view.resetTransform()
    view.scale(scale, scale)
    view.centerOn(box.center())
    view.fitted = True
