"""What a case states of single elements: kept in the file, clean after every edit, refused with a reason."""

import json

import pytest
from msgspec.structs import replace

from app.model import edits
from app.model.by_case import percent_of, share_of
from app.model.case_words import typed_words
from app.model.drawing import Case, Drawing, Own
from app.model.edits import EditRefused
from app.model.file import FileError, decode, encode
from app.model.kinds import Busbar, Cable, Capacitor, Load, Motor, Supply
from app.model.parts import decode_clip, encode_clip

YARD = Drawing(
    cases=(Case(name="Peak"), Case(name="Night", load_percent=10.0)),
    elements={
        "B1": Busbar(),
        "B2": Busbar(x=10.0),
        "S1": Supply(node="B1"),
        "C1": Cable(start="B1", end="B2"),
        "L1": Load(node="B2", demand_kva=80.0, name="House"),
        "M1": Motor(node="B2"),
        "K1": Capacitor(node="B2"),
    },
)


def night(drawing):
    return drawing.cases[1].own


def test_it_comes_back_from_the_file_with_keys_of_later_versions_and_stays_out_where_nothing_is_said():
    told = edits.set_own(YARD, 1, "L1", percent=share_of(5, 80), power_factor=0.98)
    assert night(decode(encode(told))) == {"L1": Own(percent=6.25, power_factor=0.98)}
    assert b'"own": {"L1": {"percent": 6.25, "power_factor": 0.98}}' in encode(told)
    assert b'"own"' not in encode(YARD)
    raw = json.loads(encode(told))
    raw["cases"][1]["own"]["L1"]["mood"] = "calm"
    later = decode(json.dumps(raw).encode())
    assert night(later)["L1"].kept == {"mood": "calm"}
    assert b'"mood": "calm"' in encode(later)


@pytest.mark.parametrize(
    ("own", "words"),
    [
        ({"L9": {}}, 'own is of "L9", which does not exist'),
        ({"C1": {"percent": 5}}, "C1 (cable): has no share of its own in a case, allowed is a supply, load"),
        (
            {"L1": {"percent": -5}},
            "Case 2, L1: Share is -5 %, allowed is a number, at least 0 and at most 1000",
        ),
        ({"L1": {"percent": 5, "demand_kva": 5}}, "are more than one given, allowed is one of them"),
        ({"K1": {"demand_kva": 9}}, "K1 (capacitor): has no demand of its own in a case, allowed is a load"),
        ({"L1": {"demand_kw": 5, "power_factor": 0}}, "Power factor is 0 with a demand of 5 kW"),
        ({"K1": {"power_factor": 0.9}}, "K1 (capacitor): has no power factor of its own in a case"),
        ({"S1": {"percent": 0}}, "S1 (supply): Share is 0 %, allowed is a number, more than 0"),
        ([], "Case 2: own is [], allowed is an object with ids as keys"),
        ({"L1": 7}, "Case 2, L1 is 7, allowed is an object"),
    ],
)
def test_a_file_that_says_what_cannot_be_is_refused_in_one_sentence(own, words):
    raw = json.loads(encode(YARD))
    raw["cases"][1]["own"] = own
    with pytest.raises(FileError) as refused:
        decode(json.dumps(raw).encode())
    assert words in str(refused.value)


def test_setting_it_to_nothing_takes_it_away_and_what_cannot_be_is_refused():
    told = edits.set_own(YARD, 1, "L1", percent=6.25)
    assert edits.set_own(told, 1, "L1", percent=None) == YARD
    with pytest.raises(EditRefused, match=r"C1 \(cable\): has no share of its own .* in case Night\."):
        edits.set_own(YARD, 1, "C1", percent=1.0)
    with pytest.raises(EditRefused, match="Case 3 does not exist"):
        edits.set_own(YARD, 2, "L1", percent=1.0)
    with pytest.raises(EditRefused, match="does not exist"):
        edits.set_case(YARD, 1, Case(name="Night", own={"L9": Own(percent=1.0)}))


def test_what_is_removed_is_forgotten_by_the_cases_and_a_case_that_goes_takes_its_own_with_it():
    told = edits.set_own(edits.set_own(YARD, 1, "L1", percent=6.25), 1, "K1", percent=0.0)
    assert set(night(edits.remove(told, ["L1"]))) == {"K1"}
    assert night(edits.remove(told, ["B2"])) == {}
    other = edits.put(told, {"L1": Cable(start="B1", end="B2")})
    assert set(night(other)) == {"K1"}
    assert edits.remove_case(told, 1).cases == YARD.cases[:1]


def test_a_copy_is_in_each_case_what_its_original_was():
    told = edits.set_own(YARD, 1, "L1", percent=6.25, power_factor=0.98)
    clip = edits.copy(told, ["L1", "M1"])
    assert decode_clip(encode_clip(clip)) == clip
    pasted = edits.paste(told, decode_clip(encode_clip(clip)), 20, 0)
    assert night(pasted)["L2"] == night(told)["L1"]
    assert set(night(pasted)) == {"L1", "L2"}
    elsewhere = replace(YARD, cases=(Case(name="Peak"), Case(name="Feast")))
    assert all(not case.own for case in edits.paste(elsewhere, clip, 20, 0).cases)


def test_the_elements_that_a_case_states_anew_count_as_touched():
    told = edits.set_own(YARD, 1, "L1", percent=6.25)
    change = edits.diff(YARD, told)
    assert change.rest
    assert change.parameter == {"L1"}
    assert edits.diff(YARD, edits.set_case(YARD, 1, load_percent=20.0)).parameter == frozenset()


@pytest.mark.parametrize(("part", "whole"), [(1, 12), (5, 80), (4, 140), (3, 14), (0.1, 0.3), (7, 9.9)])
def test_kva_typed_in_a_case_come_out_as_they_were_typed(part, whole):
    assert whole * share_of(part, whole) / 100 == pytest.approx(part, rel=2e-16)


@pytest.mark.parametrize(
    ("id", "text", "own", "reads"),
    [
        ("L1", "5 kVA", Own(demand_kva=5.0), "5 kVA"),
        ("L1", " 5 ", Own(demand_kva=5.0), "5 kVA"),
        ("L1", "5 kVA at 0.98", Own(demand_kva=5.0, power_factor=0.98), "5 kVA at 0.98"),
        ("L1", "at 0.9", Own(power_factor=0.9), "at 0.9"),
        ("L1", "7.6 kW", Own(demand_kw=7.6), "7.6 kW"),
        ("L1", "4 kW at 0.5", Own(demand_kw=4.0, power_factor=0.5), "4 kW at 0.5"),
        ("L1", "12.5 %", Own(percent=12.5), "12.5 %"),
        ("L1", "off", Own(percent=0.0), "off"),
        ("M1", "off", Own(percent=0.0), "off"),
        ("M1", "on", Own(percent=100.0), "11 kW"),
        ("K1", "off", Own(percent=0.0), "off"),
        ("K1", "5 kvar", Own(percent=50.0), "5 kvar"),
        ("S1", "410 V", Own(percent=102.5), "410 V"),
        ("S1", "97 %", Own(percent=97.0), "388 V"),
    ],
)
def test_what_is_typed_for_one_case_reads_back(id, text, own, reads):
    told = edits.set_own_text(YARD, 1, id, text)
    assert night(told) == {id: own}
    assert typed_words(told.cases[1], id, told.elements[id]) == reads
    assert edits.set_own_text(told, 1, id, reads) == told
    assert edits.set_own_text(told, 1, id, "") == YARD


def test_a_demand_typed_for_one_case_stays_when_the_stated_one_changes_and_a_share_follows_it():
    told = edits.set_own_text(edits.set_own_text(YARD, 1, "L1", "5 kVA"), 0, "L1", "50 %")
    told = edits.change(told, "L1", demand_kva=100.0)
    words = [typed_words(case, "L1", told.elements["L1"]) for case in told.cases]
    assert words == ["50 %", "5 kVA"]
    assert [percent_of(case, "L1", told.elements["L1"]) for case in told.cases] == [50.0, 5.0]
    in_kw = edits.change(told, "L1", demand_kw=10.0, power_factor=0.8)
    assert typed_words(in_kw.cases[1], "L1", in_kw.elements["L1"]) == "5 kVA"
    assert percent_of(in_kw.cases[1], "L1", in_kw.elements["L1"]) == 40.0
    assert edits.set_own_text(told, 1, "L1", "10 %").cases[1].own == {"L1": Own(percent=10.0)}


@pytest.mark.parametrize(
    ("id", "text", "words"),
    [
        ("L1", "lots", r'House, L1 \(load\), in case Night: "lots" does not begin with a number'),
        ("L1", "5 V", "in case Night: .* is not a"),
        ("L1", "5 at 2", "Power factor is 2, allowed is a number, at least 0 and at most 1, in case Night"),
        ("L1", "-5", "Demand is -5 kVA, allowed is a number, at least 0"),
        ("S1", "off", 'in case Night: "off" does not begin with a number'),
        ("C1", "5", "has no share of its own"),
    ],
)
def test_what_cannot_be_read_for_one_case_is_refused(id, text, words):
    with pytest.raises(EditRefused, match=words):
        edits.set_own_text(YARD, 1, id, text)
