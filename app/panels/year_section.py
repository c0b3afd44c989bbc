"""The year on the card of the drawing: which profiles are followed by default, the price of losses."""

from typing import Any

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QHBoxLayout, QPushButton

from app.canvas.theme import Theme
from app.live.session import Session
from app.model import edits
from app.model.fields import Field, fields_of
from app.model.profiles import Year
from app.model.typing_in import value_of
from app.model.units import UnitError
from app.panels.element_words import step_text
from app.panels.field_row import FieldRow
from app.panels.page import Page
from app.panels.profile_row import ProfileRow
from app.panels.style import play

CONSTANT_WORDS = "constant 100 %"


class YearSection(Page):
    """Fields of the drawing's year, and the ways to its profiles and its results."""

    profiles_wanted = Signal(str)
    year_wanted = Signal()

    def __init__(self, session: Session, theme: Theme) -> None:
        super().__init__(theme)
        self._session = session
        for field in fields_of(Year).values():
            if field.name.endswith("_profile"):
                row: FieldRow = ProfileRow(field, self._take, theme)
                row.wanted.connect(self.profiles_wanted)  # type: ignore[attr-defined]
            else:
                row = FieldRow(field, self._take, theme)
            self.add_row(field.name, row)
        across = QHBoxLayout()
        self.profiles, self.run = QPushButton("Profiles…"), QPushButton("The year…")
        self.profiles.clicked.connect(lambda: self.profiles_wanted.emit(""))
        self.run.clicked.connect(self.year_wanted)
        for button in (self.profiles, self.run):
            play(button, "link")
            across.addWidget(button)
        across.addStretch(1)
        self.down.addLayout(across)

    def refresh(self) -> None:
        """Show the values as they stand."""
        drawing = self._session.drawing
        for name, row in self.rows.items():
            if isinstance(row, ProfileRow):
                row.offer(list(drawing.profiles), CONSTANT_WORDS, constant=False)
            quiet = "not priced" if name == "price_per_kwh" else ""
            row.show_value(getattr(drawing.year, name), quiet=quiet)

    def _take(self, field: Field, text: str) -> str:
        try:
            value: Any = value_of(field, text.strip())
        except UnitError as error:
            return f"{field.label}: {error}"
        return self._session.edit(
            step_text(field, value, "the drawing"), lambda d: edits.set_year(d, **{field.name: value})
        )
