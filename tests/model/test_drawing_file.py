"""The drawing's file: to the last bit, readable, keys of later versions kept, the old file safe."""

import json
import os
import stat
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st
from msgspec.structs import replace

from app.model import edits
from app.model.drawing import Case, Drawing, Limits, Part, Project, Symbol
from app.model.file import FileError, decode, encode, load, save
from app.model.kinds import Cable, Joint, Load, Supply, Transformer
from app.model.versions import CURRENT, migrate

floats = st.floats(min_value=5e-324, max_value=1e6, allow_subnormal=True)
spots = st.floats(min_value=-1e5, max_value=1e5, allow_subnormal=True)


def bits(value: float) -> bytes:
    return value.hex().encode()


def test_a_drawing_comes_back_equal_and_as_the_same_bytes(yard):
    data = encode(yard)
    assert decode(data) == yard
    assert encode(decode(data)) == data
    assert list(decode(data).elements) == list(yard.elements)


@given(
    x=spots, y=spots, length=floats, r=st.floats(0, 1000), via=st.lists(st.tuples(spots, spots), max_size=3)
)
def test_numbers_survive_to_the_last_bit(x, y, length, r, via):
    drawing = Drawing(
        elements={
            "J1": Joint(x=x, y=y),
            "J2": Joint(),
            "C1": Cable(start="J1", end="J2", length_m=length, resistance_ohm_per_km=r, via=tuple(via)),
        }
    )
    back = decode(encode(drawing)).elements
    assert bits(back["J1"].x) == bits(x)
    assert bits(back["J1"].y) == bits(y)
    assert bits(back["C1"].length_m) == bits(length)
    assert bits(back["C1"].resistance_ohm_per_km) == bits(r)
    assert [bits(c) for p in back["C1"].via for c in p] == [bits(c) for p in via for c in p]
    assert all(isinstance(c, float) for p in back["C1"].via for c in p)


def test_the_text_reads_well_one_element_a_line(yard):
    lines = encode(yard).decode().splitlines()
    assert lines[1] == f'"farend": {CURRENT},'
    assert sum(line.startswith('{"id": ') for line in lines) == len(yard.elements)
    assert (
        '{"id": "S1", "kind": "supply", "node": "B1", "dx": 0, "dy": 3, "nominal_v": 11000,'
        in lines[next(n for n, line in enumerate(lines) if '"S1"' in line)]
    )
    changed = encode(edits.set_tap(yard, "T2", 1)).decode().splitlines()
    assert sum(a != b for a, b in zip(lines, changed, strict=True)) == 1


def test_blank_demand_is_written_since_blank_is_not_its_default(yard):
    by_kw = edits.change(yard, "L1", demand_kw=3)
    assert b'"demand_kva": null, "demand_kw": 3' in encode(by_kw)
    assert decode(encode(by_kw)) == by_kw


def test_text_in_any_script_survives():
    name = 'Grüße "здесь" \\ 農場 🐄 </svg> =1+1'
    drawing = edits.put(Drawing(project=Project(note="a\nb")), {"J1": Joint(name=name)})
    assert decode(encode(drawing)) == drawing
    assert name.split()[2] in encode(drawing).decode()


def test_unknown_keys_are_kept_at_every_level():
    raw = {
        "farend": 1,
        "later": {"a": [1, 2.0, None]},
        "project": {"title": "Yard", "client": "Ann"},
        "limits": {"low_percent": 90, "flicker": 1.5},
        "cases": [{"name": "Peak", "season": "winter"}],
        "elements": [
            {"id": "J1", "kind": "joint", "colour": "red", "kept": {"a": 1}},
            {"id": "L1", "kind": "load", "node": "J1", "phase": "A", "x": 7},
        ],
        "parts": [
            {
                "id": "P1",
                "name": "House",
                "maker": "none",
                "element": {"kind": "load", "phase": "B"},
                "symbol": {"svg": "<svg/>", "width": 1, "height": 1, "licence": "own"},
            }
        ],
    }
    drawing = decode(json.dumps(raw).encode())
    written = json.loads(encode(drawing))
    assert written["later"] == raw["later"]
    assert repr(written["later"]["a"][1]) == "2.0"
    assert written["project"]["client"] == "Ann"
    assert written["limits"]["flicker"] == 1.5
    assert written["cases"][0]["season"] == "winter"
    assert written["elements"][0]["colour"] == "red"
    assert written["elements"][0]["kept"] == {"a": 1}
    assert (written["elements"][1]["phase"], written["elements"][1]["x"]) == ("A", 7)
    assert written["parts"][0]["maker"] == "none"
    assert written["parts"][0]["element"]["phase"] == "B"
    assert written["parts"][0]["symbol"]["licence"] == "own"
    assert decode(encode(drawing)) == drawing


def test_a_file_may_leave_out_what_has_a_default():
    assert decode(b'{"farend": 1}') == Drawing()
    short = decode(b'{"farend": 1, "elements": [{"id": "J1", "kind": "joint"}]}')
    assert short.elements == {"J1": Joint()}


def test_line_ends_of_other_systems_and_a_mark_at_the_start_are_read(yard):
    data = encode(yard)
    assert decode(data.replace(b"\n", b"\r\n")) == yard
    assert decode(b"\xef\xbb\xbf" + data) == yard


def test_parts_and_symbols_travel_with_the_drawing(yard):
    kept = edits.keep_part(yard, "T2", "Pole unit")
    symbol = Symbol(
        svg='<svg xmlns="x">\n<path d="M0 0"/></svg>', width=40.5, height=20.0, terminals=((0.0, 10.0),)
    )
    drawn = edits.set_symbol(kept, "P1", symbol)
    assert decode(encode(drawn)) == drawn
    assert decode(encode(drawn)).parts["P1"].symbol == symbol
    assert drawn.elements["T2"].part == "P1"


def test_save_and_load(tmp_path, yard):
    path = tmp_path / "yard.farend"
    save(yard, path)
    assert load(path) == yard
    assert [p.name for p in tmp_path.iterdir()] == ["yard.farend"]
    save(edits.set_tap(yard, "T2", 1), str(path))
    assert load(str(path)).elements["T2"].tap == 1


@pytest.mark.parametrize("call", ["fsync", "replace", "chmod"])
@pytest.mark.parametrize("error", [OSError(28, "No space left on device"), PermissionError(13, "Denied")])
def test_the_old_file_outlives_a_failed_save(tmp_path, yard, monkeypatch, call, error):
    path = tmp_path / "yard.farend"
    save(yard, path)
    before = path.read_bytes()

    def fails(*_):
        raise error

    with monkeypatch.context() as broken:
        broken.setattr(os, call, fails)
        with pytest.raises(FileError, match=r"yard\.farend cannot be saved: (no space left|denied)"):
            save(Drawing(), path)
    assert path.read_bytes() == before
    assert [p.name for p in tmp_path.iterdir()] == ["yard.farend"]


@pytest.mark.parametrize("call", ["fsync", "replace"])
def test_the_old_file_outlives_a_crash_in_the_middle(tmp_path, yard, monkeypatch, call):
    path = tmp_path / "yard.farend"
    save(yard, path)

    class PowerCut(BaseException):
        pass

    def dies(*_):
        raise PowerCut

    with monkeypatch.context() as broken:
        broken.setattr(os, call, dies)
        with pytest.raises(PowerCut):
            save(Drawing(), path)
    assert load(path) == yard


def test_permissions_and_links_stay(tmp_path, yard):
    path, link = tmp_path / "yard.farend", tmp_path / "link.farend"
    save(yard, path)
    path.chmod(0o640)
    link.symlink_to(path)
    save(Drawing(), link)
    assert link.is_symlink()
    assert load(path) == Drawing()
    assert stat.S_IMODE(path.stat().st_mode) == 0o640


def test_a_read_only_file_is_not_written_over(tmp_path, yard, monkeypatch):
    path = tmp_path / "yard.farend"
    save(yard, path)
    monkeypatch.setattr(os, "access", lambda *_: False)
    with pytest.raises(FileError, match="yard.farend cannot be saved: it is read-only"):
        save(Drawing(), path)
    assert load(path) == yard


def test_places_that_cannot_be_read_or_written_are_named(tmp_path, yard):
    with pytest.raises(FileError, match=r"none\.farend does not exist in"):
        load(tmp_path / "none.farend")
    with pytest.raises(FileError, match="is no file, allowed is a file"):
        load(tmp_path)
    with pytest.raises(FileError, match=r"x\.farend cannot be saved: no such file or directory"):
        save(yard, tmp_path / "nowhere" / "x.farend")
    with pytest.raises(FileError, match="name of a file"):
        load("a\0b")
    with pytest.raises(FileError, match="cannot be saved"):
        save(yard, Path("a\0b"))


def test_a_newer_file_is_not_opened_and_both_versions_are_named(tmp_path, yard):
    path = tmp_path / "new.farend"
    path.write_bytes(encode(yard).replace(b'"farend": %d' % CURRENT, b'"farend": 7'))
    with pytest.raises(FileError) as caught:
        load(path)
    assert str(caught.value) == (
        "new.farend was written by a newer Farend: its version is 7, this Farend reads up to 2."
    )


@pytest.mark.parametrize("version", [0, -1, "1", 1.0, True, None, [1]])
def test_odd_versions_are_refused(version):
    with pytest.raises(FileError, match='the key "farend" is .*, allowed is a version from 1 to 2'):
        decode(json.dumps({"farend": version}).encode())


def test_older_files_climb_one_version_at_a_time():
    climbed = []

    def step(number):
        def lift(raw):
            climbed.append(number)
            return {**raw, f"since_{number + 1}": True}

        return lift

    raw = migrate({"farend": 1}, steps={1: step(1), 2: step(2)}, current=3)
    assert climbed == [1, 2]
    assert raw == {"farend": 3, "since_2": True, "since_3": True}
    assert migrate({"farend": CURRENT}) == {"farend": CURRENT}


def test_a_file_of_version_1_has_all_phases_and_is_saved_as_today():
    old = b'{"farend": 1, "elements": [{"id": "J1", "kind": "joint"}, {"id": "J2", "kind": "joint"},'
    old += b'{"id": "C1", "kind": "cable", "start": "J1", "end": "J2", "length_m": 250},'
    old += b'{"id": "L1", "kind": "load", "node": "J2", "demand_kva": 12}]}'
    drawing = decode(old)
    assert (drawing.elements["C1"].phases, drawing.elements["C1"].neutral) == ("all", "usual")
    assert drawing.elements["L1"].phases == "all"
    text = encode(drawing).decode()
    assert text.startswith('{\n"farend": 2,')
    assert "phases" not in text
    assert decode(text.encode()) == drawing


def test_everything_a_drawing_holds_is_in_the_file():
    drawing = Drawing(
        project=Project(title="Yard", number="7", revision="B", status="as built", note="n"),
        frequency_hz=60.0,
        limits=Limits(name="EN 50160", low_percent=90.0, drop_percent=8.0, most_loaded_percent=95.5),
        cases=(Case(name="Peak"), Case(name="Night", supply_percent=105.25, load_percent=10.0)),
        elements={
            "J1": Joint(nominal_v=400.0),
            "J2": Joint(),
            "S1": Supply(node="J1", held_percent=97.0, angle_deg=-30.0, wires="two-wire"),
            "L1": Load(node="J1", leading=True, constant_current_percent=0.0, reference_v=230.0),
            "T1": Transformer(start="J1", end="J2", tapped="winding 2", tap=-2, load_loss_w=0.0, part="P1"),
        },
        parts={"P1": Part(name="Unit", element=Transformer(start="", end=""))},
    )
    assert decode(encode(drawing)) == drawing
    moved = replace(drawing, elements={"J1": Joint(x=-0.0)})
    assert bits(decode(encode(moved)).elements["J1"].x) == bits(-0.0)
