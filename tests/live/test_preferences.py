"""What a person likes outlives the program and survives a broken file."""

from pathlib import Path

from app.live.preferences import Preferences


def test_first_start(qapp, tmp_path):
    kept = Preferences(tmp_path / "p.ini")
    assert (kept.theme, kept.symbols) == ("desktop", "IEC")
    assert kept.geometry == b""
    assert kept.recent == []
    assert kept.shelf_path.name == "shelf.json"


def test_all_is_kept(qapp, tmp_path):
    kept = Preferences(tmp_path / "p.ini")
    kept.theme, kept.symbols = "dark", "ANSI"
    kept.geometry, kept.shelf_path = b"\x00\x01\xff", tmp_path / "mine.json"
    again = Preferences(tmp_path / "p.ini")
    assert (again.theme, again.symbols) == ("dark", "ANSI")
    assert again.geometry == b"\x00\x01\xff"
    assert again.shelf_path == tmp_path / "mine.json"


def test_recent_files_are_few_newest_first_and_each_once(qapp, tmp_path):
    kept = Preferences(tmp_path / "p.ini")
    kept.add_recent(tmp_path / "one.farend")
    assert Preferences(tmp_path / "p.ini").recent == [tmp_path / "one.farend"]
    for number in range(14):
        kept.add_recent(tmp_path / f"{number}, with comma.farend")
    kept.add_recent(tmp_path / "9, with comma.farend")
    again = Preferences(tmp_path / "p.ini").recent
    assert len(again) == 10
    assert again[:2] == [tmp_path / "9, with comma.farend", tmp_path / "13, with comma.farend"]
    kept.forget(Path(tmp_path / "9, with comma.farend"))
    assert tmp_path / "9, with comma.farend" not in kept.recent


def test_nonsense_in_the_file_is_passed_over(qapp, tmp_path):
    (tmp_path / "p.ini").write_text("[General]\ntheme=plaid\nsymbols=\nrecent=@Invalid()\ngeometry=7\n")
    kept = Preferences(tmp_path / "p.ini")
    assert (kept.theme, kept.symbols) == ("desktop", "IEC")
    assert kept.recent == []
    assert kept.geometry == b""
