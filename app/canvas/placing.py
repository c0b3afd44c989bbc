"""Where captions and tags go: each tries its spots in order and takes the first that is free."""

import math
from collections.abc import Iterable, Iterator, Mapping

from msgspec import Struct
from PySide6.QtCore import QPointF, QRectF

from app.canvas.lettering import CENTRE, LEFT, RIGHT

CELL = 80.0
SYMBOL = 8.0  # how much worse it is to cover a symbol or a bar than words or a line
CLEAR = 3.0  # kept free around everything
SHARES = (0.5, 0.44, 0.56, 0.36, 0.64, 0.25, 0.75)  # along a line, from its middle outwards
AWAY = (
    0.0,
    -1.9,
    26.0,
    52.0,
    78.0,
    104.0,
    130.0,
)  # how far off a line its words may go; nearest, as near as is clear


Edges = tuple[float, float, float, float]  # left, top, right, bottom


class Spot(Struct, frozen=True):
    """A place for a block of text and how its lines align there."""

    box: QRectF
    align: float = CENTRE


class Wish(Struct, frozen=True):
    """One block and the spots it would take, best first."""

    key: tuple[str, str]
    spots: Iterable[Spot]


class Taken:
    """Boxes that are in use, found again by the cells they touch."""

    def __init__(self, boxes: Iterable[QRectF] = ()) -> None:
        self._cells: dict[tuple[int, int], list[tuple[float, ...]]] = {}
        for box in boxes:
            self.add(box)

    def add(self, box: QRectF, weight: float = 1.0) -> None:
        """Put a box in use; to cover it counts as much as its weight says."""
        edges = _edges(box, 0.0)
        for cell in _cells(edges):
            self._cells.setdefault(cell, []).append((*edges, weight))

    def overlap(self, box: QRectF, enough: float = math.inf) -> float:
        """How much of a box and its clear rim lies on boxes in use, px²; a box is counted in each cell.
        Counting stops where it is enough."""
        mine = left, top, right, bottom = _edges(box, CLEAR)
        total = 0.0
        for cell in _cells(mine):
            for other_left, other_top, other_right, other_bottom, weight in self._cells.get(cell, ()):
                if other_left < right and left < other_right and other_top < bottom and top < other_bottom:
                    width = min(right, other_right) - max(left, other_left)
                    total += weight * width * (min(bottom, other_bottom) - max(top, other_top))
                    if total >= enough:
                        return total
        return total


class Homes:
    """The boxes of nodes by the cells they touch, to tell whose a block of words would seem to be."""

    def __init__(self, boxes: Mapping[str, QRectF]) -> None:
        self._boxes = boxes
        self._cells: dict[tuple[int, int], list[str]] = {}
        for id, box in boxes.items():
            for cell in _cells(_edges(box, 0.0)):
                self._cells.setdefault(cell, []).append(id)

    def nearest_is(self, id: str, words: QRectF) -> bool:
        """True where no other node is as near to the words as this one."""
        reach = gap(words, self._boxes[id])
        near = {other for cell in _cells(_edges(words, reach)) for other in self._cells.get(cell, ())}
        return all(other == id or gap(words, self._boxes[other]) > reach for other in near)


def gap(one: QRectF, other: QRectF) -> float:
    """Between two boxes; nought where they touch."""
    across = max(one.left() - other.right(), other.left() - one.right(), 0.0)
    down = max(one.top() - other.bottom(), other.top() - one.bottom(), 0.0)
    return math.hypot(across, down)


def place(wishes: Iterable[Wish], taken: Taken) -> dict[tuple[str, str], Spot]:
    """Each block at its first free spot, or where it hides least; earlier wishes come first."""
    placed = {}
    for wish in wishes:
        best: tuple[float, Spot] | None = None
        for spot in wish.spots:
            over = taken.overlap(spot.box, best[0] if best is not None else math.inf)
            if best is None or over < best[0]:
                best = (over, spot)
            if over == 0:
                break
        if best is not None:
            placed[wish.key] = best[1]
            taken.add(best[1].box)
    return placed


def around(core: QRectF, width: float, height: float, sides: str, gap: float = 6.0) -> Iterator[Spot]:
    """Spots beside a box: b(elow), a(bove), l(eft), r(ight), and the four corners 1 2 3 4 from the lower
    right clockwise (lower right, lower left, upper left, upper right)."""
    mid, right, left = core.center(), core.right() + gap, core.left() - gap - width
    above, below = core.top() - gap - height, core.bottom() + gap
    table = {
        "b": (mid.x() - width / 2, below, CENTRE),
        "a": (mid.x() - width / 2, above, CENTRE),
        "r": (right, mid.y() - height / 2, LEFT),
        "l": (left, mid.y() - height / 2, RIGHT),
        "1": (right, below, LEFT),
        "2": (left, below, RIGHT),
        "3": (left, above, RIGHT),
        "4": (right, above, LEFT),
    }
    for side in sides:
        x, y, align = table[side]
        yield Spot(QRectF(x, y, width, height), align)


def beside(points: list[QPointF], core: float, width: float, height: float, first: str) -> Iterator[Spot]:
    """Spots along a route, at its longest run first: `first` is "b" or "a" on level runs.

    core is half the breadth that must stay free at the middle of the longest run (a symbol's), px.
    """
    runs = sorted(zip(points, points[1:], strict=False), key=lambda r: -_length(*r))
    flip = "a" if first == "b" else "b"
    for away in AWAY:
        for nth, (a, b) in enumerate(runs):
            level = abs(b.x() - a.x()) >= abs(b.y() - a.y())
            sides = first + flip if level else "rl" if first == "b" else "lr"
            for share in SHARES:
                at = a + (b - a) * share
                off = _length(a, b) * abs(share - 0.5)
                reach = core if nth == 0 and off < core + (width if level else height) / 2 else 4.0
                box = QRectF(at.x() - 1, at.y() - reach, 2, 2 * reach)
                box = box if level else QRectF(at.x() - reach, at.y() - 1, 2 * reach, 2)
                yield from around(box, width, height, sides, gap=5.0 + away)


def strips(points: list[QPointF], half: float = 3.0) -> Iterator[QRectF]:
    """The boxes a route covers."""
    for a, b in zip(points, points[1:], strict=False):
        count = 1 if a.x() == b.x() or a.y() == b.y() else max(1, math.ceil(_length(a, b) / 24))
        for k in range(count):
            p, q = a + (b - a) * (k / count), a + (b - a) * ((k + 1) / count)
            yield QRectF(p, q).normalized().adjusted(-half, -half, half, half)


def _length(a: QPointF, b: QPointF) -> float:
    return math.hypot(b.x() - a.x(), b.y() - a.y())


def _edges(box: QRectF, rim: float) -> Edges:
    return box.left() - rim, box.top() - rim, box.right() + rim, box.bottom() + rim


def _cells(edges: Edges) -> Iterator[tuple[int, int]]:
    left, top, right, bottom = (int(edge // CELL) for edge in edges)
    for x in range(left, right + 1):
        for y in range(top, bottom + 1):
            yield x, y
