"""The routes the voltage strip shows: which branch feeds which node, how far along, after how many steps."""

from collections.abc import Iterable
from typing import Any

import numpy as np
from msgspec import Struct

from app.model.drawing import Drawing
from app.model.kinds import Attachment, Branch, Node, Transformer
from app.study.outcome import Finding, Outcome, Table


class Stop(Struct, frozen=True):
    """A node on its route."""

    id: str
    route_m: float
    steps: int  # transformers between it and its supply
    feeder: str  # the branch that feeds it, "" at a supply
    parent: str  # the node at the other end of that branch


class Tie(Struct, frozen=True):
    """A live branch that feeds no node: it closes a ring, or joins two supplies."""

    branch: str
    near: str  # the end with fewer transformers before it, then the nearer one
    far: str


class Routes(Struct, frozen=True):
    """All live nodes by id, supplies first, the main route from its supply to its far end, and the ties."""

    stops: dict[str, Stop]
    main: tuple[str, ...]
    ties: tuple[Tie, ...] = ()

    @property
    def longest_m(self) -> float:
        """The farthest node."""
        return max((s.route_m for s in self.stops.values()), default=0.0)

    def way_to(self, id: str) -> tuple[str, ...]:
        """The nodes from the supply to this one."""
        way = []
        while id in self.stops and id not in way:
            way.append(id)
            id = self.stops[id].parent
        return tuple(reversed(way))

    @property
    def backbone(self) -> "Routes":
        """The main route alone."""
        return Routes({i: self.stops[i] for i in self.main}, self.main)

    def fed_by(self, branch: str) -> Stop | None:
        """The node that a branch feeds."""
        return next((s for s in self.stops.values() if s.feeder == branch), None)


def routes(
    drawing: Drawing, outcome: Outcome, case: int, selection: Iterable[str], last: Routes | None = None
) -> Routes:
    """The main route leads to what is selected, else to the node with the least margin. `last` is used
    again where the layout is fed as it was."""
    stops = _stops(drawing, outcome, case, last.stops if last else {})
    made = Routes(stops, (), _ties(drawing, outcome, stops))
    target = _target(drawing, outcome, made, selection)
    return Routes(stops, made.way_to(_onward(made, target)) if target else (), made.ties)


def _ties(drawing: Drawing, outcome: Outcome, stops: dict[str, Stop]) -> tuple[Tie, ...]:
    if np.count_nonzero(outcome.branches.column("live")) <= len(outcome.upstream):
        return ()
    feeding, found = {s.feeder for s in stops.values()}, []
    for id, live in zip(outcome.branches.ids, outcome.branches.column("live").tolist(), strict=True):
        branch = drawing.elements.get(id)
        if not live or id in feeding or not isinstance(branch, Branch):
            continue
        if branch.start in stops and branch.end in stops:
            ends = (stops[branch.start], stops[branch.end])
            near, far = sorted(ends, key=lambda s: (s.steps, s.route_m))
            found.append(Tie(id, near.id, far.id))
    return tuple(found)


def _stops(drawing: Drawing, outcome: Outcome, case: int, last: dict[str, Stop]) -> dict[str, Stop]:
    found: dict[str, Stop] = {}
    alive, routes = column(outcome.nodes, "live", case), column(outcome.nodes, "route_m", case)
    live = {i: routes[i] for i, alive_now in alive.items() if alive_now and i in drawing.elements}
    if live.keys() == last.keys() and all(_stands(drawing, outcome, s, live) for s in last.values()):
        return last
    for id in sorted(live, key=live.__getitem__):
        _place(drawing, outcome, id, found, live)
    return found


def _stands(drawing: Drawing, outcome: Outcome, stop: Stop, live: dict[str, float]) -> bool:
    """True where a node is fed as it was."""
    if stop.route_m != live[stop.id] or stop.feeder != outcome.upstream.get(stop.id, ""):
        return False
    return not stop.feeder or stop.parent == _parent(drawing, outcome, stop.id)


def column(table: Table, name: str, case: int) -> dict[str, Any]:
    """One column of one case by id, read at once."""
    values = table.column(name)
    shown = values if values.ndim == 1 else values[:, min(case, values.shape[1] - 1)]
    return dict(zip(table.ids, shown.tolist(), strict=True))


def _place(
    drawing: Drawing, outcome: Outcome, id: str, found: dict[str, Stop], live: dict[str, float]
) -> None:
    """Put a node in, after the nodes on its way that are not in yet."""
    waiting = []
    while id in live and id not in found and id not in waiting:
        waiting.append(id)
        id = _parent(drawing, outcome, id)
    for node in reversed(waiting):
        feeder = outcome.upstream.get(node, "")
        parent = _parent(drawing, outcome, node)
        before = found.get(parent)
        step = isinstance(drawing.elements.get(feeder), Transformer)
        steps = (before.steps if before else 0) + step
        found[node] = Stop(node, live[node], steps, feeder if before else "", parent if before else "")


def _parent(drawing: Drawing, outcome: Outcome, id: str) -> str:
    branch = drawing.elements.get(outcome.upstream.get(id, ""))
    if not isinstance(branch, Branch):
        return ""
    return branch.start if branch.end == id else branch.end


def _target(drawing: Drawing, outcome: Outcome, routes: Routes, selection: Iterable[str]) -> str:
    for id in sorted(selection):
        element = drawing.elements.get(id)
        if isinstance(element, Node) and id in routes.stops:
            return id
        if isinstance(element, Attachment) and element.node in routes.stops:
            return element.node
        fed = routes.fed_by(id)
        if fed is not None:
            return fed.id
        tie = next((t for t in routes.ties if t.branch == id), None)
        if tie is not None:
            return tie.far
    return _worst(outcome.findings, routes) or _farthest(routes)


def _worst(findings: Iterable[Finding], routes: Routes) -> str:
    """The node of the most urgent voltage finding."""
    about = [
        (f.verdict.rank, f.margin, f.ids[0])
        for f in findings
        if f.margin is not None and f.ids and f.ids[0] in routes.stops
    ]
    return min(about)[2] if about else ""


def _farthest(routes: Routes) -> str:
    return max(routes.stops, key=lambda i: (routes.stops[i].route_m, routes.stops[i].steps), default="")


def _onward(routes: Routes, id: str) -> str:
    """From the target on to the far end of its longest branch, so that the route does not stop halfway."""
    children: dict[str, list[str]] = {}
    for stop in routes.stops.values():
        children.setdefault(stop.parent, []).append(stop.id)
    best, reach, waiting = id, routes.stops[id].route_m, [id]
    while waiting:
        node = waiting.pop()
        stop = routes.stops[node]
        if (stop.route_m, stop.steps) > (reach, routes.stops[best].steps):
            best, reach = node, stop.route_m
        waiting += children.get(node, [])
    return best
