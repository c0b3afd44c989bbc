"""Copy and paste, the user's own parts and symbols, and the shelf."""

import json
import os

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app.model import edits
from app.model.checks import fault
from app.model.drawing import Drawing, Part, Symbol
from app.model.edits import EditRefused, added
from app.model.file import FileError, decode, encode
from app.model.kinds import KINDS, Busbar, Joint, Load, Transformer, kind_of
from app.model.parts import (
    builtin_parts,
    decode_clip,
    decode_part,
    encode_clip,
    encode_part,
    load_shelf,
    made_from,
    save_shelf,
)
from app.model.versions import CURRENT

SYMBOL = Symbol(svg="<svg/>", width=40.0, height=20.0, terminals=((0.0, 10.0), (40.0, 10.0)))


def test_copied_things_paste_beside_each_other_with_ids_of_their_own(yard):
    clip = edits.copy(yard, ["B2", "C1", "J4", "L1"])
    once = edits.paste(yard, clip, 135, 103)
    fresh = added(yard, once)
    assert fresh == ("B3", "J1", "C2", "L2")
    cable = once.elements["C2"]
    assert (cable.start, cable.end, cable.via) == ("B3", "J1", ((140.0, 100.0),))
    assert once.elements["B3"].name == "Barn"
    assert decode(encode(once)) == once
    twice = edits.paste(once, clip, 0, 0)
    assert len(added(once, twice)) == 4


def test_what_a_copy_stands_on_is_copied_as_bare_joints(yard):
    clip = edits.copy(yard, ["C1"])
    kinds = [kind_of(e) for e in clip.elements.values()]
    assert sorted(kinds) == ["cable", "joint", "joint"]
    assert clip.elements["B2"] == Joint(x=30.0, y=0.0)


def test_an_attachment_alone_pastes_onto_a_node(yard):
    clip = edits.copy(yard, ["L1"])
    hung = edits.paste(yard, clip, 0, 0, node="B1")
    assert added(yard, hung) == ("L2",)
    assert hung.elements["L2"].node == "B1"
    loose = edits.paste(yard, clip, 3, 4)
    assert loose.elements[loose.elements["L2"].node] == Joint(x=3.0, y=4.0)
    with pytest.raises(EditRefused, match="does not exist"):
        edits.paste(yard, clip, 0, 0, node="B9")
    with pytest.raises(EditRefused, match="Nothing is chosen"):
        edits.copy(yard, [])


def test_clips_travel_as_bytes_with_their_parts(yard):
    kept = edits.set_symbol(edits.keep_part(yard, "T2", "Pole unit"), "P1", SYMBOL)
    clip = decode_clip(encode_clip(edits.copy(kept, ["T2"])))
    assert clip == edits.copy(kept, ["T2"])
    elsewhere = edits.paste(Drawing(), clip, 0, 0)
    assert elsewhere.parts["P1"].symbol == SYMBOL
    assert elsewhere.elements["T1"].part == "P1"
    at_home = edits.paste(kept, clip, 0, 0)
    assert at_home.parts == kept.parts
    other = edits.keep_part(edits.drop(Drawing(), Load(node=""), 0, 0), "L1", "House")
    mixed = edits.paste(other, clip, 9, 9)
    assert mixed.elements["T1"].part == "P2"
    assert decode(encode(mixed)) == mixed


@pytest.mark.parametrize(
    ("data", "words"),
    [
        (b"", "The clip is empty."),
        (b"{}", "The clip is JSON, but no clip"),
        (b'{"farend_clip": 1}', "x is None, allowed is a number"),
        (b'{"farend_clip": 1, "x": true, "y": 0}', "x is True, allowed is a number"),
        (b'{"farend_clip": 9, "x": 0, "y": 0}', "The clip was written by a newer Farend"),
        (
            b'{"farend_clip": 1, "x": 0, "y": 0, "elements": [{"id": "L1", "kind": "load", "node": "J1"}]}',
            "which does not exist",
        ),
    ],
)
def test_foreign_clips_are_refused(data, words):
    with pytest.raises(FileError) as caught:
        decode_clip(data)
    assert words in str(caught.value)


@settings(max_examples=100, deadline=None)
@given(st.binary(max_size=80))
def test_any_dropped_bytes_are_refused(data):
    for read in (decode_clip, decode_part):
        with pytest.raises(FileError):
            read(data)


def test_the_shelf_starts_with_one_sound_part_a_kind():
    for hertz in (50.0, 60.0):
        parts = builtin_parts(hertz)
        assert [kind_of(p.element) for p in parts] == [
            "supply", "busbar", "joint", "cable", "overhead_line", "transformer", "regulator", "load",
            "motor", "generator", "capacitor", "switch",
        ]  # fmt: skip
        assert len(parts) == len(KINDS)
        for part in parts:
            assert fault("new", part.element) is None
            assert decode_part(encode_part(part)) == part
            drawing, template = made_from(Drawing(), part)
            assert drawing.parts == {}
            placed = edits.drop(drawing, template, 0, 0)
            assert decode(encode(placed)) == placed
    fifty, sixty = builtin_parts(50.0), builtin_parts(60.0)
    assert (fifty[0].element.nominal_v, fifty[5].element.v1_v, fifty[5].element.v2_v) == (
        400.0,
        11000.0,
        400.0,
    )
    assert (sixty[0].element.nominal_v, sixty[5].element.v1_v, sixty[5].element.v2_v) == (
        208.0,
        12470.0,
        208.0,
    )


def test_keeping_an_element_as_a_part(yard):
    kept = edits.keep_part(yard, "T2", "  Pole unit ")
    part = kept.parts["P1"]
    assert part.name == "Pole unit"
    assert part.element == Transformer(start="", end="", rating_kva=100.0)
    assert kept.elements["T2"].part == "P1"
    again = edits.keep_part(edits.change(kept, "T2", uk_percent=4.5), "T2", "Pole unit")
    assert list(again.parts) == ["P1"]
    assert again.parts["P1"].element.uk_percent == 4.5
    bar = edits.keep_part(yard, "B2", "Long bar").parts["P1"].element
    assert isinstance(bar, Busbar)
    assert (bar.x, bar.y, bar.name) == (0.0, 0.0, "")


def test_parts_are_refused_without_a_name_or_under_the_name_of_another_kind(yard):
    kept = edits.keep_part(yard, "T2", "Mine")
    for name, words in (("", "name is blank"), ("Mine", "another kind"), ("x" * 81, "81 characters")):
        with pytest.raises(EditRefused, match=words):
            edits.keep_part(kept, "L1", name)


def test_symbols_are_bounded(yard):
    kept = edits.keep_part(yard, "T2", "Mine")
    assert edits.set_symbol(edits.set_symbol(kept, "P1", SYMBOL), "P1", None) == kept
    for symbol, words in (
        (Symbol(svg="x" * 300_000, width=1.0, height=1.0), "Part Mine, P1: Symbol has 293 KiB"),
        (Symbol(svg="<svg/>", width=float("nan"), height=1.0), "Symbol width is not a number"),
        (Symbol(svg="<svg/>", width=1.0, height=1.0, terminals=((2.0, 0.0),)), "a point inside the picture"),
        (Symbol(svg="<svg\x00/>", width=1.0, height=1.0), "control characters"),
    ):
        with pytest.raises(EditRefused, match=words):
            edits.set_symbol(kept, "P1", symbol)
    with pytest.raises(EditRefused, match='no part "P7"'):
        edits.set_symbol(kept, "P7", SYMBOL)


def test_parts_are_renamed(yard):
    kept = edits.keep_part(yard, "T2", "Mine")
    renamed = edits.rename_part(kept, "P1", " Pole ")
    assert renamed.parts["P1"].name == "Pole"
    assert renamed.elements == kept.elements
    for name, words in ((" ", "is blank"), ("x" * 81, "81 characters")):
        with pytest.raises(EditRefused, match=words):
            edits.rename_part(kept, "P1", name)


def test_forgetting_a_part_leaves_what_was_made_from_it(yard):
    kept = edits.keep_part(yard, "T2", "Mine")
    assert edits.forget_part(kept, "P1") == yard


def test_a_shelf_part_is_carried_once_by_the_drawing_it_is_drawn_in():
    mine = Part(name="House", element=Load(node="", demand_kva=12.5), symbol=SYMBOL)
    drawing, template = made_from(Drawing(), mine)
    first = edits.drop(drawing, template, 0, 0)
    drawing, template = made_from(first, mine)
    second = edits.drop(drawing, template, 9, 0)
    assert list(second.parts) == ["P1"]
    assert {e.part for i, e in second.elements.items() if i.startswith("L")} == {"P1"}
    assert decode(encode(second)) == second
    bad = Part(name="House", element=Load(node="", demand_kva=-1.0))
    with pytest.raises(EditRefused, match="Demand is -1 kVA"):
        made_from(Drawing(), bad)


def test_the_users_shelf_is_kept_in_a_file(tmp_path):
    path = tmp_path / "deep" / "shelf.json"
    assert load_shelf(path) == ()
    mine = (
        Part(name="House", element=Load(node=""), symbol=SYMBOL, kept={"later": 1}),
        Part(name="J", element=Joint()),
    )
    save_shelf(path, mine)
    assert load_shelf(path) == mine
    assert json.loads(path.read_text())["farend_shelf"] == CURRENT
    save_shelf(path, ())
    assert load_shelf(path) == ()


def test_a_damaged_shelf_is_told_and_not_written_over(tmp_path):
    path = tmp_path / "shelf.json"
    for data in (b'{"farend_shelf": 1, "parts": [', b"hello", b'{"farend": 1}', b'{"farend_shelf": 9}'):
        path.write_bytes(data)
        with pytest.raises(FileError, match=r"shelf\.json"):
            load_shelf(path)
        with pytest.raises(FileError, match=r"shelf\.json"):
            save_shelf(path, builtin_parts())
        assert path.read_bytes() == data


def test_the_old_shelf_outlives_a_failed_save(tmp_path, monkeypatch):
    path = tmp_path / "shelf.json"
    save_shelf(path, builtin_parts())

    def fails(*_):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "replace", fails)
    with pytest.raises(FileError, match="no space left"):
        save_shelf(path, ())
    assert load_shelf(path) == builtin_parts()
    with pytest.raises(FileError, match="Symbol is blank"):
        save_shelf(path, [Part(name="x", element=Joint(), symbol=Symbol(svg="", width=1.0, height=1.0))])
