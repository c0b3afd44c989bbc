"""The rise by generation: with and without it, everything else as it is."""

import pytest
from study_nodal import Nodal

from app.model import edits
from app.model.drawing import Case, Drawing, Limits
from app.model.kinds import Busbar, Cable, Generator, Load, Supply, Transformer
from app.study import run, tap_curve
from app.study.outcome import Verdict


def farm(**limits):
    elements = {
        "B1": Busbar(),
        "S1": Supply(node="B1", nominal_v=11000.0),
        "T1": Transformer(start="B1", end="B2", v2_v=433.0, rating_kva=100.0),
        "B2": Busbar(nominal_v=400.0),
        "C1": Cable(start="B2", end="B3", length_m=320.0, resistance_ohm_per_km=0.32),
        "B3": Busbar(name="Barn"),
        "L1": Load(node="B3", demand_kva=12.0),
        "G1": Generator(node="B3", output_kw=60.0),
    }
    cases = (Case(name="Noon"), Case(name="Night", generation_percent=0.0))
    return Drawing(elements=elements, limits=Limits(high_percent=120.0, **limits), cases=cases)


def rises(drawing):
    return [f for f in run(drawing).findings if f.check == "voltage rise"]


def test_it_is_the_volts_with_generation_less_those_without_whatever_the_transformer_adds():
    drawing = farm(rise_percent=3.0, rise_name="agreed here")
    found = {f.ids[0]: f for f in rises(drawing)}
    without = edits.set_case(drawing, 0, generation_percent=0.0)
    for id, finding in found.items():
        apart = [abs(Nodal(d).solve()[id]) for d in (drawing, without)]
        assert finding.value == pytest.approx(100 * (apart[0] - apart[1]) / 400, rel=1e-7)
    assert found["B3"].verdict is Verdict.FAILS
    assert found["B3"].by_case[1] is Verdict.HOLDS
    assert "Barn (B3) is lifted by" in found["B3"].sentence
    assert "by generation in case Noon; the most allowed is 3.0 % (agreed here)." in found["B3"].sentence
    assert "B1" not in found


def test_without_a_limit_or_without_generation_it_is_not_judged():
    assert rises(farm()) == []
    assert rises(edits.remove(farm(rise_percent=3.0), ["G1"])) == []


def test_absorbing_lowers_it_and_a_wide_limit_holds():
    drawing = farm(rise_percent=20.0)
    (held,) = rises(drawing)
    assert held.verdict is Verdict.HOLDS
    (less,) = rises(edits.change(drawing, "G1", output_kvar=-20.0))
    assert less.value < held.value


def test_phase_by_phase_it_is_that_of_the_phase_that_rises_most():
    drawing = farm(rise_percent=3.0)
    lone = edits.change(drawing, "G1", phases="B", output_kw=15.0)
    (finding,) = (f for f in rises(lone) if f.ids == ("B3",))
    spread = next(f for f in rises(edits.change(drawing, "G1", output_kw=15.0)) if f.ids)
    assert finding.value > 3 * spread.value
    off = run(edits.set_case(lone, 0, generation_percent=0.0)).wires.nodes.at("B3", 0)
    on = run(lone).wires.nodes.at("B3", 0)
    assert finding.value == pytest.approx(100 * (on.b_v - off.b_v) / on.base_v, rel=1e-9)


def test_the_safe_notches_of_a_ladder_keep_the_limit_of_the_rise():
    """A notch up lowers the amperes of the same power, and so the rise in percent of nominal."""

    def worst(drawing):
        return max(f.value for f in rises(drawing))

    tight = farm(rise_percent=0.1)
    each = [worst(edits.set_tap(tight, "T1", notch)) for notch in range(-2, 3)]
    limit = (max(each) + min(each)) / 2
    curve, free = tap_curve(farm(rise_percent=limit), "T1"), tap_curve(farm(), "T1")
    assert free.holds.all()
    assert curve.holds.tolist() == [value <= limit for value in each]
    assert 0 < curve.holds.sum() < 5
