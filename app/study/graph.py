"""What the graph of a drawing is: rows, the trees that grow from the supplies, the rounds over them."""

from dataclasses import dataclass, field

import numpy as np
from msgspec import Struct
from numpy.typing import NDArray

from app.model.conductors import is_hung
from app.model.kinds import Attachment, Branch, Line, Node, Regulator, Switch
from solver import Forest, Trouble

NONE = -1
Index = NDArray[np.intp]


class Ring(Struct, frozen=True):
    """A round that one branch closes over the trees.

    branches : branch rows in the order of the round; from one supply to the other where it joins two
    supplies : attachment rows of the two supplies that it joins, None where it is a closed loop
    """

    branches: tuple[int, ...]
    supplies: tuple[int, int] | None


@dataclass(slots=True)
class Layout:
    """Rows of nodes, branches and attachments, and the trees that grow from the supplies.

    Trees come first in the order of the supplies that root them, then one tree for every dead part. Where
    more ways than one lead to a node, it belongs to the tree that reaches it through the fewest branches.
    A zone is all that is joined without a transformer.
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
    zone: list[int] = field(default_factory=list)  # voltage zone of each node
    zone_heads: list[int] = field(default_factory=list)  # node row at which each zone begins
    loose: list[int] = field(default_factory=list)  # node rows where one branch ends and nothing hangs
    rings: list[Ring] = field(default_factory=list)  # one for every live branch outside the trees
    doubled: list[tuple[int, int]] = field(default_factory=list)  # supplies that stand on one node
    live: list[bool] = field(default_factory=list)  # whether a supply feeds each node
    upstream: dict[str, str] = field(
        default_factory=dict
    )  # live node id to the id of the branch that feeds it
    before: dict[str, str] = field(default_factory=dict)  # live node id to the id of the node that feeds it
    zone_of: dict[str, int] = field(default_factory=dict)  # node id to its zone
    arrays: "Arrays | None" = None
    forest: Forest | Trouble | None = None  # the solver's view of the same graph, once it was asked for


class Arrays(Struct, frozen=True):
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
    """True where a branch has no impedance at all: a closed switch, a regulator, a line of no length.

    branch : any branch

    Returns : bool
    """
    if isinstance(branch, Line):
        nothing = branch.resistance_ohm_per_km == 0 and branch.reactance_ohm_per_km == 0
        return branch.length_m == 0 or (nothing and not is_hung(branch))
    return isinstance(branch, Regulator | Switch)
