"""A row a case on the card of what a case can scale: what it states of this element alone."""

from collections.abc import Callable, Sequence

from app.canvas.theme import Theme
from app.model import figures
from app.model.by_case import Scaled, percent_of, stated, states_demand
from app.model.case_words import amount, rounded, typed_words
from app.model.drawing import Case
from app.model.fields import Field
from app.model.kinds import Load, Supply
from app.panels.field_row import VARIOUS, FieldRow
from app.panels.page import Page
from app.panels.words import Sentence, Words

CaseTake = Callable[[int, str], str]  # takes what was typed for a case, answers why not, or nothing
HELP = "Blank: as the case has it for all of this kind."
TYPE = "Type an amount, a percentage, off or on."
TYPE_LOAD = "Type an amount, a percentage or off, and a power factor after at: 5 kVA at 0.98."
BOX_WIDTH = 112  # names of cases want room
TYPE_SUPPLY = "Type volts or a percentage."


class CaseRow(FieldRow):
    """What one case states, and below it the share that this is."""

    def __init__(self, number: int, help: str, take: CaseTake, theme: Theme) -> None:
        about = Field(
            f"case {number}", f"Case {number + 1}", "", str, True, (), "", None, None, None, None, help
        )
        super().__init__(about, lambda _field, text: take(number, text), theme)
        self.box.setFixedWidth(BOX_WIDTH)
        self.share = Sentence("quiet")
        self.share.setAlignment(self.editor.alignment())  # type: ignore[union-attr]
        self.grid.addWidget(self.share, 3, 0, 1, 3)

    def show_case(self, case: Case, hung: Sequence[tuple[str, Scaled]]) -> None:
        """The same for one element or for several."""
        self.label.say(case.name, self.field.help)
        self.editor.setAccessibleName(f"In case {case.name}")
        texts = {typed_words(case, id, one) for id, one in hung}
        amounts = {amount(case, id, one) for id, one in hung}
        if len(texts) > 1:
            self.show_value("", quiet=VARIOUS)
        else:
            self.show_value(texts.pop(), quiet=amounts.pop() if len(amounts) == 1 else VARIOUS)
        own = case.own.get(hung[0][0]) if len(hung) == 1 else None
        said = own is not None and (own.percent is not None or states_demand(own))
        percent = percent_of(case, *hung[0]) if said else None
        whole, unit = stated(hung[0][1])
        part = amount(case, *hung[0]) if self._value.endswith("%") else rounded(percent or 0.0)
        self.share.say(f"{part} of {figures.stated(whole, unit)}" if percent else "")


class CaseRows(Page):
    """The rows of all cases; gone while there is but one case and it states nothing."""

    def __init__(self, kind: type, take: CaseTake, theme: Theme) -> None:
        super().__init__(theme)
        said = TYPE_LOAD if issubclass(kind, Load) else TYPE_SUPPLY if issubclass(kind, Supply) else TYPE
        self._help = f"{said} {HELP}"
        self._take = take
        self.down.addSpacing(4)
        self.down.addWidget(Words("In each case", "strong"))

    def show_cases(self, cases: Sequence[Case], hung: Sequence[tuple[str, Scaled]]) -> None:
        """What the cases state of these elements."""
        for number in range(len(self.rows), len(cases)):
            self.add_row(f"case {number}", CaseRow(number, self._help, self._take, self.theme))
        for number, row in enumerate(self.rows.values()):
            row.setVisible(number < len(cases))
            if number < len(cases) and isinstance(row, CaseRow):
                row.show_case(cases[number], hung)
        self.setVisible(len(cases) > 1 or bool(cases[0].own))
