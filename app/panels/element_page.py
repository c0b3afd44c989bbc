"""The fields of one element, or of several of one kind at once."""

from collections.abc import Iterable, Mapping, Sequence
from functools import reduce

from PySide6.QtCore import Signal

from app.canvas.theme import Theme
from app.live.session import Session
from app.model import assumed, edits, figures, taps, units
from app.model.by_case import Scaled
from app.model.conductors import FOLLOWING, STAND_INS, is_hung
from app.model.drawing import Drawing
from app.model.fields import Field, fields_of
from app.model.following import usual_profile
from app.model.kinds import KINDS, Attachment, Element, Node, Transformer
from app.model.levels import nominal_levels
from app.model.profiles import CONSTANT
from app.model.rephasing import matters, set_phases
from app.panels.case_rows import CaseRows
from app.panels.element_words import step_text, subject
from app.panels.field_row import VARIOUS, FieldRow, written
from app.panels.fold import Fold, is_folded
from app.panels.page import Page
from app.panels.phase_row import PhaseRow
from app.panels.profile_row import ProfileRow
from app.panels.spacing_row import SpacingRow
from app.panels.special_rows import DemandRow, TapRow
from app.study.outcome import Assumption

StandIns = Mapping[str, assumed.Blank | Assumption]
NOT_GIVEN = "not given"
FOLLOW_THE_NODE = ("reference_v", "rated_v")
LESS_ASKED = {  # shown below the results
    "earth_1_ohm", "earth_2_ohm", "earth_ohm", "fault_degc", "zero_resistance_ohm_per_km",
    "return_resistance_ohm_per_km", "zero_reactance_ohm_per_km",
    "z0_ratio", "angle_deg", "area_mm2", "capacitance_uf_per_km", "conductor", "constant_current_percent",
    "constant_impedance_percent", "drop_r_ohm", "drop_x_ohm", "note", "reference_v",
    "step_percent", "steps_down", "steps_up", "notch_percent", "tapped", "taps_down", "taps_up",
    "hung_at_m", "measures", *STAND_INS,
}  # fmt: skip


class ElementPage(Page):
    """Made once for a kind and kept; `show_ids` turns it to other elements of that kind."""

    profiles_wanted = Signal(str)

    def __init__(self, kind: str, session: Session, theme: Theme) -> None:
        super().__init__(theme)
        self.kind = KINDS[kind]
        self.ids: tuple[str, ...] = ()
        self._ledger: tuple[Assumption, ...] = ()
        self._session = session
        self.more = Page(theme)
        fields = [f for f in fields_of(self.kind).values() if f.name != "name"]
        fields.sort(key=lambda f: f.name == "note")
        self.fold = Fold(theme)
        for field in fields:
            folded = self.fold.page if is_folded(self.kind, field.name) else None
            self._add(field, folded or (self.more if field.name in LESS_ASKED else self))
        self.rows = {**self.rows, **self.fold.page.rows, **self.more.rows}
        self.cases: CaseRows | None = None
        if issubclass(self.kind, Scaled):
            self.cases = CaseRows(self.kind, self._take_case, theme)
            self.down.addWidget(self.cases)
        self.down.addWidget(self.fold)
        if not self.fold.page.rows:
            self.fold.hide()

    def _add(self, field: Field, page: Page) -> None:
        if field.name == "tap":
            row: FieldRow = self._tap_row(field)
        elif field.name == "demand_kva":
            row = DemandRow(field, fields_of(self.kind)["demand_kw"], self._take, self.theme)
        elif field.name == "hung_at_m":
            row = SpacingRow(field, self._take, self.theme)
        elif field.name == "phases":
            row = PhaseRow(field, self._take_phases, self.theme)
        elif field.name == "profile":
            row = self._profile_row(field)
        elif field.name == "demand_kw":
            return
        else:
            row = FieldRow(field, self._take, self.theme)
        page.add_row(field.name, row)

    def _tap_row(self, field: Field) -> TapRow:
        row = TapRow(field, self._take, self.theme)
        row.step.connect(self._step)
        return row

    def _profile_row(self, field: Field) -> ProfileRow:
        row = ProfileRow(field, self._take, self.theme)
        row.wanted.connect(self.profiles_wanted)
        return row

    def show_ids(self, ids: tuple[str, ...]) -> None:
        """Show these elements."""
        if ids != self.ids:
            self.forget()
            self.ids = ids
        self.refresh()

    def refresh(self) -> None:
        """Show the values as they stand."""
        drawing = self._session.drawing
        elements = [drawing.elements[i] for i in self.ids if i in drawing.elements]
        if not elements:
            return
        stand_ins = self._stand_ins(elements[0], nominal(drawing, self.ids[0]))
        if self.fold.page.rows:
            self.fold.follow(drawing, elements)
        for name, row in self.rows.items():
            if isinstance(row, ProfileRow):
                self._offer(row, drawing, elements)
            row.setVisible(any(matters(element, name) for element in elements))
            if isinstance(row, DemandRow):
                row.show_demand(elements)
            else:
                self._show(row, name, elements, stand_ins)
            if isinstance(row, SpacingRow):
                row.show_spacing(drawing, self.ids)
        if self.cases is not None:
            hung = [(i, e) for i, e in zip(self.ids, elements, strict=True) if isinstance(e, Scaled)]
            self.cases.show_cases(drawing.cases, hung)

    @staticmethod
    def _offer(row: ProfileRow, drawing: Drawing, elements: Sequence[Element]) -> None:
        """The profiles there are; constant is on offer where blank stands for another."""
        usual = usual_profile(drawing, elements[0])
        constant = bool(usual) or any(getattr(element, "profile", "") == CONSTANT for element in elements)
        row.offer(list(drawing.profiles), f"as usual: {usual}" if usual else "constant 100 %", constant)

    def _show(self, row: FieldRow, name: str, elements: Sequence[Element], stand_ins: StandIns) -> None:
        values = [getattr(element, name) for element in elements]
        value, field = values[0], row.field
        if name in FOLLOWING:
            spaced = all(is_hung(element) for element in elements)
            row.follow("by spacing" if spaced else "")
            if spaced:
                return
        if any(other != value for other in values[1:]):
            row.show_value(value, quiet=VARIOUS)
            return
        if value is None:
            blank = stand_ins.get(name)
            if blank is None or len(elements) > 1:
                quiet, basis = self._follows(elements[0], name)
                row.show_value(None, quiet=quiet, basis=basis)
            else:
                row.show_value(None, quiet=round_off(blank.value), basis=blank.basis)
            return
        row.show_value(value, other=other_habit(value, field), basis=shelf_basis(elements, name))

    def _follows(self, element: Element, name: str) -> tuple[str, str]:
        """What stands in a blank box, and on what basis where it is assumed."""
        if not isinstance(element, Node) or name != "nominal_v":
            return NOT_GIVEN, ""
        levels = nominal_levels(self._session.drawing)
        here = {levels.get(i) for i in self.ids}
        level = here.pop() if len(here) == 1 else None
        if level is None:
            return "as fed", ""
        return written(level.volts), level.how if level.assumed else ""

    def show_ledger(self, assumptions: Iterable[Assumption]) -> None:
        """Volts that were put in place of blanks: the study knows between which wires an element hangs."""
        told = tuple(a for a in assumptions if a.id in self.ids[:1] and a.field in FOLLOW_THE_NODE)
        if told != self._ledger:
            self._ledger = told
            self.refresh()

    def _stand_ins(self, element: Element, volts: float) -> StandIns:
        found: dict[str, assumed.Blank | Assumption] = {b.field: b for b in assumed.blank(element, volts)}
        return found | {a.field: a for a in self._ledger if a.id == self.ids[0]}

    def show_reach(self, letters: str, system: str) -> None:
        """Which phases reach the elements shown."""
        row = self.rows.get("phases")
        if isinstance(row, PhaseRow):
            row.show_reach(letters, system)

    def point_at(self, name: str) -> FieldRow | None:
        if name in self.fold.page.rows:
            self.fold.open()
        return super().point_at(name)

    def _take_phases(self, field: Field, phases: str) -> str:
        """A choice of phases for every element shown."""
        ids = self.ids
        text = step_text(field, phases, subject(self._session.drawing, ids))
        return self._session.edit(text, lambda drawing: set_phases(drawing, ids, phases))

    def _take(self, field: Field, text: str) -> str:
        ids = self.ids

        def change(drawing: Drawing) -> Drawing:
            return reduce(lambda d, i: edits.change_text(d, i, field.name, text), ids, drawing)

        def name(after: Drawing) -> str:
            element = after.elements[ids[0]]
            about = fields_of(self.kind)["demand_kw"] if _in_kw(field, element) else field
            return step_text(about, getattr(element, about.name), subject(after, ids))

        return self._session.edit(name, change)

    def commit(self) -> None:
        super().commit()
        if self.cases is not None:
            self.cases.commit()

    def forget(self) -> None:
        super().forget()
        if self.cases is not None:
            self.cases.forget()

    def _take_case(self, number: int, text: str) -> str:
        """What was typed for one case, for every element shown."""
        ids, case = self.ids, self._session.drawing.cases[number].name
        made = f"{subject(self._session.drawing, ids)} in case {case}"
        return self._session.edit(
            f"{made}: {text.strip() or 'as for all'}",
            lambda drawing: reduce(lambda d, i: edits.set_own_text(d, number, i, text), ids, drawing),
        )

    def _step(self, notches: int) -> None:
        """One notch up or down on every transformer shown."""
        ids = self.ids

        def change(drawing: Drawing) -> Drawing:
            made = drawing
            for id in ids:
                one = drawing.elements[id]
                assert isinstance(one, Transformer)
                made = edits.set_tap(made, id, one.tap + notches)
            return made

        def name(after: Drawing) -> str:
            one = after.elements[ids[0]]
            assert isinstance(one, Transformer)
            return f"Tap of {subject(after, ids)} to {taps.percent_words(one, one.tap)}"

        self.rows["tap"].refuse(self._session.edit(name, change))


def nominal(drawing: Drawing, id: str) -> float:
    """Nominal volts where an attachment stands, as far as they are known."""
    element = drawing.elements[id]
    level = nominal_levels(drawing).get(element.node) if isinstance(element, Attachment) else None
    return level.volts if level else float("nan")


def shelf_basis(elements: Sequence[Element], name: str) -> str:
    """On what basis a value stands that came with the shelf and was not confirmed; else nothing."""
    return assumed.FROM_SHELF if any(name in element.assumed for element in elements) else ""


def round_off(value: float) -> str:
    """A stand-in as quiet text: short, but not wrong."""
    return figures.stated(value) if value == value else "nominal"


def other_habit(value: object, field: Field) -> str:
    """The value in the other habit of units, for the tooltip; nothing where there is none."""
    if isinstance(value, bool) or not isinstance(value, int | float):
        return ""
    return units.show(float(value), field.unit, "north american") if field.unit else ""


def _in_kw(field: Field, element: Element) -> bool:
    """The demand was typed with the other unit, and went where it belongs."""
    return field.name == "demand_kva" and getattr(element, field.name) is None
