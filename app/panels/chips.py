"""The loading cases as chips, each with the mark of its worst finding; a menu where there is little room."""

from PySide6.QtCore import QSize
from PySide6.QtWidgets import QButtonGroup, QHBoxLayout, QMenu, QPushButton, QSizePolicy, QWidget

from app.canvas.theme import Theme
from app.live.attention import Attention
from app.live.session import Session
from app.live.solving import Solving
from app.panels.results import RANK
from app.panels.style import play
from app.panels.verdicts import icon
from app.study.outcome import Outcome, Verdict


class CaseChips(QWidget):
    """One chip a case; hidden while there is but one."""

    def __init__(self, session: Session, solving: Solving, attention: Attention, theme: Theme) -> None:
        super().__init__()
        self._session, self._solving, self._attention, self._theme = session, solving, attention, theme
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Preferred)
        self.setAccessibleName("Loading cases")
        self._across = QHBoxLayout(self)
        self._across.setContentsMargins(0, 0, 0, 0)
        self._across.setSpacing(8)
        self._across.addStretch(1)
        self._across.addStretch(1)
        self._group = QButtonGroup(self)
        self.chips: list[QPushButton] = []
        self.menu_chip = self._chip(checkable=False)
        self.menu_chip.setMenu(QMenu(self.menu_chip))
        session.changed.connect(lambda _change: self.follow())
        session.replaced.connect(self.follow)
        solving.solved.connect(lambda _outcome: self.follow())
        attention.case_shown.connect(lambda _case: self.follow())
        theme.changed.connect(self.follow)
        self.follow()

    def minimumSizeHint(self) -> QSize:
        return QSize(20, 30)

    def _chip(self, checkable: bool = True) -> QPushButton:
        chip = QPushButton()
        chip.setCheckable(checkable)
        play(chip, "chip")
        self._across.insertWidget(self._across.count() - 1, chip)
        return chip

    def follow(self) -> None:
        """Show the cases as they stand."""
        names = [case.name for case in self._session.drawing.cases]
        while len(self.chips) < len(names):
            self._add(len(self.chips))
        shown = min(self._attention.case, len(names) - 1)
        for k, chip in enumerate(self.chips):
            if k < len(names):
                chip.setText(names[k].replace("&", "&&"))
                chip.setIcon(icon(worst(self._solving.outcome, names[k]), self._theme.palette))
                chip.setChecked(k == shown)
        self.menu_chip.setText(names[shown].replace("&", "&&"))
        self.menu_chip.setIcon(icon(worst(self._solving.outcome, names[shown]), self._theme.palette))
        menu = self.menu_chip.menu()
        menu.clear()
        for k, name in enumerate(names):
            menu.addAction(name.replace("&", "&&"), lambda c=k: self._attention.show_case(c))
        self._arrange()

    def _add(self, case: int) -> None:
        chip = self._chip()
        self._group.addButton(chip)
        chip.clicked.connect(lambda _checked=False: self._attention.show_case(case))
        self.chips.append(chip)

    def _arrange(self) -> None:
        """Chips side by side where they fit, else one chip with a menu."""
        count = len(self._session.drawing.cases)
        need = sum(chip.sizeHint().width() + 14 for chip in self.chips[:count])
        fit = need <= self.width()
        for k, chip in enumerate(self.chips):
            chip.setVisible(count > 1 and fit and k < count)
        self.menu_chip.setVisible(count > 1 and not fit)
        self.menu_chip.setMaximumWidth(max(self.width(), 40))

    def resizeEvent(self, event) -> None:
        self._arrange()


def worst(outcome: Outcome | None, case: str) -> Verdict:
    """The worst verdict in a case."""
    if outcome is None:
        return Verdict.NOTE
    about = [f.verdict for f in outcome.findings if f.case == case]
    return min(about, key=RANK.__getitem__, default=Verdict.HOLDS)
