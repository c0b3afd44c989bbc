"""What differs between two drawings: quick on large ones, since unchanged elements are the same object."""

from dataclasses import dataclass
from itertools import zip_longest

from app.model.drawing import Drawing, Own
from app.model.kinds import AnyElement

GEOMETRY = frozenset({"x", "y", "dx", "dy", "via", "length", "upright"})
TOPOLOGY = frozenset({"node", "start", "end", "closed"})


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
    geometry: set[str] = set()
    parameter: set[str] = set()
    topology: set[str] = set()
    for id, was, now in _pairs(before, after):
        if was is None or now is None or type(was) is not type(now):
            topology.add(id)
            continue
        for name in was.__struct_fields__:
            if getattr(was, name) != getattr(now, name):
                (geometry if name in GEOMETRY else topology if name in TOPOLOGY else parameter).add(id)
    parameter |= _own_in_cases(before, after)
    return Change(frozenset(geometry), frozenset(parameter), frozenset(topology), _rest(before, after))


def _pairs(before: Drawing, after: Drawing) -> list[tuple[str, AnyElement | None, AnyElement | None]]:
    if before.elements is after.elements:
        return []
    found = before.elements.get
    pairs = [(i, found(i), now) for i, now in after.elements.items() if found(i) is not now]
    gone = [i for i in before.elements if i not in after.elements]
    return pairs + [(i, before.elements[i], None) for i in gone]


def _own_in_cases(before: Drawing, after: Drawing) -> set[str]:
    """Elements of which a case says something else now."""
    if before.cases is after.cases:
        return set()
    nothing: dict[str, Own] = {}
    pairs = zip_longest((c.own for c in before.cases), (c.own for c in after.cases), fillvalue=nothing)
    told = {id for was, now in pairs for id in was.keys() | now.keys() if was.get(id) != now.get(id)}
    return told & after.elements.keys()


def _rest(before: Drawing, after: Drawing) -> bool:
    return any(
        getattr(before, name) != getattr(after, name)
        for name in before.__struct_fields__
        if name != "elements"
    )


def added(before: Drawing, after: Drawing) -> tuple[str, ...]:
    """Ids that an edit brought in, in the order of the drawing."""
    return tuple(i for i in after.elements if i not in before.elements)
