"""Putting elements on other phases, and which fields of phases and neutral have a meaning."""

import pytest

from app.model.checks import EditRefused
from app.model.drawing import Drawing
from app.model.kinds import (
    Busbar,
    Cable,
    Capacitor,
    Generator,
    Joint,
    Load,
    Motor,
    Regulator,
    Supply,
    Transformer,
)
from app.model.rephasing import has_phases, matters, set_phases, states_phases, turned

UNIT = {"start": "A", "end": "B"}
DRAWN = Drawing(
    elements={
        "A": Busbar(),
        "B": Joint(x=8.0),
        "C1": Cable(start="A", end="B"),
        "L1": Load(node="B", share_a_percent=60.0, share_b_percent=20.0),
        "M1": Motor(node="B"),
        "T1": Transformer(**UNIT),
    }
)


def test_all_that_have_a_choice_move_and_the_others_stay():
    after = set_phases(DRAWN, ("C1", "L1", "T1", "A"), "BC")
    assert after.elements["C1"].phases == after.elements["L1"].phases == "BC"
    assert after.elements["T1"] == DRAWN.elements["T1"]
    assert after.elements["L1"].share_a_percent is None


def test_back_to_three_phases_keeps_the_rest():
    assert set_phases(set_phases(DRAWN, ("M1",), "A"), ("M1",), "all") == DRAWN


@pytest.mark.parametrize(("ids", "phases", "words"), [(("C1",), "ABC", "one of all, A"), (("A",), "A", "A")])
def test_what_cannot_be_is_refused_with_a_reason(ids, phases, words):
    with pytest.raises(EditRefused, match=words):
        set_phases(DRAWN, ids, phases)


def test_a_unit_has_a_choice_where_it_is_single_phase_or_an_open_bank():
    assert not has_phases(Transformer(**UNIT))
    assert has_phases(Transformer(**UNIT, vector_group="Ii0"))
    assert has_phases(Transformer(**UNIT, vector_group="Ii0", build="centre-tapped"))
    assert has_phases(Transformer(**UNIT, vector_group="Dd0", build="open delta"))
    assert not has_phases(Supply(node="A"))


def test_fields_that_do_nothing_are_told_from_those_that_do():
    assert matters(Load(node="A"), "share_a_percent")
    assert not matters(Load(node="A", phases="A"), "share_a_percent")
    assert not matters(Capacitor(node="A", phases="AB"), "connection")
    assert not matters(Cable(**UNIT, neutral="none"), "neutral_resistance_ohm_per_km")
    assert matters(Cable(**UNIT), "neutral_resistance_ohm_per_km")
    assert [matters(Transformer(**UNIT), f"earth_{k}_ohm") for k in (1, 2)] == [False, True]  # Dyn11
    assert not matters(Transformer(**UNIT), "measures")
    assert matters(Transformer(**UNIT, regulates="winding 2"), "measures")
    assert matters(Regulator(**UNIT), "measures")


def test_what_a_changer_a_starter_or_a_held_voltage_needs_does_nothing_without():
    assert not matters(Transformer(**UNIT), "hold_percent")
    assert matters(Transformer(**UNIT, regulates="winding 2"), "hold_percent")
    assert not matters(Motor(node="A"), "limited_current")
    assert matters(Motor(node="A", starter="drive"), "limited_current")
    assert not matters(Generator(node="A"), "q_max_kvar")
    assert matters(Generator(node="A", hold_percent=100.0), "q_max_kvar")


def test_only_what_is_not_the_usual_is_said_to_be_stated():
    assert not any(states_phases(e) for e in (Load(node="A"), Cable(**UNIT), Transformer(**UNIT), Joint()))
    assert states_phases(Joint(earth_ohm=0.0))
    assert states_phases(Supply(node="A", wires="split-phase"))
    assert states_phases(Cable(**UNIT, neutral="none"))


def test_the_choices_go_round_both_ways():
    assert [turned("all", 1), turned("CA", 1), turned("all", -1)] == ["A", "all", "CA"]
