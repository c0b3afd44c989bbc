"""Damaged, foreign and hostile files: one sentence each, nothing else is ever raised."""

import json

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app.model import file
from app.model.drawing import Drawing
from app.model.file import FileError, decode, encode
from app.model.kinds import Joint


def sentence_against(data: bytes) -> str:
    with pytest.raises(FileError) as caught:
        decode(data)
    sentence = str(caught.value)
    assert sentence.startswith("The file")
    assert sentence.endswith(".")
    assert "\n" not in sentence
    assert len(sentence) < 400
    return sentence


def opens_whole_or_is_refused(data: bytes) -> None:
    try:
        drawing = decode(data)
    except FileError:
        sentence_against(data)
    else:
        assert decode(encode(drawing)) == drawing


def with_elements(*elements, **head) -> bytes:
    return json.dumps({"farend": 1, "elements": list(elements), **head}).encode()


J1 = {"id": "J1", "kind": "joint"}
J2 = {"id": "J2", "kind": "joint"}
C1 = {"id": "C1", "kind": "cable", "start": "J1", "end": "J2"}
T1 = {"id": "T1", "kind": "transformer", "start": "J1", "end": "J2"}
L1 = {"id": "L1", "kind": "load", "node": "J1"}
P1 = {"id": "P1", "name": "House", "element": {"kind": "load"}}
SVG = {"svg": "<svg/>", "width": 10, "height": 10}


@pytest.mark.parametrize(
    ("data", "words"),
    [
        (b"", "The file is empty."),
        (b" \n\t ", "The file is empty."),
        (b"hello", "is not JSON: it stops making sense at line 1, column 1"),
        (b'{"farend": 1,\n "elements": [}', "line 2, column 15"),
        (b'{"farend": 1, "elements": [{"id": "J1", "ki', "The file is cut off"),
        (b'{"farend": 1', "The file is cut off"),
        (b'{"farend": 1} {"farend": 1}', "is not JSON"),
        (b"\x89PNG\r\n\x1a\n\x00\x00", "is not text in UTF-8"),
        (b"PK\x03\x04\x14\x00\x06\x00", "is not text in UTF-8"),
        ('{"farend": 1}'.encode("utf-16"), "is not text in UTF-8"),
        (b'{"farend": 1, "a": "\xff"}', "is not text in UTF-8: byte 21 is foreign to it"),
        (b"[1, 2]", 'is JSON, but no drawing: it has no key "farend"'),
        (b"null", "is JSON, but no drawing"),
        (b'{"name": "x", "version": "1.0"}', "is JSON, but no drawing"),
        (b'{"farend": 1, "frequency_hz": NaN}', "holds NaN, allowed are finite numbers"),
        (b'{"farend": 1, "frequency_hz": -Infinity}', "holds -Infinity, allowed are finite"),
        (b'{"farend": 1, "frequency_hz": 1e999}', 'holds the number "1e999", allowed are finite'),
        (b'{"farend": 1, "later": 1e999}', 'holds the number "1e999"'),
        (b'{"farend": 1, "later": ' + b"9" * 5000 + b"}", "a number with too many digits"),
        (b'{"farend": 1, "frequency_hz": ' + b"9" * 400 + b"}", "Frequency is "),
        (b'{"farend": 1, "farend": 1}', 'says "farend" twice in one place'),
        (b'{"farend": 1, "elements": [{"id": "J1", "x": 1, "x": 2}]}', 'says "x" twice in one place ("J1")'),
        (b"[" * 100_000, "nested too deeply"),
        (b'{"farend": 1, "a": ' + b"[" * 100 + b"]" * 100 + b"}", "nested deeper than 40 levels"),
        (b'{"farend": 1, "a": "\\ud800"}', "holds half a character"),
        (with_elements(frequency_hz="50"), 'Drawing: Frequency is "50", allowed is a number'),
        (with_elements(frequency_hz=True), "Drawing: Frequency is yes, allowed is a number"),
        (with_elements(cases={}), '"cases" is {}, allowed is a list'),
        (with_elements(cases=[]), "There are 0 cases, allowed are 1 to 100"),
        (with_elements(cases=[{"name": "a"}, {"name": "a"}]), "Case 2: Case is"),
        (
            with_elements(cases=[{"load_percent": -1}]),
            "Case 1: Loads is -1 %, allowed is a number, at least 0",
        ),
        (with_elements(project=[]), "Project is [], allowed is an object"),
        (with_elements(project={"title": 5}), "Project: Project is 5, allowed is text"),
        (with_elements(project={"title": "a\x00"}), "allowed is text without control characters"),
        (with_elements(limits={"low_percent": 100, "high_percent": 100}), "Limits: Lowest voltage is 100 %"),
        (b'{"farend": 1, "elements": {}}', '"elements" is {}, allowed is a list'),
        (with_elements(5), "Element 1 is 5, allowed is an object"),
        (with_elements({"kind": "joint"}), "Element 1: id is missing"),
        (with_elements({"id": 5, "kind": "joint"}), "Element 1: id is 5, allowed is text"),
        (with_elements({"id": "a b", "kind": "joint"}), 'The id "a b" is not allowed, allowed is 1 to 40'),
        (with_elements({"id": "", "kind": "joint"}), 'The id "" is not allowed'),
        (with_elements({"id": "x" * 41, "kind": "joint"}), "is not allowed"),
        (with_elements({"id": "J1"}), "J1: kind is missing, allowed is one of supply, busbar"),
        (with_elements({"id": "J1", "kind": "spaceship"}), 'J1: kind is "spaceship", allowed is one of'),
        (with_elements({"id": "J1", "kind": ["joint"]}), "J1: kind is ['joint'], allowed is one of"),
        (with_elements(J1, J1), 'The id "J1" is given to two elements, allowed is one'),
        (with_elements(J1, {**C1, "end": "J9"}), 'C1 (cable): End is "J9", which does not exist'),
        (with_elements(J1, {**C1, "end": "J1"}), 'C1 (cable): Start and End are both "J1"'),
        (
            with_elements(J1, J2, C1, {**L1, "node": "C1"}),
            "L1 (load): Node is C1 (cable), allowed is a busbar",
        ),
        (with_elements(J1, J2, {**C1, "end": 5}), "C1 (cable): end is 5, allowed is the id of a node"),
        (with_elements({"id": "C1", "kind": "cable"}), "C1 (cable): start is missing, allowed is the id"),
        (
            with_elements(J1, J2, {**C1, "length_m": -3}),
            "The file: C1 (cable): Length is -3 m, allowed is a number, at least 0 and at most 1000000 m.",
        ),
        (with_elements(J1, J2, {**C1, "length_m": "3"}), 'C1 (cable): Length is "3", allowed is a number'),
        (with_elements(J1, J2, {**C1, "length_m": None}), "C1 (cable): Length is blank, allowed is"),
        (
            with_elements(J1, J2, {**C1, "side_by_side": 1.5}),
            "In parallel is 1.5 runs, allowed is a whole number",
        ),
        (with_elements(J1, J2, {**C1, "side_by_side": True}), "In parallel is yes"),
        (with_elements(J1, J2, {**C1, "conductor": "Ag"}), 'Conductor is "Ag", allowed is one of Al, Cu'),
        (with_elements(J1, J2, {**C1, "via": [[1, 2], [3]]}), "C1 (cable): via is [[1, 2], [3]], allowed"),
        (with_elements(J1, J2, {**C1, "via": [[1, 1e9]]}), "C1 (cable): via is "),
        (with_elements({**J1, "x": "0"}), 'J1 (joint): x is "0", allowed'),
        (with_elements({**J1, "x": 1e300}), "J1 (joint): x is 1e+300, allowed is a number from"),
        (with_elements({**J1, "name": 5}), "J1 (joint): Name is 5, allowed is text"),
        (with_elements({**J1, "name": "a\nb"}), "Name is "),
        (with_elements({**J1, "name": "x" * 81}), "Name has 81 characters, allowed are at most 80"),
        (with_elements({"id": "B1", "kind": "busbar", "length": -1}), "B1 (busbar): length is -1, allowed"),
        (with_elements({"id": "B1", "kind": "busbar", "upright": 1}), "B1 (busbar): upright is 1, allowed"),
        (with_elements(J1, J2, {**T1, "uk_percent": 55}), "T1 (transformer): Impedance uk is 55 %, allowed"),
        (with_elements(J1, J2, {**T1, "tap": 3}), "T1 (transformer): Tap is 3 notches, allowed"),
        (
            with_elements(J1, J2, {**T1, "vector_group": "?"}),
            'T1 (transformer): Vector group is "?", allowed',
        ),
        (with_elements(J1, {**L1, "demand_kw": 5}), "both given, allowed is exactly one of them"),
        (with_elements(J1, {**L1, "part": "P9"}), 'L1 (load): Part is "P9", allowed is blank'),
        (with_elements({**J1, "part": "P1"}, parts=[P1]), "Part is P1, a load, allowed is a part of its own"),
        (with_elements(parts=[P1, P1]), 'The id "P1" is given to two parts'),
        (with_elements(parts=[5]), "Part 1: id is missing"),
        (with_elements(parts=[{**P1, "name": None}]), "Part P1: Part is blank"),
        (with_elements(parts=[{**P1, "element": None}]), "Part P1: element is None, allowed is an object"),
        (with_elements(parts=[{**P1, "element": L1}]), "stands on "),
        (with_elements(parts=[{**P1, "symbol": {**SVG, "svg": ""}}]), "Part P1: Symbol is blank"),
        (
            with_elements(parts=[{**P1, "symbol": {**SVG, "svg": "x" * 262_145}}]),
            "allowed is at most 256 KiB",
        ),
        (with_elements(parts=[{**P1, "symbol": {**SVG, "width": 0}}]), "Symbol width is 0, allowed is more"),
        (
            with_elements(parts=[{**P1, "symbol": {**SVG, "terminals": [[11, 0]]}}]),
            "Symbol terminal is (11.0",
        ),
        (with_elements(parts=[{**P1, "symbol": {**SVG, "terminals": [[0, 0]] * 17}}]), "has 17 terminals"),
        (with_elements(parts=[{**P1, "symbol": "svg"}]), 'Part P1 is "svg", allowed is an object'),
    ],
)
def test_each_fault_gets_its_sentence(data, words):
    assert words in sentence_against(data)


def test_a_file_too_large_is_not_even_read(tmp_path, monkeypatch):
    path = tmp_path / "large.farend"
    path.write_bytes(encode(Drawing()))
    monkeypatch.setattr(file, "LARGEST", 100)
    with pytest.raises(FileError, match="large.farend has 0 MiB, allowed are at most 0 MiB"):
        file.load(path)


def test_cut_off_at_every_byte(yard):
    data = encode(yard).rstrip()
    for length in range(len(data)):
        assert "cut off" in (said := sentence_against(data[:length])) or "empty" in said, data[:length][-40:]


@settings(max_examples=200, deadline=None)
@given(st.data())
def test_flipped_bytes_open_whole_or_are_refused(data):
    good = bytearray(SMALL)
    for place in data.draw(st.lists(st.integers(0, len(good) - 1), min_size=1, max_size=4)):
        good[place] = data.draw(st.integers(0, 255))
    opens_whole_or_is_refused(bytes(good))


json_values = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats() | st.text(max_size=8),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=8), inner, max_size=3),
    max_leaves=6,
)


@settings(max_examples=200, deadline=None)
@given(st.data())
def test_any_value_in_any_field_opens_whole_or_is_refused(data):
    raw = json.loads(SMALL)
    spot = data.draw(st.sampled_from(["project", "limits", "cases", "elements", "parts", "frequency_hz"]))
    inner = raw[spot]
    if isinstance(inner, list):
        inner = data.draw(st.sampled_from(inner))
    if isinstance(inner, dict) and data.draw(st.booleans()):
        inner[data.draw(st.sampled_from(sorted(inner)))] = data.draw(json_values)
    else:
        raw[spot] = data.draw(json_values)
    opens_whole_or_is_refused(json.dumps(raw).encode())


@settings(max_examples=100, deadline=None)
@given(st.binary(max_size=60))
def test_any_bytes_are_refused(data):
    with pytest.raises(FileError):
        decode(data)


SMALL = json.dumps(
    {
        "farend": 1,
        "project": {"title": "Yard", "status": "preliminary"},
        "frequency_hz": 50,
        "limits": {"low_percent": 94, "high_percent": 110},
        "cases": [{"name": "Peak", "load_percent": 100}],
        "elements": [
            J1,
            J2,
            {**C1, "via": [[1, 2]]},
            {**T1, "tap": 1},
            {**L1, "demand_kva": 3.5, "part": "P1"},
        ],
        "parts": [{**P1, "symbol": {**SVG, "terminals": [[1, 2]]}}],
    }
).encode()


def test_the_small_file_is_sound():
    assert isinstance(decode(SMALL).elements["J1"], Joint)
