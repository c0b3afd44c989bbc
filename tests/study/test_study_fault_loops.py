"""Fault currents where phases are not alike: against the independent four-wire solution, and closed forms."""

import math

import pytest
from fault_loops import FaultLoops
from msgspec.structs import asdict
from study_layouts import changed, drawing, line

from app.model import edits
from app.model.kinds import Busbar, Cable, Load, OverheadLine, Supply, Transformer
from app.study import run
from app.study.outcome import Verdict

LEVEL = {"fault_level_max_mva": 60.0, "fault_level_min_mva": 40.0, "xr": 4.0}


def hold(made, skip=()):
    """Every node that lacks phases, and every one on two wires, against loops of the four-wire solution."""
    table, checked = run(made).faults, 0
    for largest, word, pick in ((True, "max", max), (False, "min", min)):
        neutral, earth = FaultLoops(made, largest), FaultLoops(made, largest, earth=True)
        for id in neutral.wired.at:
            state = table.at(id)
            if id in skip or state.ik3_max_ka == state.ik3_max_ka:
                continue
            two, one, carried = neutral.currents(id)
            system, checked = neutral.wired.at[id][1], checked + 1
            got = {n: getattr(state, f"{n}_{word}_ka") for n in ("ik2", "ikn", "ik1")}
            if system == "two-wire":
                assert got["ik2"] == pytest.approx(pick(one), rel=1e-6), id
            else:
                assert got["ik2"] == pytest.approx(pick(two) if two else math.nan, rel=1e-6, nan_ok=True), id
                assert got["ikn"] == (
                    pytest.approx(pick(one), rel=1e-6) if carried else pytest.approx(math.nan, nan_ok=True)
                )
            assert got["ik1"] == pytest.approx(pick(earth.single(id)[0]), rel=1e-6), id
            if not largest:
                volts = abs(state.zs_ohm * got["ik1"] * 1e3)
                nominal = neutral.wired.at[id][2] / {"three-phase": 3**0.5, "split-phase": 2}.get(system, 1)
                assert volts == pytest.approx(state.c_min * nominal, rel=1e-9)
    return checked


SPAN = {"resistance_ohm_per_km": 0.53, "reactance_ohm_per_km": 0.14, "fault_degc": 90.0}


def camp(**more):
    """Four wires with laterals on one and on two phases, a lateral of laterals, returns unlike neutrals."""
    base = drawing(
        B1=Busbar(), S1=Supply(node="B1", nominal_v=11e3, **LEVEL),
        T1=Transformer(start="B1", end="B2", rating_kva=75.0, load_loss_w=900.0, tap=1),
        B2=Busbar(), C1=Cable(start="B2", end="B3", length_m=140.0, **SPAN), B3=Busbar(),
        C2=Cable(start="B3", end="B4", length_m=64.0, phases="A", return_resistance_ohm_per_km=0.9, **SPAN),
        B4=Busbar(), C3=Cable(start="B4", end="B5", length_m=64.0, side_by_side=2, **SPAN), B5=Busbar(),
        C4=Cable(start="B6", end="B3", length_m=110.0, phases="BC", neutral_resistance_ohm_per_km=0.8,
        neutral_reactance_ohm_per_km=0.1, **SPAN), B6=Busbar(),
        C5=Cable(start="B6", end="B7", length_m=40.0, phases="C", **SPAN), B7=Busbar(),
        L1=Load(node="B5"), L2=Load(node="B7"),
    )  # fmt: skip
    return changed(base, **more)


def test_laterals_on_one_and_two_phases():
    assert hold(camp()) == 8


PLATE = {"uk_percent": 3.0, "load_loss_w": 400.0}


def few():
    """From three phases at 12.47 kV: a lateral through earth, a centre tap, a unit between two phases."""
    along = {"neutral": "earthed along", "zero_resistance_ohm_per_km": 1.1, "zero_reactance_ohm_per_km": 1.4}
    return drawing(
        B1=Busbar(), S1=Supply(node="B1", nominal_v=12470.0, z0_ratio=1.5, **LEVEL),
        O1=OverheadLine(start="B1", end="B2", phases="A", length_m=2200.0, resistance_ohm_per_km=0.9,
        reactance_ohm_per_km=0.4, fault_degc=80.0, **along), B2=Busbar(),
        T1=Transformer(start="B2", end="B3", rating_kva=25.0, v1_v=7200.0, v2_v=240.0, vector_group="Ii0",
        build="centre-tapped", **PLATE), B3=Busbar(),
        C1=Cable(start="B3", end="B4", length_m=40.0, return_resistance_ohm_per_km=0.3, **SPAN), B4=Busbar(),
        T3=Transformer(start="B1", end="B5", rating_kva=15.0, v1_v=12470.0, v2_v=230.0, vector_group="Ii0",
        phases="BC", **PLATE), B5=Busbar(),
        C2=Cable(start="B5", end="B6", length_m=30.0, return_resistance_ohm_per_km=0.9, **SPAN), B6=Busbar(),
    )  # fmt: skip


def test_a_lateral_through_earth_a_centre_tap_and_a_unit_between_two_phases():
    assert hold(few()) == 10
    table = run(few()).faults
    assert table.at("B2").ikn_max_ka != table.at("B2").ikn_max_ka
    assert table.at("B3").ikn_max_ka > 1.4 * table.at("B3").ik2_max_ka  # hot to neutral drives more


def two_wire(**supply):
    level = {"nominal_v": 230.0, "fault_level_max_mva": 2.0, "fault_level_min_mva": 1.5, "xr": 1.0}
    return drawing(
        B1=Busbar(), S1=Supply(node="B1", wires="two-wire", **{**level, **supply}), B2=Busbar(), B3=Busbar(),
        C1=line("B1", "B2", return_resistance_ohm_per_km=0.5, fault_degc=90.0, trip_a=160.0),
        C2=line("B2", "B3", fault_degc=90.0), C3=line("B1", "B3", length_m=90.0, fault_degc=90.0),
        L1=Load(node="B3", demand_kva=3.0),
    )  # fmt: skip


def test_two_wires_have_an_earth_loop_through_the_return():
    assert hold(two_wire()) == 6
    spur = changed(two_wire(), C3=None)
    state = run(spur).faults.at("B2")
    hot = 1 + 0.00403 * 70
    supply = 0.95 * 230**2 / 1.5e6 / math.sqrt(2) * (1 + 1j)
    loop = supply + 0.2 * complex(hot * (0.125 + 0.5), 2 * 0.072)
    assert state.zs_ohm == pytest.approx(abs(loop), rel=1e-9)
    assert state.ik1_min_ka == pytest.approx(0.95 * 230 / abs(loop) / 1e3, rel=1e-9)
    (found,) = (f for f in run(spur).findings if f.check == "earth fault")
    assert found.verdict is Verdict.HOLDS


def test_two_wires_that_may_be_two_phases_have_no_earth_loop_and_the_device_says_so():
    """Of 400 V between two wires nothing says that one of them is earthed, unless Z0/Z1 is stated."""
    made = changed(two_wire(nominal_v=400.0), C3=None)
    state = run(made).faults.at("B2")
    assert math.isnan(state.zs_ohm)
    assert state.ik2_min_ka > 0
    (found,) = (f for f in run(made).findings if f.check == "earth fault")
    assert found.verdict is Verdict.NOTE
    assert run(edits.change(made, "S1", z0_ratio=1.0)).faults.at("B2").zs_ohm > 0


def test_phases_that_are_alike_keep_their_sequence_figures():
    plain = changed(camp(), C2=None, C3=None, C4=None, C5=None, L1=None, L2=None)
    one, other = run(plain).faults, run(camp()).faults
    for id in ("B1", "B2", "B3"):
        assert asdict(one.at(id)) == pytest.approx(asdict(other.at(id)), rel=1e-12, nan_ok=True)
    assert other.at("B4").ik3_max_ka != other.at("B4").ik3_max_ka


def test_an_open_delta_by_closed_forms():
    """Two coils on a stiff supply: the phase between them carries √3 of what each drives."""
    unit = Transformer(start="B1", end="B2", rating_kva=100.0, v1_v=12470.0, v2_v=240.0, vector_group="Ii0",
        build="open delta", uk_percent=4.0, load_loss_w=800.0)  # fmt: skip
    stiff = {"fault_level_max_mva": 1e6, "fault_level_min_mva": 1e6, "xr": 5.0}
    made = drawing(B1=Busbar(), S1=Supply(node="B1", nominal_v=12470.0, **stiff), B2=Busbar(), T1=unit)
    state = run(made).faults.at("B2")
    whole = 240.0**2 / 100e3
    coil = 2 * whole * complex(0.008, math.sqrt(0.04**2 - 0.008**2))
    least = 0.95 * 240 / abs(coil) / 1e3
    assert state.ik3_min_ka == pytest.approx(least, rel=1e-3)
    assert state.ik2_min_ka == pytest.approx(least / 2, rel=1e-3)  # over the open side, both coils in series
    kt = 0.95 * 1.10 / (1 + 0.6 * math.sqrt(0.04**2 - 0.008**2))
    most = 1.10 * 240 / abs(coil) / kt / 1e3
    assert state.ik3_max_ka == pytest.approx(math.sqrt(3) * most, rel=1e-3)
    assert state.ik2_max_ka == pytest.approx(most, rel=1e-3)
    corner = run(edits.change(made, "T1", earth_2_ohm=0.0)).faults.at("B2")  # volts to earth are others there
    assert corner.ik3_max_ka == pytest.approx(state.ik3_max_ka, rel=1e-9)
    assert all(
        math.isnan(v) for v in (corner.ikn_max_ka, corner.ikn_min_ka, corner.ik1_min_ka, corner.zs_ohm)
    )


def test_a_board_on_a_lateral_is_judged_by_what_it_has():
    made = edits.change(camp(), "B4", withstand_ka=0.4)
    (found,) = (f for f in run(made).findings if f.check == "fault rating")
    assert found.verdict is Verdict.FAILS
    assert found.value == run(made).faults.at("B4").ikn_max_ka
    assert "a fault from phase to neutral" in found.sentence


def test_the_peak_of_a_radial_lateral_needs_no_equivalent_frequency():
    """Nothing lies side by side, so that R/X is that of the loop; in a ring of a lateral it is not."""
    state = run(camp()).faults.at("B4")
    assert state.rx_peak == pytest.approx(state.r_ohm / state.x_ohm, rel=1e-6)
    kappa = 1.02 + 0.98 * math.exp(-3 * state.r_ohm / state.x_ohm)
    assert state.ip_ka == pytest.approx(kappa * math.sqrt(2) * state.ikn_max_ka, rel=1e-6)
    ringed = camp(
        C6=Cable(start="B3", end="B4", length_m=50.0, phases="A", **{**SPAN, "reactance_ohm_per_km": 2.0})
    )
    state = run(ringed).faults.at("B4")
    assert state.rx_peak != pytest.approx(state.r_ohm / state.x_ohm, rel=1e-3)
    kappa = 1.02 + 0.98 * math.exp(-3 * state.rx_peak)
    assert state.ip_ka == pytest.approx(kappa * math.sqrt(2) * state.ikn_max_ka, rel=1e-9)
    assert hold(ringed, skip=("B5", "B6", "B7")) == 2


def test_a_service_behind_a_supply_without_zero_sequence_is_not_passed_off_as_safe():
    """A unit from phase to earth is fed through the zero sequence: where nobody states it no board holds."""
    service = dict(
        B1=Busbar(), S1=Supply(node="B1", nominal_v=12470.0, **LEVEL),
        T1=Transformer(start="B1", end="B2", v1_v=7200.0, v2_v=240.0, vector_group="Ii0",
        build="centre-tapped", phases="A", rating_kva=25.0), B2=Busbar(withstand_ka=0.5),
    )  # fmt: skip
    blank = run(drawing(**service)).findings
    (told,) = (f for f in blank if f.check == "fault level")
    assert told.ids == ("B2", "S1")
    assert "because S1 has no Z0/Z1" in told.sentence
    assert not [f for f in blank if f.check == "fault rating"]
    stated = run(edits.change(drawing(**service), "S1", z0_ratio=1.0)).findings
    assert [f.verdict for f in stated if f.check == "fault rating"] == [Verdict.FAILS]
    assert not [f for f in stated if f.check == "fault level"]
