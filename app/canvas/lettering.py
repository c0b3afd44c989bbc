"""Short text on the board: lines of runs in a few styles, laid out once and painted from the layout."""

from enum import Enum
from functools import cache, lru_cache
from typing import NamedTuple

from PySide6.QtCore import QPointF, QSizeF, Qt
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QPainter, QStaticText

from app.canvas.palette import Palette


class Style(Enum):
    """How a run reads: pixels, bold, and which colour of the palette."""

    NAME = (13, True, "ink")
    FIGURE = (12, True, "ink")
    PLAIN = (12, False, "ink")
    QUIET = (11, False, "soft")
    CHANGE = (11, True, "tap")
    GOOD = (12, True, "good")
    NEAR = (12, True, "near")
    FAILED = (12, True, "failed")
    LETTER = (15, True, "ink")

    __hash__ = object.__hash__  # each is one object; Enum would hash its name anew for every letter painted


class Run(NamedTuple):
    """A piece of text in one style."""

    text: str
    style: Style = Style.FIGURE


Line = tuple[Run, ...]
GAP = 4.0  # between two runs of a line
LEADING = 2.0  # between two lines
LEFT, CENTRE, RIGHT = 0.0, 0.5, 1.0


@cache
def face(style: Style) -> QFont:
    """The font of a style, in pixels of the scene, so that the drawing is the same on every screen."""
    font = QFont()
    font.setPixelSize(style.value[0])
    font.setBold(style.value[1])
    return font


@cache
def _metrics(style: Style) -> QFontMetricsF:
    return QFontMetricsF(face(style))


@cache
def _height(style: Style) -> float:
    return _metrics(style).height()


@lru_cache(maxsize=4096)
def _advance(run: Run) -> float:
    return _metrics(run.style).horizontalAdvance(run.text)


@lru_cache(maxsize=4096)
def _laid(run: Run) -> QStaticText:
    text = QStaticText(run.text)
    text.setTextFormat(Qt.TextFormat.PlainText)
    text.setPerformanceHint(QStaticText.PerformanceHint.AggressiveCaching)
    return text


def words(lines: tuple[Line, ...]) -> str:
    """The bare text, for tests, tooltips and copies."""
    return "\n".join(" ".join(run.text for run in line) for line in lines)


def line_height(line: Line) -> float:
    """The tallest run sets it."""
    return max([_height(run.style) for run in line], default=0.0)


def line_width(line: Line) -> float:
    """All runs with the gaps between them."""
    return sum([_advance(run) for run in line]) + GAP * max(len(line) - 1, 0)


def size(lines: tuple[Line, ...]) -> QSizeF:
    """What the lines need."""
    if not lines:
        return QSizeF(0, 0)
    height = sum(line_height(line) for line in lines) + LEADING * (len(lines) - 1)
    return QSizeF(max(line_width(line) for line in lines), height)


def paint(
    painter: QPainter,
    lines: tuple[Line, ...],
    at: QPointF,
    width: float,
    palette: Palette,
    align: float = LEFT,
    over: QColor | None = None,
) -> None:
    """Lines from a top left corner, inside a width; figures take the colour `over` where one is given."""
    y = at.y()
    for line in lines:
        height = line_height(line)
        x = at.x() + (width - line_width(line)) * align
        for run in line:
            painter.setFont(face(run.style))
            fixed = over is None or run.style in (Style.NAME, Style.QUIET)
            painter.setPen(getattr(palette, run.style.value[2]) if fixed else over)
            painter.drawStaticText(QPointF(x, y + height - _height(run.style)), _laid(run))
            x += _advance(run) + GAP
        y += height + LEADING
