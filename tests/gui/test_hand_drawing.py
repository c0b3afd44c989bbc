"""Drawing by mouse: place, pull on, type the length as you go, drop from the shelf."""

import pytest
from hand_desk import CTRL, LEFT, NONE, SHIFT, blank, desk
from PySide6.QtCore import QMimeData, QPointF, Qt
from PySide6.QtGui import QDragEnterEvent, QDragMoveEvent, QDropEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from app.canvas.tools_keys import plain_part
from app.canvas.tools_place import PlaceTool
from app.model.kinds import Busbar, Cable, Joint, Load, Supply, Transformer
from app.model.parts import encode_part

__all__ = ["blank", "desk"]


def place(at, kind):
    at.view.place(plain_part(at.view, kind))


def test_a_busbar_is_placed_on_the_grid_where_the_hand_clicks(blank, qtbot):
    place(blank, "busbar")
    with qtbot.waitSignal(blank.view.placing_ended):
        blank.click(3.3, -2.4)
    bar = blank.drawing.elements["B1"]
    assert (bar.x, bar.y) == (3.0, -2.0)
    assert blank.last == "Place busbar B1"
    assert blank.attention.selection == {"B1"}
    assert blank.view.tool is blank.view.idle


def test_shift_keeps_the_part_in_the_hand_until_escape(blank):
    place(blank, "joint")
    blank.click(0, 0, SHIFT)
    blank.click(5, 0, SHIFT)
    blank.key(Qt.Key.Key_Escape)
    blank.click(9, 0)
    assert sorted(blank.drawing.elements) == ["J1", "J2"]
    assert blank.steps == 2


def test_a_load_snaps_onto_the_node_under_the_hand(desk):
    place(desk, "load")
    desk.click(24, 0)
    load = desk.drawing.elements["L2"]
    assert isinstance(load, Load)
    assert load.node == "J2"
    assert "J3" not in desk.drawing.elements


def test_an_attachment_is_dragged_out_from_its_node_to_where_it_stands(desk):
    place(desk, "generator")
    desk.drag((24, 0), (28, 5))
    one = desk.drawing.elements["G1"]
    assert (one.node, one.dx, one.dy) == ("J2", 4.0, 5.0)


def test_an_attachment_on_empty_paper_makes_its_own_joint(blank):
    place(blank, "supply")
    blank.click(0, 0)
    supply = blank.drawing.elements["S1"]
    assert isinstance(supply, Supply)
    assert isinstance(blank.drawing.elements[supply.node], Joint)
    assert blank.steps == 1


def test_an_attachment_let_go_on_a_line_parts_it_there(desk):
    place(desk, "load")
    desk.click(17, 0)
    load = desk.drawing.elements["L2"]
    halves = [e.length_m for e in desk.drawing.elements.values() if isinstance(e, Cable)]
    assert load.node not in ("J1", "J2")
    assert halves == pytest.approx([575.0, 575.0])
    assert desk.steps == 1


def test_a_branch_is_dragged_from_paper_to_a_node(desk):
    place(desk, "cable")
    desk.drag((24, 10), (24, 4), (24, 0))
    cable = desk.drawing.elements["C2"]
    start = desk.drawing.elements[cable.start]
    assert (start.x, start.y, cable.end) == (24.0, 10.0, "J2")
    assert desk.last == "Draw cable C2"
    assert desk.steps == 1


def test_a_branch_can_be_clicked_from_end_to_end(desk):
    place(desk, "overhead_line")
    desk.click(24, 0)
    desk.hover(20, 8)
    desk.click(20, 8)
    line = desk.drawing.elements["O1"]
    assert line.start == "J2"
    end = desk.drawing.elements[line.end]
    assert (end.x, end.y) == (20.0, 8.0)


def test_a_drag_from_the_ring_beside_a_node_draws_on_to_a_new_joint(desk):
    desk.hover(24, 0)
    desk.drag((24, 1.3), (24, 8))
    cable = desk.drawing.elements["C2"]
    assert cable.start == "J2"
    end = desk.drawing.elements[cable.end]
    assert isinstance(end, Joint)
    assert (end.x, end.y) == (24.0, 8.0)
    assert desk.attention.selection == {cable.end}
    desk.undo()
    assert "C2" not in desk.drawing.elements


def test_digits_and_units_typed_while_drawing_give_the_length(desk):
    desk.hover(24, 0)
    desk.take(24, 1.3)
    desk.pull(24, 8)
    desk.type("450 ft")
    field = desk.view.tool.field
    assert field.isVisible()
    assert field.text() == "450 ft"
    desk.let_go(24, 8)
    assert desk.drawing.elements["C2"].length_m == pytest.approx(137.16)
    assert desk.steps == 1
    assert not field.isVisible()


def test_backspace_mends_a_typed_length_and_nonsense_is_refused_and_kept_to_mend(desk):
    desk.select("J2")
    desk.key(Qt.Key.Key_X)
    desk.hover(24, 8)
    desk.type("25 parrots")
    desk.key(Qt.Key.Key_Return)
    assert len(desk.refusals) == 1
    assert "parrots" in desk.refusals[0]
    assert "C2" not in desk.drawing.elements
    for _ in " parrots":
        desk.key(Qt.Key.Key_Backspace)
    desk.key(Qt.Key.Key_Return)
    assert desk.drawing.elements["C2"].length_m == 25.0


def test_a_pull_let_go_on_a_node_connects_it_and_onto_a_line_parts_it(desk):
    desk.hover(24, 0)
    desk.drag((24, 1.3), (24, 8))
    joint = next(iter(desk.attention.selection))
    desk.hover(24, 8)
    desk.drag((24 - 1.3, 8), (17, 6), (17, 0))
    assert desk.drawing.elements["C2"].end == joint
    fresh = [e for i, e in desk.drawing.elements.items() if isinstance(e, Cable) and i not in ("C1", "C2")]
    assert {joint} & {fresh[0].start, fresh[1].start}
    assert desk.steps == 2
    desk.undo()
    assert desk.drawing.elements["C1"].length_m == 1150.0


def test_the_next_branch_keeps_the_last_ones_data_but_not_its_length(desk):
    desk.hover(24, 0)
    desk.drag((24, 1.3), (24, 8))
    desk.session.edit("Type", lambda d: _with(d, "C2", resistance_ohm_per_km=0.32, length_m=77.0, name="Run"))
    desk.hover(24, 8)
    desk.drag((24, 9.3), (24, 16))
    fresh = desk.drawing.elements["C3"]
    assert (fresh.resistance_ohm_per_km, fresh.length_m, fresh.name) == (0.32, 100.0, "")


def _with(drawing, id, **fields):
    from app.model import edits

    return edits.change(drawing, id, **fields)


def test_the_part_from_the_shelf_is_what_is_pulled_next(desk):
    place(desk, "transformer")
    desk.key(Qt.Key.Key_Escape)
    desk.hover(36, 0)
    desk.drag((36 + 1.3, 0), (46, 0))
    made = [
        e for i, e in desk.drawing.elements.items() if isinstance(e, Transformer) and i not in ("T1", "T2")
    ]
    assert len(made) == 1
    assert made[0].start == "B2"
    assert made[0].v1_v == 400.0  # its near winding suits the bar


def test_a_pull_that_ends_where_it_began_draws_nothing_and_escape_lets_go(desk):
    desk.hover(24, 0)
    desk.take(24, 1.3)
    desk.pull(24, 6)
    desk.key(Qt.Key.Key_Escape)
    desk.let_go(24, 6)
    assert desk.steps == 0
    assert desk.view.tool is desk.view.idle


def mime(part):
    data = QMimeData()
    data.setData("application/x-farend-part", encode_part(part))
    return data


def drag_in(at, data, x, y):
    action, port = Qt.DropAction.CopyAction, at.view.viewport()
    where = QPointF(at.px(x, y))
    enter = QDragEnterEvent(where.toPoint(), action, data, LEFT, NONE)
    QApplication.sendEvent(port, enter)
    if not enter.isAccepted():
        return False
    QApplication.sendEvent(port, QDragMoveEvent(where.toPoint(), action, data, LEFT, NONE))
    QApplication.sendEvent(port, QDropEvent(where, action, data, LEFT, NONE))
    return True


def test_a_part_dropped_from_the_shelf_lands_where_it_is_let_go(blank):
    assert drag_in(blank, mime(plain_part(blank.view, "busbar")), 4, 3)
    bar = blank.drawing.elements["B1"]
    assert isinstance(bar, Busbar)
    assert (bar.x, bar.y) == (4.0, 3.0)
    assert blank.view.tool is blank.view.idle


def test_a_branch_dropped_on_empty_paper_makes_the_joints_it_needs(blank):
    drag_in(blank, mime(plain_part(blank.view, "cable")), 0, 0)
    cable = blank.drawing.elements["C1"]
    assert {cable.start, cable.end} == {"J1", "J2"}
    assert blank.steps == 1


def test_a_load_dropped_on_a_node_hangs_there(desk):
    drag_in(desk, mime(plain_part(desk.view, "load")), 36, 1)
    assert desk.drawing.elements["L2"].node == "B2"


def test_damaged_or_foreign_bytes_are_refused_with_a_sentence(blank):
    data = QMimeData()
    data.setData("application/x-farend-part", b"{nonsense")
    assert not drag_in(blank, data, 0, 0)
    assert len(blank.refusals) == 1
    foreign = QMimeData()
    foreign.setText("hello")
    assert not drag_in(blank, foreign, 0, 0)
    assert blank.drawing.elements == {}


def test_the_ghost_is_painted_for_every_kind(desk):
    for kind in ("supply", "busbar", "joint", "cable", "transformer", "load", "capacitor", "switch"):
        place(desk, kind)
        desk.hover(24, 0)
        desk.hover(20, 5)
        assert isinstance(desk.view.tool, PlaceTool)
        assert not desk.view.grab().isNull()
        desk.key(Qt.Key.Key_Escape)


def test_ctrl_click_does_not_place_twice(blank):
    place(blank, "joint")
    blank.click(0, 0, CTRL)
    QTest.mouseClick(blank.view.viewport(), LEFT, NONE, blank.px(6, 6))
    assert list(blank.drawing.elements) == ["J1"]


def test_a_branch_leaves_its_node_the_way_it_was_pulled(desk):
    desk.hover(24, 0)
    desk.drag((24, 1.3), (28, 6), (30, 8))
    assert desk.drawing.elements["C2"].via == ((24.0, 8.0),)
    desk.undo()
    desk.hover(24, 0)
    desk.drag((24 - 1.3, 0), (20, 6), (18, 8))
    assert desk.drawing.elements["C2"].via == ()


def test_a_typed_length_is_confirmed_and_the_next_one_is_not(desk):
    desk.hover(24, 0)
    desk.take(24, 1.3)
    desk.pull(24, 8)
    desk.type("60")
    desk.let_go(24, 8)
    desk.hover(24, 8)
    desk.drag((24, 9.3), (24, 16))
    first, second = (desk.drawing.elements[i] for i in ("C2", "C3"))
    assert (first.length_m, "length_m" in first.assumed) == (60.0, False)
    assert (second.length_m, "length_m" in second.assumed) == (100.0, True)
    assert "resistance_ohm_per_km" in first.assumed
