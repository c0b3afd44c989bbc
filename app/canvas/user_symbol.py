"""The user's own symbol: an SVG that was checked, its terminals, and how it is worn on the board."""

import math
from collections.abc import Sequence
from functools import lru_cache
from pathlib import Path
from typing import TYPE_CHECKING

from msgspec import Struct
from PySide6.QtCore import QByteArray, QPointF, QRectF, Qt
from PySide6.QtGui import QIcon, QPainter, QPixmap, QTransform

from app.canvas.geometry import GRID, distance
from app.canvas.svg_check import LARGEST_BYTES, LARGEST_SIDE, SymbolRefused, check
from app.model.drawing import Symbol
from app.model.kinds import Branch, Element, Node

if TYPE_CHECKING:
    from PySide6.QtSvg import QSvgRenderer

__all__ = ["SymbolRefused", "Worn", "default_terminals", "read_svg", "sound", "symbol_icon", "wear"]
SIZE = 48.0  # the longer side of an attachment's symbol, px
WIDEST = 6 * GRID
TALLEST = 5 * GRID
ICON_SCALES = (1.0, 2.0, 3.0)


def read_svg(source: bytes | str | Path) -> Symbol:
    """A symbol from SVG bytes, or from a file; raises SymbolRefused with the reason."""
    data = source if isinstance(source, bytes) else _bytes(Path(source))
    contents = check(data)
    text = data.decode("utf-8-sig")
    left, top, width, height = contents.view
    marked = sorted((i for i in contents.ids if i.lower().startswith("terminal")), key=lambda i: (len(i), i))
    terminals = []
    renderer = _renderer(text)
    if not renderer.isValid():
        raise SymbolRefused("The picture cannot be drawn; save it as a plain SVG.")
    for id in marked:
        point = renderer.transformForElement(id).map(renderer.boundsOnElement(id).center())
        x, y = point.x() - left, point.y() - top
        if not (-0.01 * width <= x <= 1.01 * width and -0.01 * height <= y <= 1.01 * height):
            raise SymbolRefused(f"The picture's {id} lies outside its viewBox.")
        terminals.append((round(x, 4), round(y, 4)))
    return Symbol(svg=text, width=width, height=height, terminals=tuple(terminals))


def _bytes(path: Path) -> bytes:
    try:
        with path.open("rb") as file:
            return file.read(LARGEST_BYTES + 1)
    except OSError as error:
        raise SymbolRefused(f"{path.name} cannot be read: {error.strerror}.") from None


def sound(symbol: Symbol) -> bool:
    """True where a symbol may be drawn: one that came in a drawing from elsewhere is checked as a file is."""
    numbers = (symbol.width, symbol.height, *(n for point in symbol.terminals for n in point))
    fits = all(math.isfinite(n) and abs(n) <= LARGEST_SIDE for n in numbers)
    return fits and min(symbol.width, symbol.height) > 0 and _passes(symbol.svg)


@lru_cache(maxsize=64)
def _passes(svg: str) -> bool:
    try:
        check(svg.encode())
    except (SymbolRefused, UnicodeEncodeError):
        return False
    return True


@lru_cache(maxsize=64)
def _renderer(svg: str) -> "QSvgRenderer":
    from PySide6.QtSvg import QSvgRenderer  # most drawings wear our own symbols alone

    return QSvgRenderer(QByteArray(svg.encode()))


def default_terminals(symbol: Symbol, branch: bool) -> tuple[tuple[float, float], ...]:
    """Where branches meet the symbol: as marked, else left and right middle, or the top middle."""
    middle_y, middle_x = symbol.height / 2, symbol.width / 2
    usual = ((0.0, middle_y), (symbol.width, middle_y)) if branch else ((middle_x, 0.0),)
    return symbol.terminals[: len(usual)] + usual[len(symbol.terminals) :]


class Worn(Struct, frozen=True):
    """A symbol made to fit: `place` maps its viewBox units to pixels about its middle, drawn along x for
    a branch and fed from above for an attachment, as our own symbols are."""

    symbol: Symbol
    half: float
    place: QTransform

    @property
    def box(self) -> QRectF:
        """What it covers, unturned."""
        return self.place.mapRect(QRectF(0, 0, self.symbol.width, self.symbol.height))

    def paint(self, painter: QPainter, at: QPointF, angle: float) -> None:
        """The picture with its middle at a point, turned clockwise."""
        painter.save()
        painter.translate(at)
        painter.rotate(angle)
        painter.setTransform(self.place, True)
        _renderer(self.symbol.svg).render(painter, QRectF(0, 0, self.symbol.width, self.symbol.height))
        painter.restore()


def wear(symbol: Symbol, element: Element) -> Worn:
    """The symbol fitted to an element of its kind."""
    if isinstance(element, Branch):
        return _worn_along(symbol, default_terminals(symbol, branch=True))
    if isinstance(element, Node):
        scale = SIZE / max(symbol.width, symbol.height)
        place = QTransform.fromScale(scale, scale).translate(-symbol.width / 2, -symbol.height / 2)
        return Worn(symbol, 0.0, place)
    return _worn_hanging(symbol, default_terminals(symbol, branch=False)[0])


def _worn_along(symbol: Symbol, ends: Sequence[tuple[float, float]]) -> Worn:
    """Both terminals on the line, a whole number of grid steps either side of the middle where it fits."""
    a, b = QPointF(*ends[0]), QPointF(*ends[1])
    span = distance(a, b) or max(symbol.width, symbol.height)
    turn = -math.degrees(math.atan2(b.y() - a.y(), b.x() - a.x()))
    turned = QTransform().rotate(turn).mapRect(QRectF(0, 0, symbol.width, symbol.height))
    room = min(WIDEST / turned.width(), TALLEST / turned.height())
    usual = min(max(2 * GRID, SIZE * 1.25 * span / max(turned.width(), turned.height())), room * span)
    steps = round(usual / (2 * GRID))
    wide = 2 * GRID * steps if steps and 2 * GRID * steps <= room * span else usual
    scale = wide / span
    middle = (a + b) / 2
    place = QTransform().rotate(turn).scale(scale, scale).translate(-middle.x(), -middle.y())
    return Worn(symbol, wide / 2, place)


def _worn_hanging(symbol: Symbol, terminal: tuple[float, float]) -> Worn:
    """Turned by quarters until the terminal looks up at the node, and moved until it stands below it."""
    scale = SIZE / max(symbol.width, symbol.height)
    dx, dy = terminal[0] - symbol.width / 2, terminal[1] - symbol.height / 2
    quarter = round(math.degrees(math.atan2(dy, dx)) / 90) % 4 if dx or dy else 3
    place = QTransform().rotate(-90 * (quarter - 3)).scale(scale, scale)
    place.translate(-symbol.width / 2, -symbol.height / 2)
    at = place.map(QPointF(*terminal))
    return Worn(symbol, -at.y(), place * QTransform.fromTranslate(-at.x(), 0))


@lru_cache(maxsize=128)
def _pixmap(svg: str, width: float, height: float, size: int, scale: float) -> QPixmap:
    pixmap = QPixmap(round(size * scale), round(size * scale))
    pixmap.setDevicePixelRatio(scale)
    pixmap.fill(Qt.GlobalColor.transparent)
    painter = QPainter(pixmap)
    shrink = (size - 2) / max(width, height)
    box = QRectF(0, 0, width * shrink, height * shrink)
    box.moveCenter(QPointF(size / 2, size / 2))
    _renderer(svg).render(painter, box)
    painter.end()
    return pixmap


def symbol_icon(symbol: Symbol, size: int = 32) -> QIcon:
    """The user's picture as an icon for the shelf."""
    made = QIcon()
    for scale in ICON_SCALES if sound(symbol) else ():
        made.addPixmap(_pixmap(symbol.svg, symbol.width, symbol.height, size, scale))
    return made
