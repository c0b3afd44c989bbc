"""What is judged of motor starts: steps at the supply and at the board, volts at the motor, torque."""

from collections.abc import Callable

import numpy as np
from msgspec.structs import replace
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.model.figures import percent, volts
from app.model.kinds import Motor, Supply
from app.study.checking import NEAR_SHARE, NEAR_VOLTAGE, Check, findings_of
from app.study.outcome import Finding, Verdict
from app.study.start_table import StartTable
from app.study.words import list_of, tell

Flag = NDArray[np.bool_]
SET_HERE = "the start limit set for this drawing"


def start_findings(
    drawing: Drawing, table: StartTable, cases: tuple[str, ...], running: Flag | None = None
) -> list[Finding]:
    """Hold every start against the limits of the drawing; where a limit is blank nothing is judged.

    drawing : the drawing, for its limits and names
    table : of the starts
    cases : names of the cases
    running : (case,) bool, cases that have an operating point before any start; all where it is None

    Returns : list of Finding with value, limit and signed margin [%]; notes on torque and fault level
    Source : the limits are the drawing's; what counts as near is ours
    """
    whose = drawing.limits.start_name or SET_HERE
    found: list[Finding] = []
    for check, places in _checks(drawing, table):
        for one in findings_of(check, whose, cases):
            row = table.rows[one.ids[0]]
            found.append(replace(one, ids=(*one.ids, places[row])) if places else one)
    return [
        *found,
        *_stuck(drawing, table, cases, running),
        *_torque(drawing, table),
        *_unknown(drawing, table),
    ]


def _checks(drawing: Drawing, table: StartTable) -> list[tuple[Check, tuple[str, ...]]]:
    limits, ids = drawing.limits, table.ids
    made: list[tuple[Check, tuple[str, ...]]] = []
    steps = (
        ("supply", limits.start_supply_percent, table.supplies),
        ("board", limits.start_step_percent, table.boards),
    )
    for name, limit, places in steps:
        if limit is not None:
            value, near = table.column(f"{name}_step_percent"), limit * (1 - NEAR_SHARE)
            subject = _step_words(drawing, table, name, places)
            rule = "the largest step allowed there is"
            made.append((Check(f"start step, {name}", ids, value, limit, False, near, subject, rule), places))
    if limits.start_motor_percent is not None:
        value = table.column("motor_percent")
        subject = _motor_words(drawing, table)
        check = Check(
            "start volts", ids, value, limits.start_motor_percent, True, NEAR_VOLTAGE, subject,
            "to start it needs",
        )  # fmt: skip
        made.append((check, ()))
    return made


def _step_words(
    drawing: Drawing, table: StartTable, name: str, places: tuple[str, ...]
) -> Callable[[int, int, str], str]:
    def subject(row: int, case: int, value: str) -> str:
        over = (table.board_over if name == "board" else table.supply_over) or None
        own = 1.0 if over is None else over[row]
        was, now = (float(table.column(f"{name}_{when}v")[row, case]) / own for when in ("before_", ""))
        return (
            f"Starting {tell(drawing, table.ids[row])} pulls {tell(drawing, places[row])} down by {value}"
            f"{_on(table, name, row, case)}, from {volts(was)} to {volts(now)}"
        )

    return subject


def _motor_words(drawing: Drawing, table: StartTable) -> Callable[[int, int, str], str]:
    def subject(row: int, case: int, value: str) -> str:
        now = volts(float(table.column("motor_v")[row, case]))
        on = _on(table, "motor", row, case)
        return f"{tell(drawing, table.ids[row])} has {value} of its rated voltage to start with{on}, {now}"

    return subject


def _on(table: StartTable, name: str, row: int, case: int) -> str:
    """The phase that falls most, such as ` on B`; nothing where phases are alike."""
    phase = str(table.column(f"{name}_phase")[row, case])
    return f" on {phase}" if phase else ""


def _stuck(
    drawing: Drawing, table: StartTable, cases: tuple[str, ...], running: Flag | None
) -> list[Finding]:
    """Motors whose start has no operating point."""
    found = []
    judged = np.ones(len(cases), dtype=bool) if running is None else running
    for row, id in enumerate(table.ids):
        bad = np.flatnonzero(~table.column("solved")[row] & judged)
        if len(bad):
            named = f" in case {cases[bad[0]]}" if len(cases) > 1 else ""
            words = f"{tell(drawing, id)} cannot start{named}: at its starting current nothing solves."
            by_case = tuple(Verdict.FAILS if k in bad else Verdict.HOLDS for k in range(len(cases)))
            found.append(Finding("start", Verdict.FAILS, (id,), words, case=cases[bad[0]], by_case=by_case))
    return found


def _torque(drawing: Drawing, table: StartTable) -> list[Finding]:
    """A soft starter gives away torque, which has to be said."""
    found = []
    for row, id in enumerate(table.ids):
        motor = drawing.elements[id]
        least = np.nanmin(np.append(table.column("torque_percent")[row], np.inf))
        if isinstance(motor, Motor) and motor.starter == "soft starter" and np.isfinite(least):
            words = f"{tell(drawing, id)} starts with {percent(float(least))} of its locked-rotor torque "
            words += "behind the soft starter: see that what it drives breaks away with that."
            found.append(Finding("start torque", Verdict.NOTE, (id,), words, value=float(least), unit="%"))
    return found


def _unknown(drawing: Drawing, table: StartTable) -> list[Finding]:
    """Supplies that motors start from and whose fault level nobody states."""
    ids = tuple(
        i
        for i in dict.fromkeys(table.supplies)
        if isinstance(s := drawing.elements[i], Supply) and s.fault_level_min_mva is None
    )
    if not ids:
        return []
    words = f"No least fault level is stated of {list_of(drawing, ids)}: the volts there are taken as firm "
    words += "while motors start, so that every dip is larger in truth."
    return [Finding("fault level", Verdict.NOTE, ids, words)]
