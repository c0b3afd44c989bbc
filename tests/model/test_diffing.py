"""What differs between two drawings."""

from msgspec.structs import replace

from app.model import edits
from app.model.edits import added, diff
from app.model.kinds import Joint


def test_kinds_of_change_are_told_apart(yard):
    def told(after):
        found = diff(yard, after)
        return set(found.geometry), set(found.parameter), set(found.topology), found.rest

    assert told(yard) == (set(), set(), set(), False)
    assert told(edits.move(yard, ["J4"], 1, 0)) == ({"J4"}, set(), set(), False)
    assert told(edits.reroute(yard, "C1", ())) == ({"C1"}, set(), set(), False)
    assert told(edits.turn_bar(yard, "B1")) == ({"B1"}, set(), set(), False)
    assert told(edits.set_tap(yard, "T2", 1)) == (set(), {"T2"}, set(), False)
    assert told(edits.rename(yard, "T2", "Pole")) == (set(), {"T2"}, set(), False)
    assert told(edits.change(yard, "W1", closed=False)) == (set(), set(), {"W1"}, False)
    assert told(edits.reconnect(yard, "C1", "end", "J3")) == (set(), set(), {"C1"}, False)
    assert told(edits.reattach(yard, "L1", "B2")) == (set(), set(), {"L1"}, False)
    assert told(edits.remove(yard, ["L1"])) == (set(), set(), {"L1"}, False)
    assert told(edits.put(yard, {"L1": Joint()})) == (set(), set(), {"L1"}, False)
    assert told(edits.set_limits(yard, low_percent=90)) == (set(), set(), set(), True)
    assert told(edits.set_frequency(yard, 60)) == (set(), set(), set(), True)


def test_two_changes_of_one_element_are_both_told(yard):
    both = edits.change(edits.move(yard, ["B1"], 1, 0), "B1", nominal_v=400)
    found = diff(yard, both)
    assert found.geometry == found.parameter == found.ids == {"B1"}


def test_equal_values_are_no_change(yard):
    copied = replace(yard, elements={i: replace(e) for i, e in yard.elements.items()})
    assert diff(yard, copied).ids == set()


def test_what_came_in_is_listed_in_order(yard):
    after = edits.put(yard, {"J9": Joint(), "J7": Joint()})
    assert added(yard, after) == ("J9", "J7")
    assert added(after, yard) == ()
