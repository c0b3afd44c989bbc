"""Everything from the keyboard: draw, name, nudge, go through, delete; copy and paste."""

import pytest
from hand_desk import ALT, CTRL, SHIFT, blank, desk, pair
from PySide6.QtCore import QMimeData, Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QLineEdit

from app import study
from app.canvas.tools_clip import CLIP_MIME
from app.canvas.tools_keys import SHORTCUTS
from app.canvas.tools_menu import menu_at
from app.model.kinds import Busbar, Cable, Joint, Load, Supply, Switch, Transformer
from solver.status import Status

__all__ = ["blank", "desk"]
Key = Qt.Key


@pytest.fixture(autouse=True)
def _own_clipboard(qapp):
    QGuiApplication.clipboard().clear()
    yield
    QGuiApplication.clipboard().clear()


def away(desk):
    """The pointer leaves the board."""
    desk.view.pointer = None


def field(desk) -> QLineEdit:
    return next(f for f in desk.view.viewport().findChildren(QLineEdit) if f.isVisible())


def test_a_whole_layout_is_drawn_solved_and_named_without_a_mouse(blank):
    blank.key(Key.Key_B)
    blank.key(Key.Key_Return)
    blank.key(Key.Key_S)
    assert blank.attention.selection == {"B1"}
    blank.key(Key.Key_Right, ALT)
    blank.type("250 m")
    blank.key(Key.Key_Return)
    blank.key(Key.Key_Right, ALT)
    blank.type("0.9 km")
    blank.key(Key.Key_Return)
    blank.key(Key.Key_B)
    blank.key(Key.Key_L)
    blank.key(Key.Key_F2)
    QTest.keyClicks(field(blank), "House")
    QTest.keyClick(field(blank), Key.Key_Return)
    elements = blank.drawing.elements
    lengths = [e.length_m for e in elements.values() if isinstance(e, Cable)]
    assert lengths == [250.0, 900.0]
    kinds = [type(e) for e in elements.values()]
    assert kinds.count(Busbar) == 2
    assert kinds.count(Supply) == kinds.count(Load) == 1
    assert [e.name for e in elements.values() if e.name] == ["House"]
    assert study.run(blank.drawing).status is Status.SOLVED
    while blank.session.history.canUndo():
        blank.undo()
    assert elements is not blank.drawing.elements
    assert blank.drawing.elements == {}


def test_x_pulls_arrows_aim_and_enter_ends(desk):
    desk.select("J2")
    away(desk)
    desk.key(Key.Key_X)
    for _ in range(3):
        desk.key(Key.Key_Down)
    desk.key(Key.Key_Left, SHIFT)
    desk.type("80")
    desk.key(Key.Key_Return)
    cable = desk.drawing.elements["C2"]
    end = desk.drawing.elements[cable.end]
    assert (end.x, end.y, cable.length_m) == (19.0, 3.0, 80.0)
    assert desk.attention.selection == {cable.end}
    desk.key(Key.Key_Return)  # and on from there
    desk.key(Key.Key_Down)
    desk.key(Key.Key_Return)
    assert desk.drawing.elements["C3"].start == cable.end


def test_letters_choose_what_is_drawn_from_the_selected_node(desk):
    desk.select("J2")
    away(desk)
    desk.key(Key.Key_W)
    for _ in range(6):
        desk.key(Key.Key_Up)
    desk.key(Key.Key_Return)
    assert isinstance(desk.drawing.elements["W1"], Switch)
    desk.key(Key.Key_Up, ALT)
    assert isinstance(desk.drawing.elements["W2"], Switch)
    desk.key(Key.Key_T)
    desk.key(Key.Key_Right, SHIFT)
    desk.key(Key.Key_Return)
    assert isinstance(desk.drawing.elements["T3"], Transformer)


def test_alt_arrow_connects_the_node_that_stands_there_and_walks_where_it_is_joined(desk):
    desk.select("J1")
    desk.key(Key.Key_Down, ALT)
    first = next(iter(desk.attention.selection))
    assert (desk.drawing.elements[first].x, desk.drawing.elements[first].y) == (10.0, 8.0)
    steps = desk.steps
    desk.key(Key.Key_Up, ALT)
    assert desk.attention.selection == {"J1"}
    assert desk.steps == steps


def test_a_length_typed_with_a_line_selected_is_its_length(desk):
    desk.select("C1")
    desk.type("450 ft")
    desk.key(Key.Key_Return)
    assert desk.drawing.elements["C1"].length_m == pytest.approx(137.16)
    assert desk.last == "Length of C1 to 450 ft"
    desk.type("99")
    desk.key(Key.Key_Escape)
    assert desk.steps == 1
    desk.type("7")
    desk.click(17, 10)
    assert desk.drawing.elements["C1"].length_m == 7.0


def test_attachments_by_letter_hang_on_the_selected_node_side_by_side(desk):
    desk.select("J2")
    for key in (Key.Key_L, Key.Key_L, Key.Key_G, Key.Key_K):
        desk.key(key)
    hung = [e for e in desk.drawing.attachments().values() if e.node == "J2"]
    assert len(hung) == 4
    assert len({(e.dx, e.dy) for e in hung}) == 4
    assert desk.attention.selection == {"J2"}


def test_b_makes_a_joint_a_busbar_and_j_makes_it_one_again(desk):
    desk.select("J2")
    desk.key(Key.Key_B)
    assert isinstance(desk.drawing.elements["B3"], Busbar)
    assert desk.drawing.elements["T2"].start == "B3"
    desk.key(Key.Key_R)
    assert desk.drawing.elements["B3"].upright is False
    desk.key(Key.Key_J)
    assert isinstance(desk.drawing.elements["J2"], Joint)


def test_r_turns_an_attachment_by_a_quarter(desk):
    desk.select("L1")
    desk.key(Key.Key_R)
    assert (desk.drawing.elements["L1"].dx, desk.drawing.elements["L1"].dy) == (0.0, 4.0)


def test_arrows_nudge_and_shift_goes_farther(desk):
    desk.select("J2", "B2")
    desk.key(Key.Key_Down)
    desk.key(Key.Key_Right, SHIFT)
    assert (desk.drawing.elements["J2"].x, desk.drawing.elements["J2"].y) == (29.0, 1.0)
    assert desk.steps == 2
    assert desk.last == "Move 2 elements"


def test_a_nudged_branch_takes_its_nodes_along(desk):
    desk.select("C1")
    desk.key(Key.Key_Down)
    assert (desk.drawing.elements["J1"].y, desk.drawing.elements["J2"].y) == (1.0, 1.0)


def test_tab_goes_through_in_the_order_of_drawing_and_out_at_the_end(desk):
    order = list(desk.drawing.elements)
    seen = []
    for _ in order:
        desk.key(Key.Key_Tab)
        seen += desk.attention.selection
    assert seen == order
    assert not desk.view.select_next(1)
    desk.key(Key.Key_Backtab, SHIFT)
    assert desk.attention.selection == {order[-2]}
    assert desk.view.accessibleDescription() == "transformer T2 selected, tap 0 %: 11000/400"
    desk.key(Key.Key_Down)
    said = "transformer T2 selected, tap −2.5 %: 10725/400, raises winding 2"
    assert desk.view.accessibleDescription() == said


def test_delete_takes_what_hangs_on_a_node(desk):
    desk.select("J2")
    desk.key(Key.Key_Delete)
    assert sorted(desk.drawing.elements) == ["B1", "B2", "J1", "L1", "S1", "T1"]
    assert desk.last == "Delete J2 with 2 branches"
    assert desk.attention.selection == frozenset()
    desk.undo()
    assert desk.drawing == pair()


def test_rename_in_place_takes_with_enter_and_not_with_escape(desk):
    desk.select("B2")
    desk.key(Key.Key_F2)
    assert field(desk).text() == "HS"
    QTest.keyClicks(field(desk), "Hill Side")
    QTest.keyClick(field(desk), Key.Key_Return)
    assert desk.drawing.elements["B2"].name == "Hill Side"
    assert desk.last == "Rename B2 to Hill Side"
    desk.key(Key.Key_F2)
    QTest.keyClicks(field(desk), "no")
    QTest.keyClick(field(desk), Key.Key_Escape)
    assert desk.drawing.elements["B2"].name == "Hill Side"
    assert desk.steps == 1


def test_a_double_click_on_a_node_or_symbol_renames(desk):
    desk.double_click(36, 0)
    QTest.keyClicks(field(desk), "Far")
    QTest.keyClick(field(desk), Key.Key_Return)
    desk.double_click(30, 0)
    QTest.keyClicks(field(desk), "Step-down")
    QTest.keyClick(field(desk), Key.Key_Return)
    assert desk.drawing.elements["B2"].name == "Far"
    assert desk.drawing.elements["T2"].name == "Step-down"


def test_enter_asks_for_the_card_and_alt_enter_does_so_for_nodes(desk, qtbot):
    desk.select("C1")
    with qtbot.waitSignal(desk.view.card_wanted):
        desk.key(Key.Key_Return)
    desk.select("J2")
    with qtbot.waitSignal(desk.view.card_wanted):
        desk.key(Key.Key_Return, ALT)


def test_select_all_and_escape(desk):
    desk.key(Key.Key_A, CTRL)
    assert desk.attention.selection == frozenset(desk.drawing.elements)
    desk.key(Key.Key_Escape)
    assert desk.attention.selection == frozenset()


def test_copy_and_paste_land_at_the_hand_with_ids_of_their_own(desk):
    desk.select("J2", "T2", "B2", "L1")
    desk.key(Key.Key_C, CTRL)
    desk.hover(30, 12)
    desk.key(Key.Key_V, CTRL)
    fresh = desk.attention.selection
    assert len(fresh) == 4
    assert not fresh & pair().elements.keys()
    nodes = [desk.drawing.elements[i] for i in fresh if i in desk.drawing.nodes()]
    assert sorted((n.x, n.y) for n in nodes) == [(24.0, 12.0), (36.0, 12.0)]
    assert desk.steps == 1
    assert desk.last == "Paste 4 elements"
    desk.undo()
    assert desk.drawing == pair()


def test_paste_with_the_hand_away_lands_aside_again_and_again(desk):
    desk.select("B2")
    desk.key(Key.Key_C, CTRL)
    away(desk)
    desk.select()
    desk.key(Key.Key_V, CTRL)
    desk.select()
    desk.key(Key.Key_V, CTRL)
    bars = [(b.x, b.y) for b in desk.drawing.elements.values() if isinstance(b, Busbar)]
    assert bars[-2:] == [(38.0, 2.0), (40.0, 4.0)]


def test_cut_and_paste_bring_it_back(desk):
    desk.select("L1")
    desk.key(Key.Key_X, CTRL)
    assert "L1" not in desk.drawing.elements
    assert desk.last == "Cut House"
    desk.select("J2")
    desk.key(Key.Key_V, CTRL)
    load = next(e for e in desk.drawing.elements.values() if isinstance(e, Load))
    assert (load.name, load.node) == ("House", "J2")


def test_duplicate_lands_aside(desk):
    desk.select("J1", "C1", "J2")
    desk.key(Key.Key_D, CTRL)
    assert len(desk.attention.selection) == 3
    copy = next(desk.drawing.elements[i] for i in desk.attention.selection if i.startswith("C"))
    assert desk.drawing.elements[copy.start].y == 2.0
    assert desk.last == "Duplicate 3 elements"


def test_foreign_or_damaged_clips_do_no_harm(desk):
    QGuiApplication.clipboard().setText("a poem")
    desk.key(Key.Key_V, CTRL)
    data = QMimeData()
    data.setData(CLIP_MIME, b"{")
    QGuiApplication.clipboard().setMimeData(data)
    desk.key(Key.Key_V, CTRL)
    assert desk.drawing == pair()
    assert len(desk.refusals) == 1


def entries(desk, x, y):
    menu = menu_at(desk.view, desk.view.mapToScene(desk.px(x, y)))
    found = {a.text(): a for a in menu.actions() if a.text()}
    return menu, found


def test_the_context_menu_offers_what_makes_sense(desk):
    menu, on_line = entries(desk, 17, 0)
    assert {"Put a joint here", "Add a bend", "Turn ends round", "Delete"} <= on_line.keys()
    on_line["Put a joint here"].trigger()
    assert sum(isinstance(e, Cable) for e in desk.drawing.elements.values()) == 2
    menu.deleteLater()
    menu, on_node = entries(desk, 36, 0)
    assert {"Draw on from here", "Make it a joint", "Rename"} <= on_node.keys()
    assert "Put a joint here" not in on_node
    menu.deleteLater()
    menu, on_paper = entries(desk, 17, 14)
    assert set(on_paper) == {"Paste", "Select all", "Whole drawing"}
    menu.deleteLater()


def test_a_switch_is_opened_from_its_menu(blank):
    blank.key(Key.Key_W)
    blank.drag((-6, 0), (0, 0), (6, 0))
    menu, found = entries(blank, 0, 0)
    found["Open"].trigger()
    assert blank.drawing.elements["W1"].closed is False
    assert blank.last == "Open W1"
    menu.deleteLater()


def test_turning_ends_round(desk):
    desk.select("T2")
    desk.view.swap_selection()
    assert (desk.drawing.elements["T2"].start, desk.drawing.elements["T2"].end) == ("B2", "J2")
    assert desk.last == "Turn ends of T2"


def test_the_help_lists_every_letter_that_places_a_part():
    said = " ".join(keys for keys, _ in SHORTCUTS)
    for letter in "SLGKCOTWBJRXF":
        assert letter in said
    assert all(what and keys for keys, what in SHORTCUTS)


def length_field(desk):
    return next(f for f in desk.view.viewport().findChildren(QLineEdit) if f.isVisible())


@pytest.mark.parametrize("begin", [Qt.Key.Key_Return, Qt.Key.Key_X, Qt.Key.Key_C])
def test_a_length_typed_before_aiming_stands_at_the_node_and_enter_draws_on(desk, begin):
    desk.select("B2")
    desk.key(begin)
    desk.type("230")
    field, node = length_field(desk), desk.px(36, 0)
    assert (field.pos() - node).manhattanLength() < 60
    desk.key(Qt.Key.Key_Left)  # the text is not empty: the aim stays
    desk.key(Qt.Key.Key_Return)
    made = desk.drawing.elements["C2"]
    assert (made.start, made.length_m) == ("B2", 230.0)
    far = desk.drawing.elements[made.end]
    assert (far.x, far.y) == (44.0, 0.0)


def test_arrows_aim_as_long_as_nothing_is_typed(desk):
    desk.select("B2")
    desk.key(Qt.Key.Key_X)
    for _ in range(4):
        desk.key(Qt.Key.Key_Down)
    desk.type("75")
    desk.key(Qt.Key.Key_Return)
    made = desk.drawing.elements["C2"]
    far = desk.drawing.elements[made.end]
    assert (made.length_m, far.x, far.y) == (75.0, 36.0, 4.0)


def test_what_nobody_aims_goes_where_there_is_room(desk):
    for expected in ((10.0, 8.0), (10.0, -8.0)):  # J1 has T1 at its left and C1 at its right
        desk.select("J1")
        desk.key(Qt.Key.Key_C)
        desk.key(Qt.Key.Key_Return)
        (far,) = desk.attention.selection
        assert (desk.drawing.elements[far].x, desk.drawing.elements[far].y) == expected


def test_deleting_a_bar_says_what_goes_with_it(desk, qtbot):
    desk.select("B2")
    with qtbot.waitSignal(desk.view.told) as told:
        desk.key(Key.Key_Delete)
    assert desk.last == "Delete HS with 1 branch and 1 load"
    assert told.args == ["Deleted HS with 1 branch and 1 load."]
    desk.undo()
    assert desk.drawing == pair()


def test_renaming_what_has_no_name_begins_with_its_id(desk):
    desk.select("J2")
    desk.key(Key.Key_F2)
    assert (field(desk).text(), field(desk).selectedText()) == ("J2", "J2")
    QTest.keyClick(field(desk), Key.Key_Return)
    assert (desk.drawing.elements["J2"].name, desk.steps) == ("", 0)


def test_a_joint_made_a_busbar_stays_selected_under_its_new_letter(desk):
    desk.select("J2")
    desk.type("b")
    assert "J2" not in desk.drawing.elements
    assert desk.attention.selection == {"B3"}
    assert desk.drawing.elements["C1"].end == "B3"
