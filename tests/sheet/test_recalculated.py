"""A spreadsheet program works every formula out anew and must find our figures."""

from pathlib import Path

import openpyxl
import pytest
from sheet_layouts import (
    HEAVY,
    NIGHT,
    PEAK,
    blocked,
    each_for_itself,
    faulty,
    meshed,
    pair,
    stepping,
    three_cables,
    two_wire,
)
from spreadsheet import differences, needs_spreadsheet, recalculated
from wired_layouts import EVENING, MORNING, camp, units
from xlsxwriter import Workbook

from app.sheet import write
from app.study import run

pytestmark = needs_spreadsheet
LAYOUTS = {
    "pair.xlsx": (pair(), 120),
    "pair by night.xlsx": (pair(PEAK, NIGHT), 280),
    "pair, one case unsolved.xlsx": (pair(PEAK, HEAVY, NIGHT), 280),
    "three cables.xlsx": (three_cables(), 60),
    "two wires.xlsx": (two_wire(), 60),
    "meshed.xlsx": (meshed(), 80),
    "meshed by night.xlsx": (meshed(PEAK, NIGHT), 180),
    "stepping.xlsx": (stepping(), 60),
    "stepping by night.xlsx": (stepping(PEAK, NIGHT), 120),
    "faulty.xlsx": (faulty(), 160),
    "each for itself.xlsx": (each_for_itself(), 280),
    "camp.xlsx": (camp(), 270),
    "camp, one case unsolved.xlsx": (camp(HEAVY, EVENING, MORNING), 500),
    "camp by morning.xlsx": (camp(EVENING, MORNING), 500),
    "few phases.xlsx": (units(), 220),
    "few phases by morning.xlsx": (units(EVENING, MORNING), 420),
    "blocked.xlsx": (blocked(), 5),
}
Books = dict[str, tuple[Path, Path]]


@pytest.fixture(scope="module")
def books(tmp_path_factory: pytest.TempPathFactory) -> Books:
    """Every workbook as written and as worked out anew, in one run of the program: starting it takes long."""
    folder = tmp_path_factory.mktemp("books")
    for name, (drawing, _) in LAYOUTS.items():
        write(drawing, run(drawing), folder / name)
    _stale(folder / "stale.xlsx")
    _with_lower_limit(folder / "three cables.xlsx", folder / "lower limit.xlsx")
    again = recalculated(sorted(folder.glob("*.xlsx")), folder)
    return {name: (folder / name, fresh) for name, fresh in again.items()}


def _stale(path: Path) -> None:
    book = Workbook(path)
    book.add_worksheet().write_formula(0, 0, "=1+1", None, 99)
    book.close()


def _with_lower_limit(path: Path, to: Path) -> None:
    book = openpyxl.load_workbook(path)
    limit = next(r for r in book["Basis"].iter_rows() if r[0].value == "Lowest voltage")[1]
    limit.value = 93.0
    book.save(to)


def test_a_stale_figure_would_be_seen(books: Books) -> None:
    """The program really works formulas out anew, else the tests below could not fail."""
    assert differences(*books["stale.xlsx"]) == (1, ["Sheet1!A1 =1+1: 99, anew 2"])


@pytest.mark.parametrize("name", LAYOUTS)
def test_every_formula_yields_the_solved_figure(name: str, books: Books) -> None:
    count, found = differences(*books[name])
    assert found == []
    assert count >= LAYOUTS[name][1]


def test_another_limit_moves_the_verdicts(books: Books) -> None:
    def verdicts(path: Path) -> list[str]:
        sheet = openpyxl.load_workbook(path, data_only=True)["Busbars"]
        return [row[-1].value for row in sheet.iter_rows() if row[0].value in ("B1", "B2", "B3")]

    assert verdicts(books["three cables.xlsx"][1]) == ["holds", "holds", "FAIL"]
    assert verdicts(books["lower limit.xlsx"][1]) == ["holds", "holds", "holds"]
