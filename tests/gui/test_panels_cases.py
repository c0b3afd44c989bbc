"""What one case states of one element, typed on its card; cases added and taken away."""

import pytest
from panels_stage import ONE, TWO, fernhollow, stage, type_text
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from app.model import edits
from app.model.drawing import Own
from app.model.kinds import Switch


@pytest.fixture
def set_up(qtbot):
    made = stage(qtbot, fernhollow(TWO))
    yield made
    made.solving.stop()


def type_into(row, text: str) -> None:
    QTest.mouseClick(row.editor, Qt.MouseButton.LeftButton)
    row.editor.selectAll()
    if not text:
        QTest.keyClick(row.editor, Qt.Key.Key_Delete)
    type_text(row.editor, text)
    QTest.keyClick(row.editor, Qt.Key.Key_Return)


def case_rows(set_up, *ids):
    set_up.attention.select(ids)
    return list(set_up.card._page.cases.rows.values())


def test_kva_and_a_power_factor_typed_for_one_case_are_one_undo_step_and_said_back_with_their_share(set_up):
    rows = case_rows(set_up, "L2")
    assert [row.label.text() for row in rows] == [case.name for case in TWO]
    assert [row.editor.placeholderText() for row in rows] == ["80 kVA", "4.8 kVA"]
    type_into(rows[1], "5 kVA at 0.98")
    assert set_up.drawing.cases[1].own == {"L2": Own(demand_kva=5.0, power_factor=0.98)}
    assert set_up.session.history.undoText() == "House in case Quiet night, high intake: 5 kVA at 0.98"
    assert rows[1].editor.text() == "5 kVA at 0.98"
    assert rows[1].share.text() == "6.25 % of 80 kVA"
    type_into(rows[1], "12.5 %")
    assert (rows[1].editor.text(), rows[1].share.text()) == ("12.5 %", "10 kVA of 80 kVA")
    set_up.session.history.undo()
    type_into(rows[1], "")
    assert set_up.drawing.cases[1].own == {}
    assert rows[1].share.isHidden()
    set_up.session.history.undo()
    assert set_up.drawing.cases[1].own["L2"].demand_kva == 5.0


def test_what_cannot_be_is_refused_in_place_and_several_loads_are_set_at_once(set_up):
    rows = case_rows(set_up, "L2")
    type_into(rows[1], "lots")
    assert "does not begin with a number" in rows[1].refusal.text()
    assert set_up.drawing.cases[1].own == {}
    rows = case_rows(set_up, "L1", "L2")
    assert rows[1].refusal.isHidden()
    type_into(rows[1], "10 %")
    assert {i: own.percent for i, own in set_up.drawing.cases[1].own.items()} == {"L1": 10.0, "L2": 10.0}
    assert rows[1].editor.placeholderText() == "various" or rows[1].editor.text() == ""


def test_a_supply_has_its_own_volts_and_a_cable_has_no_such_row(set_up):
    rows = case_rows(set_up, "S1")
    assert rows[1].editor.placeholderText() == "424 V"
    type_into(rows[1], "410 V")
    assert set_up.drawing.cases[1].own["S1"].percent == 102.5
    set_up.attention.select(["C1"])
    assert set_up.card._page.cases is None


def test_a_single_case_shows_no_rows_until_there_is_another_made_and_removed_with_the_mouse(qtbot):
    made = stage(qtbot, fernhollow(ONE))
    made.attention.select(["L2"])
    assert made.card._page.cases.isHidden()
    made.attention.select([])
    project = made.card.project
    assert project.away.isHidden()
    QTest.mouseClick(project.another, Qt.MouseButton.LeftButton)
    assert [case.name for case in made.drawing.cases] == ["As drawn", "Case 2"]
    assert made.attention.case == 1
    made.attention.select(["L2"])
    rows = list(made.card._page.cases.rows.values())
    type_into(rows[1], "off")
    made.attention.select([])
    assert project.own.text() == "In this case alone: House off."
    QTest.mouseClick(project.away, Qt.MouseButton.LeftButton)
    assert [case.name for case in made.drawing.cases] == ["As drawn"]
    assert project.away.isHidden()
    made.session.history.undo()
    assert made.drawing.cases[1].own["L2"].percent == 0
    made.solving.stop()


def test_the_card_says_that_switches_stand_alike_in_all_cases(set_up):
    card, session = set_up.card, set_up.session
    set_up.attention.select(())
    assert card.project.alike.isHidden()
    switch = Switch(start="B1", end="J1", closed=False)
    session.edit("Add a switch", lambda drawing: edits.put(drawing, {"W9": switch}))
    set_up.solving.settle()
    assert "Switches stand alike in all cases" in card.project.alike.text()
    session.edit("One case", lambda drawing: edits.remove_case(drawing, 1))
    set_up.solving.settle()
    assert card.project.alike.isHidden()
