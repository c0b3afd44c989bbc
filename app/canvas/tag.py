"""Text beside elements: captions, and the rounded tags of branches."""

import math

from PySide6.QtCore import QLineF, QPointF, QRectF, QSizeF, Qt
from PySide6.QtGui import QPen
from PySide6.QtWidgets import QGraphicsItem

from app.canvas import lettering
from app.canvas.element_item import Look
from app.canvas.lettering import Line, Run, Style
from app.canvas.placing import Spot
from app.canvas.standing import Standing, colour, mark

ROUNDING = 12.0  # sizes grow in steps, so that a changing figure does not make its neighbours jump
SMALLEST_ZOOM = 0.45  # below it words are too small to read
FAR_ZOOM = 0.7  # what is still written there is written as large as at this zoom
FARTHEST = 2.5


class Caption(QGraphicsItem):
    """Lines of text at a spot. It repaints only when the text is another."""

    PAD = QSizeF(2, 1)
    USUAL: tuple[Line, ...] = ()
    USUAL_CHANGE: Line = (Run("▼ 00 W", Style.CHANGE),)
    LEAD_FROM = 22.0  # px between words and what they belong to

    def __init__(self, id: str, look: Look) -> None:
        super().__init__()
        self.id = id
        self.look = look
        self.lines: tuple[Line, ...] = ()
        self.standing = Standing.PLAIN
        self.awaited = bool(self.USUAL) and not look.printing  # nothing was written yet
        self.landmark = False  # its name is written from afar too
        self.spot = Spot(QRectF())
        self.lead: QLineF | None = None
        self._room = QSizeF()
        self._need = self._needed(self.USUAL)
        self._bounds = QRectF()
        self.setZValue(4)
        self.setAcceptedMouseButtons(Qt.MouseButton.NoButton)
        self.hide()

    @property
    def text(self) -> str:
        """The bare text."""
        return lettering.words(self.lines)

    @property
    def room(self) -> QSizeF:
        """What it needs, in steps; before there are figures, what they usually need."""
        return self._room if self.lines or not self.awaited else self._need

    @property
    def wanted(self) -> bool:
        """True where it needs a place."""
        return bool(self.lines) or self.awaited

    def write(self, lines: tuple[Line, ...], standing: Standing = Standing.PLAIN) -> bool:
        """Take new text; True where it needs another spot. The same text changes nothing."""
        if lines == self.lines and standing is self.standing and not self.awaited:
            return False
        awaited, self.awaited = self.awaited, False
        self.lines, self.standing = lines, standing
        self.setVisible(bool(lines))
        self.update()
        room, had = self._needed(lines), self.spot.box.size() if awaited else self._room
        self._need = room
        fits = room.width() <= had.width() and room.height() == had.height()
        if awaited or not fits:
            self._room = room
        if awaited and fits:
            self.widen()
        return not fits

    @property
    def spread(self) -> QSizeF:
        """What it would need with the change of a drag in its last line."""
        lines, room = self.lines or self.USUAL, self.room
        changes = len(lines) > 1 and any(run.style is Style.FIGURE for line in lines for run in line)
        if not changes or self.look.printing:
            return room
        bare = lettering.line_width(lines[-1]) + lettering.GAP + lettering.line_width(self.USUAL_CHANGE)
        return QSizeF(max(room.width(), bare + self._extra(lines) + 2 * self.PAD.width()), room.height())

    def shrink(self) -> bool:
        """Give back room that is not needed any more; True where there was some."""
        room = self._need if self.lines else QSizeF(0, 0)
        smaller = room != self._room
        self._room = room
        return smaller

    def _needed(self, lines: tuple[Line, ...]) -> QSizeF:
        if not lines:
            return QSizeF(0, 0)
        bare = lettering.size(lines)
        width = math.ceil((bare.width() + self._extra(lines)) / ROUNDING) * ROUNDING
        return QSizeF(
            width + 2 * self.PAD.width(), self._height(lines, bare.height()) + 2 * self.PAD.height()
        )

    def _extra(self, lines: tuple[Line, ...]) -> float:
        return 0.0

    def _height(self, lines: tuple[Line, ...], bare: float) -> float:
        return bare

    def settle(self, spot: Spot) -> None:
        """Stand at this spot from now on, no wider than the words need."""
        box, room = spot.box, self.room
        left = box.left() + (box.width() - room.width()) * self._hold(spot)
        spot = Spot(QRectF(left, box.top(), room.width(), room.height()), spot.align)
        if spot != self.spot:
            self.prepareGeometryChange()
            self.spot = spot
            self._bounds = self._reach().adjusted(-1, -1, 1, 1)
            self.update()

    def lead_to(self, point: QPointF, always: bool = False) -> None:
        """A hairline to what the words belong to, where they had to go some way off or seem another's."""
        box = self.spot.box
        near = QPointF(
            min(max(point.x(), box.left()), box.right()), min(max(point.y(), box.top()), box.bottom())
        )
        line = QLineF(near, point)
        lead = line if always or line.length() > self.LEAD_FROM else None
        if lead != self.lead:
            self.prepareGeometryChange()
            self.lead = lead
            self._bounds = self._reach().adjusted(-1, -1, 1, 1)
            self.update()

    def widen(self) -> None:
        """Grow where it stands: nothing jumps under the hand."""
        if self.spot.box.size() != self.room:
            self.settle(self.spot)

    def _hold(self, spot: Spot) -> float:
        """Which edge stays where it is when the width changes: 0 the left, 1 the right, ½ neither."""
        return spot.align

    def boundingRect(self) -> QRectF:
        return self._bounds

    def paint(self, painter, option, widget=None) -> None:
        zoom = painter.worldTransform().m11()
        if not self.lines:
            return
        if self.look.printing or zoom >= SMALLEST_ZOOM:
            if self.lead is not None:
                painter.setPen(QPen(self.look.palette.soft, 0.7))
                painter.drawLine(self.lead)
            self._paint(painter)
        else:
            self._paint_from_afar(painter, min(FAR_ZOOM / zoom, FARTHEST))

    def _paint(self, painter) -> None:
        self._letter(painter, self.spot.box, self.look.palette.soft if self.look.stale else None)

    def _reach(self) -> QRectF:
        """All it may ever cover: its words with the changes of a drag, or its name seen from afar."""
        box, spread = self.spot.box, self.spread
        left = box.left() + (box.width() - spread.width()) * self._hold(self.spot)
        whole = box.united(QRectF(QPointF(left, box.top()), spread))
        if self.lead is not None:
            whole = whole.united(QRectF(self.lead.p1(), self.lead.p2()).normalized())
        return whole.united(self._from_afar()) if self.landmark else whole

    def _from_afar(self) -> QRectF:
        """The box of the name at its largest."""
        bare = lettering.size(self.lines[:1]) * FARTHEST
        box, align = self.spot.box, self.spot.align
        left = box.left() + (box.width() - bare.width()) * align
        return QRectF(QPointF(left, box.center().y() - bare.height() / 2), bare)

    def _paint_from_afar(self, painter, larger: float) -> None:
        """The name of a landmark alone, or the sign of an alarm, large enough to be read."""
        painter.save()
        if self.landmark:
            self._letter_name(painter, larger)
        else:
            painter.translate(self.spot.box.center())
            painter.scale(larger, larger)
            mark(painter, self.standing, QPointF(), self.look.palette, self.look.stale)
        painter.restore()

    def _letter_name(self, painter, larger: float) -> None:
        box = self.spot.box
        name = self.lines[:1]
        painter.translate(box.left() + box.width() * self.spot.align, box.center().y())
        painter.scale(larger, larger)
        bare = lettering.size(name)
        at = QPointF(-bare.width() * self.spot.align, -bare.height() / 2)
        lettering.paint(painter, name, at, bare.width(), self.look.palette)

    def _letter(self, painter, box, over) -> None:
        w, h = self.PAD.width(), self.PAD.height()
        lettering.paint(
            painter,
            self.lines,
            box.topLeft() + QPointF(w, h),
            box.width() - 2 * w,
            self.look.palette,
            self.spot.align,
            over,
        )


class Tag(Caption):
    """A rounded card on the paper; near and failed carry their mark and frame."""

    PAD = QSizeF(8, 3)
    USUAL = ((Run("100.0 kW → 50.0 %"),), (Run("0.10 kW lost", Style.QUIET),))
    LEAD_FROM = 95.0  # its line is broad, and nearer by only its own name stands between

    def __init__(self, id: str, look: Look) -> None:
        super().__init__(id, look)
        self.setZValue(5)
        self.lit = False

    def light(self, lit: bool) -> None:
        """Join the light of its branch."""
        if lit != self.lit:
            self.lit = lit
            self.update()

    def _extra(self, lines: tuple[Line, ...]) -> float:
        return 18.0 if self.standing in (Standing.NEAR, Standing.FAILED) else 0.0

    def _paint(self, painter) -> None:
        palette, stale = self.look.palette, self.look.stale
        alarmed = self.standing in (Standing.NEAR, Standing.FAILED)
        frame = colour(self.standing, palette, stale) if alarmed else palette.faint
        if self.lit and not self.look.printing and not alarmed:
            frame = palette.good
        painter.setPen(QPen(frame, 1.5 if alarmed or self.lit else 1.0))
        painter.setBrush(palette.raised)
        painter.drawRoundedRect(self.spot.box.adjusted(0.5, 0.5, -0.5, -0.5), 6, 6)
        box = self.spot.box.adjusted(self._extra(self.lines), 0, 0, 0)
        if alarmed:
            mark(painter, self.standing, QPointF(box.left() - 4, box.center().y()), palette, stale)
        self._letter(painter, box, palette.soft if stale else None)
