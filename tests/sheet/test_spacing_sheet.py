"""Lines by their spacing on the sheet: the reactance follows live from distances and GMR, and is said to."""

import math
from pathlib import Path

import openpyxl
import pytest
from spreadsheet import differences, needs_spreadsheet, recalculated

from app.model.drawing import Drawing
from app.model.kinds import Busbar, Joint, Load, OverheadLine, Supply
from app.sheet import write
from app.sheet.tables import tables
from app.study import run

HUNG = {"resistance_ohm_per_km": 0.5946, "diameter_mm": 9.6, "gmr_mm": 2.4, "length_m": 2400.0}
PAIRS = ("AA", "AB", "AC", "BB", "BC", "CC")
FLAT = "-1.1 9; 0 9; 1.1 9"


def drawn(wires: str = "three-phase", volts: float = 11000.0, **lines: OverheadLine) -> Drawing:
    """A supply and one node behind every line; O1 ends at J1."""
    elements = {"S1": Supply(node="B1", nominal_v=volts, wires=wires), "B1": Busbar(), **lines}
    for id in lines:
        elements["J" + id[1:]] = Joint()
        elements["L" + id[1:]] = Load(node="J" + id[1:], demand_kva=volts / 300)
    return Drawing(elements=elements)


def spaced(number: int, hung: str, **fields) -> OverheadLine:
    return OverheadLine(start="B1", end=f"J{number}", hung_at_m=hung, **{**HUNG, **fields})


def three() -> Drawing:
    return drawn(
        O1=spaced(1, FLAT),
        O2=spaced(2, FLAT + "; 0 7.5", side_by_side=2, temperature_degc=65.0, soil_ohm_m=300.0),
        O3=OverheadLine(start="B1", end="J3", length_m=100.0),
    )


def two() -> Drawing:
    return drawn(
        "two-wire",
        7200.0,
        O1=spaced(1, "0 9; 0 7.5"),
        O2=spaced(2, "0 9"),
        O3=spaced(3, "0 9; 0 7.5", neutral="earthed along", neutral_gmr_mm=1.4),
    )


def test_each_line_says_how_its_figures_came_about():
    found = {t.key: t for t in tables(three(), run(three()))}
    assert found["cables"].at("O1", "basis").value == "from spacing, Carson 1926, modified"
    assert found["cables"].at("O3", "basis").value == "as stated"
    assert "reactance" not in found["spacing"].at("O1", "hung").value
    closed = 2 * math.pi * 50 * 2e-4 * math.log((1.1 * 1.1 * 2.2) ** (1 / 3) / 2.4e-3)
    assert found["spacing"].at("O1", "x1").value == pytest.approx(closed, rel=1e-9)
    assert found["cables"].at("O1", "x").value == pytest.approx(closed, rel=1e-9)
    assert found["cables"].at("O1", "xt").value == pytest.approx(closed * 2.4, rel=1e-9)
    assert found["spacing"].at("O1", "share_r").value == pytest.approx(0, abs=1e-12)


def test_a_sheet_without_spacing_has_neither_table_nor_column():
    plain = drawn(O1=OverheadLine(start="B1", end="J1", length_m=100.0))
    found = {t.key: t for t in tables(plain, run(plain))}
    assert "spacing" not in found
    assert "basis" not in [c.key for c in found["cables"].columns]


def test_pairs_of_conductors_are_those_of_the_matrix():
    found = {t.key: t for t in tables(three(), run(three()))}["spacing_pairs"]
    assert [r.key for r in found.rows if r.key.startswith("O1")] == [f"O1 {p}" for p in PAIRS]
    assert found.at("O1 AB", "r").value == pytest.approx(0.0493, abs=5e-5)  # Carson at 50 Hz
    assert found.at("O1 AB", "used_x").value == pytest.approx(found.at("O1 AB", "x").value)
    assert found.at("O2 AA", "used_x").value < found.at("O2 AA", "x").value  # the neutral is earthed along
    assert found.at("O2 NN", "used_r").value is None


@needs_spreadsheet
def test_every_formula_yields_the_solved_figure(tmp_path: Path):
    for name, drawing in (("three", three()), ("two", two())):
        write(drawing, run(drawing), tmp_path / f"{name}.xlsx")
    for path, fresh in recalculated(sorted(tmp_path.glob("*.xlsx")), tmp_path).items():
        count, found = differences(tmp_path / path, fresh)
        assert found == []
        assert count > 80


@pytest.mark.parametrize("made", [three, two])
def test_the_formula_of_x_reads_cells_alone(tmp_path: Path, made):
    """Worked out again here from the cells that the formula names, as a reviewer would."""
    write(made(), run(made()), tmp_path / "book.xlsx")
    sheet = openpyxl.load_workbook(tmp_path / "book.xlsx")["Spacing"]
    shown = openpyxl.load_workbook(tmp_path / "book.xlsx", data_only=True)["Spacing"]
    head = next(r for r in sheet.iter_rows() if r[0].value == "Id")
    at = {str(c.value).split("\n")[0].split(" [")[0]: c.column for c in head}
    ends = next(r[0].row for r in sheet.iter_rows() if r[0].value == "Impedances between conductors")
    rows = [r[0].row for r in sheet.iter_rows(max_row=ends) if str(r[0].value) in ("O1", "O2", "O3")]
    assert len(rows) in (2, 3)
    for row in rows:
        formula = sheet.cell(row, at["X1, or loop"]).value
        assert formula.startswith("=2*PI()*")
        value = {k: shown.cell(row, column).value for k, column in at.items()}
        logs = math.log(value["Mean distance or depth"] * 1000 / value["GMR"])
        if value["GMR, wire back"]:
            logs += math.log(value["Mean distance or depth"] * 1000 / value["GMR, wire back"])
        x = 2 * math.pi * value["f"] * 2e-4 * logs + value["X, way back"]
        assert value["X1, or loop"] == pytest.approx(x, rel=1e-9)
        r = value["R hot"] + value["R, way back"]
        assert value["R1, or loop"] == pytest.approx(r, rel=1e-9)
