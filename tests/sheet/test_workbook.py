"""The workbook read back with openpyxl: figures, formulas, marks, print setup, text that stays text."""

from collections.abc import Callable
from typing import Any

import msgspec
import pytest
from sheet_layouts import HOSTILE, NIGHT, PEAK, blocked, overloaded, pair, three_cables, two_wire

from app.model import edits
from app.model.drawing import Drawing, Limits, Project
from app.model.kinds import Busbar, Load, Supply, Transformer
from app.study import run
from app.study.outcome import Verdict

Reader = Callable[..., Any]


def cell(sheet: Any, row: str, head: str, table: int = 0) -> Any:
    """The cell of the row that begins with `row`, under a head (its lines joined by a blank)."""
    heads = [r for r in sheet.iter_rows() if head in [str(c.value).replace("\n", " ") for c in r]]
    top = heads[table]
    column = next(c.column for c in top if str(c.value).replace("\n", " ") == head)
    for found in sheet.iter_rows(min_row=top[0].row + 1):
        if found[0].value == row:
            return sheet.cell(found[0].row, column)
    raise LookupError(row)


def words(book: Any) -> list[str]:
    return [str(c.value) for s in book for r in s.iter_rows() for c in r if c.value is not None]


def test_sections_stand_in_the_order_of_reading(workbook: Reader) -> None:
    assert workbook(pair()).sheetnames == [
        "Head", "Basis", "Cases and assumed values", "Busbars", "Cables", "Transformers",
        "Loads and supplies", "Motors", "Switches", "Balance", "Findings", "Build list", "Site",
    ]  # fmt: skip


def test_figures_are_the_outcome_unrounded(workbook: Reader) -> None:
    """To the sixteen figures that a workbook holds."""
    drawing = pair()
    outcome, book = run(drawing), workbook(drawing)
    node, line, unit = outcome.nodes.at("B2"), outcome.branches.at("C2"), outcome.branches.at("T2")
    case = "Full load, low intake"
    for tab, row, head, figure in (
        ("Busbars", "B2", "U V", node.voltage_v),
        ("Busbars", "B2", "U % of Un", node.percent),
        ("Cables", "C2", "Loss W", line.loss_kw * 1e3),
        ("Cables", "C2", "Loading %", line.loaded_percent),
        ("Transformers", "T2", "Copper W", unit.copper_kw * 1e3),
        ("Balance", case, "Supplies kW", float(outcome.balance.supply_kw[0])),
        ("Loads and supplies", "L2", "P kW", outcome.attachments.at("L2").kw),
    ):
        assert cell(book[tab], row, head).value == pytest.approx(figure, rel=1e-15)
    assert cell(book["Cables"], "C2", "ΔU %").value == pytest.approx(line.drop_percent, rel=1e-9)


def test_lines_a_reviewer_would_redo_are_formulas(workbook: Reader) -> None:
    book = workbook(pair(), figures=False)
    assert cell(book["Cables"], "C2", "Loss W").value.startswith("=3*")
    assert cell(book["Cables"], "C2", "Loading %").value.count("/") == 1
    assert "SQRT(3)" in cell(book["Transformers"], "T1", "S fed in kVA").value
    assert cell(book["Busbars"], "B2", "Margin % of Un").value.startswith("=MIN(")
    assert cell(book["Busbars"], "B2", "Verdict").value.startswith("=IF(MIN(")
    assert cell(book["Balance"], "Full load, low intake", "Loads kW").value.startswith(
        "=SUM('Loads and supplies'!"
    )
    assert workbook(two_wire(), figures=False)["Cables"] is not None
    assert not cell(workbook(two_wire(), figures=False)["Cables"], "C1", "Loss W").value.startswith("=3*")


def test_a_fail_never_prints_as_a_pass(workbook: Reader) -> None:
    """HS is at 216.185 V against 216.2 V: one digit would print both as 216.2."""
    book = workbook(three_cables())
    phase = cell(book["Busbars"], "B3", "U phase V")
    assert 216.15 < phase.value < 216.2
    assert phase.number_format == "#,##0.00"
    assert cell(book["Busbars"], "B1", "U phase V").number_format == "#,##0.0"
    margin = cell(book["Busbars"], "B3", "Margin % of Un")
    assert -0.01 < margin.value < 0
    assert round(margin.value, margin.number_format.count("0") - 2) != 0
    assert cell(book["Busbars"], "B3", "Verdict").value == "FAIL"


@pytest.mark.parametrize(("beyond", "verdict"), [(1e-12, "holds"), (1e-6, "FAIL")])
def test_a_trace_of_the_arithmetic_is_no_fail(workbook: Reader, beyond: float, verdict: str) -> None:
    base = three_cables()
    lowest = run(base).nodes.at("B3").percent
    drawing = msgspec.structs.replace(base, limits=Limits(low_percent=lowest + beyond))
    assert cell(workbook(drawing)["Busbars"], "B3", "Verdict").value == verdict
    assert "<=-1E-09" in cell(workbook(drawing, figures=False)["Busbars"], "B3", "Verdict").value


def test_rounding_is_by_number_format(workbook: Reader) -> None:
    book = workbook(pair())
    assert cell(book["Busbars"], "J1", "U V").number_format == '#,##0.00,\\ "kV"'
    assert cell(book["Cables"], "C2", "ΔU %").number_format == "#,##0.00"
    assert cell(book["Transformers"], "T1", "I, winding 1 A").number_format == "#,##0"
    assert cell(book["Transformers"], "T1", "I, winding 2 A").number_format == "#,##0.0"
    assert cell(book["Balance"], "Full load, low intake", "Closure of supply").number_format == "0.0E+00"


def test_several_cases_name_the_worst(workbook: Reader) -> None:
    drawing = pair(PEAK, NIGHT)
    book, outcome = workbook(drawing), run(drawing)
    volts = [outcome.nodes.at("B2", c).voltage_v for c in (0, 1)]
    assert cell(book["Busbars"], "B2", "U lowest V").value == min(volts)
    assert cell(book["Busbars"], "B2", "U highest V").value == max(volts)
    row = cell(book["Busbars"], "B2", "U highest V").row
    assert NIGHT.name in [c.value for c in book["Busbars"][row]]
    every = book["Transformers"]
    assert [r[3].value for r in every.iter_rows() if r[0].value == "T2" and isinstance(r[2].value, int)] == [
        PEAK.name,
        NIGHT.name,
    ]
    assert cell(book["Balance"], NIGHT.name, "Loss, all kW").value == outcome.balance.loss_kw[1]


def test_taps_are_told_in_position_percent_and_ratio(workbook: Reader) -> None:
    book = workbook(pair())
    assert cell(book["Transformers"], "T1", "Tap notch").value == 1
    assert cell(book["Transformers"], "T1", "Tap %").value == 2.5
    told = cell(book["Transformers"], "T2", "Ratio as tapped").value
    assert told == "tap −2.5 %: 400/10725, raises winding 1"
    assert cell(book["Build list"], "Step down (T2)", "Nameplate volts V").value == 10725
    assert cell(book["Build list"], "Step down (T2)", "Position from the top").value == 4
    order = cell(book["Build list"], "Step up (T1)", "Order text").value
    assert order.startswith("160 kVA, 400/11000 V no-load, Dyn11, 50 Hz, uk 4 %, Pk 1750 W, P0 189 W")


def test_the_cable_list_counts_every_run(workbook: Reader) -> None:
    book = workbook(pair())
    assert cell(book["Build list"], "4×95 Al, cable", "Length to lay, all runs m").value == 640
    assert cell(book["Build list"], "3×35 Al 11 kV, cable", "Routes").value == 1
    assert "Barn (B3) and Spare (B4): keep open" in words(book)


def test_assumed_values_say_so(workbook: Reader) -> None:
    book = workbook(pair())
    said = words(book)
    assert "Assumed values, to be confirmed" in said
    assumed = cell(book["Cables"], "C2", "Conductor at °C")
    stated = cell(book["Cables"], "C1", "Conductor at °C")
    assert assumed.font.i
    assert not stated.font.i
    assert assumed.fill.fgColor.rgb != stated.fill.fgColor.rgb
    assert any("i0 0.8 % (assumed)" in w for w in said)


def test_dead_parts_have_no_figures(workbook: Reader) -> None:
    sheet = workbook(pair())["Busbars"]
    assert cell(sheet, "B4", "Verdict").value == "dead"
    assert cell(sheet, "B4", "U V").value is None
    assert cell(sheet, "B4", "Margin V").value is None
    assert cell(workbook(pair())["Loads and supplies"], "L3", "P kW").value is None


@pytest.mark.parametrize("drawing", [blocked(), overloaded()], ids=["closed loop", "overloaded"])
def test_what_is_not_solved_shows_no_figures(workbook: Reader, drawing: Drawing) -> None:
    book, outcome = workbook(drawing), run(drawing)
    result = next(r[1].value for r in book["Head"].iter_rows() if r[0].value == "Result")
    assert result.startswith(f"NOT SOLVED. {outcome.sentence}")
    assert book["Findings"]["A2"].value.startswith("NOT SOLVED")
    assert cell(book["Busbars"], "B2", "Verdict").value == "not solved"
    for tab, heads in {
        "Busbars": ("U V", "U % of Un", "Margin V"),
        "Cables": ("I A", "Loss W", "ΔU V"),
        "Loads and supplies": ("P kW", "I A", "S kVA"),
    }.items():
        rows = {r[0].value for r in book[tab].iter_rows()} & set(drawing.elements)
        assert rows
        assert all(cell(book[tab], row, head).value is None for row in rows for head in heads)
    assert [c.value for c in book["Balance"][4]][1:] == [None] * 12
    if outcome.to_blame:
        assert "The largest share of the load that still solves is" in result


NAMES = [
    HOSTILE, "+1", "-2", "@SUM(A1)", "\t=1", "'quoted", "{=1}", "http://example.invalid", "Größe Ω 变压器 🐑",
    "a\x01b\x1fc\x7f", "line\nbreak", "_x0041_", "x" * 80, "1e5", "007", "&P of &N",
    "tag <b> & \"q\"", "\ud800",
]  # fmt: skip


@pytest.mark.parametrize("name", NAMES, ids=ascii)
def test_text_stays_text(workbook: Reader, name: str) -> None:
    elements = {"B1": Busbar(name=name), "S1": Supply(node="B1", name=name), "L1": Load(node="B1", note=name)}
    project = Project(title=name, author=name, revision=name[:20], note=name)
    drawing = Drawing(project=project, elements=elements)
    plain = workbook(
        msgspec.structs.replace(drawing, project=Project(), elements=unnamed(elements)), figures=False
    )
    formulas = sum(c.data_type == "f" for s in plain for r in s.iter_rows() for c in r)
    book = workbook(drawing, figures=False)
    found = next(r[1] for r in book["Busbars"].iter_rows() if r[0].value == "B1")
    assert found.data_type == "s"
    assert found.hyperlink is None
    assert sum(c.data_type == "f" for s in book for r in s.iter_rows() for c in r) == formulas
    clean = not any(ord(c) < 32 or ord(c) == 127 or 0xD800 <= ord(c) < 0xE000 for c in name.replace("\n", ""))
    if clean:
        assert found.value == name
    else:
        assert "\x01" not in found.value


def unnamed(elements: dict[str, Any]) -> dict[str, Any]:
    return {i: msgspec.structs.replace(e, name="", note="") for i, e in elements.items()}


def test_the_workbook_says_whose_it_is(workbook: Reader) -> None:
    book = workbook(pair())
    assert book.properties.title == "Fernhollow & Sons"
    assert book.properties.creator == "A. Planner"
    said = words(book)
    assert any(w.startswith("Farend ") for w in said)
    assert "Results are a design aid. Local codes and a licensed practitioner decide." in said
    assert any("IEC 60076-1:2011" in w for w in said)
    assert "Ask the estate office." in said


def test_an_empty_drawing_still_has_a_sheet(workbook: Reader) -> None:
    book = workbook(Drawing())
    assert "NOT SOLVED" in " ".join(words(book))
    assert "Busbars" not in book.sheetnames


def test_no_cell_is_an_error(workbook: Reader) -> None:
    for drawing in (pair(), pair(PEAK, NIGHT), two_wire(), blocked()):
        assert not [w for w in words(workbook(drawing)) if w.startswith("#") or w == "nan"]


def test_a_figure_of_the_shelf_is_marked_where_it_stands(workbook: Reader) -> None:
    book = workbook(edits.change(pair(), "C1", assumed=("length_m",)))
    assert cell(book["Cables"], "C1", "Length m").font.i
    assert not cell(book["Cables"], "C2", "Length m").font.i
    assert "as the shelf gives it" in words(book)


def test_an_exceeded_advice_stands_in_head_table_and_findings(workbook: Reader) -> None:
    base = edits.change(two_units(), "S1", held_percent=108.0)
    outcome, book = run(base), workbook(base)
    assert {f.check for f in outcome.findings if f.verdict is Verdict.ADVICE} == {"over-excitation"}
    assert all(f.verdict is not Verdict.FAILS for f in outcome.findings)
    assert any(w.startswith("Solved. Every check holds, 1 advice exceeded") for w in words(book))
    assert "advice exceeded" in cell(book["Transformers"], "T1", "Verdict").value
    finding = next(r for r in book["Findings"].iter_rows() if r[0].value == "advice exceeded")
    source, sentence = finding[-2].value, finding[-1].value
    assert source.endswith("from memory")
    assert "from memory" not in sentence


def two_units() -> Drawing:
    """One transformer that is driven hard, within every limit."""
    elements = {
        "B1": Busbar(), "S1": Supply(node="B1", nominal_v=11000.0), "B2": Busbar(x=8),
        "T1": Transformer(start="B1", end="B2"), "L1": Load(node="B2", demand_kva=40.0),
    }  # fmt: skip
    return Drawing(elements=elements, limits=Limits(high_percent=115.0))
