"""Where the conductors of an overhead line hang, as people write it: `-1.1 9; 0 9; 1.1 9; 0 7.5`.

A pair a conductor, x across the pole and height above ground; the phases in order and last the neutral.
"""

import re
from functools import lru_cache
from typing import Annotated

from app.model.fields import field, text
from app.model.figures import typed
from app.model.numerals import UnitError, leading_number, quoted, tidy
from app.model.units import parse

Place = tuple[float, float]
FARTHEST_M = 200.0
MOST = 4
FOOT = 0.3048
EXAMPLE = "-1.1 9; 0 9; 1.1 9; 0 7.5"

HungAt = Annotated[
    str,
    text(
        "Hangs at",
        longest=200,
        help=f"x and height in m of A, B, C and last the neutral: {EXAMPLE}. Two conductors: a phase and its "
        "neutral. One: back through the earth. With ft behind them, feet. Blank: reactance as stated.",
    ),
]
Gmr = (
    Annotated[float, field("GMR", "mm", gt=0, le=200, help="Geometric mean radius of a phase conductor.")]
    | None
)
Diameter = Annotated[float, field("Diameter", "mm", gt=0, le=500, help="Of a phase conductor.")] | None
NeutralGmr = Annotated[float, field("GMR of neutral", "mm", gt=0, le=200)] | None
NeutralDiameter = Annotated[float, field("Neutral diameter", "mm", gt=0, le=500)] | None
Soil = (
    Annotated[float, field("Soil", "Ω·m", ge=1, le=1e5, help="Resistivity, for what returns through earth.")]
    | None
)


@lru_cache(maxsize=4096)
def places(written: str) -> tuple[Place, ...]:
    """Metres across the pole and above ground of each conductor; none where nothing is written.
    Raises UnitError with one sentence."""
    entries = [e.strip() for e in tidy(written).split(";")]
    while entries and not entries[-1]:
        entries.pop()
    if len(entries) > MOST:
        raise UnitError(
            f"{quoted(written)} names {len(entries)} conductors, allowed are 1 to {MOST} with a ; between."
        )
    pairs = [_pair(entry) for entry in entries]
    _same_habit(written, [word for pair in pairs for word in pair])
    return tuple(_place(*pair) for pair in pairs)


def in_metres(written: str) -> str:
    """The same in metres, as it stands in the file."""
    return written_of(places(written))


def written_of(where: tuple[Place, ...]) -> str:
    """Places as text, exact to the last bit."""
    return "; ".join(f"{typed(x)} {typed(y)}" for x, y in where)


def in_feet(written: str) -> str:
    """The same in feet to a hundredth, to be read beside it."""
    pairs = (f"{x / FOOT:.2f} {y / FOOT:.2f}" for x, y in places(written))
    return "; ".join(pair.replace(".00", "") for pair in pairs) + " ft"


_NUMBER = re.compile(r"[\d.,+-]")


def _pair(entry: str) -> tuple[str, str]:
    """The two quantities of an entry, each with its unit; a unit behind the height alone counts for both."""
    words: list[str] = []
    for word in entry.split():
        if words and not _NUMBER.match(word) and not _unit_of(words[-1]):
            words[-1] += f" {word}"
        else:
            words.append(word)
    for word in words:
        leading_number(word)
    if len(words) != 2:
        found = f"{len(words)} numbers" if len(words) != 1 else "one number"
        raise UnitError(
            f"{quoted(entry)} is {found} for a conductor, allowed are two, x and height, "
            "with a ; between conductors."
        )
    x, y = words
    unit = _unit_of(y)
    return (f"{x} {unit}" if unit and not _unit_of(x) else x), y


def _unit_of(word: str) -> str:
    return leading_number(word)[1]


def _same_habit(written: str, words: list[str]) -> None:
    """All with a unit or none: `-3.6 30; 0 30 ft` would be metres for one conductor and feet for the next."""
    bare = [w for w in words if not _unit_of(w) and parse(w, "m") != 0]
    if bare and len(bare) < len([w for w in words if parse(w, "m") != 0]):
        raise UnitError(
            f"{quoted(written)} has a unit behind some numbers and none behind {bare[0]}, "
            "allowed is a unit behind every height, or metres without."
        )


def _place(x: str, y: str) -> Place:
    across, height = parse(x, "m"), parse(y, "m")
    if not 0 < height <= FARTHEST_M:
        raise UnitError(
            f"{quoted(f'{x} {y}')} has a height of {typed(height)} m, "
            f"allowed is more than 0 and at most {FARTHEST_M:g} m."
        )
    if not abs(across) <= FARTHEST_M:
        raise UnitError(
            f"{quoted(f'{x} {y}')} lies {typed(across)} m across, "
            f"allowed is from −{FARTHEST_M:g} to {FARTHEST_M:g} m."
        )
    return across, height
