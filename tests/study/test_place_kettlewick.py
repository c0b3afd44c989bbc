"""Kettlewick Yard: a ring of 400 V, two transformers, one open point, and its traps."""

import pytest
from msgspec.structs import replace
from sample_places import changed, failing, place, proven, told, without

from app.model import edits
from app.model.drawing import Case
from app.study import run
from app.study.outcome import Verdict

PEAK, NIGHT = "Peak, low intake", "Night, high intake"
BOARD_A = ("fault rating", "B3", "")  # rated for the ring open
CLOSED = {"W1": {"closed": True}, "W2": {"closed": True}}


def checks(outcome):
    return {check for check, _, _ in failing(outcome)}


def test_the_open_point_is_in_the_wrong_place_and_one_cable_far_over_its_rating():
    outcome = proven(place("kettlewick_open"))
    assert ("loading", "C6", PEAK) in failing(outcome)
    assert outcome.branches.at("C6").loaded_percent > 130


def test_open_point_capacitor_and_both_taps_cure_it_and_all_three_are_needed():
    cured = place("kettlewick_cured")
    assert failing(proven(cured)) == set()
    assert failing(proven(without(cured, "K1"))) == {("loading", "C6", PEAK)}
    assert checks(proven(changed(cured, T1={"tap": 0}, T2={"tap": 0}))) == {"voltage low"}
    elsewhere = changed(cured, W1={"closed": False}, W2={"closed": True})
    assert ("voltage low", "B5", PEAK) in failing(proven(elsewhere))


def test_the_night_at_a_tenth_of_the_load_and_105_percent_holds_one_notch_down_and_not_two():
    cured = place("kettlewick_cured")
    assert (cured.cases[1].load_percent, cured.cases[1].supply_percent) == (10.0, 105.0)
    outcome = proven(cured)
    assert all(f.in_case(1) is not Verdict.FAILS for f in outcome.findings)
    lower = proven(changed(cured, T1={"tap": -2}, T2={"tap": -2}))
    high = [f for f in told(lower, "voltage high") if f.in_case(1) is Verdict.FAILS]
    assert {"B3", "B8"} <= {f.ids[0] for f in high}
    switched = proven(edits.set_own_text(cured, 1, "K1", "off"))
    assert switched.nodes.at("B7", 1).voltage_v < outcome.nodes.at("B7", 1).voltage_v
    assert switched.balance.loss_kw[1] < outcome.balance.loss_kw[1]  # at night it is of no use


def test_between_c_and_d_is_the_best_of_all_places_to_open_the_ring():
    """Opening a cable without capacitance at either end is the same as leaving it out."""
    ring = place("kettlewick_cured", **CLOSED)
    opened = {id: proven(without(ring, id)) for id in ("C2", "C3", "C4", "C5", "C6")}
    assert [id for id, outcome in opened.items() if not failing(outcome)] == ["C4"]
    lost = {id: outcome.balance.loss_kw[0] for id, outcome in opened.items()}
    assert min(lost, key=lost.get) == "C4"
    assert lost["C4"] == pytest.approx(proven(place("kettlewick_cured")).balance.loss_kw[0], rel=1e-9)
    whole = proven(ring)
    assert whole.balance.loss_kw[0] < lost["C4"]  # closed it would lose less still
    assert failing(whole) == {BOARD_A}  # were it not for the board


def test_the_ring_closed_as_drawn_overloads_e_f():
    outcome = proven(place("kettlewick_open", **CLOSED))
    assert {id for check, id, _ in failing(outcome) if check == "loading"} == {"C6"}
    assert outcome.branches.at("C6").loaded_percent == pytest.approx(101.6, abs=0.05)
    (noted,) = told(outcome, "closed loop")
    assert {"T1", "T2", "W1", "W2", "C1", "C2", "C3", "C4", "C5", "C6"} == set(noted.ids)


def test_two_notches_apart_circulate_round_the_ring_with_all_loads_off():
    """ΔE / ΣZ: both transformers, the 400 V ring and the 11 kV cable, all seen at 400 V."""
    drawing = place("kettlewick_ring")
    (finding,) = told(proven(drawing), "circulating current")
    assert (finding.verdict, finding.ids, finding.case) == (Verdict.ADVICE, ("T1", "T2"), NIGHT)
    unit = complex(3900 * 400**2 / 500e3**2, 0)
    unit += 1j * (0.04**2 * (400**2 / 500e3) ** 2 - unit.real**2) ** 0.5
    hot = 1 + 0.00403 * (60 - 20)
    cable = 0.54 * complex(0.125 * hot, 0.072) + 0.6 * complex(0.32 * hot, 0.105) / (27.5 * 1.025) ** 2
    amps = 1.05 * 400 * (1 / 0.975 - 1 / 1.025) / 3**0.5 / abs(2 * unit + cable)
    assert finding.value == pytest.approx(100 * amps / (500e3 / 400 / 3**0.5) / 0.975, rel=1e-9)
    said = "with all loads off 115 A circulates at 400 V, 16.4 % of the rating of T1 at its 11\u202f000 V"
    assert f"{said} winding" in finding.sentence
    quiet = replace(without(drawing, "K1"), cases=(Case(load_percent=0.0, supply_percent=105.0),))
    assert proven(quiet).branches.at("C2").current_a == pytest.approx(amps, rel=1e-3)  # iron aside
    alike = proven(changed(drawing, T2={"tap": -1}))
    assert failing(alike) == {BOARD_A}
    assert told(alike, "circulating current") == []


def test_the_share_that_circulates_is_the_gap_of_the_taps_over_all_that_lies_round_the_ring():
    """One notch apart circulates half of what two do; the cables keep it far from 62 % of rated."""
    two, one = (
        told(run(place("kettlewick_ring", T2={"tap": tap})), "circulating current")[0].value for tap in (1, 0)
    )
    assert one / two == pytest.approx(0.5, abs=0.02)
    assert two < 100 * 0.05 / (0.04 + 0.04) / 2


def test_with_t2_out_of_service_t1_cannot_carry_the_closed_ring():
    outcome = proven(without(place("kettlewick_ring"), "T2"))
    over = {id for check, id, _ in failing(outcome) if check == "loading"}
    assert {"T1", "C2", "C3", "C4"} <= over
    assert outcome.branches.at("T1").loaded_percent > 110
    assert outcome.branches.at("C2").loaded_percent > 200
    assert not told(outcome, "closed loop") + told(outcome, "circulating current")


def test_at_night_t1_carries_the_yard_alone():
    outcome = proven(without(place("kettlewick_ring", T1={"tap": -1}), "T2"))
    assert all(f.in_case(1) is not Verdict.FAILS for f in outcome.findings if f.check != "fault rating")
