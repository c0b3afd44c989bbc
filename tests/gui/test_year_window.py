"""The year in the window: profiles pasted, invented, chosen; the year run, stopped, read and gone stale."""

from pathlib import Path
from threading import Event

import pytest
from PySide6.QtCore import QPoint, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from app.live.preferences import Preferences
from app.live.year_run import YearRun, bears_on_year
from app.model import edits
from app.model.file import load
from app.model.shapes import shape
from app.panels.profile_row import ProfileRow
from app.study.year import run_year
from app.study.year_record import course_text
from app.window import Window

SAMPLE = Path(__file__).parents[2] / "samples" / "fernhollow_pair.farend"
LEFT = Qt.MouseButton.LeftButton


@pytest.fixture
def window(qtbot, tmp_path):
    made = Window(Preferences(tmp_path / "likes.ini"), tmp_path / "recovery")
    qtbot.addWidget(made, before_close_func=lambda w: w.session.history.setClean())
    made.resize(1440, 900)
    made.show()
    made.menus.open_path(SAMPLE)
    made.solving.settle()
    return made


def household(window):
    def change(drawing):
        return edits.set_year(edits.put_profile(drawing, "home", shape("household")), load_profile="home")

    window.session.edit("Follow", change)
    window.solving.settle()


def click(widget, at=None):
    QTest.mouseClick(widget, LEFT, Qt.KeyboardModifier.NoModifier, at or QPoint())


def ran(window, qtbot):
    household(window)
    QTest.keyClick(window.view, Qt.Key.Key_F9)
    qtbot.waitUntil(lambda: window.year.run.year is not None and not window.year.run.running)
    QApplication.processEvents()
    return window.year.page


def test_f9_runs_the_year_and_its_figures_are_those_of_the_study(window, qtbot):
    page = ran(window, qtbot)
    assert page.isVisible()
    want = run_year(window.session.drawing)
    assert window.year.run.year.balance == want.balance
    assert page.facts.figures["Supplies"].text().startswith("234")
    assert page.state.text() == want.sentence
    model = page.branches.rows
    assert [row[0] for row in model.rows] == list(want.branches.ids)
    text = page.branches.as_text()
    assert "13 Jan 18:00" in text
    assert "1\u202f649" in text  # iron of T1
    assert page.basis.text().startswith("8\u202f760 points of 1 h")


def test_a_click_on_a_row_selects_the_element_and_the_keys_do_too(window, qtbot):
    page = ran(window, qtbot)
    table = page.branches
    row = [r[0] for r in table.rows.rows].index("C1")
    click(table.viewport(), table.visualRect(table.rows.index(row, 1)).center())
    assert window.attention.selection == {"C1"}
    QTest.keyClick(table, Qt.Key.Key_Down)
    assert window.attention.selection == {"T2"}
    click(page.tabs.button(1))
    assert page.stack.currentWidget() is page.nodes
    click(page.nodes.viewport(), page.nodes.visualRect(page.nodes.rows.index(3, 0)).center())
    assert window.attention.selection == {"B4"}


def test_a_column_sorts_by_its_figures(window, qtbot):
    page = ran(window, qtbot)
    head = page.branches.horizontalHeader()
    spot = QPoint(head.sectionViewportPosition(5) + head.sectionSize(5) // 2, head.height() // 2)
    click(head.viewport(), spot)
    click(head.viewport(), spot)
    iron = [row[3].iron_kwh for row in page.branches.rows.rows]
    assert iron in (sorted(iron), sorted(iron, reverse=True))
    assert len(set(iron)) == 3


def test_figures_go_grey_when_the_drawing_changes_and_come_back_with_undo(window, qtbot):
    page = ran(window, qtbot)
    ink = page.branches.rows.data(page.branches.rows.index(0, 1), Qt.ItemDataRole.ForegroundRole)
    window.session.edit("Longer", lambda d: edits.change(d, "C1", length_m=9000.0))
    assert window.year.run.stale
    assert "Not up to date" in page.state.text()
    grey = page.branches.rows.data(page.branches.rows.index(0, 1), Qt.ItemDataRole.ForegroundRole)
    assert grey != ink
    assert page.plot.faded
    window.session.history.undo()
    assert not window.year.run.stale
    assert "Not up to date" not in page.state.text()
    window.session.edit("Move", lambda d: edits.move(d, {"B4"}, 1, 0))
    assert not window.year.run.stale
    window.session.edit("Case", lambda d: edits.set_case(d, 0, load_percent=5.0))
    assert not window.year.run.stale


def test_an_element_that_has_gone_is_not_selected(window, qtbot):
    page = ran(window, qtbot)
    window.session.edit("Less", lambda d: edits.remove(d, ["C1"]))
    row = [r[0] for r in page.branches.rows.rows].index("C1")
    click(page.branches.viewport(), page.branches.visualRect(page.branches.rows.index(row, 1)).center())
    assert "C1" not in window.attention.selection


def test_a_run_tells_how_far_it_is_and_stops_when_it_is_told(qtbot, window):
    household(window)
    page, gate, begun = window.year.page, Event(), Event()
    page.show()

    def slow(drawing, progress):
        def held(done, whole):
            begun.set()
            gate.wait(10)
            return progress(done, whole)

        return run_year(drawing, held)

    window.year.run._run = slow
    click(page.button)
    assert page.button.text() == "Stop"
    assert begun.wait(10)
    click(page.button)
    assert page.state.text() == "Stopping…"
    gate.set()
    qtbot.waitUntil(lambda: not window.year.run.running)
    assert window.year.run.year is None
    assert "Stopped before its end" in page.state.text()
    assert page.button.text() == "Run"
    told = []
    window.year.run.progressed.connect(lambda done, whole: told.append(done / whole))
    click(page.button)
    qtbot.waitUntil(lambda: window.year.run.year is not None)
    assert told
    assert told == sorted(told)


def test_opening_another_drawing_forgets_the_year(window, qtbot):
    page = ran(window, qtbot)
    window.session.history.setClean()
    window.menus.open_path(SAMPLE.with_name("fernhollow.farend"))
    assert window.year.run.year is None
    assert not page.figures.isVisible()
    assert "Not run yet" in page.nothing.text()


def test_a_layout_that_cannot_be_solved_says_why(window, qtbot):
    window.session.edit("Away", lambda d: edits.remove(d, ["S1"]))
    window.year.run_now()
    qtbot.waitUntil(lambda: window.year.run.year is not None)
    assert not window.year.page.figures.isVisible()
    assert "supply" in window.year.page.nothing.text().lower()


def test_a_profile_is_pasted_taken_scaled_renamed_and_undone(window, qtbot):
    QTest.keyClick(
        window.view, Qt.Key.Key_P, Qt.KeyboardModifier.ControlModifier | Qt.KeyboardModifier.ShiftModifier
    )
    page = window.year.profiles
    assert page.isVisible()
    click(page.fresh)
    assert list(window.session.drawing.profiles) == ["profile"]
    QApplication.clipboard().setText("time;load\n1.1. 00:00;12,5\n1.1. 01:00;50\n1.1. 02:00;25\n")
    page.values.text.setFocus()
    QTest.keyClick(page.values.text, Qt.Key.Key_V, Qt.KeyboardModifier.ControlModifier)
    click(page.values.measured, QPoint(8, page.values.measured.height() // 2))
    click(page.values.put)
    assert window.session.drawing.profiles["profile"].percent == (25, 100, 50)
    assert not page.values.measured.isChecked()
    page.factor.setFocus()
    page.factor.selectAll()
    QTest.keyClicks(page.factor, "0.4")
    QTest.keyClick(page.factor, Qt.Key.Key_Return)
    assert window.session.drawing.profiles["profile"].load_factor == pytest.approx(0.4, abs=1e-4)
    page.title.setFocus()
    page.title.selectAll()
    QTest.keyClicks(page.title, "mill")
    QTest.keyClick(page.title, Qt.Key.Key_Return)
    assert list(window.session.drawing.profiles) == ["mill"]
    for _ in range(4):
        window.session.history.undo()
    assert window.session.drawing.profiles == {}
    assert not page.right.isVisible()


def test_a_bad_paste_is_told_in_place_and_changes_nothing(window):
    window.year.show_profiles()
    page = window.year.profiles
    click(page.fresh)
    before = window.session.drawing
    page.values.text.setPlainText("10\nabc")
    click(page.values.put)
    assert page.values.refusal.text() == 'Line 2: "abc" is not a number, allowed is a number such as 62.5.'
    assert window.session.drawing is before
    assert page.values.text.toPlainText() == "10\nabc"
    page.values.column.setText("x")
    click(page.values.put)
    assert "Column is x" in page.values.refusal.text()


def test_values_from_a_file_and_an_invented_shape(window, tmp_path):
    page = window.year.profiles
    page.add_shape("farm")
    assert window.session.drawing.profiles["farm"].source.startswith("invented, no source")
    (tmp_path / "log.csv").write_text("\n".join(["20", "40"] * 24), encoding="utf-8")
    page.values.open_values(tmp_path / "log.csv")
    made = window.session.drawing.profiles["farm"]
    assert (len(made.percent), made.hours, made.source) == (48, 0.5, "")
    page.values.open_values(tmp_path / "none.csv")
    assert "none.csv cannot be read" in page.values.refusal.text()


def test_what_is_followed_is_not_removed(window):
    household(window)
    window.year.show_profiles("home")
    click(window.year.profiles.away)
    assert "is followed by the drawing itself" in window.year.profiles.list_refusal.text()
    assert "home" in window.session.drawing.profiles


def test_a_load_chooses_its_profile_on_the_card(window):
    household(window)
    window.session.edit("More", lambda d: edits.put_profile(d, "mill", shape("workshop")))
    window.attention.select(["L2"])
    row = window.card._page.rows["profile"]
    assert isinstance(row, ProfileRow)
    words = [row.editor.itemText(i) for i in range(row.editor.count())]
    assert words == ["as usual: home", "constant 100 %", "home", "mill", "", "Profiles…"]
    row.editor.setFocus()
    for _ in range(3):
        QTest.keyClick(row.editor, Qt.Key.Key_Down)
        row.editor.activated.emit(row.editor.currentIndex())
    assert window.session.drawing.elements["L2"].profile == "mill"
    row.editor.setCurrentIndex(5)
    row.editor.activated.emit(5)
    assert window.year.profiles.isVisible()
    assert window.year.profiles.name == "mill"
    assert row.editor.currentText() == "mill"
    window.attention.select(["C1"])
    assert "profile" not in window.card._page.rows


def test_the_drawing_chooses_for_all_and_prices_losses(window):
    household(window)
    section = window.card.project.year
    row = section.rows["price_per_kwh"]
    row.editor.setFocus()
    QTest.keyClicks(row.editor, "0.3")
    QTest.keyClick(row.editor, Qt.Key.Key_Return)
    assert window.session.drawing.year.price_per_kwh == 0.3
    assert section.rows["load_profile"].editor.currentText() == "home"
    row.editor.selectAll()
    QTest.keyClicks(row.editor, "-1")
    QTest.keyClick(row.editor, Qt.Key.Key_Return)
    assert "Price of losses is -1 per kWh" in row.refusal.text()


def test_what_bears_on_a_year_and_what_does_not():
    base = load(SAMPLE)
    assert not bears_on_year(base, edits.set_project(base, title="x"))
    assert bears_on_year(base, edits.set_limits(base, low_percent=90.0))
    assert bears_on_year(base, edits.set_year(base, price_per_kwh=1.0))
    assert bears_on_year(base, edits.put_profile(base, "x", shape("flat")))


@pytest.mark.parametrize("look", ["light", "dark"])
def test_pages_fit_a_small_screen(window, qtbot, look):
    window.theme.wear(look)
    page = ran(window, qtbot)
    page.resize(984, 600)
    QApplication.processEvents()
    assert page.minimumSizeHint().width() <= 984
    assert page.minimumSizeHint().height() <= 600
    window.year.show_profiles()
    assert window.year.profiles.minimumSizeHint().height() <= 600
    picture = page.grab().toImage()
    ground = picture.pixelColor(4, 4)
    assert (ground.lightnessF() < 0.5) == (look == "dark")


def test_a_window_that_closes_stops_its_year(qtbot, tmp_path):
    made = Window(Preferences(tmp_path / "likes.ini"), tmp_path / "recovery")
    qtbot.addWidget(made)
    made.menus.open_path(SAMPLE)
    halted = Event()

    def slow(drawing, progress):
        while progress(1, 2):
            pass
        halted.set()
        return run_year(drawing)

    made.year.run._run = slow
    made.year.run.start()
    made.close()
    assert halted.wait(10)
    assert isinstance(made.year.run, YearRun)


def test_the_hours_are_saved_as_the_command_writes_them(window, qtbot, tmp_path):
    page = ran(window, qtbot)
    asked = []
    page.dialogs.file_to_write = lambda *question: asked.append(question) or tmp_path / "hours.csv"
    click(page.save)
    assert asked[0][1].name == "Fernhollow Estate 11 kV pair hours.csv"
    assert (tmp_path / "hours.csv").read_text(encoding="utf-8") == course_text(
        run_year(window.session.drawing)
    )
    assert "8760 points written to hours.csv" in page.state.text()
    page.dialogs.file_to_write = lambda *_: tmp_path / "none" / "hours.csv"
    click(page.save)
    assert "cannot be saved" in page.state.text()
