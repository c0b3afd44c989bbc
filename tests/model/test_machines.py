"""Motors, regulators and generators that hold volts, as people type, refuse and file them."""

import pytest

from app.model import edits
from app.model.file import decode, encode
from app.model.kinds import Generator, Motor, Regulator, Transformer
from app.model.units import parse


def put(yard, **elements):
    return edits.put(yard, elements)


def test_horsepower_and_multiples_may_be_typed(yard):
    base = put(yard, M9=Motor(node="B2"))
    base = edits.change_text(base, "M9", "rated_kw", "25 hp")
    base = edits.change_text(base, "M9", "starting_current", "7.2 ×")
    base = edits.change_text(base, "M9", "efficiency", "91 %")
    motor = base.elements["M9"]
    assert motor.rated_kw == pytest.approx(25 * 0.746)
    assert (motor.starting_current, motor.efficiency) == (7.2, 0.91)
    assert parse("650 %", "× rated") == 6.5
    assert parse("0.035 GVA", "MVA") == pytest.approx(35.0)


@pytest.mark.parametrize(
    ("field", "text", "words"),
    [
        ("efficiency", "1.2", "Efficiency"),
        ("starting_current", "0", "Starting current"),
        ("starter", "crank", "Starter"),
        ("state", "idling", "State"),
    ],
)
def test_what_no_motor_has_is_refused_by_name(yard, field, text, words):
    base = put(yard, M9=Motor(name="Pump", node="B2"))
    with pytest.raises(edits.EditRefused, match=words):
        edits.change_text(base, "M9", field, text)


def test_a_generator_makes_no_more_than_its_most(yard):
    with pytest.raises(
        edits.EditRefused, match="Least reactive is 9 kvar, allowed is at most the most, 3 kvar"
    ):
        edits.change(yard, "G1", q_min_kvar=9.0, q_max_kvar=3.0)


def test_all_of_it_comes_back_from_the_file(yard):
    unit = yard.elements["T2"]
    moving = edits.change(yard, "T2", regulates="winding 2", hold_percent=102.5, drop_x_ohm=0.01)
    assert isinstance(unit, Transformer)
    assert unit.regulates == "no"
    full = put(
        moving,
        M9=Motor(node="B2", starter="soft starter", limited_current=3.5, state="starting"),
        V9=Regulator(start="B2", end="J4", mode="idle in reverse", bandwidth_percent=1.5),
        G9=Generator(node="B2", hold_percent=101.0, q_min_kvar=-5.0, q_max_kvar=8.0),
    )
    full = edits.set_case(full, 0, motor_percent=40.0)
    full = edits.set_limits(full, start_supply_percent=3.0, start_name="Agreed")
    again = decode(encode(full))
    assert again == full
    assert encode(again) == encode(full)
