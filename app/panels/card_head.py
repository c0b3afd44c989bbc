"""The head of the card: symbol, name that can be edited, kind and where it sits."""

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtGui import QPixmap
from PySide6.QtWidgets import QGridLayout, QLabel, QWidget

from app.panels.boxes import Entry
from app.panels.style import play
from app.panels.words import Sentence, Words

SYMBOL_SIZE = 38


class CardHead(QWidget):
    """What the card is about."""

    renamed = Signal(str)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.symbol = QLabel()
        self.symbol.setFixedSize(QSize(SYMBOL_SIZE + 4, SYMBOL_SIZE))
        self.symbol.setAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        self.name = Entry()
        self.name.setAccessibleName("Name")
        play(self.name, "title")
        self.name.committed.connect(self.renamed)
        self.name.given_up.connect(lambda: self.refuse(""))
        self.about = Words("", "quiet")
        self.about.setContentsMargins(6, 0, 0, 0)
        self.refusal = Sentence("refusal")
        grid = QGridLayout(self)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setHorizontalSpacing(0)
        grid.setVerticalSpacing(0)
        grid.addWidget(self.symbol, 0, 0, 2, 1)
        grid.addWidget(self.name, 0, 1)
        grid.addWidget(self.about, 1, 1)
        grid.addWidget(self.refusal, 2, 0, 1, 2)
        grid.setColumnStretch(1, 1)

    def show_about(self, name: str, quiet: str, about: str, symbol: QPixmap | None) -> None:
        """`quiet` stands where there is no name."""
        self.name.settle(name)
        self.name.setPlaceholderText(quiet)
        self.about.say(about)
        self.symbol.setVisible(symbol is not None)
        if symbol is not None:
            self.symbol.setPixmap(symbol)

    def refuse(self, sentence: str) -> None:
        """Why the name cannot stand."""
        self.refusal.say(sentence)
        play(self.name, "title", "refused" if sentence else "")
        if sentence:
            self.name.reopen()
