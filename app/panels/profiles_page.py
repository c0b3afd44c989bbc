"""The profiles of the drawing: see them, paste or open values, invent one, scale, rename, remove."""

from functools import partial
from typing import Any

from msgspec.structs import replace
from PySide6.QtCore import QSize, Qt
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import (
    QDialog,
    QHBoxLayout,
    QListWidget,
    QMenu,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from app.canvas.theme import Theme
from app.live.session import Session
from app.model import edits
from app.model.checks import EditRefused
from app.model.drawing import Drawing
from app.model.fields import Field, fields_of
from app.model.figures import plain, stated
from app.model.following import followed
from app.model.kinds import Generator, Load, Motor, Supply
from app.model.profiles import Profile, usual_hours
from app.model.shapes import INVENTED, SHAPES, shape, to_load_factor
from app.model.typing_in import value_of
from app.model.units import UnitError, parse
from app.panels.boxes import Box, Entry
from app.panels.course_plot import CoursePlot
from app.panels.field_row import FieldRow
from app.panels.profile_values import ProfileValues
from app.panels.style import play
from app.panels.words import RIGHT, Sentence, Words
from app.study.words import list_of

SOURCE_WIDTH = 420


class ProfilesPage(QDialog):
    """The list at the left, the chosen one at the right; every change is one undo step."""

    def __init__(self, session: Session, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._session, self._theme = session, theme
        self.name = ""  # of the profile shown
        self._shown: Profile | None = None
        self.setWindowTitle("Profiles")
        self.setModal(False)
        self._build()
        session.changed.connect(lambda _change: self.refresh())
        session.replaced.connect(self.refresh)
        self.refresh()

    def sizeHint(self) -> QSize:
        return QSize(860, 560)

    # -- building -------------------------------------------------------------------------------
    def _build(self) -> None:
        across = QHBoxLayout(self)
        across.setContentsMargins(18, 14, 18, 14)
        across.setSpacing(18)
        across.addLayout(self._build_list())
        self.right = QWidget()
        self.right.setLayout(self._build_right())
        across.addWidget(self.right, 1)
        self.nothing = Sentence("quiet")
        across.addWidget(self.nothing, 1, Qt.AlignmentFlag.AlignTop)
        play(self, "panel")

    def _build_list(self) -> QVBoxLayout:
        self.list = QListWidget()
        self.list.setAccessibleName("Profiles of the drawing")
        self.list.setFixedWidth(190)
        play(self.list, "list")
        self.list.currentTextChanged.connect(self._turn)
        self.fresh, self.invent = QPushButton("New"), QPushButton("Invented shape…")
        menu = QMenu(self.invent)
        for name, made in SHAPES.items():
            menu.addAction(f"{name}: {made.words}", partial(self.add_shape, name))
        self.invent.setMenu(menu)
        self.fresh.clicked.connect(self.add_new)
        self.away = QPushButton("Remove")
        self.away.clicked.connect(self._remove)
        self.list_refusal = Sentence("refusal")
        self.list_refusal.setFixedWidth(190)
        down = QVBoxLayout()
        down.setSpacing(6)
        down.addWidget(Words("Profiles", "title"))
        down.addWidget(self.list, 1)
        for part in (self.list_refusal, self.fresh, self.invent, self.away):
            if isinstance(part, QPushButton):
                part.setAutoDefault(False)
            down.addWidget(part)
        return down

    def _build_right(self) -> QVBoxLayout:
        about = fields_of(Profile)
        self.title = Entry()
        self.title.setAccessibleName("Name of the profile")
        play(self.title, "title")
        self.title.committed.connect(self._rename)
        self.plot = CoursePlot(self._theme, "%")
        self.plot.setAccessibleName("Course of the profile")
        self.figures = Sentence("quiet")
        self.hours = FieldRow(about["hours"], self._take, self._theme)
        self.source = FieldRow(about["source"], self._take, self._theme)
        self.factor = Entry()
        self.factor.setAccessibleName("Load factor")
        self.factor.setAlignment(RIGHT)
        self.source.box.setFixedWidth(SOURCE_WIDTH)
        self.factor.committed.connect(self._scale)
        self.refusal = Sentence("refusal")
        scaled = QHBoxLayout()
        scaled.addWidget(Words("Load factor", "quiet"), 1)
        box = Box(self.factor)
        box.setFixedWidth(142)
        scaled.addWidget(box)
        down = QVBoxLayout()
        down.setContentsMargins(0, 0, 0, 0)
        down.setSpacing(6)
        for part in (self.title, self.plot, self.figures, self.hours):
            down.addWidget(part)
        down.addLayout(scaled)
        down.addWidget(self.source)
        self.values = ProfileValues()
        self.values.taken.connect(self._take_values)
        down.addWidget(self.refusal)
        down.addWidget(self.values, 1)
        return down

    # -- showing --------------------------------------------------------------------------------
    def refresh(self) -> None:
        """Show the profiles as they stand."""
        profiles = self._session.drawing.profiles
        names = [self.list.item(i).text() for i in range(self.list.count())]
        if names != list(profiles):
            kept = self.name if self.name in profiles else next(iter(profiles), "")
            self.list.blockSignals(True)
            self.list.clear()
            self.list.addItems(list(profiles))
            self.list.setCurrentRow(list(profiles).index(kept) if kept else -1)
            self.list.blockSignals(False)
            self.name = kept
        self._show()

    def show_profile(self, name: str) -> None:
        """Turn to a profile."""
        profiles = list(self._session.drawing.profiles)
        if name in profiles:
            self.list.setCurrentRow(profiles.index(name))

    def _turn(self, name: str) -> None:
        if name != self.name:
            self.name = name
            self._refuse("")
            self._show()

    def _show(self) -> None:
        drawing = self._session.drawing
        one = drawing.profiles.get(self.name)
        self.right.setVisible(one is not None)
        self.away.setEnabled(one is not None)
        self.nothing.say(
            "" if one else "No profiles yet. Make a new one and paste its values, or invent one."
        )
        if one is None:
            self._shown = None
            return
        self.title.settle(self.name)
        self.hours.show_value(one.hours)
        self.source.show_value(one.source, quiet="not stated")
        self.factor.settle(plain(one.load_factor, 3))
        self.figures.say(figures_of(drawing, self.name))
        if one is not self._shown:
            self._shown = one
            self.plot.show_course(one.percent, one.hours)
            self.values.show_values(one.percent)

    def _refuse(self, sentence: str) -> None:
        self.refusal.say(sentence)
        self.list_refusal.say("")
        self.values.refuse("")

    # -- what is asked for ----------------------------------------------------------------------
    def add_new(self) -> None:
        """A profile of a day at 100 %, to be filled."""
        self._add("profile", Profile(percent=(100.0,) * 24))
        self.values.begin()

    def add_shape(self, name: str) -> None:
        """An invented shape as a profile."""
        self._add(name, shape(name))

    def _add(self, name: str, profile: Profile) -> None:
        fresh, number = name, 2
        while fresh in self._session.drawing.profiles:
            fresh, number = f"{name} {number}", number + 1
        self.list_refusal.say(
            self._session.edit(f"Add profile {fresh}", lambda d: edits.put_profile(d, fresh, profile))
        )
        self.show_profile(fresh)

    def _remove(self) -> None:
        name = self.name
        self.list_refusal.say(
            self._session.edit(f"Remove profile {name}", lambda d: edits.remove_profile(d, name))
        )

    def _rename(self, to: str) -> None:
        name = self.name
        if to.strip() in ("", name):
            self.title.settle(name)
            return
        self.name = to.strip()
        sentence = self._session.edit(
            f"Profile {name} is called {self.name}", lambda d: edits.rename_profile(d, name, to)
        )
        if sentence:
            self.name = name
            self.title.reopen()
        self._refuse(sentence)

    def _take(self, field: Field, text: str) -> str:
        try:
            value: Any = value_of(field, text.strip())
        except UnitError as error:
            return f"{field.label}: {error}"
        return self._change(f"{field.label} of profile {self.name}", **{field.name: value})

    def _change(self, step: str, **changed: Any) -> str:
        name = self.name
        return self._session.edit(
            step, lambda d: edits.put_profile(d, name, replace(d.profiles[name], **changed))
        )

    def _scale(self, text: str) -> None:
        try:
            factor = parse(text, "") if text.strip() else float("nan")
            made = to_load_factor(self._session.drawing.profiles[self.name], factor)
        except (UnitError, EditRefused) as error:
            self._refuse(str(error))
            self.factor.reopen()
            return
        values = tuple(round(value, 3) for value in made.percent)
        self._refuse(self._change(f"Profile {self.name} at load factor {factor:g}", percent=values))

    def _take_values(self, values: tuple[float, ...]) -> None:
        changed: dict[str, Any] = {"percent": values}
        one = self._session.drawing.profiles[self.name]
        if len(values) != len(one.percent):
            changed["hours"] = usual_hours(len(values))
        if one.source.startswith(INVENTED):
            changed["source"] = ""
        self._refuse("")
        self.values.refuse(self._change(f"Values of profile {self.name}", **changed))

    def keyPressEvent(self, event: QKeyEvent) -> None:
        enter = event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter)
        if enter and not event.modifiers() & Qt.KeyboardModifier.ControlModifier:
            return  # Enter in a field commits it; it presses no button
        if enter:
            self.values.take()
            return
        super().keyPressEvent(event)


def figures_of(drawing: Drawing, name: str) -> str:
    """What a profile comes to, and who follows it."""
    one = drawing.profiles[name]
    kinds = (Load, Motor, Generator, Supply)
    ids = [i for i, e in drawing.elements.items() if isinstance(e, kinds) and followed(drawing, e) == name]
    count = f"{plain(len(one.percent), 0)} values, {plain(one.span_h, 0)} h"
    words = f"{count}; highest {stated(round(one.highest, 2), '%')}, mean {plain(one.mean, 1, '%')}. "
    return words + (f"Followed by {list_of(drawing, ids)}." if ids else "Nothing follows it yet.")
