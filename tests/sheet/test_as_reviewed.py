"""What a reviewer of a whole sheet asks for, on the samples."""

import csv
import math
from pathlib import Path

import openpyxl
import pytest

from app.model import edits
from app.model.drawing import Drawing
from app.model.file import load
from app.printed import printed
from app.sheet import write
from app.sheet.gather import gathered
from app.sheet.measure import fits
from app.sheet.table import Origin
from app.sheet.tables import tables
from app.study import run

SAMPLES = Path(__file__).parents[2] / "samples"
Rows = dict[str, dict[str, str]]


def place(name: str) -> Drawing:
    return load(SAMPLES / f"{name}.farend")


def files(drawing: Drawing, folder: Path) -> dict[str, Rows]:
    """Every text file of a sheet: its rows by their first cell."""
    found = {}
    for path in write(drawing, run(drawing), folder / "s.csv")[:-1]:
        with path.open(encoding="utf-8-sig", newline="") as lines:
            found[path.stem.removeprefix("s-")] = {next(iter(r.values())): r for r in csv.DictReader(lines)}
    return found


def test_a_tap_is_told_from_the_side_that_the_supply_holds_though_power_runs_back(tmp_path: Path) -> None:
    ring = place("kettlewick_ring")
    outcome = run(ring)
    assert [outcome.fed_winding("T2", case) for case in (0, 1)] == [1, 2]
    assert [outcome.supply_winding("T2", case) for case in (0, 1)] == [1, 1]
    said = files(ring, tmp_path)["settings"]["T2"]["Tap to set"]
    assert said == "tap +2.5 %: 11275/400, lowers winding 2"


def test_each_supply_tells_the_range_it_is_held_in_its_fault_levels_and_who_said_so(tmp_path: Path) -> None:
    row = files(place("kettlewick_ring"), tmp_path)["intake"]["S1"]
    assert (row["Held, lowest [% of Un]"], row["Held, highest [% of Un]"]) == ("97.0", "105.0")
    assert row["Fault level, highest [MVA]"] == row["Fault level, least [MVA]"] == "150.0"
    assert float(row["so [kA]"]) == pytest.approx(150 / (3**0.5 * 11), rel=1e-12)
    assert (row["Z0/Z1"], row["Stated by"]) == ("unearthed", "nobody named: ask for it in writing")
    ashgill = place("ashgill_regulator")
    said = edits.change(ashgill, "S1", note="Letter of the utility, 4 May")
    row = files(said, tmp_path)["intake"]["S1"]
    assert (row["Fault level, highest [MVA]"], row["Stated by"]) == (
        "not stated",
        "Letter of the utility, 4 May",
    )


def test_a_regulator_has_its_loading_judged_and_its_setting_to_set(tmp_path: Path) -> None:
    drawing = place("ashgill_regulator")
    told, outcome = files(drawing, tmp_path), run(drawing)
    row = told["regulators"]["V1"]
    most = max(outcome.branches.at("V1", case).loaded_percent for case in (0, 1))
    assert (
        float(row["Loading, most [%]"])
        == pytest.approx(most)
        == pytest.approx(100 - float(row["Margin [%]"]))
    )
    assert row["Verdict"] == "holds"
    assert told["settings"]["Regulator (V1)"]["Tap to set"] == (
        "holds Lane at 99 % of nominal in a band of 1.667 % (assumed), line drop R 2.5 Ω, X 1.35 Ω"
    )
    overloaded = edits.change(drawing, "V1", rating_a=90.0)
    assert files(overloaded, tmp_path)["regulators"]["V1"]["Verdict"] == "FAIL"


def test_the_site_list_tells_what_each_figure_stands_on_and_leaves_room(tmp_path: Path) -> None:
    told = files(place("loonmarrow_camp"), tmp_path)["site"]
    assert told["Lateral J (C4)"]["As counted here"] == "109.7 m, 2/0 AWG Al, on AN, Iz 135 A"
    assert told["T1"]["As counted here"] == "75 kVA, 12470/208 V, Dyn1, uk 3 %, tap at 12470 V"
    assert {row["Found on site"] for row in told.values()} == {""}
    quarry = place("hobscar_cured")
    counted = {w.split(" (")[0]: r["As counted here"] for w, r in files(quarry, tmp_path)["site"].items()}
    assert "soft starter, 3 × rated current at start" in counted["Crusher motor"]


def test_what_a_transformer_gives_out_without_load_stands_beside_what_it_gives(tmp_path: Path) -> None:
    drawing = place("brindlewick_cured")
    row = files(drawing, tmp_path)["transformers-results"]["T1"]  # the last of its cases: winter
    idle, out = (float(row[f"U given out{end} [V]"]) for end in (", no load", ""))
    assert idle == pytest.approx(11000 * 0.97 * 433 / 11550, rel=1e-12)
    state = run(drawing).branches.at("T1", 1)
    share, cosine = state.end_kw / 100, state.end_kw / math.hypot(state.end_kw, state.end_kvar)
    load, sine = state.end_a / (100e3 / math.sqrt(3) / 433), math.sqrt(1 - cosine**2)
    ur, ux = 1.25, math.sqrt(4**2 - 1.25**2)  # Kapp, as in IEC 60076-8 (from memory)
    kapp = load * (ur * cosine + ux * sine) + (load * (ux * cosine - ur * sine)) ** 2 / 200
    assert share > 0.7
    assert (idle - out) / 433 * 100 == pytest.approx(kapp, abs=0.01)


def test_a_share_is_not_assumed_where_none_is_left_and_a_bank_at_its_level_is(tmp_path: Path) -> None:
    drawing = place("kettlewick_ring")
    assert not [a for a in run(drawing).assumptions if a.field == "constant_impedance_percent"]
    drawn = tables(drawing, run(drawing))
    bank = next(t for t in drawn if t.key == "supplies").at("K1", "rest")
    assert (bank.value, bank.origin) == ("at nominal voltage, assumed", Origin.ASSUMED)


def test_the_basis_tells_what_the_drawing_has_and_how_voltage_factors_were_chosen() -> None:
    rules = {name: rows_of(place(name), "rules") for name in ("loonmarrow_camp", "hobscar_quarry")}
    assert "Motor" in rules["hobscar_quarry"]
    assert (
        not {"Motor", "Tap changer, regulator", "Generator that holds volts"}
        & rules["loonmarrow_camp"].keys()
    )
    factors = rules["loonmarrow_camp"]["Voltage factors"]
    assert "1.10 where the highest voltage allowed is above 108 %" in factors
    assert "50" not in rules["loonmarrow_camp"]["Peak of a fault"]  # a camp at 60 Hz


def rows_of(drawing: Drawing, key: str) -> dict[str, str]:
    made = next(t for t in tables(drawing, run(drawing)) if t.key == key)
    return {str(row.cells[0].value): str(row.cells[1].value) for row in made.rows}


def test_the_basis_of_every_sample_fits_one_page() -> None:
    for path in SAMPLES.glob("*.farend"):
        drawing = load(path)
        basis = [t for t in gathered(tables(drawing, run(drawing))) if t.tab == "Basis"]
        assert fits(basis), path.name


def test_the_value_of_a_note_stands_beside_its_words() -> None:
    drawing = place("hobscar_cured")
    outcome = run(drawing)
    made = next(t for t in tables(drawing, outcome) if t.key == "findings")
    row = next(str(n) for n, f in enumerate(outcome.findings) if f.check == "start torque")
    assert made.at(row, "value").value == pytest.approx(outcome.starts.at("M1", 0).torque_percent)
    assert made.at(row, "limit").value is None


def test_how_long_a_cable_bears_the_highest_fault(tmp_path: Path) -> None:
    """k·S = 94·240 A·√s (Al, XLPE) against the earth fault at Board A, which is above the three-phase one."""
    told, at = files(place("kettlewick_ring"), tmp_path)["withstand"], run(place("kettlewick_ring")).faults
    row = told["C2"]
    most = max(at.at("B3").ik2e_max_ka, at.at("B3").ik1_max_ka, at.at("B3").ik3_max_ka)
    assert float(row["Ik max at its ends [kA]"]) == most > at.at("B3").ik3_max_ka
    assert float(row["Bears that for [s]"]) == pytest.approx((94 * 240 / (most * 1e3)) ** 2, rel=1e-12)
    plastic = edits.change(place("kettlewick_ring"), "C2", fault_degc=70.0)
    assert float(files(plastic, tmp_path)["withstand"]["C2"]["k [A·√s/mm²]"]) == 76
    copper = files(place("hobscar_quarry"), tmp_path)["withstand"]["C1"]
    assert (copper["k [A·√s/mm²]"], copper["Bears for 1 s [kA]"]) == ("143.0", "26.455")


def test_the_fault_level_of_two_wires_is_no_three_phase_one(tmp_path: Path) -> None:
    two = edits.change(place("saltmere_two_wire"), "S1", fault_level_max_mva=0.46)
    row = files(two, tmp_path)["intake"]["S1"]
    volts = two.elements["S1"].nominal_v
    assert float(row["so [kA]"]) == pytest.approx(0.46e3 / volts, rel=1e-12)
    current = run(two).faults.at(two.elements["S1"].node)
    assert current.ik2_max_ka == pytest.approx(0.46e3 / volts, rel=1e-9)


def test_a_board_that_fails_hears_of_an_earth_fault_that_is_greater_still() -> None:
    outcome = run(place("kettlewick_ring"))
    board = next(f for f in outcome.findings if f.check == "fault rating")
    assert (board.ids, board.verdict.value) == (("B3",), "fails")
    assert "A fault to earth drives more, up to 20.12 kA" in board.sentence


def test_what_is_assumed_is_told_with_its_unit_and_no_gap_where_it_has_none() -> None:
    drawing = place("fernhollow_pair")
    told = printed(drawing, run(drawing)).split("Assumed, to be confirmed\n")[1].split("\n\n")[0]
    assert "T1 step-up (T1): Z0/Z1 1 (usual of a three-limb core" in told
    assert "least fault level 8.314 MVA (as the highest" in told
    assert not [line for line in told.split("\n") if "  " in line.strip()]


def test_a_year_tells_high_volts_in_kilovolts(tmp_path: Path) -> None:
    write(place("fernhollow_year"), run(place("fernhollow_year")), tmp_path / "year.xlsx")
    cells = [c for sheet in openpyxl.load_workbook(tmp_path / "year.xlsx") for row in sheet for c in row]
    lowest = [c for c in cells if isinstance(c.value, float) and 10_850 < c.value < 10_900]
    assert lowest
    assert all("k" in c.number_format for c in lowest)
