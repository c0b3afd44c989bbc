"""What else the shelf has of a kind: a menu behind the plain part's tile."""

from collections.abc import Callable, Sequence

from PySide6.QtCore import QPoint, Qt
from PySide6.QtWidgets import QMenu

from app.model.drawing import Part
from app.model.kinds import LETTERS, kind_of
from app.model.overhead_parts import spaced_parts
from app.model.parts import is_american
from app.model.phase_parts import parts_of
from app.panels.tile import Tile

Offered = Callable[[], Sequence[Part]]
Take = Callable[[Part], None]


def offer_more(tile: Tile, offered: Offered, take: Take) -> None:
    """Let a tile open the menu of these parts, from its corner or by the right button."""
    tile.has_more = True
    tile.more_asked.connect(lambda: menu_of(tile, offered, take).popup(beside(tile)))


def beside(tile: Tile) -> QPoint:
    """Where the menu opens: at the corner of the tile as it stands now, on the screen."""
    return tile.mapToGlobal(tile.corner().topRight().toPoint())


def behind(kind: str, frequency_hz: float) -> tuple[Part, ...]:
    """What there is of a kind besides its plain part, by the habit at a frequency."""
    american = is_american(frequency_hz)
    spaced = spaced_parts(american) if kind == "overhead_line" else ()
    return (*spaced, *parts_of(kind, american))


def tip_of(part: Part, offered: Sequence[Part]) -> str:
    """What a tile says: its kind with its key, and what is behind its corner."""
    tip = f"{part.name}  ({LETTERS[kind_of(part.element)]})"
    names = "\n".join(part.name for part in offered)
    return f"{tip}\nBehind its corner, or the right button:\n{names}" if names else tip


def menu_of(tile: Tile, offered: Offered, take: Take) -> QMenu:
    """The parts by name, as they are offered now."""
    menu = QMenu(tile)
    menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
    for part in offered():
        action = menu.addAction(part.name)
        action.triggered.connect(lambda _checked=False, part=part: take(part))
    return menu
