"""A profile from pasted text or a file: one value a line, a row of values, or a column of a table."""

import csv
import re
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from app.model.checks import EditRefused, shown
from app.model.figures import typed
from app.model.profiles import MOST_PERCENT, MOST_VALUES

LARGEST = 16 * 1024 * 1024
_NUMBER = re.compile(r"[+\-−]?(\d+(\.\d*)?|\.\d+)([eE][+\-]?\d{1,3})?")
_SPACES = str.maketrans("", "", "\u00a0\u202f\u2009'")
_QUOTED = re.compile(r'"([+\-−]?\d+),(\d+)"')
_THOUSANDS = re.compile(r"(\d{1,3})((?: \d{3})+[.,]\d+)")
_NOTHING = {"nan", "inf", "-inf", "infinity", "null", "none", "n/a", "#n/a", "-", ""}
_COUNTED = 3  # lines from which a first number that counts up is taken for a number of the line


@dataclass(frozen=True, slots=True)
class Line:
    """One line that is not blank: its number in the text and its fields."""

    number: int
    fields: tuple[str, ...]


def values_of(text: str, *, column: int = 0, measured: bool = False) -> tuple[float, ...]:
    """The values in a text, in %; `measured` ones are in any unit and their highest becomes 100 %.

    Fields are parted by semicolons or tabs, else by commas or spaces; a decimal comma is understood, and so
    are a line of heads and columns of dates. `column` picks one by its number from 1.
    """
    lines = _table(text)
    if column:
        lines = [_picked(line, column) for line in lines]
    lines = _without_head(lines)
    if not lines:
        raise EditRefused("There are no values, allowed is at least one number.")
    lines = _one_column(lines)
    values = [(line, _number(line, field)) for line in lines for field in line.fields]
    if len(values) > MOST_VALUES:
        raise EditRefused(f"There are {len(values)} values, allowed are at most {MOST_VALUES}.")
    for line, value in values:
        if value < 0 or (value > MOST_PERCENT and not measured):
            most = "at least 0" if measured else f"from 0 to {MOST_PERCENT:g} %"
            raise EditRefused(f"Line {line.number}: {typed(value)} is not allowed, allowed is {most}.")
    return _scaled([value for _, value in values]) if measured else tuple(value for _, value in values)


def read_text(path: str | Path) -> str:
    """The text of a file of values; a refusal where it is none."""
    path = Path(path)
    try:
        if path.stat().st_size > LARGEST:
            raise EditRefused(f"{path.name} is larger than {LARGEST >> 20} MiB, allowed is a smaller file.")
        data = path.read_bytes()
    except OSError as error:
        raise EditRefused(f"{path.name} cannot be read: {error.strerror or error}.") from None
    for encoding in ("utf-8-sig", "utf-16" if data[:2] in (b"\xff\xfe", b"\xfe\xff") else "cp1252"):
        try:
            text = data.decode(encoding)
        except UnicodeDecodeError:
            continue
        if "\x00" not in text:
            return text
    raise EditRefused(f"{path.name} is no text, allowed is a file of numbers.")


def _scaled(values: Sequence[float]) -> tuple[float, ...]:
    highest = max(values)
    if not highest:
        raise EditRefused("The highest value is 0, allowed is a log with a peak.")
    return tuple(100 * value / highest for value in values)


def _table(text: str) -> list[Line]:
    """Lines and fields. One separator holds for the whole text, so that a decimal comma is told from one."""
    written = [
        (number, _QUOTED.sub(r"\1.\2", line.strip()))
        for number, line in enumerate(text.lstrip("\ufeff").splitlines(), 1)
        if line.strip()
    ]
    mark = next((m for m in (";", "\t") if any(m in line for _, line in written)), None)
    if mark is None:
        mark = _comma(written)
    lines = [Line(number, _fields(line, mark)) for number, line in written]
    if mark is None:
        _even(lines)
    return lines


def _even(lines: Sequence[Line]) -> None:
    """Refuse lines of one and of several numbers parted by spaces: were they thousands?"""
    rows = [line for line in lines if any(map(_reads, line.fields))]
    for line in rows[1:]:
        if len(line.fields) != len(rows[0].fields):
            raise EditRefused(
                f"Line {line.number}: numbers parted by spaces are {len(line.fields)} here and "
                f"{len(rows[0].fields)} in line {rows[0].number}, allowed is as many in every line, "
                "without spaces inside a number."
            )


def _comma(written: Sequence[tuple[int, str]]) -> str | None:
    """A comma where it parts fields; None where it is a decimal sign or there is none."""
    with_comma = [(number, line) for number, line in written if "," in line]
    if not with_comma:
        return None
    decimals = [re.fullmatch(r"([+\-−]?\d+),(\d+)\s*%?", line) for _, line in with_comma]
    if not all(decimals):
        _no_points_of_thousands(with_comma)
        spaced = [[f for f in line.split() if f] for _, line in with_comma]
        if all(re.fullmatch(r"[+\-−]?\d+,\d+%?", f) for row in spaced for f in row if "," in f):
            if any(len(row) > 1 for row in spaced) and not any("." in line for _, line in written):
                return None  # 0,5 0,7 0,9
        return ","
    firsts = [int(m[1].replace("−", "-")) for m in decimals if m]
    steps = {b - a for a, b in zip(firsts, firsts[1:], strict=False)}
    if len(firsts) >= _COUNTED and steps == {1}:
        number, line = with_comma[0]
        raise EditRefused(
            f"Line {number}: {shown(line)} may be one number or two; "
            "allowed is a semicolon between columns, or a point as decimal sign."
        )
    return None


def _no_points_of_thousands(written: Sequence[tuple[int, str]]) -> None:
    """Refuse 1.234,5 where every line may be one number: it would be read as two."""
    if all(re.fullmatch(r"[+\-−]?(\d+|[1-9]\d{0,2}(\.\d{3})+),\d+\s*%?", line) for _, line in written):
        number, line = next((n, line) for n, line in written if "." in line)
        raise EditRefused(
            f"Line {number}: {shown(line)} may be one number or two; "
            "allowed is a number without a sign between thousands, or a semicolon between columns."
        )


def _fields(line: str, mark: str | None) -> tuple[str, ...]:
    if mark == ",":
        parts = next(csv.reader([line]), [])
    else:
        parts = line.split(mark) if mark else _THOUSANDS.sub(_joined, line).split()
    if mark is None and not all(_reads(part) for part in parts):
        parts = [line]
    found = [part.strip().strip('"').strip() for part in parts]
    while mark and len(found) > 1 and not found[-1]:
        found.pop()  # a separator at the end of a line
    return tuple(found)


def _joined(found: re.Match[str]) -> str:
    return found[0].replace(" ", "")


def _picked(line: Line, column: int) -> Line:
    if column > len(line.fields):
        raise EditRefused(
            f"Line {line.number}: there is no column {column}, allowed is 1 to {len(line.fields)}."
        )
    return Line(line.number, (line.fields[column - 1],))


def _without_head(lines: list[Line]) -> list[Line]:
    """Without the first line, where it holds no number but the next one does."""
    if len(lines) < 2 or any(map(_reads, lines[0].fields)) or not any(map(_reads, lines[1].fields)):
        return lines
    words = [field.casefold() for field in lines[0].fields]
    strange = all(w in _NOTHING for w in words) or any(w[:1].isdigit() or w[:1] in "+-" for w in words if w)
    return lines if strange else lines[1:]


def _one_column(lines: list[Line]) -> list[Line]:
    """Without columns that hold dates or words in every line."""
    width = len(lines[0].fields)
    if width == 1 or any(len(line.fields) != width for line in lines):
        return lines
    words = {i for i in range(width) if not any(_reads(line.fields[i]) for line in lines)}
    words -= {i for i in words if len(lines) == 1 and not lines[0].fields[i]}
    left = [i for i in range(width) if i not in words]
    if words and len(left) > 1:
        raise EditRefused(
            f"Line {lines[0].number}: there are {len(left)} columns of numbers, "
            f"allowed is one: choose column {', '.join(str(i + 1) for i in left[:-1])} or {left[-1] + 1}."
        )
    if not words or not left:
        return lines
    return [Line(line.number, tuple(line.fields[i] for i in left)) for line in lines]


def _bare(field: str) -> str:
    bare = field.translate(_SPACES).strip().removesuffix("%").strip().replace("−", "-")
    return bare.replace(",", ".") if bare.count(",") == 1 and "." not in bare else bare


def _reads(field: str) -> bool:
    return _NUMBER.fullmatch(_bare(field)) is not None


def _number(line: Line, field: str) -> float:
    if not _reads(field):
        given = shown(field) if field else "a blank"
        raise EditRefused(f"Line {line.number}: {given} is not a number, allowed is a number such as 62.5.")
    value = float(_bare(field))
    if value in (float("inf"), float("-inf")):
        raise EditRefused(f"Line {line.number}: {shown(field)} is too large, allowed is a finite number.")
    return value
