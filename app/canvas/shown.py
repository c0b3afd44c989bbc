"""The figures that stand on the paper just now."""

import math
from typing import Any

from msgspec import Struct
from numpy.typing import NDArray

from app.canvas import gauge
from app.model.drawing import Limits
from app.model.kinds import Branch
from app.study.outcome import Outcome, Table
from solver.status import Status


class Row:
    """The state of one element in one case, each figure read where it is asked for."""

    __slots__ = ("_at", "_case", "_columns")

    def __init__(self, table: Table[Any], id: str, case: int) -> None:
        self._columns, self._at, self._case = table.columns, table.rows[id], case

    def __getattr__(self, name: str) -> Any:
        try:
            column = self._columns[name]
        except KeyError:
            raise AttributeError(name) from None
        return (column[self._at] if column.ndim == 1 else column[self._at, self._case]).item()


class Shown(Struct, frozen=True):
    """The figures on the paper: one case of an outcome, and the outcome that changes are counted from."""

    limits: Limits
    outcome: Outcome
    case: int
    before: Outcome | None

    @property
    def solved(self) -> bool:
        """False where the outcome holds no figures."""
        return self.outcome.status is Status.SOLVED

    def rows(self, name: str, id: str) -> tuple[Any, Any]:
        """The state of an element, and its state before where that is known."""
        table = getattr(self.outcome, name)
        now = Row(table, id, self.case)
        if self.before is None or self.case >= len(self.before.cases):
            return now, None
        was = getattr(self.before, name)
        return now, Row(was, id, self.case) if id in was else None

    def between_live(self, branch: Branch) -> bool:
        """True where both ends of a branch are live; a switch between them may still be open."""
        nodes = self.outcome.nodes
        return all(i in nodes and Row(nodes, i, self.case).live for i in (branch.start, branch.end))

    def reading(self, id: str) -> gauge.Reading | None:
        """What the gauge of a node shows; None where it is dead."""
        nodes = self.outcome.nodes
        percent = nodes.column("percent")[nodes.rows[id]].tolist()
        if math.isnan(percent[self.case]):
            return None
        known = [p for p in percent if not math.isnan(p)]
        low, high = self.limits.low_percent, self.limits.high_percent
        return gauge.Reading(low, high, min(known), max(known), percent[self.case])


def column_of(table: Table[Any], name: str, case: int) -> list[Any]:
    """One column of one case, row by row."""
    return list(array_of(table, name, case).tolist())


def array_of(table: Table[Any], name: str, case: int) -> NDArray[Any]:
    """The same as an array."""
    column = table.columns[name]
    return column if column.ndim == 1 else column[:, case]
