"""Figures that came with the shelf are assumed until somebody confirms them."""

import json

import pytest

from app.model import assumed, edits, parts
from app.model.drawing import Drawing
from app.model.file import decode, encode
from app.model.kinds import Busbar, Cable, Load, Transformer
from app.study import run

SHELF = {part.name: part for part in parts.builtin_parts()}


def drawn() -> Drawing:
    """A supply, a cable and a load, all as the shelf gives them."""
    base = edits.put(Drawing(), {"B1": Busbar()})
    base = edits.drop(base, SHELF["Supply"].element, -3, 0, "B1")
    base = edits.extend(base, "B1", SHELF["Cable"].element, 10, 0)
    return edits.drop(base, SHELF["Load"].element, 10, 3, "J1")


def listed(drawing: Drawing) -> set[tuple[str, str]]:
    return {(a.id, a.field) for a in run(drawing).assumptions if a.basis == assumed.FROM_SHELF}


def test_what_the_shelf_brings_is_listed_with_its_basis():
    assert listed(drawn()) == {
        ("S1", "nominal_v"), ("S1", "held_percent"), ("C1", "length_m"), ("C1", "resistance_ohm_per_km"),
        ("C1", "reactance_ohm_per_km"), ("L1", "demand_kva"), ("L1", "power_factor"),
    }  # fmt: skip


def test_every_figure_named_is_a_field_of_its_kind_with_a_value():
    for frequency in (50.0, 60.0):
        for part in parts.builtin_parts(frequency):
            assert len(assumed.unconfirmed(part.element)) == len(part.element.assumed), part.name


@pytest.mark.parametrize("typed", ["100", "0.1 km", "85"])
def test_typing_a_value_confirms_it_even_the_same(typed):
    after = edits.change_text(drawn(), "C1", "length_m", typed)
    assert "length_m" not in after.elements["C1"].assumed
    assert listed(drawn()) - listed(after) == {("C1", "length_m")}


def test_a_demand_in_the_other_unit_confirms_the_demand():
    assert edits.change_text(drawn(), "L1", "demand_kva", "8 kW").elements["L1"].assumed == ("power_factor",)


def test_moving_and_naming_confirm_nothing():
    before = drawn().elements["C1"].assumed
    after = edits.rename(edits.reroute(drawn(), "C1", [(5, 2)]), "C1", "Feeder")
    assert after.elements["C1"].assumed == before


def test_parting_a_line_and_copying_keep_what_is_unsure():
    parted = edits.split_branch(drawn(), "C1", 5, 0)
    assert parted.elements["C2"].assumed == drawn().elements["C1"].assumed
    copied = edits.paste(drawn(), edits.copy(drawn(), ["C1"]), 0, 20)
    assert copied.elements["C2"].assumed == drawn().elements["C1"].assumed


def test_parts_of_the_users_own_bring_nothing_unsure():
    kept = edits.keep_part(drawn(), "C1", "Feeder")
    _, element = edits.made_from(kept, kept.parts["P1"])
    assert element.assumed == ()


def test_windings_that_change_names_take_their_doubt_along():
    base = edits.put(Drawing(), {"B1": Busbar(nominal_v=400.0)})
    template = Transformer(start="", end="", v1_v=11000.0, v2_v=400.0, assumed=("v1_v",))
    made = edits.extend(base, "B1", template, 10, 0).elements["T1"]
    assert (made.v2_v, made.assumed) == (11000.0, ("v2_v",))


def test_the_file_keeps_it_and_says_nothing_where_all_is_given():
    base = drawn()
    assert decode(encode(base)) == base
    lines = [line for line in encode(base).decode().splitlines() if '"id"' in line]
    assert [('"assumed"' in line) for line in lines] == [False, True, False, True, True]


def test_names_that_are_no_fields_are_dropped():
    raw = json.loads(encode(edits.put(Drawing(), {"B1": Busbar(), "L1": Load(node="B1")})))
    raw["elements"][1]["assumed"] = ["demand_kva", "colour"]
    assert decode(json.dumps(raw).encode()).elements["L1"].assumed == ("demand_kva",)


def test_a_cable_made_by_hand_is_given():
    assert Cable(start="", end="").assumed == ()
