"""What moves by itself: held against nodal equations at the notches found, and the traps told."""

import math

import numpy as np
import pytest
from msgspec.structs import replace
from study_layouts import changed, drawing, line
from study_nodal import Nodal

from app.model.drawing import Case
from app.model.kinds import Busbar, Generator, Load, Regulator, Supply, Transformer
from app.study import run, starts, tap_curve
from app.study.outcome import Verdict
from app.study.record import record
from solver.status import Status

CASES = (
    Case(name="Day"),
    Case(name="Night", supply_percent=106.0, load_percent=10.0),
    Case(name="Low", supply_percent=97.0),
)


def lane(cases=CASES, **fields):
    """400 V, 250 m, regulator, 200 m, a load."""
    return drawing(
        cases,
        B1=Busbar(), S1=Supply(node="B1"), C1=line("B1", "B2", length_m=250.0), B2=Busbar(),
        V1=Regulator(start="B2", end="B3", **fields), B3=Busbar(), C2=line("B3", "B4"), B4=Busbar(),
        L1=Load(node="B4", demand_kva=60.0),
    )  # fmt: skip


def farm(**fields):
    """11 kV, a transformer whose tap changer steps in 1.25 %, a load behind a cable."""
    unit = {"rating_kva": 250.0, "notch_percent": 1.25, "taps_up": 8, "taps_down": 8, **fields}
    return drawing(
        CASES,
        B1=Busbar(), S1=Supply(node="B1", nominal_v=11000.0), T1=Transformer(start="B1", end="B2", **unit),
        B2=Busbar(nominal_v=400.0), C1=line("B2", "B3"), B3=Busbar(), L1=Load(node="B3", demand_kva=120.0),
    )  # fmt: skip


def told(outcome, check):
    return [f for f in outcome.findings if f.check == check]


def level(outcome, node, case):
    return outcome.nodes.at(node, case).percent


def test_a_regulator_holds_its_band_in_every_case_with_a_notch_of_its_own():
    outcome = run(lane())
    assert outcome.status is Status.SOLVED
    notch = outcome.branches.column("notch")[outcome.branches.rows["V1"]]
    assert len(set(notch.tolist())) == 3
    for case in range(3):
        assert abs(level(outcome, "B3", case) - 100) <= 100 / 120 * (1 + 1e-9)
        before, after = level(outcome, "B2", case), level(outcome, "B3", case)
        assert after == pytest.approx(before * (1 + 0.00625 * notch[case]), rel=1e-9)
    assert not told(outcome, "end stop")


def test_a_tap_changer_gives_what_nodal_equations_give_at_its_notches():
    base = farm(regulates="winding 2", bandwidth_percent=2.0)
    outcome = run(base)
    for case in range(3):
        notch = int(outcome.branches.at("T1", case).notch)
        assert abs(level(outcome, "B2", case) - 100) <= 1.0 + 1e-9
        fixed = replace(base.elements["T1"], regulates="no", tap=notch)
        voltage = Nodal(changed(base, T1=fixed), case).solve()
        for id, volts in voltage.items():
            assert outcome.nodes.at(id, case).voltage_v == pytest.approx(abs(volts), rel=1e-9)
    assert outcome.branches.at("T1", 1).notch > outcome.branches.at("T1", 0).notch


@pytest.mark.parametrize("tapped", ["winding 1", "winding 2"])
def test_taps_on_either_winding_reach_the_band(tapped):
    outcome = run(farm(regulates="winding 2", tapped=tapped, bandwidth_percent=2.0))
    assert all(abs(level(outcome, "B2", case) - 100) <= 1.0 + 1e-9 for case in range(3))


def test_a_tap_that_nobody_moves_stays():
    outcome = run(farm(tap=-3))
    assert outcome.branches.column("notch")[outcome.branches.rows["T1"]].tolist() == [-3.0] * 3
    assert math.isnan(outcome.branches.at("C1").notch)


def test_line_drop_compensation_holds_the_far_end():
    outcome = run(lane(drop_r_ohm=0.125 * 0.2, drop_x_ohm=0.072 * 0.2))
    for case in range(3):
        assert abs(level(outcome, "B4", case) - 100) <= 100 / 120 * (1 + 1e-9)
    plain = run(lane())
    assert level(plain, "B4", 0) < 100 - 100 / 120


def test_line_drop_on_two_wires_counts_out_and_back():
    two = {"wires": "two-wire", "nominal_v": 230.0}
    base = lane(drop_r_ohm=0.125 * 0.2, drop_x_ohm=0.072 * 0.2)
    base = changed(base, S1=replace(base.elements["S1"], **two), L1=Load(node="B4", demand_kva=9.0))
    outcome = run(base)
    assert all(abs(level(outcome, "B4", case) - 100) <= 100 / 120 * (1 + 1e-9) for case in range(3))


def test_an_end_stop_is_told_and_fails_nothing_by_itself():
    outcome = run(lane(cases=(Case(supply_percent=85.0),)))
    assert outcome.branches.at("V1").notch == 16
    (found,) = told(outcome, "end stop")
    assert found.verdict is Verdict.ADVICE
    assert "+16 (+10.0 %)" in found.sentence


def test_a_band_narrower_than_a_step_hunts_and_is_named():
    outcome = run(farm(regulates="winding 2", bandwidth_percent=0.2))
    assert outcome.status is Status.NOT_SETTLED
    (found,) = told(outcome, "hunting")
    assert found.verdict is Verdict.BLOCKS
    assert found.ids == ("T1",)
    assert "T1 hunts" in found.sentence


def test_power_that_runs_backwards_drives_the_wrong_mode_to_its_end_stop():
    roof = Generator(node="B4", output_kw=100.0)
    low = (Case(supply_percent=97.0),)
    wrong = run(changed(lane(cases=low, mode="with the power"), G1=roof))
    (found,) = told(wrong, "runs away")
    assert found.verdict is Verdict.FAILS
    assert abs(wrong.branches.at("V1").notch) == 16
    for mode in ("forward", "idle in reverse"):
        right = run(changed(lane(cases=low, mode=mode), G1=roof))
        assert not told(right, "runs away")
    assert right.branches.at("V1").notch == 0
    held = run(changed(lane(cases=low), G1=roof))
    assert abs(level(held, "B3", 0) - 100) <= 100 / 120 * (1 + 1e-9)


def test_a_regulator_that_is_fed_from_its_end_runs_away_unless_it_follows_the_power():
    def turned(mode):
        base = lane(cases=(Case(supply_percent=96.0),))
        return run(changed(base, V1=Regulator(start="B3", end="B2", mode=mode)))

    assert told(turned("forward"), "runs away")
    right = turned("with the power")
    assert not told(right, "runs away")
    assert abs(level(right, "B3", 0) - 100) <= 100 / 120 * (1 + 1e-9)


def test_a_generator_holds_its_volts_within_its_limits():
    set_ = Generator(node="B4", output_kw=20.0, hold_percent=99.0, q_min_kvar=-60.0, q_max_kvar=90.0)
    base = changed(lane(cases=(Case(), Case(name="Low", supply_percent=92.0))), V1=None)
    base = changed(base, C3=line("B2", "B3", length_m=10.0), G1=set_)
    outcome = run(base)
    assert level(outcome, "B4", 0) == pytest.approx(99.0, abs=1e-6)
    made = outcome.attachments.at("G1", 0)
    assert -60 < made.kvar < 90
    assert made.kw == pytest.approx(20.0)
    fixed = replace(set_, hold_percent=None, output_kvar=made.kvar)
    voltage = Nodal(changed(base, G1=fixed), 0).solve()
    assert abs(voltage["B4"]) == pytest.approx(outcome.nodes.at("B4").voltage_v, rel=1e-7)
    assert outcome.attachments.at("G1", 1).kvar == pytest.approx(90.0)
    (found,) = told(outcome, "reactive limit")
    assert (found.verdict, found.case) == (Verdict.ADVICE, "Low")


def test_the_tap_curve_lets_other_changers_step_and_fixes_its_own():
    base = farm()
    regulated = changed(base, V1=Regulator(start="B3", end="B4"), B4=Busbar(), L1=Load(node="B4"))
    curve = tap_curve(regulated, "T1")
    assert np.isfinite(curve.loss_kw).all()
    own = tap_curve(farm(regulates="winding 2"), "T1")
    np.testing.assert_allclose(own.lowest_percent, tap_curve(base, "T1").lowest_percent, rtol=1e-9)


def test_notches_stand_in_the_record_and_starts_keep_them():
    from app.model.kinds import Motor

    base = changed(lane(), M1=Motor(node="B4", rated_kw=4.0))
    outcome = run(base)
    notch = outcome.branches.column("notch")[outcome.branches.rows["V1"]].tolist()
    assert record(base, outcome, "0")["branches"]["V1"]["notch"] == notch
    table = starts(base)
    np.testing.assert_array_equal(table.column("motor_v"), outcome.starts.column("motor_v"))


def test_balance_closes_through_a_regulator():
    outcome = run(lane())
    b = outcome.balance
    np.testing.assert_allclose(b.supply_kw, b.load_kw + b.loss_kw, rtol=1e-9)
    assert outcome.branches.at("V1").loss_kw == pytest.approx(0.0, abs=1e-9)


def test_a_regulator_in_a_ring_is_solved_and_two_side_by_side_are_refused():
    ring = changed(lane(cases=(Case(),)), C3=line("B3", "B1", length_m=300.0))
    outcome = run(ring)
    assert outcome.status is Status.SOLVED
    assert outcome.balance.closure[0] < 1e-6
    twice = run(changed(ring, V2=Regulator(start="B2", end="B3")))
    assert twice.status is Status.INVALID
    assert any("V1 and V2 form a loop without any impedance" in f.sentence for f in twice.findings)


def test_a_generator_cannot_hold_what_a_supply_or_another_holds():
    from app.model.kinds import Switch

    holding = Generator(node="B3", output_kw=5.0, hold_percent=100.0)
    base = changed(lane(cases=(Case(),)), V1=Switch(start="B2", end="B3"), G1=holding)
    assert not told(run(base), "held twice")
    twice = run(changed(base, G2=replace(holding, node="B2", output_kvar=2.0)))
    (found,) = told(twice, "held twice")
    assert found.ids == ("G2", "G1")
    assert twice.attachments.at("G2").kvar == pytest.approx(2.0)
    (found,) = told(run(changed(base, G1=replace(holding, node="B1"))), "held twice")
    assert found.ids == ("G1", "S1")
