"""The voltage strip by real mouse and keys."""

import pytest
from panels_stage import ONE, TWO, fernhollow, stage
from PySide6.QtCore import QPoint, QPointF, QRectF, Qt
from PySide6.QtTest import QTest

from app.model.drawing import Drawing
from app.model.kinds import Busbar, Cable, Load, Supply, Transformer
from app.panels.strip_axes import ticks_m
from app.panels.strip_paint import passes
from app.panels.strip_routes import routes


@pytest.fixture
def set_up(qtbot):
    made = stage(qtbot, fernhollow(ONE))
    yield made
    made.solving.stop()


def at(point: QPointF, dy: float = 0.0) -> QPoint:
    return QPoint(round(point.x()), round(point.y() + dy))


def drag(strip, start: QPointF, dy: float, steps: int = 6) -> None:
    QTest.mousePress(strip, Qt.MouseButton.LeftButton, pos=at(start))
    for k in range(1, steps + 1):
        QTest.mouseMove(strip, at(start, dy * k / steps))


def px_of_a_notch(strip) -> float:
    return max(2.5 * strip.axes.px_per_percent, 7.0)


def test_dragging_the_step_up_raises_the_volts_in_one_undo_step(set_up):
    strip, history = set_up.strip, set_up.session.history
    before = set_up.solving.outcome.nodes.at("B2").voltage_v
    start = strip.handle_of("T2")
    drag(strip, start, -px_of_a_notch(strip))
    set_up.solving.settle()
    assert set_up.drawing.elements["T2"].tap == -2
    assert set_up.solving.outcome.nodes.at("B2").voltage_v > before
    assert set_up.solving.reference is not None
    assert set_up.attention.selection == {"T2"}
    QTest.mouseRelease(strip, Qt.MouseButton.LeftButton, pos=at(start, -20))
    assert set_up.solving.reference is None
    assert history.count() == 1
    assert history.undoText() == "Tap of T2 to −5 %"
    history.undo()
    assert set_up.drawing.elements["T2"].tap == -1


def test_the_dot_follows_the_hand(set_up):
    strip = set_up.strip
    start = strip.handle_of("T2")
    drag(strip, start, 2 * px_of_a_notch(strip))
    set_up.solving.settle()
    assert set_up.drawing.elements["T2"].tap == 1
    moved = strip.handle_of("T2").y() - start.y()
    assert moved == pytest.approx(2 * px_of_a_notch(strip), rel=0.25)
    QTest.mouseRelease(strip, Qt.MouseButton.LeftButton, pos=at(start))


def test_a_drag_stops_at_the_end_of_the_taps(set_up):
    strip = set_up.strip
    start = strip.handle_of("T2")
    drag(strip, start, 40 * px_of_a_notch(strip))
    QTest.mouseRelease(strip, Qt.MouseButton.LeftButton, pos=at(start, 9))
    assert set_up.drawing.elements["T2"].tap == 2


def test_taps_on_the_winding_that_is_fed_through_move_the_other_way(set_up):
    """T1 is tapped on winding 2, its fed side is winding 1: up is a higher notch."""
    strip = set_up.strip
    start = strip.handle_of("T1")
    drag(strip, start, -px_of_a_notch(strip))
    QTest.mouseRelease(strip, Qt.MouseButton.LeftButton, pos=at(start))
    assert set_up.drawing.elements["T1"].tap == 1


def test_esc_puts_the_tap_back_and_leaves_no_trace(set_up):
    strip = set_up.strip
    start = strip.handle_of("T2")
    drag(strip, start, 2 * px_of_a_notch(strip))
    QTest.keyClick(strip, Qt.Key.Key_Escape)
    assert set_up.drawing.elements["T2"].tap == -1
    assert set_up.session.history.count() == 0
    QTest.mouseRelease(strip, Qt.MouseButton.LeftButton, pos=at(start))
    assert set_up.drawing.elements["T2"].tap == -1


def test_keys_move_the_chosen_step(set_up):
    strip = set_up.strip
    strip.setFocus()
    set_up.attention.select(("T2",))
    QTest.keyClick(strip, Qt.Key.Key_Down)
    assert set_up.drawing.elements["T2"].tap == 0
    QTest.keyClick(strip, Qt.Key.Key_Left)
    assert set_up.attention.selection == {"T1"}
    QTest.keyClick(strip, Qt.Key.Key_Up)
    assert set_up.drawing.elements["T1"].tap == 1


def test_hover_and_click_share_attention(set_up):
    strip = set_up.strip
    spot = strip.curves[0].nodes["B2"]
    QTest.mouseMove(strip, at(spot))
    assert set_up.attention.hover == "B2"
    assert "HS" in strip.toolTip()
    QTest.mouseClick(strip, Qt.MouseButton.LeftButton, pos=at(spot))
    assert set_up.attention.selection == {"B2"}
    a, b = next(s.points for s in strip.curves[0].stretches if s.branch == "C1")
    QTest.mouseMove(strip, at((a + b) / 2))
    assert set_up.attention.hover == "C1"


def test_nodes_lie_at_their_percent_and_route(set_up):
    strip, nodes = set_up.strip, set_up.solving.outcome.nodes
    spots = strip.curves[0].nodes
    for id, spot in spots.items():
        assert spot.y() == pytest.approx(strip.axes.y(nodes.at(id).percent))
    assert spots["B1"].x() < spots["J1"].x() < spots["J2"].x() < spots["B2"].x()
    assert strip.routes.main == ("B1", "J1", "J2", "B2")


def test_every_case_has_a_curve(qtbot):
    made = stage(qtbot, fernhollow(TWO))
    assert [c.name for c in made.strip.curves] == [c.name for c in TWO]
    made.attention.show_case(1)
    assert made.strip.case == 1
    made.solving.stop()


def test_the_main_route_leads_through_what_is_selected(qtbot):
    side = Cable(start="B1", end="B3", length_m=50.0)
    drawing = fernhollow(ONE, C2=side, B3=Busbar(x=0, y=20, name="Side"), L3=Load(node="B3"))
    made = stage(qtbot, drawing)
    outcome = made.solving.outcome
    assert routes(drawing, outcome, 0, ()).main[-1] == "B2"
    assert routes(drawing, outcome, 0, ("C2",)).main == ("B1", "B3")
    assert routes(drawing, outcome, 0, ("L3",)).main == ("B1", "B3")
    made.solving.stop()


def test_ticks_are_round_and_reach_the_end():
    assert ticks_m(1150, 800) == [0, 200, 400, 600, 800, 1000]
    assert ticks_m(0, 800) == []
    assert ticks_m(90, 300)[1] == 50


def test_an_empty_drawing_says_what_to_do(qtbot):
    from app.model.drawing import Drawing

    made = stage(qtbot, Drawing())
    assert made.strip.axes is None or not made.strip.routes.stops
    assert "supply" in made.strip._why_empty()
    made.strip.grab()
    made.solving.stop()


def ring() -> Drawing:
    """Two transformers side by side into a ring of three boards."""
    twin = Transformer(start="B1", end="B2", load_loss_w=1250, no_load_loss_w=130, tap=1)
    return Drawing(
        elements={
            "S1": Supply(node="B1", nominal_v=11000.0), "B1": Busbar(name="HV"), "B2": Busbar(name="LV"),
            "T1": Transformer(start="B1", end="B2", load_loss_w=1250, no_load_loss_w=130), "T2": twin,
            "B3": Busbar(name="West"), "B4": Busbar(name="East"),
            "C1": Cable(start="B2", end="B3", length_m=90.0),
            "C2": Cable(start="B2", end="B4", length_m=150.0),
            "C3": Cable(start="B4", end="B3", length_m=200.0), "L1": Load(node="B3", demand_kva=90.0),
        }
    )  # fmt: skip


def test_a_branch_that_closes_a_ring_runs_between_the_spots_of_both_its_nodes(qtbot):
    strip = (made := stage(qtbot, ring())).strip
    stretches = {s.branch: s for s in strip.curves[0].stretches}
    assert stretches.keys() == {"T1", "T2", "C1", "C2", "C3"}
    spots = strip.curves[0].nodes
    assert stretches["C3"].points == (spots["B3"], spots["B4"])
    middle = (spots["B3"] + spots["B4"]) / 2
    QTest.mouseClick(strip, Qt.MouseButton.LeftButton, pos=at(middle))
    assert made.attention.selection == {"C3"}
    assert strip.routes.main == ("B1", "B2", "B4")
    made.solving.stop()


def test_transformers_side_by_side_have_a_handle_each(qtbot):
    strip = (made := stage(qtbot, ring())).strip
    first, second = strip.handle_of("T1"), strip.handle_of("T2")
    assert abs(first.x() - second.x()) > 10
    drag(strip, second, px_of_a_notch(strip))
    QTest.mouseRelease(strip, Qt.MouseButton.LeftButton, pos=at(second, 20))
    assert made.drawing.elements["T1"].tap == 0
    assert made.drawing.elements["T2"].tap == 2
    made.solving.stop()


def test_a_drawing_of_trees_has_no_ties(set_up):
    assert set_up.strip.routes.ties == ()


@pytest.mark.parametrize(
    ("a", "b", "through"),
    [
        ((0, 0), (100, 50), True),  # through the middle
        ((0, 30), (100, 80), False),  # below, though its box holds the room
        ((0, 20), (39, 20), False),  # ends before it
        ((50, 0), (50, 100), True),  # a step
        ((50, 40), (50, 100), False),
        ((100, 50), (0, 0), True),  # the other way
    ],
)
def test_a_name_minds_the_line_itself_and_not_the_box_around_it(a, b, through):
    assert passes(QPointF(*a), QPointF(*b), QRectF(40, 15, 20, 14)) is through
