"""The loss tape: its cut, its sentence, hover, click and keys."""

import pytest
from panels_stage import ONE, fernhollow, stage
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from app.model import edits
from app.model.kinds import Generator, Load
from app.panels.tape_cut import FACTORS, cut


@pytest.fixture
def set_up(qtbot):
    made = stage(qtbot, fernhollow(ONE))
    yield made
    made.solving.stop()


def piece(tape, what, id):
    return next(p for p in tape.cut.pieces if p.what == what and p.ids == (id,))


def test_the_pieces_are_all_the_power_and_to_scale(set_up):
    made, balance = set_up.tape.cut, set_up.solving.outcome.balance
    loads, losses = sum(p.kw for p in made.bar), sum(p.kw for p in made.losses)
    assert loads == pytest.approx(balance.load_kw[0], rel=1e-9)
    assert losses == pytest.approx(balance.loss_kw[0], rel=1e-9)
    assert made.factor in FACTORS
    house, lodge = made.bar
    assert (house.width + 2) / (lodge.width + 2) == pytest.approx(house.kw / lodge.kw, rel=1e-6)
    t2 = piece(set_up.tape, "copper", "T2")
    assert (t2.width + 2) / (house.width + 2) == pytest.approx(made.factor * t2.kw / house.kw, rel=1e-6)
    assert made.thread[1] == pytest.approx(losses / house.kw * (house.width + 2), rel=1e-6)
    assert made.pieces[-1].left + made.pieces[-1].width <= set_up.tape.width() - 36 + 1e-6


def test_the_sentence_is_the_balance(set_up):
    balance = set_up.solving.outcome.balance
    words = set_up.tape.sentence()
    assert words.startswith(f"supply {balance.supply_kw[0]:.2f} kW = loads {balance.load_kw[0]:.2f} + lost ")
    assert "closes to" in words


def test_hover_lights_the_branch_and_click_selects(set_up):
    tape = set_up.tape
    spot = tape.rect_of(piece(tape, "copper", "T2")).center().toPoint()
    QTest.mouseMove(tape, spot)
    assert set_up.attention.hover == "T2"
    assert "copper loss" in tape.toolTip()
    QTest.mouseClick(tape, Qt.MouseButton.LeftButton, pos=spot)
    assert set_up.attention.selection == {"T2"}


def test_arrow_keys_walk_and_enter_selects(set_up):
    tape = set_up.tape
    tape.setFocus()
    QTest.keyClick(tape, Qt.Key.Key_Right)
    assert set_up.attention.hover == "L2"
    QTest.keyClick(tape, Qt.Key.Key_Right)
    QTest.keyClick(tape, Qt.Key.Key_Right)
    assert set_up.attention.hover == "T2"
    QTest.keyClick(tape, Qt.Key.Key_Return)
    assert set_up.attention.selection == {"T2"}


def test_small_pieces_are_joined(set_up):
    many = {f"L{k}": Load(node="B1", demand_kva=0.2) for k in range(10, 40)}
    set_up.session.edit("Loads", lambda d: edits.put(d, many))
    set_up.solving.settle()
    others = next(p for p in set_up.tape.cut.bar if len(p.ids) > 1)
    assert others.name == "others 30"
    QTest.mouseClick(
        set_up.tape, Qt.MouseButton.LeftButton, pos=set_up.tape.rect_of(others).center().toPoint()
    )
    assert set_up.attention.selection == set(many)


def test_generation_is_shown_as_infeed_and_export_as_load(set_up):
    set_up.session.edit("Roof", lambda d: edits.put(d, {"G1": Generator(node="B1", output_kw=40.0)}))
    set_up.solving.settle()
    assert "+ infeed 40.00 kW =" in set_up.tape.sentence()
    assert [p.what for p in set_up.tape.cut.feeds] == ["feed", "infeed"]
    set_up.session.edit("Roof", lambda d: edits.change(d, "G1", output_kw=200.0))
    set_up.solving.settle()
    assert set_up.tape.sentence().startswith("infeed 200.00 kW = back to the supply ")
    assert set_up.tape.cut.bar[-1].what == "export"


def test_the_change_shows_while_dragging(set_up):
    set_up.solving.begin_drag()
    set_up.session.edit("Tap", lambda d: edits.set_tap(d, "T2", 1))
    set_up.solving.settle()
    assert set_up.tape.moved().startswith("lost ▲")
    assert "▲" in dict((n, m) for n, _f, m in set_up.head.totals.figures())["Lost"]
    set_up.solving.end_drag()
    assert set_up.tape.moved() == ""


def test_nothing_to_cut_without_power(set_up):
    drawing = fernhollow(ONE)
    assert cut(drawing, set_up.solving.outcome, 0, 50).pieces == ()
