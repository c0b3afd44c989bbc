"""A person draws Fernhollow's 11 kV pair from nothing in the real window, drags a tap, hands over the sheet.

Real mouse and keys throughout; the figures on screen are those of the headless path, to the last bit.
"""

import json

import openpyxl
import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from app import commands, study
from app.canvas.geometry import GRID
from app.canvas.ladder import EDGE, RAIL_X
from app.live.preferences import Preferences
from app.model.file import load
from app.panels.element_page import ElementPage
from app.panels.tile import Tile
from app.window import Window

LEFT, NONE = Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier


class Recorder:
    """Stands where the desktop's dialogs would: answers for the person, remembers what was said."""

    def __init__(self, folder) -> None:
        self.folder, self.said = folder, []
        self.path = folder / "drawn.farend"

    def file_to_open(self, folder):
        return self.path

    def file_to_write(self, title, suggestion, kinds):
        return self.path

    def keep_changes(self, name):
        return "discard"

    def agree(self, question):
        return False

    def recovery(self, title):
        return "keep"

    def tell(self, sentence):
        self.said.append(sentence)


class Person:
    """Mouse and keys on the real window."""

    def __init__(self, window: Window) -> None:
        self.window, self.view = window, window.view

    @property
    def drawing(self):
        return self.window.session.drawing

    def px(self, x: float, y: float) -> QPoint:
        return self.view.mapFromScene(QPointF(x * GRID, y * GRID))

    def move(self, px: QPoint) -> None:
        QTest.mouseMove(self.view.viewport(), px)
        QApplication.processEvents()

    def pick(self, kind: str) -> None:
        tile = next(t for t in self.window.shelf.findChildren(Tile) if t.part.name.lower() == kind)
        QTest.mouseClick(tile, LEFT)

    def put(self, kind: str, x: float, y: float) -> str:
        known = set(self.drawing.elements)
        self.pick(kind)
        self.move(self.px(x, y))
        QTest.mouseClick(self.view.viewport(), LEFT, NONE, self.px(x, y))
        return self.new(known)

    def pull(self, kind: str, start: tuple[float, float], end: tuple[float, float]) -> str:
        known = set(self.drawing.elements)
        self.pick(kind)
        self.drag(self.px(*start), self.px(*end))
        return self.new(known)

    def drag(self, start: QPoint, *stops: QPoint) -> None:
        self.move(start)
        QTest.mousePress(self.view.viewport(), LEFT, NONE, start)
        for stop in stops:
            self.move(stop - QPoint(3, 3))
            self.move(stop)
        QTest.mouseRelease(self.view.viewport(), LEFT, NONE, stops[-1])

    def notch(self, id: str, notch: int) -> QPoint:
        ladder = self.window.board.ladder_of(id)
        return self.view.mapFromScene(ladder.mapToScene(RAIL_X, EDGE + ladder.notches.y(notch)))

    def click(self, x: float, y: float) -> None:
        self.move(self.px(x, y))
        QTest.mouseClick(self.view.viewport(), LEFT, NONE, self.px(x, y))
        QApplication.processEvents()

    def new(self, known: set[str]) -> str:
        made = [i for i in self.drawing.elements if i not in known]
        branches = [i for i in made if i in self.drawing.branches()]
        return (branches or [i for i in made if i in self.drawing.attachments()] or made)[0]

    def fill(self, id: str, **values: str) -> None:
        self.window.attention.select([id])
        page = self.window.card._page
        assert isinstance(page, ElementPage)
        for field, typed in values.items():
            editor = page.rows[field].editor
            QTest.mouseClick(editor, LEFT)
            editor.selectAll()
            QTest.keyClicks(editor, typed)
            QTest.keyClick(editor, Qt.Key.Key_Return)

    def rename(self, id: str, name: str) -> None:
        self.window.attention.select([id])
        self.view.setFocus()
        QTest.keyClick(self.view, Qt.Key.Key_F2)
        field = QApplication.focusWidget()
        field.selectAll()
        QTest.keyClicks(field, name)
        QTest.keyClick(field, Qt.Key.Key_Return)


@pytest.fixture
def person(qtbot, tmp_path):
    window = Window(Preferences(tmp_path / "likes.ini"), tmp_path / "recovery")
    window.menus.dialogs = Recorder(tmp_path)
    window.resize(1440, 900)
    qtbot.addWidget(window, before_close_func=lambda w: w.session.history.setClean())
    window.show()
    QApplication.processEvents()
    made = Person(window)
    made.view.resetTransform()
    made.view.centerOn(20 * GRID, 0)
    QApplication.processEvents()
    return made


def draw_fernhollow(person: Person) -> None:
    gh = person.put("busbar", 0, 0)
    hs = person.put("busbar", 40, 0)
    supply = person.put("supply", 0, 0)
    t1 = person.pull("transformer", (0, 0), (12, 0))
    c1 = person.pull("cable", (12, 0), (28, 0))
    t2 = person.pull("transformer", (28, 0), (40, 0))
    house = person.put("load", 40, 0)
    lodge = person.put("load", 0, 0)
    for id, name in ((gh, "GH"), (hs, "HS"), (house, "House"), (lodge, "Lodge")):
        person.rename(id, name)
    person.fill(supply, held_percent="97")
    person.fill(t1, rating_kva="160", load_loss_w="1750", no_load_loss_w="189", no_load_current_percent="0.7")
    person.fill(
        c1, length_m="1.15 km", resistance_ohm_per_km="0.868", reactance_ohm_per_km="0.126",
        capacitance_uf_per_km="0.19",
        temperature_degc="60", rating_a="120",
    )  # fmt: skip
    person.fill(t2, rating_kva="100", load_loss_w="1250", no_load_loss_w="130", no_load_current_percent="0.8")
    person.fill(house, demand_kva="80", power_factor="0.95")
    person.fill(lodge, demand_kva="12", power_factor="0.95")
    person.window.solving.settle()


def test_fernhollow_from_nothing_to_the_sheet(person, tmp_path, capsys):
    draw_fernhollow(person)
    window = person.window
    drawing = person.drawing
    assert [(t.v1_v, t.v2_v) for t in (drawing.elements["T1"], drawing.elements["T2"])] == [
        (400.0, 11000.0),
        (11000.0, 400.0),
    ]
    before = window.solving.outcome
    assert before.status.name == "SOLVED"

    steps = window.session.history.count()
    person.click(34, 0)
    assert window.attention.selection == {"T2"}
    person.drag(person.notch("T2", 0), person.notch("T2", -1))
    window.solving.settle()
    assert person.drawing.elements["T2"].tap == -1
    assert window.session.history.count() == steps + 1
    hs = next(i for i, n in person.drawing.nodes().items() if n.name == "HS")
    assert window.solving.outcome.nodes.at(hs).voltage_v > before.nodes.at(hs).voltage_v

    window.session.history.undo()
    window.solving.settle()
    assert person.drawing == drawing
    assert window.solving.outcome.nodes.at(hs) == before.nodes.at(hs)
    window.session.history.redo()
    window.solving.settle()

    window.menus.save_as()
    assert not window.document.modified
    path = tmp_path / "drawn.farend"
    assert load(path) == person.drawing
    window.menus.new()
    assert not person.drawing.elements
    window.menus.open()
    window.solving.settle()
    assert person.drawing == load(path)

    window.menus.dialogs.path = tmp_path / "drawn.xlsx"
    window.menus.export_sheet()
    assert openpyxl.load_workbook(tmp_path / "drawn.xlsx").sheetnames
    assert window.menus.dialogs.said == []
    window_equals_headless(window, path, capsys)


def window_equals_headless(window: Window, path, capsys) -> None:
    outcome = study.run(load(path))
    shown = window.solving.outcome
    for mine, theirs in ((shown.nodes, outcome.nodes), (shown.branches, outcome.branches)):
        for name, column in theirs.columns.items():
            assert mine.columns[name].tobytes() == column.tobytes(), name
    capsys.readouterr()
    code = commands.command("results", [str(path), "--json"])
    told = json.loads(capsys.readouterr().out)
    assert code in (0, 1)
    assert told["status"]
