"""One field of a card: label, amber dot where a value is assumed, box with its unit, refusal in place."""

import math
from collections.abc import Callable
from typing import Any

from PySide6.QtCore import QPointF, QSize, Qt
from PySide6.QtGui import QPainter, QPaintEvent
from PySide6.QtWidgets import QGridLayout, QHBoxLayout, QSizePolicy, QWidget

from app.canvas.theme import Theme
from app.model.fields import Field
from app.model.figures import MINUS, THIN, typed
from app.panels.boxes import BOX_HEIGHT, Box, Choice, Entry, Note, Tick
from app.panels.style import restyle
from app.panels.words import RIGHT, Sentence, Words, plain_tip

Take = Callable[[Field, str], str]  # takes what was typed, answers why not, or nothing
YES_NO = ("no", "yes")
VARIOUS = "various"
BOX_WIDTH = 142
LONG = 8  # more than this may not fit into a box, so the tooltip says it whole


class Dot(QWidget):
    """The amber dot of an assumed value; its tooltip says on what basis."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme = theme
        self.setFixedSize(QSize(12, BOX_HEIGHT))
        keep = self.sizePolicy()
        keep.setRetainSizeWhenHidden(True)
        self.setSizePolicy(keep)
        self.hide()

    def say(self, basis: str) -> None:
        """Show with this basis, or hide."""
        self.setToolTip(plain_tip(basis))
        self.setAccessibleName(basis)
        self.setVisible(bool(basis))

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(self._theme.palette.near)
        painter.drawEllipse(QPointF(self.width() / 2, self.height() / 2), 2.8, 2.8)


class FieldRow(QWidget):
    """A labelled field. `take` is asked with what was typed; its answer is shown as the refusal."""

    def __init__(self, field: Field, take: Take, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.field = field
        self._take = take
        self._value: Any = None
        self._text = ""
        self.label = Words(field.label, "quiet")
        self.label.say(field.label, field.help)
        self.dot = Dot(theme)
        self.editor = self._make_editor()
        self.box = self._make_box()
        self.refusal = Sentence("refusal")
        self._lay_out()

    def _make_editor(self) -> Entry | Note | Choice | Tick:
        field = self.field
        editor: Entry | Note | Choice | Tick
        if field.type is bool:
            editor = Tick()
            editor.clicked.connect(self._ticked)
        elif field.choices:
            editor = Choice()
            editor.addItems(field.choices)
            editor.activated.connect(lambda index: self._committed(field.choices[index]))
        else:
            editor = Note() if field.name == "note" else Entry()
            editor.committed.connect(self._committed)
        if isinstance(editor, Entry):
            editor.setAlignment(RIGHT)
            editor.given_up.connect(lambda: self.refuse(""))
        editor.setAccessibleName(f"{field.label} {field.unit}".strip())
        editor.setAccessibleDescription(field.help)
        return editor

    def _make_box(self) -> QWidget:
        if isinstance(self.editor, Tick):
            holder = QWidget()
            across = QHBoxLayout(holder)
            across.setContentsMargins(0, 0, 4, 0)
            across.addStretch(1)
            across.addWidget(self.editor)
            holder.setFixedHeight(BOX_HEIGHT)
            return holder
        return Box(self.editor, self.field.unit.removesuffix(" of nominal").removesuffix(" of rated"))

    def _lay_out(self) -> None:
        self.grid = grid = QGridLayout(self)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setHorizontalSpacing(2)
        grid.setVerticalSpacing(2)
        if isinstance(self.editor, Note):
            grid.addWidget(self.label, 0, 0)
            grid.addWidget(self.box, 1, 0, 1, 3)
        else:
            self.label.setFixedHeight(BOX_HEIGHT)
            grid.addWidget(self.label, 0, 0, Qt.AlignmentFlag.AlignTop)
            grid.addWidget(self.dot, 0, 1, Qt.AlignmentFlag.AlignTop)
            grid.addWidget(self.box, 0, 2)
            self.box.setFixedWidth(BOX_WIDTH)
        grid.addWidget(self.refusal, 2, 0, 1, 3)
        grid.setColumnStretch(0, 1)
        self.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Maximum)
        self.setFocusProxy(self.editor)

    # -- showing --------------------------------------------------------------------------------
    def show_value(self, value: Any, quiet: str = "", basis: str = "", other: str = "") -> None:
        """The value as it stands. Where it is blank, `quiet` stands in its place; `basis` says why that
        is assumed; `other` is the value in the other habit of units, for the tooltip."""
        various = quiet == VARIOUS
        self._value, self._text = value, "" if various else written(value)
        editor = self.editor
        if isinstance(editor, Entry):
            editor.brief = "" if various else brief(value)
        if isinstance(editor, Tick):
            editor.setTristate(various)
            partly = Qt.CheckState.PartiallyChecked
            editor.setCheckState(
                partly if various else Qt.CheckState.Checked if value else Qt.CheckState.Unchecked
            )
        elif isinstance(editor, Choice):
            editor.setCurrentIndex(-1 if various else self.field.choices.index(value))
        elif isinstance(editor, Note):
            editor.settle(self._text)
        else:
            self._settle(editor, self._text, quiet)
        self.dot.say(f"{self.field.label} is assumed: {basis}" if basis else "")
        whole = f"{self._text} {self.field.unit}" if len(self._text) > LONG else ""
        parts = (whole, self.field.help, other, basis and f"Assumed: {basis}")
        tip = "\n".join(part for part in parts if part)
        editor.setToolTip(plain_tip(tip))

    def follow(self, whence: str) -> None:
        """Greyed and without a value of its own while another field tells it; empty: as usual again."""
        self.editor.setEnabled(not whence)
        if whence:
            self.show_value(None, quiet=whence, other="What was typed here is kept, but not used.")

    def _settle(self, editor: Entry, text: str, quiet: str) -> None:
        was_busy = editor.busy
        editor.settle(text)
        if not editor.busy:
            if was_busy or not self.refusal.isHidden():
                self.refuse("")
        if editor.placeholderText() != quiet:
            editor.setPlaceholderText(quiet)
        blank = "true" if not text else "false"
        if editor.property("blank") != blank:
            editor.setProperty("blank", blank)
            restyle(editor)

    def refuse(self, sentence: str) -> None:
        """Show why what was typed cannot stand; empty: all is well again."""
        self.refusal.say(sentence)
        if isinstance(self.box, Box):
            self.box.wear("refused" if sentence else self._rest)

    _rest = ""

    def stress(self, state: str) -> None:
        """The look of the box at rest, such as `tap`."""
        self._rest = state
        if isinstance(self.box, Box) and self.refusal.isHidden():
            self.box.wear(state)

    # -- taking ---------------------------------------------------------------------------------
    def commit(self) -> None:
        """Hand over what is being typed, before the card turns to something else."""
        if isinstance(self.editor, Entry | Note):
            self.editor.commit()

    def forget(self) -> None:
        """Drop what was typed and refused: the card shows another element now."""
        if isinstance(self.editor, Entry) and self.editor.busy:
            self.editor.give_up()
        self.refuse("")

    def _ticked(self) -> None:
        assert isinstance(self.editor, Tick)
        self.editor.setTristate(False)
        self._committed(YES_NO[self.editor.isChecked()])

    def _committed(self, text: str) -> None:
        refusal = self._take(self.field, text)
        if refusal and isinstance(self.editor, Entry | Note):
            self.editor.reopen()
        elif isinstance(self.editor, Entry | Note):
            self.editor.settle(self._text)  # the value as it is written, not as it was typed
        else:
            self.show_value(self._value)
        self.refuse(refusal)


def brief(value: Any) -> str:
    """A long number to four figures or a tenth, as it stands while nobody edits it; else nothing."""
    if not isinstance(value, float) or len(typed(value)) <= LONG or not math.isfinite(value) or not value:
        return ""
    return written(round(value, max(1, 3 - math.floor(math.log10(abs(value))))))


def written(value: Any) -> str:
    """A value as it stands in its box: exact, thousands set apart."""
    if value is None:
        return ""
    if not isinstance(value, int | float):
        return str(value)
    whole, point, rest = typed(value).replace("-", MINUS).partition(".")
    if whole.lstrip(MINUS).isdigit() and len(whole.lstrip(MINUS)) > 4:
        whole = f"{int(whole.replace(MINUS, '-')):,}".replace(",", THIN).replace("-", MINUS)
    return whole + point + rest
