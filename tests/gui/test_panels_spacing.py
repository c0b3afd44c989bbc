"""The spacing of an overhead line on the card by real mouse and keys, the pole drawn from it, the shelf."""

from functools import partial

import pytest
from panels_stage import ONE, fernhollow, stage, type_text
from PySide6.QtCore import QPoint, Qt
from PySide6.QtTest import QTest

from app.canvas.theme import Theme
from app.live.preferences import Preferences
from app.live.session import Session
from app.model.kinds import OverheadLine
from app.model.overhead_parts import spaced_parts
from app.panels.more_parts import menu_of
from app.panels.shelf import Shelf
from app.panels.spacing_row import SpacingRow

FEET = "-3.6 ft 30 ft; 0 30 ft; 3.6 ft 30 ft; 0 25 ft"
METRES = "-1.09728 9.144; 0 9.144; 1.09728 9.144; 0 7.62"
LINE = OverheadLine(
    start="J1", end="J2", length_m=1150.0, resistance_ohm_per_km=0.868, reactance_ohm_per_km=0.37,
    gmr_mm=2.4, diameter_mm=9.6,
)  # fmt: skip


@pytest.fixture
def set_up(qtbot):
    made = stage(qtbot, fernhollow(ONE, C1=LINE))
    made.attention.select(("C1",))
    yield made
    made.solving.stop()


def put(set_up, field: str, text: str):
    row = set_up.card._page.rows[field]
    set_up.card.ensureWidgetVisible(row.editor)
    QTest.mouseClick(row.editor, Qt.MouseButton.LeftButton)
    row.editor.selectAll()
    QTest.keyClick(row.editor, Qt.Key.Key_Delete)
    type_text(row.editor, text)
    QTest.keyClick(row.editor, Qt.Key.Key_Return)
    set_up.solving.settle()
    return row


def cells(set_up) -> dict[str, str]:
    return {row.label: row.cells[0] for row in set_up.card.now.rows}


def test_a_spacing_typed_in_feet_takes_the_place_of_the_reactance(set_up):
    reactance = set_up.card._page.rows["reactance_ohm_per_km"]
    assert reactance.editor.isEnabled()
    assert "Z1 a km" not in cells(set_up)
    row = put(set_up, "hung_at_m", FEET)
    assert isinstance(row, SpacingRow)
    assert set_up.drawing.elements["C1"].hung_at_m == METRES
    assert row.editor.text() == METRES
    assert "-3.60 30" in row.editor.toolTip()
    assert set_up.session.history.undoText() == f"Spacing of C1 to {METRES}"
    assert not reactance.editor.isEnabled()
    assert (reactance.editor.text(), reactance.editor.placeholderText()) == ("", "by spacing")
    shown = cells(set_up)
    assert shown["Z1 a km"].endswith("Ω/km")
    assert "Z0 a km" in shown
    assert row.working.text().startswith("Z1 = ")
    assert "Carson 1926" in row.working.text()
    put(set_up, "hung_at_m", "")
    assert reactance.editor.isEnabled()
    assert reactance.editor.text() == "0.37"
    assert row.pole.isHidden()
    assert row.working.isHidden()
    assert set_up.session.history.undoText() == "Spacing of C1 cleared"


def test_a_refused_spacing_waits_below_its_field_and_changes_nothing(set_up):
    row = put(set_up, "hung_at_m", "-1 9; 0")
    assert row.refusal.isVisible()
    assert "allowed are two, x and height" in row.refusal.text()
    assert set_up.drawing.elements["C1"].hung_at_m == ""
    QTest.keyClick(row.editor, Qt.Key.Key_Escape)
    assert row.refusal.isHidden()
    put(set_up, "hung_at_m", "-1 9; 0 9; 1 9")
    gmr = put(set_up, "gmr_mm", "18.3")
    assert "half the diameter, 4.8 mm" in gmr.refusal.text()
    QTest.keyClick(gmr.editor, Qt.Key.Key_Escape)
    gmr = put(set_up, "gmr_mm", "")
    assert gmr.editor.placeholderText() == "3.48288"
    assert gmr.dot.isVisible()


def test_the_pole_is_to_scale_and_goes_with_the_places(set_up):
    row = put(set_up, "hung_at_m", "-1 9; 0 9; 1 9; 0 7.5")
    a, b, c, n, foot = row.pole.spots()
    assert row.pole.isVisible()
    assert b.x() - a.x() == pytest.approx(c.x() - b.x())
    assert (n.y() - b.y()) / (c.x() - b.x()) == pytest.approx(1.5)
    assert foot.x() == pytest.approx(b.x())
    assert 0 < a.x() < c.x() < row.pole.width()
    assert "N 0.00 m across, 7.50 m up" in row.pole.accessibleDescription()
    before = row.pole.grab().toImage()
    put(set_up, "hung_at_m", "0 9; 0 8.7; 0 8.4")
    assert row.pole.grab().toImage() != before


def test_two_lines_at_once_are_greyed_only_where_both_hang(set_up):
    put(set_up, "hung_at_m", "-1 9; 0 9; 1 9")
    other = OverheadLine(start="J1", end="J2", length_m=900.0)
    set_up.session.edit("Second", lambda d: type(d)(**{
        **{f: getattr(d, f) for f in d.__struct_fields__}, "elements": {**d.elements, "O9": other}
    }))  # fmt: skip
    set_up.attention.select(("C1", "O9"))
    page = set_up.card._page
    assert page.rows["reactance_ohm_per_km"].editor.isEnabled()
    assert page.rows["hung_at_m"].pole.isHidden()


def test_the_shelf_offers_lines_with_a_spacing_from_the_corner(qtbot, tmp_path):
    preferences = Preferences(tmp_path / "farend.ini")
    preferences.shelf_path = tmp_path / "shelf.json"
    session = Session(fernhollow(ONE))
    shelf = Shelf(session, Theme(), preferences)
    qtbot.addWidget(shelf)
    shelf.show()
    tile = next(t for t in shelf.tiles if t.part.name == "Overhead line")
    picked = []
    shelf.picked.connect(picked.append)
    asked = []
    tile.more_asked.disconnect()
    tile.more_asked.connect(lambda: asked.append(True))
    QTest.mouseClick(tile, Qt.MouseButton.LeftButton, pos=tile.corner().center().toPoint())
    assert (asked, picked) == ([True], [])
    QTest.mouseClick(tile, Qt.MouseButton.LeftButton, pos=QPoint(20, 12))
    assert picked == [tile.part]
    menu = menu_of(tile, partial(shelf._behind, "overhead_line"), lambda part: shelf._take_up(tile, part))
    assert [a.text() for a in menu.actions()] == [p.name for p in spaced_parts(False)]
    menu.actions()[1].trigger()
    assert picked[-1] == spaced_parts(False)[1]
    assert tile.isChecked()
