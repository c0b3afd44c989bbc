"""The figures that were worked out by hand while the job was studied (JOB, 5.1 to 5.10, own working)."""

import math

import pytest
from study_layouts import drawing

from app.model.drawing import Case
from app.model.kinds import Busbar, Cable, Load, Supply, Transformer
from app.study import run
from solver.status import Status


def long_run(supply_percent=100.0, house_kva=80.0, **fields):
    mix = {k: fields.pop(k) for k in list(fields) if k.startswith("constant")}
    cable = {
        "resistance_ohm_per_km": 0.125, "reactance_ohm_per_km": 0.072, "rating_a": 265.0,
        "temperature_degc": 60.0, **fields
    }  # fmt: skip
    return drawing(
        (Case(supply_percent=supply_percent),),
        GH=Busbar(), LD=Busbar(), HS=Busbar(), S1=Supply(node="GH"),
        C1=Cable(start="GH", end="LD", length_m=250.0, **cable),
        C2=Cable(start="LD", end="HS", length_m=900.0, **cable),
        L1=Load(node="LD", demand_kva=12.0, **mix), L2=Load(node="HS", demand_kva=house_kva, **mix),
    )  # fmt: skip


@pytest.mark.parametrize(
    ("mix", "drop"),
    [({}, 10.6), ({"constant_current_percent": 100.0}, 9.5), ({"constant_impedance_percent": 100.0}, 8.7)],
)
def test_the_load_model_moves_the_drop(mix, drop):
    assert round(run(long_run(**mix)).nodes.at("HS").drop_percent, 1) == drop


@pytest.mark.parametrize(("degc", "drop"), [(20.0, 9.2), (60.0, 10.6), (90.0, 11.7)])
def test_conductor_temperature_moves_the_drop(degc, drop):
    assert round(run(long_run(temperature_degc=degc)).nodes.at("HS").drop_percent, 1) == drop


def test_three_cables_miss_the_limit_by_hundredths_of_a_volt():
    level = run(long_run(97.0, side_by_side=3)).nodes.at("HS").voltage_v / math.sqrt(3)
    assert round(level, 3) == 216.185


def test_the_largest_house_load_is_214_kva_at_half_voltage():
    outcome = run(long_run(house_kva=214.0))
    assert outcome.status is Status.SOLVED
    assert outcome.nodes.at("HS").percent == pytest.approx(50, abs=5)
    assert run(long_run(house_kva=215.0)).status is Status.NO_OPERATING_POINT


def pair(tap_1=0, tap_2=0, supply_percent=100.0):
    """The 11 kV pair; the magnetising branch of each transformer stands on its 11 kV winding."""
    elements = {
        "GH": Busbar(), "A": Busbar(), "B": Busbar(), "HS": Busbar(), "S1": Supply(node="GH"),
        "T1": Transformer(
            start="GH", end="A", v1_v=400.0, v2_v=11000.0, rating_kva=160.0, load_loss_w=1750.0,
            no_load_loss_w=189.0, no_load_current_percent=0.7, tapped="winding 2", tap=tap_1,
        ),
        "C1": Cable(
            start="A", end="B", length_m=1150.0, resistance_ohm_per_km=0.868, reactance_ohm_per_km=0.126,
            capacitance_uf_per_km=0.19,
            temperature_degc=60.0,
        ),
        "T2": Transformer(
            start="B", end="HS", v1_v=11000.0, v2_v=400.0, rating_kva=100.0, load_loss_w=1250.0,
            no_load_loss_w=130.0, no_load_current_percent=0.8, tap=tap_2,
        ),
        "L2": Load(node="HS", demand_kva=80.0),
    }  # fmt: skip
    return run(drawing((Case(supply_percent=supply_percent),), **elements)).nodes.at("HS").voltage_v


@pytest.mark.parametrize(
    ("tap_1", "tap_2", "supply", "hand"),
    [(0, 0, 100.0, 387.4), (2, 2, 100.0, 387.6), (2, 0, 100.0, 407.8)],
)
def test_taps_of_the_pair(tap_1, tap_2, supply, hand):
    assert round(pair(tap_1, tap_2, supply), 1) == hand


@pytest.mark.parametrize(("tap_2", "hand"), [(0, 216.5), (-1, 222.3)])
def test_the_far_transformer_one_notch_down(tap_2, hand):
    assert round(pair(0, tap_2, 97.0) / math.sqrt(3), 1) == hand
