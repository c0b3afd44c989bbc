"""What the drawn items share: the look they wear, their place on the paper, light under the hand."""

from dataclasses import dataclass, field

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter
from PySide6.QtWidgets import QGraphicsItem, QStyleOptionGraphicsItem, QWidget

from app.canvas.palette import LIGHT, Palette
from app.canvas.phase_mark import Laid, Phases
from app.canvas.standing import Standing
from app.canvas.symbol_shapes import Glyph
from app.canvas.symbols import glyph_of, paint_glyph
from app.canvas.user_symbol import Worn, sound, wear
from app.model.drawing import Drawing
from app.model.kinds import Element

MIDDLE_GREY = 128
PLATE = 2.0  # of light ground around a picture


@dataclass
class Look:
    """What every item wears just now; one for the whole board."""

    palette: Palette = field(default_factory=lambda: LIGHT)
    symbols: str = "IEC"
    stale: bool = False
    blaming: bool = False  # there is no answer, and what stands in its way is marked
    printing: bool = False

    def aged(self, standing: Standing) -> bool:
        """True where something that stands so is painted grey."""
        return self.stale and not (self.blaming and standing is Standing.FAILED)


def dress(drawing: Drawing, element: Element, symbols: str) -> Glyph | Worn | None:
    """The user's own symbol where the element's part has one, else ours."""
    part = drawing.parts.get(element.part)
    if part is not None and part.symbol is not None and sound(part.symbol):
        return wear(part.symbol, element)
    return glyph_of(element, symbols)


def paint_worn(
    painter: QPainter, worn: Glyph | Worn, at: QPointF, angle: float, ink: QColor, paper: QColor
) -> None:
    """Either sort of symbol at a point."""
    if isinstance(worn, Worn):
        if paper.lightness() < MIDDLE_GREY:
            _paint_plate(painter, worn, at, angle)
        worn.paint(painter, at, angle)
    else:
        paint_glyph(painter, worn, at, angle, ink, paper)


def _paint_plate(painter: QPainter, worn: Worn, at: QPointF, angle: float) -> None:
    """Light ground under a picture of the user's own on dark paper: it keeps its colours, black lines too."""
    painter.save()
    painter.translate(at)
    painter.rotate(angle)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(LIGHT.paper)
    painter.drawRoundedRect(worn.box.adjusted(-PLATE, -PLATE, PLATE, PLATE), 5, 5)
    painter.restore()


def halo_colour(palette: Palette, selected: bool) -> QColor:
    """The light around what is selected, fainter around what is under the hand."""
    colour = QColor(palette.good)
    strength = (0.20 if palette.dark else 0.13) if selected else 0.08
    colour.setAlphaF(strength)
    return colour


class ElementItem(QGraphicsItem):
    """One element on the board, in scene coordinates; the board tells it what to show."""

    def __init__(self, id: str, look: Look) -> None:
        super().__init__()
        self.id = id
        self.look = look
        self.standing = Standing.PLAIN
        self.selected = False
        self.hovered = False
        self.phases: Phases | None = None  # what is said of them beside it
        self.mark: Laid | None = None
        self._bounds = QRectF()
        self.setAcceptedMouseButtons(Qt.MouseButton.NoButton)

    def place(self, drawing: Drawing) -> None:
        """Read from the drawing where it is; `read` follows."""
        raise NotImplementedError

    def read(self, drawing: Drawing) -> None:
        """Read from the drawing what it is, and take up its box where it was placed."""
        raise NotImplementedError

    def core(self) -> QRectF:
        """The box its symbol covers; captions keep off it."""
        raise NotImplementedError

    def stand(self, standing: Standing) -> None:
        """Show how the element stands; repaints only where that is new."""
        if standing is not self.standing:
            self.standing = standing
            self.update()

    def say_phases(self, said: Phases | None) -> bool:
        """Wear another mark of phases; True where that is another than before."""
        if said == self.phases:
            return False
        self.phases = said
        self.lay_mark()
        return True

    def lay_mark(self) -> None:
        """Find a place for the mark of phases."""

    def light(self, selected: bool, hovered: bool) -> None:
        """Selection and hover."""
        if (selected, hovered) != (self.selected, self.hovered):
            self.selected, self.hovered = selected, hovered
            self.update()

    @property
    def lit(self) -> bool:
        """Selected or under the hand, and on a screen."""
        return (self.selected or self.hovered) and not self.look.printing

    def bound(self, box: QRectF) -> None:
        """Take up this box."""
        if box != self._bounds:
            self.prepareGeometryChange()
            self._bounds = box
        self.update()

    def boundingRect(self) -> QRectF:
        return self._bounds

    def paint(
        self, painter: QPainter, option: QStyleOptionGraphicsItem, widget: QWidget | None = None
    ) -> None:
        raise NotImplementedError
