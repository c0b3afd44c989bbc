"""Tap ladders where phases are not alike: each notch of a curve is what a run at that notch says."""

import numpy as np
import pytest
from msgspec.structs import replace
from study_layouts import changed
from unlike_layouts import feeder, street

from app.model.drawing import Case, Limits
from app.study import run, tap_curve
from solver.status import Status

CASES = (Case(name="Day"), Case(name="Night", supply_percent=104.0, load_percent=20.0))


def at_notch(base, id, notch):
    return run(changed(base, **{id: replace(base.elements[id], tap=notch)}))


@pytest.mark.parametrize("tapped", ["winding 1", "winding 2"])
@pytest.mark.parametrize("id", ["T1", "T2", "T3", "T4"])
def test_every_notch_of_every_build_is_what_a_run_there_says(id, tapped):
    base = feeder(CASES)
    base = changed(base, **{id: replace(base.elements[id], tapped=tapped, tap=1, earth_2_ohm=0.4)})
    curve, behind = tap_curve(base, id), {"T1": "H1 H2", "T2": "D1", "T3": "Y1", "T4": "Z1"}[id].split()
    for n, notch in enumerate(curve.notches):
        outcome = at_notch(base, id, int(notch))
        assert outcome.status is Status.SOLVED, [f.sentence for f in outcome.findings[:3]]
        np.testing.assert_allclose(curve.loss_kw[n], outcome.balance.loss_kw, rtol=1e-9)
        rows = [outcome.nodes.rows[i] for i in behind]
        low, high = (outcome.nodes.column(name)[rows] for name in ("percent", "high_percent"))
        assert curve.lowest_percent[n] == pytest.approx(low.min(), rel=1e-9)
        assert curve.highest_percent[n] == pytest.approx(high.max(), rel=1e-9)


def test_the_band_holds_for_the_lowest_and_for_the_highest_phase():
    base = street(CASES, Limits(low_percent=94.0, high_percent=106.0))
    curve, outcome = tap_curve(base, "T1"), run(base)
    assert 0 < curve.holds.sum() < len(curve.notches)
    behind = [i for i in outcome.nodes.ids if i != "B1"]
    for n, notch in enumerate(curve.notches):
        nodes = at_notch(base, "T1", int(notch)).nodes
        low, high = (min(nodes.at(i, c).percent for i in behind for c in (0, 1)), 0.0)
        high = max(nodes.at(i, c).high_percent for i in behind for c in (0, 1))
        assert curve.holds[n] == (low >= 94 and high <= 106)
    # the highest phase alone rules a notch out that the lowest would let pass
    assert ((curve.lowest_percent >= 94) & ~curve.holds).any()


def test_a_notch_without_an_operating_point_does_not_hold():
    base = street(unit={"notch_percent": 10.0, "taps_up": 5, "taps_down": 0})
    heavy = changed(base, L2=replace(base.elements["L2"], demand_kva=38.0))
    curve = tap_curve(heavy, "T1")
    lost = np.isnan(curve.loss_kw[:, 0])
    assert lost.any()
    assert not lost.all()
    assert not curve.holds[lost].any()
    assert np.isnan(curve.lowest_percent[lost]).all()
