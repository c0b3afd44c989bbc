"""What every table looks up: names, values given or assumed, wires, limits, which cases there are."""

from dataclasses import replace
from functools import cached_property

from app.model.drawing import Drawing, label
from app.model.kinds import KIND_WORDS, Branch, Element, Supply, kind_of
from app.model.parts import is_american
from app.sheet.table import (
    BLANK,
    Cell,
    Cells,
    Column,
    Origin,
    Ref,
    Style,
    given,
    put_in,
    text,
)
from app.study.checking import NOISE
from app.study.layout import NONE, Layout, lay_out
from app.study.outcome import Assumption, BranchState, Outcome
from app.study.words import among, tell
from solver.status import Status

FAIL = "FAIL"
HOLDS = "holds"
HOLDS_THERE = "holds where solved"
PASSED = f"<=-{NOISE:.0E}"  # what a formula says of a margin that fails
CASE = (Column("number", "No.", digits=0, width=5), Column("case", "Case", style=Style.TEXT, width=23))


class Subject:
    """A drawing and its outcome, as the tables read them."""

    def __init__(self, drawing: Drawing, outcome: Outcome) -> None:
        self.drawing = drawing
        self.outcome = outcome
        self.cases = outcome.cases
        self.solved = outcome.status is Status.SOLVED
        self.figures = bool(outcome.solved_cases)

    @property
    def first(self) -> int:
        """The first case that has figures."""
        return next(iter(self.outcome.solved_cases), 0)

    @cached_property
    def unsolved(self) -> str:
        """The cases without figures where others have them: `case Heavy`."""
        count = range(len(self.cases))
        names = [self.cases[case] for case in count if not self.outcome.solved(case)]
        return among(names) if names and self.figures else ""

    @property
    def held(self) -> str:
        """The verdict of what holds: in all cases, or where a case is missing only in the others."""
        return HOLDS_THERE if self.unsolved else HOLDS

    def case_name(self, case: int) -> str:
        """The name of a case, which says so where it is not solved."""
        return self.cases[case] + ("" if self.outcome.solved(case) else ": not solved")

    def short(self, note: str) -> str:
        """A note on a table of figures, which says what it lacks."""
        lacks = f"Without {self.unsolved}, not solved: worst figures and verdicts are of the other cases."
        return f"{note} {lacks}".strip() if self.unsolved else note

    @property
    def one_case(self) -> bool:
        """True where figures stand beside the data; with more cases they have a table of their own."""
        return len(self.cases) == 1

    @property
    def american(self) -> bool:
        """60 Hz: the 120 V base and Letter paper."""
        return is_american(self.drawing.frequency_hz)

    @cached_property
    def layout(self) -> Layout:
        """The graph of the drawing."""
        return lay_out(self.drawing)

    @cached_property
    def _assumed(self) -> dict[tuple[str, str], Assumption]:
        return {(a.id, a.field): a for a in self.outcome.assumptions}

    def value(self, id: str, field: str) -> Cell:
        """What the drawing states of a field, else what was assumed for it, else blank."""
        stated = getattr(self.drawing.elements[id], field)
        if stated is not None:
            origin = Origin.ASSUMED if field in self.drawing.elements[id].assumed else Origin.GIVEN
            as_is = isinstance(stated, str | bool)
            return replace(given(stated if as_is else float(stated)), origin=origin)
        put = self._assumed.get((id, field))
        return BLANK if put is None else put_in(float(put.value))

    def two_wire(self, node: str) -> bool:
        """True where the supply that feeds a node has two wires."""
        feeding = self.layout.supply_of[self.layout.tree[self.layout.node_row[node]]]
        supply = None if feeding == NONE else self.layout.attachments[feeding]
        return isinstance(supply, Supply) and supply.wires == "two-wire"

    @cached_property
    def wires(self) -> set[bool]:
        """Whether any node is of a two-wire part, and whether any is not."""
        return {self.two_wire(n) for n in self.drawing.nodes()}

    def root(self, node: str) -> str:
        """The factor between line volts and apparent power, as a formula writes it."""
        return "1" if self.two_wire(node) else "SQRT(3)"

    def identity(self, id: str) -> Cells:
        """Id and name."""
        return {"id": text(id), "name": text(self.drawing.elements[id].name)}

    def ends(self, id: str, branch: Branch) -> Cells:
        """The nodes at both ends of a branch."""
        return {"from": text(label(self.drawing, branch.start)), "to": text(label(self.drawing, branch.end))}

    def tell(self, id: str) -> str:
        """An element by name and id."""
        return tell(self.drawing, id)

    def state(self, id: str, case: int) -> BranchState:
        """The figures of a branch in a case."""
        return self.outcome.branches.at(id, case)

    def unfed(self) -> Cell:
        """The verdict of what carries no figures."""
        return text("dead" if self.figures else "not solved")


IDENTITY = (Column("id", "Id", style=Style.TEXT, width=7), Column("name", "Name", style=Style.TEXT, width=16))
FROM_TO = (Column("from", "From", style=Style.TEXT, width=12), Column("to", "To", style=Style.TEXT, width=12))


def limit(name: str) -> Ref:
    """The cell of the Basis that holds a limit."""
    return Ref("value", "limits", name)


def kind_name(element: Element) -> str:
    """The kind in words."""
    return KIND_WORDS[kind_of(element)]
