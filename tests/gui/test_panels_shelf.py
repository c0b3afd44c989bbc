"""The shelf: picking, dragging out, the user's own parts, symbols dropped on them, terminals."""

from functools import partial
from pathlib import Path

import pytest
from panels_stage import ONE, fernhollow
from PySide6.QtCore import QMimeData, QPointF, Qt, QUrl
from PySide6.QtGui import QDropEvent
from PySide6.QtTest import QTest

from app.canvas.theme import Theme
from app.canvas.user_symbol import read_svg
from app.live.preferences import Preferences
from app.live.session import Session
from app.model import edits
from app.model.drawing import Part
from app.model.kinds import LETTERS, Transformer, kind_of
from app.model.parts import builtin_parts, decode_part, load_shelf, save_shelf
from app.panels.more_parts import beside, menu_of
from app.panels.shelf import Shelf
from app.panels.terminals import Terminals
from app.panels.tile import PART_MIME

SVG = (
    b'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 40 20">'
    b'<rect x="2" y="2" width="36" height="16" fill="none" stroke="black"/></svg>'
)
HOSTILE = b'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 9 9"><script>alert(1)</script></svg>'
UNIT = Part(name="Pad unit", element=Transformer(start="", end="", rating_kva=160.0))


class Answers:
    """Stands in for the dialogs."""

    def __init__(self, name: str = "", kind: str | None = None, svg: str = "", symbol=None) -> None:
        self.name, self.kind, self.svg, self.symbol = name, kind, svg, symbol

    def ask_name(self, title, suggestion):
        return self.name

    def ask_kind(self):
        return self.kind

    def svg_to_open(self):
        return self.svg

    def terminals(self, part):
        return self.symbol


@pytest.fixture
def preferences(tmp_path):
    made = Preferences(tmp_path / "farend.ini")
    made.shelf_path = tmp_path / "shelf.json"
    return made


@pytest.fixture
def shelf(qtbot, preferences):
    save_shelf(preferences.shelf_path, [UNIT])
    return opened(qtbot, preferences)


def opened(qtbot, preferences) -> Shelf:
    made = Shelf(Session(fernhollow(ONE)), Theme(), preferences)
    qtbot.addWidget(made)
    made.resize(made.sizeHint())
    made.show()
    return made


def svg_file(tmp_path: Path, data: bytes = SVG, name: str = "box.svg") -> Path:
    path = tmp_path / name
    path.write_bytes(data)
    return path


def drop(target, path: Path) -> QDropEvent:
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(path))])
    event = QDropEvent(
        QPointF(10, 10),
        Qt.DropAction.CopyAction,
        data,
        Qt.MouseButton.LeftButton,
        Qt.KeyboardModifier.NoModifier,
    )
    target.dropEvent(event)
    return event


def test_a_click_picks_a_part_until_placing_ends(shelf):
    picked = []
    shelf.picked.connect(picked.append)
    QTest.mouseClick(shelf.tiles[3], Qt.MouseButton.LeftButton)
    assert picked == [builtin_parts()[3]]
    assert shelf.tiles[3].isChecked()
    QTest.mouseClick(shelf.tiles[5], Qt.MouseButton.LeftButton)
    assert not shelf.tiles[3].isChecked()
    assert shelf.tiles[5].isChecked()
    shelf.rest()
    assert not any(t.isChecked() for t in shelf.tiles)


def test_a_click_on_the_picked_part_puts_it_back(shelf, qtbot):
    QTest.mouseClick(shelf.tiles[3], Qt.MouseButton.LeftButton)
    with qtbot.waitSignal(shelf.put_back):
        QTest.mouseClick(shelf.tiles[3], Qt.MouseButton.LeftButton)
    assert not any(t.isChecked() for t in shelf.tiles)
    with qtbot.waitSignal(shelf.picked):
        QTest.mouseClick(shelf.tiles[3], Qt.MouseButton.LeftButton)
    assert shelf.tiles[3].isChecked()


def test_keys_pick_and_tooltips_name_them(shelf):
    picked = []
    shelf.picked.connect(picked.append)
    shelf.tiles[0].setFocus()
    QTest.keyClick(shelf.tiles[0], Qt.Key.Key_T)
    assert kind_of(picked[0].element) == "transformer"
    for tile in shelf.tiles:
        assert f"({LETTERS[kind_of(tile.part.element)]})" in tile.toolTip()


def test_a_part_dragged_out_travels_as_bytes(shelf):
    drag = shelf.own_tiles[0].drag()
    part = decode_part(bytes(drag.mimeData().data(PART_MIME).data()))
    assert part == UNIT
    assert not drag.pixmap().isNull()


def test_an_svg_dropped_on_a_part_becomes_its_symbol(shelf, tmp_path, preferences, qtbot):
    drop(shelf.own_tiles[0], svg_file(tmp_path))
    symbol = shelf.own.kept[0].symbol
    assert (symbol.width, symbol.height) == (40, 20)
    assert load_shelf(preferences.shelf_path)[0].symbol == symbol
    again = opened(qtbot, preferences)
    assert again.own_tiles[0].part.symbol == symbol
    assert not again.own_tiles[0].picture().isNull()


def test_a_hostile_svg_is_refused_with_a_sentence(shelf, tmp_path):
    told = []
    shelf.refused.connect(told.append)
    drop(shelf.own_tiles[0], svg_file(tmp_path, HOSTILE, "bad.svg"))
    assert shelf.own.kept[0].symbol is None
    assert told[0].startswith("bad.svg: ")


def test_an_svg_dropped_beside_the_parts_asks_for_the_kind(shelf, tmp_path):
    shelf.dialogs = Answers(kind="load")
    drop(shelf, svg_file(tmp_path, name="pump.svg"))
    assert [t.part.name for t in shelf.own_tiles] == ["Pad unit", "pump"]
    assert kind_of(shelf.own_tiles[1].part.element) == "load"
    shelf.dialogs = Answers(kind=None)
    drop(shelf, svg_file(tmp_path, name="other.svg"))
    assert len(shelf.own_tiles) == 2


def test_an_element_is_kept_with_its_values(shelf, preferences):
    shelf.dialogs = Answers(name="My unit")
    shelf.keep("T2")
    kept = load_shelf(preferences.shelf_path)[1]
    assert (kept.name, kept.element.rating_kva, kept.element.tap) == ("My unit", 100.0, -1)
    drawing = shelf._session.drawing
    assert drawing.parts[drawing.elements["T2"].part].name == "My unit"
    assert shelf._session.history.undoText() == "T2 kept as My unit"
    assert [t.part.name for t in shelf.own_tiles] == ["Pad unit", "My unit"]


def test_the_symbol_of_a_part_follows_into_the_drawing(shelf, tmp_path):
    shelf.dialogs = Answers(name="My unit")
    shelf.keep("T2")
    drop(shelf.own_tiles[1], svg_file(tmp_path))
    drawing = shelf._session.drawing
    assert drawing.parts[drawing.elements["T2"].part].symbol is not None
    shelf._session.history.undo()
    assert all(p.symbol is None for p in shelf._session.drawing.parts.values())


def test_rename_and_remove(shelf, preferences):
    shelf.dialogs = Answers(name="Corner unit")
    actions = {a.text(): a for a in shelf.menu_of(UNIT).actions()}
    actions["Rename…"].trigger()
    assert [t.part.name for t in shelf.own_tiles] == ["Corner unit"]
    part = shelf.own_tiles[0].part
    {a.text(): a for a in shelf.menu_of(part).actions()}["Remove from shelf"].trigger()
    assert shelf.own_tiles == []
    assert load_shelf(preferences.shelf_path) == ()


def test_a_damaged_shelf_is_told_and_not_written_over(qtbot, preferences, tmp_path):
    preferences.shelf_path.write_bytes(b"{ not json")
    made = opened(qtbot, preferences)
    told = []
    made.refused.connect(told.append)
    qtbot.waitUntil(lambda: bool(told))
    made.dialogs = Answers(kind="load")
    drop(made, svg_file(tmp_path))
    assert preferences.shelf_path.read_bytes() == b"{ not json"


def test_terminals_are_dragged_and_snap_to_tenths(qtbot, tmp_path):
    part = Part(name="Box", element=UNIT.element, symbol=read_svg(SVG))
    dialog = Terminals(part, Theme())
    qtbot.addWidget(dialog)
    dialog.show()
    picture = dialog.picture
    assert [p.toTuple() for p in picture.points] == [(0, 10), (40, 10)]
    start, goal = picture.to_widget(picture.points[0]), picture.to_widget(QPointF(4.9, 3.2))
    QTest.mousePress(picture, Qt.MouseButton.LeftButton, pos=start.toPoint())
    QTest.mouseMove(picture, goal.toPoint())
    QTest.mouseRelease(picture, Qt.MouseButton.LeftButton, pos=goal.toPoint())
    assert dialog.symbol().terminals == ((4, 4), (40, 10))
    picture.setFocus()
    QTest.keyClick(picture, Qt.Key.Key_Tab)
    QTest.keyClick(picture, Qt.Key.Key_Down)
    assert dialog.symbol().terminals == ((4, 4), (40, 12))


def test_terminals_are_saved_on_the_shelf(shelf, tmp_path, preferences):
    drop(shelf.own_tiles[0], svg_file(tmp_path))
    part = shelf.own_tiles[0].part
    from msgspec.structs import replace

    shelf.dialogs = Answers(symbol=replace(part.symbol, terminals=((4.0, 10.0), (36.0, 10.0))))
    {a.text(): a for a in shelf.menu_of(part).actions()}["Edit terminals…"].trigger()
    assert load_shelf(preferences.shelf_path)[0].symbol.terminals == ((4.0, 10.0), (36.0, 10.0))


def test_plain_parts_follow_the_habit_of_the_drawing_and_more_stand_behind_their_corners(shelf):
    session = shelf._session
    tile = next(t for t in shelf.tiles if kind_of(t.part.element) == "transformer")
    assert tile.part.element.v1_v == 11000
    assert "11/0.24 kV" in tile.toolTip()
    assert session.edit("60 Hz", lambda d: edits.set_frequency(d, 60.0)) == ""
    assert tile.part.element.v1_v == 12470
    assert "centre-tapped" in tile.toolTip()
    picked = []
    shelf.picked.connect(picked.append)
    menu = menu_of(tile, partial(shelf._behind, "transformer"), lambda part: shelf._take_up(tile, part))
    action = next(a for a in menu.actions() if a.text().startswith("25 kVA"))
    action.trigger()
    assert picked[-1].element.build == "centre-tapped"
    menu.deleteLater()


def test_the_menu_behind_a_corner_opens_beside_its_tile(shelf):
    tile = next(t for t in shelf.tiles if t.has_more)
    away = beside(tile) - tile.mapToGlobal(tile.rect().topLeft())
    assert tile.rect().adjusted(0, 0, 1, 1).contains(away)
