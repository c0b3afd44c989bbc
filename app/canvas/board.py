"""The drawing board: the paper, tied to session, solution, attention and theme."""

from collections.abc import Iterable, Set

from PySide6.QtCore import QPointF, QRectF, Qt, QTimer
from PySide6.QtGui import QPen

from app.canvas import arrange
from app.canvas.branch_item import BranchItem
from app.canvas.element_item import ElementItem, Look
from app.canvas.geometry import Hit, HitKind, Outline, handles, longest, nearest
from app.canvas.handles import Handles
from app.canvas.ladder import TapLadder
from app.canvas.neighbours import with_neighbours
from app.canvas.node_item import NodeItem
from app.canvas.paper import Paper
from app.canvas.placing import CLEAR, Spot, Taken, around, gap
from app.canvas.tag import SMALLEST_ZOOM, Caption, Tag
from app.canvas.theme import Theme
from app.live.attention import Attention
from app.live.session import Session
from app.live.solving import Solving
from app.model.edits import Change
from app.model.kinds import Branch
from app.model.taps import by_hand

LADDER_GAP = 6.0
LED_FROM = 60.0  # px between a ladder and its transformer; farther off a line leads there
FAR_OFF = 40.0  # px² of words that a ladder may cover to stand a px nearer its transformer
REST_MS = 120  # figures out of sight are written once the hand has paused this long
FEW = 100
SMALL = 150  # elements; on a larger drawing only the words of what was touched are placed anew


class Board(Paper):
    """The scene a person works on."""

    def __init__(
        self, session: Session, solving: Solving, attention: Attention, theme: Theme, parent=None
    ) -> None:
        super().__init__(Look(theme.palette, theme.symbols), parent)
        self.session, self.solving, self.attention, self.theme = session, solving, attention, theme
        self.ladders: dict[str, TapLadder] = {}
        self._lit: frozenset[str] = frozenset()
        self._handles = Handles(self.look)
        self._rest = QTimer(self, singleShot=True, interval=REST_MS)
        self._rest.timeout.connect(self.write_rest)
        self.addItem(self._handles)
        session.changed.connect(self._follow)
        session.replaced.connect(self._start_over)
        solving.solved.connect(lambda _: self.refresh())
        solving.went_stale.connect(self._grey)
        attention.selected.connect(lambda _: self._light())
        attention.hovered.connect(lambda _: self._light())
        attention.case_shown.connect(lambda _: self.refresh())
        theme.changed.connect(self._dress)
        self._start_over()

    def item_of(self, id: str) -> ElementItem | None:
        """The item that draws an element."""
        return self.items_by_id.get(id)

    def ladder_of(self, id: str) -> TapLadder | None:
        """The tap ladder shown at a transformer, if one is."""
        return self.ladders.get(id)

    def hit(self, at: QPointF, radius_px: float = 8.0) -> Hit:
        """What lies under a point of the scene."""
        for id, ladder in self.ladders.items():
            if ladder.isVisible() and ladder.contains(ladder.mapFromScene(at)):
                return Hit(HitKind.LADDER, id)
        return nearest(self._outlines(at, radius_px), at, radius_px)

    def _outlines(self, at: QPointF, radius: float) -> list[Outline]:
        box = QRectF(at.x() - radius, at.y() - radius, 2 * radius, 2 * radius)
        found = list(self._handles.outlines)
        for item in self.items(box, Qt.ItemSelectionMode.IntersectsItemBoundingRect):
            if isinstance(item, ElementItem):
                found += _outlines(item)
        return found

    # what happens -------------------------------------------------------------------------------

    def _start_over(self) -> None:
        self.look.stale = self.solving.stale
        self.lay_out(self.session.drawing)
        self.refresh()
        self._light()

    def _follow(self, change: Change) -> None:
        drawing = self.session.drawing
        ids: Set[str] = change.ids
        if change.rest or change.geometry or change.topology:
            everywhere = drawing.elements.keys() | self.items_by_id.keys()
            ids = everywhere if change.rest else with_neighbours(drawing, change.ids)
            moved = self.lay(drawing, ids)
        else:
            moved = self.read(drawing, ids)
        gone = self.attention.selection - drawing.elements.keys()
        if gone:  # first, so that no ladder is left at a transformer that is gone
            self.attention.select(self.attention.selection - gone)
        if moved:
            self._fit_words(with_neighbours(drawing, frozenset(ids)))
        self._light(ids)

    def refresh(self) -> None:
        """Write the figures of the case shown."""
        outcome = self.solving.outcome
        self._grey()
        if outcome is None:
            return
        case = min(self.attention.case, len(outcome.cases) - 1)
        shown = self.session.drawing, outcome, case, self.solving.reference
        problem = self.solving.problem if self.solving.problem is not outcome else None
        self._fit_words(self.show_outcome(*shown, self._sight(), problem))
        self._rest.start()
        for ladder in self.ladders.values():
            ladder.follow()

    def write_rest(self) -> None:
        """Write figures that are out of sight, few at a time so that the hand is never held up."""
        self._fit_words(self.write_owed(FEW))
        if self.owed:
            self._rest.start()

    def _write(self, ids: list[str]) -> set[str]:
        """On a small drawing the first figures of an element make all look for their places again."""
        first = len(self.items_by_id) <= SMALL and any(i in self.tags and self.tags[i].awaited for i in ids)
        grown = super()._write(ids)
        return grown | set(ids) if first else grown

    def _fit_words(self, grown: Set[str]) -> None:
        """During a drag words grow where they stand; after it they look for better places."""
        if not grown:
            return
        if self.solving.reference is not None:
            self.widen(grown)
        else:
            self.arrange(grown if len(self.items_by_id) > SMALL else None)
            self._place_ladders()

    def _sight(self) -> list[QRectF] | None:
        """Where words can be read in the views; None, all over, where there is no view."""
        views = [v for v in self.views() if v.isVisible()]
        near = [v for v in views if v.transform().m11() >= SMALLEST_ZOOM]
        return [v.mapToScene(v.viewport().rect()).boundingRect() for v in near] if views else None

    def _grey(self) -> None:
        if self.look.stale != self.solving.stale:
            self.look.stale = self.solving.stale
            self.update()

    def _dress(self) -> None:
        self.look.palette, self.look.symbols = self.theme.palette, self.theme.symbols
        self.lay(self.session.drawing, self.session.drawing.elements)
        self.arrange()
        self._place_ladders()
        self.update()

    # selection, hover, ladders ------------------------------------------------------------------

    def _light(self, fresh: Iterable[str] = ()) -> None:
        """Light what is looked at, put out what was; `fresh` may have been made anew, without light."""
        chosen, hover = self.attention.selection, self.attention.hover
        looked_at = chosen | {hover}
        for id in looked_at.union(self._lit, fresh) & self.items_by_id.keys():
            self.items_by_id[id].light(id in chosen, id == hover)
            tag = self.tags.get(id)
            if isinstance(tag, Tag):
                tag.light(id in looked_at)
        self._lit = looked_at
        self._take_handles()
        self._raise_ladders()

    def _take_handles(self) -> None:
        chosen = self.attention.selection
        (id,) = chosen if len(chosen) == 1 else ("",)
        item, element = self.items_by_id.get(id), self.session.drawing.elements.get(id)
        if isinstance(item, BranchItem) and isinstance(element, Branch):
            self._handles.hold(handles(element, id, item.points))
        else:
            self._handles.hold([])

    def _raise_ladders(self) -> None:
        """A ladder stands at each selected transformer whose tap is set by hand."""
        elements = self.session.drawing.elements
        wanted = {i for i in self.attention.selection if by_hand(elements.get(i))}
        for id in self.ladders.keys() - wanted:
            self.take_away(self.ladders.pop(id))
        fresh = wanted - self.ladders.keys()
        for id in fresh:
            ladder = TapLadder(self, id, self.session, self.solving, self.theme)
            ladder.setZValue(8)
            self.ladders[id] = ladder
            self.addItem(ladder)
        if fresh or self.solving.reference is None:  # it stays where the hand holds it
            self._place_ladders()

    def _place_ladders(self) -> None:
        """Where a ladder covers no symbol and no bar, if there is such a place, and few words."""
        if not self.ladders:
            return
        spots = {id: self._ladder_spots(id) for id in self.ladders}
        taken, symbols = self._taken_near(spot.box for each in spots.values() for spot in each)
        sight = self._sight() or []
        for id, each in spots.items():
            clear = [s for s in each if not symbols.overlap(s.box)]
            seen = [s for s in clear if any(part.contains(s.box) for part in sight)]
            core = self.items_by_id[id].core()
            boxes = [s.box for s in seen or clear or each]
            box = min(boxes, key=lambda b: taken.overlap(b) + FAR_OFF * gap(b, core))
            self.ladders[id].setPos(box.topLeft() - self.ladders[id].boundingRect().topLeft())
            for table in (taken, symbols):
                table.add(box)
        self.update()  # the lines to the ladders

    def drawBackground(self, painter, rect) -> None:
        super().drawBackground(painter, rect)
        painter.setPen(QPen(self.look.palette.good, 1.0))
        for id, ladder in self.ladders.items():
            plate, core = ladder.sceneBoundingRect(), self.items_by_id[id].core()
            if ladder.isVisible() and gap(plate, core) > LED_FROM:
                painter.drawLine(arrange.nearest_of(plate, core), core.center())

    def _ladder_spots(self, id: str) -> list[Spot]:
        """Round the symbol with its name, then round the bare symbol, where it hides words at least."""
        box, symbol = self.ladders[id].boundingRect(), self.items_by_id[id].core()
        named = symbol.united(self.captions[id].spot.box)
        tries = (
            (named, LADDER_GAP),
            (named, 30.0),
            (named, 60.0),
            (symbol, 10.0),
            (symbol, 40.0),
            (named, 110.0),
        )
        return [s for core, away in tries for s in around(core, box.width(), box.height(), "a43rlb12", away)]

    def _taken_near(self, boxes: Iterable[QRectF]) -> tuple[Taken, Taken]:
        """What symbols, lines and words cover where any of these boxes, with their clear rim, would be; and
        what symbols and bars alone do."""
        taken, symbols, mode = Taken(), Taken(), Qt.ItemSelectionMode.IntersectsItemBoundingRect
        rims = (box.adjusted(-CLEAR, -CLEAR, CLEAR, CLEAR) for box in boxes)
        for item in {item for rim in rims for item in self.items(rim, mode)}:
            if isinstance(item, ElementItem):
                arrange.take(taken, item)
                symbols.add(item.core())
            elif isinstance(item, Caption) and item.lines:
                taken.add(item.spot.box)
        return taken, symbols


def _outlines(item: ElementItem) -> list[Outline]:
    if isinstance(item, NodeItem):
        points = item.ends if item.bar else item.ends[:1]
        return [Outline(HitKind.NODE, item.id, points, reach=3.0)]
    core = item.core()
    symbol, reach = (core.center(),), min(core.width(), core.height()) / 2
    if not isinstance(item, BranchItem):
        return [Outline(HitKind.ATTACHMENT, item.id, symbol, reach=reach)]
    found = [Outline(HitKind.BRANCH, item.id, tuple(item.points), reach=item.flow.width / 2)]
    if item.worn is not None:
        found.append(Outline(HitKind.BRANCH, item.id, symbol, longest(item.points), reach))
    return found
