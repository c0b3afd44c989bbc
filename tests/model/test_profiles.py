"""Profiles: what text becomes one, invented shapes, edits, and their way through the file and clipboard."""

import json
import math

import pytest
from msgspec.structs import replace

from app.model import edits
from app.model.checks import EditRefused
from app.model.drawing import Drawing
from app.model.file import FileError, decode, encode
from app.model.following import followed, in_use
from app.model.kinds import Busbar, Capacitor, Generator, Load, Motor, Supply
from app.model.parts import decode_clip, encode_clip
from app.model.profile_text import read_text, values_of
from app.model.profiles import Profile, Year, usual_hours
from app.model.shapes import INVENTED, SHAPES, shape, to_load_factor

DAY = Profile(percent=tuple(float(40 + 2 * h) for h in range(24)), source="meter 7")


def yard():
    base = Drawing(
        elements={
            "B1": Busbar(x=0, y=0),
            "S1": Supply(node="B1"),
            "L1": Load(node="B1", name="House"),
            "M1": Motor(node="B1"),
            "G1": Generator(node="B1"),
            "K1": Capacitor(node="B1"),
        }
    )
    return edits.put_profile(base, "day", DAY)


@pytest.mark.parametrize(
    ("text", "values"),
    [
        ("1\n2.5\n\n3", (1, 2.5, 3)),
        ("1,2,3", (1, 2, 3)),
        ("0,5\n1,25\n62,5 %", (0.5, 1.25, 62.5)),
        ("0,5 0,7\n0,9 1", (0.5, 0.7, 0.9, 1)),
        ("1; 2,5; 3", (1, 2.5, 3)),
        ("1\t2\n3\t4\n", (1, 2, 3, 4)),
        ("\ufeffload in %\n50\n60", (50, 60)),
        ("time;load\n2023-01-01 00:00;1,5\n2023-01-01 01:00;3,0", (1.5, 3)),
        ("time,load\n2023-01-01 00:00,1.5\n2023-01-01 01:00,3.0", (1.5, 3)),
        ('"12,5"\n"13"', (12.5, 13)),
        ("1;2;\n3;4;", (1, 2, 3, 4)),
    ],
)
def test_text_that_people_have(text, values):
    assert values_of(text) == values


def test_a_log_in_any_unit_and_a_column_that_is_chosen():
    assert values_of("kW\n1250\n2500", measured=True) == (50, 100)
    assert values_of("d;a;b\n1.1.20;2;3\n2.1.20;3;4", column=3) == (3, 4)


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        ("", "There are no values"),
        ("10\nabc\n", 'Line 2: "abc" is not a number, allowed is a number such as 62.5.'),
        ("10\n\n-5", "Line 3: -5 is not allowed, allowed is from 0 to 1000 %."),
        ("10\n1001", "Line 2: 1001 is not allowed, allowed is from 0 to 1000 %."),
        ("nan\n1", 'Line 1: "nan" is not a number'),
        ("1\ninf", 'Line 2: "inf" is not a number'),
        ("1e400\n2", 'Line 1: "1e400" is too large'),
        ("0,50\n1,60\n2,70", 'Line 1: "0,50" may be one number or two'),
        ("987,5\n1.234,5", 'Line 2: "1.234,5" may be one number or two'),
        ("1 234\n987", "without spaces inside a number"),
        ("d;a;b\n1.1.20;2;3\n2.1.20;3;4", "Line 2: there are 2 columns of numbers, .* column 2 or 3"),
        ("1;;3", "Line 1: a blank is not a number"),
        ("1\n" * 105_409, "There are 105409 values, allowed are at most 105408"),
    ],
)
def test_text_that_is_none_names_the_line(text, sentence):
    with pytest.raises(EditRefused, match=sentence):
        values_of(text)


def test_a_log_below_nought_or_all_nought_is_refused():
    with pytest.raises(EditRefused, match="Line 2: -1 is not allowed, allowed is at least 0"):
        values_of("4\n-1", measured=True)
    with pytest.raises(EditRefused, match="log with a peak"):
        values_of("0\n0", measured=True)
    with pytest.raises(EditRefused, match="Line 1: there is no column 4, allowed is 1 to 3"):
        values_of("1;2;3", column=4)


def test_files_of_values(tmp_path):
    for name, data in (
        ("a.csv", b"1\n2"),
        ("b.csv", "\ufeff1\n2".encode("utf-16-le")),
        ("c.csv", b"1\xb0\n2"),
    ):
        (tmp_path / name).write_bytes(data)
    assert values_of(read_text(tmp_path / "a.csv")) == (1, 2)
    assert values_of(read_text(tmp_path / "b.csv")) == (1, 2)
    with pytest.raises(EditRefused, match="Line 1"):
        values_of(read_text(tmp_path / "c.csv"))
    (tmp_path / "d.csv").write_bytes(b"\x00\x01\x02")
    for name in ("d.csv", "none.csv"):
        with pytest.raises(EditRefused, match=name):
            read_text(tmp_path / name)


def test_how_long_each_value_lasts_is_guessed_from_their_number():
    hours = {8760: 1, 17520: 0.5, 35040: 0.25, 8784: 1, 24: 1, 96: 0.25, 365: 24, 12: 730, 7: 1}
    assert {count: usual_hours(count) for count in hours} == hours
    assert all(count * usual_hours(count) <= 8784 for count in (1, 12, 365, 8784, 105_120))


@pytest.mark.parametrize("name", SHAPES)
def test_shapes_have_the_load_factor_they_say_and_no_source(name):
    made = shape(name)
    assert len(made.percent) == 8760
    assert made.load_factor == pytest.approx(SHAPES[name].load_factor, abs=5e-5)
    assert made.highest == 100
    assert min(made.percent) >= 0
    assert made.source.startswith(INVENTED)


@pytest.mark.parametrize("factor", [0.15, 0.30, 0.45])
def test_a_shape_is_brought_to_a_load_factor_and_keeps_its_order(factor):
    plain, made = shape("household"), shape("household", factor)
    assert made.load_factor == pytest.approx(factor, abs=1e-5)
    assert made.highest == 100
    pairs = sorted(zip(plain.percent, made.percent, strict=True))
    assert all(a[1] <= b[1] + 0.011 for a, b in zip(pairs, pairs[1:], strict=False))


def test_the_sun_does_not_shine_at_night_and_a_workshop_rests_on_sunday():
    sun, shop = shape("daylight").percent, shape("workshop").percent
    assert all(sun[24 * day] == 0 for day in range(365))
    assert max(range(8760), key=sun.__getitem__) // 24 in range(150, 200)
    assert max(shop[24 * 6 : 24 * 7]) < 10 < max(shop[:24])


def test_a_load_factor_that_cannot_be_is_refused():
    for bad in (0.0, 1.0, 1.5, math.nan, -1):
        with pytest.raises(EditRefused, match="Load factor is"):
            to_load_factor(DAY, bad)
    with pytest.raises(EditRefused, match="allowed for this profile is 1, as its values"):
        shape("flat", 0.3)
    with pytest.raises(EditRefused, match="more than 0.25 and less than 0.5"):
        to_load_factor(Profile(percent=(0.0, 50.0, 50.0 - 1e-9, 0.0)), 0.6)
    assert to_load_factor(DAY, DAY.load_factor).percent == pytest.approx(DAY.percent)


def test_who_follows_what():
    drawing = edits.set_year(yard(), load_profile="day")
    drawing = edits.follow(drawing, ("M1",), "constant")
    names = {id: followed(drawing, element) for id, element in drawing.elements.items()}
    assert names == {"B1": "", "S1": "", "L1": "day", "M1": "", "G1": "", "K1": ""}
    drawing = edits.set_year(drawing, generation_profile="day", load_profile="")
    drawing = edits.follow(drawing, ("L1", "S1"), "day")
    assert [i for i, e in drawing.elements.items() if followed(drawing, e)] == ["S1", "L1", "G1"]
    assert in_use(drawing) == {"day": DAY}
    assert in_use(yard()) == {}


def test_renaming_goes_on_being_followed_and_what_is_followed_cannot_go():
    drawing = edits.set_year(edits.follow(yard(), ("L1", "S1"), "day"), load_profile="day")
    drawing = edits.rename_profile(drawing, "day", "night")
    assert list(drawing.profiles) == ["night"]
    assert drawing.elements["L1"].profile == drawing.year.load_profile == "night"
    with pytest.raises(
        EditRefused, match=r"\"night\" is followed by S1 \(supply\), House, L1 \(load\), the dr"
    ):
        edits.remove_profile(drawing, "night")
    free = edits.set_year(edits.follow(drawing, ("L1", "S1"), ""), load_profile="")
    assert edits.remove_profile(free, "night").profiles == {}


@pytest.mark.parametrize(
    ("change", "sentence"),
    [
        (
            lambda d: edits.follow(d, ("L1",), "nix"),
            'House, L1 .load.: Profile is "nix", allowed is blank, const',
        ),
        (lambda d: edits.put_profile(d, "constant", DAY), "allowed is another name"),
        (lambda d: edits.put_profile(d, " x", DAY), "without spaces around it"),
        (lambda d: edits.put_profile(d, "a\nb", DAY), "one line of text"),
        (lambda d: edits.put_profile(d, "x" * 61, DAY), "61 characters"),
        (lambda d: edits.put_profile(d, "x", Profile(percent=())), "has 0 values"),
        (lambda d: edits.put_profile(d, "x", Profile(percent=(math.nan,))), "value 1 is not a number"),
        (
            lambda d: edits.put_profile(d, "x", Profile(percent=(5.0, -1.0))),
            "value 2 is -1 %, allowed is from 0",
        ),
        (
            lambda d: edits.put_profile(d, "x", Profile(percent=(5.0,) * 9000)),
            "9000 h, allowed is at most a year",
        ),
        (lambda d: edits.put_profile(d, "x", Profile(hours=0.01)), "Each value lasts is 0.01 h"),
        (lambda d: edits.rename_profile(d, "nix", "x"), 'no profile "nix"'),
        (lambda d: edits.rename_profile(edits.put_profile(d, "x", DAY), "x", "day"), "exists already"),
        (lambda d: edits.set_year(d, load_profile="nix"), 'Year: Loads follow is "nix", allowed is day'),
        (lambda d: edits.set_year(d, price_per_kwh=-1.0), "Price of losses is -1 per kWh"),
        (lambda d: edits.set_year(d, kept={}), 'no field "kept"'),
    ],
)
def test_what_cannot_be_is_refused_in_one_sentence(change, sentence):
    with pytest.raises(EditRefused, match=sentence):
        change(yard())


def test_the_volts_of_a_supply_are_never_nought():
    dark = Profile(percent=(100.0, 0.0))
    drawing = edits.put_profile(edits.follow(yard(), ("S1",), "day"), "dark", dark)
    for change in (
        lambda: edits.follow(drawing, ("S1",), "dark"),
        lambda: edits.put_profile(drawing, "day", dark),
    ):
        with pytest.raises(EditRefused, match=r"S1 \(supply\).* has 0 % as value 2, allowed for the volts"):
            change()


def test_nothing_is_lost_through_the_file():
    drawing = edits.put_profile(yard(), "fine", Profile(percent=(0.1 + 0.2, 1 / 3, 100.0), hours=0.5))
    drawing = edits.set_year(edits.follow(drawing, ("L1", "S1"), "day"), price_per_kwh=0.1, money="€")
    text = encode(drawing)
    assert decode(text) == drawing
    raw = json.loads(text)
    assert list(raw["profiles"][0]) == ["name", "hours", "source", "percent"]
    raw["profiles"][0]["colour"] = "red"
    raw["year"]["mood"] = 1
    kept = decode(json.dumps(raw).encode())
    assert decode(encode(kept)) == kept
    assert json.loads(encode(kept))["profiles"][0]["colour"] == "red"
    assert json.loads(encode(kept))["year"]["mood"] == 1
    assert b"profile" not in encode(Drawing())


def test_a_day_of_hours_is_one_line_of_the_file():
    year = Profile(percent=tuple(float(h % 24) for h in range(8760)))
    lines = encode(edits.put_profile(Drawing(), "year", year)).decode().splitlines()
    assert sum(line.startswith("0, 1, 2, 3, 4, 5, 6, 7, 8, 9, 10") for line in lines) == 365


@pytest.mark.parametrize(
    ("damage", "sentence"),
    [
        (lambda r: r["profiles"][0].pop("name"), "Profile 1: name is missing"),
        (lambda r: r["profiles"].append(dict(r["profiles"][0])), "given to two profiles"),
        (lambda r: r["profiles"][0].update(percent="x"), 'Profile "day": percent is "x", allowed is a list'),
        (lambda r: r["profiles"][0].update(percent=[1, "x"]), 'Profile "day": percent'),
        (lambda r: r["profiles"][0].update(percent=[1, -3]), 'Profile "day": value 2 is -3 %'),
        (lambda r: r["profiles"][0].update(hours=0), 'Profile "day": Each value lasts is 0 h'),
        (lambda r: r["profiles"][0].update(name="constant"), "allowed is another name"),
        (lambda r: r["elements"][2].update(profile="nix"), 'House, L1 .load.: Profile is "nix"'),
        (lambda r: r.update(year={"load_profile": "nix"}), 'Year: Loads follow is "nix"'),
        (lambda r: r.update(year={"price_per_kwh": "dear"}), "Year: Price of losses"),
        (lambda r: r.update(profiles={}), '"profiles" is {}, allowed is a list'),
    ],
)
def test_a_damaged_file_gives_one_sentence(damage, sentence):
    raw = json.loads(encode(yard()))
    damage(raw)
    with pytest.raises(FileError, match=sentence):
        decode(json.dumps(raw).encode())


def test_a_pasted_load_brings_its_profile():
    clip = decode_clip(encode_clip(edits.copy(edits.follow(yard(), ("L1",), "day"), ("L1",))))
    assert clip.profiles == {"day": DAY}
    empty = edits.paste(Drawing(), clip, 0, 0)
    assert empty.profiles == {"day": DAY}
    other = edits.put_profile(Drawing(), "day", Profile(percent=(10.0,)))
    pasted = edits.paste(other, clip, 0, 0)
    assert list(pasted.profiles) == ["day", "day 2"]
    assert next(e for e in pasted.elements.values() if isinstance(e, Load)).profile == "day 2"
    again = edits.paste(edits.follow(yard(), ("L1",), "day"), clip, 5, 5)
    assert list(again.profiles) == ["day"]


def test_a_part_kept_on_the_shelf_follows_nothing():
    drawing = edits.keep_part(edits.follow(yard(), ("L1",), "day"), "L1", "My load")
    assert next(iter(drawing.parts.values())).element.profile == ""
    assert drawing.elements["L1"].profile == "day"


def test_an_edit_of_a_profile_is_a_difference():
    drawing = yard()
    assert edits.diff(drawing, edits.put_profile(drawing, "day", replace(DAY, hours=0.5))).rest
    assert edits.diff(drawing, edits.set_year(drawing, money="x")).rest
    assert drawing.year == Year()
