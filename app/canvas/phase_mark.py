"""The mark of phases on a line or stub: slanted strokes, one a conductor, and a chip with their letters.

Strokes across a line count its conductors, the neutral's ends in a dot (IEC 60617, from memory).
"""

import math

from msgspec import Struct
from PySide6.QtCore import QLineF, QPointF, QRectF, Qt
from PySide6.QtGui import QFont, QFontMetricsF, QPainter, QPen

from app.canvas.palette import Palette

CHIP = 14.0  # height of the chip
PAD = 4.0
STRIDE = 5.0  # between two strokes
REACH = 6.5  # half a stroke
LEAN = 2.5
GAP = 4.0
CHIP_FROM, STROKES_FROM = 0.45, 0.22  # zoom below which there are no letters, no strokes
PIXELS = 10


class Phases(Struct, frozen=True):
    """What a mark says. `stated`: by the element itself; else it is what reaches it, and said quietly."""

    letters: str
    phases: int
    neutral: bool
    stated: bool


class Laid(Struct, frozen=True):
    """A mark with its place on the paper."""

    said: Phases
    chip: QRectF
    strokes: tuple[QLineF, ...]

    @property
    def box(self) -> QRectF:
        """All it covers."""
        whole = QRectF(self.chip)
        for line in self.strokes:
            whole = whole.united(QRectF(line.p1(), line.p2()).normalized().adjusted(-2, -2, 2, 2))
        return whole


def lay(said: Phases, a: QPointF, b: QPointF) -> Laid:
    """Put a mark in the middle of a free run. Where it is short the strokes go: letters say more."""
    room = math.hypot(b.x() - a.x(), b.y() - a.y())
    way = (b - a) / room if room else QPointF(1, 0)
    wide = _metrics().horizontalAdvance(said.letters) + 2 * PAD
    level = abs(way.x()) >= abs(way.y())
    along = wide if level else CHIP
    count = said.phases + said.neutral
    struck = STRIDE * count + LEAN
    strokes = count if room >= along + GAP + struck else 0
    whole = along + (GAP + struck if strokes else 0.0)
    first = (a + b) / 2 - way * (whole / 2)
    at = first + way * (whole - along / 2)
    chip = QRectF(at.x() - wide / 2, at.y() - CHIP / 2, wide, CHIP)
    return Laid(said, chip, tuple(_stroke(first, way, k) for k in range(strokes)))


def _stroke(first: QPointF, way: QPointF, nth: int) -> QLineF:
    """One stroke, leaning forward."""
    foot = first + way * (STRIDE * (nth + 0.5) + LEAN / 2)
    tilt = QPointF(-way.y(), way.x()) * REACH
    return QLineF(foot + tilt - way * LEAN, foot - tilt + way * LEAN)


def _face(bold: bool = True) -> QFont:
    font = QFont()
    font.setPixelSize(PIXELS)
    font.setBold(bold)
    return font


def _metrics() -> QFontMetricsF:
    return QFontMetricsF(_face())


def paint(painter: QPainter, laid: Laid, palette: Palette, printing: bool) -> None:
    """The whole mark from near, its strokes alone from afar."""
    zoom = painter.worldTransform().m11()
    if not printing and zoom < STROKES_FROM:
        return
    ink = palette.ink if laid.said.stated else palette.soft
    near = printing or zoom >= CHIP_FROM
    painter.save()
    painter.setPen(QPen(ink, 1.3 if near else 2.0, Qt.PenStyle.SolidLine, Qt.PenCapStyle.RoundCap))
    painter.drawLines(list(laid.strokes))
    if laid.said.neutral and laid.strokes:
        painter.setBrush(ink)
        painter.drawEllipse(laid.strokes[-1].p2(), 1.6, 1.6)
    if near:
        _paint_chip(painter, laid, palette)
    painter.restore()


def _paint_chip(painter: QPainter, laid: Laid, palette: Palette) -> None:
    stated = laid.said.stated
    painter.setPen(QPen(palette.ink, 1.1) if stated else Qt.PenStyle.NoPen)
    painter.setBrush(palette.raised if stated else palette.paper)
    painter.drawRoundedRect(laid.chip, CHIP / 2, CHIP / 2)
    painter.setPen(palette.ink if stated else palette.soft)
    painter.setFont(_face())
    painter.drawText(laid.chip, int(Qt.AlignmentFlag.AlignCenter), laid.said.letters)
