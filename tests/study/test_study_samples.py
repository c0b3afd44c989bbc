"""The samples: each opens, solves, equals its expected results and an independent nodal solution."""

import json
from pathlib import Path

import msgspec
import numpy as np
import pytest
from sample_places import failing, place, proven
from study_nodal import Nodal
from test_study_wired import compare

from app.model.file import load
from app.study import run
from app.study.outcome import Verdict
from solver.status import Status

SAMPLES = Path(__file__).resolve().parents[2] / "samples"
NAMES = sorted(p.stem for p in SAMPLES.glob("*.farend"))


def test_there_are_samples_and_each_has_its_expected_results():
    assert len(NAMES) >= 6
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
    phases = {} if outcome.wires is None else outcome.wires.nodes.rows
    assert list(phases) == list(expected.get("phases", {}))
    for id, columns in expected.get("phases", {}).items():
        for column, values in columns.items():
            want = np.array([np.nan if v is None else v for v in values])
            got = outcome.wires.nodes.column(column)[phases[id]]
            np.testing.assert_allclose(got, want, rtol=1e-9, atol=1e-9, err_msg=f"{id} {column}")
    for column, values in expected["balance"].items():
        np.testing.assert_allclose(getattr(outcome.balance, column), values, rtol=1e-9, atol=1e-9)
    faults = {} if outcome.faults is None else {i: outcome.faults.at(i) for i in outcome.faults.ids}
    assert list(faults) == list(expected.get("faults", {}))
    for id, columns in expected.get("faults", {}).items():
        for column, value in columns.items():
            assert getattr(faults[id], column) == pytest.approx(value, rel=1e-9, abs=1e-9), (id, column)
    judged = [[f.check, f.verdict.value, list(f.ids), f.case] for f in outcome.findings]
    assert judged == expected["findings"]


@pytest.mark.parametrize("name", NAMES)
def test_equals_an_independent_nodal_solution(name):
    drawing = load(SAMPLES / f"{name}.farend")
    outcome = run(drawing)
    if outcome.wires is not None:
        for case in drawing.cases:
            compare(msgspec.structs.replace(drawing, cases=(case,)))
        return
    for case in range(len(drawing.cases)):
        stands = {i: outcome.branches.at(i, case).notch for i in outcome.branches.ids}
        nodal = Nodal(drawing, case, stands)
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


def test_the_boatyard_misses_its_drop_by_a_hair_and_a_thicker_cable_cures_it():
    outcome = proven(place("saltmere_two_wire"))
    (finding,) = (f for f in outcome.findings if f.verdict is Verdict.FAILS)
    assert (finding.check, finding.ids) == ("voltage drop", ("B3",))
    assert -0.05 < finding.margin < 0
    assert failing(proven(place("saltmere_two_wire", C3={"resistance_ohm_per_km": 1.83}))) == set()
