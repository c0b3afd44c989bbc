"""Selecting, moving, rerouting, reconnecting by mouse."""

from hand_desk import CTRL, SHIFT, blank, desk, pair
from msgspec.structs import replace
from PySide6.QtCore import QPointF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QLineEdit

from app.canvas import tools_select
from app.canvas.geometry import grid, route
from app.canvas.tools_move import guides
from app.model import edits
from app.model.kinds import Joint

__all__ = ["blank", "desk"]


def corners(desk, id):
    return [(p.x() / 20, p.y() / 20) for p in route(desk.drawing, id)]


def test_click_selects_shift_and_ctrl_add_paper_clears(desk):
    desk.click(24, 0)
    assert desk.attention.selection == {"J2"}
    desk.click(17, 0, SHIFT)
    assert desk.attention.selection == {"J2", "C1"}
    desk.click(24, 0, CTRL)
    assert desk.attention.selection == {"C1"}
    desk.click(17, 12)
    assert desk.attention.selection == frozenset()


def test_a_click_on_one_of_many_selects_it_alone(desk):
    desk.select("J1", "J2", "C1")
    desk.click(24, 0)
    assert desk.attention.selection == {"J2"}


def test_the_rubber_band_takes_what_lies_in_it_and_shift_keeps_the_rest(desk):
    desk.drag((8, 9), (20, -1), (26, -3))
    assert desk.attention.selection == {"J1", "C1", "J2"}
    desk.drag((34, 9), (39, -4), mods=SHIFT)
    assert desk.attention.selection == {"J1", "C1", "J2", "B2"}


def test_escape_gives_the_band_up(desk):
    desk.take(8, 9)
    desk.pull(26, -3)
    desk.key(Qt.Key.Key_Escape)
    desk.let_go(26, -3)
    assert desk.attention.selection == frozenset()


def test_a_node_is_dragged_on_the_grid_as_one_step_and_nothing_is_solved(desk):
    revision, outcome = desk.session.revision, desk.solving.outcome
    desk.drag((24, 0), (23, 2), (22, 5), (21.2, 6.3))
    node = desk.drawing.elements["J2"]
    assert (node.x, node.y) == (21.0, 6.0)
    assert desk.steps == 1
    assert desk.last == "Move J2"
    assert desk.session.revision > revision + 1
    assert desk.solving.outcome is outcome
    assert not desk.solving.stale
    desk.undo()
    assert desk.drawing == pair()


def test_a_selection_moves_together(desk):
    desk.select("J1", "J2", "C1", "B2", "L1")
    desk.drag((24, 0), (24, 4))
    assert desk.last == "Move 5 elements"
    assert [desk.drawing.elements[i].y for i in ("J1", "J2", "B2", "B1")] == [4.0, 4.0, 4.0, 0.0]
    assert desk.drawing.elements["L1"].dy == 0.0


def test_dragging_there_and_back_leaves_no_step(desk):
    desk.drag((24, 0), (24, 4), (24, 0))
    assert desk.steps == 0


def test_escape_puts_what_is_dragged_back(desk):
    desk.take(24, 0)
    desk.pull(24, 5)
    assert desk.drawing.elements["J2"].y == 5.0
    desk.key(Qt.Key.Key_Escape)
    desk.let_go(24, 5)
    assert desk.drawing == pair()
    assert desk.steps == 0


def test_guides_show_where_nodes_stand_level(desk):
    moved = edits.move(desk.drawing, ["J2"], 0, 3)
    assert guides(desk.drawing, frozenset({"J2"})) != []
    assert guides(moved, frozenset({"J2"})) == []


def test_a_joint_let_go_on_a_busbar_joins_it(desk):
    desk.drag((24, 0), (30, 5), (36, 1))
    assert "J2" in desk.drawing.elements  # T2 runs between them: refused, and all as it was
    assert len(desk.refusals) == 1
    assert desk.drawing == pair()
    assert desk.steps == 0
    desk.session.edit("Place", lambda d: edits.drop(d, Joint(), 30.0, 8.0))
    desk.drag((30, 8), (32, 4), (36, 1))
    assert "J3" not in desk.drawing.elements
    assert desk.attention.selection == {"B2"}
    assert desk.last == "Join J3 to HS"
    assert desk.steps == 2


def test_a_run_of_a_line_is_dragged_sideways_and_back_to_straight(desk):
    desk.drag((17, 0), (17, 2), (17, 4))
    assert corners(desk, "C1") == [(10, 0), (10, 4), (24, 4), (24, 0)]
    assert desk.steps == 1
    assert desk.last == "Reroute C1"
    desk.drag((17, 4), (17, 2), (17, 0))
    assert corners(desk, "C1") == [(10, 0), (24, 0)]
    assert desk.drawing.elements["C1"].via == ()


def test_a_transformers_line_slides_along_its_bar(desk):
    desk.drag((26, 0), (26, 2))
    assert corners(desk, "T2")[-1] == (36, 2)
    assert desk.drawing.elements["B2"].y == 0.0


def test_a_double_click_adds_a_bend_and_another_takes_it_away(desk):
    desk.double_click(17, 0)
    assert desk.drawing.elements["C1"].via == ((17.0, 0.0),)
    desk.drag((17, 0), (17, -3))
    assert corners(desk, "C1") == [(10, 0), (17, -3), (24, 0)]
    desk.double_click(17, -3)
    assert desk.drawing.elements["C1"].via == ()
    assert desk.steps == 3


def test_an_end_is_put_on_another_node_or_on_paper(desk):
    desk.click(17, 0)
    hold = (24 - 0.9, 0)
    desk.drag(hold, (30, 3), (36, 1))
    assert desk.drawing.elements["C1"].end == "B2"
    assert desk.last == "Put C1 on HS"
    desk.undo()
    desk.click(17, 0)
    desk.drag(hold, (20, 6), (20, 9))
    end = desk.drawing.elements[desk.drawing.elements["C1"].end]
    assert isinstance(end, Joint)
    assert (end.x, end.y) == (20.0, 9.0)
    assert desk.drawing.elements["J2"].x == 24.0


def test_both_ends_on_one_node_is_refused_in_a_sentence(desk):
    before = desk.drawing
    desk.click(17, 0)
    desk.drag((24 - 0.9, 0), (14, 3), (10, 0))
    assert desk.drawing == before
    assert len(desk.refusals) == 1
    assert "C1" in desk.refusals[0]


def test_an_attachment_moves_round_its_node_and_onto_another(desk):
    desk.drag((40, 0), (41, 3), (41, 4))
    load = desk.drawing.elements["L1"]
    assert (load.node, load.dx, load.dy) == ("B2", 5.0, 4.0)
    assert desk.steps == 1
    desk.drag((41, 4), (30, 3), (24, 0))
    load = desk.drawing.elements["L1"]
    assert load.node == "J2"
    assert desk.last == "Hang House on J2"
    assert desk.steps == 2


def test_a_busbar_is_lengthened_by_its_end(desk):
    desk.click(36, 2)
    desk.drag((36, 2.5), (36, 5), (36, 6))
    bar = desk.drawing.elements["B2"]
    assert (bar.length, bar.y) == (8.5, 1.75)
    assert bar.y - bar.length / 2 == -2.5
    assert desk.steps == 1


def test_hover_lights_what_is_under_the_hand_and_shows_the_right_cursor(desk):
    desk.hover(17, 0)
    assert desk.attention.hover == "C1"
    assert desk.view.viewport().cursor().shape() == Qt.CursorShape.PointingHandCursor
    desk.hover(24, 0)
    assert desk.view.viewport().cursor().shape() == Qt.CursorShape.SizeAllCursor
    desk.hover(24, 1.3)
    assert desk.view.viewport().cursor().shape() == Qt.CursorShape.CrossCursor
    desk.hover(17, 13)
    assert desk.attention.hover == ""
    assert desk.view.viewport().cursor().shape() == Qt.CursorShape.ArrowCursor


def test_no_menu_shortcut_acts_in_the_middle_of_a_drag(desk):
    desk.session.edit("Name", lambda d: edits.rename(d, "J2", "Mid"))
    undo = desk.session.history.createUndoAction(desk.view)
    undo.setShortcut("Ctrl+Z")
    desk.view.addAction(undo)
    desk.take(24, 0)
    desk.pull(24, 5)
    QTest.keyClick(desk.view, Qt.Key.Key_Z, CTRL)
    assert desk.drawing.elements["J2"].y == 5.0
    desk.let_go(24, 5)
    QTest.keyClick(desk.view, Qt.Key.Key_Z, CTRL)
    assert desk.drawing.elements["J2"].y == 0.0
    assert desk.drawing.elements["J2"].name == "Mid"


def test_the_drawing_is_replaced_under_the_hand_without_harm(desk):
    desk.click(24, 0)
    desk.session.open(replace(pair(), elements={}))
    desk.hover(24, 0)
    desk.click(24, 0)
    assert desk.attention.selection == frozenset()


def test_a_click_on_a_name_selects_and_a_double_click_renames(desk):
    box = desk.board.captions["C1"].spot.box
    at = (box.center().x() / 20, box.center().y() / 20)
    desk.click(*at)
    assert desk.attention.selection == {"C1"}
    desk.double_click(*at)
    fields = [f for f in desk.view.viewport().findChildren(QLineEdit) if f.isVisible()]
    assert len(fields) == 1
    assert (fields[0].geometry().center() - desk.px(*at)).manhattanLength() < 4
    QTest.keyClicks(fields[0], "Long run")
    QTest.keyClick(fields[0], Qt.Key.Key_Return)
    assert desk.drawing.elements["C1"].name == "Long run"


def test_rings_to_draw_on_cover_no_words_but_are_found_under_the_hand(desk, monkeypatch):
    painted = []
    monkeypatch.setattr(
        tools_select, "paint_handles", lambda painter, handles, *rest: painted.extend(handles)
    )

    def seen(hand):
        desk.hover(*hand)
        painted.clear()
        desk.view.viewport().grab()
        return [h for h in painted if h.end is None]

    all_of_them = tools_select.handles_of(desk.view, "J2", desk.view.paper(QPointF()))
    covered = [h for h in all_of_them if tools_select.covers_words(desk.view, h)]
    assert 0 < len(covered) < len(all_of_them)
    assert seen((24, 0)) == [h for h in all_of_them if h not in covered]
    assert covered[0] in seen(grid(covered[0].at))
