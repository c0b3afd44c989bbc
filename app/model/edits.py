"""Edits: pure functions from drawing to drawing. They may refuse, with a reason for people."""

from dataclasses import dataclass

from app.model.drawing import Drawing


class EditRefused(ValueError):
    """The reason, as one sentence that names element, field, value and what is allowed."""


@dataclass(frozen=True, slots=True)
class Change:
    """What differs between two drawings."""

    geometry: frozenset[str]
    parameter: frozenset[str]
    topology: frozenset[str]
    rest: bool  # project, limits, cases, parts, frequency

    @property
    def ids(self) -> frozenset[str]:
        """Every element touched."""
        return self.geometry | self.parameter | self.topology


def diff(before: Drawing, after: Drawing) -> Change:
    """What differs between two drawings."""
    raise NotImplementedError
