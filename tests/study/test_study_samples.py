"""The samples: each opens, solves, equals its expected results and an independent nodal solution."""

import json
from pathlib import Path

import msgspec
import numpy as np
import pytest
from study_nodal import Nodal
from test_study_wired import compare

from app.model.drawing import Case
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
    fuse = ("earth fault", "B3", "")
    low = ("voltage low", "B3", peak)
    assert failing(edited("fernhollow")) == {low, ("voltage drop", "B3", peak), fuse}
    two = edited("fernhollow", C1={"side_by_side": 2}, C2={"side_by_side": 2})
    assert failing(two) == {low, fuse}


def test_fernhollow_with_three_cables_misses_by_less_than_a_tenth_of_a_volt_and_says_so():
    outcome = run(edited("fernhollow", C1={"side_by_side": 3}, C2={"side_by_side": 3}))
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


PEAK = "Peak, low intake"
BOARD_A = ("fault rating", "B3", "")  # rated for the ring open
CLOSED = {"W1": {"closed": True}, "W2": {"closed": True}}


def without(drawing, *ids):
    return msgspec.structs.replace(
        drawing, elements={i: e for i, e in drawing.elements.items() if i not in ids}
    )


def test_kettlewick_is_cured_by_the_open_point_a_capacitor_and_both_taps_and_needs_all_three():
    assert ("loading", "C6", PEAK) in failing(edited("kettlewick_open"))
    assert failing(edited("kettlewick_cured")) == set()
    assert failing(without(edited("kettlewick_cured"), "K1")) == {("loading", "C6", PEAK)}
    untapped = failing(edited("kettlewick_cured", T1={"tap": 0}, T2={"tap": 0}))
    assert {check for check, _, _ in untapped} == {"voltage low"}
    elsewhere = failing(edited("kettlewick_cured", W1={"closed": False}, W2={"closed": True}))
    assert ("voltage low", "B5", PEAK) in elsewhere


def test_between_c_and_d_is_the_best_of_all_places_to_open_the_ring():
    """Opening a cable without capacitance at either end is the same as leaving it out."""
    ring = edited("kettlewick_cured", **CLOSED)
    opened = {id: without(ring, id) for id in ("C2", "C3", "C4", "C5", "C6")}
    assert [id for id, drawing in opened.items() if not failing(drawing)] == ["C4"]
    lost = {id: run(drawing).balance.loss_kw[0] for id, drawing in opened.items()}
    assert min(lost, key=lost.get) == "C4"
    cured = run(edited("kettlewick_cured")).balance.loss_kw[0]
    assert lost["C4"] == pytest.approx(cured, rel=1e-9)
    assert run(ring).balance.loss_kw[0] < cured  # closed it would lose less still
    assert failing(ring) == {BOARD_A}  # were it not for the board


def test_the_ring_closed_as_drawn_overloads_e_f():
    outcome = run(edited("kettlewick_open", **CLOSED))
    assert {f.ids[0] for f in outcome.findings if f.check == "loading" and f.verdict is Verdict.FAILS} == {
        "C6"
    }
    assert outcome.branches.at("C6").loaded_percent == pytest.approx(101.6, abs=0.05)
    noted = [f for f in outcome.findings if f.check == "closed loop"]
    assert {"T1", "T2", "W1", "W2", "C1", "C2", "C3", "C4", "C5", "C6"} == set(noted[0].ids)


def test_two_notches_apart_circulate_round_the_ring_with_all_loads_off():
    """ΔE / ΣZ: both transformers, the 400 V ring and the 11 kV cable, all seen at 400 V."""
    drawing = edited("kettlewick_ring")
    (finding,) = (f for f in run(drawing).findings if f.check == "circulating current")
    assert (finding.verdict, finding.ids, finding.case) == (
        Verdict.ADVICE,
        ("T1", "T2"),
        "Night, high intake",
    )
    unit = complex(3900 * 400**2 / 500e3**2, 0)
    unit += 1j * (0.04**2 * (400**2 / 500e3) ** 2 - unit.real**2) ** 0.5
    hot = 1 + 0.00403 * (60 - 20)
    cable = 0.54 * complex(0.125 * hot, 0.072) + 0.6 * complex(0.32 * hot, 0.105) / (27.5 * 1.025) ** 2
    amps = 1.05 * 400 * (1 / 0.975 - 1 / 1.025) / 3**0.5 / abs(2 * unit + cable)
    assert finding.value == pytest.approx(100 * amps / (500e3 / 400 / 3**0.5) / 0.975, rel=1e-9)
    assert "with all loads off 115 A circulates at 400 V, 16.4 % of the rating of T1" in finding.sentence
    quiet = msgspec.structs.replace(
        without(drawing, "K1"), cases=(Case(load_percent=0.0, supply_percent=105.0),)
    )
    assert run(quiet).branches.at("C2").current_a == pytest.approx(amps, rel=1e-3)  # iron currents aside
    assert failing(edited("kettlewick_ring", T2={"tap": -1})) == {BOARD_A}


def test_t1_cannot_carry_the_closed_ring_without_t2():
    outcome = run(without(edited("kettlewick_ring"), "T2"))
    over = {f.ids[0] for f in outcome.findings if f.check == "loading" and f.verdict is Verdict.FAILS}
    assert {"T1", "C2", "C3", "C4"} <= over
    assert outcome.branches.at("T1").loaded_percent > 110
    assert outcome.branches.at("C2").loaded_percent > 200
    assert not [f for f in outcome.findings if f.check in ("closed loop", "circulating current")]


def test_the_boatyard_misses_its_drop_by_a_hair_and_a_thicker_cable_cures_it():
    outcome = run(edited("saltmere_two_wire"))
    (finding,) = (f for f in outcome.findings if f.verdict is Verdict.FAILS)
    assert (finding.check, finding.ids) == ("voltage drop", ("B3",))
    assert -0.05 < finding.margin < 0
    assert failing(edited("saltmere_two_wire", C3={"resistance_ohm_per_km": 1.83})) == set()
