"""Where something new hangs at a node, clear of the node and of what is there already."""

from collections.abc import Iterator
from itertools import chain

from app.model.drawing import Drawing
from app.model.kinds import Attachment, Branch, Busbar, Node, Point, Supply

CLEAR = 3.0  # steps between a bar and the middle of what hangs on it, and between two such
FROM_BAR = 4.0  # to the side of an upright bar, where names need room too
MOST = 12  # places to either side that are tried


def free_place(drawing: Drawing, node: str, template: Attachment, x: float, y: float) -> Point:
    """Where, in steps from its node, an attachment dropped at x, y on the node hangs: supplies to the left
    of an upright bar or above a lying one, all else below, side by side."""
    met = drawing.elements[node]
    assert isinstance(met, Node)
    tries = list(chain(_places(met, template, x - met.x), _ring(met)))
    stands, runs = _busy(drawing, node)
    clear = [p for p in tries if _clear(p, stands)]
    return next((p for p in clear if not _on_line(met, p, runs)), (clear or tries)[0])


def _places(met: Node, template: Attachment, along: float) -> Iterator[Point]:
    half = met.length / 2 if isinstance(met, Busbar) else 0.0
    if isinstance(met, Busbar) and met.upright:
        if isinstance(template, Supply):
            yield from ((-FROM_BAR, dy) for dy in _aside(0.0, half))
            yield from ((FROM_BAR, dy) for dy in _aside(0.0, half))
        else:
            yield from ((dx, half + CLEAR) for dx in _aside(0.0))
    elif isinstance(met, Busbar):
        side = -CLEAR if isinstance(template, Supply) else CLEAR
        yield from ((dx, side) for dx in _aside(min(max(round(along), -half), half), half))
        yield from ((dx, side) for dx in _aside(0.0))
    else:
        yield from ((dx, template.dy) for dx in _aside(template.dx))


def _ring(met: Node) -> Iterator[Point]:
    """All round, for where the usual places are taken."""
    half = met.length / 2 if isinstance(met, Busbar) else 0.0
    reach = (0.0, half) if isinstance(met, Busbar) and met.upright else (half, 0.0)
    for dx in _aside(0.0):
        yield dx, reach[1] + CLEAR
        yield dx, -reach[1] - CLEAR


def _aside(middle: float, most: float = CLEAR * MOST) -> Iterator[float]:
    """A place, then those a clear step to either side of it, no farther from nought than some way."""
    yield middle
    for k in range(1, MOST + 1):
        yield from (at for at in (middle + k * CLEAR, middle - k * CLEAR) if abs(at) <= most)


def _busy(drawing: Drawing, node: str) -> tuple[list[Point], list[Point]]:
    """From the node: the middles of what stands near, and the nodes that its own branches run to."""
    met = drawing.elements[node]
    assert isinstance(met, Node)
    stands: list[Point] = []
    runs: list[Point] = []
    for id, one in drawing.elements.items():
        if isinstance(one, Attachment):
            at = drawing.elements[one.node]
            assert isinstance(at, Node)
            stands.append((at.x + one.dx - met.x, at.y + one.dy - met.y))
        elif isinstance(one, Node) and id != node:
            stands.append((one.x - met.x, one.y - met.y))
        elif isinstance(one, Branch) and node in (one.start, one.end):
            far = drawing.elements[one.end if one.start == node else one.start]
            assert isinstance(far, Node)
            runs.append((far.x - met.x, far.y - met.y))
    return stands, runs


def _clear(place: Point, stands: list[Point]) -> bool:
    return all(max(abs(place[0] - x), abs(place[1] - y)) >= CLEAR - 0.5 for x, y in stands)


def _on_line(met: Node, place: Point, runs: list[Point]) -> bool:
    """True where a branch leaves the node over this place."""
    half = met.length / 2 if isinstance(met, Busbar) else 0.0
    across = half if isinstance(met, Busbar) and met.upright else 0.0
    for x, y in runs:
        level = min(max(y, -across), across)  # where on the bar it leaves
        same_side = x * place[0] > 0 and abs(place[1] - level) < 2 and abs(x) > abs(place[0]) - CLEAR
        same_column = y * place[1] > 0 and abs(x - place[0]) < 1.5 and abs(y) > half
        if same_side or same_column:
            return True
    return False
