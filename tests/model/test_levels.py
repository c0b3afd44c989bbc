"""Which voltage each node is meant for."""

from app.model import edits
from app.model.drawing import Drawing
from app.model.kinds import Cable, Joint, Supply, Switch, Transformer
from app.model.levels import nominal_levels


def test_supply_then_winding(yard):
    levels = nominal_levels(yard)
    assert set(levels) == {"B1", "J2", "J3", "B2", "J4"}
    assert levels["J3"] == (11000.0, "supply S1", "three-phase")
    assert levels["J4"] == (400.0, "winding 2 of T2, assumed", "three-phase")
    assert levels["J4"].assumed
    assert not levels["J3"].assumed


def test_a_statement_in_the_zone_stands_above_the_winding(yard):
    stated = edits.change(edits.change(yard, "T2", v2_v=433.0), "J4", nominal_v=400.0)
    levels = nominal_levels(stated)
    assert levels["J4"][:2] == (400.0, "stated")
    assert levels["B2"][:2] == (400.0, "stated on J4")


def test_a_statement_on_one_node_leaves_the_rest_to_the_supply(yard):
    levels = nominal_levels(edits.change(yard, "J3", nominal_v=10000.0))
    assert levels["J3"].volts == 10000.0
    assert levels["J2"].volts == 11000.0


def test_an_open_switch_parts_and_a_transformer_still_tells(yard):
    levels = nominal_levels(edits.change(yard, "W1", closed=False))
    assert levels["B1"].volts == 11000.0
    assert levels["J2"][:2] == (11000.0, "winding 1 of T2, assumed")
    assert levels["J4"].volts == 400.0


def test_nothing_known_is_left_out():
    bare = edits.put(Drawing(), {"J1": Joint(), "J2": Joint(), "C1": Cable(start="J1", end="J2")})
    assert nominal_levels(bare) == {}
    one = edits.change(bare, "J2", nominal_v=690.0)
    assert nominal_levels(one)["J1"][:2] == (690.0, "stated on J2")


def test_two_wires_reach_behind_single_phase_units():
    drawing = edits.put(
        Drawing(),
        {
            "J1": Joint(), "J2": Joint(), "J3": Joint(), "J4": Joint(),
            "S1": Supply(node="J1", nominal_v=11000.0),
            "T1": Transformer(start="J1", end="J2", v2_v=230.0, vector_group="Ii0"),
            "C1": Cable(start="J2", end="J3"),
            "S2": Supply(node="J4", nominal_v=230.0, wires="two-wire"),
            "W1": Switch(start="J4", end="J3", closed=False),
        },
    )  # fmt: skip
    levels = nominal_levels(drawing)
    assert levels["J1"].wires == "three-phase"
    assert levels["J3"][::2] == (230.0, "two-wire")
    assert levels["J4"].wires == "two-wire"


def test_loops_and_step_up_chains_end():
    chain = {f"J{n}": Joint() for n in range(6)}
    branches = {
        "S1": Supply(node="J0"),
        "C1": Cable(start="J0", end="J1"),
        "C2": Cable(start="J1", end="J0"),
        "T1": Transformer(start="J1", end="J2", v1_v=400.0, v2_v=11000.0, vector_group="YNd1"),
        "T2": Transformer(start="J3", end="J2", v1_v=400.0, v2_v=11000.0, vector_group="YNd1"),
        "T3": Transformer(start="J0", end="J3", v1_v=400.0, v2_v=415.0, vector_group="Yyn0"),
    }
    levels = nominal_levels(edits.put(Drawing(), {**chain, **branches}))
    assert [levels[f"J{n}"].volts for n in range(3)] == [400.0, 400.0, 11000.0]
    assert levels["J3"].volts in (400.0, 415.0)
    assert "J4" not in levels
