"""Ashgill: a regulator half-way down a long feeder with a hydro plant at its far end."""

import pytest
from sample_places import changed, failing, place, proven, told

from app.study import run
from app.study.outcome import Verdict

EVENING, NOON = 0, 1
BAND = 2 / 120 * 100  # % in all, 2 V of 120 V


def fixed(percent):
    return place("ashgill_regulator", V1={"hold_percent": percent, "drop_r_ohm": None, "drop_x_ohm": None})


def test_no_fixed_setting_pleases_both_seasons():
    settings = [96 + k / 4 for k in range(45)]
    outcomes = [run(fixed(setting)) for setting in settings]
    assert all(failing(outcome) for outcome in outcomes)
    for worst in (settings.index(100.5), settings.index(101.5)):
        proven(fixed(settings[worst]))
    low, high = (
        [
            s
            for s, o in zip(settings, outcomes, strict=True)
            if check in {c for c, i, _ in failing(o) if i == "B5"}
        ]
        for check in ("voltage low", "voltage high")
    )
    assert max(low) + 0.25 >= min(high)  # where the far end is no longer low it is too high


def test_line_drop_compensation_pleases_both_and_stands_on_either_side_of_nought():
    outcome = proven(place("ashgill_regulator"))
    assert failing(outcome) == set()
    notch = [outcome.branches.at("V1", case).notch for case in (EVENING, NOON)]
    assert notch[EVENING] > 0 > notch[NOON]
    assert not told(outcome, "end stop")


@pytest.mark.parametrize("case", [EVENING, NOON])
def test_it_holds_the_volts_less_the_drop_of_its_own_current_within_half_its_band(case):
    """U − I·(R + jX) beyond the regulator, with the power that goes on there, all from the nodal solution."""
    drawing = place("ashgill_regulator")
    outcome = proven(drawing)
    state, regulator = outcome.branches.at("O2", case), drawing.elements["V1"]
    phase = outcome.nodes.at("B3", case).voltage_v / 3**0.5
    current = complex(state.start_kw, -state.start_kvar) * 1e3 / 3 / phase
    held = abs(phase - current * complex(regulator.drop_r_ohm, regulator.drop_x_ohm))
    held_percent = 100 * held * 3**0.5 / 11000
    assert abs(held_percent - regulator.hold_percent) <= BAND / 2 + 1e-9


def test_power_runs_back_through_it_at_noon_and_it_still_looks_to_its_end():
    outcome = proven(place("ashgill_regulator"))
    assert outcome.branches.at("V1", EVENING).start_kw > 0 > outcome.branches.at("V1", NOON).start_kw
    assert outcome.nodes.at("B5", NOON).percent > outcome.nodes.at("B3", NOON).percent


def test_in_the_wrong_mode_the_reversed_power_drives_it_to_its_end_stop():
    outcome = run(changed(place("ashgill_regulator"), V1={"mode": "with the power"}))
    (finding,) = told(outcome, "runs away")
    assert (finding.verdict, finding.ids) == (Verdict.FAILS, ("V1",))
    assert abs(outcome.branches.at("V1", NOON).notch) == 16


def test_without_the_regulator_the_far_end_fails_in_the_evening():
    bypassed = proven(place("ashgill_regulator", V1={"steps_up": 0, "steps_down": 0}))
    assert ("voltage low", "B5", bypassed.cases[EVENING]) in failing(bypassed)
