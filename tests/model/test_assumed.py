"""What stands in for blanks, with its basis; nothing is assumed unlisted."""

import csv
import math
from pathlib import Path

import pytest
from msgspec.structs import replace

from app.model import assumed
from app.model.fields import fields_of
from app.model.kinds import (
    KINDS,
    Cable,
    Capacitor,
    Generator,
    Load,
    Motor,
    Node,
    OverheadLine,
    Regulator,
    Supply,
    Transformer,
)

T = Transformer(start="", end="")
TABLE = Path(__file__).with_name("eu_548_2014_table_I_1_tier_2.csv")


def test_given_values_are_taken_as_they_are():
    t = replace(T, load_loss_w=0.0, no_load_loss_w=5.0, no_load_current_percent=0.0)
    assert [assumed.value(t, f) for f in ("load_loss_w", "no_load_loss_w", "no_load_current_percent")] == [
        0,
        5,
        0,
    ]
    assert assumed.blank(t) == ()


def test_losses_are_those_of_the_regulation_at_every_rating_it_lists():
    with TABLE.open(encoding="utf-8") as rows:
        listed = list(csv.DictReader(row for row in rows if not row.startswith("#")))
    assert len(listed) == len(assumed.EU_LOSSES) == 16
    for row in listed:
        t = replace(T, rating_kva=float(row["rated_kVA"]))
        assert assumed.value(t, "load_loss_w") == float(row["Pk_W"])
        assert assumed.value(t, "no_load_loss_w") == float(row["P0_W"])


def test_between_ratings_by_straight_line_and_outside_in_proportion():
    assert assumed.value(replace(T, rating_kva=75.0), "load_loss_w") == 1000.0
    assert assumed.value(replace(T, rating_kva=200.0), "no_load_loss_w") == pytest.approx(189 + 81 * 40 / 90)
    assert assumed.value(replace(T, rating_kva=12.5), "load_loss_w") == 300.0
    assert assumed.value(replace(T, rating_kva=6300.0), "load_loss_w") == 46000.0
    bases = {assumed.eu_loss(kva, 1)[1] for kva in (12.5, 75.0, 100.0)}
    assert len(bases) == 3
    assert all("548/2014" in b for b in bases)


def test_assumed_figures_never_contradict_each_other():
    for kva in (1.0, 5.0, 16.0, 25.0, 63.0, 100.0, 333.0, 1000.0, 1e5):
        for uk in (0.0, 0.5, 4.0, 12.0):
            t = replace(T, rating_kva=kva, uk_percent=uk)
            assert assumed.value(t, "load_loss_w") <= uk * kva * 10 * (1 + 1e-12)
            drawn = assumed.value(t, "no_load_current_percent") * kva * 10
            assert drawn >= assumed.value(t, "no_load_loss_w") * (1 - 1e-12)
    lossy = replace(T, no_load_loss_w=2000.0)
    assert assumed.value(lossy, "no_load_current_percent") == 2.0


def test_blanks_are_listed_with_value_unit_and_basis():
    listed = {b.field: b for b in assumed.blank(Cable(start="", end=""))}
    assert set(listed) == {"capacitance_uf_per_km", "temperature_degc"}
    assert listed["capacitance_uf_per_km"].value == 0.0
    assert listed["capacitance_uf_per_km"].basis == "neglected"
    assert (listed["temperature_degc"].value, listed["temperature_degc"].unit) == (60.0, "°C")
    assert "no source" in listed["temperature_degc"].basis
    assert assumed.value(OverheadLine(start="", end=""), "temperature_degc") == 50.0
    assert len(assumed.blank(T)) == 3
    given = Cable(start="", end="", capacitance_uf_per_km=0.1, temperature_degc=20.0)
    assert assumed.blank(given) == ()


def test_nominal_voltage_stands_in_for_stated_voltages():
    load, capacitor = Load(node=""), Capacitor(node="")
    assert assumed.value(load, "reference_v", 400.0) == 400.0
    assert assumed.value(replace(load, reference_v=230.0), "reference_v", 400.0) == 230.0
    assert assumed.value(capacitor, "rated_v", 11000.0) == 11000.0
    assert math.isnan(assumed.value(load, "reference_v"))
    assert assumed.value(load, "constant_current_percent") == 0.0
    assert {b.field for b in assumed.blank(load, 400.0)} == {
        "constant_current_percent", "constant_impedance_percent", "reference_v",
    }  # fmt: skip


def test_a_starter_is_assumed_only_where_there_is_one():
    direct = Motor(node="", rated_v=400.0)
    assert assumed.blank(direct) == ()
    assert assumed.value(direct, "limited_current") == direct.starting_current
    soft = {b.field: b.value for b in assumed.blank(replace(direct, starter="soft starter"))}
    assert soft == {"limited_current": 3.0, "limited_power_factor": 0.3}
    drive = {b.field: b.value for b in assumed.blank(replace(direct, starter="drive"))}
    assert drive == {"limited_current": 1.2, "limited_power_factor": 0.95}
    assert assumed.value(replace(direct, rated_v=None), "rated_v", 400.0) == 400.0


def test_what_a_changer_holds_is_assumed_only_where_it_steps():
    changer = Transformer(start="", end="", load_loss_w=1.0, no_load_loss_w=1.0, no_load_current_percent=1.0)
    assert assumed.blank(changer) == ()
    stepping = {b.field: b.value for b in assumed.blank(replace(changer, regulates="winding 2"))}
    assert stepping == {"hold_percent": 100.0, "bandwidth_percent": 5.0}
    regulator = {b.field: b.value for b in assumed.blank(Regulator(start="", end=""))}
    assert regulator == {"hold_percent": 100.0, "bandwidth_percent": pytest.approx(5 / 3)}


def test_reactive_limits_are_assumed_only_where_a_generator_holds_volts():
    assert assumed.blank(Generator(node="")) == ()
    limits = {b.field: b.value for b in assumed.blank(Generator(node="", output_kw=90.0, hold_percent=101.0))}
    assert limits == {
        "q_min_kvar": pytest.approx(-43.589, abs=1e-3),
        "q_max_kvar": pytest.approx(43.589, abs=1e-3),
    }


def test_the_ratio_of_a_supply_is_assumed_only_where_its_fault_level_is_stated():
    assert assumed.blank(Supply(node="")) == ()
    assert [b.field for b in assumed.blank(Supply(node="", fault_level_min_mva=35.0))] == ["xr"]


def test_every_optional_number_is_assumed_or_known_to_need_no_stand_in():
    no_stand_in = {
        "drop_r_ohm",
        "drop_x_ohm",
        "fault_level_min_mva",
        "area_mm2",
        "rating_a",
        "nominal_v",
        "demand_kva",
        "demand_kw",
    }
    no_stand_in |= {"trip_a", "earth_1_ohm", "earth_2_ohm", "fault_current"}
    only_for_faults = {
        "fault_level_max_mva",
        "return_resistance_ohm_per_km",
        "zero_resistance_ohm_per_km",
        "zero_reactance_ohm_per_km",
    }
    only_for_wires = {"neutral_resistance_ohm_per_km", "neutral_reactance_ohm_per_km"}  # see wire_data
    no_stand_in |= only_for_wires | {"share_a_percent", "share_b_percent"}
    no_stand_in |= only_for_faults | {"fault_degc", "z0_ratio"}  # see fault_data
    for kind in KINDS.values():
        for field in fields_of(kind).values():
            if field.optional and field.type is float and not (issubclass(kind, Node)):
                if (kind, field.name) == (Generator, "hold_percent"):
                    continue
                assert (field.name in assumed.assumable(kind)) != (field.name in no_stand_in), field.name


def test_fields_without_a_stand_in_raise():
    for element, field in (
        (T, "uk_percent"),
        (Cable(start="", end=""), "rating_a"),
        (Load(node=""), "demand_kw"),
    ):
        with pytest.raises(KeyError):
            assumed.stand_in(element, field)
