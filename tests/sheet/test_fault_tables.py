"""The fault tables: formulas a reviewer can redo, verdicts, what was not judged, basis and caution."""

import csv
from pathlib import Path

import openpyxl
import pytest
from sheet_layouts import faulty, pair

from app.model import edits
from app.printed import printed
from app.sheet import write
from app.sheet.table import SheetTable
from app.sheet.tables import tables
from app.study import run
from app.study.outcome import Verdict


def made(drawing) -> dict[str, SheetTable]:
    return {t.key: t for t in tables(drawing, run(drawing))}


def test_boards_and_devices_are_judged_as_the_findings_judge_them():
    drawing = faulty()
    outcome, found = run(drawing), made(drawing)
    verdicts = {r.key: found["faults"].at(r.key, "verdict").value for r in found["faults"].rows}
    assert verdicts == {
        "B1": "no rating", "B2": "near, to earth", "B3": "holds", "B4": "FAIL", "B5": "no rating",
        "B6": "not worked out", "B9": "not worked out", "B7": "holds", "B8": "no rating",
    }  # fmt: skip
    failing = {f.ids[0] for f in outcome.findings if f.check == "fault rating" and f.verdict is Verdict.FAILS}
    assert failing == {"B4"}
    told = {r.key: found["devices"].at(r.key, "verdict").value for r in found["devices"].rows}
    assert (told["C1"], told["C2"]) == ("FAIL", "holds")
    assert told["C3"].startswith("not judged: it stands in a closed ring")
    assert told["C6"] == "not judged: nothing feeds it"
    failing = {f.ids[1] for f in outcome.findings if f.check == "earth fault" and f.verdict is Verdict.FAILS}
    assert failing == {"C1"}


def test_what_a_reviewer_would_redo_is_a_formula_and_the_rest_is_solved():
    found = made(faulty())
    row = {c.key: found["faults"].at("B2", c.key) for c in found["faults"].columns}
    assert row["ik3"].formula == "{c}*{un}/SQRT(3)/SQRT({r}^2+{x}^2)/1000"
    assert row["ik2"].formula == "SQRT(3)/2*{ik3}"
    assert row["kappa"].formula == "1.02+0.98*EXP(-3*{rx})"
    assert row["ip"].formula == "{kappa}*SQRT(2)*{ik3}"
    assert row["margin"].value == pytest.approx(18.0 - row["ik3"].value)
    assert not row["ik1"].formula
    assert found["circuit_ends"].at("B3", "ik1").formula.startswith("{c}*{un}/SQRT(3)/{zs}")
    hut = {c.key: found["faults"].at("B7", c.key) for c in found["faults"].columns}
    assert hut["ik3"].value is None
    assert hut["ik2"].formula == "{c}*{un}/SQRT({r}^2+{x}^2)/1000"
    assert not hut["kappa"].formula  # no reactance at all: 1.02
    assert hut["kappa"].value == pytest.approx(1.02)


def test_a_board_that_misses_by_a_trifle_prints_so(tmp_path: Path):
    drawing = faulty()
    current = run(drawing).faults.at("B2").ik3_max_ka
    drawing = edits.change(drawing, "B2", withstand_ka=round(current, 2) - 1e-4)
    cell = made(drawing)["faults"].at("B2", "ik3")
    limit = made(drawing)["faults"].at("B2", "rating").value
    assert round(cell.value, cell.digits) != round(limit, cell.digits)


def test_basis_assumptions_and_caution_stand_on_workbook_text_and_files(tmp_path: Path):
    drawing = faulty()
    outcome = run(drawing)
    write(drawing, outcome, tmp_path / "f.xlsx")
    book = openpyxl.load_workbook(tmp_path / "f.xlsx", data_only=True)
    words = [str(c.value) for tab in book for r in tab.iter_rows() for c in r if c.value is not None]
    assert any("Equivalent voltage source" in w for w in words)
    assert any("4·R1, a return conductor as large as a phase" in w for w in words)
    for title in ("Highest fault currents and boards", "Least fault currents", "Devices and earth faults"):
        assert any(w.startswith(title) for w in words)
    assert sum("do not replace a protection study" in w for w in words) == 4
    text = printed(drawing, outcome)
    assert "do not replace a protection study" in text
    assert "C1 trips at 1 250 A: " in text.replace("\u202f", " ")
    assert "R0 at 20 °C" in text
    write(drawing, outcome, tmp_path / "f.csv")
    with (tmp_path / "f-devices.csv").open(encoding="utf-8-sig", newline="") as file:
        rows = list(csv.reader(file))
    least = next(r for r in rows if r[0] == "C1")[rows[0].index("Ik1 min there [A]")]
    assert float(least) == outcome.faults.at("B3").ik1_min_ka * 1e3


def test_without_a_stated_fault_level_the_sheet_has_no_fault_tables():
    drawing = pair()
    assert run(drawing).faults is None
    assert not {"faults", "circuit_ends", "devices"} & set(made(drawing))
    rules = made(drawing)["rules"]
    assert "Peak of a fault" not in {row.key for row in rules.rows}
