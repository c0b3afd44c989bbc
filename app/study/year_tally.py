"""Sums and extremes of a year, block by block, from the very tables that a loading case has."""

from collections.abc import Iterable
from dataclasses import replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from app.model.drawing import Limits
from app.model.kinds import Generator, Load, Motor, Supply, Transformer
from app.study.changers import Moving, branch_notches
from app.study.checking import margin_of
from app.study.layout import Layout
from app.study.results import Tables, tables_of
from app.study.rows import Rows
from app.study.year_outcome import Course, Gap
from app.study.year_points import Points
from app.study.zones import Zones
from solver import Solution, Status
from solver.control import Controlled, Rest

Real = NDArray[np.float64]
Index = NDArray[np.intp]


class Most:
    """The largest value of each row so far, and at which point it was first."""

    def __init__(self, rows: int) -> None:
        self.value, self.point = np.full(rows, np.nan), np.full(rows, -1, dtype=np.intp)

    def add(self, values: Real, points: Index) -> None:
        """Take in (row, point) values; nan is none."""
        if not values.size:
            return
        known = np.where(np.isnan(values), -np.inf, values)
        best = known.argmax(axis=1)
        top = known[np.arange(len(known)), best]
        more = (top > self.value) | (np.isnan(self.value) & np.isfinite(top))
        self.value[more], self.point[more] = top[more], points[best[more]]


class Tally:
    """What the blocks of a year come to; `add` takes one in."""

    def __init__(
        self, layout: Layout, zones: Zones, rows: Rows, limits: Limits, points: Points, moving: Moving
    ) -> None:
        self.layout, self.zones, self.rows, self.limits = layout, zones, rows, limits
        self.points, self.moving = points, moving
        nodes, branches, hung = len(layout.nodes), len(layout.branches), len(layout.attachments)
        rowed = {"low": nodes, "high": nodes, "drop": nodes, "amps": branches, "loaded": branches}
        self.most = {name: Most(count) for name, count in (rowed | {"kw": hung}).items()}
        summed = {"below": nodes, "above": nodes, "dropped": nodes, "over": branches, "stopped": branches}
        summed["hunting"] = branches
        summed |= {name: branches for name in ("through", "back", "loss", "copper", "iron")}
        summed |= {"kwh": hung, "kwh_back": hung}
        self.sum = {name: np.zeros(count) for name, count in summed.items()}
        self.notch = {"least": np.full(branches, np.nan), "most": np.full(branches, np.nan)}
        self.node_live, self.branch_live = np.zeros(nodes, dtype=bool), np.zeros(branches, dtype=bool)
        blank = {name: np.full(points.count, np.nan) for name in _COURSE}
        self.course: dict[str, NDArray[Any]] = {**blank}
        self.course |= {name: np.full(points.count, -1, dtype=np.intp) for name in _ROWS}
        self.closure = 0.0
        self.unsolved: dict[int, Status] = {}
        self.hours = 0.0

    def add(self, points: Index, solution: Solution, rested: Controlled | None) -> None:
        """Take in a block: its points, their solution, and where its controls came to rest."""
        solved = np.array([s is Status.SOLVED for s in solution.status])
        bad = np.flatnonzero(~solved)
        self.unsolved |= {int(points[i]): solution.status[i] for i in bad}
        hours = np.where(solved, self.points.hours[points], 0.0)
        self.hours += float(hours.sum())
        at, by_phase = ({}, {}) if rested is None else branch_notches(self.moving, rested.notch)
        rows = replace(self.rows, network=solution.network, notches=at, phase_notches=by_phase)
        tables = tables_of(self.layout, self.zones, rows, solution, points.size)
        self._nodes(tables, points, hours)
        self._branches(tables, points, hours)
        self._attachments(tables, points, hours)
        self._whole(tables, points, solved)
        if rested is not None:
            self._stepping(rested, solved, hours, self.points.hours[points])

    def _nodes(self, tables: Tables, points: Index, hours: Real) -> None:
        low, high, drop = (tables.nodes.column(name) for name in ("percent", "high_percent", "drop_percent"))
        self.node_live |= tables.nodes.column("live")
        self.most["low"].add(-low, points)
        self.most["high"].add(high, points)
        self.most["drop"].add(drop, points)
        self.sum["below"] += (margin_of(low, self.limits.low_percent, True) < 0) @ hours
        self.sum["above"] += (margin_of(high, self.limits.high_percent, False) < 0) @ hours
        if self.limits.drop_percent is not None:
            self.sum["dropped"] += (margin_of(drop, self.limits.drop_percent, False) < 0) @ hours
        _mark(self.course, "lowest", np.where(np.isnan(low), np.inf, low), points, least=True)
        _mark(self.course, "highest", np.where(np.isnan(high), -np.inf, high), points)

    def _branches(self, tables: Tables, points: Index, hours: Real) -> None:
        column = tables.branches.column
        loaded, through = column("loaded_percent"), np.nan_to_num(column("through_kw"))
        self.branch_live |= column("live")
        self.most["amps"].add(column("current_a"), points)
        self.most["loaded"].add(loaded, points)
        self.sum["over"] += (margin_of(loaded, self.limits.most_loaded_percent, False) < 0) @ hours
        self.sum["through"] += np.maximum(through, 0.0) @ hours
        self.sum["back"] += np.maximum(-through, 0.0) @ hours
        for name in ("loss", "copper", "iron"):
            self.sum[name] += np.nan_to_num(column(f"{name}_kw")) @ hours
        _mark(self.course, "loaded", np.where(np.isnan(loaded), -np.inf, loaded), points)

    def _attachments(self, tables: Tables, points: Index, hours: Real) -> None:
        kw = tables.attachments.column("kw")
        self.most["kw"].add(kw, points)
        self.sum["kwh"] += np.nan_to_num(kw) @ hours
        self.sum["kwh_back"] += np.maximum(-np.nan_to_num(kw), 0.0) @ hours

    def _whole(self, tables: Tables, points: Index, solved: NDArray[np.bool_]) -> None:
        balance = tables.balance
        for name in ("supply_kw", "generation_kw", "load_kw", "line_kw", "copper_kw", "iron_kw"):
            self.course[name][points] = np.where(solved, getattr(balance, name), np.nan)
        self.closure = max(self.closure, float(balance.closure[solved].max(initial=0.0)))

    def _stepping(self, rested: Controlled, solved: NDArray[np.bool_], hours: Real, lasts: Real) -> None:
        changers = np.array(self.moving.changers, dtype=np.intp)
        for row in dict.fromkeys(self.moving.changers):
            own = changers == row  # several, where each phase steps by itself
            notch = rested.notch[own][:, solved]
            if notch.size:
                self.notch["least"][row] = np.fmin(self.notch["least"][row], notch.min())
                self.notch["most"][row] = np.fmax(self.notch["most"][row], notch.max())
            rest = rested.rest[own]
            self.sum["stopped"][row] += float((rest == Rest.AT_STOP).any(axis=0) @ hours)
            self.sum["hunting"][row] += float((rest == Rest.HUNTING).any(axis=0) @ lasts)

    def gaps(self) -> tuple[Gap, ...]:
        """The points without an answer, those in a row that say the same together."""
        found: list[Gap] = []
        for point in sorted(self.unsolved):
            status, hours = self.unsolved[point], float(self.points.hours[point])
            last = found[-1] if found else None
            if last is not None and last.last == point - 1 and last.status is status:
                found[-1] = Gap(last.first, point, last.hours + hours, status)
            else:
                found.append(Gap(point, point, hours, status))
        return tuple(found)

    def whole(self) -> Course:
        """The year point by point."""
        return Course(**self.course)

    def rows_that(self, kind: str) -> NDArray[np.bool_]:
        """Which attachments are supplies, loads or generators, or which branches transformers."""
        kinds: dict[str, tuple[Iterable[Any], tuple[type, ...]]] = {
            "supply": (self.layout.attachments, (Supply,)),
            "load": (self.layout.attachments, (Load, Motor)),
            "generator": (self.layout.attachments, (Generator,)),
            "transformer": (self.layout.branches, (Transformer,)),
        }
        elements, types = kinds[kind]
        return np.array([isinstance(one, types) for one in elements], dtype=bool)


_COURSE = (
    "supply_kw", "generation_kw", "load_kw", "line_kw", "copper_kw", "iron_kw",
    "lowest_percent", "highest_percent", "loaded_percent",
)  # fmt: skip
_ROWS = ("lowest_row", "highest_row", "loaded_row")


def _mark(
    course: dict[str, NDArray[Any]], name: str, known: Real, points: Index, *, least: bool = False
) -> None:
    """Which row is the worst at each point, and by how much; nothing where none is known."""
    if not known.size:
        return
    row = known.argmin(axis=0) if least else known.argmax(axis=0)
    worst = known[row, np.arange(known.shape[1])]
    real = np.isfinite(worst)
    course[f"{name}_percent"][points] = np.where(real, worst, np.nan)
    course[f"{name}_row"][points] = np.where(real, row, -1)
