"""Fault currents from a drawing: closed forms, and the two traps of the sample layouts."""

import math
from pathlib import Path

import pytest

from app import study
from app.model import edits
from app.model.drawing import Drawing
from app.model.file import load
from app.model.kinds import Busbar, Cable, Supply
from app.study.outcome import Verdict

SAMPLES = Path(__file__).resolve().parents[2] / "samples"


def of(drawing: Drawing, check: str):
    return [f for f in study.run(drawing).findings if f.check == check]


def named(drawing: Drawing, name: str) -> str:
    return next(i for i, e in drawing.elements.items() if e.name == name)


def one_cable(**more) -> Drawing:
    supply = Supply(node="B1", nominal_v=400.0, fault_level_max_mva=8.0, fault_level_min_mva=6.0, xr=3.0)
    cable = Cable(
        start="B1", end="B2", length_m=200.0, resistance_ohm_per_km=0.125, reactance_ohm_per_km=0.072,
        temperature_degc=60.0, fault_degc=90.0, rating_a=265.0, **more,
    )  # fmt: skip
    return Drawing(elements={"B1": Busbar(), "B2": Busbar(x=20.0), "S1": supply, "C1": cable})


def test_three_phase_at_both_ends_by_the_closed_form():
    # IEC 60909-0 (from memory): Ik3 = c·Un/(√3·|Z|), Zq = c·Un²/Sk, R at 20 °C for the highest current
    table = study.run(one_cable()).faults
    c = 1.10  # limits up to +10 %
    zq = c * 400.0**2 / 8e6
    x = zq / math.hypot(1, 1 / 3)
    supply = complex(x / 3, x)
    assert table.at("B1").ik3_max_ka == pytest.approx(8e6 / (math.sqrt(3) * 400) / 1e3, rel=1e-9)
    far = supply + complex(0.125, 0.072) * 0.2
    assert table.at("B2").ik3_max_ka == pytest.approx(c * 400 / math.sqrt(3) / abs(far) / 1e3, rel=1e-9)
    assert table.at("B2").ik2_max_ka == pytest.approx(table.at("B2").ik3_max_ka * math.sqrt(3) / 2, rel=1e-9)
    assert table.at("B2").ik3_min_ka < table.at("B2").ik3_max_ka


def test_without_a_fault_level_nothing_is_worked_out_and_a_rating_asks_for_it():
    drawing = edits.change(one_cable(), "S1", fault_level_max_mva=None, fault_level_min_mva=None)
    assert study.run(drawing).faults is None
    assert not of(drawing, "fault level")
    asked = edits.change(drawing, "B2", withstand_ka=10.0)
    (told,) = of(asked, "fault level")
    assert told.verdict is Verdict.NOTE
    assert "S1" in told.sentence


def test_earth_fault_at_the_house_is_too_low_for_its_fuse():
    """SCENARIOS 7.1: one cable; volts aside, a 200 A fuse does not see the fault in 5 s.

    1250 A in 5 s for a 200 A gG fuse: IEC 60269-2 gate, from memory.
    """
    drawing = load(SAMPLES / "fernhollow.farend")
    supply = next(i for i, e in drawing.elements.items() if isinstance(e, Supply))
    level = math.sqrt(3) * 400 * 12e3 / 1e6
    drawing = edits.change(drawing, supply, fault_level_max_mva=level, fault_level_min_mva=level, xr=3.2)
    cable = named(drawing, "Park cable")
    drawing = edits.change(drawing, cable, trip_a=1250.0)
    (found,) = of(drawing, "earth fault")
    assert found.verdict is Verdict.FAILS
    assert found.value < 1250.0


def test_board_a_passes_by_a_hair_open_and_fails_closed():
    """SCENARIOS 7.5: board A is rated 18 kA."""

    def judged(sample: str):
        drawing = load(SAMPLES / sample)
        supply = next(i for i, e in drawing.elements.items() if isinstance(e, Supply))
        drawing = edits.change(drawing, supply, fault_level_max_mva=150.0, fault_level_min_mva=150.0, xr=3.0)
        drawing = edits.change(drawing, named(drawing, "Board A"), withstand_ka=18.0)
        return of(drawing, "fault rating")[0]

    open_, closed = judged("kettlewick_open.farend"), judged("kettlewick_ring.farend")
    assert closed.verdict is Verdict.FAILS
    assert open_.verdict in (Verdict.HOLDS, Verdict.NEAR)
    assert 0 < open_.margin < 1.0


def test_a_tap_costs_nothing_and_a_length_is_seen():
    drawing = one_cable()
    first = study.run(drawing).faults
    assert study.run(edits.change(drawing, "C1", length_m=100.0)).faults.at("B2").ik3_max_ka > (
        first.at("B2").ik3_max_ka
    )
