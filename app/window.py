"""The window: puts board, panels and services together. Wiring only."""

import gc
import sys
from pathlib import Path

from PySide6.QtCore import QByteArray, QPointF, QSize, Qt, QTimer
from PySide6.QtGui import QCloseEvent
from PySide6.QtWidgets import (
    QApplication,
    QHBoxLayout,
    QMainWindow,
    QSplitter,
    QToolTip,
    QVBoxLayout,
    QWidget,
)

from app.canvas.board import Board
from app.canvas.theme import Theme
from app.canvas.view import BoardView
from app.live.attention import Attention
from app.live.document import Document
from app.live.preferences import Preferences
from app.live.session import Session
from app.live.solving import Solving
from app.panels.card import Card
from app.panels.findings import FindingsBar
from app.panels.head import Head
from app.panels.menus import Menus
from app.panels.shelf import Shelf
from app.panels.strip import VoltageStrip
from app.panels.style import qt_palette, sheet
from app.panels.tape import LossTape
from app.panels.year_desk import YearDesk

REFUSAL_SHOWN_MS = 6000
TITLE_BAR = 40  # the desktop's own, which a size without it forgets


class Window(QMainWindow):
    """One open drawing."""

    def __init__(self, preferences: Preferences | None = None, recovery_folder: Path | None = None) -> None:
        super().__init__()
        self.preferences = preferences or Preferences()
        self.session = Session(parent=self)
        self.document = Document(self.session, self, recovery_folder=recovery_folder)
        self.solving = Solving(self.session, parent=self)
        self.attention = Attention(self.session, self)
        self.attention.case_shown.connect(self.solving.look)  # before any panel asks what to show of it
        self.theme = Theme(self)
        self.theme.wear(self.preferences.theme, self.preferences.symbols)
        self._make_parts()
        self._lay_out()
        self._wire()
        self._dress()
        self._mark()

    def _make_parts(self) -> None:
        shared = (self.session, self.solving, self.attention, self.theme)
        self.board = Board(*shared)
        self.view = BoardView(self.board, self.session, self.attention, self.theme)
        self.shelf = Shelf(self.session, self.theme, self.preferences)
        self.card = Card(*shared)
        self.strip = VoltageStrip(*shared)
        self.tape = LossTape(*shared)
        self.findings = FindingsBar(*shared)
        self.head = Head(*shared)
        self.year = YearDesk(self.session, self.attention, self.theme, self)
        self.menus = Menus(self)

    def _lay_out(self) -> None:
        self.middle = QSplitter(Qt.Orientation.Vertical)
        self.middle.addWidget(self.view)
        self.middle.addWidget(self.strip)
        self.middle.setStretchFactor(0, 3)
        self.middle.setStretchFactor(1, 1)
        self.middle.setSizes([560, 190])
        across = QHBoxLayout()
        for part, stretch in ((self.shelf, 0), (self.middle, 1), (self.card, 0)):
            across.addWidget(part, stretch)
        down = QVBoxLayout()
        down.addWidget(self.head)
        down.addLayout(across, 1)
        down.addWidget(self.tape)
        down.addWidget(self.findings)
        for layout in (across, down):
            layout.setSpacing(0)
            layout.setContentsMargins(0, 0, 0, 0)
        whole = QWidget()
        whole.setObjectName("whole")
        whole.setLayout(down)
        self.setCentralWidget(whole)
        self.setMinimumSize(QSize(760, 520))
        room = self.screen().availableSize() - QSize(0, TITLE_BAR)
        self.resize(QSize(1440, 900).boundedTo(room))
        if self.preferences.geometry:
            self.restoreGeometry(QByteArray(self.preferences.geometry))

    def _wire(self) -> None:
        self.shelf.picked.connect(self.view.place)
        self.shelf.put_back.connect(self.view.rest)
        self.shelf.refused.connect(self.findings.tell)
        self.view.card_wanted.connect(self.card.take_focus)
        self.card.left.connect(self.view.take_focus)
        self.card.profiles_wanted.connect(self.year.show_profiles)
        self.card.project.year.year_wanted.connect(self.year.show_year)
        self.year.sought.connect(self.view.show_selection)
        self.view.placing_ended.connect(self.shelf.rest)
        self.findings.sought.connect(self.view.show_selection)
        self.findings.field_sought.connect(self.card.focus_field)
        self.view.refused.connect(self.tell_refusal)
        self.view.told.connect(self.findings.tell)
        self.findings.left.connect(self.view.setFocus)
        self.session.history.cleanChanged.connect(lambda _clean: self._mark())
        self.session.replaced.connect(self._opened)
        self.document.saved.connect(self._mark)
        self.theme.changed.connect(self._dress)

    def _dress(self) -> None:
        self.setPalette(qt_palette(self.theme.palette))
        self.setStyleSheet(sheet(self.theme.palette))

    def _mark(self) -> None:
        path = self.document.path
        self.head.show_file(path.name if path else "")
        self.setWindowTitle(f"{path.name if path else 'New drawing'}[*] – Farend")
        self.setWindowModified(self.document.modified)

    def _opened(self) -> None:
        self.attention.select(())
        self._mark()
        QTimer.singleShot(0, self.view.fit)

    def tell_refusal(self, sentence: str, at: QPointF) -> None:
        """Show why an edit was refused, where the hand is."""
        where = self.view.mapToGlobal(self.view.mapFromScene(at))
        QToolTip.showText(where, sentence, self.view, self.view.rect(), REFUSAL_SHOWN_MS)
        self.findings.tell(sentence)

    def closeEvent(self, event: QCloseEvent) -> None:
        if not self.menus.may_leave():
            event.ignore()
            return
        self.preferences.geometry = bytes(self.saveGeometry().data())
        self.solving.stop()
        self.year.stop()
        self.document.close()
        event.accept()


def open_window(path: Path | None = None) -> int:
    """Open the window, on a file where one is given; returns the exit code."""
    app = QApplication.instance() or QApplication(sys.argv[:1])
    assert isinstance(app, QApplication)
    app.setApplicationName("Farend")
    window = Window()
    window.show()
    window.view.setFocus()
    if not window.menus.offer_recovery() and path is not None:
        window.menus.open_path(path)
    gc.freeze()  # what stands now is never litter, and need not be looked through in the midst of a drag
    gc.enable()
    return app.exec()
