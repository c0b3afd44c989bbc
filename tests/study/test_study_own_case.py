"""A case that states single elements for itself: the solver's rows, the findings, the starts."""

from pathlib import Path

import numpy as np
import pytest
from msgspec.structs import replace
from study_nodal import Nodal
from test_study_wired import compare

from app.model import edits
from app.model.drawing import Case
from app.model.file import load
from app.model.kinds import Capacitor, Generator, Supply
from app.study import run
from app.study.curve import tap_curve

SAMPLES = Path(__file__).resolve().parents[2] / "samples"


def test_a_load_stands_at_its_own_share_and_power_factor_in_one_case_and_elsewhere_as_ever():
    drawing = load(SAMPLES / "fernhollow_pair.farend")
    told = edits.set_own(drawing, 1, "L2", percent=6.25, power_factor=0.98)
    was, now = run(drawing), run(told)
    assert now.attachments.at("L2", 1).kw == pytest.approx(5 * 0.98, rel=1e-12)
    assert now.attachments.at("L2", 1).kvar == pytest.approx(5 * (1 - 0.98**2) ** 0.5, rel=1e-9)
    assert now.attachments.at("L1", 1) == was.attachments.at("L1", 1)
    assert now.nodes.at("B4", 0) == was.nodes.at("B4", 0)


def test_a_bank_is_switched_off_or_on_for_one_case():
    drawing = load(SAMPLES / "kettlewick_cured.farend")
    off = edits.set_own(drawing, 1, "K1", percent=0.0)
    night = run(off)
    assert night.attachments.at("K1", 1).kvar == 0
    assert night.attachments.at("K1", 0).kvar == run(drawing).attachments.at("K1", 0).kvar
    gone = edits.change(drawing, "K1", connected=False)
    assert run(gone).nodes.at("B7", 1).voltage_v == pytest.approx(
        night.nodes.at("B7", 1).voltage_v, rel=1e-12
    )
    by_day = edits.set_own(gone, 0, "K1", percent=100.0)
    np.testing.assert_allclose(
        run(by_day).nodes.column("voltage_v"), night.nodes.column("voltage_v"), rtol=1e-12
    )


@pytest.mark.parametrize("name", ["hobscar_cured", "kettlewick_ring", "fernhollow_pair", "saltmere_two_wire"])
def test_every_element_at_a_share_of_its_own_equals_the_nodal_solution(name):
    drawing = load(SAMPLES / f"{name}.farend")
    drawing = edits.set_case(drawing, 0, load_percent=37.0, supply_percent=98.0)
    hung = drawing.attachments()
    for share, (id, one) in zip(np.linspace(40, 90, len(hung)), hung.items(), strict=True):
        drawing = edits.set_own(drawing, 0, id, percent=103.0 if isinstance(one, Supply) else float(share))
    outcome = run(drawing)
    for id, volts in Nodal(drawing, 0).solve().items():
        assert outcome.nodes.at(id, 0).voltage_v == pytest.approx(abs(volts), rel=1e-9)


def test_a_motor_that_stands_still_in_a_case_starts_in_the_others_alone():
    drawing = load(SAMPLES / "hobscar_cured.farend")
    drawing = replace(drawing, cases=(Case(name="Day"), Case(name="Pause", own={})))
    starts = run(edits.set_own(drawing, 1, "M1", percent=0.0)).starts
    assert starts.at("M1", 0).motor_percent > 80
    assert np.isnan(starts.at("M1", 1).motor_percent)
    running = run(edits.set_own(edits.set_case(drawing, 1, motor_percent=0.0), 1, "M1", percent=50.0))
    assert running.starts.at("M1", 1).motor_percent > 80
    assert running.attachments.at("M1", 1).kw == pytest.approx(0.5 * 200 / 0.95, rel=1e-12)


def test_the_curve_of_a_tap_knows_what_a_case_states_of_one_element():
    drawing = edits.set_own(load(SAMPLES / "kettlewick_cured.farend"), 1, "K1", percent=0.0)
    curve = tap_curve(drawing, "T2")
    here = int(np.flatnonzero(curve.notches == drawing.elements["T2"].tap)[0])
    np.testing.assert_allclose(curve.loss_kw[here], run(drawing).balance.loss_kw, rtol=1e-9)


def test_where_phases_are_not_alike_each_element_has_its_share_too():
    camp = load(SAMPLES / "loonmarrow_camp.farend")
    camp = edits.put(camp, {"K1": Capacitor(node="B5", rating_kvar=3.0, connected=False)})
    camp = edits.put(camp, {"G1": Generator(node="B6", output_kw=2.0)})
    hung = camp.attachments()
    for share, (id, one) in zip(np.linspace(40, 120, len(hung)), hung.items(), strict=True):
        camp = edits.set_own(camp, 0, id, percent=101.5 if isinstance(one, Supply) else float(share))
    camp = edits.set_own(camp, 0, "L4", power_factor=0.7)
    outcome = compare(replace(camp, cases=camp.cases[:1]))
    assert outcome.attachments.at("K1", 0).kvar > 0
