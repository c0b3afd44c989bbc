"""Loops and joined supplies where phases are not alike: what circulates, and what is refused and why."""

import numpy as np
import pytest
from msgspec.structs import replace
from study_layouts import changed, drawing, line
from unlike_layouts import feeder, pole, street

from app.model.drawing import Case, Limits
from app.model.kinds import Busbar, Joint, Load, Motor, Supply, Transformer
from app.study import run
from app.study.outcome import Verdict
from solver.status import Status


def barred(base):
    return [f for f in run(base).findings if f.verdict is Verdict.BLOCKS]


def told(base, check):
    return [f for f in run(base).findings if f.check == check]


def unit(start, end, **fields):
    plate = {"rating_kva": 25.0, "v1_v": 7200.0, "v2_v": 230.0, "vector_group": "Ii0", "uk_percent": 3.0}
    return Transformer(start=start, end=end, **{**plate, **fields})


def test_a_lateral_closed_into_a_ring_shares_its_load():
    base = street(C9=line("B2", "J1", phases="A", length_m=400.0))
    outcome, alone = run(base), run(street())
    assert outcome.status is Status.SOLVED
    assert outcome.balance.closure.max() < 1e-9
    into = [outcome.wires.branches.at(c).a_a for c in ("C2", "C9")]
    load = outcome.wires.attachments.at("L2").a_a
    assert sum(into) == pytest.approx(load, rel=0.01)
    assert min(into) > 0.1 * load
    assert outcome.nodes.at("J1").percent > alone.nodes.at("J1").percent


def test_cables_side_by_side_are_one_of_two_runs():
    twice = street(C9=line("B3", "J1", phases="A"))
    base = street()
    merged = changed(base, C2=replace(base.elements["C2"], side_by_side=2))
    for name in ("a_v", "b_v", "c_v", "neutral_v"):
        one, two = (run(d).wires.nodes.column(name) for d in (merged, twice))
        np.testing.assert_allclose(two, one, rtol=1e-9, atol=1e-7)


def test_single_phase_units_in_parallel_on_one_phase_are_one_of_two():
    base = feeder(T8=unit("P1", "Q1", phases="B"), Q1=Joint(), L8=Load(node="Q1", demand_kva=9.0))
    twice = changed(base, T9=unit("P1", "Q1", phases="B"))
    merged = changed(base, T8=unit("P1", "Q1", phases="B", side_by_side=2))
    one, two = run(merged), run(twice)
    assert two.status is Status.SOLVED
    assert two.wires.nodes.at("Q1").b_v == pytest.approx(one.wires.nodes.at("Q1").b_v, rel=1e-9)
    assert two.branches.at("T8").loaded_percent == pytest.approx(
        one.branches.at("T8").loaded_percent, rel=1e-7
    )


def test_single_phase_units_of_unlike_ratios_circulate():
    base = feeder(
        T8=unit("P1", "Q1", phases="B"), Q1=Joint(), L8=Load(node="Q1", demand_kva=9.0),
        T9=unit("P1", "Q1", phases="B", tap=2),
    )  # fmt: skip
    (found,) = told(base, "circulating current")
    # 1 - 1/1.05 of the volts over twice 3 % of impedance
    assert found.value == pytest.approx(100 * (1 - 1 / 1.05) / 0.06, rel=1e-3)
    assert "ratios are 5.0" in found.sentence


@pytest.mark.parametrize(("first", "second"), [("A", "B"), ("B", "BC"), ("AB", "CA")])
def test_single_phase_units_of_unlike_phases_are_not_put_in_parallel(first, second):
    volts = [7200.0 if len(p) == 1 else 12470.0 for p in (first, second)]
    base = feeder(
        T8=unit("P1", "Q1", phases=first, v1_v=volts[0]), Q1=Joint(), L8=Load(node="Q1"),
        T9=unit("P1", "Q1", phases=second, v1_v=volts[1]),
    )  # fmt: skip
    found = [f for f in barred(base) if f.check == "vector group"]
    assert len(found) == 1
    assert set(found[0].ids) == {"T8", "T9"}
    assert f"Ii0 on {first}" in found[0].sentence
    assert "° apart" in found[0].sentence


def test_three_phase_groups_that_turn_are_still_refused():
    base = street(T2=Transformer(start="B1", end="B3", rating_kva=100.0, vector_group="Dyn1"))
    assert [f.check for f in barred(base)] == ["vector group"]
    agree = street(T2=Transformer(start="B1", end="B3", rating_kva=100.0))
    assert run(agree).status is Status.SOLVED
    assert not told(agree, "circulating current")
    apart = street(T2=Transformer(start="B1", end="B3", rating_kva=100.0, tap=2))
    assert told(apart, "circulating current")[0].verdict is Verdict.ADVICE


@pytest.mark.parametrize(
    ("wires", "words"), [("split-phase", "two hot wires and a neutral"), ("two-wire", "two wires")]
)
def test_supplies_of_unlike_systems_are_not_joined(wires, words):
    base = street(S2=Supply(node="B3", nominal_v=400.0, wires=wires))
    (found,) = [f for f in barred(base) if f.check == "supplies joined"]
    assert words in found.sentence
    assert "three phases" in found.sentence


def test_two_wires_closed_onto_three_phases_are_refused():
    base = street(unit=None, T8=unit("B2", "Q1", v1_v=400.0, v2_v=400.0), Q1=Joint(), C9=line("Q1", "B3"))
    found = [f for f in barred(base) if f.check == "closed loop"]
    assert len(found) == 1
    assert "two wires" in found[0].sentence


def test_supplies_of_three_phases_share_what_unlike_phases_draw():
    base = street(B9=Joint(), C9=line("B9", "B3"), S2=Supply(node="B9", nominal_v=400.0, angle_deg=-330.0))
    outcome = run(base)
    assert outcome.status is Status.SOLVED, [f.sentence for f in outcome.findings]
    assert outcome.balance.closure.max() < 1e-9
    kw = [outcome.attachments.at(s).kw for s in ("S1", "S2")]
    assert sum(kw) == pytest.approx(outcome.balance.supply_kw[0])
    assert told(base, "power exchanged")


def test_laterals_of_two_phases_meet_without_a_short_circuit():
    """A span between a lateral on A and one on C carries both on; each phase is a ring of its own."""
    outcome = run(feeder(P8=Joint(), O8=pole("P1", "P8", phases="A"), O9=pole("P8", "P2")))
    assert outcome.status is Status.SOLVED
    assert outcome.balance.closure.max() < 1e-9
    assert outcome.wires.nodes.at("P8").phases == "AB"


def test_two_wire_supplies_that_both_earth_their_neutral_exchange_by_earth_and_it_is_said():
    """Against nodal equations of phase and neutral between them, the neutral at earth at both ends."""
    load = Load(node="M", demand_kva=8.0, power_factor=1.0, constant_impedance_percent=100.0)
    base = drawing(
        (Case(),), Limits(neutral_v=50.0), B1=Busbar(), M=Joint(), B2=Busbar(), L1=load,
        S1=Supply(node="B1", nominal_v=230.0, wires="two-wire"), C1=line("B1", "M"),
        S2=Supply(node="B2", nominal_v=230.0, wires="two-wire", held_percent=98.0), C2=line("M", "B2"),
    )  # fmt: skip
    outcome = run(base)
    z = outcome.branches.at("C1").resistance_ohm / 2 + 1j * outcome.branches.at("C1").reactance_ohm / 2
    own = 8000 / 230.0**2
    matrix = np.array([[2 / z + own, -own], [-own, 2 / z + own]])
    phase, neutral = np.linalg.solve(matrix, [(230.0 + 225.4) / z, 0])
    wires = outcome.wires.branches
    assert wires.at("C1").a_a == pytest.approx(abs((230.0 - phase) / z), rel=1e-9)
    assert wires.at("C2").a_a == pytest.approx(abs((phase - 225.4) / z), rel=1e-9)
    assert [wires.at(c).n_a for c in ("C1", "C2")] == pytest.approx([abs(neutral / z)] * 2, rel=1e-9)
    (said,) = told(base, "power exchanged")
    assert f"{4.6 / abs(2 * z):.1f} A pass from S1 to S2." in said.sentence  # phase wires alone
    assert "Both hold their neutral at earth" in said.sentence
    (balanced,) = told(replace(base, limits=Limits()), "power exchanged")
    assert "earth" not in balanced.sentence
    assert f"{4.6 / abs(4 * z):.1f} A pass" in balanced.sentence  # out and back


UNLIKE = {
    "a loop": (
        {"T2": unit("B2", "B3", v1_v=208.0, v2_v=208.0, phases="AB"), "C3": line("B3", "B2")},
        "closed loop",
    ),
    "a group": (
        {"T2": Transformer(start="B2", end="B3", v1_v=208.0, v2_v=400.0), "S1": "two-wire"},
        "vector group",
    ),
    "a split": (
        {"T2": Transformer(start="B2", end="B3", v1_v=208.0, v2_v=400.0), "S1": "split-phase"},
        "no such phase",
    ),
    "a lateral": ({"T2": line("B2", "B3", phases="B"), "C3": line("B3", "B4", phases="C")}, "no such phase"),
}


@pytest.mark.parametrize("which", UNLIKE)
def test_where_unlike_systems_meet_the_cause_alone_is_told(which):
    """Not all that lies beyond: lines, loads and motors that no phase reaches on that account."""
    extra, check = UNLIKE[which]
    wires = extra.get("S1", "three-phase")
    parts = {id: part for id, part in extra.items() if id != "S1"}
    base = drawing(
        B1=Busbar(), S1=Supply(node="B1", nominal_v=208.0, wires=wires), C1=line("B1", "B2"), B2=Busbar(),
        B3=Busbar(), L1=Load(node="B3", demand_kva=1.0, phases="B"), M1=Motor(node="B3", rated_kw=1.0),
        C9=line("B3", "B4", phases="C"), B4=Busbar(), L2=Load(node="B4", demand_kva=1.0, phases="C"), **parts,
    )  # fmt: skip
    if which == "a lateral":
        base = changed(base, C9=None, M1=None)
    found = barred(base)
    assert [f.check for f in found] == [check], [f.sentence for f in found]
    assert not told(base, "no neutral")
    assert set(found[0].ids) & {"T2", "C3"}
