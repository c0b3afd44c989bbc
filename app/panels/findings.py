"""The bottom line: whether the checks hold, the tightest one, and what is assumed; folds out to the lists."""

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import (
    QHBoxLayout,
    QListWidget,
    QListWidgetItem,
    QPushButton,
    QSizePolicy,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from app.canvas.theme import Theme
from app.live.attention import Attention
from app.live.session import Session
from app.live.solving import Solving
from app.model import edits
from app.model.drawing import label
from app.model.fields import fields_of
from app.panels.element_words import noun
from app.panels.findings_words import Line, assumption_words, count_words, line, ordered
from app.panels.style import play
from app.panels.verdicts import Mark, colour_of, icon
from app.panels.words import Link, Rule, Words
from app.study.outcome import Assumption, Verdict

FOLD_HEIGHT = 168
TOLD_MS = 8000
IDS, ASSUMED = Qt.ItemDataRole.UserRole, Qt.ItemDataRole.UserRole + 1


class FindingsBar(QWidget):
    """`sought` asks for elements to be brought into sight, `field_sought` for one field on the card."""

    sought = Signal(object)
    field_sought = Signal(str, str)
    left = Signal()  # the list was closed by Esc: the board takes the keyboard back

    def __init__(
        self,
        session: Session,
        solving: Solving,
        attention: Attention,
        theme: Theme,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self._session, self._solving, self._attention, self._theme = session, solving, attention, theme
        self._line = Line(Verdict.NOTE, "", "")
        self._told = ""
        self.folded_out = ""  # "", "findings" or "assumed"
        play(self, "panel")
        self.setAttribute(Qt.WidgetAttribute.WA_StyledBackground)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self._forget_told = QTimer(self, singleShot=True, interval=TOLD_MS)
        self._forget_told.timeout.connect(self._changed)
        self._build()
        session.changed.connect(self._changed)
        session.replaced.connect(self._changed)
        solving.solved.connect(self._follow)
        solving.went_stale.connect(self._follow)
        theme.changed.connect(self._follow)
        self._follow()

    # -- building -------------------------------------------------------------------------------
    def _build(self) -> None:
        self.mark = Mark(self._theme, 15)
        self.headline = Words("", "strong")
        self.headline.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Fixed)
        self.sentence = Link("", "quiet")
        self.sentence.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.sentence.setMinimumWidth(60)
        self.sentence.clicked.connect(lambda: self._seek(self._line.ids))
        self.assumed = QPushButton()
        play(self.assumed, "link", "near")
        self.assumed.clicked.connect(lambda: self.fold("assumed"))
        self.unfold = QToolButton()
        self.unfold.setArrowType(Qt.ArrowType.NoArrow)
        self.unfold.setText("all findings")
        play(self.unfold, "link")
        self.unfold.clicked.connect(lambda: self.fold("findings"))
        across = QHBoxLayout()
        across.setContentsMargins(18, 7, 14, 7)
        across.setSpacing(9)
        for widget in (self.mark, self.headline, self.sentence, self.assumed, self.unfold):
            across.addWidget(widget)
        down = QVBoxLayout(self)
        down.setContentsMargins(0, 0, 0, 0)
        down.setSpacing(0)
        down.addWidget(Rule())
        down.addWidget(self._build_fold())
        down.addLayout(across)

    def _build_fold(self) -> QWidget:
        self.list = QListWidget()
        play(self.list, "list")
        self.list.setWordWrap(True)
        self.list.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.list.itemClicked.connect(self._chosen)
        self.list.itemActivated.connect(self._chosen)
        self.list.itemSelectionChanged.connect(self._enable_confirm)
        self.fold_title = Words("", "strong")
        self.confirm = QPushButton("Take as given")
        self.confirm.setToolTip("Let the assumed value stand in the drawing as one that was stated")
        self.confirm.clicked.connect(self._confirm)
        self.close_fold = QToolButton()
        self.close_fold.setText("close")
        play(self.close_fold, "link")
        self.close_fold.clicked.connect(lambda: self.fold(""))
        top = QHBoxLayout()
        for widget in (self.fold_title, self.confirm, self.close_fold):
            top.addWidget(widget, 1 if widget is self.fold_title else 0)
        self.fold_out = QWidget()
        down = QVBoxLayout(self.fold_out)
        down.setContentsMargins(18, 6, 14, 0)
        down.setSpacing(2)
        down.addLayout(top)
        down.addWidget(self.list)
        self.fold_out.hide()
        return self.fold_out

    # -- what is shown --------------------------------------------------------------------------
    def _changed(self) -> None:
        """New findings come with the next outcome; what was told passes at once."""
        told, self._told = self._told, ""
        if told or not self._solving.stale:
            self._follow()

    def tell(self, sentence: str) -> None:
        """Say something that just happened, for a while or until the next change."""
        self._told = sentence
        if sentence:
            self._forget_told.start()
        self._follow()

    def _follow(self) -> None:
        made = line(self._session.drawing, self._solving.newest)
        self._line = Line(Verdict.NOTE, "", self._told) if self._told else made
        self.mark.say(self._line.verdict)
        self.headline.say(self._line.headline)
        self.headline.setVisible(bool(self._line.headline))
        ink = colour_of(self._line.verdict, self._theme.palette)
        waiting = self._solving.stale and self._solving.problem is None
        if waiting and self._session.drawing.elements and not self._told:
            ink = self._theme.palette.soft
        self.headline.colour(ink)
        self.sentence.say(self._line.sentence)
        outcome = self._solving.newest
        count = len(outcome.assumptions) if outcome is not None else 0
        self.assumed.setVisible(bool(count))
        self.assumed.setText(count_words(count))
        self.unfold.setVisible(bool(outcome and outcome.findings))
        self._fill()

    def fold(self, which: str) -> None:
        """Fold out the findings or the assumed values; the same again folds them in."""
        self.folded_out = "" if which == self.folded_out else which
        self._fill()
        if self.folded_out:
            self.list.setFocus()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() != Qt.Key.Key_Escape:
            super().keyPressEvent(event)
            return
        if self.folded_out:
            self.fold(self.folded_out)
        self.left.emit()

    def _fill(self) -> None:
        outcome = self._solving.newest
        if outcome is None or (self.folded_out == "assumed" and not outcome.assumptions):
            self.folded_out = ""
        self.fold_out.setVisible(bool(self.folded_out))
        if not self.folded_out or outcome is None:
            return
        row = self.list.currentRow()
        assumed = self.folded_out == "assumed"
        self.fold_title.say("Assumed values" if assumed else "Findings")
        self.confirm.setVisible(assumed)
        self.list.clear()
        if assumed:
            for one in outcome.assumptions:
                self._add(assumption_words(self._session.drawing, one), Verdict.NEAR, (one.id,), one)
        else:
            for found in ordered(outcome):
                self._add(found.sentence, found.verdict, found.ids)
        self.list.setAccessibleName(self.fold_title.text())
        if row >= 0:
            self.list.setCurrentRow(min(row, self.list.count() - 1))
        most = min(FOLD_HEIGHT, self.window().height() // 5)  # a small window keeps room for the paper
        self.list.setFixedHeight(min(most, self.list.sizeHintForRow(0) * self.list.count() + 6))
        self._enable_confirm()

    def _add(
        self, text: str, verdict: Verdict, ids: tuple[str, ...], assumption: Assumption | None = None
    ) -> None:
        item = QListWidgetItem(icon(verdict, self._theme.palette), text)
        item.setData(IDS, ids)
        item.setData(ASSUMED, assumption)
        self.list.addItem(item)

    def _enable_confirm(self) -> None:
        self.confirm.setEnabled(self.list.currentItem() is not None)

    # -- what is asked for ----------------------------------------------------------------------
    def _seek(self, ids: tuple[str, ...]) -> None:
        known = tuple(i for i in ids if i in self._session.drawing.elements)
        if known:
            self._attention.select(known)
            self.sought.emit(known)

    def _chosen(self, item: QListWidgetItem) -> None:
        self._seek(item.data(IDS))
        assumption = item.data(ASSUMED)
        if isinstance(assumption, Assumption):
            self.field_sought.emit(assumption.id, assumption.field)

    def _confirm(self) -> None:
        """The assumed value becomes a stated one."""
        item = self.list.currentItem()
        one = item.data(ASSUMED) if item is not None else None
        element = self._session.drawing.elements.get(one.id) if isinstance(one, Assumption) else None
        if element is None:
            return
        name = noun(fields_of(type(element))[one.field])
        text = f"{name} of {label(self._session.drawing, one.id)} taken as given"
        refusal = self._session.edit(text, lambda d: edits.change(d, one.id, **{one.field: one.value}))
        if refusal:
            self.tell(refusal)
