"""The drawing on paper: an item an element, with its words, from a drawing and an outcome."""

from collections.abc import Iterable, Iterator

from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QPainter, QPen
from PySide6.QtWidgets import QGraphicsScene

from app.canvas import arrange, gauge, standing, wording
from app.canvas.attachment_item import AttachmentItem
from app.canvas.branch_item import BranchItem, Flow
from app.canvas.element_item import ElementItem, Look
from app.canvas.geometry import GRID
from app.canvas.node_item import NodeItem
from app.canvas.placing import Spot, Taken, Wish, place
from app.canvas.tag import Caption, NodeFigures, Tag
from app.model.drawing import Drawing
from app.model.kinds import Attachment, Branch, Node
from app.study.outcome import Outcome

MARGIN = 300.0
DOTS_FROM = 0.4  # zoom below which the grid is left out


class Paper(QGraphicsScene):
    """Holds the items; shows what it is told."""

    def __init__(self, look: Look, parent=None) -> None:
        super().__init__(parent)
        self.look = look
        self.items_by_id: dict[str, ElementItem] = {}
        self.captions: dict[str, Caption] = {}
        self.tags: dict[str, Tag | NodeFigures] = {}
        self.setItemIndexMethod(QGraphicsScene.ItemIndexMethod.BspTreeIndex)

    # the drawing --------------------------------------------------------------------------------

    def lay_out(self, drawing: Drawing) -> None:
        """Show another drawing."""
        for id in list(self.items_by_id):
            self._take_off(id)
        self.lay(drawing, drawing.elements)
        self.arrange()

    def lay(self, drawing: Drawing, ids: Iterable[str]) -> bool:
        """Read these elements again, and whatever hangs on them: made, moved, changed or gone.

        True where words must find new places."""
        moved = False
        for id in sorted(_with_neighbours(drawing, frozenset(ids)), key=_rank(drawing)):
            element = drawing.elements.get(id)
            if id in self.items_by_id and not _fits(self.items_by_id[id], element):
                self._take_off(id)
                moved = True
            if element is None:
                continue
            if id not in self.items_by_id:
                self._put_on(id, element)
            item, covered = self.items_by_id[id], self.items_by_id[id].boundingRect()
            item.lay(drawing)
            moved |= item.boundingRect() != covered
            moved |= self.captions[id].write(wording.caption(drawing, id))
        return moved

    def _put_on(self, id: str, element: object) -> None:
        item: ElementItem
        if isinstance(element, Branch):
            item, self.tags[id] = BranchItem(id, self.look), Tag(id, self.look)
        elif isinstance(element, Node):
            item, self.tags[id] = NodeItem(id, self.look), NodeFigures(id, self.look)
        else:
            item = AttachmentItem(id, self.look)
        self.items_by_id[id], self.captions[id] = item, Caption(id, self.look)
        self.addItem(item)
        self.addItem(self.captions[id])
        if id in self.tags:
            self.addItem(self.tags[id])

    def _take_off(self, id: str) -> None:
        for table in (self.items_by_id, self.captions, self.tags):
            if id in table:
                self.removeItem(table.pop(id))

    # the figures --------------------------------------------------------------------------------

    def show_outcome(self, drawing: Drawing, outcome: Outcome, case: int, before: Outcome | None) -> bool:
        """Write the figures of one case; True where words need more room than they have."""
        worst = standing.standings(drawing, outcome, case)
        grown = [self._show_node(drawing, outcome, case, before, worst, id) for id in outcome.nodes.ids]
        grown += [self._show_branch(drawing, outcome, case, before, worst, id) for id in outcome.branches.ids]
        for id in outcome.attachments.ids:
            item = self.items_by_id.get(id)
            if item is not None:
                item.stand(standing.of_row(outcome.attachments.at(id, case).live, id, worst))
        return any(grown)

    def _show_node(self, drawing, outcome, case, before, worst, id) -> bool:
        item, figures = self.items_by_id.get(id), self.tags.get(id)
        if item is None or not isinstance(figures, NodeFigures):
            return False
        state = outcome.nodes.at(id, case)
        stands = standing.of_row(state.live, id, worst)
        item.stand(stands)
        figures.read(_reading(drawing, outcome, case, id) if state.live else None)
        return figures.write(wording.node_figures(state, _row(before, "nodes", id, case)), stands)

    def _show_branch(self, drawing, outcome, case, before, worst, id) -> bool:
        item, tag = self.items_by_id.get(id), self.tags.get(id)
        if not isinstance(item, BranchItem) or not isinstance(tag, Tag):
            return False
        state = outcome.branches.at(id, case)
        stands = standing.of_row(state.live, id, worst)
        item.stand(stands)
        item.show_flow(Flow.of(state.loading_percent, wording.sent_kw(state)[1] if state.live else None))
        was = _row(before, "branches", id, case)
        return tag.write(wording.branch_figures(state, item.angle, was), stands)

    # where words go -----------------------------------------------------------------------------

    def arrange(self) -> None:
        """Give every block of words its spot."""
        for block in self._blocks():
            block.shrink()
        taken = Taken(box for item in self.items_by_id.values() for box in arrange.covered(item))
        spots = place(self._wishes(), taken)
        for (id, sort), spot in spots.items():
            (self.captions if sort == "caption" else self.tags)[id].settle(spot)
        self._make_room()

    def widen(self) -> None:
        """Let blocks that have grown grow where they stand: nothing jumps under the hand."""
        for block in self._blocks():
            box, room = block.spot.box, block.room
            if box.size() != room:
                left = box.left() - (room.width() - box.width()) * block.spot.align
                block.settle(Spot(QRectF(left, box.top(), room.width(), room.height()), block.spot.align))

    def _blocks(self) -> Iterator[Caption]:
        yield from self.captions.values()
        yield from self.tags.values()

    def _wishes(self) -> Iterator[Wish]:
        """What can move least asks first."""
        for sort in (NodeItem, AttachmentItem, BranchItem):
            for id, item in self.items_by_id.items():
                if isinstance(item, sort) and self.captions[id].lines:
                    yield Wish((id, "caption"), arrange.caption_spots(item, self.captions[id].room))
        for id, tag in self.tags.items():
            item = self.items_by_id[id]
            if tag.lines and isinstance(item, BranchItem):
                yield Wish((id, "tag"), arrange.tag_spots(item, tag.room))
        for id, tag in self.tags.items():
            item = self.items_by_id[id]
            if tag.lines and isinstance(item, NodeItem):
                yield Wish((id, "tag"), arrange.figure_spots(item, tag.room))

    def content(self) -> QRectF:
        """The box of everything drawn."""
        box = QRectF()
        for item in self.items_by_id.values():
            box = box.united(item.boundingRect())
        for block in self._blocks():
            if block.lines:
                box = box.united(block.boundingRect())
        return box

    def _make_room(self) -> None:
        wanted = self.content().adjusted(-MARGIN, -MARGIN, MARGIN, MARGIN)
        if not self.sceneRect().contains(wanted):
            self.setSceneRect(self.sceneRect().united(wanted))

    # the paper itself ---------------------------------------------------------------------------

    def drawBackground(self, painter: QPainter, rect) -> None:
        painter.fillRect(rect, self.look.palette.paper)
        zoom = painter.worldTransform().m11()
        if self.look.printing or zoom < DOTS_FROM:
            return
        step = GRID * (2 if zoom < 1.6 else 1)
        pen = QPen(self.look.palette.faint, 1.6)
        pen.setCosmetic(True)
        painter.setPen(pen)
        first, last = int(rect.left() // step), int(rect.right() // step) + 1
        for row in range(int(rect.top() // step), int(rect.bottom() // step) + 2):
            painter.drawPoints([QPointF(k * step, row * step) for k in range(first, last + 1)])


def _with_neighbours(drawing: Drawing, ids: frozenset[str]) -> set[str]:
    """The elements and all that is drawn from them: branches and attachments of nodes, side by side lines."""
    found = set(ids)
    pairs = set()
    for id, element in drawing.elements.items():
        if isinstance(element, Branch):
            if element.start in ids or element.end in ids:
                found.add(id)
            if id in ids:
                pairs.add(frozenset((element.start, element.end)))
        elif isinstance(element, Attachment) and element.node in ids:
            found.add(id)
    return found | {
        i for i, e in drawing.branches().items() if pairs and frozenset((e.start, e.end)) in pairs
    }


def _rank(drawing: Drawing):
    order = {id: k for k, id in enumerate(drawing.elements)}
    return lambda id: order.get(id, -1)


def _fits(item: ElementItem, element: object) -> bool:
    sorts = ((BranchItem, Branch), (NodeItem, Node), (AttachmentItem, Attachment))
    return any(isinstance(item, drawn) and isinstance(element, kind) for drawn, kind in sorts)


def _row(outcome: Outcome | None, table: str, id: str, case: int):
    if outcome is None:
        return None
    rows = getattr(outcome, table)
    return rows.at(id, case) if id in rows and case < len(outcome.cases) else None


def _reading(drawing: Drawing, outcome: Outcome, case: int, id: str) -> gauge.Reading:
    table = outcome.nodes
    all_cases = table.column("percent")[table.rows[id]]
    return gauge.Reading(
        drawing.limits.low_percent,
        drawing.limits.high_percent,
        float(all_cases.min()),
        float(all_cases.max()),
        float(all_cases[case]),
    )
