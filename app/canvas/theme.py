"""Which palette and which symbol set is worn just now; everything painted listens to it."""

from PySide6.QtCore import QObject, Qt, Signal
from PySide6.QtGui import QGuiApplication

from app.canvas.palette import DARK, LIGHT, Palette


class Theme(QObject):
    """Light, dark or as the desktop says; IEC or ANSI symbols."""

    changed = Signal()

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.choice = "desktop"  # "light", "dark" or "desktop"
        self.symbols = "IEC"  # or "ANSI"

    @property
    def palette(self) -> Palette:
        """The colours to paint with."""
        if self.choice == "desktop":
            dark = QGuiApplication.styleHints().colorScheme() == Qt.ColorScheme.Dark
            return DARK if dark else LIGHT
        return DARK if self.choice == "dark" else LIGHT

    def wear(self, choice: str | None = None, symbols: str | None = None) -> None:
        """Change the palette choice, the symbol set, or both."""
        self.choice = choice or self.choice
        self.symbols = symbols or self.symbols
        self.changed.emit()
