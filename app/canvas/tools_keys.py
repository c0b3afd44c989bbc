"""Every key and gesture of the board: what the help lists, and what a key does when no tool wants it."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtGui import QKeyEvent, QKeySequence

from app.canvas import tools_phases as phases
from app.canvas.ladder import press_tap_key
from app.canvas.tools import ARROWS, ENTERS, node_at
from app.canvas.tools_length import LengthTool, begins_length
from app.canvas.tools_place import put_down
from app.canvas.tools_pull import Brush, PullTool, Spot, draw
from app.canvas.tools_select import pull_from
from app.canvas.tools_tap import TapHold
from app.canvas.tools_travel import A_KEY
from app.model import edits
from app.model.drawing import Part, label
from app.model.kinds import (
    KIND_WORDS,
    LETTERS,
    Attachment,
    Branch,
    Busbar,
    Joint,
    Line,
    Node,
    kind_of,
)
from app.model.parts import builtin_parts
from app.model.taps import by_hand

if TYPE_CHECKING:
    from app.canvas.view import BoardView

REACH = 8  # steps of the grid that Alt with an arrow draws on
FAR = 5  # steps of a nudge with Shift

SHORTCUTS: tuple[tuple[str, str], ...] = (
    ("Click", "Select; with Shift or Ctrl add to the selection"),
    ("Drag on paper", "Select with the rubber band"),
    ("Drag an element", "Move it; a joint let go on a node joins it"),
    ("Drag the ring beside a node", "Draw on from it with the last branch: to a node, a line or the paper"),
    ("0–9 while drawing", "Type the length as you go, such as 450 ft"),
    ("Drag a line, a bend, an end", "Reroute it, or put its end on another node"),
    ("Double click", "On a name or symbol: rename. On a line: a bend more. On a bend: a bend less"),
    ("Drag or wheel on the tap ladder", "Move the tap; Esc puts it back"),
    ("Up, Down, Home", "With one transformer selected: tap a notch up, down, to the middle"),
    ("Arrows", "Nudge the selection by a grid step; with Shift by five"),
    ("Alt + arrow", "With a node selected: draw the last branch on in that direction; then type its length"),
    ("X or Enter", "With a node selected: draw on from it; arrows aim, Enter ends"),
    ("Enter", "With anything else selected: go to its card; Alt + Enter does so for nodes too"),
    ("S, L, M, G, K", "Supply, load, motor, generator, capacitor: hung on the selected node, or placed"),
    (
        "C, O, T, V, W",
        "Cable, overhead line, transformer, regulator, switch: drawn on from the selected node, or placed",
    ),
    (
        "Shift + A, B, C",
        "Put the selection, or the line just drawn, on that phase: a lateral with all beyond",
    ),
    ("P, Shift + P", "Next or previous phases: as many as reach it, A, B, C, AB, BC, CA"),
    ("B, J", "Busbar, joint: placed; a selected joint turns into a busbar and back"),
    ("R", "Turn a busbar or an attachment by a quarter"),
    ("Tab, Shift + Tab", "Next or previous element, in the order of drawing"),
    ("F2", "Rename"),
    ("Delete", "Delete, with what hangs on a deleted node"),
    ("Ctrl + C, X, V, D", "Copy, cut, paste at the hand, duplicate"),
    ("Ctrl + A, Esc", "Select all, select nothing"),
    ("Ctrl + wheel, +, −", "Zoom round the hand"),
    ("F", "Fit the whole drawing"),
    ("Wheel; Space or middle button + drag", "Scroll; move the paper"),
    ("F9, Shift + F9", "Run the year of its profiles; show it"),
    ("Ctrl + Shift + P", "The profiles: paste, open or invent them"),
    ("Shift while placing", "Keep the part in the hand; Esc puts it away"),
)

PARTS_BY_KEY = {getattr(Qt.Key, f"Key_{letter}"): kind for kind, letter in LETTERS.items()}
STANDARD = (
    (QKeySequence.StandardKey.Copy, "copy_selection"),
    (QKeySequence.StandardKey.Cut, "cut_selection"),
    (QKeySequence.StandardKey.Paste, "paste"),
    (QKeySequence.StandardKey.SelectAll, "select_all"),
    (QKeySequence.StandardKey.Delete, "delete_selection"),
)
Mod = Qt.KeyboardModifier


def press(view: BoardView, event: QKeyEvent) -> bool:
    """Do what a key asks for; False where it asks for nothing here."""
    for standard, action in STANDARD:
        if event.matches(standard):
            getattr(view, action)()
            return True
    mods = event.modifiers() & ~Mod.KeypadModifier
    if mods == Mod.ControlModifier:
        return _with_control(view, event)
    if mods == Mod.AltModifier:
        return _with_alt(view, event)
    if mods & ~Mod.ShiftModifier:
        return False
    if _on_selection(view, event):
        return True
    return not mods & Mod.ShiftModifier and _letter(view, event) or _anywhere(view, event)


def only(view: BoardView) -> str | None:
    """The one selected element, if it is one."""
    chosen = view.attention.selection
    return next(iter(chosen)) if len(chosen) == 1 else None


def _with_control(view: BoardView, event: QKeyEvent) -> bool:
    if event.key() == Qt.Key.Key_D:
        view.duplicate_selection()
    elif event.key() in (Qt.Key.Key_Plus, Qt.Key.Key_Equal):
        view.zoom_in()
    elif event.key() == Qt.Key.Key_Minus:
        view.zoom_out()
    elif event.key() == Qt.Key.Key_0:
        view.fit()
    else:
        return False
    return True


def _with_alt(view: BoardView, event: QKeyEvent) -> bool:
    id = only(view)
    if event.key() in ENTERS and view.attention.selection:
        view.card_wanted.emit()
        return True
    if event.key() in ARROWS and id is not None and isinstance(view.drawing.elements[id], Node):
        extend(view, id, *ARROWS[event.key()])
        return True
    return False


def extend(view: BoardView, id: str, dx: int, dy: int) -> None:
    """Draw the last branch on from a node in a direction; a node that stands there is connected."""
    node = view.drawing.elements[id]
    assert isinstance(node, Node)
    along = dx if isinstance(node, Busbar) and not node.upright else dy if isinstance(node, Busbar) else 0
    reach = REACH + (node.length / 2 if isinstance(node, Busbar) and along else 0)
    x, y = node.x + dx * reach, node.y + dy * reach
    met = node_at(view.drawing, x, y, [id])
    if met is not None and _joined(view, id, met):
        view.attention.select([met])
        return
    view.fresh = draw(view, Spot(node.x, node.y, node=id), Spot(x, y, node=met), view.brush)
    view.show_selection()


def _joined(view: BoardView, one: str, other: str) -> bool:
    return any({b.start, b.end} == {one, other} for b in view.drawing.branches().values())


def _on_selection(view: BoardView, event: QKeyEvent) -> bool:
    id, key, elements = only(view), event.key(), view.drawing.elements
    one = elements.get(id) if id is not None else None
    if by_hand(one) and id is not None and press_tap_key(_hold(view, id), event):
        return True
    line = view.fresh if isinstance(one, Node) else id
    if line is not None and isinstance(elements.get(line), Line) and begins_length(event):
        view.use(LengthTool(view, line))
        return view.tool.key(event)
    if key in ARROWS and view.attention.selection:
        steps = FAR if event.modifiers() & Mod.ShiftModifier else 1
        dx, dy = ARROWS[key]
        view.nudge(dx * steps, dy * steps, held=event.isAutoRepeat())
    elif isinstance(one, Node) and id is not None and (key in ENTERS or key == Qt.Key.Key_X):
        view.use(pull_from(view, id, held=False))
    elif key in ENTERS and view.attention.selection:
        view.card_wanted.emit()
    elif key == Qt.Key.Key_R and id is not None:
        return _turn(view, id)
    else:
        return phases.press(view, event)
    return True


def _hold(view: BoardView, id: str) -> TapHold:
    """The hold of the ladder where one is shown, else one of the board's own."""
    ladder = view.board.ladder_of(id)
    if ladder is not None:
        view.tap_hold = ladder.hold
    elif view.tap_hold is None or view.tap_hold.id != id:
        view.tap_hold = TapHold(view.session, view.board.solving, id)
    return view.tap_hold


def _turn(view: BoardView, id: str) -> bool:
    one = view.drawing.elements[id]
    text = f"Turn {label(view.drawing, id)}"
    if isinstance(one, Busbar):
        return view.edit(text, lambda d: edits.turn_bar(d, id))
    if isinstance(one, Attachment):
        return view.edit(text, lambda d: edits.change(d, id, dx=-one.dy, dy=one.dx))
    return False


def _letter(view: BoardView, event: QKeyEvent) -> bool:
    kind = PARTS_BY_KEY.get(Qt.Key(event.key()))
    if kind is None:
        return False
    part = plain_part(view, kind)
    id = only(view)
    one = view.drawing.elements.get(id) if id is not None else None
    if id is None or not isinstance(one, Node):
        view.place(part)
    elif isinstance(part.element, Attachment):
        spot = Spot(one.x, one.y, node=id)
        put_down(view, part, spot, spot)
        view.attention.select([id])
    elif isinstance(part.element, Branch):
        view.brush = Brush(part)
        view.use(PullTool(view, Spot(one.x, one.y, node=id), view.brush, held=False))
    elif type(one) is type(part.element):
        view.place(part)
    else:
        remake(view, id, part)
    return True


def plain_part(view: BoardView, kind: str) -> Part:
    """The shelf's plain part of a kind."""
    parts = builtin_parts(view.drawing.frequency_hz)
    return next(p for p in parts if kind_of(p.element) == kind)


def remake(view: BoardView, id: str, part: Part) -> None:
    """Turn a joint into a busbar, or back; all that stands on it stays."""
    one, made = view.drawing.elements[id], part.element
    if isinstance(one, Node) and isinstance(made, Joint | Busbar):
        before = view.drawing
        text = f"Make {label(before, id)} a {KIND_WORDS[kind_of(made)]}"
        if view.edit(text, lambda d: edits.remake(d, id, made)):
            view.attention.select(edits.added(before, view.drawing) or (id,))


def _anywhere(view: BoardView, event: QKeyEvent) -> bool:
    key = event.key()
    if key in (Qt.Key.Key_Plus, Qt.Key.Key_Equal):
        view.zoom_by(A_KEY)
    elif key == Qt.Key.Key_Minus:
        view.zoom_by(1 / A_KEY)
    elif key == Qt.Key.Key_F:
        view.fit()
    elif key == Qt.Key.Key_F2:
        view.rename_selection()
    elif key == Qt.Key.Key_Backspace:
        view.delete_selection()
    elif key == Qt.Key.Key_Escape:
        view.attention.select(())
    else:
        return False
    return True
