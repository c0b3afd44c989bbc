"""One case of several has no operating point: chosen by keys, the others stand fresh and it stands grey."""

import pytest
from msgspec.structs import replace
from panels_stage import fernhollow
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from app.live.preferences import Preferences
from app.model import edits
from app.model.drawing import Case
from app.model.file import save
from app.study import run
from app.study.outcome import Verdict
from app.window import Window

PEAK = Case(name="Peak", supply_percent=97.0)
HEAVY = Case(name="Heavy", load_percent=900.0)
NIGHT = Case(name="Night", supply_percent=106.0, load_percent=6.0)


@pytest.fixture
def window(qtbot, tmp_path):
    path = tmp_path / "three.farend"
    save(fernhollow((PEAK, HEAVY, NIGHT)), path)
    made = Window(Preferences(tmp_path / "likes.ini"), tmp_path / "recovery")
    qtbot.addWidget(made, before_close_func=lambda w: w.session.history.setClean())
    made.resize(1440, 900)
    made.show()
    made.menus.open_path(path)
    made.solving.settle()
    qtbot.waitUntil(lambda: bool(words(made, "B2")))
    return made


def choose(window, case):
    """With the keys: to the chip and along to the next, as in any row of buttons."""
    chips = window.head.chips.chips
    chips[window.attention.case].setFocus(Qt.FocusReason.TabFocusReason)
    while window.attention.case != case:
        here = window.attention.case
        key = Qt.Key.Key_Right if case > here else Qt.Key.Key_Left
        QTest.keyClick(chips[here], key)
        assert window.attention.case != here
    QTest.qWait(30)


def words(window, id):
    return window.board.tags[id].text


def test_chips_say_which_case_is_not_solved_and_the_bottom_line_why(window):
    outcome = run(window.session.drawing)
    assert outcome.solved_cases == (0, 2)
    chips = window.head.chips.chips
    assert [chip.verdict is Verdict.BLOCKS for chip in chips[:3]] == [False, True, False]
    assert chips[1].toolTip() == "Heavy: not solved"
    line = window.findings
    assert line.mark.verdict is Verdict.BLOCKS
    assert line.headline.text().startswith("1 of 3 cases not solved; else ")
    assert "cannot carry its load in case Heavy" in line.sentence.text()
    QTest.mouseClick(line.sentence, Qt.MouseButton.LeftButton)
    assert window.attention.selection == {outcome.to_blame}


def test_a_solved_case_shows_its_own_figures_fresh_and_the_other_none_that_it_never_had(window):
    outcome = run(window.session.drawing)
    for case in (0, 2):
        choose(window, case)
        volts = outcome.nodes.at("B2", case).voltage_v
        assert f"{volts:.1f} V" in words(window, "B2")
        assert (window.solving.stale, window.board.look.stale, window.solving.problem) == (False, False, None)
        assert [name for name, _, _ in window.head.totals.figures()] == ["Supply", "Lost"]
        assert window.tape.cut.pieces
        assert window.strip.case == case
        reading = window.board._shown.reading("B2")
        known = [outcome.nodes.at("B2", c).percent for c in (0, 2)]
        assert (reading.lowest, reading.highest) == (min(known), max(known))
    choose(window, 1)
    assert "V" not in words(window, "B2")
    assert [figure for _, figure, _ in window.head.totals.figures()] == ["–", "–"]
    assert not window.tape.cut.pieces
    drawn = {curve.name: bool(curve.nodes) for curve in window.strip.curves}
    assert drawn == {"Peak": True, "Heavy": False, "Night": True}


def test_the_card_has_figures_for_each_solved_case_and_says_not_solved_for_the_other(window):
    window.attention.select(("B2",))
    QTest.qWait(30)
    cells = {row.label: row.cells for row in window.card.now.rows if len(row.cells) == 3}
    assert cells["Volts"][1] == "not solved"
    assert "not solved" not in (cells["Volts"][0], cells["Volts"][2])
    window.attention.select(())
    QTest.qWait(30)
    whole = {row.label: row.cells for row in window.card.now.rows}
    assert {cells[1] for cells in whole.values()} <= {"not solved"}


def test_a_load_that_breaks_one_case_greys_it_alone_and_taking_it_back_brings_it_back(window):
    choose(window, 0)
    before = words(window, "B2")
    refused = window.session.edit("Heavier", lambda d: edits.change(d, "L2", demand_kva=700.0))
    assert not refused
    window.solving.settle()
    QTest.qWait(30)
    outcome = run(window.session.drawing)
    assert outcome.solved_cases == (2,)
    assert window.solving.stale
    assert window.board.look.stale
    assert words(window, "B2") == before  # the last good figures
    assert [name for name, _, _ in window.head.totals.figures()] == ["Supply was", "Lost was"]
    choose(window, 2)
    assert not window.solving.stale
    assert f"{outcome.nodes.at('B2', 2).voltage_v:.1f} V" in words(window, "B2")
    choose(window, 0)
    assert window.solving.stale
    assert words(window, "B2") == before
    window.session.history.undo()
    window.solving.settle()
    QTest.qWait(30)
    assert not window.solving.stale
    assert words(window, "B2") == before


def test_the_last_figures_of_a_case_are_not_taken_for_those_of_another_that_takes_its_place(window):
    choose(window, 0)
    swapped = (replace(HEAVY, name="Other heavy"), HEAVY, NIGHT)
    window.session.edit("Cases", lambda d: replace(d, cases=swapped))
    window.solving.settle()
    QTest.qWait(30)
    assert window.solving.problem is window.solving.newest
    assert window.solving.figures is None
    assert "V" not in words(window, "B2")


@pytest.mark.parametrize("look", ["light", "dark"])
def test_it_paints_in_both_looks(window, look):
    window.theme.wear(look, "IEC")
    seen = []
    for case in (0, 1, 2):
        choose(window, case)
        seen.append(window.grab().toImage())
    assert seen[0] != seen[1] != seen[2]
