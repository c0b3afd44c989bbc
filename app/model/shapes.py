"""Invented shapes of a year, made by formula, and any profile brought to a load factor. No source: a
stand-in until there is a log."""

import math
from collections.abc import Callable
from dataclasses import dataclass

from msgspec.structs import replace

from app.model.checks import EditRefused, quantity, shown
from app.model.figures import typed
from app.model.profiles import Profile

INVENTED = "invented, no source"
DAYS = 365
MIDWINTER = 10  # day from which the season is counted, northern half


@dataclass(frozen=True, slots=True)
class Shape:
    """One invented shape: what it stands for, and its usual load factor."""

    words: str
    load_factor: float
    formula: Callable[[int, int], float]  # day from 0, hour of day: share of the peak, before scaling


def _season(day: int) -> float:
    """1 in midwinter, −1 in midsummer."""
    return math.cos(2 * math.pi * (day - MIDWINTER) / DAYS)


def _bump(hour: int, at: float, width: float) -> float:
    """A hump round an hour of the day."""
    away = min(abs(hour + 0.5 - at), 24 - abs(hour + 0.5 - at))
    return math.exp(-((away / width) ** 2))


def _workday(day: int) -> bool:
    """1 January is taken as a Monday."""
    return day % 7 < 5


def _household(day: int, hour: int) -> float:
    daily = 0.25 + 0.45 * _bump(hour, 7.5, 1.6) + _bump(hour, 19.0, 2.6)
    daily += 0.0 if _workday(day) else 0.3 * _bump(hour, 12.5, 2.5)
    return daily * (1 + 0.3 * _season(day))


def _workshop(day: int, hour: int) -> float:
    if not _workday(day) or not 7 <= hour < 17:
        return 0.05
    return (0.8 if hour in (7, 12, 16) else 1.0) * (1 + 0.05 * _season(day))


def _farm(day: int, hour: int) -> float:
    daily = 0.3 + _bump(hour, 6.0, 1.4) + 0.8 * _bump(hour, 17.5, 1.6)
    return daily * (1 + 0.15 * _season(day))


def _flat(_day: int, _hour: int) -> float:
    return 1.0


def _daylight(day: int, hour: int) -> float:
    """The sun at 50° north, clouds as a mean of the season."""
    tilt = math.radians(-23.44) * math.cos(2 * math.pi * (day + MIDWINTER) / DAYS)
    north, turn = math.radians(50), math.radians(15 * (hour + 0.5 - 12))
    height = math.sin(north) * math.sin(tilt) + math.cos(north) * math.cos(tilt) * math.cos(turn)
    return max(0.0, height) * (0.75 - 0.25 * _season(day))


SHAPES: dict[str, Shape] = {
    "household": Shape("mornings and evenings, more in winter", 0.30, _household),
    "workshop": Shape("Monday to Friday, 7 to 17 h", 0.28, _workshop),
    "farm": Shape("early and late every day, milking and feeding", 0.35, _farm),
    "flat": Shape("the same in every hour", 1.0, _flat),
    "daylight": Shape("PV by the height of the sun at 50° north", 0.12, _daylight),
}


def shape(name: str, load_factor: float | None = None) -> Profile:
    """An invented profile of 8 760 hours, at its usual load factor or at another."""
    if name not in SHAPES:
        raise EditRefused(f"There is no shape {shown(name)}, allowed is {', '.join(SHAPES)}.")
    made = SHAPES[name]
    raw = [made.formula(day, hour) for day in range(DAYS) for hour in range(24)]
    highest = max(raw)
    drawn = Profile(percent=tuple(100 * value / highest for value in raw))
    factor = made.load_factor if load_factor is None else load_factor
    scaled = drawn if name == "flat" and load_factor is None else to_load_factor(drawn, factor)
    values = tuple(round(value, 2) for value in scaled.percent)
    source = f"{INVENTED}: {made.words}"
    return replace(scaled, percent=values, source=source)


def to_load_factor(profile: Profile, load_factor: float) -> Profile:
    """The profile with each value's share of the peak raised to one power, so that mean over peak is the
    load factor; the peak stays, nought stays nought, and the hours keep their order."""
    highest = profile.highest
    if not highest:
        raise EditRefused("Load factor: all values are 0 %, allowed is a profile with a peak.")
    shares = [value / highest for value in profile.percent]
    least = sum(s == 1.0 for s in shares) / len(shares)
    most = sum(s > 0.0 for s in shares) / len(shares)
    good = isinstance(load_factor, int | float) and math.isfinite(load_factor)
    if not (good and least < load_factor < most):
        if good and math.isclose(load_factor, profile.load_factor, rel_tol=1e-9):
            return profile
        raise EditRefused(
            f"Load factor is {quantity(load_factor, '')}, allowed for this profile is "
            f"{_between(least, most)}."
        )
    power = _power(shares, load_factor)
    return replace(profile, percent=tuple(highest * s**power if s else 0.0 for s in shares))


def _between(least: float, most: float) -> str:
    if least >= most:
        return f"{typed(round(least, 4))}, as its values are all its peak or 0"
    return f"more than {typed(round(least, 4))} and less than {typed(round(most, 4))}"


def _power(shares: list[float], wanted: float) -> float:
    """Halving: the mean falls as the power grows. Shares that are alike are counted together."""
    counts: dict[float, int] = {}
    for share in shares:
        if share:
            counts[share] = counts.get(share, 0) + 1
    low, high = -12.0, 12.0  # of the power, in octaves
    for _ in range(60):
        middle = (low + high) / 2
        mean = math.fsum(count * share**2**middle for share, count in counts.items()) / len(shares)
        low, high = (middle, high) if mean > wanted else (low, middle)
    return float(2**low)
