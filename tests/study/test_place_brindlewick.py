"""Brindlewick Farm: export at noon, a dryer in winter, and a tap that cannot please both."""

import math

import pytest
from sample_places import changed, failing, place, proven, told
from study_nodal import Nodal

from app.model import edits
from app.study.outcome import Verdict

NOON, WINTER = "Noon, PV full, high intake", "Winter evening, low intake"
CABLES = {
    95: {},
    185: {"resistance_ohm_per_km": 0.164, "rating_a": 280.0},
    240: {"resistance_ohm_per_km": 0.125, "rating_a": 330.0},
}
ABSORBING = -80 * math.tan(math.acos(0.95))
NOTCHES = range(-2, 3)


def farm(area=95, tap=0, kvar=0.0):
    return place("brindlewick_farm", C1=CABLES[area], T1={"tap": tap}, G1={"output_kvar": kvar})


def absolute(outcome):
    """What fails of the absolute volts and of the loading: all but the rise."""
    return {(check, case) for check, _, case in failing(outcome) if check != "voltage rise"}


def rise(outcome):
    return max(f.value for f in told(outcome, "voltage rise"))


@pytest.mark.parametrize("kvar", [0.0, ABSORBING])
def test_on_the_95_no_tap_pleases_both_seasons_with_or_without_absorbing(kvar):
    found = {tap: absolute(proven(farm(95, tap, kvar))) for tap in NOTCHES}
    assert all(found.values())
    assert all(("voltage high", NOON) in found[tap] for tap in NOTCHES)
    assert [tap for tap in NOTCHES if ("voltage low", WINTER) in found[tap]] == [2]


@pytest.mark.parametrize("area", [185, 240])
@pytest.mark.parametrize("kvar", [0.0, ABSORBING])
def test_a_bigger_cable_holds_the_volts_two_notches_up_with_or_without_absorbing(area, kvar):
    good = [tap for tap in NOTCHES if not absolute(proven(farm(area, tap, kvar)))]
    assert 2 in good
    assert (1 in good) == (area == 240 and kvar < 0)
    assert not {-2, -1, 0} & set(good)


def test_the_rise_fails_where_the_absolute_volts_hold_and_absorbing_cures_it():
    for area in (185, 240):
        plain, absorbing = (proven(farm(area, 2, kvar)) for kvar in (0.0, ABSORBING))
        assert failing(plain) == {("voltage rise", "B3", NOON)}
        assert failing(absorbing) == set()
        assert rise(absorbing) < 3 < rise(plain)
    assert rise(plain) < 3.1  # on the 240 it misses by a hair


def test_the_rise_is_that_of_the_pv_alone():
    drawing = farm(240, 2)
    dark = edits.set_case(drawing, 0, generation_percent=0.0)
    apart = [abs(Nodal(d, 0).solve()["B3"]) for d in (drawing, dark)]
    assert rise(proven(drawing)) == pytest.approx(100 * (apart[0] - apart[1]) / 400, rel=1e-7)
    outcome = proven(drawing)
    above = outcome.nodes.at("B3", 0).percent - outcome.nodes.at("B1", 0).percent
    assert above < rise(outcome) - 0.5 or above > rise(outcome) + 0.5  # the transformer's ratio is no rise


def test_the_tap_that_helps_the_volts_overloads_the_transformer():
    """95 to 101 % from nought to +5 %: the job's list of mistakes."""
    loaded = [proven(farm(95, tap)).branches.at("T1", 1).loaded_percent for tap in (0, 2)]
    assert loaded == [pytest.approx(95.5, abs=0.5), pytest.approx(101, abs=0.5)]
    assert ("loading", WINTER) in absolute(proven(farm(95, 2)))
    assert ("loading", WINTER) not in absolute(proven(farm(240, 2)))


def most_export(tap, limit):
    """kW of PV at which the barn comes to a limit at noon, by halving, from nodal equations alone."""
    low, high = 0.0, 80.0
    for _ in range(40):
        middle = (low + high) / 2
        fits = limit(changed(farm(95, tap), G1={"output_kw": middle}))
        low, high = (middle, high) if fits else (low, middle)
    return low


def _volts_hold(drawing):
    return abs(Nodal(drawing, 0).solve()["B3"]) <= 253 * math.sqrt(3)


def _rise_holds(drawing):
    dark = edits.set_case(drawing, 0, generation_percent=0.0)
    return abs(Nodal(drawing, 0).solve()["B3"]) - abs(Nodal(dark, 0).solve()["B3"]) <= 0.03 * 400


def test_how_much_export_would_pass_on_the_95():
    """One notch up is the highest tap that winter stands; there the volts set the export, not the rise."""
    by_volts = most_export(1, _volts_hold)
    by_rise = most_export(1, _rise_holds)
    least = min(by_volts, by_rise)
    assert by_volts < by_rise < 80
    at = proven(changed(farm(95, 1), G1={"output_kw": least - 1e-6}))
    beyond = proven(changed(farm(95, 1), G1={"output_kw": least + 0.01}))
    assert failing(at) == set()
    assert failing(beyond) == {("voltage high", "B3", NOON)}
    assert most_export(0, _volts_hold) < by_volts


def test_noon_and_winter_are_as_the_cases_state_them():
    outcome = proven(place("brindlewick_farm"))
    drawn = {
        id: [math.hypot(outcome.attachments.at(id, c).kw, outcome.attachments.at(id, c).kvar) for c in (0, 1)]
        for id in ("L1", "L2", "L3", "G1")
    }
    assert drawn["L1"] == pytest.approx([3, 14], rel=1e-12)
    assert drawn["L2"] == pytest.approx([2, 0], abs=1e-12)
    assert drawn["L3"] == pytest.approx([0, 72], abs=1e-12)
    assert drawn["G1"] == pytest.approx([80, 0], abs=1e-12)


def test_the_sample_cured_holds_and_says_that_the_transformer_is_near():
    outcome = proven(place("brindlewick_cured"))
    assert failing(outcome) == set()
    (near,) = told(outcome, "loading")
    assert (near.verdict, near.ids, near.case) == (Verdict.NEAR, ("T1",), WINTER)
