"""What is said where phases are not alike: assumptions, what stands in the way of more load, excitation."""

import pytest
from msgspec.structs import replace
from study_layouts import changed, drawing, line
from unlike_layouts import feeder, street

from app.model.kinds import Busbar, Generator, Joint, Load, Supply, Transformer
from app.study import run
from app.study.outcome import Verdict
from solver.status import Status


def assumed(base):
    return {(a.id, a.field): a.value for a in run(base).assumptions}


def test_what_hangs_on_one_phase_is_stated_at_its_volts():
    found = assumed(feeder())
    assert found["L4", "reference_v"] == pytest.approx(208 / 3**0.5)
    assert found["L5", "reference_v"] == 208.0
    assert found["L1", "reference_v"] == 120.0
    assert found["L2", "reference_v"] == 240.0
    assert found["L6", "reference_v"] == 240.0


def test_a_reference_left_blank_draws_what_that_voltage_stated_draws():
    base = feeder()
    mixed = replace(base.elements["L4"], constant_impedance_percent=100.0)
    blank, stated = (
        run(changed(base, L4=replace(mixed, reference_v=v))).attachments.at("L4").kw
        for v in (None, 208 / 3**0.5)
    )
    assert stated == pytest.approx(blank, rel=1e-12)


def test_neutrals_and_ways_back_are_listed_where_they_count_and_once():
    base = feeder()
    found = assumed(base)
    assert found["O1", "zero_resistance_ohm_per_km"] == pytest.approx(0.4 + 3 * 0.0493)
    assert found["O2", "zero_reactance_ohm_per_km"] == pytest.approx(3 * 0.38)
    assert found["C1", "neutral_resistance_ohm_per_km"] == 0.125
    assert ("C1", "zero_resistance_ohm_per_km") not in assumed(replace_supply(base))
    listed = [(a.id, a.field) for a in run(base).assumptions]
    assert len(listed) == len(set(listed))
    stated = replace(base.elements["C1"], neutral_resistance_ohm_per_km=0.3, neutral_reactance_ohm_per_km=0.1)
    assert not {f for i, f in assumed(changed(base, C1=stated)) if i == "C1" and f.startswith("neutral")}
    plain = changed(street(), L2=None, L3=None, L4=None, C2=None, C3=None, J1=None, J2=None)
    assert not any(f.startswith("neutral") for _, f in assumed(plain))


def replace_supply(base):
    """No fault level, so that nothing is listed for the sake of faults."""
    return changed(base, S1=replace(base.elements["S1"], fault_level_min_mva=None))


def test_star_star_cores_and_supplies_of_starts_are_listed():
    base = street(unit={"vector_group": "YNyn0"})
    found = assumed(base)
    assert ("T1", "z0_ratio") in found
    assert found["S1", "z0_ratio"] == 1.0
    still = changed(base, M1=replace(base.elements["M1"], state="off"))
    assert ("S1", "z0_ratio") not in {(a.id, a.field) for a in run(still).assumptions if a.value == 1.0}


def test_what_stands_in_the_way_names_the_phase():
    base = street(L9=Load(node="J1", demand_kva=200.0), unit={"rating_kva": 630.0})
    base = changed(base, C2=replace(base.elements["C2"], length_m=500.0))
    outcome = run(base)
    assert outcome.status is Status.NO_OPERATING_POINT
    assert outcome.to_blame == "C2"
    assert 0.05 < outcome.largest_share < 0.9
    (found,) = [f for f in outcome.findings if f.check == "no operating point"]
    assert "Lowest is then phase A of J1, at " in found.sentence
    less = changed(base, **scaled(base, outcome.largest_share * 0.99))
    assert run(less).status is Status.SOLVED
    more = changed(base, **scaled(base, outcome.largest_share * 1.02))
    assert run(more).status is Status.NO_OPERATING_POINT


def scaled(base, share):
    loads = {i: e for i, e in base.elements.items() if isinstance(e, Load)}
    moved = {i: replace(e, demand_kva=e.demand_kva * share) for i, e in loads.items()}
    motor = base.elements["M1"]
    return {**moved, "M1": replace(motor, rated_kw=motor.rated_kw * share)}


def test_a_core_is_judged_by_its_own_volts():
    """A single-phase unit from phase to earth has 7200 V, and its zone 12470."""
    single = {"rating_kva": 25.0, "v1_v": 7200.0, "v2_v": 240.0, "vector_group": "Ii0", "phases": "B"}
    base = feeder(T8=Transformer(start="P1", end="Q1", **single), Q1=Joint(), C8=line("Q1", "Q2"), Q2=Joint())
    base = changed(base, L8=Load(node="Q2", demand_kva=8.0))
    assert not [f for f in run(base).findings if f.check == "over-excitation"]
    high = changed(base, S1=replace(base.elements["S1"], held_percent=109.0))
    ids = {f.ids[0] for f in run(high).findings if f.check == "over-excitation"}
    assert {"T8", "T3"} <= ids
    (found,) = [f for f in run(high).findings if f.check == "over-excitation" and f.ids == ("T8",)]
    fed, three = run(high).wires.nodes.at("P1").b_v, run(high).nodes.at("P1")
    (whole,) = [f for f in run(high).findings if f.check == "over-excitation" and f.ids == ("T3",)]
    assert whole.value == pytest.approx(three.high_percent)
    assert three.high_percent > three.percent
    assert found.value == pytest.approx(100 * fed / 7200.0)


@pytest.mark.parametrize(
    "hung",
    [
        {"G1": Generator(node="B3", output_kw=3.0, phases="A")},
        {
            "L1": Load(node="B3", demand_kva=6.0, phases="A"),
            "L2": Load(node="B3", demand_kva=3.0, phases="B"),
        },
    ],
)
def test_where_a_lost_neutral_bars_the_operating_point_that_is_said_first(hung):
    base = drawing(
        B1=Busbar(), S1=Supply(node="B1"), C1=line("B1", "B2", neutral="none"), B2=Busbar(),
        C2=line("B2", "B3"), B3=Busbar(), **hung,
    )  # fmt: skip
    outcome = run(base)
    assert outcome.status is Status.NO_OPERATING_POINT
    first = outcome.findings[0]
    assert first.check == "no neutral"
    assert first.verdict is Verdict.BLOCKS
    assert first.ids == ("B2", "B3", *hung)
    assert "on a lost neutral" in first.sentence
    assert not any("infeed" in finding.sentence for finding in outcome.findings)
    whole = run(changed(base, C1=line("B1", "B2")))
    assert whole.status is Status.SOLVED


@pytest.mark.parametrize("build", ["open delta", "open star to open delta"])
def test_a_bank_of_two_coils_on_one_letter_says_what_is_allowed(build):
    unit = Transformer(
        start="B1", end="B2", v1_v=12470.0, v2_v=240.0, build=build, vector_group="Dd0", rating_kva=50.0
    )
    base = drawing(
        B1=Busbar(),
        S1=Supply(node="B1", nominal_v=12470.0),
        T1=unit,
        B2=Busbar(),
        L1=Load(node="B2", demand_kva=5.0),
    )
    assert run(base).status is Status.SOLVED
    assert run(changed(base, T1=replace(unit, phases="BC"))).status is Status.SOLVED
    outcome = run(changed(base, T1=replace(unit, phases="B")))
    (found,) = [f for f in outcome.findings if f.verdict is Verdict.BLOCKS]
    assert found.ids == ("T1",)
    assert f"({build}) states phase B" in found.sentence
    assert "Allowed are AB, BC or CA" in found.sentence
