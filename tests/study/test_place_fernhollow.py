"""Fernhollow Estate: a long low-voltage run against a step-up/step-down pair, and its traps."""

import math

import pytest
from sample_places import changed, failing, place, proven, told

from app.model import edits
from app.study.outcome import Verdict

PEAK, NIGHT = "Peak, low intake", "Light, high intake"
FUSE = ("earth fault", "B3", "")
PHASE = math.sqrt(3)
ONE_KV = {
    "T1": {"v2_v": 1000.0},
    "T2": {"v1_v": 1000.0},
    "C1": {
        "resistance_ohm_per_km": 0.125, "reactance_ohm_per_km": 0.072, "capacitance_uf_per_km": None,
        "area_mm2": 240.0, "rating_a": 265.0,
    },
}  # fmt: skip


def house(outcome, case=0, node="B4"):
    """Phase volts at the house."""
    return outcome.nodes.at(node, case).voltage_v / PHASE


def cables(runs):
    return place("fernhollow", C1={"side_by_side": runs}, C2={"side_by_side": runs})


def test_one_cable_fails_volts_and_drop_two_the_volts_and_three_by_hundredths_of_a_volt():
    low = ("voltage low", "B3", PEAK)
    assert failing(proven(cables(1))) == {low, ("voltage drop", "B3", PEAK), FUSE}
    assert failing(proven(cables(2))) == {low, FUSE}
    three = proven(cables(3))
    assert low in failing(three)
    assert f"{house(three, node='B3'):.1f}" == "216.2"  # as a display would round it, it is the limit
    assert house(three, node="B3") == pytest.approx(216.185, abs=5e-4)
    (finding,) = (f for f in told(three, "voltage low") if f.verdict is Verdict.FAILS)
    assert "93.61 % of nominal" in finding.sentence
    assert "allowed is 93.62 %" in finding.sentence


def test_the_pair_holds_one_notch_down_at_both_ends_of_the_intake_and_two_notches_fail_at_night():
    assert failing(proven(place("fernhollow_pair"))) == set()
    assert failing(proven(place("fernhollow_pair", T2={"tap": -2}))) == {("voltage high", "B4", NIGHT)}


def test_a_pair_at_1_kv_over_the_same_cable_would_hold_one_notch_down_too():
    """Its plates are those of the 11 kV pair: SCENARIOS gives no others."""
    pair = place("fernhollow_pair", **ONE_KV)
    assert failing(proven(pair)) == set()
    assert failing(proven(changed(pair, T2={"tap": 0}))) == {("voltage low", "B4", PEAK)}
    assert failing(proven(changed(pair, T2={"tap": -2}))) == {("voltage high", "B4", NIGHT)}
    eleven = proven(place("fernhollow_pair"))
    assert proven(pair).balance.loss_kw[0] > eleven.balance.loss_kw[0]


def test_raising_both_taps_cancels_out():
    """387.4 to 387.6 V, and 407.8 V for the step-up unit alone: the job's list of mistakes."""
    pair = edits.set_case(place("fernhollow_pair", T2={"tap": 0}), 0, supply_percent=100.0)

    def volts(one, two):
        return proven(changed(pair, T1={"tap": one}, T2={"tap": two})).nodes.at("B4", 0).voltage_v

    assert volts(0, 0) == pytest.approx(387.4, abs=0.05)
    assert volts(2, 2) == pytest.approx(387.6, abs=0.05)
    assert volts(2, 0) == pytest.approx(407.8, abs=0.05)
    assert volts(0, 2) < volts(0, 0) - 15


def test_t2_wound_for_433_v_is_too_high_at_night():
    """265 V phase at intake +6 %: the job's list of mistakes."""
    wound = place("fernhollow_pair", T2={"v2_v": 433.0, "tap": 0})
    outcome = proven(wound)
    assert failing(outcome) == {("voltage high", "B4", NIGHT)}
    assert house(outcome, 1) == pytest.approx(265, abs=0.5)
    assert told(proven(edits.set_case(wound, 1, supply_percent=100.0)), "voltage high")[0].value < 109.6


def test_t1_is_over_excited_at_an_intake_of_106_percent_and_only_advised_against():
    outcome = proven(place("fernhollow_pair"))
    (finding,) = (f for f in told(outcome, "over-excitation") if f.ids == ("T1",))
    assert (finding.verdict, finding.case) == (Verdict.ADVICE, NIGHT)
    assert finding.value == pytest.approx(106.0, abs=1e-9)
    lower = edits.set_case(place("fernhollow_pair"), 1, supply_percent=104.9)
    assert ("T1",) not in [f.ids for f in told(proven(lower), "over-excitation")]
    raised = proven(changed(lower, T1={"tapped": "winding 1", "tap": -1}))  # fed at a notch of less
    assert ("T1",) in [f.ids for f in told(raised, "over-excitation")]


def test_light_load_is_what_the_case_states_of_each_load():
    outcome = proven(place("fernhollow"))
    for id, kva in (("L1", 1.0), ("L2", 5.0)):
        state = outcome.attachments.at(id, 1)
        assert math.hypot(state.kw, state.kvar) == pytest.approx(kva, rel=1e-12)
        assert state.kw / math.hypot(state.kw, state.kvar) == pytest.approx(0.98, rel=1e-12)


def test_with_the_house_empty_the_pair_still_loses_its_iron_all_year():
    """2.8 MWh a year: the job's list of mistakes."""
    empty = place("fernhollow_pair", T2={"tap": 0})
    for id in ("L1", "L2"):
        empty = edits.set_own(empty, 1, id, percent=0.0)
    empty = edits.set_case(empty, 1, supply_percent=100.0)
    lost = proven(empty).balance.loss_kw[1]
    assert lost * 8.76 == pytest.approx(2.8, abs=0.05)
