"""The spots each caption, tag and block of node figures would take, best first."""

from collections.abc import Iterator

from PySide6.QtCore import QPointF, QRectF, QSizeF

from app.canvas import gauge
from app.canvas.attachment_item import AttachmentItem
from app.canvas.branch_item import BranchItem
from app.canvas.element_item import ElementItem
from app.canvas.geometry import distance
from app.canvas.lettering import LEFT, RIGHT
from app.canvas.node_item import NodeItem
from app.canvas.placing import SYMBOL, Homes, Spot, Taken, around, beside, strips

UNDER = 8.0
FARTHER = (20.0, 36.0, 60.0, 90.0)


def take(taken: Taken, item: ElementItem) -> None:
    """Put in use what an element itself covers."""
    if isinstance(item, BranchItem | AttachmentItem):
        for strip in strips(item.points):
            taken.add(strip)
    taken.add(item.core(), SYMBOL)
    if item.mark is not None:
        taken.add(item.mark.box, SYMBOL)


def caption_spots(item: ElementItem, room: QSizeF) -> Iterator[Spot]:
    """Names: over a bar's end, away from the node for attachments, above level branches."""
    width, height = room.width(), room.height()
    if isinstance(item, BranchItem):
        yield from beside(item.points, _half(item), width, height, "a")
    elif isinstance(item, AttachmentItem):
        yield from around(item.core(), width, height, _ATTACHMENT[item.facing])
    elif isinstance(item, NodeItem) and item.bar and not item.upright:
        yield from around(item.core(), width, height, "lr3412ab")
    else:
        yield from around(item.core(), width, height, "a43b12lr", gap=4.0)


_ATTACHMENT = {"b": "rlb12a", "a": "rla43b", "r": "rab41l", "l": "lab32r"}


def tag_spots(item: BranchItem, room: QSizeF) -> Iterator[Spot]:
    """Tags: under level branches, right of upright ones."""
    yield from beside(item.points, _half(item), room.width(), room.height(), "b")


def figure_spots(item: NodeItem, rooms: tuple[QSizeF, ...], homes: Homes) -> Iterator[Spot]:
    """Volts and gauge: under the foot of a bar with the gauge in line with it, else beside the node; first
    where no other node is nearer, for there they would seem to be that one's."""
    strange = []
    for spots in (_close_spots, _far_spots):
        for room in rooms:
            for spot in spots(item, room.width(), room.height()):
                if homes.nearest_is(item.id, spot.box):
                    yield spot
                else:
                    strange.append(spot)
    yield from strange


def _close_spots(item: NodeItem, width: float, height: float) -> Iterator[Spot]:
    core = item.core()
    if item.upright:
        left = core.center().x() - gauge.WIDTH / 2 + 2
        yield Spot(QRectF(left, core.bottom() + UNDER, width, height), LEFT)
        yield Spot(QRectF(core.left() - width, core.bottom() + UNDER, width, height), RIGHT)
        yield from _along_bar(core, width, height)
        yield from around(core, width, height, "1234ba", gap=UNDER + 2)
    elif item.bar:
        yield from around(core, width, height, "21ba34")
    else:
        yield from around(core, width, height, "b12a43", gap=UNDER)
        yield from around(core.adjusted(0, -12, 0, 12), width, height, "1234", gap=UNDER)


def _far_spots(item: NodeItem, width: float, height: float) -> Iterator[Spot]:
    for away in FARTHER:
        yield from around(item.core(), width, height, "ba1234", gap=away)


def _along_bar(core: QRectF, width: float, height: float) -> Iterator[Spot]:
    """Beside an upright bar: at its foot, at its head, then between."""
    room = max(core.height() - height, 0.0)
    for share in (1.0, 0.0, 0.75, 0.25, 0.5):
        top = core.top() + room * share
        yield Spot(QRectF(core.right() + UNDER, top, width, height), LEFT)
        yield Spot(QRectF(core.left() - UNDER - width, top, width, height), RIGHT)


def nearest_of(core: QRectF, words: QRectF) -> QPointF:
    """The point of a node that is nearest to the middle of its words."""
    middle = words.center()
    return QPointF(
        min(max(middle.x(), core.left()), core.right()), min(max(middle.y(), core.top()), core.bottom())
    )


def nearest_on(item: ElementItem, words: QRectF) -> QPointF:
    """The point of a branch's route that is nearest to the middle of its words."""
    assert isinstance(item, BranchItem)
    middle, spots = words.center(), []
    for a, b in zip(item.points, item.points[1:], strict=False):
        run = b - a
        size = QPointF.dotProduct(run, run)
        share = QPointF.dotProduct(middle - a, run) / size if size else 0.0
        spots.append(a + run * min(max(share, 0.0), 1.0))
    return min(spots, key=lambda spot: distance(spot, middle))


def _half(item: BranchItem) -> float:
    if item.worn is None:
        return 6.0
    core, at = item.core(), item.at
    if abs(item.angle) % 180 < 45 or abs(item.angle) % 180 > 135:
        return max(at.y() - core.top(), core.bottom() - at.y())
    return max(at.x() - core.left(), core.right() - at.x())
