"""Where things lie on the paper: pure functions over the drawing, in scene pixels."""

import math
from collections.abc import Iterable, Sequence
from enum import Enum

from msgspec import Struct
from PySide6.QtCore import QPointF, QRectF

from app.canvas.lanes import lane
from app.model.drawing import Drawing
from app.model.kinds import Attachment, Branch, Busbar, Node

GRID = 20.0
HANDLE_IN = 18.0  # an end handle stands this far in from its node, so that the node can still be held
NEAR_ENOUGH = 1e-6


class HitKind(Enum):
    """What lies under the hand."""

    NODE = "node"
    BRANCH = "branch"
    ATTACHMENT = "attachment"
    BEND = "bend"
    END = "end"
    LADDER = "ladder"
    PAPER = "paper"


class Hit(Struct, frozen=True):
    """What was hit. index: the bend's place in `via`, 0 or 1 for an end, the segment of a branch."""

    kind: HitKind
    id: str = ""
    index: int = 0


class Outline(Struct, frozen=True):
    """Something that can be hit: a polyline, or a single point, with its own reach in pixels."""

    kind: HitKind
    id: str
    points: tuple[QPointF, ...]
    index: int = 0
    reach: float = 0.0


def scene(x: float, y: float) -> QPointF:
    """Grid steps to scene pixels."""
    return QPointF(x * GRID, y * GRID)


def grid(point: QPointF) -> tuple[float, float]:
    """Scene pixels to grid steps, not rounded."""
    return point.x() / GRID, point.y() / GRID


def snap(point: QPointF) -> tuple[float, float]:
    """Scene pixels to the nearest whole grid step."""
    return float(round(point.x() / GRID)), float(round(point.y() / GRID))


def distance(a: QPointF, b: QPointF) -> float:
    """Between two points."""
    return math.hypot(a.x() - b.x(), a.y() - b.y())


def node_point(node: Node) -> QPointF:
    """The middle of a node."""
    return scene(node.x, node.y)


def bar_ends(bar: Busbar) -> tuple[QPointF, QPointF]:
    """Top and bottom of an upright bar, left and right of a lying one."""
    half = bar.length / 2
    dx, dy = (0.0, half) if bar.upright else (half, 0.0)
    return scene(bar.x - dx, bar.y - dy), scene(bar.x + dx, bar.y + dy)


def meet(node: Node, toward: QPointF) -> QPointF:
    """Where a line that comes from `toward` meets the node: a busbar is met square on."""
    if not isinstance(node, Busbar):
        return node_point(node)
    first, last = bar_ends(node)
    return QPointF(
        min(max(toward.x(), first.x()), last.x()),
        min(max(toward.y(), first.y()), last.y()),
    )


def route(drawing: Drawing, branch_id: str) -> list[QPointF]:
    """The polyline of a branch from its start to its end, with its bends or square by default."""
    branch = drawing.elements[branch_id]
    assert isinstance(branch, Branch)
    start, end = drawing.elements[branch.start], drawing.elements[branch.end]
    assert isinstance(start, Node)
    assert isinstance(end, Node)
    if branch.via:
        bends = [scene(*p) for p in branch.via]
        return _without_repeats([meet(start, bends[0]), *bends, meet(end, bends[-1])])
    return between(start, end, lane(drawing, branch_id, branch))


def between(start: Node, end: Node, lane: float = 0.0) -> list[QPointF]:
    """The square line between two nodes; `lane`, in grid steps, parts branches that run side by side."""
    a, b = _facing(start, end)
    if abs(a.x() - b.x()) < NEAR_ENOUGH or abs(a.y() - b.y()) < NEAR_ENOUGH:
        return _straight(start, end, a, b, lane * GRID)
    return _without_repeats(_elbow(start, end, a, b, lane * GRID))


def to_point(start: Node, point: QPointF) -> list[QPointF]:
    """The square line from a node to a free point, while it is being drawn."""
    return between(start, Node(x=point.x() / GRID, y=point.y() / GRID))


def _facing(start: Node, end: Node) -> tuple[QPointF, QPointF]:
    """The two meeting points, level with each other where the nodes allow."""
    here, there = _span(start), _span(end)
    a, b = QPointF(here.center()), QPointF(there.center())
    y = _shared((here.top(), here.bottom()), (there.top(), there.bottom()))
    x = _shared((here.left(), here.right()), (there.left(), there.right()))
    if y is not None:
        a.setY(y)
        b.setY(y)
    elif x is not None:
        a.setX(x)
        b.setX(x)
    return meet(start, b), meet(end, a)


def _span(node: Node) -> QRectF:
    """The node as a box without breadth."""
    first, last = bar_ends(node) if isinstance(node, Busbar) else (node_point(node), node_point(node))
    return QRectF(first, last)


def _shared(one: tuple[float, float], other: tuple[float, float]) -> float | None:
    """The grid line nearest the middle of what two ranges share, or None where they share nothing."""
    low, high = max(one[0], other[0]), min(one[1], other[1])
    if low > high + NEAR_ENOUGH:
        return None
    middle = (low + high) / 2
    return min(max(round(middle / GRID) * GRID, low), high)


def _straight(start: Node, end: Node, a: QPointF, b: QPointF, aside: float) -> list[QPointF]:
    """One straight run, moved aside by a lane."""
    level = abs(a.y() - b.y()) < NEAR_ENOUGH
    step = QPointF(0, aside) if level else QPointF(aside, 0)
    return _without_repeats([meet(start, a + step), a + step, b + step, meet(end, b + step)])


def _elbow(start: Node, end: Node, a: QPointF, b: QPointF, aside: float) -> list[QPointF]:
    """One corner, or two where both ends want to be met the same way."""
    level_out, level_in = _met_level(start), _met_level(end)
    if level_out and level_in:
        x = (a.x() + b.x()) / 2 + aside
        return [a, QPointF(x, a.y()), QPointF(x, b.y()), b]
    if level_out is False and level_in is False:
        y = (a.y() + b.y()) / 2 + aside
        return [a, QPointF(a.x(), y), QPointF(b.x(), y), b]
    level_first = level_out if level_out is not None else not level_in
    out = QPointF(0, aside) if level_first else QPointF(aside, 0)
    back = QPointF(aside, 0) if level_first else QPointF(0, aside)
    first, last = a + out, b + back
    corner = QPointF(last.x(), first.y()) if level_first else QPointF(first.x(), last.y())
    return [meet(start, first), first, corner, last, meet(end, last)]


def _met_level(node: Node) -> bool | None:
    """True where lines come in level (an upright bar), False for a lying bar, None where it is all one."""
    return node.upright if isinstance(node, Busbar) else None


def _without_repeats(points: Iterable[QPointF]) -> list[QPointF]:
    """The same polyline without points on top of each other; two points always stay."""
    kept: list[QPointF] = []
    for point in points:
        if not kept or distance(kept[-1], point) > NEAR_ENOUGH:
            kept.append(point)
    return kept if len(kept) > 1 else [kept[0], kept[0]]


def longest(points: Sequence[QPointF]) -> int:
    """The segment with the most room; the first among equals."""
    lengths = [round(distance(a, b), 3) for a, b in zip(points, points[1:], strict=False)]
    return lengths.index(max(lengths))


def pose(points: Sequence[QPointF]) -> tuple[QPointF, float]:
    """Where a symbol sits on a route, and the direction of travel there, clockwise in degrees."""
    at = longest(points)
    a, b = points[at], points[at + 1]
    return (a + b) / 2, math.degrees(math.atan2(b.y() - a.y(), b.x() - a.x()))


def along(points: Sequence[QPointF], way: float) -> QPointF:
    """The point that lies `way` pixels down a route; past the end it is the end."""
    for a, b in zip(points, points[1:], strict=False):
        size = distance(a, b)
        if way <= size and size > 0:
            return a + (b - a) * (way / size)
        way -= size
    return points[-1]


def attachment_point(drawing: Drawing, id: str) -> QPointF:
    """The middle of an attachment's symbol."""
    attachment = drawing.elements[id]
    assert isinstance(attachment, Attachment)
    node = drawing.elements[attachment.node]
    assert isinstance(node, Node)
    return node_point(node) + scene(attachment.dx, attachment.dy)


def stub(drawing: Drawing, id: str) -> list[QPointF]:
    """The square line from the node to an attachment's symbol."""
    attachment = drawing.elements[id]
    assert isinstance(attachment, Attachment)
    node = drawing.elements[attachment.node]
    assert isinstance(node, Node)
    return to_point(node, attachment_point(drawing, id))


def end_handle(points: Sequence[QPointF], end: int) -> QPointF:
    """Where the handle of a branch's end stands: a little in from its node."""
    total = sum(distance(a, b) for a, b in zip(points, points[1:], strict=False))
    way = min(HANDLE_IN, total / 3)
    return along(points, way) if end == 0 else along(points[::-1], way)


def handles(branch: Branch, id: str, points: Sequence[QPointF]) -> list[Outline]:
    """The bends and ends of a selected branch, to be taken hold of."""
    bends = [Outline(HitKind.BEND, id, (scene(*p),), k) for k, p in enumerate(branch.via)]
    return bends + [Outline(HitKind.END, id, (end_handle(points, k),), k) for k in (0, 1)]


def nearest(outlines: Iterable[Outline], point: QPointF, radius: float) -> Hit:
    """The outline nearest to a point, no farther than the radius beyond its reach; else the paper.

    Among those that are touched the earlier kind wins: handles before nodes before the rest.
    """
    best: tuple[int, float] | None = None
    found = Hit(HitKind.PAPER)
    for outline in outlines:
        gap, segment = _gap(outline.points, point)
        if gap > radius + outline.reach:
            continue
        rank = (_RANK[outline.kind], gap)
        if best is None or rank < best:
            best = rank
            index = segment if len(outline.points) > 1 else outline.index
            found = Hit(outline.kind, outline.id, index)
    return found


_RANK = {
    HitKind.LADDER: 0,
    HitKind.BEND: 1,
    HitKind.END: 1,
    HitKind.NODE: 2,
    HitKind.ATTACHMENT: 3,
    HitKind.BRANCH: 4,
    HitKind.PAPER: 5,
}


def _gap(points: Sequence[QPointF], point: QPointF) -> tuple[float, int]:
    """Distance from a polyline and the segment that comes nearest."""
    if len(points) == 1:
        return distance(points[0], point), 0
    gaps = [segment_gap(a, b, point) for a, b in zip(points, points[1:], strict=False)]
    least = min(gaps)
    return least, gaps.index(least)


def segment_gap(a: QPointF, b: QPointF, point: QPointF) -> float:
    """Distance of a point from the straight line between two."""
    run = b - a
    size = run.x() ** 2 + run.y() ** 2
    if size == 0:
        return distance(a, point)
    share = QPointF.dotProduct(point - a, run) / size
    return distance(a + run * min(max(share, 0.0), 1.0), point)
