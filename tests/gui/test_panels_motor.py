"""A motor on its card: what it draws, what its start does, and its fields by real keys."""

import pytest
from msgspec.structs import replace
from panels_stage import ONE, fernhollow, stage, type_text
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from app.model import edits
from app.model.kinds import Motor


@pytest.fixture
def set_up(qtbot):
    made = stage(qtbot, fernhollow(ONE))
    made.session.edit("Pump", lambda d: edits.put(d, {"M1": Motor(name="Pump", node="B2", rated_kw=5.5)}))
    made.attention.select(("M1",))
    yield made
    made.solving.stop()


def cells(set_up):
    return {row.label: row.cells for row in set_up.card.now.rows}


def test_the_card_tells_the_start(set_up, qtbot):
    qtbot.waitUntil(lambda: "At start" in cells(set_up))
    told = cells(set_up)
    assert set(told) >= {
        "Draws",
        "Current",
        "Volts",
        "At start",
        "Volts at start",
        "Of rated",
        "Start torque",
    }
    assert "Step at supply" not in told  # no fault level is stated
    assert told["At start"][0].endswith(" A")


def test_horsepower_may_be_typed_and_a_starter_chosen(set_up):
    row = set_up.card._page.rows["rated_kw"]
    QTest.mouseClick(row.editor, Qt.MouseButton.LeftButton)
    row.editor.selectAll()
    type_text(row.editor, "10 hp")
    QTest.keyClick(row.editor, Qt.Key.Key_Return)
    assert set_up.drawing.elements["M1"].rated_kw == pytest.approx(7.46)
    assert {"starter", "state", "limited_current", "starting_current"} <= set(set_up.card._page.rows)


def test_a_start_that_comes_while_dragging_shows_its_change(set_up):
    from app.panels.asked import Asked
    from app.panels.results import rows
    from app.study import run

    before = set_up.drawing
    after = edits.put(before, {"M1": replace(before.elements["M1"], rated_kw=7.5)})
    made = rows(Asked(after, run(after), run(before), 0), "M1")
    assert next(r for r in made if r.label == "Volts at start").change
