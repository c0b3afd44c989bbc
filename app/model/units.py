"""Quantities as people type them, in whatever unit, and as the other habit of units shows them."""

import math
import re
from fractions import Fraction
from functools import cache
from typing import Any

from app.model.figures import plain, typed
from app.model.numerals import UnitError, leading_number, quoted, tidy

__all__ = ["UnitError", "parse", "parse_ratio", "show"]

METRIC, NORTH_AMERICAN = "metric", "north american"
Scale = dict[str, Fraction]


def _scale(words: str) -> Scale:
    """`m 1; km 1000; ft foot feet 0.3048` as a table."""
    table = {}
    for entry in words.split(";"):
        *names, factor = entry.split()
        table.update({name: Fraction(factor) for name in names})
    return table


LENGTH = _scale(
    "m metre metres meter meters 1; km 1000; cm 0.01; mm 0.001; ft ft. foot feet ' 0.3048; kft 304.8;"
    'in inch inches " 0.0254; yd yard yards 0.9144; mi mile miles 1609.344'
)
AREA = _scale("mm² mm2 mm^2 sqmm sq.mm 1; cm² cm2 cm^2 100; m² m2 m^2 1000000; in² in2 in^2 sqin 645.16")
CIRCULAR = math.pi / 4 * 25.4**2 / 1000  # mm² in one kcmil: a thousand circles of 0.001 inch across
POWER_HP = "746"  # the electric horsepower, W; NIST SP 811, B.8
TABLES: dict[str, tuple[str, Scale]] = {
    "m": ("a length", LENGTH),
    "mm²": ("a cross-section", AREA),
    "V": ("a voltage", _scale("V volt volts 1; kV 1000; mV 0.001; MV 1000000")),
    "A": ("a current", _scale("A amp amps 1; kA 1000; mA 0.001; MA 1000000")),
    "kA": ("a current", _scale("kA 1; A 0.001; MA 1000")),
    "kVA": ("an apparent power", _scale("kVA 1; VA 0.001; MVA 1000; GVA 1000000")),
    "MVA": ("an apparent power", _scale("MVA 1; kVA 0.001; VA 0.000001; GVA 1000")),
    "kW": ("an active power", _scale(f"kW 1; W 0.001; MW 1000; mW 0.000001; hp {POWER_HP}/1000")),
    "W": ("an active power", _scale(f"W watt watts 1; kW 1000; MW 1000000; mW 0.001; hp {POWER_HP}")),
    "kvar": ("a reactive power", _scale("kvar 1; var 0.001; Mvar 1000; mvar 0.000001")),
    "%": ("a percentage", _scale("% percent pct 1; ‰ 0.1; pu p.u. 100")),
    "": ("a plain number", _scale("% percent pct 0.01; pu p.u. 1")),
    "°": ("an angle", _scale("° deg degree degrees 1")),
    "Hz": ("a frequency", _scale("Hz 1; kHz 1000; mHz 0.001; MHz 1000000")),
    "runs": ("a number of runs", _scale("runs run cables cable lines line × x 1")),
    "units": ("a number of units", _scale("units unit × x 1")),
    "notch": ("a notch", _scale("notch notches 1")),
    "°C": ("a temperature", _scale("°C degC C 1")),
}
TABLES["mm"] = ("a length", {word: factor * 1000 for word, factor in LENGTH.items()})
TABLES["notches"] = TABLES["notch"]
TABLES["% of nominal"] = TABLES["% of rated"] = TABLES["%"]
TABLES["× rated"] = ("a multiple of the rated current", _scale("× x times 1; % 0.01"))
OHM = _scale("Ω ohm ohms 1; mΩ mohm 0.001; kΩ kohm 1000; µΩ uΩ uohm 0.000001; MΩ Mohm 1000000")
TABLES["Ω"] = ("a resistance", OHM)
TABLES["Ω·m"] = (
    "a resistivity",
    _scale("Ω·m Ωm ohm·m ohm-m ohmm Ω-m 1; kΩ·m kΩm 1000; Ω·cm Ωcm ohm·cm 0.01"),
)
FARAD = _scale("µF uF 1; nF 0.001; pF 0.000001; mF 1000; F 1000000; MF 1000000000000")
PER_LENGTH = {
    "Ω/km": ("a resistance or reactance per length", OHM),
    "µF/km": ("a capacitance per length", FARAD),
}
PINT_UNITS = {
    "°C": "degC", "°": "degree", "% of nominal": "percent", "% of rated": "percent",
    "× rated": "dimensionless", "%": "percent", "mm²": "mm**2", "Ω/km": "ohm/km",
    "µF/km": "microfarad/km", "": "dimensionless",
}  # fmt: skip


def parse(text: str, unit: str) -> float:
    """What was typed, in `unit`; a bare number is in `unit` already. Exact but for the last rounding."""
    words = tidy(text)
    if not words:
        raise UnitError(f"Nothing was typed, allowed is {_allowed(unit)}.")
    if unit == "mm²" and (area := _gauge(words)) is not None:
        return area
    if unit == "V" and (wye := re.fullmatch(r"([\d.]+) ?[Yy] ?/ ?[\d.]+ ?(k?V)?", words)):
        words = f"{wye[1]} {wye[2] or ''}".strip()
    number, rest = leading_number(words)
    if not rest:
        return _finite(number, text)
    if unit == "m" and (both := _feet_and_inches(number, rest)) is not None:
        return _finite(both, text)
    if unit == "°C" and rest.casefold().lstrip("°") in ("f", "degf", "k"):
        return _temperature(number, rest)
    factor = _factor(rest, unit, text)
    if factor is not None:
        return _finite(number * factor, text)
    return _by_pint(number, rest, unit, text)


def _finite(value: Fraction, text: str) -> float:
    try:
        return float(value)
    except OverflowError:
        raise UnitError(f"{quoted(text)} is too large a number.") from None


def _gauge(words: str) -> float | None:
    """mm² of `4/0 AWG` (ASTM B258: diameter 0.005 in × 92^((36−n)/39)), `250 kcmil`, `500 MCM`."""
    awg = re.fullmatch(r"(?:awg|#)?\s*(?:(\d{1,2})/0|(0{1,4})|#?(\d{1,2}))\s*(?:awg)?", words, re.IGNORECASE)
    if awg and (awg[1] or awg[2] or re.search("awg|#", words, re.IGNORECASE)):
        number = 1 - int(awg[1]) if awg[1] else 1 - len(awg[2]) if awg[2] else int(awg[3])
        if number == 1 and not awg[3] or not -3 <= number <= 40:
            raise UnitError(f"{quoted(words)} is no wire gauge, allowed is 40 AWG to 4/0 AWG.")
        return math.pi / 4 * (0.127 * 92 ** ((36 - number) / 39)) ** 2
    mils = re.fullmatch(r"(.*?)\s*(kcmil|mcm|cmil)", words, re.IGNORECASE)
    if mils is None:
        return None
    number_of, rest = leading_number(mils[1])
    if rest:
        return None
    return float(number_of) * CIRCULAR * (0.001 if mils[2].casefold() == "cmil" else 1)


def _feet_and_inches(feet: Fraction, rest: str) -> Fraction | None:
    found = re.fullmatch(
        r"""(?:'|ft\.?|feet|foot)\s*(\d.*?)\s*("|''|in\.?|inch|inches)""", rest, re.IGNORECASE
    )
    if found is None:
        return LENGTH["in"] * feet if rest == "''" else None
    inches, left = leading_number(found[1])
    if left:
        return None
    return feet * LENGTH["ft"] + (inches if feet >= 0 else -inches) * LENGTH["in"]


def _temperature(number: Fraction, rest: str) -> float:
    if rest.casefold() == "k":
        return float(number - Fraction("273.15"))
    return float((number - 32) * 5 / 9)


def _factor(rest: str, unit: str, text: str) -> Fraction | None:
    if unit in TABLES:
        return _look_up(rest, TABLES[unit][1], text)
    if unit not in PER_LENGTH or "/" not in rest:
        return None
    top, _, bottom = rest.partition("/")
    above = _look_up(top.strip(), PER_LENGTH[unit][1], text)
    count, word = Fraction(1), bottom.strip()
    if word[:1].isdigit():
        count, word = leading_number(word)
    below = _look_up(word, LENGTH, text)
    if above is None or below is None or count <= 0:
        return None
    return above / (below * count / 1000)


def _look_up(word: str, scale: Scale, text: str) -> Fraction | None:
    if word in scale:
        return scale[word]
    alike = {name: f for name, f in scale.items() if name.casefold() == word.casefold()}
    if len(set(alike.values())) > 1:
        raise UnitError(f"{quoted(text)} can be read in {' or '.join(alike)}, write one of these.")
    return next(iter(alike.values()), None)


def _by_pint(number: Fraction, rest: str, unit: str, text: str) -> float:
    """Whatever else a person may type; the unit library is loaded here and nowhere before."""
    wrong = UnitError(f"{quoted(text)} is not {_kind(unit)}, allowed is {_allowed(unit)}.")
    if len(rest) > 30 or re.search(r"[^A-Za-z0-9_µΩ°/*^². ·-]", rest) or not re.search("[A-Za-zµΩ°]", rest):
        raise wrong
    if unit in ("kVA", "kvar", "runs", "units", "notch", "notches", "%", "% of nominal", "", "°C", "kW", "W"):
        raise wrong
    try:
        asked = _registry().Quantity(float(number), rest.replace("²", "**2").replace("·", "*"))
        value = float(asked.to(PINT_UNITS.get(unit, unit)).magnitude)
    except Exception as odd:  # the unit library and its tokenizer raise many kinds
        raise wrong from odd
    if not math.isfinite(value):
        raise wrong
    return value


@cache
def _registry() -> Any:
    from pint import UnitRegistry

    return UnitRegistry(cache_folder=None)


def _kind(unit: str) -> str:
    return (TABLES.get(unit) or PER_LENGTH.get(unit) or (f"a quantity in {unit}",))[0]


def _allowed(unit: str) -> str:
    others = {
        "m": "m, km, ft, in, yd or mi", "mm²": "mm², AWG or kcmil", "V": "V or kV", "kVA": "VA, kVA or MVA",
        "kW": "W, kW, MW or hp", "W": "W or kW", "kvar": "var, kvar or Mvar", "A": "A or kA",
        "kA": "A or kA", "Ω": "Ω, mΩ or kΩ", "mm": "mm, cm, in or ft", "Ω·m": "Ω·m or kΩ·m",
        "Ω/km": "Ω/km, mΩ/m, Ω/kft or Ω/mi", "µF/km": "µF/km, nF/km or µF/mi", "°C": "°C, °F or K",
    }.get(unit, unit)  # fmt: skip
    return f"a number with or without its unit ({others})" if others else "a number"


def parse_ratio(text: str) -> tuple[float, float]:
    """The two voltages of `11/0.4 kV`, `11000/400 V`, `11 kV/400 V` or `12470-208Y/120`, in V."""
    words = tidy(text)
    wye = re.fullmatch(r"(.+?)\s*[-/]\s*(\d[\d.]*)\s*[Yy]\s*/\s*\d[\d.]*\s*(k?V)?", words)
    parts = [f"{wye[1]} {wye[3] or ''}", f"{wye[2]} {wye[3] or ''}"] if wye else words.split("/")
    if len(parts) != 2:
        raise UnitError(f"{quoted(text)} is not a ratio of two voltages, such as 11/0.4 kV or 11000/400.")
    (first, one), (second, two) = (leading_number(p.strip()) for p in parts)
    if not one and not two and max(first, second) < 100:
        raise UnitError(f"{quoted(text)} has no unit, write V or kV behind it.")
    last = two or "V"
    return parse(f"{parts[0]} {'' if one else last}", "V"), parse(f"{parts[1]} {'' if two else last}", "V")


AWG_NAMES = {
    n: f"{1 - n}/0" if n < 0 else "1/0" if n == 0 else str(n)
    for n in range(-3, 41)
}  # fmt: skip


def show(value: float, unit: str, habit: str) -> str:
    """A value of ours as either habit writes it: 137.16 m is 450 ft, 107.2 mm² is 4/0 AWG."""
    if habit == NORTH_AMERICAN and math.isfinite(value):
        if unit == "mm²":
            return _gauge_name(value)
        factor, word = _AMERICAN.get(unit, (1.0, unit))
        if unit == "m" and abs(value) >= 1609.344:
            factor, word = 1 / 1609.344, "mi"
        shown = value * factor + (32.0 if unit == "°C" else 0.0)
        return _significant(shown, word)
    return f"{typed(value)} {unit}".strip() if math.isfinite(value) else plain(value, 0, unit)


_AMERICAN = {
    "m": (1 / 0.3048, "ft"),
    "mm": (1 / 25.4, "in"),
    "Ω/km": (0.3048, "Ω/kft"),
    "µF/km": (1.609344, "µF/mi"),
    "°C": (1.8, "°F"),
}


def _gauge_name(area: float) -> str:
    for number, name in AWG_NAMES.items():
        if math.isclose(area, math.pi / 4 * (0.127 * 92 ** ((36 - number) / 39)) ** 2, rel_tol=0.005):
            return f"{name} AWG"
    return _significant(area / CIRCULAR, "kcmil")


def _significant(value: float, word: str) -> str:
    """Four figures, or all of a whole number."""
    if value == 0 or not math.isfinite(value):
        return plain(value, 0, word)
    digits = max(0, 3 - math.floor(math.log10(abs(value))))
    short = plain(value, digits)
    return f"{short.rstrip('0').rstrip('.') if '.' in short else short} {word}".strip()
