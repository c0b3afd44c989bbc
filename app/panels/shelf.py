"""The shelf at the left: built-in parts, and below a rule the user's own."""

from collections.abc import Callable, Iterable
from functools import partial, reduce
from pathlib import Path

from PySide6.QtCore import QSize, Qt, QTimer, Signal
from PySide6.QtGui import QAction
from PySide6.QtWidgets import QFrame, QLabel, QMenu, QScrollArea, QVBoxLayout, QWidget

from app.canvas.theme import Theme
from app.canvas.user_symbol import SymbolRefused, read_svg
from app.live.preferences import Preferences
from app.live.session import Session
from app.model import edits
from app.model.drawing import Drawing, Part, Symbol, label
from app.model.edits import Change
from app.model.kinds import KIND_WORDS, LETTERS, kind_of
from app.model.parts import builtin_parts
from app.panels.more_parts import behind, offer_more, tip_of
from app.panels.own_parts import OwnParts
from app.panels.shelf_dialogs import ShelfDialogs
from app.panels.style import play
from app.panels.tile import Tile, svg_path
from app.panels.words import Rule, plain_tip

WIDTH = 62
KEYS = {letter: kind for kind, letter in LETTERS.items()}


class Shelf(QScrollArea):
    """A click picks a part, a drag takes it out. `refused` carries why something could not be done."""

    picked = Signal(object)
    put_back = Signal()
    refused = Signal(str)

    def __init__(
        self, session: Session, theme: Theme, preferences: Preferences, parent: QWidget | None = None
    ) -> None:
        super().__init__(parent)
        self._session, self._theme = session, theme
        self.own = OwnParts(preferences.shelf_path)
        self.dialogs = ShelfDialogs(self, theme)
        self.tiles: list[Tile] = []
        self.own_tiles: list[Tile] = []
        self._in_hand: Tile | None = None
        self._offered: list[Part] = []
        self._build()
        session.changed.connect(self._changed)
        session.replaced.connect(self._follow)
        self._follow()
        if self.own.trouble:
            QTimer.singleShot(0, self, lambda: self.refused.emit(self.own.trouble))

    def _build(self) -> None:
        self.setWidgetResizable(True)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAsNeeded)
        self.setFixedWidth(WIDTH)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.setAcceptDrops(True)
        self.setAccessibleName("Shelf")
        self.verticalScrollBar().setStyleSheet("QScrollBar:vertical { width: 7px; }")
        content = QWidget()
        play(content, "panel")
        play(self, "panel")
        self._down = QVBoxLayout(content)
        self._down.setContentsMargins(3, 8, 2, 8)
        self._down.setSpacing(1)
        for part in builtin_parts():
            tile = self._tile(part, own=False)
            more = partial(self._behind, kind_of(part.element))
            if more():
                offer_more(tile, more, partial(self._take_up, tile))
            self.tiles.append(tile)
            self._down.addWidget(tile, 0, Qt.AlignmentFlag.AlignHCenter)
        self._down.addSpacing(4)
        self._down.addWidget(Rule())
        self._down.addSpacing(2)
        self._own_down = QVBoxLayout()
        self._own_down.setSpacing(1)
        self._down.addLayout(self._own_down)
        self.caption = QLabel("yours")
        self.caption.setAlignment(Qt.AlignmentFlag.AlignHCenter)
        self.caption.setToolTip("Parts of your own: keep a selected element here with Ctrl+K")
        play(self.caption, "quiet")
        self._down.addWidget(self.caption)
        self._down.addStretch(1)
        self.setWidget(content)

    def _behind(self, kind: str) -> tuple[Part, ...]:
        return behind(kind, self._session.drawing.frequency_hz)

    def _follow_habit(self) -> None:
        """Plain parts as they are usual at the frequency of the drawing."""
        for tile, part in zip(self.tiles, builtin_parts(self._session.drawing.frequency_hz), strict=True):
            tile.part = part
            tile.setToolTip(tip_of(part, self._behind(kind_of(part.element))))

    def _tile(self, part: Part, own: bool) -> Tile:
        tile = Tile(part, self._theme, own)
        tile.clicked.connect(lambda _checked=False: self._pick(tile))
        return tile

    def sizeHint(self) -> QSize:
        return QSize(WIDTH, 560)

    def minimumSizeHint(self) -> QSize:
        return QSize(WIDTH, 120)

    # -- what is offered ------------------------------------------------------------------------
    def _changed(self, change: Change) -> None:
        if change.rest:
            self._follow()

    def _follow(self) -> None:
        """Show the user's own parts as they stand."""
        self._follow_habit()
        offered = self.own.offered(self._session.drawing)
        if offered == self._offered:
            return
        self._offered = offered
        for tile in self.own_tiles:
            self._own_down.removeWidget(tile)
            tile.hide()
            tile.deleteLater()
        self.own_tiles = [self._own_tile(part) for part in offered]
        for tile in self.own_tiles:
            self._own_down.addWidget(tile, 0, Qt.AlignmentFlag.AlignHCenter)

    def _own_tile(self, part: Part) -> Tile:
        tile = self._tile(part, own=True)
        what = KIND_WORDS[kind_of(part.element)]
        tile.setToolTip(plain_tip(f"{part.name}: {what} of yours. Drop an SVG on it for its symbol."))
        tile.setContextMenuPolicy(Qt.ContextMenuPolicy.CustomContextMenu)
        tile.customContextMenuRequested.connect(lambda at: self.menu_of(part).popup(tile.mapToGlobal(at)))
        tile.dropped_svg.connect(lambda path: self.take_svg(part, path))
        return tile

    # -- picking --------------------------------------------------------------------------------
    def _pick(self, tile: Tile) -> None:
        """The same again puts it back."""
        if self._in_hand is tile:
            self.rest()
            self.put_back.emit()
            return
        self._take_up(tile, tile.part)

    def _take_up(self, tile: Tile, part: Part) -> None:
        self._in_hand = tile
        for other in self._all():
            other.setChecked(other is tile)
        self.picked.emit(part)

    def pick(self, kind: str) -> None:
        """Pick the built-in part of a kind, as its key does."""
        for tile in self.tiles:
            if kind_of(tile.part.element) == kind:
                self._pick(tile)

    def rest(self) -> None:
        """Placing has ended: nothing is in the hand."""
        self._in_hand = None
        for tile in self._all():
            tile.setChecked(False)

    def _all(self) -> Iterable[Tile]:
        return (*self.tiles, *self.own_tiles)

    def keyPressEvent(self, event) -> None:
        kind = KEYS.get(event.text().upper())
        if kind and not event.modifiers() & ~Qt.KeyboardModifier.ShiftModifier:
            self.pick(kind)
        elif event.key() in (Qt.Key.Key_Up, Qt.Key.Key_Down):
            self.focusNextPrevChild(event.key() == Qt.Key.Key_Down)
        else:
            super().keyPressEvent(event)

    # -- the user's own -------------------------------------------------------------------------
    def keep(self, id: str) -> None:
        """Keep an element of the drawing as a part; asks for its name."""
        element = self._session.drawing.elements.get(id)
        if element is None:
            return
        was = self._session.drawing.parts.get(element.part)
        suggestion = was.name if was else label(self._session.drawing, id)
        name = self.dialogs.ask_name("Keep on the shelf", suggestion)
        if not name:
            return
        text = f"{label(self._session.drawing, id)} kept as {name}"
        refusal = self._session.edit(text, lambda drawing: edits.keep_part(drawing, id, name))
        if refusal:
            self._tell(refusal)
            return
        part = self._session.drawing.parts[self._session.drawing.elements[id].part]
        self._done(self.own.keep(part))

    def menu_of(self, part: Part) -> QMenu:
        """What can be done with a part of the user's own."""
        menu = QMenu(self)
        menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)

        def add(text: str, do, enabled: bool = True) -> QAction:
            action = menu.addAction(text)
            action.triggered.connect(lambda _checked=False: do())
            action.setEnabled(enabled)
            return action

        add("Rename…", lambda: self._rename(part))
        add("Set symbol…", lambda: self._set_symbol(part))
        add("Edit terminals…", lambda: self._edit_terminals(part), part.symbol is not None)
        add("Default symbol", lambda: self._wear(part, None), part.symbol is not None)
        menu.addSeparator()
        add("Remove from shelf", lambda: self._remove(part))
        return menu

    def _rename(self, part: Part) -> None:
        name = self.dialogs.ask_name("Rename part", part.name)
        if not name or name == part.name:
            return
        refusal = self.own.rename(part, name)
        self._done(refusal)
        if not refusal:
            text = f"{part.name} renamed {name}"
            self._change_carried(part, text, lambda drawing, id: edits.rename_part(drawing, id, name))

    def _remove(self, part: Part) -> None:
        if part in self.own.kept:
            self._done(self.own.remove(part))
        else:
            self._tell(f"{part.name} came with the drawing, which uses it; it is not on the shelf.")

    def _set_symbol(self, part: Part) -> None:
        path = self.dialogs.svg_to_open()
        if path:
            self.take_svg(part, path)

    def take_svg(self, part: Part, path: str) -> None:
        """Make an SVG file the symbol of a part, or say why not."""
        try:
            symbol = read_svg(Path(path))
        except SymbolRefused as refusal:
            self._tell(f"{Path(path).name}: {refusal}")
            return
        self._wear(part, symbol)

    def _edit_terminals(self, part: Part) -> None:
        if part.symbol is not None:
            symbol = self.dialogs.terminals(part)
            if symbol is not None:
                self._wear(part, symbol)

    def _wear(self, part: Part, symbol: Symbol | None) -> None:
        refusal = self.own.wear(part, symbol)
        self._done(refusal)
        if not refusal:
            text = f"Symbol of {part.name}"
            self._change_carried(part, text, lambda drawing, id: edits.set_symbol(drawing, id, symbol))

    def _change_carried(self, part: Part, text: str, change: Callable[[Drawing, str], Drawing]) -> None:
        """The drawing carries its parts: what changes on the shelf changes in it too, and can be undone."""
        ids = [i for i, other in self._session.drawing.parts.items() if other.name == part.name]
        if ids:
            refusal = self._session.edit(text, lambda drawing: reduce(change, ids, drawing))
            if refusal:
                self._tell(refusal)

    def _done(self, refusal: str) -> None:
        if refusal:
            self._tell(refusal)
        self._follow()

    def _tell(self, sentence: str) -> None:
        """Why something could not be done, for whoever shows it."""
        self.refused.emit(sentence)

    # -- an SVG dropped beside the parts --------------------------------------------------------
    def dragEnterEvent(self, event) -> None:
        if svg_path(event.mimeData()):
            event.acceptProposedAction()

    def dragMoveEvent(self, event) -> None:
        if svg_path(event.mimeData()):
            event.acceptProposedAction()

    def dropEvent(self, event) -> None:
        path = svg_path(event.mimeData())
        if not path:
            return
        event.acceptProposedAction()
        kind = self.dialogs.ask_kind()
        if kind is not None:
            self.make_part(kind, path)

    def make_part(self, kind: str, path: str) -> None:
        """A new part of a kind with an SVG as its symbol, named after the file."""
        try:
            symbol = read_svg(Path(path))
        except SymbolRefused as refusal:
            self._tell(f"{Path(path).name}: {refusal}")
            return
        element = next(p.element for p in builtin_parts() if kind_of(p.element) == kind)
        self._done(self.own.keep(Part(name=Path(path).stem[:80] or "Part", element=element, symbol=symbol)))
