"""The samples: each opens, solves, equals its expected results and an independent nodal solution."""

import json
from pathlib import Path

import msgspec
import numpy as np
import pytest
from study_nodal import Nodal

from app.model.file import load
from app.study import run
from app.study.outcome import Verdict
from solver.status import Status

SAMPLES = Path(__file__).resolve().parents[2] / "samples"
NAMES = sorted(p.stem for p in SAMPLES.glob("*.farend"))


def test_there_are_samples_and_each_has_its_expected_results():
    assert len(NAMES) >= 4
    assert NAMES == sorted(p.name.removesuffix(".expected.json") for p in SAMPLES.glob("*.expected.json"))
    told = (SAMPLES / "README.md").read_text(encoding="utf-8")
    assert all(f"`{name}.farend`" in told for name in NAMES)


@pytest.mark.parametrize("name", NAMES)
def test_equals_its_expected_results(name):
    expected = json.loads((SAMPLES / f"{name}.expected.json").read_text(encoding="utf-8"))
    outcome = run(load(SAMPLES / f"{name}.farend"))
    assert outcome.status is Status.SOLVED
    assert list(outcome.cases) == expected["cases"]
    for table in ("nodes", "branches"):
        rows = getattr(outcome, table)
        assert list(rows.ids) == list(expected[table])
        for id, columns in expected[table].items():
            for column, values in columns.items():
                got = rows.column(column)[rows.rows[id]]
                want = np.array([np.nan if v is None else v for v in values])
                np.testing.assert_allclose(got, want, rtol=1e-9, atol=1e-9, err_msg=f"{id} {column}")
    for column, values in expected["balance"].items():
        np.testing.assert_allclose(getattr(outcome.balance, column), values, rtol=1e-9, atol=1e-9)
    judged = [[f.check, f.verdict.value, list(f.ids), f.case] for f in outcome.findings]
    assert judged == expected["findings"]


@pytest.mark.parametrize("name", NAMES)
def test_equals_an_independent_nodal_solution(name):
    drawing = load(SAMPLES / f"{name}.farend")
    outcome = run(drawing)
    for case in range(len(drawing.cases)):
        nodal = Nodal(drawing, case)
        voltage = nodal.solve()
        for id, volts in voltage.items():
            state = outcome.nodes.at(id, case)
            assert state.voltage_v == pytest.approx(abs(volts), rel=1e-9)
            off = (state.angle_deg - np.degrees(np.angle(volts)) + 180) % 360 - 180
            assert off == pytest.approx(0, abs=1e-7)
        for id in nodal.stamps:
            state, (enters, leaves) = outcome.branches.at(id, case), nodal.branch_power(id) / 1e3
            assert state.start_kw == pytest.approx(enters.real, abs=1e-6)
            assert state.start_kvar == pytest.approx(enters.imag, abs=1e-6)
            assert state.end_kw == pytest.approx(-leaves.real, abs=1e-6)
            assert state.loss_kw == pytest.approx((enters + leaves).real, abs=1e-6)
        assert outcome.balance.supply_kw[case] == pytest.approx(nodal.supplied().real / 1e3, rel=1e-8)
        assert outcome.balance.supply_kvar[case] == pytest.approx(nodal.supplied().imag / 1e3, rel=1e-7)
        assert outcome.balance.closure[case] < 1e-9


def edited(name, **changes):
    drawing = load(SAMPLES / f"{name}.farend")
    elements = dict(drawing.elements)
    for id, fields in changes.items():
        elements[id] = msgspec.structs.replace(elements[id], **fields)
    return msgspec.structs.replace(drawing, elements=elements)


def failing(drawing):
    return {(f.check, f.ids[0], f.case) for f in run(drawing).findings if f.verdict is Verdict.FAILS}


def test_fernhollow_fails_as_drawn_and_two_cables_do_not_cure_the_volts():
    peak = "Peak, low intake"
    assert failing(edited("fernhollow")) == {("voltage low", "B3", peak), ("voltage drop", "B3", peak)}
    two = edited("fernhollow", C1={"parallel": 2}, C2={"parallel": 2})
    assert failing(two) == {("voltage low", "B3", peak)}


def test_fernhollow_with_three_cables_misses_by_less_than_a_tenth_of_a_volt_and_says_so():
    outcome = run(edited("fernhollow", C1={"parallel": 3}, C2={"parallel": 3}))
    (finding,) = (f for f in outcome.findings if f.verdict is Verdict.FAILS)
    assert outcome.nodes.at("B3").voltage_v / 3**0.5 == pytest.approx(216.185, abs=5e-4)
    assert -0.01 < finding.margin < 0
    assert "93.61 % of nominal" in finding.sentence
    assert "allowed is 93.62 %" in finding.sentence


def test_fernhollow_pair_holds_one_notch_down_and_fails_at_night_two_notches_down():
    assert failing(edited("fernhollow_pair")) == set()
    assert failing(edited("fernhollow_pair", T2={"tap": -2})) == {
        ("voltage high", "B4", "Light, high intake")
    }


def test_kettlewick_is_cured_by_the_open_point_a_capacitor_and_both_taps():
    assert ("loading", "C6", "Peak, low intake") in failing(edited("kettlewick_open"))
    moved = edited(
        "kettlewick_open", W1={"closed": True}, W2={"closed": False}, T1={"tap": -1}, T2={"tap": -1}
    )
    from app.model.kinds import Capacitor

    assert failing(moved) == {("loading", "C6", "Peak, low intake")}
    elements = {**moved.elements, "K1": Capacitor(node="B7", rating_kvar=75.0)}
    assert failing(msgspec.structs.replace(moved, elements=elements)) == set()


def test_the_boatyard_misses_its_drop_by_a_hair_and_a_thicker_cable_cures_it():
    outcome = run(edited("saltmere_two_wire"))
    (finding,) = (f for f in outcome.findings if f.verdict is Verdict.FAILS)
    assert (finding.check, finding.ids) == ("voltage drop", ("B3",))
    assert -0.05 < finding.margin < 0
    assert failing(edited("saltmere_two_wire", C3={"r20_ohm_per_km": 1.83})) == set()
