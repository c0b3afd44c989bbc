"""Edits of where things are and what joins them: move, reroute, extend, drop, join, split."""

import math
from collections.abc import Iterable, Sequence

from msgspec.structs import replace

from app.model import taps
from app.model.changes import change, element, ends, put, with_elements
from app.model.checks import EditRefused, called
from app.model.drawing import Drawing, fresh_id
from app.model.hanging import free_place
from app.model.kinds import (
    LETTERS,
    AnyElement,
    Attachment,
    Branch,
    Busbar,
    Element,
    Joint,
    Line,
    Node,
    Point,
    Supply,
    Transformer,
    kind_of,
)
from app.model.levels import TWO_WIRE, nominal_levels

HALF_SPAN = 4.0  # a branch dropped on empty paper runs this many steps to either side
ALIKE = ("as its group", "open delta")  # builds whose windings can be named the other way round


def move(drawing: Drawing, ids: Iterable[str], dx: float, dy: float) -> Drawing:
    """Shift elements by grid steps. Bends go along where both ends move or the branch alone is chosen."""
    chosen = set(ids)
    moved: dict[str, Element] = {}
    for id in chosen:
        element(drawing, id)
    nodes = {i for i in chosen if isinstance(drawing.elements[i], Node)}
    for id, one in drawing.elements.items():
        if isinstance(one, Node) and id in chosen:
            moved[id] = replace(one, x=one.x + dx, y=one.y + dy)
        elif isinstance(one, Attachment) and id in chosen and one.node not in nodes:
            moved[id] = replace(one, dx=one.dx + dx, dy=one.dy + dy)
        elif isinstance(one, Branch) and one.via and _bends_move(one, id in chosen, nodes):
            moved[id] = replace(one, via=tuple((x + dx, y + dy) for x, y in one.via))
    return put(drawing, moved) if moved else drawing


def _bends_move(branch: Branch, chosen: bool, nodes: set[str]) -> bool:
    at = (branch.start in nodes) + (branch.end in nodes)
    return at == 2 or (chosen and at == 0)


def reroute(drawing: Drawing, id: str, via: Sequence[Point]) -> Drawing:
    """Give a branch other bends."""
    one = element(drawing, id)
    if not isinstance(one, Branch):
        raise EditRefused(f"{called(id, one)}: has no bends, allowed is a branch.")
    return change(drawing, id, via=tuple((float(x), float(y)) for x, y in via))


def extend(
    drawing: Drawing, from_node: str, template: Branch, x: float, y: float, to_node: str | None = None
) -> Drawing:
    """Draw a branch on from a node, to another node or to a new joint at x, y. A transformer is turned
    so that its near winding suits the voltage there."""
    near = element(drawing, from_node)
    if not isinstance(near, Node):
        raise EditRefused(f"{called(from_node, near)}: nothing can be drawn from it, allowed is a node.")
    fresh: dict[str, Element] = {}
    if to_node is None:
        joint = Joint(x=float(x), y=float(y))
        to_node = fresh_id(drawing.elements, joint)
        fresh[to_node] = joint
    made = replace(template, start=from_node, end=to_node)
    if isinstance(made, Transformer):
        made = suited(drawing, made, from_node)
    return put(drawing, {**fresh, fresh_id(drawing.elements, made): made})


def suited(drawing: Drawing, t: Transformer, near: str) -> Transformer:
    """The transformer, turned where its winding 2 suits the near node's voltage better; single-phase
    where the layout there has two wires. A unit whose windings are not alike in build is turned whole."""
    level = nominal_levels(drawing).get(near)
    if level is None:
        return t
    if level.wires == TWO_WIRE and not t.vector_group.startswith("I"):
        t = replace(t, vector_group="Ii0")
    one, two = (abs(math.log(v / level.volts)) for v in (t.v1_v, t.v2_v))
    if two >= one:
        return t
    return taps.turned(t) if t.build in ALIKE else replace(t, start=t.end, end=t.start)


def drop(drawing: Drawing, template: AnyElement, x: float, y: float, node: str | None = None) -> Drawing:
    """Put a new element on the paper at x, y. An attachment hangs on `node`, or on a new joint where
    there is none; a branch runs on from `node`, or between two new joints."""
    if isinstance(template, Node):
        made = replace(template, x=float(x), y=float(y))
        return put(drawing, {fresh_id(drawing.elements, made): made})
    if isinstance(template, Branch):
        return extend(drawing, node, template, x, y) if node else _drop_branch(drawing, template, x, y)
    if node is None:
        joint = Joint(x=float(x), y=float(y))
        node = fresh_id(drawing.elements, joint)
        drawing = put(drawing, {node: joint})
        return _hang(drawing, template, node, template.dx, template.dy)
    met = element(drawing, node)
    if not isinstance(met, Node):
        raise EditRefused(f"{called(node, met)}: nothing can hang on it, allowed is a busbar or joint.")
    dx, dy = x - met.x, y - met.y
    if math.hypot(dx, dy) < 1.5 or (isinstance(met, Busbar) and abs(dx if met.upright else dy) < 1.5):
        dx, dy = free_place(drawing, node, template, x, y)
    return _hang(drawing, template, node, dx, dy)


def _drop_branch(drawing: Drawing, template: Branch, x: float, y: float) -> Drawing:
    joint = Joint(x=x - HALF_SPAN, y=float(y))
    start = fresh_id(drawing.elements, joint)
    return extend(put(drawing, {start: joint}), start, template, x + HALF_SPAN, y)


def _hang(drawing: Drawing, template: Attachment, node: str, dx: float, dy: float) -> Drawing:
    made = replace(template, node=node, dx=float(dx), dy=float(dy))
    level = nominal_levels(drawing).get(node) if isinstance(made, Supply) else None
    if isinstance(made, Supply) and level is not None:
        made = replace(made, nominal_v=level.volts, wires=level.wires)
    return put(drawing, {fresh_id(drawing.elements, made): made})


def join(drawing: Drawing, kept_node: str, gone_node: str) -> Drawing:
    """Make two nodes one: all that stood on the second stands on the first."""
    kept, gone = element(drawing, kept_node), element(drawing, gone_node)
    if not isinstance(kept, Node) or not isinstance(gone, Node) or kept_node == gone_node:
        raise EditRefused(
            f"{called(gone_node, gone)}: cannot be joined here, allowed are two different nodes."
        )
    fresh: dict[str, Element] = {}
    for id, one in drawing.elements.items():
        if gone_node not in ends(one):
            continue
        if isinstance(one, Branch) and kept_node in ends(one):
            raise EditRefused(
                f"{called(gone_node, gone)}: {called(id, one)} runs between it and {kept_node}, "
                "allowed are two nodes with no branch between them."
            )
        fresh[id] = _moved_over(one, kept, kept_node, gone, gone_node)
    fresh[kept_node] = replace(kept, name=kept.name or gone.name, nominal_v=kept.nominal_v or gone.nominal_v)
    left = {i: e for i, e in put(drawing, fresh).elements.items() if i != gone_node}
    return with_elements(drawing, left)


def remake(drawing: Drawing, id: str, template: Joint | Busbar) -> Drawing:
    """Turn a joint into a busbar, or back; all that stands on it stays. An id that was given by letter
    and number is given anew, so that no busbar is called J3."""
    was = element(drawing, id)
    if not isinstance(was, Node):
        raise EditRefused(f"{called(id, was)}: cannot be made another node, allowed is a busbar or joint.")
    kept = {"name": was.name, "note": was.note, "x": was.x, "y": was.y, "nominal_v": was.nominal_v}
    made: AnyElement = replace(template, **kept)
    letter = LETTERS[kind_of(was)]
    counted = id.startswith(letter) and id[len(letter) :].isdigit()
    new = fresh_id(drawing.elements, made) if counted else id
    elements: dict[str, AnyElement] = {}
    for i, one in drawing.elements.items():
        at = {end: new for end in ("start", "end", "node") if getattr(one, end, None) == id}
        elements[new if i == id else i] = made if i == id else replace(one, **at) if at else one
    return with_elements(drawing, elements)


def _moved_over(one: Element, kept: Node, kept_node: str, gone: Node, gone_node: str) -> Element:
    if isinstance(one, Attachment):
        return replace(one, node=kept_node, dx=one.dx + gone.x - kept.x, dy=one.dy + gone.y - kept.y)
    at = {name: kept_node for name in ("start", "end") if getattr(one, name) == gone_node}
    return replace(one, **at)


def split_branch(drawing: Drawing, branch_id: str, x: float, y: float, share: float | None = None) -> Drawing:
    """Put a joint on a cable or overhead line at x, y; its length is shared out as drawn, or by `share`
    (0 to 1, of the part before the joint) where the caller knows better."""
    one = element(drawing, branch_id)
    if not isinstance(one, Line):
        raise EditRefused(f"{called(branch_id, one)}: cannot be parted, allowed is a cable or overhead line.")
    path = [_spot(drawing, one.start), *one.via, _spot(drawing, one.end)]
    drawn, before = _nearest(path, (x, y)) if one.via else (_squarely(path[0], (x, y), path[1]), 0)
    cut = min(max(drawn if share is None else share, 0.0), 1.0)
    joint = Joint(x=float(x), y=float(y))
    node = fresh_id(drawing.elements, joint)
    first = one.length_m * cut
    near = replace(one, end=node, via=one.via[:before], length_m=first)
    far = replace(one, start=node, via=one.via[before:], length_m=one.length_m - first, name="")
    fresh = {node: joint, branch_id: near, fresh_id(drawing.elements, far): far}
    return put(drawing, fresh)


def _squarely(start: Point, spot: Point, end: Point) -> float:
    """How far along a line without bends, which is drawn square, a spot lies."""
    before = abs(spot[0] - start[0]) + abs(spot[1] - start[1])
    after = abs(end[0] - spot[0]) + abs(end[1] - spot[1])
    return before / (before + after) if before + after else 0.5


def _spot(drawing: Drawing, node: str) -> Point:
    met = drawing.elements[node]
    assert isinstance(met, Node)
    return met.x, met.y


def _nearest(path: Sequence[Point], spot: Point) -> tuple[float, int]:
    """Where along the path a spot lies, as a share of its length, and how many bends come before."""
    best, found, walked = math.inf, (0.5, 0), 0.0
    for number, (a, b) in enumerate(zip(path, path[1:], strict=False)):
        run = math.dist(a, b)
        along = ((spot[0] - a[0]) * (b[0] - a[0]) + (spot[1] - a[1]) * (b[1] - a[1])) / run if run else 0.0
        along = min(max(along, 0.0), run)
        t = along / run if run else 0.0
        off = math.dist(spot, (a[0] + t * (b[0] - a[0]), a[1] + t * (b[1] - a[1])))
        if off < best:
            best, found = off, (walked + along, number)
        walked += run
    return (found[0] / walked, found[1]) if walked else (0.5, 0)
