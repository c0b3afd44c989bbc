"""What rows of results are made from, and what a row is."""

from collections.abc import Callable

from msgspec import Struct

from app.model.drawing import Drawing
from app.study.outcome import Outcome, Verdict

Write = Callable[[float], str]


class Row(Struct, frozen=True):
    """One result: a cell for each case; `change` belongs to the case shown."""

    label: str
    cells: tuple[str, ...]
    change: str = ""
    verdict: Verdict | None = None


class Asked(Struct, frozen=True):
    """What rows are made from: the drawing, its outcome, the one before the drag, the case shown."""

    drawing: Drawing
    outcome: Outcome
    before: Outcome | None
    case: int

    def verdict(self, id: str, check: tuple[str, ...]) -> Verdict | None:
        """The worst verdict of the case shown among the element's findings of these checks."""
        if self.case >= len(self.outcome.cases):
            return None
        return self.outcome.verdict_of(id, self.case, check)
