"""Painting the loss tape. Copper, iron and lines differ by pattern and word as well as by colour."""

from collections.abc import Collection

from msgspec import Struct
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter, QPainterPath, QPen, QPolygonF

from app.canvas.palette import Palette, font
from app.model.figures import loss, plain, power
from app.panels.style import mixed
from app.panels.tape_cut import Cut, Piece
from app.panels.words import LEFT, RIGHT

HEIGHT = 92
MARGIN = 18.0
BAR_TOP = 32.0
BAR = 28.0
ROUND = 4.0
LOSSES = ("copper", "iron", "lines")


class Shown(Struct, frozen=True):
    """Everything one painting needs."""

    cut: Cut
    sentence: str
    moved: str
    lit: Collection[str]
    selected: Collection[str]
    walked: Piece | None
    stale: bool
    focused: bool


def colours(palette: Palette, stale: bool) -> dict[str, QColor]:
    """The ground of each kind of piece."""
    dark = palette.dark
    made = {
        "load": mixed(palette.good, palette.field, 0.34 if dark else 0.22),
        "export": mixed(palette.flow, palette.field, 0.40 if dark else 0.24),
        "copper": mixed(palette.copper, palette.ink, 0.86) if dark else palette.copper,
        "iron": mixed(palette.iron, palette.ink, 0.62) if dark else palette.iron,
        "lines": mixed(palette.copper, palette.paper, 0.78)
        if dark
        else mixed(palette.copper, palette.ink, 0.72),
        "feed": palette.flow,
        "infeed": palette.good,
    }
    return {k: mixed(c, palette.panel, 0.35) for k, c in made.items()} if stale else made


def paint_tape(painter: QPainter, width: float, shown: Shown, palette: Palette) -> None:
    """The whole tape."""
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.fillRect(QRectF(0, 0, width, HEIGHT), palette.panel)
    painter.fillRect(QRectF(0, 0, width, 1), palette.faint)
    _paint_head(painter, width, shown, palette)
    if not shown.cut.pieces:
        painter.setPen(QPen(palette.faint, 1, Qt.PenStyle.DashLine))
        painter.drawRoundedRect(QRectF(MARGIN, BAR_TOP, width - 2 * MARGIN, BAR), ROUND, ROUND)
        return
    grounds = colours(palette, shown.stale)
    painter.translate(MARGIN, 0)
    if len(shown.cut.feeds) > 1:
        for piece in shown.cut.feeds:
            painter.fillRect(QRectF(piece.left, BAR_TOP - 5, piece.width, 2.5), grounds[piece.what])
    _paint_thread(painter, shown, palette, grounds)
    for piece in shown.cut.pieces:
        _paint_piece(painter, piece, shown, palette, grounds)
    _paint_foot(painter, width - 2 * MARGIN, shown, palette, grounds)


def _paint_head(painter: QPainter, width: float, shown: Shown, palette: Palette) -> None:
    room = QRectF(MARGIN, 8, width - 2 * MARGIN, 18)
    painter.setPen(palette.ink)
    painter.setFont(font(9, bold=True))
    title = "Where the kilowatts go"
    painter.drawText(room, int(LEFT), title)
    room.setLeft(room.left() + QFontMetricsF(painter.font()).horizontalAdvance(title) + 16)
    if shown.moved:
        painter.setPen(palette.tap)
        wide = QFontMetricsF(painter.font()).horizontalAdvance(shown.moved)
        painter.drawText(room, int(RIGHT), shown.moved)
        room.setRight(room.right() - wide - 10)
    painter.setFont(font(8.5))
    painter.setPen(palette.soft)
    elided = QFontMetricsF(painter.font()).elidedText(
        shown.sentence, Qt.TextElideMode.ElideRight, room.width()
    )
    painter.drawText(room, int(LEFT), elided)


def _paint_thread(painter: QPainter, shown: Shown, palette: Palette, grounds: dict[str, QColor]) -> None:
    """The losses in the bar to scale, fanned out to where they are drawn larger."""
    cut = shown.cut
    if cut.factor == 1 or not cut.losses:
        return
    left, wide = cut.thread
    lost, at = sum(p.kw for p in cut.losses), left
    for piece in cut.losses:
        painter.fillRect(QRectF(at, BAR_TOP, wide * piece.kw / lost, BAR), grounds[piece.what])
        at += wide * piece.kw / lost
    first, last = cut.losses[0], cut.losses[-1]
    fan = QPolygonF(
        [
            QPointF(left + wide, BAR_TOP),
            QPointF(first.left - 1, BAR_TOP),
            QPointF(first.left - 1, BAR_TOP + BAR),
            QPointF(left + wide, BAR_TOP + BAR),
        ]
    )
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(mixed(palette.copper, palette.panel, 0.10))
    painter.drawPolygon(fan)
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.setPen(QPen(mixed(palette.copper, palette.panel, 0.55), 1))
    painter.drawLine(QPointF(left + wide, BAR_TOP + 0.5), QPointF(first.left - 1, BAR_TOP - 4))
    painter.drawLine(QPointF(left + wide, BAR_TOP + BAR - 0.5), QPointF(first.left - 1, BAR_TOP + BAR + 4))
    over = QRectF(first.left - 1, BAR_TOP - 4, last.left + last.width - first.left + 2, BAR + 8)
    painter.drawLine(over.topLeft(), over.topRight())
    painter.drawLine(over.bottomLeft(), over.bottomRight())


def _paint_piece(
    painter: QPainter, piece: Piece, shown: Shown, palette: Palette, grounds: dict[str, QColor]
) -> None:
    room = QRectF(piece.left, BAR_TOP, piece.width, BAR)
    bend = min(ROUND, piece.width / 3)
    ground = grounds[piece.what]
    lit = bool(shown.lit and set(piece.ids) & set(shown.lit))
    chosen = bool(shown.selected and set(piece.ids) & set(shown.selected))
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(mixed(palette.ink, ground, 0.16) if lit else ground)
    painter.drawRoundedRect(room, bend, bend)
    pattern(painter, piece.what, room, bend, palette)
    if lit or chosen or piece is shown.walked:
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.setPen(QPen(palette.flow if piece is shown.walked else palette.ink, 2 if chosen else 1.4))
        painter.drawRoundedRect(room.adjusted(-0.5, -1.5, 0.5, 1.5), bend, bend)
    _label(painter, piece, room, palette, ground, shown.stale)


def pattern(painter: QPainter, what: str, room: QRectF, bend: float, palette: Palette) -> None:
    """Iron is laminated (upright lines), lines are stranded (slanting), copper is plain."""
    if what not in ("iron", "lines"):
        return
    painter.save()
    clip = QPainterPath()
    clip.addRoundedRect(room, bend, bend)
    painter.setClipPath(clip)
    line = QColor(palette.paper)
    line.setAlphaF(0.22)
    painter.setPen(QPen(line, 1))
    slant = 0.0 if what == "iron" else room.height()
    x = room.left() - slant + 2
    while x < room.right() + slant:
        painter.drawLine(QPointF(x, room.bottom()), QPointF(x + slant, room.top()))
        x += 5 if what == "iron" else 8
    painter.restore()


def _label(
    painter: QPainter, piece: Piece, room: QRectF, palette: Palette, ground: QColor, stale: bool
) -> None:
    """As much of name and size as there is room for."""
    light = piece.what in ("load", "export")
    inset = 12 if light and room.width() > 120 else 6
    space = room.width() - 2 * inset + 3
    size = power(piece.kw) if light else _bare(piece.kw)
    metrics = QFontMetricsF(font(8.5, bold=True))
    for text in (f"{piece.name} {size}", piece.name, size.split(" ")[0]):
        if metrics.horizontalAdvance(text) <= space:
            painter.setFont(font(8.5, bold=True))
            ink = palette.ink if light else (palette.paper if palette.dark else QColor("#FFFFFF"))
            painter.setPen(palette.soft if stale else ink)
            if not light:
                _quieten(painter, room, piece, metrics.horizontalAdvance(text), inset, ground)
            painter.drawText(room.adjusted(inset, 0, -2, 0), int(LEFT), text)
            return
    if light and space > 40:
        painter.setFont(font(8.5, bold=True))
        painter.setPen(palette.soft if stale else palette.ink)
        elided = metrics.elidedText(piece.name, Qt.TextElideMode.ElideRight, space)
        painter.drawText(room.adjusted(inset, 0, -2, 0), int(LEFT), elided)


def _quieten(
    painter: QPainter, room: QRectF, piece: Piece, wide: float, inset: float, ground: QColor
) -> None:
    """Take the pattern away behind the letters."""
    if piece.what == "copper":
        return
    pen = painter.pen()
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(ground)
    painter.drawRoundedRect(
        QRectF(room.left() + inset - 3, room.top() + 6, wide + 6, room.height() - 12), 3, 3
    )
    painter.setPen(pen)


def _bare(kw: float) -> str:
    """0.83, or watts with their unit where they are few."""
    return plain(kw, 2) if kw >= 0.0995 else loss(kw)


def _paint_foot(
    painter: QPainter, width: float, shown: Shown, palette: Palette, grounds: dict[str, QColor]
) -> None:
    """How much larger the losses are drawn, and what the colours mean, under the losses."""
    top = BAR_TOP + BAR + 10
    painter.setFont(font(8))
    metrics = QFontMetricsF(painter.font())
    x = width
    for what in reversed(LOSSES):
        kw = sum(p.kw for p in shown.cut.losses if p.what == what)
        if kw <= 0:
            continue
        text = f"{what} {loss(kw)}"
        x -= metrics.horizontalAdvance(text)
        painter.setPen(palette.soft)
        painter.drawText(QPointF(x, top + 9), text)
        swatch = QRectF(x - 15, top + 0.5, 10, 10)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(grounds[what])
        painter.drawRoundedRect(swatch, 2, 2)
        pattern(painter, what, swatch, 2, palette)
        x -= 29
    if shown.cut.factor > 1:
        text = f"lost, drawn {plain(shown.cut.factor, 0)} × larger"
        at = min(shown.cut.losses[0].left, x - metrics.horizontalAdvance(text))
        painter.setPen(palette.soft)
        painter.drawText(QPointF(max(at, 0), top + 9), text)
