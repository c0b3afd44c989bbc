"""The figures that stand on the paper just now."""

import math
from typing import Any

from msgspec import Struct
from numpy.typing import NDArray

from app.canvas import gauge, phase_words, wording
from app.canvas.phase_mark import Phases
from app.model.drawing import Limits
from app.model.kinds import Attachment, Branch, Transformer
from app.study.outcome import Outcome, Table

APART = 0.5  # percent from the lowest phase to the highest that the gauge tells apart


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
        """False where the outcome holds no figures of the case."""
        return self.outcome.solved(self.case)

    def rows(self, name: str, id: str) -> tuple[Any, Any]:
        """The state of an element, and its state before where that is known."""
        table = getattr(self.outcome, name)
        now = Row(table, id, self.case)
        if self.before is None or self.case >= len(self.before.cases):
            return now, None
        was = getattr(self.before, name)
        return now, Row(was, id, self.case) if id in was else None

    def wires(self, name: str, id: str) -> tuple[Any, Any] | None:
        """The conductors of an element, and the same before where that is known; None where phases are
        alike."""
        table = getattr(self.outcome.wires, name, None)
        if table is None or id not in table:
            return None
        now, was = Row(table, id, self.case), None
        if self.before is not None and self.case < len(self.before.cases):
            was = getattr(self.before.wires, name, None)
        return now, Row(was, id, self.case) if was is not None and id in was else None

    def system(self, node: str) -> str:
        """The wires of a node's zone: three-phase where all are alike."""
        found = self.wires("nodes", node)
        return found[0].system if found is not None else "three-phase"

    def branch_wires(self, id: str, branch: Any) -> tuple[Any, str, str] | None:
        """A branch's conductors, which of them it has, and the system they belong to."""
        found = self.wires("branches", id)
        if found is None:
            return None
        at = branch.start
        if isinstance(branch, Transformer) and self.outcome.fed_winding(id, self.case) == 2:
            at = branch.end
        return found[0], phase_words.conductors(found[0], branch), self.system(at)

    def phases(self, id: str, element: Branch | Attachment) -> Phases | None:
        """What the mark of an element says: what reaches it where that is known, else what it states."""
        if isinstance(element, Branch):
            wires = self.branch_wires(id, element)
            return phase_words.reaching(element, *wires[1:]) if wires else phase_words.stated(element)
        found = self.wires("attachments", id)
        if found is None:
            return phase_words.stated(element)
        return phase_words.reaching(element, found[0].phases, self.system(element.node))

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
        high_now = nodes.column("high_percent")[nodes.rows[id]].tolist()
        known += [p for p in high_now if not math.isnan(p)]
        low, high = self.limits.low_percent, self.limits.high_percent
        now, upper = percent[self.case], high_now[self.case]
        apart = upper if self.outcome.wires is not None and upper - now > APART else None
        if apart is not None and wording.is_over(now, upper, self.limits):
            now, apart = upper, None
        return gauge.Reading(low, high, min(known), max(known), now, apart)


def column_of(table: Table[Any], name: str, case: int) -> list[Any]:
    """One column of one case, row by row."""
    return list(array_of(table, name, case).tolist())


def array_of(table: Table[Any], name: str, case: int) -> NDArray[Any]:
    """The same as an array."""
    column = table.columns[name]
    return column if column.ndim == 1 else column[:, case]
