"""Rings, branches side by side, joined supplies: what is noted, what is barred, and that the figures hold."""

import msgspec
import numpy as np
import pytest
from study_layouts import changed, drawing, line, meshed_town, two_nodes
from study_nodal import Nodal
from test_study_batch import CASES, alone, assert_same_outcome, same

from app.model.drawing import Case
from app.model.kinds import Busbar, Capacitor, Load, Supply, Switch, Transformer
from app.study import path, run, tap_curve
from app.study.outcome import Verdict
from solver.status import Status


def told(base, check):
    """The one finding of a check."""
    found = [f for f in run(base).findings if f.check == check]
    assert len(found) == 1, [f.sentence for f in run(base).findings]
    return found[0]


def noted(base, check):
    finding = told(base, check)
    assert finding.verdict is Verdict.NOTE
    assert run(base).status is Status.SOLVED
    return finding


def barred(base, check):
    finding = told(base, check)
    assert finding.verdict is Verdict.BLOCKS
    outcome = run(base)
    assert outcome.status is Status.INVALID
    assert np.isnan(outcome.nodes.column("voltage_v")).all()
    return finding


def ring(**more):
    base = changed(
        two_nodes(), B3=Busbar(), C2=line("B2", "B3", name="Back lane"), W1=Switch(start="B3", end="B1")
    )
    return changed(base, **more)


def pair(first=None, second=None, **more):
    """Two transformers side by side, 500 kVA 11/0.4 kV, uk 4 %."""
    plate = {"start": "B1", "end": "B2", "rating_kva": 500.0, "v1_v": 11000.0, "v2_v": 400.0}
    plate |= {"uk_percent": 4.0, "load_loss_w": 3900.0, "no_load_loss_w": 459.0}
    return drawing(
        B1=Busbar(), S1=Supply(node="B1", nominal_v=11000.0), B2=Busbar(),
        T1=Transformer(**plate | (first or {})), T2=Transformer(**plate | (second or {})), **more,
    )  # fmt: skip


def meeting(**supply):
    """Two supplies with 400 m of cable between them, and a load halfway."""
    return changed(
        two_nodes(), B3=Busbar(), C2=line("B2", "B3"),
        S2=Supply(**{"node": "B3", "name": "Old intake", **supply}),
    )  # fmt: skip


# what is noted and what is barred ------------------------------------------------------------------


def test_a_closed_ring_is_noted_with_its_branches_and_the_switch_that_parts_it():
    finding = noted(ring(), "closed loop")
    assert set(finding.ids) == {"C1", "C2", "W1"}
    assert finding.sentence == (
        "C1, Back lane (C2) and W1 run as a closed ring: protection and fault level change. "
        "Opening W1 parts it."
    )


def test_two_loops_are_two_findings_and_many_are_counted():
    def loops(count):
        more = {f"C{i}": line("B3", "B1") for i in range(3, 2 + count)}
        base = changed(ring(W1=None), C99=line("B3", "B1"), **more)
        return [f for f in run(base).findings if f.check == "closed loop"]

    assert len(loops(2)) == 2
    assert len(loops(20)) == 13
    assert loops(20)[-1].sentence == "8 more closed loops run as closed rings."
    assert len(loops(20)[-1].ids) == 9  # eight cables and the switch they all go round by


def test_branches_side_by_side_are_noted():
    finding = noted(changed(two_nodes(), C2=line("B1", "B2")), "closed loop")
    assert finding.sentence.startswith("C1 and C2 run side by side and share the current")
    assert "one with 2 in parallel" in finding.sentence
    bridged = changed(two_nodes(), W1=Switch(start="B1", end="B2"))
    assert "in parallel" not in noted(bridged, "closed loop").sentence


def test_a_loop_without_impedance_is_its_own_finding():
    base = changed(
        two_nodes(), B3=Busbar(), W1=Switch(start="B2", end="B3"), C2=line("B3", "B2", length_m=0.0)
    )
    finding = barred(base, "zero-impedance loop")
    assert set(finding.ids) == {"W1", "C2"}
    assert "without any impedance" in finding.sentence
    assert not [f for f in run(base).findings if f.check == "closed loop"]


def test_a_loop_without_impedance_is_found_where_each_of_its_nodes_is_fed_otherwise():
    base = drawing(
        B0=Busbar(), S1=Supply(node="B0"), B1=Busbar(), B2=Busbar(), B3=Busbar(),
        C1=line("B0", "B1"), C2=line("B0", "B2"), C3=line("B0", "B3"),
        W1=Switch(start="B1", end="B2"), W2=Switch(start="B2", end="B3"), W3=Switch(start="B3", end="B1"),
    )  # fmt: skip
    assert set(barred(base, "zero-impedance loop").ids) == {"W1", "W2", "W3"}
    opened = changed(base, W3=Switch(start="B3", end="B1", closed=False))
    assert run(opened).status is Status.SOLVED


def test_two_supplies_joined_name_the_way_between_and_what_they_exchange():
    base = meeting(held_percent=98.0)
    finding = noted(base, "supplies joined")
    assert finding.ids == ("S1", "S2", "C1", "C2")
    assert finding.sentence == (
        "Supplies S1 and Old intake (S2) are joined through C1 and C2: they feed into each other, and "
        "protection and fault level change."
    )
    exchanged = noted(base, "power exchanged")
    outcome = run(base)
    fed = [outcome.attachments.at(i).kw for i in ("S1", "S2")]
    assert fed[1] < 0 < fed[0]
    assert (
        f"S1 feeds in {fed[0]:.1f} kW and Old intake (S2) takes back {-fed[1]:.1f} kW." in exchanged.sentence
    )
    z = complex(outcome.branches.at("C1").resistance_ohm, outcome.branches.at("C1").reactance_ohm) * 2
    passing = (400 - 392) / 3**0.5 / z  # A, with the loads off
    assert f"and {abs(passing):.1f} A pass from S1 to Old intake (S2)." in exchanged.sentence
    equal = noted(meeting(), "power exchanged").sentence
    assert "With all loads off nothing passes between them." in equal


def test_two_supplies_joined_in_two_ways_are_one_finding():
    base = changed(meeting(), C3=line("B1", "B3"))
    assert "through C1 and C2 and by 1 way more:" in noted(base, "supplies joined").sentence


def test_supplies_joined_without_impedance_are_barred():
    base = changed(two_nodes(), S2=Supply(node="B3"), B3=Busbar(), W1=Switch(start="B1", end="B3"))
    finding = barred(base, "supplies joined")
    assert finding.ids == ("S1", "S2", "W1")
    assert "without any impedance" in finding.sentence
    uneven = changed(base, S2=Supply(node="B3", nominal_v=230.0))
    assert {f.check for f in run(uneven).findings if f.verdict is Verdict.BLOCKS} == {
        "supplies joined", "mixed levels",
    }  # fmt: skip


def test_two_supplies_on_one_node():
    finding = barred(changed(two_nodes(), S2=Supply(node="B1")), "supplies joined")
    assert finding.sentence.startswith("Supplies S1 and S2 both stand on B1: how they share")


def test_two_wires_are_not_joined_to_three_phases():
    assert "one has two wires" in barred(meeting(wires="two-wire"), "supplies joined").sentence


def test_vector_groups_that_do_not_close_name_the_transformers_the_angle_and_the_current():
    finding = barred(pair(second={"vector_group": "Yyn0", "name": "New"}), "vector group")
    assert finding.ids == ("T1", "T2")
    assert finding.sentence == (
        "T1 with vector group Dyn11 and New (T2) with vector group Yyn0 stand in one closed loop; the phases "
        "meet 30° apart, which would drive about 6.5 times the rated current of T1. "
        "Give them groups that agree, or open the loop."
    )
    assert run(pair(second={"vector_group": "Yzn11"})).status is Status.SOLVED


def test_groups_that_agree_only_all_the_way_round_close():
    """Dyn11 and back up by Dyn1 turned round is a turn of an hour less and an hour more."""
    plate = {"start": "B2", "end": "B3", "v1_v": 400.0, "v2_v": 11000.0, "rating_kva": 500.0}
    base = changed(
        pair(),
        T2=Transformer(vector_group="Dyn1", **plate),
        B3=Busbar(nominal_v=11000.0),
        C1=line("B1", "B3"),
    )
    assert run(base).status is Status.SOLVED
    wrong = changed(base, T2=Transformer(vector_group="Dyn11", **plate))
    assert "60° apart" in barred(wrong, "vector group").sentence


def test_supplies_held_at_other_angles_are_barred_from_an_hour_on():
    finding = barred(meeting(angle_deg=30.0), "vector group")
    assert finding.sentence == (
        "S1 held at 0° and Old intake (S2) held at 30° are joined; their phases meet 30° apart. "
        "Let their angles agree, or part them."
    )


# what circulates ------------------------------------------------------------------------------------


def test_unequal_taps_circulate_with_all_loads_off():
    """Ic / In = Δtap / (uk1 + uk2): two notches of 2.5 % against uk 4 % + 4 % is 62 % of rated current."""
    base = pair(second={"tap": -2}, L1=Load(node="B2", demand_kva=300.0))
    finding = told(base, "circulating current")
    assert finding.verdict is Verdict.ADVICE
    assert finding.sentence.endswith(" Advised: at most 10 %.")
    assert finding.whose == "advice, common practice, no source"
    assert finding.ids == ("T1", "T2")
    amps = (400 / 0.95 - 400) / 3**0.5 / (2 * 0.04 * 400**2 / 500e3)
    rated = 500e3 / 400 / 3**0.5
    assert 100 * amps / rated == pytest.approx(65.8, abs=0.05)
    assert finding.value == pytest.approx(100 * amps / rated / 0.95, rel=1e-9)  # at winding 1, tapped down
    assert "ratios are 5.3 % apart: with all loads off 475 A circulates at 400 V, 69.3 %" in finding.sentence
    raised = told(pair(second={"tap": 2}), "circulating current")
    assert raised.value == pytest.approx(100 * (1 - 1 / 1.05) / 0.08, rel=1e-9)
    assert not [f for f in run(pair()).findings if f.check == "circulating current"]


def test_what_circulates_flows_in_a_layout_that_has_nothing_else_to_carry():
    base = pair({"no_load_loss_w": 0.0, "no_load_current_percent": 0.0}, {"tap": 1})
    base = changed(
        base, T2=msgspec.structs.replace(base.elements["T2"], no_load_loss_w=0.0, no_load_current_percent=0.0)
    )
    outcome, finding = run(base), told(base, "circulating current")
    assert outcome.branches.at("T1").loaded_percent == pytest.approx(finding.value, rel=1e-9)
    assert (outcome.branches.at("T1").end_a, outcome.branches.at("T1").forward) == (
        pytest.approx(outcome.branches.at("T2").end_a),
        True,
    )
    assert not outcome.branches.at("T2").forward


def test_what_circulates_is_told_for_the_case_that_drives_most():
    base = changed(pair(second={"tap": -1}), L1=Load(node="B2"))
    base = msgspec.structs.replace(base, cases=CASES)
    finding = told(base, "circulating current")
    assert finding.case == "Night"
    assert finding.sentence.count("in case Night") == 1


def test_windings_of_another_rating_in_one_loop_circulate_too():
    finding = told(pair(second={"v2_v": 433.0}), "circulating current")
    assert "ratios are 8.3 % apart" in finding.sentence
    assert finding.verdict is Verdict.ADVICE


def test_two_loops_through_the_same_transformers_are_told_once():
    base = pair(second={"tap": 1, "end": "B3"}, B3=Busbar(), C1=line("B2", "B3"), C2=line("B3", "B2"))
    assert told(base, "circulating current").ids == ("T1", "T2")


def test_a_small_mismatch_is_only_noted():
    finding = told(pair(second={"v2_v": 400.4}), "circulating current")
    assert finding.verdict is Verdict.NOTE
    assert 1 < finding.value < 10


# the figures ----------------------------------------------------------------------------------------


@pytest.mark.parametrize("seed", range(8))
def test_a_meshed_town_equals_an_independent_nodal_solution(seed):
    base = meshed_town(seed, cases=CASES)
    outcome = run(base)
    assert outcome.status is Status.SOLVED
    for case in range(len(CASES)):
        nodal = Nodal(base, case)
        for id, volts in nodal.solve().items():
            assert outcome.nodes.at(id, case).voltage_v == pytest.approx(abs(volts), rel=1e-9)
        for id in nodal.stamps:
            state, (enters, leaves) = outcome.branches.at(id, case), nodal.branch_power(id) / 1e3
            assert state.start_kw == pytest.approx(enters.real, abs=1e-6)
            assert state.end_kvar == pytest.approx(-leaves.imag, abs=1e-6)
            assert state.loss_kw == pytest.approx((enters + leaves).real, abs=1e-6)
        supplied = nodal.supplied() / 1e3
        assert outcome.balance.supply_kw[case] == pytest.approx(supplied.real, rel=1e-8, abs=1e-6)
    assert (outcome.balance.closure < 1e-9).all()
    b = outcome.balance
    np.testing.assert_allclose(b.supply_kw + b.generation_kw, b.load_kw + b.loss_kw, rtol=1e-9)


def test_two_branches_side_by_side_equal_one_of_two_in_parallel():
    two = run(changed(two_nodes(), C1=line("B1", "B2", rating_a=100.0), C2=line("B2", "B1", rating_a=100.0)))
    one = run(changed(two_nodes(), C1=line("B1", "B2", rating_a=100.0, side_by_side=2)))
    assert two.nodes.at("B2").voltage_v == pytest.approx(one.nodes.at("B2").voltage_v, rel=1e-12)
    assert two.balance.loss_kw[0] == pytest.approx(one.balance.loss_kw[0], rel=1e-9)
    single = one.branches.at("C1")
    for id, way in (("C1", 1), ("C2", -1)):
        state = two.branches.at(id)
        assert state.start_kw * way > 0
        assert state.forward is (way > 0)
        assert state.current_a == pytest.approx(single.current_a / 2, rel=1e-9)
        assert state.loaded_percent == pytest.approx(single.loaded_percent, rel=1e-9)
        assert state.drop_percent == pytest.approx(single.drop_percent, rel=1e-9)
    units = run(pair(L1=Load(node="B2", demand_kva=300.0)))
    merged = run(changed(pair({"side_by_side": 2}, L1=Load(node="B2", demand_kva=300.0)), T2=None))
    assert units.nodes.at("B2").voltage_v == pytest.approx(merged.nodes.at("B2").voltage_v, rel=1e-12)
    assert units.branches.at("T2").loaded_percent == pytest.approx(
        merged.branches.at("T1").loaded_percent, rel=1e-9
    )


@pytest.mark.parametrize("seed", range(4))
def test_cases_of_a_ring_as_a_batch_are_the_separate_runs(seed):
    base = meshed_town(seed, cases=CASES)
    together = run(base)
    for case in range(len(CASES)):
        single = run(alone(base, case))
        for name in ("nodes", "branches", "attachments"):
            for column, values in getattr(together, name).columns.items():
                other = getattr(single, name).column(column)
                if values.ndim == 2:
                    np.testing.assert_allclose(values[:, case], other[:, 0], rtol=1e-9, atol=1e-9)
                else:
                    assert same(values, other), column


def test_what_is_remembered_changes_no_bit_of_a_ring():
    base = meshed_town(1, cases=CASES)
    unit = next(i for i, e in base.elements.items() if isinstance(e, Transformer))
    moved = changed(base, **{unit: msgspec.structs.replace(base.elements[unit], tap=2)})
    first = run(moved)
    for other in (base, changed(base, R0=None), moved, ring(), pair(second={"tap": 1})):
        run(other)
    assert_same_outcome(run(moved), first)
    fresh = msgspec.structs.replace(
        moved, elements={i: msgspec.structs.replace(e) for i, e in moved.elements.items()}
    )
    assert_same_outcome(run(fresh), first)


def test_every_node_of_a_ring_is_reached_from_a_supply_through_the_fewest_branches():
    base = ring(B4=Busbar(), C3=line("B2", "B4"), L2=Load(node="B3", demand_kva=30.0))
    outcome = run(base)
    assert path(outcome, "B3") == ("W1",)
    assert path(outcome, "B4") == ("C1", "C3")
    assert outcome.nodes.at("B3").route_m == 0.0
    assert outcome.zones == {"B1": 0, "B2": 0, "B3": 0, "B4": 0}
    fed_two_ways = run(pair())
    assert fed_two_ways.zones == {"B1": 0, "B2": 1}


def test_the_way_of_a_ring_branch_is_that_of_its_power_in_each_case():
    base = ring(L1=Load(node="B2", demand_kva=30.0), L2=Load(node="B3", demand_kva=1.0))
    moved = changed(base, C2=line("B3", "B2"), C1=line("B2", "B1"))
    for one, way in ((base, -1), (moved, 1)):
        state = run(one).branches.at("C2")
        assert state.start_kw * way > 0
        assert state.forward is (way > 0)
        assert state.drop_percent > 0


def test_a_tap_in_a_ring_moves_all_that_its_side_feeds():
    base = pair(L1=Load(node="B2", demand_kva=300.0), B3=Busbar(), C1=line("B2", "B3"), L2=Load(node="B3"))
    for id in ("T1", "T2"):
        curve = tap_curve(base, id)
        for n, notch in enumerate(curve.notches):
            single = run(changed(base, **{id: msgspec.structs.replace(base.elements[id], tap=int(notch))}))
            percent = [single.nodes.at(i).percent for i in ("B2", "B3")]
            assert curve.lowest_percent[n] == pytest.approx(min(percent), rel=1e-9)
            assert curve.highest_percent[n] == pytest.approx(max(percent), rel=1e-9)
            assert curve.loss_kw[n, 0] == pytest.approx(single.balance.loss_kw[0], rel=1e-9)


def test_the_largest_share_of_a_ring_is_more_than_that_of_either_half():
    heavy = ring(L1=None, L2=Load(node="B2", demand_kva=4000.0))
    closed, opened = run(heavy), run(changed(heavy, W1=Switch(start="B3", end="B1", closed=False)))
    assert closed.status is opened.status is Status.NO_OPERATING_POINT
    assert closed.largest_share > 1.5 * opened.largest_share
    assert closed.to_blame in {"C1", "C2", "W1"}


def test_a_capacitor_or_generation_does_not_circulate():
    base = pair(second={"tap": 1}, K1=Capacitor(node="B2", rating_kvar=200.0))
    bare = pair(second={"tap": 1})
    assert told(base, "circulating current").value == told(bare, "circulating current").value
    quiet = msgspec.structs.replace(bare, cases=(Case(load_percent=0.0),))
    assert told(quiet, "circulating current").value == told(bare, "circulating current").value


def test_what_only_the_solver_finds_is_told_too(monkeypatch):
    monkeypatch.setattr("app.study.structure.ring_findings", lambda *_: [])
    base = changed(two_nodes(), W1=Switch(start="B1", end="B3"), B3=Busbar(), W2=Switch(start="B3", end="B1"))
    finding = barred(base, "closed loop")
    assert set(finding.ids) == {"W1", "W2"}
    assert "the volts do not close, or nothing limits the current" in finding.sentence
