"""The drawing as a graph: which supply feeds what, through which branch, in which voltage zone."""

from collections import Counter
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.model.kinds import Attachment, Branch, Element, Line, Node, Supply, Switch, Transformer
from solver import Forest, Trouble

NONE = -1
Elements = Mapping[str, Element]
Index = NDArray[np.intp]


@dataclass(slots=True)
class Layout:
    """Rows of nodes, branches and attachments, and the trees that grow from the supplies.

    Trees come first in the order of the supplies that root them, then one tree for every dead part.
    """

    node_ids: list[str]
    nodes: list[Node]
    branch_ids: list[str]
    branches: list[Branch]
    attachment_ids: list[str]
    attachments: list[Attachment]
    node_row: dict[str, int]
    branch_row: dict[str, int]
    attachment_row: dict[str, int]
    start: list[int]  # node row of each branch
    end: list[int]
    at: list[int]  # node row of each attachment
    supplies: list[int]  # attachment rows
    units: list[int]  # branch rows of transformers
    tree: list[int] = field(default_factory=list)  # tree of each node
    roots: list[int] = field(default_factory=list)  # node row of each tree's root
    supply_of: list[int] = field(default_factory=list)  # attachment row of each tree's supply, or NONE
    fed_by: list[int] = field(default_factory=list)  # branch row that feeds each node, or NONE
    fed_from: list[int] = field(default_factory=list)  # node row that feeds each node, or NONE
    order: list[int] = field(default_factory=list)  # node rows, each after the node that feeds it
    depth: list[int] = field(default_factory=list)
    zone: list[int] = field(default_factory=list)  # voltage zone of each node
    zone_heads: list[int] = field(default_factory=list)  # node row at which each zone begins
    loose: list[int] = field(default_factory=list)  # node rows where one branch ends and nothing hangs
    closing: list[int] = field(default_factory=list)  # branch rows that close a loop
    joined: list[tuple[int, int]] = field(default_factory=list)  # (root supply, further supply) in one tree
    live: list[bool] = field(default_factory=list)  # whether a supply feeds each node
    upstream: dict[str, str] = field(
        default_factory=dict
    )  # live node id to the id of the branch that feeds it
    before: dict[str, str] = field(default_factory=dict)  # live node id to the id of the node that feeds it
    zone_of: dict[str, int] = field(default_factory=dict)  # node id to its zone
    arrays: "Arrays | None" = None
    forest: Forest | Trouble | None = None  # the solver's view of the same graph, once it was asked for

    def far(self, branch: int, node: int) -> int:
        """The node at the other end of a branch."""
        return self.end[branch] if self.start[branch] == node else self.start[branch]

    def climb(self, node: int) -> Iterator[int]:
        """Branch rows from a node up to the root of its tree."""
        while (branch := self.fed_by[node]) != NONE:
            yield branch
            node = self.fed_from[node]

    def ring(self, branch: int) -> list[int]:
        """Branch rows of the loop that a closing branch closes, itself first."""
        one, other = self.start[branch], self.end[branch]
        left, right = [branch], []
        while one != other:
            if self.depth[one] >= self.depth[other]:
                left.append(self.fed_by[one])
                one = self.fed_from[one]
            else:
                right.append(self.fed_by[other])
                other = self.fed_from[other]
        return left + right[::-1]


@dataclass(frozen=True, slots=True)
class Arrays:
    """The graph once more as arrays, for what is worked out of whole columns.

    start, end : (branch,) node rows
    at : (attachment,) node rows
    tree, zone : (node,)
    root : (node,) node row of the root of its tree
    live : (node,) bool
    forward : (branch,) bool, fed from its start, or dead
    """

    start: Index
    end: Index
    at: Index
    tree: Index
    zone: Index
    root: Index
    live: NDArray[np.bool_]
    forward: NDArray[np.bool_]


def arrays_of(layout: Layout) -> Arrays:
    """The graph as arrays, made once.

    layout : the graph

    Returns : Arrays
    """
    if layout.arrays is None:
        start, end, at, tree, zone, fed_by, roots = (
            np.array(a, dtype=np.intp)
            for a in (
                layout.start,
                layout.end,
                layout.at,
                layout.tree,
                layout.zone,
                layout.fed_by,
                layout.roots,
            )
        )
        live = np.array(layout.live, dtype=bool)
        forward = fed_by[start] != np.arange(len(start))
        layout.arrays = Arrays(start, end, at, tree, zone, roots[tree], live, forward)
    return layout.arrays


def is_bare(branch: Branch) -> bool:
    """True where a branch has no impedance at all: a closed switch or a line of no length.

    branch : any branch

    Returns : bool
    """
    if isinstance(branch, Line):
        return branch.length_m == 0 or (branch.r20_ohm_per_km == 0 and branch.x_ohm_per_km == 0)
    return isinstance(branch, Switch)


_last: tuple[Elements, Layout] | None = None


def lay_out(drawing: Drawing) -> Layout:
    """Sort the drawing into rows and trace it from its supplies.

    Where nothing that bears on the graph has changed since the last call, the graph is taken over.

    drawing : the drawing

    Returns : Layout
    """
    global _last
    last, elements = _last, drawing.elements
    moved = None if last is None else _moved(last[0], elements)
    if last is not None and moved is not None:
        layout = _with(last[1], {id: elements[id] for id in moved})
    else:
        layout = _sorted(elements)
        _trace(layout)
    _last = (elements, layout)
    return layout


def _moved(old: Elements, new: Elements) -> list[str] | None:
    """The ids whose elements are not the same; None where their graphs differ."""
    if list(old) != list(new):
        return None
    both = zip(new, old.values(), new.values(), strict=True)
    moved = [id for id, was, now in both if was is not now]
    return moved if all(_joins(old[id]) == _joins(new[id]) for id in moved) else None


def _with(layout: Layout, moved: Elements) -> Layout:
    """The same graph with other elements."""
    nodes, branches, attachments = list(layout.nodes), list(layout.branches), list(layout.attachments)
    for id, element in moved.items():
        if isinstance(element, Node):
            nodes[layout.node_row[id]] = element
        elif isinstance(element, Branch):
            branches[layout.branch_row[id]] = element
        elif isinstance(element, Attachment):
            attachments[layout.attachment_row[id]] = element
    return replace(layout, nodes=nodes, branches=branches, attachments=attachments)


def _joins(element: Element) -> tuple[object, ...]:
    """All of an element that bears on the graph."""
    if isinstance(element, Branch):
        return type(element), element.start, element.end, getattr(element, "closed", True)
    return type(element), getattr(element, "node", "")


_GROUPS: dict[type[Element], int] = {}


def _group(kind: type[Element]) -> int:
    found = _GROUPS.get(kind)
    if found is None:
        found = _GROUPS[kind] = 0 if issubclass(kind, Node) else 1 if issubclass(kind, Branch) else 2
    return found


def _elements(elements: Elements) -> tuple[list[Any], list[Any], list[Any]]:
    """Nodes, branches, attachments."""
    groups: tuple[list[Any], ...] = ([], [], [])
    for element in elements.values():
        groups[_group(type(element))].append(element)
    return groups[0], groups[1], groups[2]


def _sorted(elements: Elements) -> Layout:
    nodes, branches, attachments = _elements(elements)
    ids: tuple[list[str], ...] = ([], [], [])
    for id, element in elements.items():
        ids[_group(type(element))].append(id)
    row = {id: i for i, id in enumerate(ids[0])}
    return Layout(
        node_ids=ids[0],
        nodes=nodes,
        branch_ids=ids[1],
        branches=branches,
        attachment_ids=ids[2],
        attachments=attachments,
        node_row=row,
        branch_row={id: i for i, id in enumerate(ids[1])},
        attachment_row={id: i for i, id in enumerate(ids[2])},
        start=[row[b.start] for b in branches],
        end=[row[b.end] for b in branches],
        at=[row[a.node] for a in attachments],
        supplies=[i for i, a in enumerate(attachments) if isinstance(a, Supply)],
        units=[i for i, b in enumerate(branches) if isinstance(b, Transformer)],
    )


def _trace(layout: Layout) -> None:
    count = len(layout.node_ids)
    layout.tree, layout.zone, layout.depth = [NONE] * count, [NONE] * count, [0] * count
    layout.fed_by, layout.fed_from = [NONE] * count, [NONE] * count
    meeting, is_unit = _meeting(layout), [isinstance(b, Transformer) for b in layout.branches]
    for supply in layout.supplies:
        node = layout.at[supply]
        if layout.tree[node] != NONE:
            layout.joined.append((layout.supply_of[layout.tree[node]], supply))
            continue
        _grow(layout, node, supply, meeting, is_unit)
    for node in range(count):
        if layout.tree[node] == NONE:
            _grow(layout, node, NONE, meeting, is_unit)
    layout.live = [layout.supply_of[t] != NONE for t in layout.tree]
    ids = layout.node_ids
    for node, (branch, above) in enumerate(zip(layout.fed_by, layout.fed_from, strict=True)):
        if branch != NONE and layout.live[node]:
            layout.upstream[ids[node]] = layout.branch_ids[branch]
            layout.before[ids[node]] = ids[above]
    layout.zone_of = dict(zip(ids, layout.zone, strict=True))
    meetings = Counter([*layout.start, *layout.end])
    hung = set(layout.at)
    layout.loose = [n for n in range(count) if meetings[n] == 1 and n not in hung and layout.live[n]]


def _meeting(layout: Layout) -> list[list[int]]:
    """The branches that meet at each node, without open switches."""
    meeting: list[list[int]] = [[] for _ in layout.node_ids]
    for i, branch in enumerate(layout.branches):
        if not isinstance(branch, Switch) or branch.closed:
            meeting[layout.start[i]].append(i)
            if layout.end[i] != layout.start[i]:
                meeting[layout.end[i]].append(i)
    return meeting


def _grow(layout: Layout, root: int, supply: int, meeting: list[list[int]], is_unit: list[bool]) -> None:
    """One tree from its root, depth first; a branch that meets its own tree again closes a loop."""
    start, end = layout.start, layout.end
    tree, fed_by, zone, depth = layout.tree, layout.fed_by, layout.zone, layout.depth
    number = len(layout.roots)
    layout.roots.append(root)
    layout.supply_of.append(supply)
    tree[root], zone[root] = number, len(layout.zone_heads)
    layout.zone_heads.append(root)
    closing: set[int] = set()
    waiting = [root]
    while waiting:
        here = waiting.pop()
        layout.order.append(here)
        for branch in meeting[here]:
            there = end[branch] if start[branch] == here else start[branch]
            if tree[there] == NONE:
                tree[there], fed_by[there], depth[there] = number, branch, depth[here] + 1
                layout.fed_from[there] = here
                zone[there] = zone[here]
                if is_unit[branch]:
                    zone[there] = len(layout.zone_heads)
                    layout.zone_heads.append(there)
                waiting.append(there)
            elif branch not in (fed_by[here], fed_by[there]) and branch not in closing:
                closing.add(branch)
                layout.closing.append(branch)
