"""The findings about the element on the card: a mark and a sentence each."""

from collections.abc import Sequence

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QGridLayout, QWidget

from app.canvas.theme import Theme
from app.panels.verdicts import Mark
from app.panels.words import Sentence, Words
from app.study.outcome import Finding

MOST = 8


class VerdictLines(QWidget):
    """Rows are kept and filled anew; hidden where nothing was found."""

    def __init__(self, theme: Theme, most: int = MOST, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme, self._most = theme, most
        self._grid = QGridLayout(self)
        self._grid.setContentsMargins(0, 0, 0, 0)
        self._grid.setHorizontalSpacing(8)
        self._grid.setVerticalSpacing(6)
        self._grid.setColumnStretch(1, 1)
        self._grid.addWidget(Words("Checks", "strong"), 0, 0, 1, 2)
        self._rows: list[tuple[Mark, Sentence]] = []
        self.hide()

    def show_findings(self, findings: Sequence[Finding]) -> None:
        """Show these, worst first."""
        shown = findings[: self._most]
        while len(self._rows) < len(shown):
            self._add()
        for k, (mark, sentence) in enumerate(self._rows):
            there = k < len(shown)
            mark.setVisible(there)
            sentence.say(shown[k].sentence if there else "")
            if there:
                mark.say(shown[k].verdict)
        self.setVisible(bool(shown))

    def _add(self) -> None:
        mark, sentence = Mark(self._theme, 13), Sentence("quiet")
        row = len(self._rows) + 1
        self._grid.addWidget(mark, row, 0, Qt.AlignmentFlag.AlignTop)
        self._grid.addWidget(sentence, row, 1)
        self._rows.append((mark, sentence))
