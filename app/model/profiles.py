"""Profiles: how demands, infeeds and supply volts go through the year, in % of what the drawing states."""

import math
from typing import Annotated, Any

from msgspec import Struct
from msgspec import field as held

from app.model.fields import field, text

CONSTANT = "constant"  # the name that says: 100 % throughout, whatever the drawing's own choice
YEAR_H, LEAP_H = 8760.0, 8784.0
MOST_VALUES = 105_408  # five minutes through 366 days
MOST_PERCENT = 1000.0
MOST_PROFILES = 200
NAME_LONGEST = 60

Followed = Annotated[
    str,
    text(
        "Profile",
        longest=NAME_LONGEST,
        help="How it goes through the year, in % of what is stated here. Blank: as the drawing chooses; "
        "constant: 100 % throughout.",
    ),
]


class Profile(Struct, frozen=True, kw_only=True):
    """Values in % of what the drawing states, one after the other from 1 January 00:00; shorter than a year
    they begin again."""

    hours: Annotated[
        float,
        field("Each value lasts", "h", ge=0.05, le=8784, help="1 for 8 760 values a year, 0.5 for 17 520."),
    ] = 1.0
    percent: tuple[float, ...] = (100.0,)
    source: Annotated[str, text("Source", longest=200, help="Where the values come from.")] = ""
    kept: dict[str, Any] = held(default_factory=dict)

    @property
    def span_h(self) -> float:
        """Hours until it begins again."""
        return len(self.percent) * self.hours

    @property
    def highest(self) -> float:
        """Its peak, in %."""
        return max(self.percent)

    @property
    def mean(self) -> float:
        """Mean over one span, in %."""
        return math.fsum(self.percent) / len(self.percent)

    @property
    def load_factor(self) -> float:
        """Mean over peak; nan where all is nought."""
        return self.mean / self.highest if self.highest else math.nan


class Year(Struct, frozen=True, kw_only=True):
    """What the drawing says of its year beside the profiles."""

    load_profile: Annotated[
        str,
        text(
            "Loads follow",
            longest=NAME_LONGEST,
            help="Profile of loads and motors that name none. Blank: constant at 100 %.",
        ),
    ] = ""
    generation_profile: Annotated[
        str,
        text(
            "Generators follow",
            longest=NAME_LONGEST,
            help="Profile of generators that name none. Blank: constant at 100 %.",
        ),
    ] = ""
    price_per_kwh: (
        Annotated[
            float, field("Price of losses", "per kWh", ge=0, le=1e6, help="Blank: losses are not priced.")
        ]
        | None
    ) = None
    money: Annotated[str, text("Currency", longest=12, help="Unit of the price, such as EUR or £.")] = ""
    kept: dict[str, Any] = held(default_factory=dict)


def usual_hours(count: int) -> float:
    """How long each of so many values lasts, as people log them; 1 h where the number says nothing."""
    spans = {12: YEAR_H / 12, 52: 168.0, 365: 24.0, 366: 24.0, 48: 0.5, 96: 0.25, 336: 0.5, 672: 0.25}
    if count in spans:
        return spans[count]
    for whole in (YEAR_H, LEAP_H):
        for each in (1.0, 0.5, 0.25, 0.2, 1 / 6, 1 / 12, 2.0, 3.0):
            if count == round(whole / each):
                return each
    return 1.0
