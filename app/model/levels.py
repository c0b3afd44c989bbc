"""Which voltage each node is meant for: stated on it, else its supply's, else the feeding winding's."""

from collections import defaultdict, deque
from collections.abc import Iterable
from typing import NamedTuple

from app.model.drawing import Drawing
from app.model.kinds import Branch, Node, Supply, Switch, Transformer

THREE_PHASE = "three-phase"
TWO_WIRE = "two-wire"
SPLIT = "split-phase"


class Level(NamedTuple):
    """Nominal volts of a node, on what basis, and the system it belongs to."""

    volts: float
    how: str  # "stated", "supply S1" or "winding 2 of T1, assumed"
    wires: str = THREE_PHASE

    @property
    def assumed(self) -> bool:
        """True where nobody stated it."""
        return self.how.endswith("assumed")


def is_single(t: Transformer) -> bool:
    """Whether a transformer is one single-phase unit, two windings on one core."""
    return t.build == "centre-tapped" or t.build == "as its group" and t.vector_group.startswith("I")


def system_behind(t: Transformer, winding: int, wires: str) -> str:
    """The system at a winding of a transformer, where its other winding stands in `wires`."""
    if t.build == "centre-tapped":
        return SPLIT if winding == 2 else TWO_WIRE
    if is_single(t):
        return TWO_WIRE
    return wires if t.build == "as its group" else THREE_PHASE


def nominal_levels(drawing: Drawing) -> dict[str, Level]:
    """The level of every node that has one, by id; a node nothing is known of is left out."""
    walk = _Walk(drawing)
    for id, supply in _supplies(drawing):
        walk.spread(supply.node, Level(supply.nominal_v, f"supply {id}", supply.wires))
    walk.across_transformers()
    for id, node in walk.nodes.items():
        if node.nominal_v is not None and id not in walk.levels:
            walk.spread(id, Level(node.nominal_v, f"stated on {id}"))
    walk.across_transformers()
    walk.from_unfed_transformers()
    return {i: walk.stated(i, level) for i, level in walk.levels.items()}


def _supplies(drawing: Drawing) -> Iterable[tuple[str, Supply]]:
    return ((i, e) for i, e in drawing.elements.items() if isinstance(e, Supply))


class _Walk:
    """Spreads levels over what is joined without a transformer between."""

    def __init__(self, drawing: Drawing) -> None:
        self.nodes: dict[str, Node] = drawing.nodes()
        self.levels: dict[str, Level] = {}
        self.joined: dict[str, list[str]] = defaultdict(list)
        self.transformers: list[tuple[str, Transformer]] = []
        self.reached: deque[str] = deque()
        self.at: dict[str, list[tuple[str, Transformer]]] = defaultdict(list)
        for id, branch in drawing.elements.items():
            if isinstance(branch, Transformer):
                self.transformers.append((id, branch))
                self.at[branch.start].append((id, branch))
                self.at[branch.end].append((id, branch))
            elif isinstance(branch, Branch) and not (isinstance(branch, Switch) and not branch.closed):
                self.joined[branch.start].append(branch.end)
                self.joined[branch.end].append(branch.start)

    def spread(self, root: str, level: Level) -> None:
        """Give a level to a node and to all that is joined to it and has none yet."""
        if root not in self.nodes or root in self.levels:
            return
        self.levels[root] = level
        waiting = [root]
        while waiting:
            here = waiting.pop()
            self.reached.append(here)
            for there in self.joined[here]:
                if there in self.nodes and there not in self.levels:
                    self.levels[there] = level
                    waiting.append(there)

    def across_transformers(self) -> None:
        """Carry on behind every transformer reached so far."""
        while self.reached:
            here = self.reached.popleft()
            for id, t in self.at[here]:
                winding, far = (2, t.end) if here == t.start else (1, t.start)
                if far in self.nodes and far not in self.levels:
                    self.spread(far, self.behind(id, t, winding, far, self.levels[here].wires))

    def behind(self, id: str, t: Transformer, winding: int, far: str, wires: str) -> Level:
        """The level of the part behind a winding: the nearest statement in it, else the winding's."""
        kept = system_behind(t, winding, wires)
        stated = self.first_stated(far)
        if stated is not None:
            return Level(self.nodes[stated].nominal_v or 0.0, f"stated on {stated}", kept)
        return Level(t.v1_v if winding == 1 else t.v2_v, f"winding {winding} of {id}, assumed", kept)

    def first_stated(self, root: str) -> str | None:
        """The nearest node with a stated voltage, joined to this one without a transformer between."""
        seen, waiting = {root}, deque([root])
        while waiting:
            here = waiting.popleft()
            if self.nodes[here].nominal_v is not None:
                return here
            for there in self.joined[here]:
                if there in self.nodes and there not in seen:
                    seen.add(there)
                    waiting.append(there)
        return None

    def from_unfed_transformers(self) -> None:
        """Where no supply leads, the windings say what they are made for."""
        for id, t in self.transformers:
            wires = system_behind(t, 2, THREE_PHASE)
            for winding, root in ((1, t.start), (2, t.end)):
                if root in self.nodes and root not in self.levels:
                    self.spread(root, self.behind(id, t, winding, root, wires))
            self.across_transformers()

    def stated(self, id: str, level: Level) -> Level:
        """A node's own statement stands above what reaches it."""
        own = self.nodes[id].nominal_v
        return level if own is None else Level(own, "stated", level.wires)
