"""One kind of check on many elements, judged unrounded, its worst case named."""

from collections.abc import Callable

import numpy as np
from msgspec import Struct
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.model.figures import plain
from app.study.outcome import Finding, Verdict
from app.study.words import list_of

NEAR_VOLTAGE = 1.0  # % of nominal: a voltage this close to its limit is near it
NEAR_SHARE = 0.9  # of the limit: a drop or a loading beyond this is near it
FROM_MEMORY = ", from memory"  # of a source: stands beside the finding, not in its sentence
NOISE = 1e-9  # %, what the arithmetic leaves open: a value this close to its limit is on it
SET_HERE = "the limit set for this drawing"
LOADING = "the loading limit set for this drawing"
Real = NDArray[np.float64]
Subject = Callable[[int, int, str], str]  # row, case and value as text, to words


class Check(Struct, frozen=True):
    """One kind of check on many elements.

    name : such as "voltage low"
    ids : (element,) what is judged
    value : (element, case) float [%]; nan is not judged
    limit : float [%]
    low : true where the value must not fall below the limit
    near : float [%], a margin smaller than this is near the limit
    subject : (row, case, value as text) to words such as `House (B3) is at 93.6 % of nominal, 374.5 V`
    rule : words before the limit, such as `the lowest allowed is`
    unit : of value and limit
    """

    name: str
    ids: tuple[str, ...]
    value: Real
    limit: float
    low: bool
    near: float
    subject: Subject
    rule: str
    unit: str = "%"


def findings_of(
    check: Check, whose: str, cases: tuple[str, ...], broken: Verdict = Verdict.FAILS
) -> list[Finding]:
    """Judge one check on every element; the margin is value − limit where low, limit − value where not.

    check : values (element, case) and their limit [%]
    whose : whose limit it is
    cases : names of the cases
    broken : the verdict where the limit is passed

    Returns : list of Finding, smallest margin first
    """
    margin = margin_of(check.value, check.limit, check.low)
    judged = np.where(np.isnan(margin), np.inf, margin)
    if judged.size == 0:
        return []
    worst_case = judged.argmin(axis=1)
    worst = judged[np.arange(len(judged)), worst_case]
    rows = np.flatnonzero(worst < check.near)
    rows = rows[np.argsort(worst[rows], kind="stable")]
    if len(rows) == 0:
        rows = np.array([worst.argmin()])
        if np.isinf(worst[rows[0]]):
            return []
    by_case = _verdicts(margin[rows], check.near, broken)
    return [
        _finding(check, int(row), int(worst_case[row]), float(worst[row]), whose, cases, tuple(verdicts))
        for row, verdicts in zip(rows, by_case, strict=True)
    ]


def unrated(drawing: Drawing, ids: tuple[str, ...]) -> list[Finding]:
    """One note on all branches whose loading nobody can judge.

    drawing : the drawing, for names
    ids : of live branches without a rating

    Returns : list of one NOTE, or of none
    """
    if not ids:
        return []
    words = f"The loading of {list_of(drawing, ids)} is not judged: no rating is given."
    return [Finding("not judged", Verdict.NOTE, ids, words)]


def margin_of(value: Real | float, limit: float, low: bool) -> Real:
    """Distance to a limit, value − limit where low, limit − value where not; a value on its limit has none.

    value : (...) float [%]
    limit : float [%]
    low : the value must not fall below the limit

    Returns : (...) float [%], negative where the limit is passed
    """
    margin = value - limit if low else limit - value
    return np.where(np.abs(margin) < NOISE, 0.0, margin)


def _verdicts(margin: Real, near: float, broken: Verdict) -> NDArray[np.object_]:
    rung = np.where(np.isnan(margin), 3, np.where(margin < 0, 0, np.where(margin < near, 1, 2)))
    return np.array((broken, Verdict.NEAR, Verdict.HOLDS, Verdict.NOTE), dtype=object)[rung]


def _finding(
    check: Check,
    row: int,
    case: int,
    margin: float,
    whose: str,
    cases: tuple[str, ...],
    by_case: tuple[Verdict, ...],
) -> Finding:
    value = float(check.value[row, case])
    shown, allowed = apart(value, check.limit, check.unit)
    named = f" in case {cases[case]}" if len(cases) > 1 else ""
    cited = whose.removesuffix(FROM_MEMORY)
    words = f"{check.subject(row, case, shown)}{named}; {check.rule} {allowed} ({cited})."
    return Finding(
        check=check.name,
        verdict=by_case[case],
        ids=(check.ids[row],),
        sentence=words,
        value=value,
        limit=check.limit,
        margin=margin,
        unit=check.unit,
        whose=whose,
        case=cases[case],
        by_case=by_case,
    )


def apart(value: float, limit: float, unit: str = "%") -> tuple[str, str]:
    """Value and limit with enough digits to tell them apart: `93.611 %` against `93.617 %`.

    value : float, in the unit
    limit : float, in the unit
    unit : % or V

    Returns : both as text, with at least one and at most six digits after the point
    """
    for digits in range(1, 7):
        shown, allowed = plain(value, digits, unit), plain(limit, digits, unit)
        if shown != allowed or value == limit:
            break
    return shown, allowed
