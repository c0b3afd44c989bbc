"""The conductors that an overhead line states by its spacing: what each is, checks, and its capacitance."""

import math
from typing import NamedTuple

import numpy as np

from app.model.figures import typed
from app.model.kinds import Element, Line, OverheadLine
from app.model.numerals import UnitError, quoted
from app.model.phasing import CHOICES
from app.model.spacing import places
from solver import carson

STRANDS = "seven like strands (from their geometry)"
NO_SOURCE = "common practice, no source"
SOIL_OHM_M = 100.0
SEVEN = 0.7256  # GMR over the outer radius of seven like strands, from their geometry
RHO = {"Al": 28.264, "Cu": 17.241}  # Ω·mm²/km at 20 °C, IEC 60889 and IEC 60028
FOLLOWING = (  # typed, but not used where the spacing tells them
    "reactance_ohm_per_km",
    "neutral_reactance_ohm_per_km",
    "zero_resistance_ohm_per_km",
    "zero_reactance_ohm_per_km",
)
NEUTRALS = ("neutral_gmr_mm", "neutral_diameter_mm")
STAND_INS = ("gmr_mm", "diameter_mm", *NEUTRALS, "soil_ohm_m")


class Hung(NamedTuple):
    """What hangs on the poles, in the order of `letters`; N is the neutral."""

    letters: str
    x_m: tuple[float, ...]
    y_m: tuple[float, ...]
    r20_ohm_per_km: tuple[float, ...]
    gmr_m: tuple[float, ...]
    radius_m: tuple[float, ...]
    soil_ohm_m: float

    @property
    def phases(self) -> int:
        """How many phase conductors."""
        return len(self.letters) - self.letters.endswith("N")


def is_hung(element: Element) -> bool:
    """True where a line states its spacing, so that reactance and the zero sequence follow from it."""
    return isinstance(element, OverheadLine) and bool(element.hung_at_m)


def hung(line: OverheadLine) -> Hung:
    """What hangs on the poles of a line that states its spacing."""
    where = places(line.hung_at_m)
    letters = letters_of(line, len(where))
    where = where[: len(letters) - 1] + where[-1:]  # a neutral is the last, whatever hangs before it
    found = {}
    for name in STAND_INS:
        given = getattr(line, name)
        found[name] = float(given) if given is not None else stand_in(line, name)[0]
    of_neutral = (line.neutral_resistance_ohm_per_km, line.return_resistance_ohm_per_km)
    r_neutral = next((r for r in of_neutral if r is not None), line.resistance_ohm_per_km)

    def each(phase: float, neutral: float) -> tuple[float, ...]:
        return tuple(neutral if letter == "N" else phase for letter in letters)

    return Hung(
        letters=letters,
        x_m=tuple(x for x, _ in where),
        y_m=tuple(y for _, y in where),
        r20_ohm_per_km=each(line.resistance_ohm_per_km, r_neutral),
        gmr_m=each(found["gmr_mm"] / 1e3, found["neutral_gmr_mm"] / 1e3),
        radius_m=each(found["diameter_mm"] / 2e3, found["neutral_diameter_mm"] / 2e3),
        soil_ohm_m=found["soil_ohm_m"],
    )


def letters_of(line: Line, count: int) -> str:
    """Which conductors so many places are: ABCN, ABC, BN, AB …; a lateral on `all` is taken as A."""
    if line.phases not in CHOICES[1:]:
        return {1: "A", 2: "AN", 3: "ABC"}.get(count, "ABCN")
    return line.phases + "N" if count > len(line.phases) else line.phases[:count]


def has_neutral(element: Element) -> bool:
    """True where a neutral hangs beside the phases of a line that states its spacing."""
    if not isinstance(element, OverheadLine) or not element.hung_at_m:
        return False
    return letters_of(element, len(places(element.hung_at_m))).endswith("N")


def wires_of(element: Element) -> int:
    """How many conductors hang; none where no spacing is stated."""
    return len(places(element.hung_at_m)) if isinstance(element, OverheadLine) else 0


def is_idle(line: OverheadLine, field: str) -> bool:
    """Nothing hangs on the field: no spacing is stated, or no neutral hangs in it."""
    return not line.hung_at_m or (field in NEUTRALS and not has_neutral(line))


def stand_in(line: OverheadLine, field: str) -> tuple[float, str]:
    """What is put in place of a blank field of the spacing, and on what basis."""
    if field == "soil_ohm_m":
        return SOIL_OHM_M, f"soil as most formulas take it; {NO_SOURCE}"
    if field.startswith("neutral_"):
        return _of_neutral(line, field)
    if field == "gmr_mm":
        across = line.diameter_mm if line.diameter_mm is not None else _diameter(line)[0]
        more = "; of a steel-cored conductor of one layer it is less and goes with the current"
        return SEVEN * across / 2, f"{SEVEN:g} of the radius, {STRANDS}{more}"
    return _diameter(line)


def _diameter(line: OverheadLine) -> tuple[float, str]:
    if line.gmr_mm is not None:
        return 2 * line.gmr_mm / SEVEN, f"2·GMR/{SEVEN:g}, {STRANDS}"
    if line.area_mm2 is not None:
        return _across(line.area_mm2), f"its cross-section, {STRANDS}"
    ohms = line.resistance_ohm_per_km
    area = RHO[line.conductor] / ohms if ohms > 0 else 50.0
    return _across(min(max(area, 1.0), 5000.0)), f"the cross-section that its resistance tells, {STRANDS}"


def _across(area_mm2: float) -> float:
    """Diameter over seven like strands, three strands wide."""
    return 3 * math.sqrt(4 * area_mm2 / (7 * math.pi))


def _of_neutral(line: OverheadLine, field: str) -> tuple[float, str]:
    of_gmr = field == "neutral_gmr_mm"
    other = line.neutral_diameter_mm if of_gmr else line.neutral_gmr_mm
    if other is not None:
        words = f"{SEVEN:g} of its radius" if of_gmr else f"2·GMR/{SEVEN:g}"
        return other * SEVEN / 2 if of_gmr else 2 * other / SEVEN, f"{words}, {STRANDS}"
    name = field.removeprefix("neutral_")
    given = getattr(line, name)
    return given if given is not None else stand_in(line, name)[0], "as a phase conductor"


def capacitance_uf_per_km(line: OverheadLine) -> float:
    """Capacitance of one phase conductor to the neutral plane by images in the earth, the phases in turn in
    every place; a hung neutral is at earth. Of a single circuit it is stated so that half of it counts
    between two wires, as the capacitance of any line is."""
    it = hung(line)
    p = carson.potential(it.radius_m, it.x_m, it.y_m)
    if it.letters.endswith("N"):
        p = carson.kron(p, it.phases).real
    if it.phases == 1:
        return 2e6 / float(p[0, 0])
    if it.phases == 2:
        return 2e6 / float(p[0, 0] + p[1, 1] - 2 * p[0, 1])
    mutual = (p.sum() - np.trace(p)) / 6
    return 1e6 / float(np.trace(p) / 3 - mutual)


def mean_distance_m(line: OverheadLine) -> float:
    """Geometric mean distance between the phases, or of a single phase to its neutral; nan of one wire."""
    it = hung(line)
    count = it.phases if it.phases > 1 else len(it.letters)
    spots = [complex(x, y) for x, y in zip(it.x_m[:count], it.y_m[:count], strict=True)]
    logs = [math.log(abs(a - b)) for k, a in enumerate(spots) for b in spots[k + 1 :]]
    return math.exp(sum(logs) / len(logs)) if logs else math.nan


def fault_of_spacing(line: OverheadLine) -> str | None:
    """The sentence against the spacing and the conductors that hang in it, or None."""
    words = _fault_of_gmr(line)
    if words or not line.hung_at_m:
        return words
    try:
        where = places(line.hung_at_m)
    except UnitError as error:
        return f"Hangs at: {error}"
    if not where:
        return f"Hangs at is {quoted(line.hung_at_m)}, allowed is a place for each conductor, or blank."
    return _fault_of_count(line, len(where)) or _fault_of_distance(hung(line))


def _fault_of_gmr(line: OverheadLine) -> str | None:
    for whose, gmr, across in (
        ("", line.gmr_mm, line.diameter_mm),
        (" of neutral", line.neutral_gmr_mm, line.neutral_diameter_mm),
    ):
        if gmr is not None and across is not None and gmr > across / 2:
            most = typed(across / 2)
            return f"GMR{whose} is {typed(gmr)} mm, allowed is at most half the diameter, {most} mm."
    return None


def _fault_of_count(line: OverheadLine, count: int) -> str | None:
    wires = len(line.phases) if line.phases != "all" else 0
    if wires and count not in (wires, wires + 1):
        return (
            f"Hangs at names {count} conductors, allowed with Phases {line.phases} are {wires}, "
            f"or {wires + 1} with a neutral."
        )
    neutral = letters_of(line, count).endswith("N")
    if neutral and line.neutral == "none":
        return "Hangs at has a place for a neutral, but Neutral is none; allowed is one or the other."
    if not neutral and count > 1 and line.neutral in ("carried", "earthed along"):
        return f"Hangs at has no place for the neutral, but Neutral is {line.neutral}; allowed is to add one."
    return None


def _fault_of_distance(it: Hung) -> str | None:
    spots = [complex(x, y) for x, y in zip(it.x_m, it.y_m, strict=True)]
    for k, one in enumerate(spots):
        for j in range(k + 1, len(spots)):
            apart, least = abs(one - spots[j]), it.radius_m[k] + it.radius_m[j]
            if apart <= least:
                pair = f"{it.letters[k]} and {it.letters[j]}"
                return (
                    f"Hangs at has {pair} {typed(round(apart, 6))} m apart, "
                    f"allowed is more than their thickness, {least:.3g} m."
                )
        if it.y_m[k] <= it.radius_m[k]:
            return f"Hangs at has {it.letters[k]} on the ground, allowed is above it by more than its radius."
    return None
