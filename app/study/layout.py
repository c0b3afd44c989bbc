"""The drawing as a graph: which supply feeds what, through which branch, in which voltage zone."""

from collections.abc import Iterator
from dataclasses import dataclass, field

from app.model.drawing import Drawing
from app.model.kinds import Attachment, Branch, Element, Line, Node, Supply, Switch, Transformer

NONE = -1


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
    start: list[int]  # node row of each branch
    end: list[int]
    at: list[int]  # node row of each attachment
    supplies: list[int]  # attachment rows
    tree: list[int] = field(default_factory=list)  # tree of each node
    roots: list[int] = field(default_factory=list)  # node row of each tree's root
    supply_of: list[int] = field(default_factory=list)  # attachment row of each tree's supply, or NONE
    fed_by: list[int] = field(default_factory=list)  # branch row that feeds each node, or NONE
    order: list[int] = field(default_factory=list)  # node rows, each after the node that feeds it
    depth: list[int] = field(default_factory=list)
    zone: list[int] = field(default_factory=list)  # voltage zone of each node
    zone_count: int = 0
    closing: list[int] = field(default_factory=list)  # branch rows that close a loop
    joined: list[tuple[int, int]] = field(default_factory=list)  # (root supply, further supply) in one tree

    def live(self, node: int) -> bool:
        """True where a supply feeds the node."""
        return self.supply_of[self.tree[node]] != NONE

    def far(self, branch: int, node: int) -> int:
        """The node at the other end of a branch."""
        return self.end[branch] if self.start[branch] == node else self.start[branch]

    def climb(self, node: int) -> Iterator[int]:
        """Branch rows from a node up to the root of its tree."""
        while (branch := self.fed_by[node]) != NONE:
            yield branch
            node = self.far(branch, node)

    def ring(self, branch: int) -> list[int]:
        """Branch rows of the loop that a closing branch closes, itself first."""
        one, other = self.start[branch], self.end[branch]
        left, right = [branch], []
        while one != other:
            if self.depth[one] >= self.depth[other]:
                left.append(self.fed_by[one])
                one = self.far(self.fed_by[one], one)
            else:
                right.append(self.fed_by[other])
                other = self.far(self.fed_by[other], other)
        return left + right[::-1]


def conducts(branch: Branch) -> bool:
    """True for everything but an open switch."""
    return not isinstance(branch, Switch) or branch.closed


def is_bare(branch: Branch) -> bool:
    """True where a branch has no impedance at all: a closed switch or a line of no length."""
    if isinstance(branch, Line):
        return branch.length_m == 0 or (branch.r20_ohm_per_km == 0 and branch.x_ohm_per_km == 0)
    return isinstance(branch, Switch)


def lay_out(drawing: Drawing) -> Layout:
    """Sort the drawing into rows and trace it from its supplies."""
    groups: tuple[dict[str, Node], dict[str, Branch], dict[str, Attachment]] = ({}, {}, {})
    for id, element in drawing.elements.items():
        groups[_group(type(element))][id] = element  # type: ignore[assignment]
    nodes, branches, attachments = groups
    row = {id: i for i, id in enumerate(nodes)}
    hung = list(attachments.values())
    layout = Layout(
        node_ids=list(nodes),
        nodes=list(nodes.values()),
        branch_ids=list(branches),
        branches=list(branches.values()),
        attachment_ids=list(attachments),
        attachments=hung,
        node_row=row,
        start=[row[b.start] for b in branches.values()],
        end=[row[b.end] for b in branches.values()],
        at=[row[a.node] for a in hung],
        supplies=[i for i, a in enumerate(hung) if isinstance(a, Supply)],
    )
    _trace(layout)
    return layout


_GROUPS: dict[type[Element], int] = {}


def _group(kind: type[Element]) -> int:
    found = _GROUPS.get(kind)
    if found is None:
        found = 0 if issubclass(kind, Node) else 1 if issubclass(kind, Branch) else 2
        _GROUPS[kind] = found
    return found


def _trace(layout: Layout) -> None:
    count = len(layout.node_ids)
    layout.tree, layout.fed_by, layout.zone = [NONE] * count, [NONE] * count, [NONE] * count
    layout.depth = [0] * count
    meeting: list[list[int]] = [[] for _ in range(count)]
    for i, branch in enumerate(layout.branches):
        if conducts(branch):
            meeting[layout.start[i]].append(i)
            if layout.end[i] != layout.start[i]:
                meeting[layout.end[i]].append(i)
    for supply in layout.supplies:
        node = layout.at[supply]
        if layout.tree[node] != NONE:
            layout.joined.append((layout.supply_of[layout.tree[node]], supply))
            continue
        _grow(layout, node, supply, meeting)
    for node in range(count):
        if layout.tree[node] == NONE:
            _grow(layout, node, NONE, meeting)


def _grow(layout: Layout, root: int, supply: int, meeting: list[list[int]]) -> None:
    """One tree from its root, depth first; a branch that meets its own tree again closes a loop."""
    start, end, branches = layout.start, layout.end, layout.branches
    tree, fed_by, zone, depth = layout.tree, layout.fed_by, layout.zone, layout.depth
    number = len(layout.roots)
    layout.roots.append(root)
    layout.supply_of.append(supply)
    tree[root], zone[root] = number, layout.zone_count
    layout.zone_count += 1
    closing: set[int] = set()
    waiting = [root]
    while waiting:
        here = waiting.pop()
        layout.order.append(here)
        for branch in meeting[here]:
            there = end[branch] if start[branch] == here else start[branch]
            if tree[there] == NONE:
                tree[there], fed_by[there], depth[there] = number, branch, depth[here] + 1
                if type(branches[branch]) is Transformer:
                    zone[there] = layout.zone_count
                    layout.zone_count += 1
                else:
                    zone[there] = zone[here]
                waiting.append(there)
            elif branch not in (fed_by[here], fed_by[there]) and branch not in closing:
                closing.add(branch)
                layout.closing.append(branch)
