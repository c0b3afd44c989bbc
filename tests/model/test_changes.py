"""Edits of what elements are, and the sentences with which they refuse."""

import math

import pytest
from msgspec.structs import replace

from app.model import edits
from app.model.drawing import Case
from app.model.edits import EditRefused
from app.model.kinds import Cable, Joint, Load, Transformer


def refusal(edit, *args, **fields) -> str:
    with pytest.raises(EditRefused) as caught:
        edit(*args, **fields)
    sentence = str(caught.value)
    assert sentence.endswith(".")
    assert "\n" not in sentence
    return sentence


@pytest.mark.parametrize(
    ("id", "fields", "sentence"),
    [
        (
            "T2",
            {"uk_percent": 55},
            "T2 (transformer): Impedance uk is 55 %, allowed is a number, at least 0 and at most 40 %.",
        ),
        (
            "C1",
            {"length_m": -3.5},
            "Lane, C1 (cable): Length is -3.5 m, allowed is a number, at least 0 and at most 1000000 m.",
        ),
        (
            "C1",
            {"length_m": math.nan},
            "Lane, C1 (cable): Length is not a number, "
            "allowed is a number, at least 0 and at most 1000000 m.",
        ),
        (
            "C1",
            {"rating_a": math.inf},
            "Lane, C1 (cable): Rating is infinite, allowed is a number, more than 0 and at most 1000000 A.",
        ),
        (
            "C1",
            {"side_by_side": 1.5},
            "Lane, C1 (cable): In parallel is 1.5 runs, "
            "allowed is a whole number, at least 1 and at most 50 runs.",
        ),
        (
            "C1",
            {"length_m": True},
            "Lane, C1 (cable): Length is yes, allowed is a number, at least 0 and at most 1000000 m.",
        ),
        (
            "C1",
            {"length_m": None},
            "Lane, C1 (cable): Length is blank, allowed is a number, at least 0 and at most 1000000 m.",
        ),
        ("C1", {"conductor": "Ag"}, 'Lane, C1 (cable): Conductor is "Ag", allowed is one of Al, Cu.'),
        (
            "L1",
            {"demand_kva": 5, "demand_kw": 4},
            "Demand in kVA and Demand in kW are both given, allowed is exactly one of them.",
        ),
        (
            "L1",
            {"demand_kva": None},
            "Demand in kVA and Demand in kW are both blank, allowed is exactly one of them.",
        ),
        (
            "L1",
            {"constant_current_percent": 60, "constant_impedance_percent": 50},
            "House, L1 (load): Constant current and impedance are 110 % together, allowed is at most 100 %.",
        ),
        (
            "L1",
            {"demand_kw": 5, "power_factor": 0},
            "House, L1 (load): Power factor is 0 with a demand of 5 kW, allowed is more than 0.",
        ),
        (
            "T2",
            {"tap": 3},
            "(transformer): Tap is 3 notches, allowed is a whole number, at least -2 and at most 2 notches.",
        ),
        (
            "T2",
            {"vector_group": "Dyn12"},
            'T2 (transformer): Vector group is "Dyn12", allowed is winding 1 in capitals, winding 2 in small '
            "letters and a clock number, such as Dyn11, YNd1 or Ii0.",
        ),
        (
            "T2",
            {"taps_down": 40, "notch_percent": 2.5},
            "T2 (transformer): Taps below reach down 100 %, allowed is less than 100 %.",
        ),
        ("C1", {"start": "J4"}, 'Lane, C1 (cable): Start and End are both "J4", allowed is two nodes.'),
        ("C1", {"end": "X9"}, 'Lane, C1 (cable): End is "X9", which does not exist, allowed is a node.'),
        ("C1", {"end": "L1"}, "Lane, C1 (cable): End is House, L1 (load), allowed is a busbar or joint."),
        ("L1", {"node": "C1"}, "House, L1 (load): Node is Lane, C1 (cable), allowed is a busbar or joint."),
        ("L1", {"name": "a\x07b"}, 'L1 (load): Name is "a\ufffdb", allowed is text without control'),
        ("L1", {"name": "two\nlines"}, "allowed is one line of text."),
        ("L1", {"name": "x" * 81}, "Name has 81 characters, allowed are at most 80."),
        ("L1", {"colour": "red"}, 'House, L1 (load): there is no field "colour".'),
        ("L1", {"kept": {}}, 'House, L1 (load): there is no field "kept".'),
        ("L1", {"part": "P9"}, 'Part is "P9", allowed is blank, since the drawing carries no parts.'),
        ("J2", {"x": math.nan}, "J2 (joint): x is not a number, allowed is a number from"),
        ("B1", {"length": 0}, "Gate, B1 (busbar): length is 0, allowed is more than 0"),
        ("C1", {"via": ((1.0, math.inf),)}, "Lane, C1 (cable): via is"),
    ],
)
def test_bad_values_are_refused_with_element_field_value_and_what_is_allowed(yard, id, fields, sentence):
    assert sentence in refusal(edits.change, yard, id, **fields)


def test_a_load_has_one_demand_and_setting_one_clears_the_other(yard):
    by_kw = edits.change(yard, "L1", demand_kw=64)
    assert (by_kw.elements["L1"].demand_kva, by_kw.elements["L1"].demand_kw) == (None, 64.0)
    back = edits.change(by_kw, "L1", demand_kva=80)
    assert back == yard


def test_a_change_touches_nothing_else_and_undoes_by_value(yard):
    made = edits.change(yard, "C1", length_m=121)
    assert made.elements["C1"].length_m == 121.0
    assert isinstance(made.elements["C1"].length_m, float)
    assert all(made.elements[i] is e for i, e in yard.elements.items() if i != "C1")
    assert edits.change(made, "C1", length_m=120) == yard
    assert list(made.elements) == list(yard.elements)


def test_put_takes_all_or_none(yard):
    fresh = {"J9": Joint(), "C9": Cable(start="J9", end="J8")}
    assert '"J8", which does not exist' in refusal(edits.put, yard, fresh)
    assert "J9" in edits.put(yard, {"J9": Joint(), "C9": Cable(start="J9", end="J4")}).elements


def test_put_refuses_odd_ids(yard):
    for id in ("", "a b", "x" * 41, "Küche", "a/b"):
        assert "allowed is 1 to 40 letters, digits" in refusal(edits.put, yard, {id: Joint()})


def test_a_node_in_use_cannot_become_something_else(yard):
    sentence = refusal(edits.put, yard, {"J4": Load(node="B2")})
    assert sentence == "Lane, C1 (cable): End is J4 (load), allowed is a busbar or joint."


def test_removing_a_node_takes_what_stands_on_it(yard):
    left = edits.remove(yard, ["B2"]).elements
    assert set(left) == {"B1", "J2", "J3", "J4", "S1", "W1", "O1", "L1"}
    assert "no element" in refusal(edits.remove, yard, ["nothing"])


def test_taps_move_within_their_ladder_only(yard):
    assert edits.set_tap(yard, "T2", -2).elements["T2"].tap == -2
    assert "at least -2 and at most 2 notches" in refusal(edits.set_tap, yard, "T2", -3)
    assert refusal(edits.set_tap, yard, "C1", 1) == "Lane, C1 (cable): has no taps, allowed is a transformer."
    shifted = edits.set_tap(yard, "T2", 2)
    assert "Tap is 2 notches" in refusal(edits.change, shifted, "T2", taps_up=1)


def test_ends_are_reconnected_and_swapped(yard):
    assert edits.reconnect(yard, "C1", "end", "J3").elements["C1"].end == "J3"
    assert "allowed is the start or end of a branch" in refusal(edits.reconnect, yard, "L1", "end", "J3")
    assert "allowed is the start or end of a branch" in refusal(edits.reconnect, yard, "C1", "via", "J3")
    assert "Start and End are both" in refusal(edits.reconnect, yard, "C1", "end", "B2")
    assert edits.reattach(yard, "L1", "B2").elements["L1"].node == "B2"
    assert "hangs on no node" in refusal(edits.reattach, yard, "C1", "B2")
    line = edits.swap_ends(yard, "O1").elements["O1"]
    assert (line.start, line.end, line.via) == ("J3", "J2", ((18.0, 3.0), (12.0, 3.0)))
    assert edits.swap_ends(edits.swap_ends(yard, "O1"), "O1") == yard
    assert "allowed is a branch" in refusal(edits.swap_ends, yard, "L1")


def test_bars_turn(yard):
    assert edits.turn_bar(yard, "B1").elements["B1"].upright is False
    assert "allowed is a busbar" in refusal(edits.turn_bar, yard, "J2")


def test_names_are_trimmed(yard):
    assert edits.rename(yard, "J2", "  Pole 4 ").elements["J2"].name == "Pole 4"


def test_project_limits_cases_and_frequency(yard):
    assert edits.set_project(yard, title="Yard").project.title == "Yard"
    assert 'Project: there is no field "colour".' == refusal(edits.set_project, yard, colour=1)
    assert "Status" in refusal(edits.set_project, yard, status="done")
    assert edits.set_limits(yard, low_percent=95).limits.low_percent == 95.0
    both_at_100 = refusal(edits.set_limits, yard, low_percent=100, high_percent=100)
    assert "Lowest voltage is 100 % of nominal, allowed is less than Highest voltage" in both_at_100
    assert "Limits: Highest voltage is 99 % of nominal, allowed is" in refusal(
        edits.set_limits, yard, high_percent=99
    )
    assert edits.set_frequency(yard, 60).frequency_hz == 60.0
    assert refusal(edits.set_frequency, yard, math.nan).startswith("Drawing: Frequency is not a number")


def test_cases_come_and_go(yard):
    two = edits.set_case(yard, 1, Case(name="Night", load_percent=10.0))
    assert [c.name for c in two.cases] == ["As drawn", "Night"]
    assert edits.set_case(two, 1, load_percent=20).cases[1].load_percent == 20.0
    assert "which another case is called" in refusal(edits.set_case, two, 1, name="As drawn")
    assert "Case is blank" in refusal(edits.set_case, two, 1, name="  ")
    assert "allowed is 1 to 3" in refusal(edits.set_case, two, 3)
    assert edits.remove_case(two, 1) == yard
    assert "at least one must stay" in refusal(edits.remove_case, yard, 0)
    assert "allowed is 1 to 1" in refusal(edits.remove_case, yard, 4)


def test_unknown_elements_are_named(yard):
    assert refusal(edits.change, yard, "T7", tap=1) == 'There is no element "T7" in this drawing.'


def test_kept_keys_stay_with_a_changed_element(yard):
    kept = edits.put(yard, {"T2": replace(yard.elements["T2"], kept={"later": 1})})
    assert edits.set_tap(kept, "T2", 1).elements["T2"].kept == {"later": 1}
    assert isinstance(kept.elements["T2"], Transformer)
