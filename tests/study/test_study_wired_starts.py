"""Motor starts where phases are not alike: against closed loops worked out by hand, and the balanced case."""

import math

import numpy as np
import pytest
from study_layouts import changed, drawing, line

from app.model.drawing import Case, Limits
from app.model.kinds import Busbar, Load, Motor, Supply
from app.study import run, starts
from app.study.outcome import Verdict

LEVEL = {"fault_level_max_mva": 5.0, "fault_level_min_mva": 2.0, "xr": 1.5, "z0_ratio": 3.0}
SIZE, ANGLE = 400.0**2 / 2e6, math.atan(1.5)
Z1 = complex(SIZE * math.cos(ANGLE), SIZE * math.sin(ANGLE))
RUN = complex(0.125, 0.072) * 0.2
CASES = (Case(name="Day"), Case(name="Still", motor_percent=0.0))


def lane(cases=CASES, limits=None, **motor):
    fields = {"rated_kw": 3.0, "starting_current": 5.0, "starting_power_factor": 0.4, **motor}
    return drawing(
        cases, limits, B1=Busbar(), S1=Supply(node="B1", **LEVEL), C1=line("B1", "B2"), B2=Busbar(),
        M1=Motor(node="B2", **fields),
    )  # fmt: skip


def at_start(motor, across_v, ways):
    """Volts across the motor, and its amperes: an electromotive force in a loop, Z = U²/S of the motor."""
    running = motor.rated_kw * 1e3 / motor.efficiency / motor.power_factor
    size = across_v**2 / (running * motor.starting_current)
    angle = math.acos(motor.starting_power_factor)
    own = complex(size * math.cos(angle), size * math.sin(angle))
    current = across_v / (own + ways)
    return abs(current * own), abs(current), running / across_v


@pytest.mark.parametrize("phase", "ABC")
def test_a_motor_between_phase_and_neutral_dips_as_its_loop_says(phase):
    base = lane(phases=phase, rated_v=230.0)
    state, supply = starts(base).at("M1"), (2 * Z1 + 3 * Z1) / 3
    rated = 3e3 / base.elements["M1"].efficiency / base.elements["M1"].power_factor / 230.0
    own = 230.0 / (5.0 * rated) * complex(0.4, math.sqrt(1 - 0.4**2))
    current = 400 / 3**0.5 / (own + supply + 2 * RUN)
    assert state.current_a == pytest.approx(abs(current), rel=1e-9)
    assert state.motor_v == pytest.approx(abs(current * own), rel=1e-9)
    assert state.motor_percent == pytest.approx(100 * abs(current * own) / 230.0, rel=1e-9)
    assert state.times_rated == pytest.approx(abs(current) / rated, rel=1e-9)
    assert state.supply_v == pytest.approx(abs(400 - 3**0.5 * current * supply), rel=1e-9)


def test_a_motor_between_two_phases_dips_as_its_loop_says():
    base = lane(phases="BC")
    state = starts(base).at("M1")
    volts, amps, rated = at_start(base.elements["M1"], 400.0, 2 * (Z1 + RUN))
    assert state.motor_v == pytest.approx(volts, rel=1e-9)
    assert state.current_a == pytest.approx(amps, rel=1e-9)
    assert state.times_rated == pytest.approx(amps / rated, rel=1e-9)
    assert math.isnan(starts(base).at("M1", 1).motor_v)


def test_a_motor_of_three_phases_sees_its_lowest_winding():
    plain = lane(rated_kw=22.0)
    uneven = changed(plain, L1=Load(node="B2", demand_kva=15.0, phases="B"))
    state, alike = starts(uneven).at("M1"), starts(plain).at("M1")
    assert state.motor_v < alike.motor_v - 1
    assert state.board_step_percent == pytest.approx(
        100 * (1 - state.board_v / state.board_before_v), abs=1e-12
    )


def test_four_conductors_give_what_one_gives():
    base = changed(
        lane(rated_kw=22.0), L1=Load(node="B2", demand_kva=20.0, constant_current_percent=50.0),
        M2=Motor(node="B2", rated_kw=5.5, starter="soft starter", limited_current=3.0, state="starting"),
    )  # fmt: skip
    one, four = starts(base), starts(changed(base, L9=Load(node="B2", demand_kva=0.0, phases="C")))
    for name, column in one.columns.items():
        if name.endswith("_phase"):  # told only where phases are worked out one by one
            continue
        np.testing.assert_allclose(four.column(name), column, rtol=1e-9, atol=1e-9, err_msg=name)


def test_split_phase_halves_the_source_between_its_hot_wires():
    base = lane(phases="AB", rated_v=240.0)
    supply = Supply(node="B1", nominal_v=240.0, wires="split-phase", **LEVEL)
    state = starts(changed(base, S1=supply)).at("M1")
    z = Z1 * (240 / 400) ** 2
    volts, amps, _ = at_start(base.elements["M1"], 240.0, z + 2 * RUN)
    assert (state.motor_v, state.current_a) == pytest.approx((volts, amps), rel=1e-9)
    half = starts(changed(base, S1=supply, M1=Motor(node="B2", phases="A", rated_kw=1.0, rated_v=120.0)))
    motor = Motor(node="B2", rated_kw=1.0)
    volts, amps, _ = at_start(motor, 120.0, z / 2 + 2 * RUN)
    assert half.at("M1").current_a == pytest.approx(amps, rel=1e-9)
    assert half.at("M1").motor_v == pytest.approx(volts, rel=1e-9)


def test_limits_of_starts_are_judged_on_the_phase_that_dips():
    limits = Limits(start_supply_percent=1.0, start_step_percent=5.0, start_motor_percent=90.0)
    found = {f.check: f for f in run(lane(CASES, limits, phases="B", rated_v=230.0)).findings}
    for check in ("start step, supply", "start step, board", "start volts"):
        assert found[check].verdict in (Verdict.FAILS, Verdict.NEAR, Verdict.HOLDS)
    state = starts(lane(CASES, limits, phases="B", rated_v=230.0)).at("M1")
    assert found["start volts"].value == pytest.approx(state.motor_percent)


def test_findings_of_starts_name_the_phase_that_dips_and_its_own_volts():
    limits = Limits(start_supply_percent=1.0, start_step_percent=5.0, start_motor_percent=99.0)
    on_one = run(lane((Case(name="Day"),), limits, phases="B", rated_v=230.0))
    state = on_one.starts.at("M1")
    told = {f.check: f.sentence for f in on_one.findings}
    own = state.supply_before_v / 3**0.5, state.supply_v / 3**0.5
    assert f" on B, from {own[0]:.1f} V to {own[1]:.1f} V" in told["start step, supply"]
    assert f"to start with on B, {state.motor_v:.1f} V" in told["start volts"]
    between = run(lane((Case(name="Day"),), limits, phases="CA"))
    assert between.starts.at("M1").motor_phase == "C–A"
    assert "to start with on C–A," in {f.check: f.sentence for f in between.findings}["start volts"]
    alike = run(lane((Case(name="Day"),), limits))
    assert alike.starts.at("M1").board_phase == ""
    assert not any(" on " in f.sentence for f in alike.findings if f.check.startswith("start"))
