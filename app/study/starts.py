"""Motor starts: each motor in turn while the rest runs, behind the impedance of the supply; one batch."""

from dataclasses import replace
from typing import Any

import numpy as np
from msgspec import Struct
from numpy.typing import NDArray

from app.model import assumed
from app.model.drawing import Case, Drawing
from app.model.kinds import Generator, Load, Motor, Supply
from app.study.changers import settled
from app.study.layout import NONE, Layout, lay_out
from app.study.outcome import Verdict
from app.study.rows import Rows, rows_of
from app.study.solved_cases import of_solved, spread_starts
from app.study.start_rows import behind, motors_of, source_impedance, without
from app.study.start_seen import Names, start_seen
from app.study.start_table import StartState, StartTable
from app.study.structure import structure_findings
from app.study.zones import Zones, zones_of
from solver import Solution, Status, motor, solve

Real = NDArray[np.float64]


def starts(drawing: Drawing) -> StartTable:
    """Start every motor of a drawing in turn while the others run.

    Before the start the supplies hold their volts, as in any case; then they hold the electromotive force
    that gave these volts behind their impedance U²/Sk. A motor that is off is not started, nor is any in a
    case in which motors stand still. Changers stay where they stand with all motors running: a dip is over
    before they step.

    drawing : the drawing

    Returns : StartTable, columns (motor, case); no rows where the layout cannot be solved as drawn
    Source : dips at the least fault level: IEC 61000-3-11 (from memory)
    """
    layout = lay_out(drawing)
    zones = zones_of(drawing, layout)
    found = structure_findings(drawing, layout, zones)
    if not layout.supplies or any(f.verdict is Verdict.BLOCKS for f in found):
        return _table(layout, [], _nothing(0, len(drawing.cases)), [])
    rows, solution, _ = settled(drawing, layout, zones, rows_of(drawing, layout, zones))
    solved = np.array([status is Status.SOLVED for status in solution.status])
    return start_table(drawing, layout, zones, rows, solved)


def starters(layout: Layout) -> list[int]:
    """The motors to start: live and not off.

    layout : the graph of the drawing

    Returns : list of attachment rows
    """
    hung = enumerate(layout.attachments)
    return [i for i, a in hung if isinstance(a, Motor) and a.state != "off" and layout.live[layout.at[i]]]


def start_table(
    drawing: Drawing, layout: Layout, zones: Zones, rows: Rows, running: NDArray[np.bool_]
) -> StartTable:
    """The same where the rows of the solver are known already.

    drawing : the drawing
    layout : its graph
    zones : nominal_v (zone,) float [V]
    rows : its rows
    running : (case,) bool, cases that have an operating point before any start; the others have no figures

    Returns : StartTable, columns (motor, case)
    Source : see starts
    """
    if not running.any():
        return _table(layout, [], _nothing(0, len(drawing.cases)), [])
    if not running.all():
        own, own_rows = of_solved(drawing, rows, running)
        table = start_table(own, layout, zones, own_rows, running[running])
        return spread_starts(table, running)
    started, cases = starters(layout), len(drawing.cases)
    if not started:
        return _table(layout, [], _nothing(0, cases), [])
    before = without(drawing, layout, zones, rows, started)
    still = solve(before, forest=layout.forest)
    after = behind(drawing, layout, zones, rows, started, before, still)
    moved = solve(after, forest=layout.forest)
    return _judged(drawing, layout, zones, rows, _Pair(started, still, moved))


class _Pair(Struct, frozen=True):
    """Attachment rows of the motors, and the layout before and while each starts."""

    started: list[int]
    still: Solution
    moved: Solution

    @property
    def both(self) -> tuple[Solution, Solution]:
        return self.still, self.moved


def board_of(layout: Layout, row: int) -> int:
    """The nearest node towards the supply, within the motor's voltage, that serves something else too.

    layout : the graph of the drawing
    row : attachment row of a motor

    Returns : node row; the head of the zone where nothing else is served
    """
    node, below = layout.at[row], NONE
    while layout.fed_by[node] != NONE and layout.zone[layout.fed_from[node]] == layout.zone[node]:
        if _serves_more(layout, node, row, below):
            return node
        node, below = layout.fed_from[node], node
    return node


def _serves_more(layout: Layout, node: int, row: int, below: int) -> bool:
    hung = enumerate(layout.attachments)
    if any(
        layout.at[i] == node and i != row and isinstance(a, Load | Motor | Generator) and not _is_off(a)
        for i, a in hung
    ):
        return True
    return any(n not in (below, node) and layout.fed_from[n] == node for n in layout.order)


def _is_off(hung: Any) -> bool:
    return isinstance(hung, Motor) and hung.state == "off"


def _judged(drawing: Drawing, layout: Layout, zones: Zones, rows: Rows, pair: _Pair) -> StartTable:
    """The figures of every start."""
    started, cases = pair.started, len(drawing.cases)
    count = len(started)
    at = np.array([layout.at[i] for i in started])
    boards = np.array([board_of(layout, i) for i in started])
    feeding = [layout.supply_of[layout.tree[n]] for n in at]
    points = np.array([layout.at[s] for s in feeding])
    found = _nothing(count, cases)
    ended = zip(pair.still.status, pair.moved.status, strict=True)
    solved = np.array([a is Status.SOLVED and b is Status.SOLVED for a, b in ended]).reshape(count, cases)
    seen = start_seen(layout, zones, rows, started)
    of_nodes = seen.node_ways
    for name, volts, ways in (
        ("motor", seen.motors, seen.motor_ways),
        ("board", seen.nodes(boards), of_nodes and of_nodes(boards)),
        ("supply", seen.nodes(points), of_nodes and of_nodes(points)),
    ):
        was, now = (np.where(solved[:, None], _own(volts(s.voltage), cases), np.nan) for s in pair.both)
        found[f"{name}_before_v"], found[f"{name}_v"], way = _deepest(was, now)
        found[f"{name}_phase"] = _named(ways, way)
        before, there = found[f"{name}_before_v"], found[f"{name}_v"]
        found[f"{name}_step_percent"] = 100 * (1 - there / np.where(before > 0, before, np.nan))
    motors = motors_of(layout, started)
    unknown = [source_impedance(s) == 0 for f in feeding if isinstance(s := layout.attachments[f], Supply)]
    found["supply_step_percent"][unknown] = np.nan
    found["motor_percent"] = 100 * found["motor_v"] / seen.rated_v[:, None]
    found["current_a"] = np.where(solved, _own(seen.amps(pair.moved), cases)[:, 0], np.nan)
    running = [abs(motor.running(m.rated_kw * 1e3, m.efficiency, m.power_factor)) for m in motors]
    found["times_rated"] = found["current_a"] / (np.array(running) / (seen.wide * seen.rated_v))[:, None]
    found["torque_percent"] = _torque(motors, found["motor_percent"])
    idle = np.array([[_stands_still(c, layout.attachment_ids[i]) for c in drawing.cases] for i in started])
    for column in found.values():
        column[idle] = np.nan if column.dtype.kind == "f" else column.dtype.type()
    table = _table(layout, started, found | {"solved": solved | idle}, [layout.node_ids[n] for n in boards])
    table = replace(table, supplies=tuple(layout.attachment_ids[f] for f in feeding))
    if seen.over is None:
        return table
    return replace(table, board_over=tuple(seen.over[boards]), supply_over=tuple(seen.over[points]))


def _stands_still(case: Case, id: str) -> bool:
    """True where a case has this motor, or without a word on it all motors, at nought."""
    own = case.own.get(id)
    return (case.motor_percent if own is None or own.percent is None else own.percent) == 0


def _own(values: Real, cases: int) -> Real:
    """(motor, way, case) of each motor in its own columns."""
    count = len(values)
    own = values.reshape(count, values.shape[1], count, cases)
    return np.asarray(own[np.arange(count), :, np.arange(count)])


def _deepest(was: Real, now: Real) -> tuple[Real, Real, NDArray[np.intp]]:
    """(motor, case) volts before and at the start, of the phase that falls most, and which: -1 for none."""
    known = was > 0
    step = np.where(known, (was - now) / np.where(known, was, 1.0), -np.inf)
    row = step.argmax(axis=1)[:, None]
    found = np.where(known.any(axis=1), row[:, 0], -1)
    return np.take_along_axis(was, row, 1)[:, 0], np.take_along_axis(now, row, 1)[:, 0], found


def _named(ways: Names | None, way: NDArray[np.intp]) -> NDArray[np.str_]:
    """(motor, case) the name of the phase that falls most; blank where none does or all are alike."""
    if ways is None:
        return np.zeros(way.shape, dtype="U5")
    told = [["" if at < 0 else own[at] for at in row] for own, row in zip(ways, way, strict=True)]
    return np.array(told, dtype="U5").reshape(way.shape)


def _torque(motors: list[Motor], percent: Real) -> Real:
    found = 100 * motor.direct_torque(percent, 100.0)
    for row, m in enumerate(motors):
        limit = assumed.value(m, "limited_current")
        if m.starter == "soft starter" and limit < m.starting_current:
            found[row] = np.where(
                np.isnan(percent[row]), np.nan, 100 * motor.limited_torque(limit, m.starting_current)
            )
        elif m.starter == "drive":
            found[row] = np.nan
    return found


def _nothing(count: int, cases: int) -> dict[str, NDArray[Any]]:
    none = {name: np.full((count, cases), np.nan) for name in StartState.__struct_fields__}
    none |= {name: np.zeros((count, cases), dtype="U5") for name in none if name.endswith("_phase")}
    return {**none, "solved": np.zeros((count, cases), dtype=bool)}


def _table(
    layout: Layout, started: list[int], found: dict[str, NDArray[Any]], boards: list[str]
) -> StartTable:
    ids = tuple(layout.attachment_ids[i] for i in started)
    return StartTable(StartState, ids, found, {id: n for n, id in enumerate(ids)}, tuple(boards))
