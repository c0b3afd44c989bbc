"""A stack of field rows on the card; what is shown in them can change without the rows being remade."""

from collections.abc import Iterable

from PySide6.QtWidgets import QApplication, QVBoxLayout, QWidget

from app.canvas.theme import Theme
from app.model.fields import Field
from app.panels.field_row import FieldRow, Take
from app.panels.style import play


class Page(QWidget):
    """Rows by field name, in the order of the card."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        play(self, "panel")
        self.theme = theme
        self.rows: dict[str, FieldRow] = {}
        self.down = QVBoxLayout(self)
        self.down.setContentsMargins(0, 0, 0, 0)
        self.down.setSpacing(5)

    def add_fields(self, fields: Iterable[Field], take: Take, prefix: str = "") -> None:
        """A row for each field."""
        for field in fields:
            self.add_row(prefix + field.name, FieldRow(field, take, self.theme))

    def add_row(self, name: str, row: FieldRow) -> FieldRow:
        """One more row at the foot."""
        self.rows[name] = row
        self.down.addWidget(row)
        return row

    def commit(self) -> None:
        """Hand over what is being typed; what cannot stand is dropped with its refusal."""
        focused = QApplication.focusWidget()
        for row in self.rows.values():
            if focused is not None and row.isAncestorOf(focused):
                row.commit()

    def forget(self) -> None:
        """Drop refused text, before other elements are shown."""
        for row in self.rows.values():
            row.forget()

    def point_at(self, name: str) -> FieldRow | None:
        """Put the focus into a field."""
        row = self.rows.get(name)
        if row is not None:
            row.editor.setFocus()
        return row
