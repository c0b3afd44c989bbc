"""The about box with its cautions, and the list of keys."""

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QGridLayout,
    QLabel,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

from app.canvas.view import SHORTCUTS
from app.panels.dialogs import centre
from app.panels.style import play
from app.study.cautions import CAUTIONS
from app.version import version


def _plain(text: str, role: str = "") -> QLabel:
    label = QLabel(text)
    label.setTextFormat(Qt.TextFormat.PlainText)
    label.setWordWrap(True)
    play(label, role)
    return label


class About(QDialog):
    """What this is, which version, and what it does not decide."""

    def __init__(self, parent: QWidget) -> None:
        super().__init__(parent)
        self.setWindowTitle("About Farend")
        self.setMinimumWidth(460)
        down = QVBoxLayout(self)
        down.setContentsMargins(28, 24, 28, 20)
        down.setSpacing(10)
        down.addWidget(_plain("Farend", "title"))
        down.addWidget(_plain(f"Version {version()} · MIT licence", "quiet"))
        down.addWidget(
            _plain("A drawing board for small electricity distribution layouts, solved as you touch it.")
        )
        for caution in CAUTIONS:
            down.addWidget(_plain(f"–  {caution}"))
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
        buttons.rejected.connect(self.reject)
        down.addWidget(buttons)
        centre(self, parent)


class Keys(QDialog):
    """Every key and gesture of the board."""

    def __init__(self, parent: QWidget) -> None:
        super().__init__(parent)
        self.setWindowTitle("Keys")
        self.setMinimumSize(560, 440)
        grid = QGridLayout()
        grid.setColumnStretch(1, 1)
        grid.setHorizontalSpacing(24)
        for row, (keys, what) in enumerate(SHORTCUTS):
            name = _plain(keys, "strong")
            name.setWordWrap(False)
            grid.addWidget(name, row, 0, Qt.AlignmentFlag.AlignTop)
            grid.addWidget(_plain(what), row, 1)
        inside = QWidget()
        play(inside, "panel")
        inside.setLayout(grid)
        scroll = QScrollArea()
        scroll.setWidgetResizable(True)
        scroll.setWidget(inside)
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
        buttons.rejected.connect(self.reject)
        down = QVBoxLayout(self)
        down.addWidget(scroll)
        down.addWidget(buttons)
        centre(self, parent)
