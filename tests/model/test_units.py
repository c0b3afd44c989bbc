"""What people type, and what they mean."""

import math
import subprocess
import sys

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.model import units
from app.model.units import UnitError, parse, parse_ratio, show


@pytest.mark.parametrize(
    ("text", "unit", "value"),
    [
        ("120 mm²", "mm²", 120.0),
        ("120mm2", "mm²", 120.0),
        ("120", "mm²", 120.0),
        ("1.2 cm²", "mm²", 120.0),
        ("450 ft", "m", 137.16),
        ("450'", "m", 137.16),
        ("450′ 6″", "m", 137.3124),
        ("5 ft 6 in", "m", 1.6764),
        ("-5 ft 6 in", "m", -1.6764),
        ("36 in", "m", 0.9144),
        ("0.14 km", "m", 140.0),
        ("1.15km", "m", 1150.0),
        ("1,15 km", "m", 1150.0),
        ("1.2 miles", "m", 1931.2128),
        ("3 kft", "m", 914.4),
        ("11 kV", "V", 11000.0),
        ("11KV", "V", 11000.0),
        ("0,4 kV", "V", 400.0),
        ("12 470 V", "V", 12470.0),
        ("12\u202f470", "V", 12470.0),
        ("12'470", "V", 12470.0),
        ("12,470.5", "V", 12470.5),
        ("1.234.567,5", "V", 1234567.5),
        ("208Y/120", "V", 208.0),
        ("80kVA", "kVA", 80.0),
        ("0.5 MVA", "kVA", 500.0),
        ("500 VA", "kVA", 0.5),
        ("50 hp", "kW", 37.3),
        ("1.5 MW", "kW", 1500.0),
        ("5kW", "W", 5000.0),
        ("0.75 Mvar", "kvar", 750.0),
        ("0.0003", "", 0.0003),
        ("1,5", "", 1.5),
        (".5", "", 0.5),
        ("5.", "", 5.0),
        ("3e-4", "", 0.0003),
        ("95 %", "", 0.95),
        ("2.5 %", "%", 2.5),
        ("0.97 pu", "% of nominal", 97.0),
        ("97", "% of nominal", 97.0),
        ("0.125 Ω/km", "Ω/km", 0.125),
        ("125 mΩ/km", "Ω/km", 0.125),
        ("0.125 mohm/m", "Ω/km", 0.125),
        ("0.3048 ohm/kft", "Ω/km", 1.0),
        ("0.3048 ohm/1000 ft", "Ω/km", 1.0),
        ("1.609344 ohm/mile", "Ω/km", 1.0),
        ("190 nF/km", "µF/km", 0.19),
        ("0.19 uF/km", "µF/km", 0.19),
        ("0.19 μF/km", "µF/km", 0.19),
        ("140 °F", "°C", 60.0),
        ("140F", "°C", 60.0),
        ("333.15 K", "°C", 60.0),
        ("60 °C", "°C", 60.0),
        ("−2", "notch", -2.0),
        ("−2 notches", "notch", -2.0),
        ("3 runs", "runs", 3.0),
        ("50 Hz", "Hz", 50.0),
        ("16 kA", "A", 16000.0),
        ("30°", "°", 30.0),
    ],
)
def test_quantities_are_read_exactly(text, unit, value):
    assert parse(text, unit) == value


@pytest.mark.parametrize(
    ("text", "mm2"),
    [
        # ASTM B258 gauges; areas as NFPA 70 Chapter 9 Table 8 prints them, to two decimals
        ("4/0 AWG", 107.22), ("4/0", 107.22), ("0000 AWG", 107.22), ("1/0 awg", 53.51), ("2 AWG", 33.63),
        ("#2", 33.63), ("AWG 14", 2.08), ("250 kcmil", 126.68), ("350 MCM", 177.35), ("211600 cmil", 107.22),
    ],
)  # fmt: skip
def test_wire_gauges(text, mm2):
    assert parse(text, "mm²") == pytest.approx(mm2, rel=2e-3)


def test_the_gauge_law_runs_through_its_two_fixed_points():
    assert parse("36 AWG", "mm²") == pytest.approx(math.pi / 4 * 0.127**2, rel=1e-14)
    assert parse("4/0 AWG", "mm²") == pytest.approx(math.pi / 4 * 11.684**2, rel=1e-14)


@pytest.mark.parametrize(
    ("text", "unit", "words"),
    [
        ("450 kg", "m", '"450 kg" is not a length, allowed is a number with or without its unit (m, km'),
        ("80 kW", "kVA", '"80 kW" is not an apparent power'),
        ("3 V", "Ω/km", '"3 V" is not a resistance or reactance per length'),
        ("3 m/s", "m", "is not a length"),
        ("1 hour", "Hz", "is not a frequency"),
        ("abc", "m", '"abc" does not begin with a number'),
        ("nan", "m", "does not begin with a number"),
        ("inf", "m", "does not begin with a number"),
        ("", "m", "Nothing was typed, allowed is a number with"),
        ("  ", "", "Nothing was typed, allowed is a number."),
        ("1,500", "m", '"1,500" can be read as 1.500 or 1500, write one of these'),
        ("1,23,456", "m", "is not a number"),
        ("1.2.3", "m", "is not a number"),
        ("1 mw", "kW", '"1 mw" can be read in MW or mW, write one of these'),
        ("1e400", "m", "is too large a number"),
        ("1e999999999", "m", "is not a length"),
        ("9" * 100, "m", "does not begin with a number"),
        ("5/0 AWG", "mm²", "is no wire gauge, allowed is 40 AWG to 4/0 AWG"),
        ("41 AWG", "mm²", "is no wire gauge"),
        ("1 ((", "m", "is not a length"),
        ("1 __import__('os')", "m", "is not a length"),
        ("1 m**9999999", "m", "is not a length"),
        ("5 m m", "m", "is not a length"),
        ("1 ohm/0 km", "Ω/km", "is not a resistance"),
    ],
)
def test_what_cannot_be_read_gets_one_sentence(text, unit, words):
    with pytest.raises(UnitError) as caught:
        parse(text, unit)
    assert words in str(caught.value)
    assert str(caught.value).endswith(".")


@given(st.text(max_size=12), st.sampled_from(sorted(units.TABLES) + sorted(units.PER_LENGTH)))
def test_any_text_is_read_or_refused(text, unit):
    try:
        value = parse(text, unit)
    except UnitError:
        return
    assert math.isfinite(value)


@given(st.floats(allow_nan=False, allow_infinity=False))
def test_a_written_number_is_read_to_the_last_bit(value):
    assert parse(repr(value), "m") == value


def test_rarer_units_are_read_by_the_unit_library_loaded_only_then():
    code = (
        "import sys; from app.model.units import parse; parse('120 mm²', 'mm²'); parse('450 ft', 'm');"
        "parse('4/0 AWG', 'mm²'); parse('0.1 ohm/kft', 'Ω/km'); assert 'pint' not in sys.modules;"
        "assert abs(parse('2 furlong', 'm') - 402.336) < 0.01; assert 'pint' in sys.modules"
    )
    subprocess.run([sys.executable, "-c", code], check=True)


@pytest.mark.parametrize(
    ("text", "volts"),
    [
        ("11/0.4 kV", (11000.0, 400.0)),
        ("0.4/11 kV", (400.0, 11000.0)),
        ("11/0,433 kV", (11000.0, 433.0)),
        ("11000/400", (11000.0, 400.0)),
        ("11000/400 V", (11000.0, 400.0)),
        ("11 kV / 400 V", (11000.0, 400.0)),
        ("12470-208Y/120", (12470.0, 208.0)),
        ("12.47-0.208Y/0.12 kV", (12470.0, 208.0)),
    ],
)
def test_ratios(text, volts):
    assert parse_ratio(text) == volts


@pytest.mark.parametrize("text", ["11/0.4", "11", "1/2/3 kV", "a/b", "11 kg/400 V", ""])
def test_odd_ratios_are_refused(text):
    with pytest.raises(UnitError, match=r"\.$"):
        parse_ratio(text)


@pytest.mark.parametrize(
    ("value", "unit", "american", "metric"),
    [
        (137.16, "m", "450 ft", "137.16 m"),
        (3218.688, "m", "2 mi", "3218.688 m"),
        (107.2, "mm²", "4/0 AWG", "107.2 mm²"),
        (126.7, "mm²", "250 kcmil", "126.7 mm²"),
        (0.125, "Ω/km", "0.0381 Ω/kft", "0.125 Ω/km"),
        (0.0, "Ω/km", "0 Ω/kft", "0 Ω/km"),
        (60.0, "°C", "140 °F", "60 °C"),
        (400.0, "V", "400 V", "400 V"),
        (0.95, "", "0.95", "0.95"),
        (12000.0, "kVA", "12\u202f000 kVA", "12000 kVA"),
        (math.nan, "m", "–", "–"),
    ],
)
def test_the_other_habit(value, unit, american, metric):
    assert show(value, unit, "north american") == american
    assert show(value, unit, "metric") == metric
