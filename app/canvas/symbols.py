"""Painting the default symbols: on the board, and as icons for the shelf."""

import math

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QIcon, QPainter, QPen, QPixmap

from app.canvas.lettering import Style, face
from app.canvas.palette import Palette
from app.canvas.symbol_shapes import ROUND, STROKE, Glyph, glyph
from app.canvas.symbol_units import variant
from app.model.kinds import Capacitor, Element, Switch, Transformer, kind_of

ICON_SCALES = (1.0, 2.0, 3.0)


def glyph_of(element: Element, symbols: str) -> Glyph | None:
    """The symbol an element wears on the board; None where its line or bar says it all."""
    kind = kind_of(element)
    if kind in ("cable", "overhead_line", "busbar", "joint"):
        return None
    return glyph(kind, symbols, _variant(element))


def _variant(element: Element) -> str:
    if isinstance(element, Switch):
        return "closed" if element.closed else "open"
    if isinstance(element, Capacitor):
        return "connected" if element.connected else "open"
    if isinstance(element, Transformer):
        return variant(element)
    return ""


def paint_glyph(
    painter: QPainter,
    shape: Glyph,
    at: QPointF,
    angle: float,
    ink: QColor,
    paper: QColor,
    stroke: float = STROKE,
) -> None:
    """A symbol with its middle at a point, turned clockwise by an angle in degrees."""
    painter.save()
    painter.translate(at)
    painter.rotate(angle)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.fillPath(shape.mask, paper)
    painter.fillPath(shape.solid, ink)
    pen = QPen(ink, stroke, Qt.PenStyle.SolidLine, Qt.PenCapStyle.RoundCap, Qt.PenJoinStyle.RoundJoin)
    painter.strokePath(shape.strokes, pen)
    painter.rotate(-angle)
    _paint_upright(painter, shape, angle, pen)
    painter.restore()


def _paint_upright(painter: QPainter, shape: Glyph, angle: float, pen: QPen) -> None:
    turn = math.radians(angle)
    thin = QPen(pen)
    thin.setWidthF(pen.widthF() * 0.6)
    for place, mark in shape.upright:
        x = place.x() * math.cos(turn) - place.y() * math.sin(turn)
        y = place.x() * math.sin(turn) + place.y() * math.cos(turn)
        painter.strokePath(mark.translated(x, y), thin if place.manhattanLength() else pen)
    if shape.letters:
        painter.setPen(pen)
        painter.setFont(face(Style.LETTER))
        room = QRectF(-ROUND, -ROUND + shape.letters_y, 2 * ROUND, 2 * ROUND)
        painter.drawText(room, Qt.AlignmentFlag.AlignCenter, shape.letters)


def paint_symbol(
    painter: QPainter,
    kind: str,
    element: Element | None,
    symbols: str,
    ink: QColor,
    paper: QColor,
    at: QPointF | None = None,
    angle: float = 0.0,
) -> None:
    """The symbol of a kind, or of an element in its state (open, vector group)."""
    shape = glyph(kind, symbols, _variant(element) if element is not None else "")
    paint_glyph(painter, shape, at or QPointF(), angle, ink, paper)


def symbol_pixmap(kind: str, symbols: str, palette: Palette, size: int, scale: float = 1.0) -> QPixmap:
    """The symbol of a kind on nothing, `size` pixels square at a device pixel ratio."""
    pixmap = QPixmap(round(size * scale), round(size * scale))
    pixmap.setDevicePixelRatio(scale)
    pixmap.fill(Qt.GlobalColor.transparent)
    painter = QPainter(pixmap)
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    shape = glyph(kind, symbols, _SHOWN.get(kind, ""))
    box = shape.box
    shrink = min(1.0, (size - 2) / max(box.width(), box.height()))
    painter.translate(size / 2, size / 2)
    painter.scale(shrink, shrink)
    painter.translate(-box.center())
    paint_glyph(painter, shape, QPointF(), 0.0, palette.ink, palette.panel, STROKE * max(1.0, 0.8 / shrink))
    painter.end()
    return pixmap


_SHOWN = {"switch": "open"}


def icon(kind: str, symbols: str, palette: Palette, size: int = 32) -> QIcon:
    """The symbol of a kind as an icon that stays sharp on dense screens."""
    made = QIcon()
    for scale in ICON_SCALES:
        made.addPixmap(symbol_pixmap(kind, symbols, palette, size, scale))
    return made
