"""The case list says what single elements are in single cases, and their formulas read it there."""

from sheet_layouts import NIGHT, PEAK, each_for_itself, pair

from app.model import edits
from app.printed import printed
from app.sheet.tables import tables
from app.study import run
from app.study.record import record


def made(drawing):
    return {table.key: table for table in tables(drawing, run(drawing))}


def test_the_list_names_case_element_amount_share_and_power_factor():
    drawing = edits.set_own_text(pair(PEAK, NIGHT), 1, "L2", "5 kVA at 0.98")
    own = made(drawing)["case_own"]
    (row,) = own.rows
    values = [cell.value for cell in row.cells]
    assert values[0] == drawing.cases[1].name
    assert "L2" in values[1]
    assert values[2] == "5 kVA"
    assert values[5] == 0.98
    assert "case_own" not in made(pair(PEAK, NIGHT))


def test_text_and_json_say_it_too():
    drawing = each_for_itself()
    outcome = run(drawing)
    text = printed(drawing, outcome)
    assert "Bank off" in text
    assert "Spare bank 2 kvar (50 %)" in text
    told = record(drawing, outcome, "1")["loading_cases"][1]
    assert told["own"]["K8"] == {"percent": 0}
    assert told["supply_percent"] == 109
