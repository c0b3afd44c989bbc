"""The year in a window of its own: run it, stop it, read it, go from a row to its element."""

from pathlib import Path

from PySide6.QtCore import QRectF, QSize, Qt, Signal
from PySide6.QtGui import QPainter, QPaintEvent
from PySide6.QtWidgets import (
    QButtonGroup,
    QDialog,
    QHBoxLayout,
    QPushButton,
    QScrollArea,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from app.canvas.theme import Theme
from app.live.attention import Attention
from app.live.session import Session
from app.live.year_run import YearRun
from app.model.file import FileError, write_bytes
from app.panels.course_plot import CoursePlot
from app.panels.dialogs import Dialogs, file_name
from app.panels.style import play
from app.panels.verdict_lines import VerdictLines
from app.panels.words import Sentence, Words
from app.panels.year_facts import YearFacts
from app.panels.year_table import ATTACHMENTS, BRANCHES, NODES, YearTable
from app.study.year_outcome import YearOutcome
from app.study.year_record import course_text

TABS = ("Branches", "Nodes", "Loads and infeeds", "Checks", "Basis")
MOST_CHECKS = 60
HOURS = "Comma-separated text (*.csv)"
NOTHING = (
    "Not run yet. Run takes every hour of the profiles that something follows; without any, 8 760 h alike."
)


class YearPage(QDialog):
    """Shows the newest whole year; grey while the drawing has moved on."""

    profiles_wanted = Signal()
    sought = Signal(object)  # ids to be brought into sight on the board

    def __init__(
        self,
        session: Session,
        run: YearRun,
        attention: Attention,
        theme: Theme,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self._session, self._run, self._attention, self._theme = session, run, attention, theme
        self._shown: YearOutcome | None = None
        self.dialogs = Dialogs(self)
        self.setWindowTitle("The year")
        self.setModal(False)
        self._build()
        run.progressed.connect(self.bar.show_progress)
        run.changed.connect(self.refresh)
        self.refresh()

    def sizeHint(self) -> QSize:
        return QSize(980, 640)

    # -- building -------------------------------------------------------------------------------
    def _build(self) -> None:
        self.title, self.state = Words("The year", "title"), Words("", "quiet")
        self.profiles, self.button = QPushButton("Profiles…"), QPushButton("Run")
        self.save = QPushButton("Save hours…")
        self.save.setToolTip("Every point of the year as a line of comma-separated text")
        self.profiles.setAutoDefault(False)
        self.save.setAutoDefault(False)
        self.save.clicked.connect(self._save)
        self.button.setDefault(True)
        self.profiles.clicked.connect(self.profiles_wanted)
        self.button.clicked.connect(self._press)
        head = QHBoxLayout()
        head.setSpacing(12)
        head.addWidget(self.title)
        head.addWidget(self.state, 1)
        head.addWidget(self.save)
        head.addWidget(self.profiles)
        head.addWidget(self.button)
        self.bar = ProgressLine(self._theme)
        self.nothing = Sentence("quiet")
        self.facts, self.plot = YearFacts(self._theme), CoursePlot(self._theme, "kW")
        self.plot.setAccessibleName("Power of all supplies through the year")
        self.facts.setFixedWidth(290)
        top = QHBoxLayout()
        top.setSpacing(18)
        top.addWidget(self.facts, 0, Qt.AlignmentFlag.AlignTop)
        top.addWidget(self.plot, 1)
        self.figures = QWidget()
        figures = QVBoxLayout(self.figures)
        figures.setContentsMargins(0, 0, 0, 0)
        figures.setSpacing(10)
        figures.addLayout(top)
        figures.addLayout(self._build_tabs())
        figures.addWidget(self.stack, 1)
        down = QVBoxLayout(self)
        down.setContentsMargins(18, 14, 18, 14)
        down.setSpacing(8)
        for part in (head, self.bar, self.nothing, self.figures):
            down.addLayout(part) if isinstance(part, QHBoxLayout) else down.addWidget(part)
        down.setStretchFactor(self.figures, 1)
        down.addStretch(0)
        play(self, "panel")

    def _build_tabs(self) -> QHBoxLayout:
        self.branches = YearTable("Branches through the year", BRANCHES, self._theme)
        self.nodes = YearTable("Nodes through the year", NODES, self._theme)
        self.attachments = YearTable("Loads and infeeds through the year", ATTACHMENTS, self._theme)
        self.checks, self.basis = VerdictLines(self._theme, MOST_CHECKS), Sentence("quiet")
        self.stack, self.tabs = QStackedWidget(), QButtonGroup(self)
        across = QHBoxLayout()
        across.setSpacing(4)
        pages = (self.branches, self.nodes, self.attachments, _scrolled(self.checks), _scrolled(self.basis))
        for number, (name, page) in enumerate(zip(TABS, pages, strict=True)):
            tab = QPushButton(name)
            tab.setCheckable(True)
            tab.setAutoDefault(False)
            tab.setChecked(number == 0)
            play(tab, "tab")
            self.tabs.addButton(tab, number)
            self.stack.addWidget(page)
            across.addWidget(tab)
        across.addStretch(1)
        self.tabs.idClicked.connect(self.stack.setCurrentIndex)
        for table in (self.branches, self.nodes, self.attachments):
            table.chosen.connect(self._choose)
        return across

    # -- showing --------------------------------------------------------------------------------
    def refresh(self) -> None:
        """Show how things stand."""
        run, year = self._run, self._run.year
        self.button.setText("Stop" if run.running else "Run")
        self.bar.setVisible(run.running)
        if not run.running:
            self.bar.show_progress(0, 1)
        there = year is not None and year.solved_h > 0
        self.figures.setVisible(there)
        self.save.setEnabled(there)
        if year is not self._shown:
            self._shown = year
            if year is not None:
                self._fill(year)
        self.nothing.say("" if there else NOTHING if year is None else year.sentence)
        self.state.say(self._words())
        stale = run.stale
        self.facts.fade(stale)
        for table in (self.branches, self.nodes, self.attachments):
            table.rows.fade(stale)
        if there and year is not None and self.plot.faded != stale:
            self.plot.show_course(year.course.supply_kw, year.points.hours, stale)

    def _words(self) -> str:
        run = self._run
        if run.running:
            return "Stopping…" if run.was_stopped else "Running…"
        if run.was_stopped:
            return "Stopped before its end." + (" The last whole year is shown." if run.year else "")
        if run.year is None:
            return ""
        return "Not up to date: the drawing has changed. Run it again." if run.stale else run.year.sentence

    def _fill(self, year: YearOutcome) -> None:
        of = self._run.of
        assert of is not None
        self.facts.show_year(year)
        self.branches.show_year(of, year.branches, year)
        self.nodes.show_year(of, year.nodes, year)
        self.attachments.show_year(of, year.attachments, year)
        self.checks.show_findings(year.findings)
        self.basis.say("\n\n".join(year.basis))
        self.plot.show_course(year.course.supply_kw, year.points.hours, self._run.stale)

    # -- what is asked for ----------------------------------------------------------------------
    def _press(self) -> None:
        if self._run.running:
            self._run.cancel()
        else:
            self._run.start()

    def _save(self) -> None:
        year = self._run.year
        if year is None:
            return
        title = self._session.drawing.project.title or "drawing"
        path = self.dialogs.file_to_write(
            "Save the hours", Path.home() / f"{file_name(title)} hours.csv", HOURS
        )
        if path is None:
            return
        try:
            write_bytes(path, course_text(year).encode())
        except FileError as error:
            self.state.say(str(error))
        else:
            self.state.say(f"{year.points.count} points written to {path.name}.")

    def _choose(self, id: str) -> None:
        if id in self._session.drawing.elements:
            self._attention.select((id,))
            self.sought.emit((id,))


class ProgressLine(QWidget):
    """How far a run is: a thin line that fills."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme, self.share = theme, 0.0
        self.setFixedHeight(4)
        self.setAccessibleName("Progress of the year")

    def show_progress(self, done: int, whole: int) -> None:
        """Points done, and points in all."""
        self.share = done / whole if whole else 0.0
        self.setAccessibleDescription(f"{self.share:.0%}")
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        look, room = self._theme.palette, QRectF(self.rect())
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(look.faint)
        painter.drawRoundedRect(room, 2, 2)
        painter.setBrush(look.flow)
        room.setWidth(room.width() * self.share)
        painter.drawRoundedRect(room, 2, 2)


def _scrolled(inside: QWidget) -> QScrollArea:
    holder = QWidget()
    play(holder, "panel")
    down = QVBoxLayout(holder)
    down.setContentsMargins(2, 4, 8, 4)
    down.addWidget(inside)
    down.addStretch(1)
    area = QScrollArea()
    area.setWidgetResizable(True)
    area.setWidget(holder)
    play(area, "panel")
    return area
