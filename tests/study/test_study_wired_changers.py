"""Regulators, tap changers and held volts where phases are not alike: bands, phases, notches, traps told."""

import numpy as np
import pytest
from msgspec.structs import replace
from study_layouts import changed, drawing, line
from unlike_layouts import feeder, pole, street

from app.model.drawing import Case
from app.model.kinds import Busbar, Generator, Joint, Load, Regulator, Supply
from app.study import run, starts, tap_curve
from app.study.outcome import Verdict
from solver.status import Status

CASES = (Case(name="Day"), Case(name="Night", supply_percent=106.0, load_percent=10.0))
STEPS = {"regulates": "winding 2", "bandwidth_percent": 2.0}
HALF = 100 / 120  # half of the usual band, 2 V of 120 V


def told(outcome, check):
    return [f for f in outcome.findings if f.check == check]


def percent(outcome, node, phase, case=0):
    state = outcome.wires.nodes.at(node, case)
    return 100 * getattr(state, f"{phase.lower()}_v") / state.base_v


@pytest.mark.parametrize("phase", "ABC")
def test_a_tap_changer_holds_the_phase_it_measures(phase):
    outcome = run(street(CASES, unit={**STEPS, "measures": phase}))
    assert outcome.status is Status.SOLVED
    for case in (0, 1):
        assert abs(percent(outcome, "B2", phase, case) - 100) <= 1 + 1e-9
    assert any(abs(percent(outcome, "B2", p) - 100) > 0.2 for p in "ABC" if p != phase)
    notch = [int(n) for n in outcome.branches.column("notch")[outcome.branches.rows["T1"]]]
    for case, at in enumerate(notch):
        fixed = run(street(CASES, unit={"tap": at}))
        assert fixed.nodes.at("J1", case).percent == pytest.approx(
            outcome.nodes.at("J1", case).percent, rel=1e-9
        )


def test_the_first_phase_and_the_mean_are_others():
    first, named = (run(street(unit={**STEPS, "measures": m})) for m in ("first", "A"))
    np.testing.assert_array_equal(first.branches.column("notch"), named.branches.column("notch"))
    mean = run(street(unit={**STEPS, "measures": "mean", "bandwidth_percent": 1.3}))
    assert abs(np.mean([percent(mean, "B2", p) for p in "ABC"]) - 100) <= 0.65 + 1e-9


def rural(mode="first", cases=CASES, **fields):
    """Poles out to a regulator and on; loads of one phase beyond, each phase loaded otherwise."""
    reg = Regulator(start="P1", end="P2", measures=mode, **fields)
    return drawing(
        cases,
        B1=Busbar(), S1=Supply(node="B1", nominal_v=12470.0), P1=Joint(), O1=pole("B1", "P1", length_m=9e3),
        V1=reg, P2=Joint(), O2=pole("P2", "P3"), P3=Joint(),
        L1=Load(node="P3", demand_kva=500.0, phases="A"), L2=Load(node="P3", demand_kva=120.0, phases="B"),
        L3=Load(node="P3", demand_kva=300.0, phases="C"),
    )  # fmt: skip


def test_each_phase_steps_by_itself():
    outcome = run(rural("each"))
    assert outcome.status is Status.SOLVED
    for case in (0, 1):
        state, at = outcome.wires.branches.at("V1", case), outcome.branches.at("V1", case)
        notches = [state.a_notch, state.b_notch, state.c_notch]
        assert abs(at.notch) == max(abs(n) for n in notches)
        for phase, notch in zip("ABC", notches, strict=True):
            assert abs(percent(outcome, "P2", phase, case) - 100) <= HALF + 1e-9
            ratio = percent(outcome, "P2", phase, case) / percent(outcome, "P1", phase, case)
            assert ratio == pytest.approx(1 + 0.00625 * notch, rel=1e-9)
    day = outcome.wires.branches.at("V1")
    assert len({day.a_notch, day.b_notch, day.c_notch}) == 3
    ganged = run(rural("A"))
    assert np.isnan(ganged.wires.branches.at("V1").a_notch)
    assert any(abs(percent(ganged, "P2", p) - 100) > HALF for p in "BC")
    assert outcome.balance.closure.max() < 1e-9


def test_line_drop_compensation_holds_the_far_end_of_a_measured_phase():
    z = 0.4 * 3, 0.38 * 3
    base = rural("A", (Case(),), drop_r_ohm=z[0], drop_x_ohm=z[1])
    near, far = run(rural("A", (Case(),))), run(base)
    assert far.branches.at("V1").notch > near.branches.at("V1").notch


def test_a_regulator_on_a_lateral_of_one_phase_measures_that():
    base = rural()
    base = changed(
        base, O2=pole("P2", "P3", phases="C"), V1=Regulator(start="P1", end="P2"), L1=None, L2=None
    )
    beyond = changed(
        base, V1=None, O3=pole("P1", "J", phases="C"), J=Joint(), V2=Regulator(start="J", end="P2")
    )
    outcome = run(beyond)
    assert outcome.wires.nodes.at("P2").phases == "C"
    assert abs(percent(outcome, "P2", "C") - 100) <= HALF + 1e-9
    asked = run(changed(beyond, V2=replace(beyond.elements["V2"], measures="A")))
    (found,) = told(asked, "measured phase")
    assert (found.verdict, found.ids) == (Verdict.ADVICE, ("V2", "P2"))
    assert "V2 is to measure phase A, which does not reach P2" in found.sentence


def test_an_end_stop_names_the_phase():
    outcome = run(rural("each", (Case(supply_percent=85.0),)))
    sentences = [f.sentence for f in told(outcome, "end stop")]
    assert any("on phase A: P2 is at" in s for s in sentences)
    assert all("+16 (+10.0 %)" in s for s in sentences)


def test_a_band_narrower_than_a_step_hunts_on_a_phase():
    outcome = run(street(unit={**STEPS, "bandwidth_percent": 0.1}))
    assert outcome.status is Status.NOT_SETTLED
    assert "T1 hunts on phase A" in told(outcome, "hunting")[0].sentence


@pytest.mark.parametrize("fields", [{}, {"phases": "B"}, {"phases": "CA"}])
def test_a_generator_holds_its_volts_with_its_own_phases(fields):
    made = Generator(
        node="B3", output_kw=6.0, hold_percent=98.0, q_min_kvar=-300.0, q_max_kvar=300.0, **fields
    )
    outcome = run(street(CASES, G1=made))
    wires = outcome.wires.nodes
    for case in (0, 1):
        volts = [getattr(wires.at("B3", case), f"{p}_v") for p in "abc"]
        if fields.get("phases") == "CA":
            assert outcome.attachments.at("G1", case).voltage_v == pytest.approx(392.0, rel=1e-8)
        else:
            held = [volts[1]] if fields else volts
            assert np.mean(held) == pytest.approx(0.98 * 400 / 3**0.5, rel=1e-8)
    limited = run(street(G1=replace(made, q_max_kvar=0.5, hold_percent=110.0)))
    (found,) = told(limited, "reactive limit")
    assert limited.attachments.at("G1").kvar == pytest.approx(0.5)


def test_one_conductor_and_four_step_alike():
    alike = changed(street(CASES, unit=STEPS), L2=None, L3=None, L4=None, C2=None, C3=None, J1=None, J2=None)
    alike = changed(alike, G1=Generator(node="B3", output_kw=3.0, hold_percent=99.0, q_max_kvar=9.0))
    one, four = run(alike), run(changed(alike, L9=Load(node="B3", demand_kva=0.0, phases="A")))
    assert four.wires is not None
    for name, column in one.branches.columns.items():
        np.testing.assert_allclose(four.branches.column(name), column, rtol=1e-7, atol=1e-7, err_msg=name)
    np.testing.assert_allclose(
        four.attachments.column("kvar")[:-1], one.attachments.column("kvar"), rtol=1e-7, atol=1e-7
    )


def test_curves_and_starts_take_changers_along():
    base = feeder(CASES, V1=Regulator(start="P1", end="Q1", measures="each"), Q1=Joint())
    base = changed(base, T2=replace(base.elements["T2"], start="Q1"))
    curve = tap_curve(base, "T3")
    assert np.isfinite(curve.loss_kw).all()
    assert np.isfinite(starts(base).at("M1").motor_v)
    behind = tap_curve(base, "T2")
    for n, notch in enumerate(behind.notches):
        at = run(changed(base, T2=replace(base.elements["T2"], tap=int(notch))))
        np.testing.assert_allclose(behind.loss_kw[n], at.balance.loss_kw, rtol=1e-9)


@pytest.mark.parametrize("tapped", ["winding 1", "winding 2"])
@pytest.mark.parametrize("id", ["T1", "T2", "T3", "T4"])
def test_a_changer_at_rest_is_the_same_unit_with_its_tap_there(id, tapped):
    """Star points behind ohms, and electrodes further out, so that earth carries something."""
    more = {"Y2": Joint(earth_ohm=1.0), "Z2": Joint(earth_ohm=1.0), "H2": Joint(earth_ohm=1.0)}
    base = feeder(CASES, CY=line("Y1", "Y2"), CZ=line("Z1", "Z2"), **more)
    for load, node in (("L4", "Y2"), ("L6", "Z2")):
        base = changed(base, **{load: replace(base.elements[load], node=node)})
    steps = {"hold_percent": 105.5, "bandwidth_percent": 3.0, "regulates": "winding 2"}
    taps = {"notch_percent": 1.5, "taps_up": 9, "taps_down": 9, "tapped": tapped, "earth_2_ohm": 0.4}
    unit = replace(base.elements[id], **steps, **taps)
    moved = run(changed(base, **{id: unit}))
    assert moved.branches.at(id).notch != 0
    for case in (0, 1):
        there = replace(unit, regulates="no", tap=int(moved.branches.at(id, case).notch))
        fixed = run(changed(base, **{id: there}))
        for name in ("a_v", "b_v", "c_v", "neutral_v"):
            was, now = (o.wires.nodes.column(name)[:, case] for o in (fixed, moved))
            np.testing.assert_allclose(now, was, rtol=1e-9, atol=1e-6, err_msg=name)
