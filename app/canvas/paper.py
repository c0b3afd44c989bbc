"""The drawing on paper: an item an element, with its words, from a drawing and an outcome."""

from collections.abc import Container, Iterable, Iterator, Mapping
from itertools import chain, islice
from typing import Any

from PySide6.QtCore import QRectF, Qt, QTimer
from PySide6.QtGui import QPainter
from PySide6.QtWidgets import QGraphicsItem, QGraphicsScene

from app.canvas import arrange, phase_words, standing, wording
from app.canvas.attachment_item import AttachmentItem
from app.canvas.branch_item import BranchItem
from app.canvas.element_item import ElementItem, Look
from app.canvas.ground import paint_ground
from app.canvas.lettering import Line
from app.canvas.node_figures import NodeFigures
from app.canvas.node_item import NodeItem
from app.canvas.phase_mark import Phases
from app.canvas.placing import Homes, Taken, Wish, place
from app.canvas.shown import Shown, array_of, column_of
from app.canvas.standing import Standing
from app.canvas.tag import Caption, Tag
from app.model.drawing import Drawing
from app.model.kinds import Attachment, Branch, Busbar, Node, Transformer
from app.study.outcome import BranchState, Outcome, Table

MARGIN = 300.0


class Paper(QGraphicsScene):
    """Holds the items; shows what it is told."""

    def __init__(self, look: Look, parent=None) -> None:
        super().__init__(parent)
        self.look = look
        self.items_by_id: dict[str, ElementItem] = {}
        self.captions: dict[str, Caption] = {}
        self.tags: dict[str, Tag | NodeFigures] = {}
        self.owed: dict[str, None] = {}  # ids whose figures are still to be written, in order
        self._laid = Drawing()
        self._shown: Shown | None = None
        self._told: tuple[list[Any], ...] = ()  # of phases, by the outcome shown
        self._reread: set[str] = set()  # ids read since then
        self._leaving: list[QGraphicsItem] = []
        self._swept = QTimer(self, singleShot=True, interval=0)
        self._swept.timeout.connect(self._leaving.clear)
        self.setItemIndexMethod(QGraphicsScene.ItemIndexMethod.BspTreeIndex)

    # the drawing --------------------------------------------------------------------------------

    def lay_out(self, drawing: Drawing) -> None:
        """Show another drawing."""
        self._shown, self._told = None, ()
        for id in list(self.items_by_id):
            self._take_off(id)
        self.lay(drawing, drawing.elements)
        self.arrange()

    def lay(self, drawing: Drawing, ids: Iterable[str]) -> bool:
        """Read these elements again: made, moved, changed or gone. True where words must find new places."""
        self._laid = drawing
        moved = False
        for id in sorted(ids, key=_rank(drawing)):
            element = drawing.elements.get(id)
            if id in self.items_by_id and not _fits(self.items_by_id[id], element):
                self._take_off(id)
                moved = True
            if element is None:
                continue
            if id not in self.items_by_id:
                self._put_on(id, element)
            self.items_by_id[id].place(drawing)
            moved |= self._read(id)
        return moved

    def read(self, drawing: Drawing, ids: Iterable[str]) -> bool:
        """Read the data of these again, which stand where they stood. True where words need new places."""
        self._laid = drawing
        return any([self._read(id) for id in ids])

    def _read(self, id: str) -> bool:
        item, element = self.items_by_id[id], self._laid.elements[id]
        self._reread.add(id)
        covered = item.boundingRect()
        item.read(self._laid)
        remarked = item.say_phases(self._phases(id))
        named = isinstance(element, Node) and bool(element.name)
        self.captions[id].landmark = isinstance(element, Busbar) or named
        return self._name(id) or remarked or item.boundingRect() != covered

    def _phases(self, id: str) -> Phases | None:
        """What is said of the phases of a branch or attachment: what it states, else what reaches it."""
        element = self._laid.elements[id]
        if not isinstance(element, Branch | Attachment):
            return None
        said = phase_words.stated(element)
        return self._shown.phases(id, element) if said is None and self._shown is not None else said

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
        self.owed.pop(id, None)
        for table in (self.items_by_id, self.captions, self.tags):
            if id in table:
                self.take_away(table.pop(id))

    def take_away(self, item: QGraphicsItem) -> None:
        """Take an item off the paper; it lives on until the event at hand is over, which may be its own."""
        self.removeItem(item)
        self._leaving.append(item)
        self._swept.start()

    def _name(self, id: str) -> bool:
        """Write the caption; supplies and scaled loads say their power in it."""
        drawing, shown = self._laid, 0 if self._shown is None else self._shown.case
        case = drawing.cases[min(shown, len(drawing.cases) - 1)]
        lines, element = wording.caption(drawing, id, case), drawing.elements[id]
        if self._shown is not None and id in self._shown.outcome.attachments:
            lines += wording.attachment_figures(id, element, case, *self._shown.rows("attachments", id))
        return self.captions[id].write(lines)

    # the figures --------------------------------------------------------------------------------

    def show_outcome(
        self,
        drawing: Drawing,
        outcome: Outcome,
        case: int,
        before: Outcome | None,
        sight: Iterable[QRectF] | None = None,
        problem: Outcome | None = None,
    ) -> set[str]:
        """Show one case: lines and symbols at once, words in sight (None: all), the rest by `write_owed`.
        A problem is a later outcome without an answer; what stands in its way is marked.

        Returns the ids whose words need more room than they have."""
        worst = standing.standings(problem or outcome, case)
        self._shown = Shown(drawing.limits, outcome, case, before)
        self.look.blaming = problem is not None or not self._shown.solved
        tables = outcome.nodes, outcome.branches, outcome.attachments
        for table in tables:
            self._show_standings(table, case, worst)
        self._show_flows(outcome.branches, case)
        marked = self._show_phases(phase_words.told(outcome.wires, case))
        self.owed = {id: None for table in tables for id in table.ids if id in self.items_by_id}
        return marked | self._write(list(self.owed) if sight is None else self._owed_in(sight))

    def _show_phases(self, told: tuple[list[Any], ...]) -> set[str]:
        """Mark the phases that reach each element, where they differ; the ids of marks that changed."""
        assert self._shown is not None
        before, self._told = self._told, told
        fresh, self._reread = self._reread, set()
        if not (told or before):
            return set()
        changed, same = set(), told == before
        for id, element in self._laid.elements.items():
            if same and id not in fresh and not isinstance(element, Transformer):
                continue
            item = self.items_by_id.get(id)
            if item is not None and isinstance(element, Branch | Attachment):
                if item.say_phases(self._shown.phases(id, element)):
                    changed.add(id)
        return changed

    def _show_standings(self, table: Table[Any], case: int, worst: Mapping[str, Standing]) -> None:
        blaming, items = self.look.blaming, self.items_by_id
        for id, live in zip(table.ids, column_of(table, "live", case), strict=True):
            item = items.get(id)
            if item is None:
                continue
            if isinstance(item, BranchItem) and item.parted:
                live = self._is_between_live(id)
            now = standing.unsolved(id, worst) if blaming else standing.of_row(live, id, worst)
            if now is not item.standing:
                item.stand(now)

    def _is_between_live(self, id: str) -> bool:
        element = self._laid.elements.get(id)
        return isinstance(element, Branch) and self._shown is not None and self._shown.between_live(element)

    def _owed_in(self, sight: Iterable[QRectF]) -> list[str]:
        """Those whose words lie in one of these parts of the paper."""
        parts = list(sight)
        mode = Qt.ItemSelectionMode.IntersectsItemBoundingRect
        near = {item.id for part in parts for item in self.items(part, mode) if isinstance(item, Caption)}
        words = (self.tags[id] if id in self.tags else self.captions[id] for id in self.owed)
        hidden = [one for one in words if not one.lines]  # the scene finds none that has no words yet
        for part in parts:
            near.update([one.id for one in hidden if part.intersects(one.spot.box)])
        return [id for id in self.owed if id in near]

    def write_owed(self, most: int | None = None) -> set[str]:
        """Write words that were put off; the ids of those that need more room than they have."""
        if self._shown is None:
            return set()
        return self._write(list(islice(self.owed, most)))

    def _show_flows(self, branches: Table[BranchState], case: int) -> None:
        names = ("loaded_percent", "through_kw", "forward", "live")
        loading, through, fed, live = (array_of(branches, name, case) for name in names)
        widths, onward = standing.breadths(loading).tolist(), wording.runs_on(through, fed).tolist()
        flows = (live.astype(bool) & wording.flows(through)).tolist()
        for id, width, runs, power in zip(branches.ids, widths, onward, flows, strict=True):
            item = self.items_by_id.get(id)
            if isinstance(item, BranchItem):
                item.show_flow(width, runs if power else None)

    def _write(self, ids: list[str]) -> set[str]:
        grown = set()
        for id in ids:
            del self.owed[id]
            if self._write_tag(id) if id in self.tags else self._name(id):
                grown.add(id)
        return grown

    def _write_tag(self, id: str) -> bool:
        shown, item, tag = self._shown, self.items_by_id[id], self.tags[id]
        assert shown is not None
        lines: tuple[Line, ...] = ()
        if not shown.solved:
            pass
        elif isinstance(tag, NodeFigures):
            tag.read(shown.reading(id))
            lines = wording.node_figures(*shown.rows("nodes", id), shown.wires("nodes", id), shown.limits)
        elif isinstance(item, BranchItem):
            figures = shown.rows("branches", id)
            element = self._laid.elements[id]
            wires, alike = shown.branch_wires(id, element), not isinstance(element, Transformer)
            lines = wording.branch_figures(item.angle, *figures, item.lossless, item.step, wires, alike)
        return tag.write(lines, item.standing)

    # where words go -----------------------------------------------------------------------------

    def arrange(self, only: Container[str] | None = None) -> None:
        """Give every block of words its spot, or only those of some elements while the others stay."""
        taken = Taken()
        for item in self.items_by_id.values():
            arrange.take(taken, item)
        for block in self._blocks():
            if only is None or block.id in only:
                block.shrink()
            elif block.wanted:
                taken.add(block.spot.box)
        homes = Homes({i: item.core() for i, item in self.items_by_id.items() if isinstance(item, NodeItem)})
        wishes = (w for w in self._wishes(homes) if only is None or w.key[0] in only)
        for (id, sort), spot in place(wishes, taken).items():
            words = (self.captions if sort == "caption" else self.tags)[id]
            words.settle(spot)
            if isinstance(words, NodeFigures):
                home = arrange.nearest_of(self.items_by_id[id].core(), words.spot.box)
                words.lead_to(home, always=not homes.nearest_is(id, words.spot.box))
            elif isinstance(words, Tag):
                words.lead_to(arrange.nearest_on(self.items_by_id[id], words.spot.box))
        self._make_room()

    def widen(self, ids: Iterable[str]) -> None:
        """Let the words of these grow where they stand: nothing jumps under the hand."""
        for id in ids:
            for block in (self.captions.get(id), self.tags.get(id)):
                if block is not None:
                    block.widen()

    def _blocks(self) -> Iterator[Caption]:
        yield from self.captions.values()
        yield from self.tags.values()

    def _wishes(self, homes: Homes) -> Iterator[Wish]:
        """What can move least asks first."""
        for sort in (NodeItem, AttachmentItem):
            yield from self._caption_wishes(sort)
        for id, tag in self.tags.items():
            item = self.items_by_id[id]
            if isinstance(item, NodeItem) and tag.wanted:
                yield Wish((id, "tag"), arrange.figure_spots(item, (tag.spread, tag.room), homes))
        yield from self._caption_wishes(BranchItem)
        for id, tag in self.tags.items():
            item = self.items_by_id[id]
            if isinstance(item, BranchItem) and tag.wanted:
                rooms = (tag.spread, tag.room)
                yield Wish((id, "tag"), chain.from_iterable(arrange.tag_spots(item, r) for r in rooms))

    def _caption_wishes(self, sort: type[ElementItem]) -> Iterator[Wish]:
        for id, item in self.items_by_id.items():
            if isinstance(item, sort) and self.captions[id].lines:
                yield Wish((id, "caption"), arrange.caption_spots(item, self.captions[id].room))

    def content(self) -> QRectF:
        """The box of everything drawn."""
        box = QRectF()
        for item in self.items_by_id.values():
            box = box.united(item.boundingRect())
        for block in self._blocks():
            if block.wanted:
                box = box.united(block.spot.box)
        return box

    def _make_room(self) -> None:
        wanted = self.content().adjusted(-MARGIN, -MARGIN, MARGIN, MARGIN)
        if not self.sceneRect().contains(wanted):
            self.setSceneRect(self.sceneRect().united(wanted))

    # the paper itself ---------------------------------------------------------------------------

    def drawBackground(self, painter: QPainter, rect) -> None:
        paint_ground(painter, rect, self.look)


def _rank(drawing: Drawing):
    order = {id: k for k, id in enumerate(drawing.elements)}
    return lambda id: order.get(id, -1)


def _fits(item: ElementItem, element: object) -> bool:
    sorts = ((BranchItem, Branch), (NodeItem, Node), (AttachmentItem, Attachment))
    return any(isinstance(item, drawn) and isinstance(element, kind) for drawn, kind in sorts)
