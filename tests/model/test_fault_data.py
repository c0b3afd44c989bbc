"""Data that only fault currents need: kA or MVA as typed, stand-ins with their basis, bounds."""

import math

import pytest

from app.model import edits, fault_data
from app.model.drawing import Drawing
from app.model.fault_data import Put
from app.model.kinds import Busbar, Cable, OverheadLine, Supply, Transformer


def typed(text, field="fault_level_max_mva", **fields):
    drawing = Drawing(elements={"B1": Busbar(), "S1": Supply(node="B1", **fields)})
    return edits.change_text(drawing, "S1", field, text).elements["S1"]


@pytest.mark.parametrize("text", ["12 kA", "12000 A", "12,0 kA"])
def test_a_fault_level_typed_as_a_current_is_kept_as_mva(text):
    assert typed(text).fault_level_max_mva == pytest.approx(math.sqrt(3) * 0.4 * 12, rel=1e-12)


def test_a_fault_level_typed_as_power_stays_what_it_is():
    assert typed("35 MVA", nominal_v=11000.0).fault_level_max_mva == 35.0
    assert typed("35000 kVA", nominal_v=11000.0).fault_level_max_mva == 35.0
    assert typed("8.3").fault_level_max_mva == 8.3
    assert typed("5 kA", wires="two-wire", nominal_v=230.0).fault_level_max_mva == pytest.approx(1.15)
    assert typed("", fault_level_max_mva=20.0).fault_level_max_mva is None


def test_what_is_no_fault_level_is_refused_in_its_own_unit():
    with pytest.raises(edits.EditRefused, match=r'Highest fault level: "12 mm" is not an apparent power'):
        typed("12 mm")


def test_the_least_is_not_above_the_highest():
    with pytest.raises(edits.EditRefused, match="Least fault level is 40 MVA, allowed is at most"):
        typed("40 MVA", "fault_level_min_mva", nominal_v=11000.0, fault_level_max_mva=35.0)


def test_the_return_conductor_sets_the_zero_sequence():
    cable = Cable(start="", end="", resistance_ohm_per_km=0.32, return_resistance_ohm_per_km=0.64)
    assert fault_data.fault_value(cable, "zero_resistance_ohm_per_km", 400.0) == Put(
        pytest.approx(0.32 + 3 * 0.64), "R1 + 3·R of its return conductor"
    )
    alike = Cable(start="", end="", resistance_ohm_per_km=0.32, reactance_ohm_per_km=0.07)
    for field, one in (("zero_resistance_ohm_per_km", 0.32), ("zero_reactance_ohm_per_km", 0.07)):
        put = fault_data.fault_value(alike, field, 400.0)
        assert put.value == pytest.approx(4 * one)
        assert "no source" in put.basis
    assert (
        fault_data.fault_value(
            Cable(start="", end="", zero_resistance_ohm_per_km=1.5), "zero_resistance_ohm_per_km", 400.0
        )
        == 1.5
    )


def test_a_bare_line_at_medium_voltage_comes_back_through_earth():
    line = OverheadLine(start="", end="", resistance_ohm_per_km=0.6)
    at_50, at_60 = (
        fault_data.fault_value(line, "zero_resistance_ohm_per_km", 11000.0, f).value for f in (50.0, 60.0)
    )
    assert at_50 == pytest.approx(0.6 + 0.1479, abs=1e-4)
    assert at_60 - 0.6 == pytest.approx(1.2 * (at_50 - 0.6))
    assert fault_data.fault_value(line, "zero_resistance_ohm_per_km", 400.0).value == pytest.approx(2.4)


def test_star_points_follow_the_vector_group_unless_an_earthing_is_stated():
    def earths(group, **fields):
        t = Transformer(start="", end="", vector_group=group, **fields)
        return fault_data.star_earth_ohm(t, 1), fault_data.star_earth_ohm(t, 2)

    assert earths("Dyn11") == (None, 0.0)
    assert earths("YNd1") == (0.0, None)
    assert earths("Dy11") == (None, None)
    assert earths("Dyn11", earth_2_ohm=1.5) == (None, 1.5)
    assert earths("Yd1", earth_1_ohm=20.0) == (20.0, None)


def test_every_stand_in_says_why():
    supply = Supply(node="", fault_level_min_mva=35.0)
    cases = [(Cable(start="", end=""), "fault_degc"), (OverheadLine(start="", end=""), "fault_degc")]
    cases += [(Transformer(start="", end="", vector_group=g), "z0_ratio") for g in ("Dyn11", "Yzn11")]
    cases += [(supply, name) for name in ("fault_level_max_mva", "xr", "z0_ratio")]
    for element, field in cases:
        put = fault_data.fault_value(element, field, 400.0)
        assert isinstance(put, Put)
        assert put.basis
    with pytest.raises(KeyError):
        fault_data.fault_value(Supply(node=""), "fault_level_max_mva", 400.0)
