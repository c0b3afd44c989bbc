"""The sheet as text files: one table a file, numbers as numbers, text that cannot act."""

import csv
from pathlib import Path

import pytest
from sheet_layouts import HOSTILE, NIGHT, PEAK, blocked, pair

from app.model.drawing import Drawing, Project
from app.model.kinds import Busbar, Load, Supply
from app.sheet import write
from app.study import run


def saved(drawing: Drawing, folder: Path) -> dict[str, list[list[str]]]:
    written = write(drawing, run(drawing), folder / "out.csv")
    found = {}
    for path in written:
        assert path.read_bytes().startswith(b"\xef\xbb\xbf")
        with path.open(encoding="utf-8-sig", newline="") as file:
            found[path.name] = list(csv.reader(file))
    return found


def test_every_table_is_a_file_named_by_the_first(tmp_path: Path) -> None:
    files = saved(pair(), tmp_path)
    listed = [row[2] for row in files["out.csv"] if row[0] == "Files"]
    assert sorted([*listed, "out.csv"]) == sorted(files)
    expected = {"out-busbars.csv", "out-cables.csv", "out-transformers-results.csv", "out-balance.csv"}
    assert expected <= set(files)
    assert all(len({len(row) for row in rows}) == 1 for rows in files.values())


def test_numbers_are_whole_and_heads_carry_units(tmp_path: Path) -> None:
    drawing = pair()
    rows = saved(drawing, tmp_path)["out-busbars.csv"]
    barn = next(r for r in rows if r[0] == "B3")
    assert float(barn[rows[0].index("U [V]")]) == run(drawing).nodes.at("B3").voltage_v
    spare = next(r for r in rows if r[0] == "B4")
    assert spare[rows[0].index("U [V]")] == ""
    assert spare[-1] == "dead"


def test_negative_numbers_keep_their_sign(tmp_path: Path) -> None:
    rows = saved(pair(), tmp_path)["out-transformers.csv"]
    assert float(next(r for r in rows if r[0] == "T2")[rows[0].index("Tap [%]")]) == -2.5


@pytest.mark.parametrize("name", [HOSTILE, "+1", "-2", "@x", "\t=1", " =1", "\uff1d1", "\n=1"], ids=ascii)
def test_what_would_act_gets_an_apostrophe(name: str, tmp_path: Path) -> None:
    elements = {"B1": Busbar(name=name), "S1": Supply(node="B1"), "L1": Load(node="B1", note=name)}
    files = saved(Drawing(project=Project(title=name, note=name), elements=elements), tmp_path)
    assert files["out-busbars.csv"][1][1] == "'" + name
    for rows in files.values():
        for row in rows:
            for found in row:
                assert not found.lstrip().startswith(("=", "+", "@", "\uff1d")) or found.startswith("'")


def test_quotes_commas_and_lines_come_back(tmp_path: Path) -> None:
    name = 'He said "no", twice;\nthen Ω 变'
    elements = {"B1": Busbar(name=name), "S1": Supply(node="B1")}
    assert saved(Drawing(elements=elements), tmp_path)["out-busbars.csv"][1][1] == name


def test_head_tells_that_it_is_not_solved(tmp_path: Path) -> None:
    files = saved(blocked(), tmp_path)
    assert any(row[1] == "Result" and row[2].startswith("NOT SOLVED") for row in files["out.csv"])
    assert all(row[-1] == "not solved" for row in files["out-busbars.csv"][1:])


def test_tables_of_an_earlier_sheet_do_not_stay(tmp_path: Path) -> None:
    saved(pair(PEAK, NIGHT), tmp_path)
    (tmp_path / "out-mine.csv").write_text("kept")
    assert (tmp_path / "out-busbars-results.csv").exists()
    saved(pair(), tmp_path)
    assert not (tmp_path / "out-busbars-results.csv").exists()
    assert (tmp_path / "out-mine.csv").read_text() == "kept"
