"""The tap is dragged, turned and keyed; the figures are those of a study of what comes of it."""

import pytest
from board_drawings import by_hand
from hand_desk import CTRL, Desk, desk, pair
from msgspec.structs import replace
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from app import study
from app.canvas.ladder import EDGE, RAIL_X
from app.model.drawing import Drawing
from app.model.kinds import Busbar, Joint, Load, Transformer

__all__ = ["desk"]
LEFT, NONE = Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier


def spot(desk: Desk, notch: int, id: str = "T2") -> QPoint:
    """Where a notch of the ladder is in the viewport."""
    ladder = desk.board.ladder_of(id)
    assert ladder is not None
    at = ladder.mapToScene(RAIL_X, EDGE + ladder.notches.y(notch))
    return desk.view.mapFromScene(at)


def grasp(desk, notch):
    port = desk.view.viewport()
    QTest.mouseMove(port, spot(desk, notch))
    QTest.mousePress(port, LEFT, NONE, spot(desk, notch))


def slide(desk, *notches):
    for notch in notches:
        QTest.mouseMove(desk.view.viewport(), spot(desk, notch))
        QApplication.processEvents()


def drop(desk, notch):
    QTest.mouseRelease(desk.view.viewport(), LEFT, NONE, spot(desk, notch))


def tap(desk, id="T2"):
    one = desk.drawing.elements[id]
    assert isinstance(one, Transformer)
    return one.tap


@pytest.fixture
def at_t2(desk):
    desk.select("T2")
    desk.solving.settle()
    return desk


def test_a_drag_over_notches_is_one_step_and_equals_a_study_of_the_drawing(at_t2):
    desk = at_t2
    grasp(desk, 0)
    slide(desk, 1, 0, -1, -2)
    drop(desk, -2)
    assert tap(desk) == -2
    assert desk.steps == 1
    assert desk.last == "Tap of T2 to −5 %"
    desk.solving.settle()
    alone = study.run(desk.drawing)
    for table in ("nodes", "branches", "attachments"):
        live, fresh = getattr(desk.solving.outcome, table), getattr(alone, table)
        assert live.ids == fresh.ids
        for name, column in fresh.columns.items():
            assert live.columns[name].tobytes() == column.tobytes(), (table, name)
    assert desk.solving.outcome.balance.loss_kw.tobytes() == alone.balance.loss_kw.tobytes()
    desk.undo()
    assert desk.drawing == pair()


def test_the_change_is_shown_while_dragging_and_goes_with_the_hand(at_t2):
    desk = at_t2
    before = desk.solving.outcome
    grasp(desk, 0)
    slide(desk, -1)
    desk.solving.settle_solve()
    assert desk.solving.reference is before
    assert desk.solving.outcome is not before
    drop(desk, -1)
    assert desk.solving.reference is None


def test_dragging_back_leaves_nothing_to_undo(at_t2):
    grasp(at_t2, 0)
    slide(at_t2, -1, -2, -1, 0)
    drop(at_t2, 0)
    assert at_t2.steps == 0
    assert at_t2.session.history.isClean()


def test_the_rung_stops_at_the_ends(at_t2):
    grasp(at_t2, 0)
    slide(at_t2, 40)
    drop(at_t2, 40)
    assert tap(at_t2) == 2
    assert at_t2.refusals == []


def test_a_click_on_a_notch_goes_there(at_t2):
    grasp(at_t2, -2)
    drop(at_t2, -2)
    assert tap(at_t2) == -2
    assert at_t2.steps == 1


def test_the_ladder_says_volts_percent_and_effect(at_t2):
    ladder = at_t2.board.ladder_of("T2")
    assert ladder.words(-1) == "10\N{NARROW NO-BREAK SPACE}725 V −2.5 %"
    assert ladder.effect(-1) == "raises HS"
    assert ladder.effect(2) == "lowers HS"
    assert ladder.toolTip().startswith("T2, tap 0 %: 11000/400; least loss at")


def test_on_the_step_up_unit_the_same_sign_acts_the_other_way(desk):
    desk.select("T1")
    desk.solving.settle()
    ladder = desk.board.ladder_of("T1")
    assert ladder.effect(1) == "raises J1"
    before = desk.solving.outcome.nodes.at("J1").voltage_v
    desk.key(Qt.Key.Key_Up)
    desk.solving.settle()
    assert desk.solving.outcome.nodes.at("J1").voltage_v > before


def test_a_unit_fed_from_winding_2_says_what_happens_at_winding_1(qtbot):
    drawing = pair()
    t2 = drawing.elements["T2"]
    assert isinstance(t2, Transformer)
    turned = replace(t2, start="B2", end="J2", v1_v=400.0, v2_v=11000.0, vector_group="YNd11")
    desk = Desk(replace(drawing, elements={**drawing.elements, "T2": turned}))
    qtbot.addWidget(desk.view)
    desk.select("T2")
    desk.solving.settle()
    before = desk.solving.outcome.nodes.at("B2").voltage_v
    said = desk.board.ladder_of("T2").effect(1)
    desk.key(Qt.Key.Key_Up)
    desk.solving.settle()
    assert said == "raises HS"
    assert desk.solving.outcome.nodes.at("B2").voltage_v > before
    desk.solving.stop()


def test_the_wheel_turns_it_and_a_burst_is_one_step(at_t2, qtbot):
    desk = at_t2
    desk.wheel(spot(desk, 0), -1)
    desk.wheel(spot(desk, 0), -1)
    assert tap(desk) == -2
    assert desk.steps == 1
    qtbot.waitUntil(lambda: desk.solving.reference is None)
    desk.wheel(spot(desk, 0), 1)
    assert tap(desk) == -1
    assert desk.steps == 2
    desk.board.ladder_of("T2").hold.let_go()


def test_ctrl_and_wheel_over_the_ladder_still_zooms(at_t2):
    before = at_t2.view.scale_now()
    at_t2.wheel(spot(at_t2, 0), 1, CTRL)
    assert tap(at_t2) == 0
    assert at_t2.view.scale_now() > before


def test_keys_move_it_a_notch_and_home_takes_it_to_the_middle(at_t2):
    desk = at_t2
    desk.key(Qt.Key.Key_Down)
    desk.key(Qt.Key.Key_Down)
    assert tap(desk) == -2
    assert desk.steps == 2
    desk.key(Qt.Key.Key_Home)
    assert tap(desk) == 0
    assert desk.steps == 3
    desk.undo()
    assert tap(desk) == -2
    assert desk.solving.reference is None


def test_escape_during_a_drag_puts_it_back(at_t2):
    desk = at_t2
    grasp(desk, 0)
    slide(desk, -2)
    assert tap(desk) == -2
    desk.key(Qt.Key.Key_Escape)
    assert tap(desk) == 0
    assert desk.steps == 0
    drop(desk, -2)
    assert tap(desk) == 0


def test_no_ladder_where_there_is_one_notch_only(qtbot):
    drawing = pair()
    t2 = drawing.elements["T2"]
    assert isinstance(t2, Transformer)
    desk = Desk(Drawing(elements={**drawing.elements, "T2": replace(t2, taps_up=0, taps_down=0)}))
    qtbot.addWidget(desk.view)
    desk.select("T2")
    assert not desk.board.ladder_of("T2").isVisible()
    desk.key(Qt.Key.Key_Down)
    assert tap(desk) == 0
    desk.solving.stop()


def test_the_curve_marks_the_notch_of_least_loss_that_holds(at_t2):
    prospect = at_t2.board.ladder_of("T2").prospect
    losses = []
    for notch in range(-2, 3):
        t2 = replace(at_t2.drawing.elements["T2"], tap=notch)
        outcome = study.run(replace(at_t2.drawing, elements={**at_t2.drawing.elements, "T2": t2}))
        losses.append(float(outcome.balance.loss_kw[0]))
        assert prospect.loss(notch) == pytest.approx(losses[-1], rel=1e-9)
    held = [n for n in range(-2, 3) if prospect.holding(n)]
    assert prospect.best == min(held, key=lambda n: losses[n + 2])


def spots(desk):
    return {(sort, i): b.spot for sort in ("captions", "tags") for i, b in getattr(desk.board, sort).items()}


def test_selecting_moves_no_words(qtbot):
    desk = Desk(by_hand())
    qtbot.addWidget(desk.view)
    before = spots(desk)
    for id in desk.drawing.elements:
        desk.select(id)
        desk.solving.settle()
        desk.board.write_rest()
        assert spots(desk) == before, id
    desk.solving.stop()


@pytest.mark.parametrize("far", [6.0, 8.0, 10.0])
def test_a_ladder_covers_no_symbol_and_no_bar_and_lets_clicks_through(qtbot, far):
    crowd = {f"B{k}": Busbar(x=far + 4.0 * k, y=-1.0, length=10.0, name=f"Bar {k}") for k in (1, 2, 3)}
    crowd |= {"J9": Joint(x=0.0), "T9": Transformer(start="J9", end="B1")}
    crowd |= {f"L{k}": Load(node="J9", dx=1.0 + 3 * k, dy=-7.0) for k in range(3)}
    desk = Desk(Drawing(elements=crowd))
    qtbot.addWidget(desk.view)
    desk.select("T9")
    desk.solving.settle()
    ladder = desk.board.ladder_of("T9")
    box = ladder.sceneBoundingRect()
    for id, item in desk.board.items_by_id.items():
        assert not box.intersects(item.core()), id
    ladder.setPos(desk.board.item_of("B2").core().center() - QPointF(RAIL_X + 60, 40))
    where = desk.board.item_of("B2").core().center()
    port = desk.view.viewport()
    QTest.mouseMove(port, desk.view.mapFromScene(where))
    QTest.mouseClick(port, LEFT, NONE, desk.view.mapFromScene(where))
    assert tap(desk, "T9") == 0
    assert desk.steps == 0
    assert desk.attention.selection == {"B2"}
    desk.solving.stop()
