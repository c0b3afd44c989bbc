"""What the shelf asks: a name, a kind, a file, where the terminals are. Tests put recorders in its place."""

from PySide6.QtWidgets import QWidget

from app.canvas.theme import Theme
from app.model.drawing import Part, Symbol
from app.model.kinds import KIND_WORDS

KINDS_WITH_SYMBOL = (
    "transformer", "regulator", "switch", "supply", "load", "motor", "generator", "capacitor",
)  # fmt: skip


class ShelfDialogs:
    """Small questions, one at a time."""

    def __init__(self, parent: QWidget, theme: Theme) -> None:
        self._parent, self._theme = parent, theme

    def ask_name(self, title: str, suggestion: str) -> str:
        """A name for a part; empty where the person changed their mind."""
        from PySide6.QtWidgets import QInputDialog  # each dialog is loaded when it is first asked

        name, agreed = QInputDialog.getText(self._parent, title, "Name of the part", text=suggestion)
        return name.strip() if agreed else ""

    def ask_kind(self) -> str | None:
        """What a dropped picture is the symbol of."""
        from PySide6.QtWidgets import QInputDialog

        words = [KIND_WORDS[kind] for kind in KINDS_WITH_SYMBOL]
        title, question = "A part of your own", "What is this picture the symbol of?"
        word, agreed = QInputDialog.getItem(self._parent, title, question, words, 0, False)
        return KINDS_WITH_SYMBOL[words.index(word)] if agreed else None

    def svg_to_open(self) -> str:
        """The SVG file to take as symbol; empty for none."""
        from PySide6.QtWidgets import QFileDialog

        path, _kind = QFileDialog.getOpenFileName(self._parent, "Symbol", "", "Pictures (*.svg)")
        return path

    def terminals(self, part: Part) -> Symbol | None:
        """The symbol with its terminals where the person put them, or None."""
        from app.panels.terminals import Terminals

        dialog = Terminals(part, self._theme, self._parent)
        return dialog.symbol() if dialog.exec() else None
