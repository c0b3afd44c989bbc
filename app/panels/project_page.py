"""The card while nothing is selected: the head of the sheet, the limits, the case shown, what is drawn."""

from collections import Counter
from collections.abc import Callable
from typing import Any

from msgspec.structs import replace
from PySide6.QtWidgets import QHBoxLayout, QPushButton

from app.canvas.theme import Theme
from app.live.attention import Attention
from app.live.session import Session
from app.model import edits
from app.model.case_words import own_told
from app.model.drawing import Case, Drawing, Limits, Project
from app.model.fields import Field, fields_of
from app.model.kinds import KINDS, Switch, kind_of
from app.model.typing_in import limit_percent, value_of
from app.model.units import UnitError
from app.panels.element_words import many, step_text
from app.panels.field_row import FieldRow
from app.panels.page import Page
from app.panels.style import play
from app.panels.words import Rule, Sentence, Words
from app.panels.year_section import YearSection

NOT_JUDGED = "not judged"
BLANK = {"motor_percent": "as the loads"}


class ProjectPage(Page):
    """Fields of the drawing as a whole."""

    def __init__(self, session: Session, attention: Attention, theme: Theme) -> None:
        super().__init__(theme)
        self._session, self._attention = session, attention
        project = [f for f in fields_of(Project).values() if f.name != "title"]
        self.add_fields(project, self._taker(edits.set_project), "project.")
        self._head("Limits")
        self.add_fields(fields_of(Limits).values(), self._taker(edits.set_limits), "limits.")
        self._head("Year")
        self.year = YearSection(session, theme)
        self.down.addWidget(self.year)
        self._head("Drawing")
        self.add_fields([fields_of(Drawing)["frequency_hz"]], self._taker(_set_frequency))
        self._head("Case")
        self.add_fields(fields_of(Case).values(), self._taker(self._set_case), "case.")
        self.own = Sentence("quiet")
        self.down.addWidget(self.own)
        self._add_links()
        self.alike = Sentence("quiet")
        self.down.addWidget(self.alike)
        self.counts = Sentence("quiet")
        self.down.addWidget(self.counts)

    def _head(self, text: str) -> None:
        self.down.addSpacing(4)
        self.down.addWidget(Rule())
        self.down.addWidget(Words(text, "strong"))

    def refresh(self) -> None:
        """Show the values as they stand."""
        drawing = self._session.drawing
        case = self._attention.case
        holders = {"project": drawing.project, "limits": drawing.limits, "case": drawing.cases[case]}
        for name, row in self.rows.items():
            holder, _, field = name.rpartition(".")
            self._show(row, getattr(holders[holder] if holder else drawing, field))
        self.year.refresh()
        self.own.say(own_words(drawing, case))
        self.away.setVisible(len(drawing.cases) > 1)
        self.alike.say(alike_words(drawing))
        self.counts.say(drawn(drawing))

    def commit(self) -> None:
        super().commit()
        self.year.commit()

    def forget(self) -> None:
        super().forget()
        self.year.forget()

    def _add_links(self) -> None:
        across = QHBoxLayout()
        self.another, self.away = QPushButton("Another case like this"), QPushButton("Remove this case")
        self.another.clicked.connect(self._another_case)
        self.away.clicked.connect(self._remove_case)
        for button in (self.another, self.away):
            play(button, "link")
            across.addWidget(button)
        across.addStretch(1)
        self.down.addLayout(across)

    def _another_case(self) -> None:
        """A copy of the case shown, at the end, and shown."""
        cases = self._session.drawing.cases
        names, number = {case.name for case in cases}, len(cases) + 1
        while f"Case {number}" in names:
            number += 1
        made = replace(cases[self._attention.case], name=f"Case {number}")
        refusal = self._session.edit(made.name, lambda d: edits.set_case(d, len(d.cases), made))
        if not refusal:
            self._attention.show_case(len(cases))
        self.rows["case.name"].refuse(refusal)

    def _remove_case(self) -> None:
        number = self._attention.case
        name = self._session.drawing.cases[number].name
        self._session.edit(f"Remove case {name}", lambda d: edits.remove_case(d, number))

    def _show(self, row: FieldRow, value: Any) -> None:
        quiet = "" if value is not None else BLANK.get(row.field.name, NOT_JUDGED)
        row.show_value(value, quiet=quiet)

    def _taker(self, setter: Callable[..., Drawing]) -> Callable[[Field, str], str]:
        def take(field: Field, text: str) -> str:
            try:
                value = limit_percent(self._session.drawing, field, text)
                value = value_of(field, text.strip()) if value is None else value
            except UnitError as error:
                return f"{field.label}: {error}"
            return self._session.edit(
                step_text(field, value, "the drawing"),
                lambda drawing: setter(drawing, **{field.name: value}),
            )

        return take

    def _set_case(self, drawing: Drawing, **fields: Any) -> Drawing:
        return edits.set_case(drawing, self._attention.case, **fields)


def alike_words(drawing: Drawing) -> str:
    """That no case opens or closes a switch, where there are several and a switch is drawn."""
    if len(drawing.cases) < 2 or not any(isinstance(e, Switch) for e in drawing.elements.values()):
        return ""
    return "Switches stand alike in all cases; another switching is a drawing of its own."


def own_words(drawing: Drawing, case: int) -> str:
    """What a case states of single elements: `In this case alone: House load 5 kVA (6.25 %).`"""
    said = own_told(drawing.cases[case], drawing)
    return f"In this case alone: {'; '.join(said)}." if said else ""


def _set_frequency(drawing: Drawing, frequency_hz: float) -> Drawing:
    return edits.set_frequency(drawing, frequency_hz)


def drawn(drawing: Drawing) -> str:
    """What the drawing holds: `2 transformers, 1 cable, 3 loads`."""
    found = Counter(kind_of(element) for element in drawing.elements.values())
    if not found:
        return "Nothing drawn yet. Take a supply from the shelf and put it on the paper."
    return ", ".join(many(kind, found[kind]) for kind in KINDS if found[kind])
