"""Every question the window can ask, in one place, so that tests can answer for the person."""

from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFileDialog, QMessageBox, QWidget

DRAWINGS = "Farend drawings (*.farend);;All files (*)"
SHEETS = "Workbook (*.xlsx);;Comma-separated tables (*.csv)"
PICTURES = "Vector picture (*.svg);;Page (*.pdf);;Pixel picture (*.png)"


class Dialogs:
    """Asks the person through the desktop's own dialogs."""

    def __init__(self, parent: QWidget) -> None:
        self._parent = parent

    def file_to_open(self, folder: Path) -> Path | None:
        """A drawing to open, or None."""
        name, _ = QFileDialog.getOpenFileName(self._parent, "Open drawing", str(folder), DRAWINGS)
        return Path(name) if name else None

    def file_to_write(self, title: str, suggestion: Path, kinds: str) -> Path | None:
        """Where to write, or None. A name without a suffix gets that of the kind chosen."""
        name, kind = QFileDialog.getSaveFileName(self._parent, title, str(suggestion), kinds)
        if not name:
            return None
        path = Path(name)
        return (
            path if path.suffix else path.with_suffix(kind[kind.index("*") + 1 : kind.index(")")].split()[0])
        )

    def keep_changes(self, name: str) -> str:
        """`save`, `discard` or `cancel`, before a changed drawing is left."""
        buttons = QMessageBox.StandardButton
        answer = self._box(
            f"{name} has changes that are not saved.", buttons.Save | buttons.Discard | buttons.Cancel
        )
        return {buttons.Save: "save", buttons.Discard: "discard"}.get(answer, "cancel")

    def agree(self, question: str) -> bool:
        """True where the person says yes."""
        buttons = QMessageBox.StandardButton
        return self._box(question, buttons.Yes | buttons.No) == buttons.Yes

    def tell(self, sentence: str) -> None:
        """One sentence that cannot be shown in place."""
        self._box(sentence, QMessageBox.StandardButton.Ok)

    def _box(self, text: str, buttons: QMessageBox.StandardButton) -> QMessageBox.StandardButton:
        box = QMessageBox(self._parent)
        box.setWindowTitle("Farend")
        box.setTextFormat(Qt.TextFormat.PlainText)
        box.setText(text)
        box.setStandardButtons(buttons)
        return QMessageBox.StandardButton(box.exec())
