"""Spacings as people write them: metres, feet, refusals in one sentence; the file and the shelf."""

import json
from contextlib import suppress

import pytest
from hypothesis import given
from hypothesis import strategies as st
from msgspec.structs import replace

from app.model import assumed, conductors, edits
from app.model.checks import EditRefused, fault
from app.model.drawing import Drawing
from app.model.file import FileError, decode, encode
from app.model.kinds import Joint, OverheadLine
from app.model.numerals import UnitError
from app.model.overhead_parts import spaced_parts
from app.model.parts import decode_part, encode_part, made_from
from app.model.spacing import in_feet, in_metres, places, written_of

LINE = OverheadLine(start="J1", end="J2", hung_at_m="-1.1 9; 0 9; 1.1 9; 0 7.5")
DRAWN = Drawing(elements={"J1": Joint(), "J2": Joint(), "O1": LINE})


@pytest.mark.parametrize(
    ("written", "metres"),
    [
        ("-1.1 9; 0 9", "-1.1 9; 0 9"),
        ("−1,1 9;1,1 9;", "-1.1 9; 1.1 9"),
        ("-3.6 ft 30 ft; 0 30 ft", "-1.09728 9.144; 0 9.144"),
        ("-3.6 30 ft; 3.6 30ft", "-1.09728 9.144; 1.09728 9.144"),
        ("-3'6\" 30'; 0 30'", "-1.0668 9.144; 0 9.144"),
        ("-110 cm 900 cm; 0 7.5 m", "-1.1 9; 0 7.5"),
        ("", ""),
    ],
)
def test_places_in_either_habit(written, metres):
    assert in_metres(written) == metres
    assert in_metres(metres) == metres


@given(
    st.lists(
        st.tuples(st.floats(-200, 200), st.floats(1e-3, 200)).map(lambda p: (p[0] + 0.0, p[1])),
        min_size=1,
        max_size=4,
    )
)
def test_any_places_survive_to_the_last_bit(where):
    where = tuple((x if x else 0.0, y) for x, y in where)
    assert places(written_of(where)) == where


@given(st.text(max_size=60))
def test_any_text_is_read_or_refused(text):
    with suppress(UnitError):
        where = places(text)
        assert len(where) <= 4
        assert all(y > 0 for _, y in where)


@pytest.mark.parametrize(
    ("written", "words"),
    [
        ("here", '"here" does not begin with a number'),
        ("0", "is one number for a conductor, allowed are two, x and height"),
        ("0 9 1", "is 3 numbers for a conductor"),
        ("0 9;; 1 9", "is 0 numbers"),
        ("0 9; 1 9; 2 9; 3 9; 4 9", "names 5 conductors, allowed are 1 to 4"),
        ("0 0", "has a height of 0 m, allowed is more than 0"),
        ("0 900", "has a height of 900 m"),
        ("-300 9", "lies -300 m across"),
        ("-3.6 30; 0 30 ft", "a unit behind some numbers and none behind -3.6"),
        ("0 9 kg", "is not a length"),
        ("0 nan", "is one number for a conductor"),
        ("0 9; 0 9", "A and N 0 m apart, allowed is more than their thickness"),
    ],
)
def test_bad_spacings_are_refused_on_card_and_in_the_file(written, words):
    with pytest.raises(EditRefused) as caught:
        edits.change_text(DRAWN, "O1", "hung_at_m", written)
    assert words in str(caught.value)
    assert str(caught.value).startswith("O1 (overhead line)")
    raw = json.loads(encode(DRAWN))
    raw["elements"][2]["hung_at_m"] = written
    with pytest.raises(FileError, match=r"O1 \(overhead line\): Hangs at"):
        decode(json.dumps(raw).encode())


@pytest.mark.parametrize(
    ("fields", "words"),
    [
        ({"phases": "A"}, "names 4 conductors, allowed with Phases A are 1, or 2 with a neutral"),
        ({"phases": "BC"}, "allowed with Phases BC are 2, or 3 with a neutral"),
        ({"neutral": "none"}, "has a place for a neutral, but Neutral is none"),
        ({"hung_at_m": "-1 9; 0 9; 1 9", "neutral": "carried"}, "no place for the neutral"),
        ({"gmr_mm": 9.6, "diameter_mm": 9.6}, "GMR is 9.6 mm, allowed is at most half the diameter, 4.8 mm"),
        ({"hung_at_m": "0 9; 0.01 9", "diameter_mm": 20.0}, "A and N 0.01 m apart"),
    ],
)
def test_what_contradicts_the_spacing_is_named(fields, words):
    assert words in str(fault("O1", replace(LINE, **fields)))


def test_which_conductor_hangs_where():
    letters = {
        ("all", 1): "A", ("all", 2): "AN", ("all", 3): "ABC", ("all", 4): "ABCN",
        ("B", 1): "B", ("B", 2): "BN", ("CA", 2): "CA", ("CA", 3): "CAN",
    }  # fmt: skip
    for (phases, count), want in letters.items():
        assert conductors.letters_of(replace(LINE, phases=phases), count) == want
    assert conductors.is_hung(LINE)
    assert not conductors.is_hung(replace(LINE, hung_at_m=""))


def test_blanks_of_the_spacing_are_assumed_and_listed_with_their_basis():
    listed = {b.field: b for b in assumed.blank(replace(LINE, area_mm2=53.5))}
    across = 3 * (4 * 53.5 / (7 * 3.141592653589793)) ** 0.5
    assert listed["diameter_mm"].value == pytest.approx(across)
    assert listed["gmr_mm"].value == pytest.approx(0.7256 * across / 2)
    assert listed["neutral_gmr_mm"].basis == "as a phase conductor"
    assert (listed["soil_ohm_m"].value, listed["soil_ohm_m"].unit) == (100.0, "Ω·m")
    assert "no source" in listed["soil_ohm_m"].basis
    bare = {b.field for b in assumed.blank(replace(LINE, hung_at_m=""))}
    assert bare == {"capacitance_uf_per_km", "temperature_degc"}
    three = {b.field for b in assumed.blank(replace(LINE, hung_at_m="-1 9; 0 9; 1 9"))}
    assert not three & {"neutral_gmr_mm", "neutral_diameter_mm"}


def test_seven_strands_from_their_geometry():
    """GMR of seven like strands: the 49th root of all distances, with e^(-1/4) of the strand for its own."""
    import cmath
    import math

    strands = [0j, *(2 * cmath.exp(1j * math.pi * k / 3) for k in range(6))]
    own = math.exp(-0.25)
    logs = [math.log(abs(a - b) or own) for a in strands for b in strands]
    assert math.exp(sum(logs) / 49) / 3 == pytest.approx(conductors.SEVEN, abs=5e-5)


def test_the_file_keeps_a_spacing_and_leaves_out_a_blank_one():
    text = encode(DRAWN).decode()
    assert '"hung_at_m": "-1.1 9; 0 9; 1.1 9; 0 7.5"' in text
    assert decode(text.encode()) == DRAWN
    plain = replace(DRAWN, elements={**DRAWN.elements, "O1": replace(LINE, hung_at_m="")})
    assert "hung_at_m" not in encode(plain).decode()
    assert in_feet("-1.09728 9.144; 0 9.144") == "-3.60 30; 0 30 ft"


@pytest.mark.parametrize("american", [False, True])
def test_the_shelf_has_sound_lines_with_a_spacing(american):
    parts = spaced_parts(american)
    assert len(parts) in (2, 3)
    for part in parts:
        assert fault("new", part.element) is None
        assert decode_part(encode_part(part)) == part
        drawing, element = made_from(Drawing(), part)
        assert (drawing.parts, element) == ({}, part.element)
        listed = [b.field for b in (*assumed.unconfirmed(element), *assumed.blank(element))]
        assert len(listed) == len(set(listed))
        assert {"resistance_ohm_per_km", "gmr_mm", "diameter_mm", "soil_ohm_m"} <= set(listed)
        assert "reactance_ohm_per_km" not in listed
