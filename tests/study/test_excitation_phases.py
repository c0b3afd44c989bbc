"""A single-phase unit between phase and neutral is driven at its own volts, not at those of the line."""

import pytest

from app.model.drawing import Drawing
from app.model.kinds import Joint, Load, Supply, Transformer
from app.study import run


def driven(held_percent: float, **unit) -> list[str]:
    """What is said of over-excitation of a 25 kVA unit at a phase of 12.47 kV."""
    given = {"v1_v": 7200.0, "v2_v": 240.0, "vector_group": "Ii0", "rating_kva": 25.0, **unit}
    drawing = Drawing(
        frequency_hz=60.0,
        elements={
            "S": Supply(node="A", nominal_v=12470.0, held_percent=held_percent),
            "A": Joint(),
            "B": Joint(x=8.0),
            "T": Transformer(start="A", end="B", **given),
            "L": Load(node="B", demand_kva=5.0),
        },
    )
    outcome = run(drawing)
    assert outcome.balance.supply_kw[0] > 4.0
    return [f.sentence for f in outcome.findings if f.check == "over-excitation"]


@pytest.mark.parametrize("unit", [{}, {"build": "centre-tapped", "phases": "B"}])
def test_at_nominal_volts_nothing_is_said(unit):
    assert driven(100.0, **unit) == []


def test_beyond_it_is_said_in_its_own_percent():
    (sentence,) = driven(108.0, build="centre-tapped")
    assert "108.0 %" in sentence


def test_between_two_phases_it_is_the_line_that_counts():
    assert driven(100.0, v1_v=12470.0, phases="AB") == []
