"""What else the shelf has of a kind: a menu behind the plain part's tile."""

from collections.abc import Callable, Sequence

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QMenu

from app.model.drawing import Part
from app.panels.tile import Tile

Offered = Callable[[], Sequence[Part]]
Take = Callable[[Part], None]


def offer_more(tile: Tile, offered: Offered, take: Take) -> None:
    """Let a tile open the menu of these parts, from its corner or by the right button."""
    tile.has_more = True
    names = "\n".join(part.name for part in offered())
    tile.setToolTip(f"{tile.toolTip()}\nBehind its corner, or the right button:\n{names}")
    beside = tile.corner().topRight().toPoint()
    tile.more_asked.connect(lambda: menu_of(tile, offered, take).popup(tile.mapToGlobal(beside)))


def menu_of(tile: Tile, offered: Offered, take: Take) -> QMenu:
    """The parts by name, as they are offered now."""
    menu = QMenu(tile)
    menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
    for part in offered():
        action = menu.addAction(part.name)
        action.triggered.connect(lambda _checked=False, part=part: take(part))
    return menu
