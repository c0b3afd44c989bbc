"""Edits of where things are and what joins them."""

import pytest

from app.model import edits
from app.model.drawing import Drawing
from app.model.edits import EditRefused, added
from app.model.kinds import Busbar, Cable, Joint, Load, Supply, Switch, Transformer

STEP_DOWN = Transformer(start="", end="", tap=-1)
CABLE = Cable(start="", end="", length_m=77.0)


def test_moving_both_ends_carries_the_bends_and_one_end_does_not(yard):
    both = edits.move(yard, ["J2", "J3"], 2, 5).elements
    assert both["O1"].via == ((14.0, 8.0), (20.0, 8.0))
    assert (both["J2"].x, both["J2"].y) == (12.0, 5.0)
    one = edits.move(yard, ["J2"], 2, 5).elements
    assert one["O1"] is yard.elements["O1"]
    alone = edits.move(yard, ["O1"], 2, 5).elements
    assert alone["O1"].via == ((14.0, 8.0), (20.0, 8.0))
    assert alone["J2"] is yard.elements["J2"]


def test_an_attachment_keeps_its_place_beside_a_moved_node(yard):
    with_node = edits.move(yard, ["J4", "L1"], 1, 1).elements
    assert with_node["L1"] is yard.elements["L1"]
    alone = edits.move(yard, ["L1"], 1, -2).elements["L1"]
    assert (alone.dx, alone.dy) == (1.0, 1.0)


def test_moves_undo_by_value_and_refuse_to_leave_the_paper(yard):
    there = edits.move(yard, list(yard.elements), 3, -7)
    assert edits.move(there, list(yard.elements), -3, 7) == yard
    with pytest.raises(EditRefused, match="allowed is a number from"):
        edits.move(yard, ["J2"], 1e6, 0)
    assert edits.move(yard, [], 1, 1) is yard


def test_bends_are_given_anew(yard):
    assert edits.reroute(yard, "C1", [(1, 2)]).elements["C1"].via == ((1.0, 2.0),)
    with pytest.raises(EditRefused, match="has no bends"):
        edits.reroute(yard, "L1", [])


def test_extending_makes_the_joint_it_needs(yard):
    made = edits.extend(yard, "J4", CABLE, 50, 6)
    joint, cable = added(yard, made)
    assert made.elements[joint] == Joint(x=50.0, y=6.0)
    assert (made.elements[cable].start, made.elements[cable].end) == ("J4", joint)
    assert made.elements[cable].length_m == 77.0
    closed = edits.extend(yard, "J4", CABLE, 0, 0, to_node="B2")
    assert len(added(yard, closed)) == 1


def test_extending_from_what_is_no_node_is_refused(yard):
    for id in ("L1", "C1"):
        with pytest.raises(EditRefused, match="nothing can be drawn from it"):
            edits.extend(yard, id, CABLE, 0, 0)
    with pytest.raises(EditRefused, match="both"):
        edits.extend(yard, "J4", CABLE, 0, 0, to_node="J4")


def test_a_transformer_drawn_from_low_voltage_turns_its_near_winding_to_it():
    low = edits.drop(Drawing(), Supply(node=""), 0, 0)
    up = edits.extend(low, "J1", STEP_DOWN, 10, 0).elements["T1"]
    assert (up.v1_v, up.v2_v, up.vector_group, up.tapped, up.tap) == (400.0, 11000.0, "YNd1", "winding 2", -1)
    high = edits.drop(Drawing(), Supply(node="", nominal_v=11000.0), 0, 0)
    down = edits.extend(high, "J1", STEP_DOWN, 10, 0).elements["T1"]
    assert (down.v1_v, down.v2_v, down.vector_group) == (11000.0, 400.0, "Dyn11")


def test_a_transformer_behind_a_transformer_knows_the_voltage_there(yard):
    up = edits.extend(yard, "J4", STEP_DOWN, 50, 6).elements["T1"]
    assert (up.v1_v, up.v2_v) == (400.0, 11000.0)
    nowhere = edits.put(Drawing(), {"J1": Joint()})
    assert edits.extend(nowhere, "J1", STEP_DOWN, 9, 0).elements["T1"].v1_v == 11000.0


def test_a_transformer_on_two_wires_is_single_phase():
    low = edits.drop(Drawing(), Supply(node="", nominal_v=230.0, wires="two-wire"), 0, 0)
    assert edits.extend(low, "J1", STEP_DOWN, 10, 0).elements["T1"].vector_group == "Ii0"


def test_dropping_on_empty_paper_makes_the_nodes_needed():
    hung = edits.drop(Drawing(), Load(node=""), 4, 5)
    assert hung.elements["J1"] == Joint(x=4.0, y=5.0)
    assert hung.elements["L1"].node == "J1"
    span = edits.drop(Drawing(), Switch(start="", end=""), 4, 5).elements
    assert (span["J1"].x, span["J2"].x, span["W1"].start, span["W1"].end) == (0.0, 8.0, "J1", "J2")
    assert edits.drop(Drawing(), Busbar(), 1, 2).elements["B1"] == Busbar(x=1.0, y=2.0)


def test_dropping_on_a_node(yard):
    assert edits.drop(yard, Load(node=""), 44, 9, node="J4").elements["L2"].dx == 4.0
    beside = edits.drop(yard, Load(node=""), 40, 6, node="J4").elements["L2"]
    assert (beside.dx, beside.dy) != (yard.elements["L1"].dx, yard.elements["L1"].dy)
    with pytest.raises(EditRefused, match="nothing can hang on it"):
        edits.drop(yard, Load(node=""), 0, 0, node="C1")
    second = edits.drop(yard, Supply(node=""), 40, 6, node="J4").elements["S2"]
    assert second.nominal_v == 400.0
    assert edits.drop(yard, Supply(node=""), 10, 0, node="J2").elements["S2"].nominal_v == 11000.0
    assert edits.drop(yard, CABLE, 50, 9, node="J4").elements["C2"].start == "J4"


def test_joining_two_nodes_moves_everything_over(yard):
    made = edits.join(yard, "J3", "J4")
    assert "J4" not in made.elements
    assert made.elements["C1"].end == "J3"
    load = made.elements["L1"]
    assert load.node == "J3"
    assert (20.0 + load.dx, 0.0 + load.dy) == (40.0, 9.0)


def test_joining_refuses_what_would_lose_a_branch_or_is_no_node(yard):
    with pytest.raises(EditRefused, match=r"Lane, C1 \(cable\) runs between it and B2"):
        edits.join(yard, "B2", "J4")
    with pytest.raises(EditRefused, match="two different nodes"):
        edits.join(yard, "B2", "B2")
    with pytest.raises(EditRefused, match="two different nodes"):
        edits.join(yard, "B2", "L1")


def test_a_joint_on_a_line_shares_out_its_length(yard):
    made = edits.split_branch(yard, "C1", 40.0, 2.0)
    joint, far = added(yard, made)
    near, rest = made.elements["C1"], made.elements[far]
    assert (near.start, near.end, rest.start, rest.end) == ("B2", joint, joint, "J4")
    assert near.length_m == pytest.approx(120 * 12 / 16)
    assert near.length_m + rest.length_m == 120.0
    assert (near.via, rest.via) == (((40.0, 0.0),), ())
    assert rest.name == ""


def test_a_line_without_bends_is_shared_out_along_its_square_run(yard):
    square = edits.reroute(yard, "C1", ())
    for spot, length in (
        ((35.0, 0.0), 120 * 5 / 16),
        ((40.0, 3.0), 120 * 13 / 16),
        ((30.0, 6.0), 120 * 6 / 16),
    ):
        assert edits.split_branch(square, "C1", *spot).elements["C1"].length_m == pytest.approx(length)


def test_the_share_may_be_given_and_only_lines_part(yard):
    made = edits.split_branch(yard, "C1", 0, 0, share=0.25)
    assert made.elements["C1"].length_m == 30.0
    with pytest.raises(EditRefused, match="allowed is a cable or overhead line"):
        edits.split_branch(yard, "T2", 0, 0)
    straight = edits.put(yard, {"C1": Cable(start="B2", end="J3", length_m=0.0)})
    assert edits.split_branch(straight, "C1", 25, 0).elements["C1"].length_m == 0.0


def test_a_joint_made_a_busbar_is_counted_as_one_and_keeps_all_that_stands_on_it():
    base = Drawing(
        elements={
            "B1": Busbar(), "J3": Joint(x=8, nominal_v=400.0), "C1": Cable(start="B1", end="J3"),
            "L1": Load(node="J3"),
        }
    )  # fmt: skip
    made = edits.remake(base, "J3", Busbar())
    assert list(made.elements) == ["B1", "B2", "C1", "L1"]
    assert (made.elements["C1"].end, made.elements["L1"].node) == ("B2", "B2")
    assert (made.elements["B2"].x, made.elements["B2"].nominal_v) == (8, 400.0)
    named = edits.remake(edits.rename(base, "J3", "J3"), "J3", Busbar())
    assert named.elements["B2"].name == "J3"
    own = edits.put(Drawing(), {"yard": Joint()})
    assert list(edits.remake(own, "yard", Busbar()).elements) == ["yard"]
