"""Lines from their spacing, drawn: published matrices, closed forms, symmetry, temperature, loops, faults."""

import csv
import math
from pathlib import Path

import numpy as np
import pytest
from msgspec.structs import replace
from study_layouts import drawing

from app.model import assumed
from app.model.checks import fault
from app.model.edits import change_text
from app.model.file import decode, encode
from app.model.kinds import Busbar, Joint, Load, OverheadLine, Supply, Transformer
from app.study import run
from app.study.outcome import Verdict
from app.study.overhead import loop_of, matrix_of, sequence_of
from app.study.overhead_working import sentences, working_in
from solver import carson, line
from solver.status import Status

MILE, FOOT = 1.609344, 304.8
TABLE = Path(__file__).parent.parent / "reference" / "line_impedance_matrices.csv"
TYPED = {  # as a planner types Kersting's example 4.1 into the card
    "resistance_ohm_per_km": "0.306 Ω/mi", "gmr_mm": "0.0244 ft", "diameter_mm": "0.721 in",
    "hung_at_m": "0 ft 29 ft; 2.5 ft 29 ft; 7 ft 29 ft; 4 ft 25 ft", "neutral_gmr_mm": "0.00814 ft",
    "neutral_resistance_ohm_per_km": "0.592 Ω/mi", "neutral_diameter_mm": "0.563 in",
    "temperature_degc": "20", "soil_ohm_m": "100", "length_m": "2000 ft", "neutral": "earthed along",
}  # fmt: skip
FLAT = OverheadLine(
    start="B1", end="J1", hung_at_m="-1.1 9; 0 9; 1.1 9", resistance_ohm_per_km=0.5946, diameter_mm=9.6,
    gmr_mm=2.4, length_m=2400.0, temperature_degc=50.0,
)  # fmt: skip


def drawn(run_=FLAT, volts=12470.0, wires="three-phase", frequency_hz=50.0, **fields):
    supply = Supply(node="B1", nominal_v=volts, wires=wires, **fields)
    elements = {
        "S1": supply,
        "B1": Busbar(),
        "J1": Joint(),
        "O1": run_,
        "L1": Load(node="J1", demand_kva=60.0),
    }
    return drawing(frequency_hz=frequency_hz, **elements)


def published():
    """Example 4.1 typed field by field into a drawing, as the card does it, and through the file."""
    made = drawn(OverheadLine(start="B1", end="J1"), frequency_hz=60.0)
    for field, text in TYPED.items():
        made = change_text(made, "O1", field, text)
    assert decode(encode(made)) == made
    return decode(encode(made))


def reference(name):
    with TABLE.open(newline="") as file:
        return [r for r in csv.DictReader(file) if r["example"] == name]


def test_the_published_example_walks_through_a_drawing():
    """Kersting, Distribution System Modeling and Analysis, examples 4.1 and 4.2; admittances of example 5.1
    from memory, computed there with ε0 = 1.424e-2 µF/mile, 0.07 % below ours."""
    made = published()
    o1 = made.elements["O1"]
    z, y = matrix_of(o1, 60.0)
    for row in reference("Kersting example 4.1"):
        value = z["abc".index(row["row"]), "abc".index(row["col"])] * MILE
        assert value.real == pytest.approx(float(row["R_ohm_per_mile"]), abs=1.5e-4)
        assert value.imag == pytest.approx(float(row["X_ohm_per_mile"]), abs=1.5e-4)
    assert not z[3].any()
    assert not z[:, 3].any()
    assert not y[3].any()
    remembered = [[5.6712, -1.8362, -0.7034], [-1.8362, 5.9774, -1.169], [-0.7034, -1.169, 5.3911]]
    assert y[:3, :3].imag * MILE * 1e6 == pytest.approx(np.array(remembered), rel=1e-3)
    for which, value in zip((1, 0), sequence_of(o1, 60.0), strict=True):
        row = next(r for r in reference("Kersting example 4.1 sequence") if r["row"] == str(which))
        assert value.real * MILE == pytest.approx(float(row["R_ohm_per_mile"]), abs=1.5e-4)
        assert value.imag * MILE == pytest.approx(float(row["X_ohm_per_mile"]), abs=1.5e-4)
    state = run(made).branches.at("O1", 0)
    feet = 2000 / 5280
    assert state.resistance_ohm == pytest.approx(0.3061 * feet, abs=1e-4 * feet)
    assert state.reactance_ohm == pytest.approx(0.6270 * feet, abs=1e-4 * feet)


@pytest.mark.parametrize("frequency", [50.0, 60.0])
def test_z1_in_closed_form_goes_into_the_solution(frequency):
    x = 2 * math.pi * frequency * 2e-4 * math.log((1.1 * 1.1 * 2.2) ** (1 / 3) / 2.4e-3)
    r = 0.5946 * (1 + 0.00403 * 30)
    state = run(drawn(frequency_hz=frequency)).branches.at("O1", 0)
    assert state.reactance_ohm == pytest.approx(2.4 * x, rel=1e-7)
    assert state.resistance_ohm == pytest.approx(2.4 * r, rel=1e-12)
    z1, z0 = sequence_of(FLAT, frequency)
    de = carson.earth_depth(frequency)
    earth = 2 * math.pi * frequency * 2e-4
    assert z0.real == pytest.approx(r + 3 * earth * math.pi / 4, rel=1e-9)  # R + 3·ωμ0/8
    gmr_of_all = (2.4e-3 * (1.1 * 1.1 * 2.2) ** (2 / 3)) ** (1 / 3)
    assert z0.imag == pytest.approx(3 * earth * math.log(de / gmr_of_all), rel=1e-9)
    assert z1 == pytest.approx(complex(r, x), rel=1e-7)


def test_the_typed_reactance_and_zero_sequence_do_not_count():
    odd = replace(
        FLAT, reactance_ohm_per_km=0.0, zero_reactance_ohm_per_km=77.0, zero_resistance_ohm_per_km=9.0
    )
    fault_data = {"fault_level_max_mva": 40.0, "fault_level_min_mva": 30.0, "xr": 3.0, "z0_ratio": 1.0}
    one, other = (run(drawn(line, 11000.0, **fault_data)) for line in (FLAT, odd))
    assert repr(one.branches.at("O1", 0)) == repr(other.branches.at("O1", 0))
    assert repr(one.faults.at("J1")) == repr(other.faults.at("J1"))
    assert one.faults.at("J1").ik1_min_ka < one.faults.at("J1").ik3_max_ka
    blank = replace(FLAT, hung_at_m="", reactance_ohm_per_km=0.37)
    assert run(drawn(blank)).branches.at("O1", 0).reactance_ohm == pytest.approx(0.37 * 2.4)


def test_the_earth_fault_is_that_of_both_sequences():
    fault_data = {"fault_level_max_mva": 40.0, "fault_level_min_mva": 30.0, "xr": 3.0, "z0_ratio": 1.0}
    along = replace(FLAT, hung_at_m=FLAT.hung_at_m + "; 0 7.5", fault_degc=80.0)
    outcome = run(drawn(along, 11000.0, **fault_data))
    z1, z0 = sequence_of(along, 50.0, 11000.0, 80.0)
    feeder = 11000.0**2 / 30e6 * np.exp(1j * math.atan(3.0))
    loop = 2 * (feeder + 2.4 * z1) + feeder + 2.4 * z0
    want = math.sqrt(3) * 1.0 * 11000.0 / abs(loop) / 1e3
    assert outcome.faults.at("J1").ik1_min_ka == pytest.approx(want, rel=1e-6)
    named = {(a.field, a.value) for a in outcome.assumptions if a.id == "O1"}
    assert ("neutral_resistance_ohm_per_km", 0.5946) in named
    assert ("soil_ohm_m", 100.0) in named


def test_the_neutral_by_level_and_by_what_is_stated():
    four = replace(FLAT, hung_at_m=FLAT.hung_at_m + "; 0 7.5")
    carried, _ = matrix_of(four, 50.0)
    along, _ = matrix_of(four, 50.0, 11000.0)
    assert carried[3, 3] != 0
    assert carried[0, 3] != 0
    assert not along[3].any()
    assert along[:3, :3] == pytest.approx(carson.kron(carried, 3))
    assert matrix_of(replace(four, neutral="carried"), 50.0, 11000.0)[0] == pytest.approx(carried)
    assert matrix_of(replace(four, neutral="earthed along"), 50.0)[0] == pytest.approx(along)
    out_and_back = carried[:3, :3] - carried[:3, 3:] - carried[3:, :3] + carried[3, 3]
    assert sequence_of(four, 50.0)[1] == pytest.approx(carson.sequence(out_and_back)[0, 0])
    assert sequence_of(four, 50.0, 11000.0)[0] == pytest.approx(carson.sequence(along[:3, :3])[1, 1])


def test_symmetry_rotation_and_shift_of_the_positions():
    z, y = matrix_of(FLAT, 50.0)
    assert z == pytest.approx(z.T)
    assert y == pytest.approx(y.T)
    turned, _ = matrix_of(replace(FLAT, hung_at_m="1.1 9; -1.1 9; 0 9"), 50.0)
    order = [2, 0, 1]
    assert turned[:3, :3] == pytest.approx(z[np.ix_(order, order)])
    mirrored, _ = matrix_of(replace(FLAT, hung_at_m="1.1 9; 0 9; -1.1 9"), 50.0)
    assert mirrored == pytest.approx(z)
    shifted, _ = matrix_of(replace(FLAT, hung_at_m="3.9 12; 5 12; 6.1 12"), 50.0)
    assert shifted == pytest.approx(z)  # the earth return knows no height
    equal = replace(FLAT, hung_at_m=f"-0.5 9; 0.5 9; 0 {9 + math.sqrt(0.75)}")
    z1 = sequence_of(equal, 50.0)[0]
    assert z1.imag == pytest.approx(0.04 * math.pi * math.log(1.0 / 2.4e-3) / 2, rel=1e-9)


def test_resistance_alone_goes_with_the_temperature():
    cold, hot = (sequence_of(FLAT, 50.0, temperature=t) for t in (20.0, 80.0))
    grown = float(line.resistance(0.5946, line.ALPHA["Al"], 80.0)) - 0.5946
    for was, now in zip(cold, hot, strict=True):
        assert now - was == pytest.approx(grown, rel=1e-9)
    assert matrix_of(replace(FLAT, temperature_degc=80.0), 50.0)[0][0, 0] - matrix_of(
        replace(FLAT, temperature_degc=20.0), 50.0
    )[0][0, 0] == pytest.approx(grown, rel=1e-9)


@pytest.mark.parametrize("letter", "ABC")
def test_a_single_phase_line_fills_its_own_slots(letter):
    lateral = replace(FLAT, phases=letter, hung_at_m="0 9; 0 7.5")
    z, y = matrix_of(lateral, 60.0)
    used = ["ABC".index(letter), 3]
    assert z[np.ix_(used, used)].all()
    rest = np.delete(np.delete(z, used, 0), used, 1)
    assert not rest.any()
    assert np.count_nonzero(z) == 4
    assert np.count_nonzero(y) == 4
    loop = z[used[0], used[0]] - 2 * z[used[0], 3] + z[3, 3]
    assert sequence_of(lateral, 60.0) == pytest.approx((loop, loop))


def test_two_wires_out_and_back_and_one_through_the_earth():
    """Loop X = 2·ωμ0/2π·ln(D/GMR), from memory; earth return R = 0.0493 ohm/km at 50 Hz, Carson."""
    pair = replace(FLAT, hung_at_m="-0.4 8; 0.4 8")
    state = run(drawn(pair, 6350.0, "two-wire")).branches.at("O1", 0)
    assert state.reactance_ohm == pytest.approx(2.4 * 2 * 0.02 * math.pi * math.log(0.8 / 2.4e-3), rel=1e-9)
    assert state.resistance_ohm == pytest.approx(2.4 * 2 * 0.5946 * (1 + 0.00403 * 30), rel=1e-9)
    single = replace(FLAT, hung_at_m="0 9")
    r = loop_of(single, 50.0).real - 0.5946 * (1 + 0.00403 * 30)
    assert r == pytest.approx(0.0493, abs=1e-4)
    lone = run(drawn(single, 19100.0, "two-wire"))
    assert lone.status is Status.SOLVED
    c = 2e3 * math.pi * carson.EPSILON / math.log(18 / 4.8e-3) * 2.4
    open_ended = run(replace(drawn(single, 19100.0, "two-wire"), elements={
        k: v for k, v in drawn(single, 19100.0, "two-wire").elements.items() if k != "L1"
    }))  # fmt: skip
    kvar = 19100.0**2 * 2 * math.pi * 50 * c / 1e3
    assert -open_ended.branches.at("O1", 0).start_kvar == pytest.approx(kvar, rel=1e-3)


def test_capacitance_from_the_spacing_is_listed_and_gives_way_to_a_stated_one():
    blank = next(b for b in assumed.blank(FLAT) if b.field == "capacitance_uf_per_km")
    ideal = 2e3 * math.pi * carson.EPSILON / math.log((1.1 * 1.1 * 2.2) ** (1 / 3) / 4.8e-3) * 1e6
    assert blank.value == pytest.approx(ideal, rel=2e-3)  # the earth adds a little
    assert blank.value > ideal
    assert "spacing" in blank.basis
    _, y = matrix_of(FLAT, 50.0)
    potential = np.linalg.inv(y[:3, :3] / (100j * math.pi))  # phases change places before it is inverted
    alike = carson.sequence(potential)[1, 1].real
    assert 1e6 / alike == pytest.approx(blank.value, rel=1e-9)
    _, stated = matrix_of(replace(FLAT, capacitance_uf_per_km=0.02), 50.0)
    assert stated[:3, :3] == pytest.approx(np.eye(3) * 1j * 100 * math.pi * 0.02e-6)


@pytest.mark.parametrize(
    ("hung", "wires", "allowed"),
    [("0 9; 0 7.5", "three-phase", "3, or 4"), ("-1 9; 0 9; 1 9", "two-wire", "1, or 2")],
)
def test_too_few_or_too_many_conductors_bar_a_solution(hung, wires, allowed):
    outcome = run(drawn(replace(FLAT, hung_at_m=hung), wires=wires))
    told = next(f for f in outcome.findings if f.check == "spacing")
    assert told.verdict is Verdict.BLOCKS
    assert told.ids == ("O1",)
    assert f"allowed are {allowed} with a neutral" in told.sentence
    assert outcome.status is not Status.SOLVED


def test_a_lateral_behind_a_span_of_one_phase_is_solved_by_its_own_slots():
    """A span on B with its phase stated, then one that follows; against the loop by hand."""
    first = replace(FLAT, phases="B", hung_at_m="0 9; 0 7.5", neutral="carried")
    made = drawn(first, 400.0)
    then = replace(FLAT, start="J1", end="J2", hung_at_m="0 9; 0 7.5")
    elements = {**made.elements, "J2": Joint(), "O2": then, "L1": Load(node="J2", demand_kva=1.0, phases="B")}
    outcome = run(replace(made, elements=elements))
    assert outcome.status is Status.SOLVED
    node = outcome.wires.nodes.at("J2", 0)
    loop = 4.8 * sequence_of(first, 50.0)[0]
    source, power = 400 / math.sqrt(3), 1000 * complex(0.95, math.sqrt(1 - 0.95**2))
    volts = source
    for _ in range(200):
        volts = source - loop * np.conj(power / volts)
    assert node.b_v - 0 == pytest.approx(abs(volts), rel=2e-4)


def test_a_bare_line_with_a_spacing_is_not_without_impedance():
    perfect = replace(FLAT, resistance_ohm_per_km=0.0, reactance_ohm_per_km=0.0)
    outcome = run(drawn(perfect))
    assert outcome.status is Status.SOLVED
    assert outcome.branches.at("O1", 0).reactance_ohm > 0.5


def test_the_working_adds_up_by_hand():
    made = working_in(drawn(), FLAT)
    told = sentences(made)
    assert told[0] == "Z1 = 0.666 + j0.06283·ln(1.386 m / 2.40 mm) = 0.666 + j0.400 Ω/km"
    assert told[1].endswith("back through earth")
    assert "Carson 1926" in told[-1]
    assert 0.06283 * math.log(1.386 / 2.40e-3) == pytest.approx(0.3995, abs=5e-5)
    pair = replace(FLAT, hung_at_m="0 9; 0 7.5")
    two = working_in(drawn(pair, 7200.0, "two-wire"), pair)
    assert two.zero is None
    assert two.r + two.share.real == pytest.approx(2 * two.r)


def test_a_transformer_behind_a_spaced_line_solves_and_its_notches_move():
    made = drawn(FLAT, 11000.0)
    more = {"B2": Busbar(), "T1": Transformer(start="J1", end="B2"), "L1": Load(node="B2", demand_kva=80.0)}
    volts = [
        run(replace(made, elements={**made.elements, **more, "T1": replace(more["T1"], tap=tap)})).nodes.at(
            "B2", 0
        )
        for tap in (0, -1)
    ]
    assert volts[1].voltage_v > volts[0].voltage_v
    assert fault("O1", FLAT) is None


@pytest.mark.parametrize(("volts", "kva"), [(400.0, (4.0, 1.0, 0.5)), (12470.0, (300.0, 90.0, 20.0))])
def test_unlike_loads_on_a_spaced_line_by_hand(volts, kva):
    """At 400 V the neutral is carried, at 12.47 kV earthed along; volts of the matrix worked out here."""
    four = replace(
        FLAT, hung_at_m=FLAT.hung_at_m + "; 0.4 7.5", capacitance_uf_per_km=0.0, neutral_gmr_mm=1.4
    )
    four = replace(four, length_m=300.0 if volts == 400.0 else 9000.0)
    made = drawn(four, volts)
    loads = {
        f"L{k}": Load(node="J1", demand_kva=s, phases=p)
        for k, (p, s) in enumerate(zip("ABC", kva, strict=True))
    }
    elements = {i: e for i, e in made.elements.items() if i != "L1"} | loads
    outcome = run(replace(made, elements=elements))
    assert outcome.status is Status.SOLVED
    z = matrix_of(four, 50.0, volts)[0] * four.length_m / 1e3
    source = np.array([*(volts / math.sqrt(3) * np.exp(-2j * math.pi / 3 * np.arange(3))), 0])
    power = 1e3 * np.array(kva) * complex(0.95, math.sqrt(1 - 0.95**2))
    there = source.copy()
    for _ in range(300):
        current = np.conj(power / (there[:3] - there[3]))
        there = source - z @ np.array([*current, -current.sum()])
    z1 = sequence_of(four, 50.0, volts)[0] * four.length_m / 1e3
    state = outcome.branches.at("O1", 0)
    assert (state.resistance_ohm, state.reactance_ohm) == pytest.approx((z1.real, z1.imag), rel=1e-9)
    node = outcome.wires.nodes.at("J1", 0)
    assert [node.a_v, node.b_v, node.c_v] == pytest.approx(abs(there[:3] - there[3]), rel=1e-8)
    if volts == 400.0:
        assert node.neutral_v == pytest.approx(abs(there[3]), rel=1e-6)
    else:
        assert math.isnan(node.neutral_v)
        assert there[3] == 0
