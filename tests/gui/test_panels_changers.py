"""Regulators and tap changers on card and board: fields by real keys, where each stands, their words."""

import pytest
from hand_desk import desk, pair
from msgspec.structs import replace
from panels_stage import ONE, fernhollow, stage, type_text
from phase_drawings import camp
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from app.canvas.symbols import glyph_of
from app.canvas.wording import branch_figures, describe, step_of
from app.model import edits
from app.model.kinds import Generator, Joint, Load, Motor, Regulator, Transformer
from app.study import run

__all__ = ["desk"]


@pytest.fixture
def set_up(qtbot):
    made = stage(qtbot, fernhollow(ONE))
    fresh = {
        "J9": Joint(x=52, y=0),
        "V1": Regulator(start="B2", end="J9", hold_percent=103.0, rating_a=200.0),
        "L9": Load(node="J9", demand_kva=5.0),
    }
    made.session.edit("Lane", lambda d: edits.put(d, fresh))
    made.attention.select(("V1",))
    yield made
    made.solving.stop()


def cells(set_up):
    return {row.label: row.cells for row in set_up.card.now.rows}


def test_the_card_tells_where_a_regulator_stands(set_up, qtbot):
    qtbot.waitUntil(lambda: "Stands at" in cells(set_up))
    told = cells(set_up)
    notch = int(run(set_up.drawing).branches.at("V1").notch)
    assert notch > 0
    assert told["Stands at"][0].startswith(f"+{notch} (+")
    assert {"Volts, start", "Volts, end", "Current", "Loading"} <= set(told)


def test_its_setting_is_typed_and_undone(set_up):
    row = set_up.card._page.rows["hold_percent"]
    QTest.mouseClick(row.editor, Qt.MouseButton.LeftButton)
    row.editor.selectAll()
    type_text(row.editor, "101,5")
    QTest.keyClick(row.editor, Qt.Key.Key_Return)
    assert set_up.drawing.elements["V1"].hold_percent == 101.5
    set_up.session.history.undo()
    assert set_up.drawing.elements["V1"].hold_percent == 103.0


def test_a_transformer_that_steps_says_so_on_card_and_board(set_up, qtbot):
    stepping = replace(set_up.drawing.elements["T2"], regulates="winding 2")
    set_up.session.edit("Step", lambda d: edits.put(d, {"T2": stepping}))
    set_up.attention.select(("T2",))
    qtbot.waitUntil(lambda: "Stands at" in cells(set_up))
    state = run(set_up.drawing).branches.at("T2")
    *_, last = branch_figures(0.0, state, None, False, step_of(stepping))
    assert last[0].text.startswith("stands at ")
    assert describe(stepping)[-1] == "holds 100 % at winding 2"


def test_words_and_symbols():
    assert describe(Regulator(start="", end="")) == ("holds 100 %, ±10 %",)
    assert describe(Generator(node="", output_kw=20.0, hold_percent=101.0)) == ("20 kW, holds 101 %",)
    still = Transformer(start="", end="")
    moving = replace(still, regulates="winding 1")
    for symbols in ("IEC", "ANSI"):
        assert glyph_of(still, symbols).strokes != glyph_of(moving, symbols).strokes
    assert step_of(still) is None


def test_a_tap_that_steps_by_itself_has_no_ladder_to_drag(desk):
    assert "T2" in pair().elements
    desk.select("T2")
    assert desk.board.ladder_of("T2") is not None
    moving = replace(desk.drawing.elements["T2"], regulates="winding 2")
    desk.session.edit("Step", lambda d: edits.put(d, {"T2": moving}))
    assert desk.board.ladder_of("T2") is None
    desk.undo()
    assert desk.board.ladder_of("T2") is not None


def test_motor_and_regulator_are_drawn_by_their_keys(desk):
    desk.select("J2")
    desk.key(Qt.Key.Key_M)
    motor = next(e for e in desk.drawing.elements.values() if isinstance(e, Motor))
    assert motor.node == "J2"
    desk.key(Qt.Key.Key_Escape)
    desk.select("J2")
    desk.key(Qt.Key.Key_V)
    for _ in range(6):
        desk.key(Qt.Key.Key_Up)
    desk.key(Qt.Key.Key_Return)
    made = [e for e in desk.drawing.elements.values() if isinstance(e, Regulator)]
    assert [e.start for e in made] == ["J2"]
    assert run(desk.drawing).branches.at(next(iter(_ids(desk, Regulator)))).live


def _ids(desk, kind):
    return [i for i, e in desk.drawing.elements.items() if isinstance(e, kind)]


def test_a_regulator_whose_phases_step_by_themselves_tells_each(qtbot):
    camped = camp()
    lane = {
        "J9": Joint(x=52, y=0),
        "V1": Regulator(start="LODGE", end="J9", measures="each", bandwidth_percent=2.0),
        "L9": Load(node="J9", demand_kva=3.0),
    }
    made = stage(qtbot, edits.put(camped, lane))
    made.attention.select(("V1",))
    qtbot.waitUntil(lambda: "Stands at, A" in cells(made))
    outcome = run(made.drawing)
    state = outcome.wires.branches.at("V1")
    assert state.a_notch != state.c_notch
    assert cells(made)["Stands at, A"][0].startswith(f"+{int(state.a_notch)} (+")
    assert {"Stands at, B", "Stands at, C"} <= set(cells(made))
    lines = branch_figures(0.0, outcome.branches.at("V1"), None, True, 0.625, (state, "ABC", "three-phase"))
    assert f"A +{int(state.a_notch)} · B" in "".join(run_.text for line in lines for run_ in line)
    made.solving.stop()
