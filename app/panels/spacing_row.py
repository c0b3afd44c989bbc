"""The row of an overhead line's spacing: what hangs where, the head of the pole, and what follows from it."""

from collections.abc import Sequence

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QSizePolicy

from app.canvas.theme import Theme
from app.model.conductors import hung
from app.model.drawing import Drawing
from app.model.fields import Field
from app.model.kinds import OverheadLine
from app.model.spacing import EXAMPLE, in_feet
from app.panels.boxes import Entry
from app.panels.field_row import FieldRow, Take
from app.panels.pole import Pole
from app.panels.words import Sentence
from app.study.overhead_working import sentences, working_in


class SpacingRow(FieldRow):
    """The places over the whole width, below them the pole to scale and the working."""

    def __init__(self, field: Field, take: Take, theme: Theme) -> None:
        super().__init__(field, take, theme)
        self.pole = Pole(theme)
        self.working = Sentence("quiet")
        self.working.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.grid.addWidget(self.pole, 3, 0, 1, 3)
        self.grid.addWidget(self.working, 4, 0, 1, 3)

    def _lay_out(self) -> None:
        super()._lay_out()
        self.grid.removeWidget(self.box)
        self.box.setMinimumWidth(0)
        self.box.setMaximumWidth(16777215)
        self.box.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.grid.addWidget(self.box, 1, 0, 1, 3)

    editor: Entry

    def show_spacing(self, drawing: Drawing, ids: Sequence[str]) -> None:
        """The pole of these lines where all hang alike, and the working of one alone."""
        lines = [drawing.elements[i] for i in ids]
        alike = {e.hung_at_m for e in lines if isinstance(e, OverheadLine)}
        first = lines[0]
        if len(alike) != 1 or not isinstance(first, OverheadLine) or not first.hung_at_m:
            self.pole.show_hung(None)
            self.working.say("")
            self.editor.setPlaceholderText(f"such as {EXAMPLE}")
            return
        self.pole.show_hung(hung(first))
        self.working.say("\n".join(sentences(working_in(drawing, first))) if len(lines) == 1 else "")
        self.editor.setToolTip(f"{self.editor.toolTip()}\n{in_feet(first.hung_at_m)}")
