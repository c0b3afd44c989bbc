"""A drawing one case of which has no operating point: the sheet prints the others and names that one."""

import csv
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from msgspec.structs import replace
from sheet_layouts import HEAVY, NIGHT, PEAK, pair
from wired_layouts import EVENING, MORNING, camp

from app.model.drawing import Drawing
from app.sheet import write
from app.study import run

Reader = Callable[..., Any]


LAYOUTS = {
    "pair": pair(PEAK, HEAVY, NIGHT),
    "camp": camp(HEAVY, EVENING, MORNING),
}


def rows(sheet: Any) -> list[list[Any]]:
    return [[c.value for c in row] for row in sheet.iter_rows()]


def figures(row: list[Any]) -> list[float]:
    return [v for v in row if isinstance(v, float)]


@pytest.fixture(params=LAYOUTS, scope="module")
def drawing(request: pytest.FixtureRequest) -> Drawing:
    made = LAYOUTS[request.param]
    assert [run(made).solved(c) for c in range(3)] == [case.name != "Heavy" for case in made.cases]
    return made


def test_head_case_list_and_findings_name_it_with_its_reason(workbook: Reader, drawing: Drawing) -> None:
    book, outcome = workbook(drawing), run(drawing)
    told = next(r[1] for r in rows(book["Head"]) if r[0] == "Result")
    reason = outcome.findings[0].sentence
    assert told.startswith("NOT SOLVED in case Heavy. ")
    assert outcome.sentence in told
    assert reason in told
    listed = {
        r[0]: r for sheet in book for r in rows(sheet) if r[0] in outcome.cases and "Balance" != sheet.title
    }
    assert any(str(v).startswith(f"NOT SOLVED. {reason}") for v in listed["Heavy"])
    assert all("solved" in row for name, row in listed.items() if name != "Heavy")
    assert book["Findings"]["A2"].value.startswith("NOT SOLVED in case Heavy")


def test_no_table_is_silently_short(workbook: Reader, drawing: Drawing) -> None:
    book = workbook(drawing)
    seen = 0
    for sheet in book:
        for row in rows(sheet):
            if "Heavy: not solved" not in row or "kW" in row or row.count("Heavy: not solved") > 1:
                continue
            after = row[row.index("Heavy: not solved") + 1 :]
            assert not figures(after), (sheet.title, row)
            seen += 1
        titles = [r[0] for r in rows(sheet) if isinstance(r[0], str)]
        if any(": worst of all cases" in t for t in titles):
            assert any("Without case Heavy, not solved" in t for t in titles), sheet.title
    assert seen > len(drawing.nodes())


def test_the_other_cases_have_the_figures_of_a_sheet_without_it(tmp_path: Path, drawing: Drawing) -> None:
    """Read from text files, whose numbers are unrounded: every row of a case, and every extreme of all."""
    without = replace(drawing, cases=tuple(c for c in drawing.cases if c.name != "Heavy"))
    compared = 0
    for folder, made in (("with", drawing), ("without", without)):
        (tmp_path / folder).mkdir()
        write(made, run(made), tmp_path / folder / "s.csv")
    for name in sorted(p.name for p in (tmp_path / "without").glob("s-*.csv")):
        now, then = (_read(tmp_path / folder / name) for folder in ("with", "without"))
        if name in ("s-findings.csv", "s-losses.csv"):
            continue
        kept = [row for row in now if not any(v.startswith("Heavy") for v in row)]
        plain = [[v.replace("holds where solved", "holds") for v in _numberless(row)] for row in kept]
        assert plain == [_numberless(row) for row in then], name
        compared += len(plain)
    assert compared > 60


def _read(path: Path) -> list[list[str]]:
    with path.open(encoding="utf-8-sig", newline="") as file:
        return list(csv.reader(file))


def _numberless(row: list[str]) -> list[str]:
    """Without the number of the case, which counts on where one stands between."""
    return [v for v in row if v not in ("1", "2", "3", "1.0", "2.0", "3.0")]


def test_what_holds_only_without_it_says_so(workbook: Reader) -> None:
    book = workbook(LAYOUTS["pair"])
    verdicts = {r[0]: r for r in rows(book["Busbars"])}
    assert "holds where solved" in verdicts["B1"]
    found = [r for r in rows(book["Findings"]) if "holds where solved" in r]
    assert found
    assert all(any("Holds in the cases that are solved." in str(v) for v in row) for row in found)
    assert "holds" not in {v for r in rows(book["Busbars"]) for v in r}
