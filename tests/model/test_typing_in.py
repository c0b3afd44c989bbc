"""Typed text becomes an edit, or a refusal that names element and field."""

import pytest

from app.model.edits import EditRefused, change_text


@pytest.mark.parametrize(
    ("id", "field", "text", "value"),
    [
        ("C1", "length_m", "450 ft", 137.16),
        ("C1", "area_mm2", "4/0 AWG", 107.21930257703053),
        ("C1", "area_mm2", "", None),
        ("C1", "rating_a", "  ", None),
        ("C1", "conductor", "cu", "Cu"),
        ("C1", "side_by_side", "2 runs", 2),
        ("C1", "type", " 4×95 Al ", "4×95 Al"),
        ("C1", "name", "", ""),
        ("W1", "closed", "no", False),
        ("W1", "closed", "Yes", True),
        ("S1", "wires", "two", "two-wire"),
        ("T2", "tap", "−1", -1),
        ("T2", "tap", "−2.5 %", -1),
        ("T2", "tap", "+5%", 2),
        ("T2", "tap", "0 %", 0),
        ("T2", "v1_v", "33 kV", 33000.0),
        ("L1", "power_factor", "90 %", 0.9),
    ],
)
def test_typed_values(yard, id, field, text, value):
    assert getattr(change_text(yard, id, field, text).elements[id], field) == value


def test_a_ratio_typed_into_either_winding_sets_both(yard):
    for field in ("v1_v", "v2_v"):
        t = change_text(yard, "T2", field, "33/0.415 kV").elements["T2"]
        assert (t.v1_v, t.v2_v) == (33000.0, 415.0)
    assert change_text(yard, "T2", "v2_v", "208Y/120").elements["T2"].v2_v == 208.0


def test_kilowatts_typed_as_the_apparent_demand_go_where_they_belong(yard):
    load = change_text(yard, "L1", "demand_kva", "64 kW").elements["L1"]
    assert (load.demand_kva, load.demand_kw) == (None, 64.0)


@pytest.mark.parametrize(
    ("id", "field", "text", "words"),
    [
        ("C1", "length_m", "450 kg", 'Lane, C1 (cable), Length: "450 kg" is not a length, allowed is'),
        ("C1", "length_m", "-3", "Lane, C1 (cable): Length is -3 m, allowed is a number, at least 0"),
        ("C1", "length_m", "", "Lane, C1 (cable), Length: Nothing was typed"),
        ("C1", "side_by_side", "1.5", "In parallel: 1.5 runs is not allowed, allowed is a whole number"),
        ("C1", "conductor", "gold", 'Conductor: "gold" is not allowed, allowed is one of Al, Cu.'),
        ("C1", "conductor", "", "allowed is one of Al, Cu."),
        ("W1", "closed", "perhaps", 'W1 (switch), Closed: "perhaps" is not allowed, allowed is yes or no.'),
        ("T2", "uk_percent", "55 %", "T2 (transformer): Impedance uk is 55 %, allowed is"),
        ("T2", "v1_v", "33/x kV", "Winding 1: "),
        ("T2", "tap", "−3 %", "Tap: -3 % is not allowed, allowed are steps of 2.5 %."),
        ("L1", "demand_kva", "64 kg", '"64 kg" is not an apparent power'),
        ("L1", "demand_kva", "", "both blank"),
        ("L1", "colour", "red", 'there is no field "colour"'),
    ],
)
def test_refusals(yard, id, field, text, words):
    with pytest.raises(EditRefused) as caught:
        change_text(yard, id, field, text)
    assert words in str(caught.value)
