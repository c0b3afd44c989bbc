"""The head of the window: project, loading cases, what the supply gives and what is lost."""

from PySide6.QtCore import QRectF, QSize, Qt
from PySide6.QtGui import QFontMetricsF, QPainter, QPaintEvent
from PySide6.QtWidgets import QHBoxLayout, QSizePolicy, QVBoxLayout, QWidget

from app.canvas.palette import font
from app.canvas.theme import Theme
from app.live.attention import Attention
from app.live.session import Session
from app.live.solving import Solving
from app.model.figures import loss, power
from app.panels.change import change
from app.panels.chips import CaseChips
from app.panels.style import play
from app.panels.words import LEFT, Rule, Words
from solver.status import Status

HEIGHT = 50


class Head(QWidget):
    """Title at the left, cases in the middle, totals at the right."""

    def __init__(
        self,
        session: Session,
        solving: Solving,
        attention: Attention,
        theme: Theme,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self._session = session
        self._file = ""
        play(self, "panel")
        self.setAttribute(Qt.WidgetAttribute.WA_StyledBackground)
        self.setFixedHeight(HEIGHT + 1)
        self.title = Words("", "title")
        self.about = Words("", "quiet")
        self.chips = CaseChips(session, solving, attention, theme)
        self.totals = Totals(solving, attention, theme)
        self._lay_out()
        session.changed.connect(self._follow)
        session.replaced.connect(self._follow)
        session.history.cleanChanged.connect(self._follow)
        self._follow()

    def _lay_out(self) -> None:
        named = QVBoxLayout()
        named.setContentsMargins(0, 6, 0, 6)
        named.setSpacing(0)
        named.addWidget(self.title)
        named.addWidget(self.about)
        across = QHBoxLayout()
        across.setContentsMargins(18, 0, 18, 0)
        across.setSpacing(18)
        across.addLayout(named, 2)
        across.addWidget(self.chips, 3)
        across.addWidget(self.totals, 0)
        down = QVBoxLayout(self)
        down.setContentsMargins(0, 0, 0, 0)
        down.setSpacing(0)
        down.addLayout(across, 1)
        down.addWidget(Rule())

    def show_file(self, name: str) -> None:
        """The name of the file the drawing is kept in; empty for a drawing not yet saved."""
        self._file = name
        self._follow()

    def _follow(self) -> None:
        project = self._session.drawing.project
        self.title.say(project.title or self._file or "New drawing")
        revision = f"rev {project.revision}" if project.revision else ""
        unsaved = "" if self._session.history.isClean() else "not saved"
        self.about.say(" · ".join(part for part in (project.place, revision, self._file, unsaved) if part))


class Totals(QWidget):
    """Supply kW and lost kW, with the change since the drag began."""

    def __init__(self, solving: Solving, attention: Attention, theme: Theme) -> None:
        super().__init__()
        self._solving, self._attention, self._theme = solving, attention, theme
        self.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Expanding)
        self.setAccessibleName("Totals")
        solving.solved.connect(self._follow)
        solving.went_stale.connect(self._follow)
        attention.case_shown.connect(self._follow)
        theme.changed.connect(self.update)

    def sizeHint(self) -> QSize:
        return QSize(296, HEIGHT)

    def minimumSizeHint(self) -> QSize:
        return self.sizeHint()

    def _follow(self) -> None:
        self.setAccessibleDescription(
            ", ".join(f"{name} {figure} {moved}".strip() for name, figure, moved in self.figures())
        )
        self.update()

    def figures(self) -> list[tuple[str, str, str]]:
        """Caption, figure and change of each total."""
        outcome, before = self._solving.outcome, self._solving.reference
        if outcome is None or outcome.status is not Status.SOLVED:
            return []
        case = min(self._attention.case, len(outcome.cases) - 1)
        made = []
        for name, column, write in (("Supply", "supply_kw", power), ("Lost", "loss_kw", loss)):
            now = float(getattr(outcome.balance, column)[case])
            moved = ""
            if before is not None and case < len(before.cases):
                moved = change(now, float(getattr(before.balance, column)[case]), write)
            made.append((name, write(now), moved))
        return made

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        palette = self._theme.palette
        x = float(self.width())
        for name, figure, moved in reversed(self.figures()):
            ink = palette.soft if self._solving.stale else palette.ink
            for text, points, bold, colour, gap in (
                (moved, 9, True, palette.tap, 7),
                (figure, 11, True, ink, 7),
                (name, 9, False, palette.soft, 20),
            ):
                if not text:
                    continue
                painter.setFont(font(points, bold=bold))
                wide = QFontMetricsF(painter.font()).horizontalAdvance(text)
                x -= wide
                painter.setPen(colour)
                painter.drawText(QRectF(x, 1, wide + 2, HEIGHT), int(LEFT), text)
                x -= gap
