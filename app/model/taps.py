"""Taps and vector groups: what the ladder of a transformer says, in numbers and in words.

A notch above nameplate (+) raises the rated voltage of the tapped winding. On winding 1 that lowers
the voltage of winding 2, on winding 2 it raises it: the words always say which.
"""

import msgspec

from app.model.figures import stated
from app.model.kinds import Transformer
from solver.transformer import GROUP, clock

GROUP_ALLOWED = (
    "winding 1 in capitals, winding 2 in small letters and a clock number, such as Dyn11, YNd1 or Ii0"
)


def factor(t: Transformer, notch: int) -> float:
    """Rated voltage of the tapped winding at a notch over its nameplate."""
    return 1 + notch * t.notch_percent / 100


def notches(t: Transformer) -> range:
    """Every notch of the ladder, lowest first."""
    return range(-t.taps_down, t.taps_up + 1)


def by_hand(element: object) -> bool:
    """True for a transformer with a tap that somebody sets; not where its tap changer steps by itself."""
    return isinstance(element, Transformer) and element.regulates == "no"


def windings(t: Transformer, notch: int) -> tuple[float, float]:
    """Rated volts of windings 1 and 2 at a notch."""
    f = factor(t, notch)
    return (t.v1_v * f, t.v2_v) if t.tapped == "winding 1" else (t.v1_v, t.v2_v * f)


def nameplate_v(t: Transformer, notch: int) -> float:
    """Rated volts of the tapped winding at a notch, as on the nameplate."""
    return windings(t, notch)[0 if t.tapped == "winding 1" else 1]


def ratio(t: Transformer, notch: int) -> float:
    """No-load ratio winding 1 over winding 2 at a notch."""
    v1, v2 = windings(t, notch)
    return v1 / v2


def words(t: Transformer, notch: int, fed_winding: int = 1) -> str:
    """`tap −2.5 %: 10725/400, raises winding 2`; the winding that is not fed is the one that moves."""
    v1, v2 = windings(t, notch)
    plate = f"{_volts(v1)}/{_volts(v2)}"
    if notch == 0:
        return f"tap 0 %: {plate}"
    moved = 2 if fed_winding == 1 else 1
    return f"tap {percent_words(t, notch)}: {plate}, {effect(t, notch, fed_winding)} winding {moved}"


def effect(t: Transformer, notch: int, fed_winding: int) -> str:
    """What a notch does to the winding that is not fed, against nameplate: raises, lowers or nothing."""
    if notch == 0:
        return ""
    moved = 2 if fed_winding == 1 else 1
    return "raises" if (notch > 0) == (t.tapped == f"winding {moved}") else "lowers"


def percent_words(t: Transformer, notch: int) -> str:
    """`−2.5 %`: a notch as percent of the tapped winding's nameplate voltage."""
    return stated(notch * t.notch_percent, "%", sign=True)


def _volts(value: float) -> str:
    return f"{round(value, 1):.1f}".removesuffix(".0")


def group(written: str) -> tuple[str, str, int] | None:
    """Connection of winding 1, of winding 2 and clock number (IEC 60076-1 notation), or None."""
    found = GROUP.fullmatch(written)
    if found is None:
        return None
    try:
        return found[1], found[2], clock(written)
    except ValueError:
        return None


def turned_group(written: str) -> str:
    """The same transformer named from its other winding: Dyn11 becomes YNd1."""
    read = group(written)
    if read is None:
        return written
    one, two, clock = read
    return f"{two.upper()}{one.lower()}{-clock % 12}"


def turned(t: Transformer) -> Transformer:
    """The same transformer with its windings named the other way round; its ends stay where they are."""
    return msgspec.structs.replace(
        t,
        v1_v=t.v2_v,
        v2_v=t.v1_v,
        vector_group=turned_group(t.vector_group),
        tapped="winding 2" if t.tapped == "winding 1" else "winding 1",
        assumed=tuple({"v1_v": "v2_v", "v2_v": "v1_v"}.get(name, name) for name in t.assumed),
    )
