"""The card by real mouse and keys: fields, refusals, assumed values, several at once."""

import pytest
from panels_stage import ONE, fernhollow, stage, type_text
from PySide6.QtCore import QPoint, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QToolButton

from app.canvas.wording import branch_figures
from app.model import edits
from app.model.figures import power
from app.model.kinds import Generator, Load, Transformer
from app.panels.asked import Asked
from app.panels.element_page import ElementPage
from app.panels.results import rows


@pytest.fixture
def set_up(qtbot):
    made = stage(qtbot, fernhollow(ONE))
    yield made
    made.solving.stop()


def page(set_up, *ids) -> ElementPage:
    set_up.attention.select(ids)
    assert isinstance(set_up.card._page, ElementPage)
    return set_up.card._page


def type_into(row, text: str, key=Qt.Key.Key_Return) -> None:
    """Click into the box, take what is there away, type, and press a key."""
    QTest.mouseClick(row.editor, Qt.MouseButton.LeftButton)
    row.editor.selectAll()
    type_text(row.editor, text)
    QTest.keyClick(row.editor, key)


def test_a_field_changes_the_drawing_and_undo_brings_it_back(set_up):
    row = page(set_up, "C1").rows["length_m"]
    type_into(row, "900")
    assert set_up.drawing.elements["C1"].length_m == 900
    assert set_up.session.history.undoText() == "Length of C1 to 900 m"
    assert set_up.session.history.count() == 1
    set_up.session.history.undo()
    assert set_up.drawing.elements["C1"].length_m == 1150
    assert row.editor.text() == "1150"


@pytest.mark.parametrize(
    ("id", "field", "typed", "value", "shown"),
    [
        ("C1", "length_m", "450 ft", 137.16, "137.16"),
        ("C1", "length_m", "0.14 km", 140.0, "140"),
        ("C1", "area_mm2", "120 mm²", 120.0, "120"),
        ("T2", "v1_v", "11 kV", 11000.0, "11\N{NARROW NO-BREAK SPACE}000"),
        ("T2", "tap", "+2", 2, "2"),
        ("T2", "tap", "−2.5 %", -1, "−1"),
        ("T2", "no_load_current_percent", "1,5", 1.5, "1.5"),
    ],
)
def test_units_may_be_typed(set_up, id, field, typed, value, shown):
    row = page(set_up, id).rows[field]
    type_into(row, typed)
    assert getattr(set_up.drawing.elements[id], field) == pytest.approx(value, rel=1e-12)
    assert row.editor.text() == shown
    assert row.refusal.isHidden()


def test_wire_gauge_may_be_typed(set_up):
    row = page(set_up, "C1").rows["area_mm2"]
    type_into(row, "4/0 AWG")
    assert set_up.drawing.elements["C1"].area_mm2 == pytest.approx(107.2, abs=0.05)
    assert "4/0 AWG" in row.editor.toolTip()


def test_leaving_a_field_commits_it(set_up):
    row = page(set_up, "C1").rows["length_m"]
    type_into(row, "901", Qt.Key.Key_Tab)
    assert set_up.drawing.elements["C1"].length_m == 901


def test_selecting_another_element_commits_what_was_being_typed(set_up):
    row = page(set_up, "C1").rows["length_m"]
    QTest.mouseClick(row.editor, Qt.MouseButton.LeftButton)
    row.editor.selectAll()
    QTest.keyClicks(row.editor, "902")
    set_up.attention.select(("T2",))
    assert set_up.drawing.elements["C1"].length_m == 902


def test_a_refusal_stands_under_the_field_and_esc_restores(set_up):
    row = page(set_up, "C1").rows["length_m"]
    type_into(row, "-5")
    assert set_up.drawing.elements["C1"].length_m == 1150
    assert row.refusal.isVisible()
    assert "Length" in row.refusal.text()
    assert "-5" in row.refusal.text() or "−5" in row.refusal.text()
    assert row.editor.text() == "-5"
    assert row.box.property("state") == "refused"
    assert set_up.session.history.count() == 0
    QTest.keyClick(row.editor, Qt.Key.Key_Escape)
    assert row.editor.text() == "1150"
    assert row.refusal.isHidden()


def test_a_refused_text_can_be_put_right(set_up):
    row = page(set_up, "C1").rows["length_m"]
    type_into(row, "many")
    assert row.refusal.isVisible()
    type_into(row, "700")
    assert set_up.drawing.elements["C1"].length_m == 700
    assert row.refusal.isHidden()


def test_an_assumed_value_stands_quietly_with_a_dot_and_its_basis(set_up):
    row = page(set_up, "T2").rows["no_load_current_percent"]
    assert row.editor.text() == ""
    assert row.editor.placeholderText() == "0.8"
    assert row.dot.isVisible()
    assert "common practice" in row.dot.toolTip()
    type_into(row, "0.7")
    assert not row.dot.isVisible()
    type_into(row, "")
    assert set_up.drawing.elements["T2"].no_load_current_percent == 0.7  # nothing typed, nothing changed
    QTest.mouseClick(row.editor, Qt.MouseButton.LeftButton)
    row.editor.selectAll()
    QTest.keyClick(row.editor, Qt.Key.Key_Backspace)
    QTest.keyClick(row.editor, Qt.Key.Key_Return)
    assert set_up.drawing.elements["T2"].no_load_current_percent is None
    assert row.dot.isVisible()
    assert set_up.session.history.undoText() == "No-load current i0 of T2 left blank"


def test_a_field_being_typed_in_is_not_disturbed(set_up):
    row = page(set_up, "C1").rows["length_m"]
    QTest.mouseClick(row.editor, Qt.MouseButton.LeftButton)
    row.editor.selectAll()
    QTest.keyClicks(row.editor, "12")
    set_up.session.edit("Tap", lambda d: edits.set_tap(d, "T2", 1))
    set_up.solving.settle()
    assert row.editor.text() == "12"
    assert row is page(set_up, "C1").rows["length_m"]


def test_rows_are_kept_while_values_change(set_up):
    rows = dict(page(set_up, "T2").rows)
    set_up.attention.select(("T1",))
    assert page(set_up, "T1").rows == rows
    assert rows["rating_kva"].editor.text() == "160"


def test_a_choice_and_a_tick(set_up):
    row = page(set_up, "T2").rows["tapped"]
    row.editor.setFocus()
    QTest.keyClick(row.editor, Qt.Key.Key_Down)
    assert set_up.drawing.elements["T2"].tapped == "winding 2"
    tick = page(set_up, "L2").rows["leading"].editor
    QTest.mouseClick(tick, Qt.MouseButton.LeftButton, pos=QPoint(8, tick.height() // 2))
    assert set_up.drawing.elements["L2"].leading is True
    assert set_up.session.history.undoText() == "Leading of House to yes"


def test_the_tap_has_steps_and_words(set_up):
    row = page(set_up, "T2").rows["tap"]
    assert "10725/400" in row.words.text()
    assert "raises winding 2" in row.words.text()
    minus, plus = row.findChildren(QToolButton)
    QTest.mouseClick(plus, Qt.MouseButton.LeftButton)
    assert set_up.drawing.elements["T2"].tap == 0
    QTest.mouseClick(minus, Qt.MouseButton.LeftButton)
    QTest.mouseClick(minus, Qt.MouseButton.LeftButton)
    QTest.mouseClick(minus, Qt.MouseButton.LeftButton)
    assert set_up.drawing.elements["T2"].tap == -2
    assert "Tap" in row.refusal.text()


def test_demand_in_kw_takes_the_place_of_kva(set_up):
    row = page(set_up, "L2").rows["demand_kva"]
    assert row.editor.text() == "80"
    type_into(row, "76 kW")
    load = set_up.drawing.elements["L2"]
    assert isinstance(load, Load)
    assert (load.demand_kva, load.demand_kw) == (None, 76.0)
    assert row.unit.text() == "kW"
    assert set_up.session.history.undoText() == "Demand of House to 76 kW"
    row.unit.menu().actions()[0].trigger()
    assert set_up.drawing.elements["L2"].demand_kva == 76.0


def test_the_name_is_edited_at_the_head(set_up):
    page(set_up, "C1")
    name = set_up.card.head.name
    QTest.mouseClick(name, Qt.MouseButton.LeftButton)
    QTest.keyClicks(name, "<b>Long</b> cable")
    QTest.keyClick(name, Qt.Key.Key_Return)
    assert set_up.drawing.elements["C1"].name == "<b>Long</b> cable"
    assert name.text() == "<b>Long</b> cable"


def test_results_of_a_transformer(set_up):
    page(set_up, "T2")
    state = set_up.solving.outcome.branches.at("T2")
    cells = {row.label: row.cells for row in set_up.card.now.rows}
    assert cells["Loading"] == (f"{state.loaded_percent:.1f} %",)
    assert cells["Copper loss"] == (f"{state.copper_kw:.2f} kW",)
    node = set_up.solving.outcome.nodes.at("B2")
    assert cells["Lower side"] == (f"{node.voltage_v:.1f} V",)


def test_card_and_board_tell_the_same_power_where_it_runs_back(qtbot):
    made = stage(qtbot, fernhollow(ONE, G2=Generator(node="B2", output_kw=140.0)))
    state = made.solving.outcome.branches.at("T2")
    assert state.through_kw < 0
    drawn = Asked(made.session.drawing, made.solving.outcome, None, 0)
    (through,) = (row for row in rows(drawn, "T2") if row.label == "Through")
    (first, *_), *_ = branch_figures(0.0, state, None)
    assert through.cells == (power(state.through_kw),)
    assert first.text.startswith(f"{power(-state.through_kw)} ←")
    made.solving.stop()


def test_several_of_one_kind_are_set_as_one_step(set_up):
    made = page(set_up, "T1", "T2")
    assert made.rows["rating_kva"].editor.placeholderText() == "various"
    assert made.rows["uk_percent"].editor.text() == "4"
    type_into(made.rows["uk_percent"], "5")
    assert [set_up.drawing.elements[i].uk_percent for i in ("T1", "T2")] == [5, 5]
    assert set_up.session.history.undoText() == "Impedance uk of 2 transformers to 5 %"
    set_up.session.history.undo()
    assert [set_up.drawing.elements[i].uk_percent for i in ("T1", "T2")] == [4, 4]


def test_a_refusal_on_one_of_several_changes_none(set_up):
    made = page(set_up, "T1", "T2")
    type_into(made.rows["v1_v"], "-1")
    assert made.rows["v1_v"].refusal.isVisible()
    assert [set_up.drawing.elements[i].v1_v for i in ("T1", "T2")] == [400, 11000]


def test_several_kinds_show_a_summary(set_up):
    set_up.attention.select(("C1", "T2", "L2"))
    labels = [row.label for row in set_up.card.now.rows]
    assert "Length, all" in labels
    assert "Loss, all" in labels
    assert set_up.card.head.name.text() == "3 elements"


def test_nothing_selected_shows_the_project(set_up):
    set_up.attention.select(())
    rows = set_up.card.project.rows
    type_into(rows["project.revision"], "C")
    assert set_up.drawing.project.revision == "C"
    assert "rev C" in set_up.head.about.text()
    type_into(rows["limits.low_percent"], "95")
    assert set_up.drawing.limits.low_percent == 95
    type_into(rows["frequency_hz"], "60 Hz")
    assert set_up.drawing.frequency_hz == 60
    type_into(rows["limits.low_percent"], "150")
    assert rows["limits.low_percent"].refusal.isVisible()
    assert set_up.drawing.limits.low_percent == 95
    assert set_up.card.project.counts.text() == (
        "1 supply, 2 busbars, 2 joints, 1 cable, 2 transformers, 2 loads"
    )


def test_removing_what_the_card_shows_turns_it_to_the_project(set_up):
    page(set_up, "C1")
    set_up.session.edit("Delete", lambda d: edits.remove(d, ["C1"]))
    assert set_up.card._page is set_up.card.project
    set_up.session.history.undo()
    assert isinstance(set_up.drawing.elements["T2"], Transformer)


def test_focus_field_points_at_one_field(set_up):
    set_up.card.focus_field("T2", "no_load_current_percent")
    row = set_up.card._page.rows["no_load_current_percent"]
    assert row.editor.hasFocus()


def test_typing_the_same_value_confirms_a_figure_of_the_shelf(qtbot):
    base = fernhollow(ONE)
    set_up = stage(qtbot, edits.change(base, "C1", assumed=("length_m",)))
    row = page(set_up, "C1").rows["length_m"]
    assert "as the shelf gives it" in row.dot.accessibleName()
    QTest.mouseClick(row.editor, Qt.MouseButton.LeftButton)
    QTest.keyClick(row.editor, Qt.Key.Key_Return)
    assert set_up.drawing.elements["C1"].assumed == ("length_m",)  # nothing was typed
    type_into(row, "1150")
    assert set_up.drawing.elements["C1"].assumed == ()
    assert row.dot.isHidden()
    set_up.solving.stop()


@pytest.mark.parametrize(("id", "field", "wrong"), [("L2", "power_factor", "7"), ("T2", "tap", "7")])
def test_the_old_value_typed_again_takes_the_refusal_away(set_up, id, field, wrong):
    row = page(set_up, id).rows[field]
    old = row.editor.text()
    type_into(row, wrong)
    assert not row.refusal.isHidden()
    type_into(row, old)
    assert row.refusal.isHidden()
    assert row.editor.text() == old
    assert set_up.session.history.count() == 0


@pytest.mark.parametrize("typed", ["7", "50"])
def test_a_refused_tap_quotes_the_ladder(set_up, typed):
    row = page(set_up, "T2").rows["tap"]
    type_into(row, typed)
    assert row.refusal.text().endswith("at least -2 and at most 2 notches.")


@pytest.mark.parametrize(
    ("typed", "percent"), [("216.2 V", 216.2 / (400 / 3**0.5) * 100), ("376 V", 94.0), ("93.5", 93.5)]
)
def test_a_voltage_limit_may_be_typed_in_volts(set_up, typed, percent):
    set_up.attention.select(())
    row = set_up.card._page.rows["limits.low_percent"]
    type_into(row, typed)
    assert set_up.drawing.limits.low_percent == pytest.approx(percent, rel=1e-14)
    assert row.refusal.isHidden()


def test_volts_of_a_limit_need_one_low_voltage(qtbot):
    set_up = stage(qtbot, fernhollow(ONE, T2=Transformer(start="J2", end="B2", v2_v=433.0)))
    row = set_up.card._page.rows["limits.low_percent"]
    type_into(row, "216.2 V")
    assert "known is 400 V, 433 V" in row.refusal.text()
    assert set_up.drawing.limits.low_percent == 94.0
    set_up.solving.stop()


def test_a_long_number_is_rounded_until_it_is_edited(set_up):
    set_up.session.edit("Limits", lambda d: edits.set_limits(d, low_percent=216.2 / (400 / 3**0.5) * 100))
    set_up.attention.select(())
    row = set_up.card._page.rows["limits.low_percent"]
    assert row.editor.at_rest == "93.62"
    assert row.editor.text().startswith("93.617")
    QTest.mouseClick(row.editor, Qt.MouseButton.LeftButton)
    QTest.keyClick(row.editor, Qt.Key.Key_Return)
    assert set_up.session.history.count() == 1


def test_the_card_says_how_a_transformer_is_loaded(set_up):
    page(set_up, "T2")
    assert "rated current" in set_up.card.now.toolTip()
    page(set_up, "L2")
    assert set_up.card.now.toolTip() == ""
