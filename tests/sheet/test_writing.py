"""Writing: refused with a sentence, and the old file whole whatever happens."""

from pathlib import Path

import pytest
from sheet_layouts import pair, three_cables

from app.sheet import SheetError, tables, write, xlsx
from app.study import run


def outcome_of(drawing):
    return drawing, run(drawing)


@pytest.mark.parametrize(("name", "words"), [("out.ods", "ends in .ods"), ("out", "has no suffix")])
def test_other_kinds_are_refused(name: str, words: str, tmp_path: Path) -> None:
    with pytest.raises(SheetError, match=words):
        write(*outcome_of(three_cables()), tmp_path / name)
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("suffix", [".xlsx", ".csv"])
def test_places_that_cannot_be_written(suffix: str, tmp_path: Path) -> None:
    made = outcome_of(three_cables())
    with pytest.raises(SheetError, match="does not exist"):
        write(*made, tmp_path / "none" / f"out{suffix}")
    (tmp_path / f"folder{suffix}").mkdir()
    with pytest.raises(SheetError, match="that is a folder"):
        write(*made, tmp_path / f"folder{suffix}")
    (tmp_path / "file").write_text("")
    with pytest.raises(SheetError, match="is not a folder"):
        write(*made, tmp_path / "file" / f"out{suffix}")
    assert sorted(p.name for p in tmp_path.iterdir()) == ["file", f"folder{suffix}"]


def test_no_permission_is_told(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def denied(*_: object) -> None:
        raise PermissionError(13, "denied")

    monkeypatch.setattr("app.sheet.writing.os.replace", denied)
    with pytest.raises(SheetError, match="not permitted. Is it open in another program"):
        write(*outcome_of(three_cables()), tmp_path / "out.xlsx")
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("name", ["out.xlsx", "out.csv"])
def test_the_old_file_survives_a_failure(name: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    write(*outcome_of(three_cables()), tmp_path / name)
    before = {p.name: p.read_bytes() for p in tmp_path.iterdir()}

    def full(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(xlsx, "save", full)
    monkeypatch.setattr(Path, "write_bytes", full)
    with pytest.raises(SheetError, match="No space left on device"):
        write(*outcome_of(pair()), tmp_path / name)
    monkeypatch.undo()
    assert {p.name: p.read_bytes() for p in tmp_path.iterdir()} == before


def test_a_file_is_replaced_whole(tmp_path: Path) -> None:
    path = tmp_path / "out.XLSX"
    path.write_text("old")
    assert write(*outcome_of(three_cables()), path) == (path,)
    assert path.read_bytes().startswith(b"PK")
    assert [p.name for p in tmp_path.iterdir()] == ["out.XLSX"]
    assert path.stat().st_mode & 0o077 == (0o666 & ~_umask()) & 0o077


def _umask() -> int:
    import os

    mask = os.umask(0)
    os.umask(mask)
    return mask


def test_tables_are_the_same_for_every_kind() -> None:
    made = tables(*outcome_of(pair()))
    assert len({t.key for t in made}) == len(made)
    busbars = next(t for t in made if t.key == "busbars")
    assert busbars.at("B2", "u").value == run(pair()).nodes.at("B2").voltage_v
    assert busbars.columns[busbars.position("u")].title == "U [V]"
