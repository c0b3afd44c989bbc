"""The view of the board: hands pointer and keys to the tool in use, and offers what menus call for."""

from collections.abc import Callable

from PySide6.QtCore import QPoint, QPointF, Qt, Signal
from PySide6.QtGui import QKeyEvent

from app.canvas import tools_clip as clips
from app.canvas import tools_keys as keys
from app.canvas import tools_travel as travel
from app.canvas.board import Board
from app.canvas.geometry import Hit, HitKind, attachment_point, node_point, pose, route, snap
from app.canvas.ladder import release_tap_key
from app.canvas.tag import Caption
from app.canvas.theme import Theme
from app.canvas.tools import Tool, named, node_at, removed
from app.canvas.tools_keys import SHORTCUTS
from app.canvas.tools_menu import menu_at
from app.canvas.tools_move import carried
from app.canvas.tools_place import PlaceTool
from app.canvas.tools_pull import Brush
from app.canvas.tools_rename import NameField
from app.canvas.tools_select import SelectTool
from app.canvas.tools_tap import TapHold
from app.canvas.view_events import EventView
from app.live.attention import Attention
from app.live.session import Session
from app.model import edits
from app.model.drawing import Drawing, Part, label
from app.model.edits import Change
from app.model.kinds import KIND_WORDS, Attachment, Branch, Node, Transformer, kind_of
from app.model.taps import words

__all__ = ["SHORTCUTS", "BoardView"]

HIT_PX = 8.0
EDGE_PX = 40


class BoardView(EventView):
    """Where a person draws.

    brush: what the next branch is drawn with
    fresh: the line that was drawn last, while its far node is selected; digits give its length
    """

    placing_ended = Signal()
    card_wanted = Signal()
    told = Signal(str)  # something that just happened and is worth a word

    def __init__(self, board: Board, session: Session, attention: Attention, theme: Theme) -> None:
        super().__init__(board)
        self.board, self.session, self.attention, self.theme = board, session, attention, theme
        self.brush = Brush(keys.plain_part(self, "cable"))
        self.fresh: str | None = None
        self.tap_hold: TapHold | None = None
        self._nudging = 0
        self.tool: Tool = SelectTool(self)
        self.idle = self.tool
        self.setAccessibleName("Drawing board")
        attention.selected.connect(self._selected)
        session.replaced.connect(self._start_over)
        session.changed.connect(self._follow)
        theme.changed.connect(self.float_again)

    # what tools ask for --------------------------------------------------------------------------

    @property
    def drawing(self) -> Drawing:
        """The drawing as it stands."""
        return self.session.drawing

    def edit(
        self,
        text: str | Callable[[Drawing], str],
        change: Callable[[Drawing], Drawing],
        gesture: int = 0,
        at: QPointF | None = None,
    ) -> bool:
        """Make an edit; a refusal is told at a place on the paper. The text may depend on what came of it."""
        refusal = self.session.edit(text, change, gesture)
        if refusal:
            self.refused.emit(refusal, at if at is not None else self.hand())
        return not refusal

    def use(self, tool: Tool) -> None:
        """Take another tool into the hand."""
        before, self.tool = self.tool, tool
        before.end()
        self.viewport().setCursor(tool.cursor)
        self.float_again()

    def rest(self) -> None:
        """Put the tool away."""
        self.use(self.idle)

    def float_again(self, *_: object) -> None:
        """Paint again what floats over the drawing."""
        self.viewport().update()

    def hit(self, at: QPointF) -> Hit:
        """What lies under a point of the paper, as near as the hand can aim on the screen."""
        return self.board.hit(at, HIT_PX / min(self.scale_now(), 1.0))

    def hit_words(self, at: QPointF) -> Hit:
        """The same, and on a name or tag the element it belongs to, as paper that has an id."""
        hit = self.hit(at)
        if hit.kind is not HitKind.PAPER:
            return hit
        words = next((i for i in self.board.items(at) if isinstance(i, Caption)), None)
        return Hit(HitKind.PAPER, words.id) if words is not None else hit

    def hit_node(self, at: QPointF) -> str | None:
        """The node under a point, whatever else lies there."""
        hit = self.hit(at)
        if hit.kind is HitKind.NODE:
            return hit.id
        return node_at(self.drawing, *snap(at)) if hit.kind is not HitKind.PAPER else None

    def hand(self) -> QPointF:
        """Where the hand is on the paper: the pointer, else by the selection, else the middle of the view."""
        if self.pointer is not None:
            return self.paper(self.pointer)
        chosen = keys.only(self)
        if chosen is not None:
            return self.mapToScene(self.px_of(chosen))
        return self.mapToScene(self.viewport().rect().center())

    def hand_is_here(self) -> bool:
        """True while the pointer is over the board."""
        return self.pointer is not None

    def px_of(self, id: str) -> QPoint:
        """Where an element is in the viewport."""
        one = self.drawing.elements[id]
        if isinstance(one, Node):
            point = node_point(one)
        elif isinstance(one, Attachment):
            point = attachment_point(self.drawing, id)
        else:
            point = pose(route(self.drawing, id))[0]
        return self.mapFromScene(point)

    def px_of_name(self, id: str) -> QPoint:
        """Where its name is written, or would be."""
        caption = self.board.captions.get(id)
        written = caption is not None and not caption.spot.box.isEmpty()
        return self.mapFromScene(caption.spot.box.center()) if caption and written else self.px_of(id)

    def scale_now(self) -> float:
        """Screen pixels a pixel of the paper."""
        return self.transform().m11()

    def show_point(self, at: QPointF) -> None:
        """Scroll until a point of the paper is in view."""
        room = self.viewport().rect().adjusted(EDGE_PX, EDGE_PX, -EDGE_PX, -EDGE_PX)
        if not room.contains(self.mapFromScene(at)):
            self.fitted = False
            self.centerOn(at)

    def show_selection(self) -> None:
        """Scroll until the selected element is in view."""
        id = keys.only(self)
        if id is not None:
            self.show_point(self.mapToScene(self.px_of(id)))

    # what menus and panels ask for ---------------------------------------------------------------

    def place(self, part: Part) -> None:
        """Take a part from the shelf into the hand."""
        if isinstance(part.element, Branch):
            self.brush = Brush(part)
        self.use(PlaceTool(self, part))
        self.take_focus()

    def copy_selection(self) -> None:
        """Copy the selection to the clipboard."""
        clips.copy(self)

    def cut_selection(self) -> None:
        """Copy the selection and delete it."""
        clips.cut(self)

    def paste(self) -> None:
        """Paste at the hand."""
        clips.paste(self)

    def duplicate_selection(self) -> None:
        """A second one of the selection, a little aside."""
        clips.duplicate(self)

    def delete_selection(self) -> None:
        """Delete the selection, and with a node what stands on it."""
        ids = self.attention.selection
        self.take_away("Delete", "Deleted", ids)

    def take_away(self, verb: str, done: str, ids: frozenset[str]) -> None:
        """Remove elements; what goes with them is in the undo text, and told."""
        if not ids:
            return
        alone, words = named(self.drawing, ids), removed(self.drawing, ids)
        if self.edit(f"{verb} {words}", lambda d: edits.remove(d, ids)) and words != alone:
            self.told.emit(f"{done} {words}.")

    def select_all(self) -> None:
        """Select every element."""
        self.attention.select(self.drawing.elements)

    def rename_selection(self) -> None:
        """Name the one selected element in place."""
        id = keys.only(self)
        if id is not None:
            NameField(self, id)

    def swap_selection(self) -> None:
        """Turn the selected branches round."""
        ids = [i for i in clips.ordered(self) if isinstance(self.drawing.elements[i], Branch)]

        def turned(drawing: Drawing) -> Drawing:
            for id in ids:
                drawing = edits.swap_ends(drawing, id)
            return drawing

        if ids:
            self.edit(f"Turn ends of {named(self.drawing, ids)}", turned)

    def part_line(self, id: str, at: QPointF) -> None:
        """Put a joint on a line."""
        text = f"Put a joint on {label(self.drawing, id)}"
        self.edit(text, lambda d: edits.split_branch(d, id, *snap(at)), at=at)

    def nudge(self, dx: float, dy: float, held: bool = False) -> None:
        """Move the selection by grid steps; a held key is one undo step."""
        ids = self.attention.selection
        if ids:
            self._nudging = self._nudging if held and self._nudging else self.session.new_gesture()
            text = f"Move {named(self.drawing, ids)}"
            self.edit(text, lambda d: edits.move(d, carried(d, ids), dx, dy), self._nudging)

    def zoom_in(self) -> None:
        """A step nearer."""
        self.zoom_by(travel.A_KEY)

    def zoom_out(self) -> None:
        """A step farther."""
        self.zoom_by(1 / travel.A_KEY)

    def zoom_by(self, factor: float) -> None:
        """Zoom round the hand, or round the middle."""
        middle = QPointF(self.viewport().rect().center())
        travel.zoom(self, factor, self.pointer if self.pointer is not None else middle)

    def fit(self) -> None:
        """Show the whole drawing."""
        travel.fit(self)

    def take_focus(self) -> None:
        """Take the keyboard back, such as when a field of the card lets it go."""
        self.setFocus(Qt.FocusReason.OtherFocusReason)

    # what events ask for -------------------------------------------------------------------------

    def part_dragged(self, part: Part) -> None:
        """A part from the shelf hovers over the board."""
        self.use(PlaceTool(self, part))

    def part_dropped(self, at: QPointF) -> None:
        """It was let go."""
        if isinstance(self.tool, PlaceTool):
            self.tool.drop(at)
            self.rest()
            self.take_focus()

    def key_pressed(self, event: QKeyEvent) -> bool:
        """A key that no tool wanted."""
        return keys.press(self, event)

    def key_released(self, event: QKeyEvent) -> bool:
        """The same on its way up."""
        return self.tap_hold is not None and release_tap_key(self.tap_hold, event)

    def select_next(self, step: int) -> bool:
        """Select the next element in the order of drawing; False past the last."""
        ids, chosen = list(self.drawing.elements), keys.only(self)
        at = ids.index(chosen) + step if chosen is not None else (0 if step > 0 else len(ids) - 1)
        if not 0 <= at < len(ids):
            return False
        self.attention.select([ids[at]])
        self.show_selection()
        return True

    def show_menu(self, px: QPoint, keyed: bool) -> None:
        """Show the context menu."""
        chosen = keys.only(self)
        px = self.px_of(chosen) if keyed and chosen is not None else px
        menu = menu_at(self, self.mapToScene(px), keyed)
        menu.aboutToHide.connect(menu.deleteLater)
        menu.popup(self.viewport().mapToGlobal(px))

    def _selected(self, _ids: frozenset[str]) -> None:
        self.fresh = None
        if self.tap_hold is not None:
            self.tap_hold.let_go()
        self._describe()
        self.float_again()

    def _describe(self) -> None:
        """Say for those who do not see it what is selected, and how a tap stands."""
        ids, id = self.attention.selection, keys.only(self)
        one = self.drawing.elements.get(id) if id is not None else None
        said = f"{len(ids)} elements selected" if ids else "Nothing selected"
        if id is not None and one is not None:
            said = f"{KIND_WORDS[kind_of(one)]} {label(self.drawing, id)} selected"
        ladder = self.board.ladder_of(id) if id is not None else None
        if isinstance(one, Transformer) and ladder is not None:
            said += f", {words(one, one.tap, ladder.fed_winding)}"
        self.setAccessibleDescription(said)

    def _follow(self, change: Change) -> None:
        if change.geometry or change.topology:  # handles and guides go with their nodes
            self.float_again()
        if change.ids & self.attention.selection:
            self._describe()

    def _start_over(self) -> None:
        self.brush, self.fresh, self.tap_hold = Brush(self.brush.part), None, None
        self.rest()
