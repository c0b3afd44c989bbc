"""The head of the window: project, loading cases, what the supply gives and what is lost."""

from PySide6.QtCore import QRectF, QSize, Qt
from PySide6.QtGui import QFontMetricsF, QPainter, QPaintEvent
from PySide6.QtWidgets import QHBoxLayout, QSizePolicy, QVBoxLayout, QWidget

from app.canvas.palette import font
from app.canvas.theme import Theme
from app.live.attention import Attention
from app.live.session import Session
from app.live.solving import Solving
from app.model.figures import change, loss, power
from app.panels.chips import CaseChips
from app.panels.style import play
from app.panels.words import LEFT, Rule, Words

HEIGHT = 50
WORD_GAP, GROUP_GAP = 7, 20
_FONTS = ((9, False), (11, True), (9, True))  # points and bold of caption, figure and change


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
        self._clean = session.history.isClean()
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
        session.history.cleanChanged.connect(self._saved)
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

    def _saved(self, clean: bool) -> None:
        self._clean = clean
        self._follow()

    def _follow(self) -> None:
        project = self._session.drawing.project
        self.title.say(project.title or self._file or "New drawing")
        revision = f"rev {project.revision}" if project.revision else ""
        unsaved = "" if self._clean else "not saved"
        file = self._file if project.title else ""  # else it is the title already
        self.about.say(" · ".join(part for part in (project.place, revision, file, unsaved) if part))


class Totals(QWidget):
    """Supply kW and lost kW, with the change since the drag began."""

    def __init__(self, solving: Solving, attention: Attention, theme: Theme) -> None:
        super().__init__()
        self._solving, self._attention, self._theme = solving, attention, theme
        self.setSizePolicy(QSizePolicy.Policy.Maximum, QSizePolicy.Policy.Expanding)
        self.setAccessibleName("Totals")
        solving.solved.connect(self._follow)
        solving.went_stale.connect(self._follow)
        attention.case_shown.connect(self._follow)
        theme.changed.connect(self.update)

    def sizeHint(self) -> QSize:
        """Room for both totals with their changes, so that nothing shifts while dragging."""
        widest = [("Supply was", "1 234 kW", "▲ 0.04 kW"), ("Lost was", "1.64 kW", "▲ 0.04 kW")]
        return QSize(round(sum(_width(group) for group in widest)) + GROUP_GAP, HEIGHT)

    def minimumSizeHint(self) -> QSize:
        return QSize(120, HEIGHT)

    def _follow(self) -> None:
        self.setAccessibleDescription(
            ", ".join(f"{name} {figure} {moved}".strip() for name, figure, moved in self.figures())
        )
        self.update()

    def figures(self) -> list[tuple[str, str, str]]:
        """Caption, figure and change of each total; of the past while the drawing is not solved."""
        outcome, before = self._solving.figures, self._solving.reference
        past = " was" if self._solving.problem is not None else ""
        if past and outcome is None:
            return [("Supply", "–", ""), ("Lost", "–", "")]
        if outcome is None:
            return []
        case = min(self._attention.case, len(outcome.cases) - 1)
        made = []
        for name, column, write in (("Supply", "supply_kw", power), ("Lost", "loss_kw", loss)):
            now = float(getattr(outcome.balance, column)[case])
            moved = ""
            if before is not None and case < len(before.cases):
                moved = change(now, float(getattr(before.balance, column)[case]), write)
            made.append((name + past, write(now), moved))
        return made

    def paintEvent(self, event: QPaintEvent) -> None:
        """From the right; a total for which there is no room is left out whole."""
        painter = QPainter(self)
        right = float(self.width())
        for group in reversed(self.figures()):
            left = right - _width(group)
            if left < 0:
                return
            self._paint_group(painter, group, left)
            right = left - GROUP_GAP

    def _paint_group(self, painter: QPainter, group: tuple[str, str, str], left: float) -> None:
        palette = self._theme.palette
        ink = palette.soft if self._solving.stale else palette.ink
        for text, letters, colour in zip(group, _FONTS, (palette.soft, ink, palette.tap), strict=True):
            if text:
                painter.setFont(font(*letters))
                painter.setPen(colour)
                wide = QFontMetricsF(painter.font()).horizontalAdvance(text)
                painter.drawText(QRectF(left, 1, wide + 2, HEIGHT), int(LEFT), text)
                left += wide + WORD_GAP


def _width(group: tuple[str, str, str]) -> float:
    """Caption, figure and change side by side."""
    shown = [(text, letters) for text, letters in zip(group, _FONTS, strict=True) if text]
    wide = sum(QFontMetricsF(font(*letters)).horizontalAdvance(text) for text, letters in shown)
    return wide + WORD_GAP * (len(shown) - 1)
