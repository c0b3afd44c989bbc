"""The tap ladder: a notched rail beside a transformer, and the rung that is dragged along it."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPainterPath, QPen
from PySide6.QtWidgets import QGraphicsItem, QGraphicsObject

from app.canvas.element_item import halo_colour
from app.canvas.ladder_curve import WIDTH, Prospect, left_out_words, paint_losses, paint_safe
from app.canvas.ladder_scale import Scale
from app.canvas.lettering import Run, Style, line_height, paint
from app.canvas.theme import Theme
from app.canvas.tools_tap import TapHold, nameplate_words
from app.live.session import Session
from app.live.solving import Solving
from app.model import taps
from app.model.drawing import label
from app.model.figures import loss
from app.model.kinds import Transformer

if TYPE_CHECKING:
    from app.canvas.board import Board
    from app.study import TapCurve

EDGE = 13.0  # above and below the rail, for the end labels and the rung
RAIL_X = 8.0 + WIDTH + 16.0
WORDS_X = RAIL_X + 18.0
WIDE = WORDS_X + 108.0
RUNG = QRectF(-10, -5, 20, 10)
TOUCH = 14.0  # on either side of the rail
CLICK = 120  # the wheel's own eighths of a degree for one notch
KEYS = {Qt.Key.Key_Up: 1, Qt.Key.Key_Down: -1}


class TapLadder(QGraphicsObject):
    """Up is the higher nameplate voltage. Drag the rung, click a notch, turn the wheel, or use the keys."""

    def __init__(self, board: Board, id: str, session: Session, solving: Solving, theme: Theme) -> None:
        super().__init__()
        self.id = id
        self._board, self._session, self._solving, self._theme = board, session, solving, theme
        self.hold = TapHold(session, solving, id)
        self._grip = 0.0  # from the rung's middle to where it was taken
        self._turned = 0  # of the wheel, short of a notch
        self._pointed: int | None = None
        self._shown: tuple | None = None
        self._curve: TapCurve | None = None
        self._bounds = QRectF()
        self.setAcceptHoverEvents(True)
        self.setFlag(QGraphicsItem.GraphicsItemFlag.ItemIsFocusable)
        solving.curved.connect(self._curved)
        self.follow()

    # what it shows ------------------------------------------------------------------------------

    @property
    def transformer(self) -> Transformer | None:
        """The transformer as it stands."""
        return self.hold.transformer

    @property
    def notches(self) -> Scale:
        """Where the notches lie."""
        t = self.transformer
        return Scale.of(t) if t is not None else Scale(0, 0)

    @property
    def prospect(self) -> Prospect | None:
        """What the notches would yield in the case shown, as far as it is known."""
        curve = self._solving.curve(self.id)
        if curve is None:
            return None
        losses = np.atleast_2d(np.asarray(curve.loss_kw).T).T
        case = min(self._board.attention.case, losses.shape[1] - 1)
        known = Prospect(np.asarray(curve.notches), losses[:, case], np.asarray(curve.holds, dtype=bool))
        return known if known.best is not None else None

    @property
    def fed_winding(self) -> int:
        """1, or 2 where a supply holds winding 2."""
        outcome = self._solving.outcome
        return outcome.supply_winding(self.id, self._board.attention.case) if outcome is not None else 1

    def words(self, notch: int) -> str:
        """`10 725 V −2.5 %`."""
        t = self.transformer
        return nameplate_words(t, notch) if t is not None else ""

    def effect(self, notch: int) -> str:
        """`raises HS`: what a notch does to the node on the winding that is not fed."""
        t = self.transformer
        if t is None:
            return ""
        verb = taps.effect(t, notch, self.fed_winding)
        far = t.end if self.fed_winding == 1 else t.start
        return f"{verb} {label(self._session.drawing, far)}" if verb else "nameplate"

    def follow(self) -> None:
        """Read drawing and figures again; repaints only where something shown is new."""
        t = self.transformer
        self.setVisible(t is not None and self.notches.steps > 0)
        if t is None:
            return
        bounds = QRectF(0, 0, WIDE, self.notches.height + 2 * EDGE)
        if bounds != self._bounds:
            self.prepareGeometryChange()
            self._bounds = bounds
        curve = self._solving.curve(self.id)
        now = (t, self.effect(t.tap), self._solving.stale, self._board.attention.case)
        if now != self._shown or curve is not self._curve:  # curves hold arrays, which have no one equality
            self._shown, self._curve = now, curve
            self.setToolTip(self._tip(t))
            self.update()

    def _tip(self, t: Transformer) -> str:
        said = taps.words(t, t.tap, self.fed_winding)
        prospect = self.prospect
        best = prospect.best if prospect is not None else None
        if prospect is None or best is None:
            return f"{label(self._session.drawing, self.id)}, {said}"
        holds = "" if prospect.holding(best) else " (no notch holds every voltage limit)"
        holds += left_out_words(self._curve, self._session.drawing.cases)
        least = f"least loss at {self.words(best)}: {loss(prospect.loss(best) or 0.0)}{holds}"
        return f"{label(self._session.drawing, self.id)}, {said}; {least}"

    def _curved(self, id: str) -> None:
        if id == self.id:
            self.follow()

    # painting -----------------------------------------------------------------------------------

    def boundingRect(self) -> QRectF:
        return self._bounds  # kept: the scene finds an item again by the box it was told of last

    def shape(self) -> QPainterPath:
        """Only the rail and its rung can be touched; the rest lets the hand through to what lies below."""
        path = QPainterPath()
        path.addRect(QRectF(RAIL_X - TOUCH, 0, 2 * TOUCH, self._bounds.height()))
        return path

    def paint(self, painter: QPainter, option, widget=None) -> None:
        t = self.transformer
        if t is None:
            return
        palette, scale, prospect, rail = self._theme.palette, self.notches, self.prospect, self._rail
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        self._paint_plate(painter)
        if prospect is not None:
            aged = self._solving.stale or not self._solving.curve_is_current(self.id)
            painter.setOpacity(0.45 if aged else 1.0)
            paint_safe(painter, scale, prospect, rail, palette)
            paint_losses(painter, scale, prospect, QPointF(8.0, rail.y()), palette)
            painter.setOpacity(1.0)
        painter.setPen(QPen(palette.iron, 1.5))
        painter.drawLine(rail, rail + QPointF(0, scale.height))
        self._paint_ticks(painter, scale, prospect)
        self._paint_rung(painter, rail.y() + scale.y(t.tap), prospect is None or prospect.holding(t.tap))
        self._paint_words(painter, t, scale)

    def _paint_plate(self, painter: QPainter) -> None:
        """The light of the selection, on which the ladder reads well whatever lies below."""
        ground = QColor(self._theme.palette.paper)
        ground.setAlphaF(0.85)
        painter.setPen(Qt.PenStyle.NoPen)
        for fill in (ground, halo_colour(self._theme.palette, selected=True)):
            painter.setBrush(fill)
            painter.drawRoundedRect(self._bounds, 9, 9)

    @property
    def _rail(self) -> QPointF:
        return QPointF(RAIL_X, EDGE)

    def _paint_ticks(self, painter: QPainter, scale: Scale, prospect: Prospect | None) -> None:
        palette, rail = self._theme.palette, self._rail
        for notch in scale.ticks():
            fails = prospect is not None and not prospect.holding(notch)
            dead = prospect is not None and prospect.loss(notch) is None
            half = 3.0 if fails else 6.0
            half += 3.0 if notch == 0 else 0.0
            at = rail + QPointF(0, scale.y(notch))
            painter.setOpacity(0.5 if fails else 1.0)
            style = Qt.PenStyle.DotLine if dead else Qt.PenStyle.SolidLine
            painter.setPen(QPen(palette.iron, 1.2, style))
            painter.drawLine(at - QPointF(half, 0), at + QPointF(half, 0))
        painter.setOpacity(1.0)

    def _paint_rung(self, painter: QPainter, y: float, holds: bool) -> None:
        """Full where every voltage limit holds, hollow where one does not."""
        palette = self._theme.palette
        room = 2.0 if self.hold.held else 0.0
        box = RUNG.adjusted(-room, -room / 2, room, room / 2).translated(RAIL_X, y)
        if self.hasFocus():
            painter.setPen(QPen(palette.flow, 1.2, Qt.PenStyle.DotLine))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRoundedRect(box.adjusted(-3, -3, 3, 3), 7, 7)
        painter.setPen(QPen(palette.tap, 2.0))
        painter.setBrush(palette.tap if holds else palette.paper)
        painter.drawRoundedRect(box, 5, 5)

    def _paint_words(self, painter: QPainter, t: Transformer, scale: Scale) -> None:
        """The rung's own label, then the pointed notch and the ends as far as there is room."""
        palette = self._theme.palette
        mine = ((Run(self.words(t.tap), Style.CHANGE),), (Run(self.effect(t.tap), Style.QUIET),))
        height = 2 * line_height(mine[0])
        centre = self._rail.y() + scale.y(t.tap)
        top = min(max(centre - height / 2, 0.0), self.boundingRect().height() - height)
        paint(painter, mine, QPointF(WORDS_X, top), WIDE - WORDS_X, palette)
        used = [(top, top + height)]
        for notch in (self._pointed, scale.highest, scale.lowest):
            if notch is None or notch == t.tap:
                continue
            line = (Run(self.words(notch), Style.QUIET),)
            high = line_height(line)
            y = self._rail.y() + scale.y(notch) - high / 2
            if all(y >= foot or y + high <= head for head, foot in used):
                paint(painter, (line,), QPointF(WORDS_X, y), WIDE - WORDS_X, palette)
                used.append((y, y + high))

    # the hand -----------------------------------------------------------------------------------

    def _notch_at(self, y: float) -> int:
        return self.notches.notch(y - self._rail.y())

    def mousePressEvent(self, event) -> None:
        t = self.transformer
        if t is None or event.button() != Qt.MouseButton.LeftButton:
            event.ignore()
            return
        self.setFocus(Qt.FocusReason.MouseFocusReason)
        rung = self._rail.y() + self.notches.y(t.tap)
        off = event.pos().y() - rung
        self._grip = off if abs(off) <= RUNG.height() else 0.0
        self.hold.take()
        self.hold.to(self._notch_at(event.pos().y() - self._grip))
        self.update()

    def mouseMoveEvent(self, event) -> None:
        if self.hold.held:
            self.hold.to(self._notch_at(event.pos().y() - self._grip))

    def mouseReleaseEvent(self, event) -> None:
        self.hold.let_go()
        self.update()

    def mouseDoubleClickEvent(self, event) -> None:
        self.mousePressEvent(event)

    def hoverMoveEvent(self, event) -> None:
        self._point(self._notch_at(event.pos().y()))

    def hoverLeaveEvent(self, event) -> None:
        self._point(None)

    def _point(self, notch: int | None) -> None:
        if notch != self._pointed:
            self._pointed = notch
            self.update()

    def wheelEvent(self, event) -> None:
        self._turned += event.delta()
        notches = int(self._turned / CLICK)
        if notches:
            self._turned -= notches * CLICK
            self.hold.nudge(notches)
        event.accept()

    def keyPressEvent(self, event) -> None:
        if not press_tap_key(self.hold, event):
            super().keyPressEvent(event)

    def keyReleaseEvent(self, event) -> None:
        if not release_tap_key(self.hold, event):
            super().keyReleaseEvent(event)

    def focusOutEvent(self, event) -> None:
        self.hold.let_go()
        self.update()
        super().focusOutEvent(event)


def press_tap_key(hold: TapHold, event) -> bool:
    """Up and Down move a notch, Home goes to the middle, Esc puts it back; held keys are one undo step."""
    key, plain = event.key(), not event.modifiers() & ~Qt.KeyboardModifier.KeypadModifier
    if key == Qt.Key.Key_Escape and hold.held:
        hold.put_back()
    elif plain and key in KEYS:
        hold.take()
        hold.by(KEYS[key])
    elif plain and key == Qt.Key.Key_Home:
        hold.take()
        hold.to(0)
    else:
        return False
    event.accept()
    return True


def release_tap_key(hold: TapHold, event) -> bool:
    """Letting go of a tap key ends its undo step."""
    if event.isAutoRepeat() or event.key() not in (*KEYS, Qt.Key.Key_Home):
        return False
    held = hold.held
    hold.let_go()
    return held
