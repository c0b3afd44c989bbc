"""Branches that join the same two nodes lie in lanes side by side."""

from app.model.drawing import Drawing
from app.model.kinds import Branch

LANE = 4.0  # grid steps from one to the next

Pairs = dict[tuple[str, str], list[str]]


def lane(drawing: Drawing, branch_id: str, branch: Branch) -> float:
    """0 for the first branch between two nodes, then one lane to either side in turn, in grid steps."""
    place = _SIDE_BY_SIDE.of(drawing, branch_id, _pair(branch)).index(branch_id)
    return LANE * ((place + 1) // 2) * (1 if place % 2 else -1)


def _pair(branch: Branch) -> tuple[str, str]:
    return min(branch.start, branch.end), max(branch.start, branch.end)


class _SideBySide:
    """Branches without bends by the pair of nodes they join; remembers the drawing asked about last."""

    def __init__(self) -> None:
        self._elements: object = None
        self._found: Pairs = {}

    def of(self, drawing: Drawing, id: str, pair: tuple[str, str]) -> list[str]:
        """All branches of one pair, in the order drawn."""
        if self._elements is not drawing.elements or id not in self._found.get(pair, ()):
            self._elements, self._found = drawing.elements, _pairs(drawing)
        return self._found[pair]


def _pairs(drawing: Drawing) -> Pairs:
    found: Pairs = {}
    for id, branch in drawing.elements.items():
        if isinstance(branch, Branch) and not branch.via:
            found.setdefault(_pair(branch), []).append(id)
    return found


_SIDE_BY_SIDE = _SideBySide()
