"""The bottom line and the head: verdicts, folding out, assumed values, unsolved layouts, cases."""

import pytest
from panels_stage import ONE, TWO, fernhollow, stage
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QListWidget

from app.model import edits
from app.model.drawing import Case, Limits
from app.model.kinds import Busbar, Load
from app.study.outcome import Verdict


@pytest.fixture
def set_up(qtbot):
    made = stage(qtbot, fernhollow(ONE))
    yield made
    made.solving.stop()


def failing(set_up) -> None:
    set_up.session.edit("Limits", lambda d: edits.set_limits(d, low_percent=99.0))
    set_up.solving.settle()


def click_item(listed: QListWidget, row: int) -> None:
    listed.scrollToItem(listed.item(row))
    spot = listed.visualItemRect(listed.item(row)).center()
    QTest.mouseClick(listed.viewport(), Qt.MouseButton.LeftButton, pos=spot)


def test_checks_that_hold_are_counted_and_the_tightest_told(set_up):
    bar = set_up.findings
    assert bar.headline.text().startswith("11 checks hold")
    assert bar.sentence.text().startswith("Tightest: ")


def test_failing_checks_come_first(set_up):
    failing(set_up)
    bar = set_up.findings
    count = sum(f.verdict is Verdict.FAILS for f in set_up.solving.outcome.findings)
    assert count > 1
    assert bar.headline.text() == f"{count} checks fail."
    assert bar.mark.verdict is Verdict.FAILS
    assert "99" in bar.sentence.text()


def test_clicking_the_sentence_selects_the_element(set_up):
    sought = []
    set_up.findings.sought.connect(sought.append)
    failing(set_up)
    QTest.mouseClick(set_up.findings.sentence, Qt.MouseButton.LeftButton)
    assert set_up.attention.selection == set(sought[0])
    assert set_up.attention.selection <= set(set_up.drawing.elements)


def test_the_list_folds_out_and_a_click_selects(set_up):
    failing(set_up)
    bar = set_up.findings
    QTest.mouseClick(bar.unfold, Qt.MouseButton.LeftButton)
    assert bar.fold_out.isVisible()
    assert bar.list.count() == len(set_up.solving.outcome.findings)
    wanted = next(k for k in range(bar.list.count()) if "HS" in bar.list.item(k).text())
    click_item(bar.list, wanted)
    assert set_up.attention.selection == {"B2"}
    QTest.mouseClick(bar.unfold, Qt.MouseButton.LeftButton)
    assert not bar.fold_out.isVisible()


def test_assumed_values_are_listed_and_can_be_taken_as_given(set_up):
    bar, before = set_up.findings, len(set_up.solving.outcome.assumptions)
    assert bar.assumed.text() == f"{before} assumed values to confirm"
    wanted = []
    bar.field_sought.connect(lambda id, field: wanted.append((id, field)))
    QTest.mouseClick(bar.assumed, Qt.MouseButton.LeftButton)
    assert bar.list.count() == before
    row = next(k for k in range(before) if "No-load current" in bar.list.item(k).text())
    assert bar.list.item(row).text().startswith("T2: No-load current i0 is taken as 0.8 %")
    click_item(bar.list, row)
    assert wanted == [("T2", "no_load_current_percent")]
    QTest.mouseClick(bar.confirm, Qt.MouseButton.LeftButton)
    set_up.solving.settle()
    assert set_up.drawing.elements["T2"].no_load_current_percent == 0.8
    assert bar.assumed.text() == f"{before - 1} assumed values to confirm"
    assert set_up.session.history.undoText() == "No-load current i0 of T2 taken as given"


def test_no_operating_point_is_told_calmly(set_up):
    figures = set_up.head.totals.figures()
    set_up.session.edit("Load", lambda d: edits.change(d, "L2", demand_kva=5000.0))
    set_up.solving.settle()
    bar = set_up.findings
    assert bar.headline.text() == "Not solved."
    assert bar.mark.verdict is Verdict.BLOCKS
    blamed = set_up.solving.problem.to_blame
    assert blamed is not None
    QTest.mouseClick(bar.sentence, Qt.MouseButton.LeftButton)
    assert set_up.attention.selection == {blamed}
    assert set_up.solving.stale
    kept = [(f"{name} was", figure, moved) for name, figure, moved in figures]
    assert set_up.head.totals.figures() == kept  # the last good figures stay, grey
    set_up.session.history.undo()
    set_up.solving.settle()
    assert bar.headline.text().startswith("11 checks hold")


def test_an_invalid_layout_names_the_elements(set_up):
    set_up.session.edit("Supply", lambda d: edits.put(d, {"S2": set_up.drawing.elements["S1"]}))
    set_up.solving.settle()
    assert set_up.findings.mark.verdict is Verdict.BLOCKS
    assert set_up.findings.sentence.text()


def test_what_is_told_stays_until_the_next_change(set_up):
    set_up.findings.tell("Not <b>this</b>.")
    assert set_up.findings.sentence.text() == "Not <b>this</b>."
    assert set_up.findings.sentence.textFormat() == Qt.TextFormat.PlainText
    set_up.session.edit("Load", lambda d: edits.put(d, {"L9": Load(node="B1")}))
    assert set_up.findings.sentence.text() != "Not <b>this</b>."


def test_a_name_that_looks_like_markup_stays_text_in_tooltips(set_up):
    from app.panels.words import plain_tip

    assert plain_tip("a & b") == "a & b"
    assert "&lt;b&gt;" in plain_tip("<b>House</b>")


def test_chips_show_cases_and_switch_them(qtbot):
    made = stage(qtbot, fernhollow(TWO), size=(1440, 800))
    chips = made.head.chips
    assert [c.text() for c in chips.chips] == [c.name for c in TWO]
    assert chips.chips[1].isVisible()
    QTest.mouseClick(chips.chips[1], Qt.MouseButton.LeftButton)
    assert made.attention.case == 1
    night = made.head.totals.figures()
    made.window.resize(700, 500)
    qtbot.waitUntil(lambda: chips.menu_chip.isVisible())
    assert not chips.chips[0].isVisible()
    chips.menu_chip.menu().actions()[0].trigger()
    assert made.attention.case == 0
    assert made.head.totals.figures() != night
    made.solving.stop()


def test_a_chip_shows_how_its_own_case_stands(qtbot):
    cases = (Case(name="Full"), Case(name="Nearly full", load_percent=98.0))
    made = stage(qtbot, fernhollow(cases), size=(1440, 800))
    assert [c.verdict for c in made.head.chips.chips] == [Verdict.HOLDS, Verdict.HOLDS]
    failing(made)
    assert [c.verdict for c in made.head.chips.chips] == [Verdict.FAILS, Verdict.FAILS]
    made.solving.stop()


def test_one_case_needs_no_chips(set_up):
    assert not any(c.isVisible() for c in set_up.head.chips.chips)


def test_the_head_says_what_is_not_saved(set_up):
    assert "not saved" not in set_up.head.about.text()
    set_up.session.edit("Limits", lambda d: edits.set_limits(d, low_percent=95.0))
    assert "not saved" in set_up.head.about.text()
    set_up.session.history.setClean()
    assert "not saved" not in set_up.head.about.text()


def test_the_head_says_the_name_of_the_file_once(set_up):
    set_up.session.edit("Title", lambda d: edits.set_project(d, title="", place="Camp"))
    set_up.head.show_file("camp.farend")
    assert set_up.head.title.text() == "camp.farend"
    assert "camp.farend" not in set_up.head.about.text()
    set_up.session.edit("Title", lambda d: edits.set_project(d, title="Lake camp"))
    assert "camp.farend" in set_up.head.about.text()


def test_the_list_leaves_a_small_window_room_for_the_paper(qtbot):
    made = stage(qtbot, fernhollow(TWO), size=(1024, 500))
    made.findings.fold("findings")
    made.findings.fold("assumed")
    assert made.findings.list.count() > 5
    assert made.findings.list.height() <= made.findings.window().height() / 5
    made.solving.stop()


@pytest.mark.parametrize("look", ["light", "dark"])
def test_everything_paints_in_both_looks_and_small(qtbot, look):
    made = stage(qtbot, fernhollow(TWO), size=(760, 500), look=look)
    for ids in ((), ("T2",), ("C1",), ("B2",), ("L1", "L2"), ("S1", "T1")):
        made.attention.select(ids)
        assert not made.window.grab().isNull()
    made.theme.wear("dark" if look == "light" else "light")
    ground = made.window.grab().toImage().pixelColor(made.head.mapTo(made.window, made.head.rect().center()))
    assert (ground.lightness() < 128) == (look == "light")
    assert isinstance(made.drawing.limits, Limits)
    made.solving.stop()


def test_a_figure_of_the_shelf_is_confirmed_by_taking_it_as_given(qtbot):
    unsure = Load(node="B2", name="House", dx=4, dy=-1, assumed=("demand_kva",))
    set_up = stage(qtbot, fernhollow(ONE, L2=unsure))
    bar = set_up.findings
    QTest.mouseClick(bar.assumed, Qt.MouseButton.LeftButton)
    texts = [bar.list.item(row).text() for row in range(bar.list.count())]
    row = next(n for n, text in enumerate(texts) if text.startswith("House: Demand is taken as 10 kVA"))
    assert "as the shelf gives it" in texts[row]
    click_item(bar.list, row)
    assert not set_up.card._page.rows["demand_kva"].dot.isHidden()
    QTest.mouseClick(bar.confirm, Qt.MouseButton.LeftButton)
    set_up.solving.settle()
    assert set_up.drawing.elements["L2"].assumed == ()
    assert set_up.drawing.elements["L2"].demand_kva == 10.0
    assert bar.list.count() == len(texts) - 1
    assert set_up.card._page.rows["demand_kva"].dot.isHidden()
    set_up.solving.stop()


def test_an_exceeded_advice_neither_fails_nor_passes_as_holding(qtbot):
    driven = (Case(name="High intake", supply_percent=108.0),)
    set_up = stage(qtbot, fernhollow(driven))
    bar = set_up.findings
    (told,) = {f.verdict for f in set_up.solving.outcome.findings if f.check == "over-excitation"}
    assert told is Verdict.ADVICE
    assert "checks hold, " in bar.headline.text()
    assert "advice exceeded" in bar.headline.text()
    assert bar.mark.verdict is Verdict.ADVICE
    assert not bar.sentence.text().startswith("Tightest")
    assert "advised for continuous running: at most" in bar.sentence.text()
    set_up.solving.stop()


@pytest.mark.parametrize("which", ["findings", "assumed"])
def test_escape_folds_the_list_in_and_gives_the_keyboard_back(set_up, qtbot, which):
    bar = set_up.findings
    bar.fold(which)
    assert bar.list.hasFocus()
    with qtbot.waitSignal(bar.left):
        QTest.keyClick(bar.list, Qt.Key.Key_Escape)
    assert bar.folded_out == ""
    assert bar.fold_out.isHidden()


def test_assumed_values_are_told_in_sentences_that_read(set_up):
    bar = set_up.findings
    bar.fold("assumed")
    texts = [bar.list.item(row).text() for row in range(bar.list.count())]
    assert any("Voltage of the demand is taken as 400 V" in text for text in texts)
    assert any("Temperature of the conductor is taken as 60 °C" in text for text in texts)


def test_without_a_supply_nothing_old_is_shown(qtbot):
    set_up = stage(qtbot, fernhollow(TWO))
    assert {chip.verdict for chip in set_up.head.chips.chips} != {Verdict.NOTE}
    set_up.session.edit("Delete", lambda d: edits.remove(d, ["S1"]))
    set_up.solving.settle()
    assert {chip.verdict for chip in set_up.head.chips.chips} == {Verdict.NOTE}
    assert [figure for _name, figure, _moved in set_up.head.totals.figures()] == ["–", "–"]
    set_up.attention.select(("L2",))
    cells = {cell for row in set_up.card.now.rows for cell in row.cells}
    assert cells <= {"dead", "–"}
    set_up.session.history.undo()
    set_up.solving.settle()
    assert "–" not in [figure for _name, figure, _moved in set_up.head.totals.figures()]
    set_up.solving.stop()


def test_a_blocked_layout_has_neutral_chips_and_totals(qtbot):
    set_up = stage(qtbot, fernhollow(TWO))
    set_up.session.edit("Plate", lambda d: edits.change(d, "T2", load_loss_w=1e6))
    set_up.solving.settle()
    assert set_up.solving.problem is not None
    assert {chip.verdict for chip in set_up.head.chips.chips} == {Verdict.NOTE}
    assert [name for name, _figure, _moved in set_up.head.totals.figures()] == ["Supply was", "Lost was"]
    set_up.solving.stop()


def test_what_is_dead_is_said_and_not_counted_as_holding(qtbot):
    set_up = stage(qtbot, fernhollow(ONE))
    was = set_up.findings.headline.text()
    set_up.session.edit("Bar", lambda d: edits.put(d, {"B9": Busbar(x=60, y=20, name="Barn")}))
    set_up.solving.settle()
    bar = set_up.findings
    assert bar.headline.text() == f"{was.removesuffix('.')}, 1 part is dead."
    assert bar.mark.verdict is Verdict.NOTE
    assert "Barn" in bar.sentence.text()
    set_up.solving.stop()
