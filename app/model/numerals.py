"""Numbers as people type them: 1,5 and 1.5, 11 000, 3e-4. What could be two numbers is refused."""

import re
from fractions import Fraction

from app.model.figures import MINUS

_SPACES = re.compile("[\N{NO-BREAK SPACE}\N{NARROW NO-BREAK SPACE}\N{THIN SPACE}\N{FIGURE SPACE}\t\r\n ]+")
_NUMBER = re.compile(
    r"[+-]?(?:\d{1,3}(?:[ ']\d{3})+(?:[.,]\d+)?|\d+(?:[.,]\d+)*[.,]?|[.,]\d+)(?:[eE][+-]?\d{1,3})?(?![\d.,])"
)
_LONGEST = 60
_ALIKE = str.maketrans(
    {
        MINUS: "-",
        "\N{EN DASH}": "-",
        "\N{GREEK SMALL LETTER MU}": "µ",
        "\N{OHM SIGN}": "Ω",
        "\N{RIGHT SINGLE QUOTATION MARK}": "'",
        "\N{RIGHT DOUBLE QUOTATION MARK}": '"',
        "\N{PRIME}": "'",
        "\N{DOUBLE PRIME}": '"',
    }
)


class UnitError(ValueError):
    """Why a typed quantity cannot be read, as one sentence."""


def tidy(text: str) -> str:
    """One kind of space, one kind of minus, one micro sign, one ohm sign."""
    return _SPACES.sub(" ", text).strip().translate(_ALIKE)


def leading_number(text: str) -> tuple[Fraction, str]:
    """The number that tidy text begins with, exactly, and the rest of the text."""
    found = _NUMBER.match(text)
    if found is None or len(found[0]) > _LONGEST:
        raise UnitError(f"{quoted(text)} does not begin with a number.")
    return exact(found[0]), text[found.end() :].strip()


def exact(written: str) -> Fraction:
    """The value of a written number, without rounding."""
    body = re.sub("[ ']", "", written)
    mantissa, mark, power = body.lower().partition("e")
    points, commas = mantissa.count("."), mantissa.count(",")
    if points and commas:
        last = max(mantissa.rfind("."), mantissa.rfind(","))
        _groups_of_three(mantissa[:last], "," if mantissa[last] == "." else ".", written)
        mantissa = mantissa[:last].replace(",", "").replace(".", "") + "." + mantissa[last + 1 :]
    elif points > 1 or commas > 1:
        _groups_of_three(mantissa, "." if points else ",", written)
        mantissa = mantissa.replace(".", "").replace(",", "")
    elif commas:
        _refuse_two_readings(mantissa, written)
        mantissa = mantissa.replace(",", ".")
    return Fraction(mantissa + mark + power)


def _groups_of_three(whole: str, mark: str, written: str) -> None:
    if not re.fullmatch(rf"[+-]?\d{{1,3}}(?:{re.escape(mark)}\d{{3}})+", whole):
        raise UnitError(f"{quoted(written)} is not a number.")


def _refuse_two_readings(mantissa: str, written: str) -> None:
    if re.fullmatch(r"[+-]?[1-9]\d{0,2},\d{3}", mantissa):
        small, large = mantissa.replace(",", "."), mantissa.replace(",", "")
        raise UnitError(f"{quoted(written)} can be read as {small} or {large}, write one of these.")


def quoted(text: str) -> str:
    """What was typed, in quotes and not too long."""
    short = "".join(c if c.isprintable() else "\N{REPLACEMENT CHARACTER}" for c in text[:41])
    return f'"{short[:40]}…"' if len(short) > 40 else f'"{short}"'
