"""The year on the sheet: only where something follows a profile, live to the last sum, in hours and kWh."""

from pathlib import Path

import openpyxl
import pytest
from msgspec.structs import replace
from spreadsheet import differences, needs_spreadsheet, recalculated

from app.model import edits
from app.model.drawing import Drawing
from app.model.kinds import (
    Busbar,
    Cable,
    Capacitor,
    Generator,
    Joint,
    Load,
    Motor,
    Supply,
    Switch,
    Transformer,
)
from app.model.profiles import Profile
from app.model.shapes import shape
from app.sheet import write
from app.sheet.tables import tables
from app.study import run
from app.study.year import run_year


def works(**more) -> Drawing:
    elements = {
        "B1": Busbar(name="Intake"), "S1": Supply(node="B1", nominal_v=11000.0),
        "T1": Transformer(start="B1", end="B2", rating_kva=100.0), "B2": Busbar(name="=Board"),
        "C1": Cable(start="B2", end="B3", length_m=300.0, rating_a=60.0), "B3": Joint(),
        "C2": Cable(start="B2", end="B4"), "B4": Joint(), "W1": Switch(start="B3", end="B4", closed=False),
        "L1": Load(node="B3", demand_kva=60.0), "M1": Motor(node="B2"), "K1": Capacitor(node="B2"),
        "G1": Generator(node="B4", output_kw=40.0), "J9": Joint(),
    }  # fmt: skip
    drawing = edits.put_profile(Drawing(elements={**elements, **more}), "shop", shape("workshop"))
    drawing = edits.put_profile(drawing, "sun", shape("daylight"))
    return edits.set_year(
        drawing, load_profile="shop", generation_profile="sun", price_per_kwh=0.31, money="EUR"
    )


def found(drawing: Drawing) -> dict:
    return {t.key: t for t in tables(drawing, run(drawing)) if t.tab.startswith("Year")}


def test_there_is_no_year_where_nothing_follows_a_profile():
    plain = works()
    assert found(replace(plain, year=replace(plain.year, load_profile="", generation_profile=""))) == {}
    assert list(found(plain)) == ["year", "year_basis", "year_branches", "year_nodes", "year_attachments"]


def test_it_says_what_the_study_says():
    drawing = works()
    sheet, year = found(drawing), run_year(drawing)
    items = {row: sheet["year"].at(row, "value").value for row in ("supply", "loss", "cost", "loss_factor")}
    b = year.balance
    assert items == {"supply": b.supply_kwh, "loss": b.loss_kwh, "cost": b.cost, "loss_factor": b.loss_factor}
    assert sheet["year_branches"].at("C1", "verdict").value == "FAIL"
    assert sheet["year_branches"].at("C1", "over").value == year.branches.at("C1").hours_over > 0
    assert sheet["year_branches"].at("W1", "verdict").value == "dead"
    assert sheet["year_branches"].at("C2", "verdict").value == "not judged"
    said = [row.cells[0].value for row in sheet["year_basis"].rows]
    assert said[0] == year.sentence
    assert any("invented, no source" in words for words in said)
    assert any("overloaded for" in words for words in said)


def test_a_year_that_cannot_be_solved_says_why_in_one_table():
    bad = works(S2=Supply(node="B1", nominal_v=11000.0))
    sheet = found(bad)
    assert list(sheet) == ["year_basis"]
    assert "S2" in sheet["year_basis"].rows[0].cells[0].value


def test_hours_without_an_answer_stand_in_the_basis():
    drawing = works(L1=Load(node="B3", demand_kva=60.0))
    drawing = edits.put_profile(drawing, "shop", Profile(percent=(50.0,) * 23 + (1000.0,)))
    said = [row.cells[0].value for row in found(drawing)["year_basis"].rows]
    assert any("365 h of the year have no answer" in words for words in said)


@needs_spreadsheet
def test_every_formula_yields_the_solved_figure(tmp_path: Path):
    book = tmp_path / "year.xlsx"
    write(works(), run(works()), book)
    again = recalculated([book], tmp_path)["year.xlsx"]
    count, wrong = differences(book, again)
    assert wrong == []
    tabs = [sheet for sheet in openpyxl.load_workbook(book) if sheet.title.startswith("Year")]
    formulas = [c for tab in tabs for row in tab.iter_rows() for c in row if c.data_type == "f"]
    assert len(formulas) == 44
    values = openpyxl.load_workbook(again, data_only=True)["Year"]
    left = next(row for row in values.iter_rows() if row[0].value == "Left over")[1].value
    assert left == pytest.approx(0, abs=1e-5)


def test_each_table_of_the_year_is_a_text_file(tmp_path: Path):
    drawing = works()
    names = {p.name for p in write(drawing, run(drawing), tmp_path / "x.csv")}
    assert {f"x-year{part}.csv" for part in ("", "-basis", "-branches", "-nodes", "-attachments")} <= names
    write(Drawing(), run(Drawing()), tmp_path / "x.csv")
    assert not list(tmp_path.glob("x-year*"))
