"""The questions of the window and its menus, in one place, so that tests can answer for the person."""

from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QDialog, QWidget

DRAWINGS = "Farend drawings (*.farend);;All files (*)"
SHEETS = "Workbook (*.xlsx);;Comma-separated tables (*.csv)"
PICTURES = "Vector picture (*.svg);;Page (*.pdf);;Pixel picture (*.png)"


class Dialogs:
    """Asks the person through the desktop's own dialogs."""

    def __init__(self, parent: QWidget) -> None:
        self._parent = parent

    def file_to_open(self, folder: Path) -> Path | None:
        """A drawing to open, or None."""
        from PySide6.QtWidgets import QFileDialog  # each dialog is loaded when it is first asked

        name, _ = QFileDialog.getOpenFileName(self._parent, "Open drawing", str(folder), DRAWINGS)
        return Path(name) if name else None

    def file_to_write(self, title: str, suggestion: Path, kinds: str) -> Path | None:
        """Where to write, or None. A name without a suffix gets that of the kind chosen."""
        from PySide6.QtWidgets import QFileDialog

        name, kind = QFileDialog.getSaveFileName(self._parent, title, str(suggestion), kinds)
        if not name:
            return None
        path = Path(name)
        return (
            path if path.suffix else path.with_suffix(kind[kind.index("*") + 1 : kind.index(")")].split()[0])
        )

    def keep_changes(self, name: str) -> str:
        """`save`, `discard` or `cancel`, before a changed drawing is left."""
        answer = self._box(f"{name} has changes that are not saved.", "Save", "Discard", "Cancel")
        return answer.lower()

    def agree(self, question: str) -> bool:
        """True where the person says yes."""
        return self._box(question, "Yes", "No") == "Yes"

    def recovery(self, title: str) -> str:
        """`open`, `keep` or `throw`, of a copy kept through a crash; closing the question keeps it."""
        open_it, throw, keep = "Open it", "Throw it away", "Keep it for later"
        question = f"Farend did not close properly. What shall be done with the recovery copy of {title}?"
        answer = self._box(question, open_it, throw, keep)
        return {open_it: "open", throw: "throw"}.get(answer, "keep")

    def tell(self, sentence: str) -> None:
        """One sentence that cannot be shown in place."""
        self._box(sentence, "Close")

    def _box(self, text: str, *names: str) -> str:
        """The name of the button chosen. Enter and closing the box choose the last: it changes nothing."""
        from PySide6.QtWidgets import QMessageBox

        box = QMessageBox(self._parent)
        box.setWindowTitle("Farend")
        box.setTextFormat(Qt.TextFormat.PlainText)
        box.setText(text)
        buttons = [box.addButton(name, QMessageBox.ButtonRole.ActionRole) for name in names]
        box.setDefaultButton(buttons[-1])
        box.setEscapeButton(buttons[-1])
        centre(box, self._parent)
        box.exec()
        chosen = box.clickedButton()
        return next(
            (name for name, button in zip(names, buttons, strict=True) if button is chosen), names[-1]
        )


def centre(dialog: QDialog, on: QWidget) -> None:
    """Put a dialog over the middle of its window."""
    dialog.ensurePolished()
    dialog.adjustSize()
    dialog.move(on.window().frameGeometry().center() - dialog.rect().center())


def value_file(parent: QWidget) -> Path | None:
    """A file of values to open, or None."""
    from PySide6.QtWidgets import QFileDialog

    name, _ = QFileDialog.getOpenFileName(parent, "Open values", "", "Values (*.csv *.txt);;All files (*)")
    return Path(name) if name else None


def file_name(title: str) -> str:
    """A title as the name of a file."""
    kept = "".join(c if c.isalnum() or c in " -_" else " " for c in title)
    return " ".join(kept.split()) or "drawing"
