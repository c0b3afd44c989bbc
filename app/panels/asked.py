"""What rows of results are made from, and what a row is."""

from collections.abc import Callable, Iterable

from msgspec import Struct

from app.model.drawing import Drawing
from app.study.outcome import Outcome, Verdict
from solver.status import Status

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

    def lacking(self, case: int) -> str:
        """What stands where a case has no figure."""
        barred = self.outcome.status is Status.INVALID  # in all cases
        return "dead" if barred or self.outcome.solved(case) else "not solved"

    def cells(self, figures: Iterable[float], write: Write) -> tuple[str, ...]:
        """A figure of each case, written."""
        return tuple(
            write(float(figure)) if self.outcome.solved(case) else self.lacking(case)
            for case, figure in enumerate(figures)
        )

    def verdict(self, id: str, check: tuple[str, ...]) -> Verdict | None:
        """The worst verdict of the case shown among the element's findings of these checks."""
        if self.case >= len(self.outcome.cases):
            return None
        return self.outcome.verdict_of(id, self.case, check)
