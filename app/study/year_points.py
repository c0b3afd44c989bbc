"""The points of a year: how long each lasts, what each profile says in it, and what a person calls it."""

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import datetime, timedelta

import numpy as np
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.model.figures import plain
from app.model.following import in_use
from app.model.profiles import LEAP_H, YEAR_H, Profile

Real = NDArray[np.float64]
MOST_POINTS = 200_000
TICK = 1e-6  # h, below which two beginnings are one
MONTHS = "Jan Feb Mar Apr May Jun Jul Aug Sep Oct Nov Dec".split()


@dataclass(frozen=True)
class Points:
    """A year cut wherever a profile that something follows changes its value.

    begin : (point,) float [h] since 1 January 00:00
    hours : (point,) float [h] that each lasts
    year_h : float [h], 8760 or 8784
    values : profile name to (point,) float [%]
    """

    begin: Real
    hours: Real
    year_h: float
    values: Mapping[str, Real]

    @property
    def count(self) -> int:
        """Number of points."""
        return int(self.begin.size)


def points_of(drawing: Drawing) -> Points:
    """The points that the profiles in use need; a single one where nothing follows any.

    drawing : the drawing

    Returns : Points
    Raises : ValueError with a sentence where they are too many
    """
    profiles = in_use(drawing)
    year_h = LEAP_H if any(p.span_h > YEAR_H + TICK for p in profiles.values()) else YEAR_H
    steps = sorted({p.hours for p in profiles.values()} | {year_h})
    if sum(year_h / step for step in steps) > 2 * MOST_POINTS:
        raise ValueError(_too_many(year_h / steps[0]))
    edges = np.concatenate([np.arange(np.ceil(year_h / step - TICK)) * step for step in steps])
    begin = np.unique(np.round(edges / TICK)) * TICK
    begin = np.asarray(begin[begin < year_h - TICK], dtype=np.float64)
    if begin.size > MOST_POINTS:
        raise ValueError(_too_many(begin.size))
    hours = np.diff(np.append(begin, year_h))
    middle = begin + hours / 2
    return Points(begin, hours, year_h, {n: _values(p, middle) for n, p in profiles.items()})


def _too_many(count: float) -> str:
    return (
        f"The profiles in use cut the year into {plain(count, 0)} points, allowed are at most "
        f"{plain(MOST_POINTS, 0)}: let their values last as long as one another, or longer."
    )


def _values(profile: Profile, at: Real) -> Real:
    """The value that holds at a time, the profile beginning again at its end."""
    values = np.array(profile.percent, dtype=np.float64)
    return np.asarray(values[np.floor(at / profile.hours).astype(np.int64) % values.size])


def when(begin_h: float, year_h: float = YEAR_H) -> str:
    """What people call a point: `hour 4 123, 21 Jun 18:00`; `–` where there is none.

    begin_h : float [h] since 1 January 00:00, nan for none
    year_h : float [h], 8784 where the year has a 29 February

    Returns : words
    """
    if np.isnan(begin_h):
        return "–"
    return f"hour {plain(np.floor(begin_h + TICK) + 1, 0)}, {date(begin_h, year_h)}"


def date(begin_h: float, year_h: float = YEAR_H) -> str:
    """Day and time of a point, `21 Jun 18:00`.

    begin_h : float [h] since 1 January 00:00
    year_h : float [h], 8784 where the year has a 29 February

    Returns : words
    """
    first = datetime(2024 if year_h > YEAR_H else 2023, 1, 1)
    at = first + timedelta(minutes=round(begin_h * 60))
    return f"{at.day} {MONTHS[at.month - 1]} {at.hour:02d}:{at.minute:02d}"
