"""The context menu: what makes sense at the element under the hand."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF
from PySide6.QtWidgets import QMenu

from app.canvas.geometry import HitKind
from app.canvas.tools_bend import with_bend, without_bend
from app.canvas.tools_keys import only, plain_part, remake
from app.canvas.tools_phases import movable, phases_menu
from app.canvas.tools_select import pull_from
from app.model import edits
from app.model.drawing import label
from app.model.kinds import Branch, Busbar, Capacitor, Joint, Line, Motor, Node, Switch, Transformer

if TYPE_CHECKING:
    from app.canvas.view import BoardView

PHASES = "phases"  # where the line stands that unfolds into them
Entry = tuple[str, Callable[[], object]] | str | None


def menu_at(view: BoardView, at: QPointF, keyed: bool = False) -> QMenu:
    """The menu for a point of the paper; what is there is selected first, unless a key called for it."""
    hit = view.hit_words(at)
    if not keyed and hit.id not in view.attention.selection:
        view.attention.select([hit.id] if hit.id else ())
    menu = QMenu(view)
    for entry in [*_of_one(view, at), *_of_all(view)]:
        if entry is None:
            menu.addSeparator()
            continue
        if isinstance(entry, str):
            phases_menu(view, menu)
            continue
        text, do = entry
        menu.addAction(text).triggered.connect(lambda _checked=False, do=do: do())
    return menu


def _of_one(view: BoardView, at: QPointF) -> list[Entry]:
    id = only(view)
    one = view.drawing.elements.get(id) if id is not None else None
    if id is None or one is None:
        return []
    entries: list[Entry] = []
    if isinstance(one, Node):
        entries += _of_node(view, id, one)
    if isinstance(one, Branch):
        entries += _of_branch(view, id, one, at)
    if isinstance(one, Capacitor):
        verb = "Disconnect" if one.connected else "Connect"
        entries.append((verb, _change(view, id, verb, connected=not one.connected)))
    if isinstance(one, Motor):
        for verb, state in (("Run", "running"), ("Start", "starting"), ("Switch off", "off")):
            if one.state != state:
                entries.append((verb, _change(view, id, verb, state=state)))
    return [
        *entries,
        PHASES,
        None,
        ("Rename", view.rename_selection),
        ("Show card", view.card_wanted.emit),
        None,
    ]


def _of_node(view: BoardView, id: str, node: Node) -> list[Entry]:
    other = "joint" if isinstance(node, Busbar) else "busbar"
    entries: list[Entry] = [("Draw on from here", lambda: view.use(pull_from(view, id, held=False)))]
    if isinstance(node, Joint | Busbar):
        entries.append((f"Make it a {other}", lambda: remake(view, id, plain_part(view, other))))
    if isinstance(node, Busbar):
        text = f"Turn {label(view.drawing, id)}"
        entries.append(("Turn", lambda: view.edit(text, lambda d: edits.turn_bar(d, id))))
    return entries


def _of_branch(view: BoardView, id: str, branch: Branch, at: QPointF) -> list[Entry]:
    name, hit = label(view.drawing, id), view.hit(at)
    text = f"Reroute {name}"
    entries: list[Entry] = [("Turn ends round", view.swap_selection)]
    if hit.kind is HitKind.BRANCH:
        entries.append(("Add a bend", lambda: view.edit(text, lambda d: with_bend(d, id, hit.index, at))))
    if hit.kind is HitKind.BEND:
        entries.append(
            ("Take the bend away", lambda: view.edit(text, lambda d: without_bend(d, id, hit.index)))
        )
    if branch.via:
        entries.append(("Take all bends away", lambda: view.edit(text, lambda d: edits.reroute(d, id, ()))))
    if isinstance(branch, Line):
        entries.append(("Put a joint here", lambda: view.part_line(id, at)))
    if isinstance(branch, Switch):
        verb = "Open" if branch.closed else "Close"
        entries.append((verb, _change(view, id, verb, closed=not branch.closed)))
    if isinstance(branch, Transformer) and branch.tap:
        entries.append(
            (
                "Tap to the middle",
                lambda: view.edit(f"Tap of {name} to 0 %", lambda d: edits.set_tap(d, id, 0)),
            )
        )
    return entries


def _change(view: BoardView, id: str, verb: str, **fields: object) -> Callable[[], object]:
    text = f"{verb} {label(view.drawing, id)}"
    return lambda: view.edit(text, lambda d: edits.change(d, id, **fields))


def _of_all(view: BoardView) -> list[Entry]:
    if not view.attention.selection:
        return [("Paste", view.paste), ("Select all", view.select_all), None, ("Whole drawing", view.fit)]
    several: list[Entry] = [PHASES, None] if len(view.attention.selection) > 1 and movable(view) else []
    return [
        *several,
        ("Cut", view.cut_selection),
        ("Copy", view.copy_selection),
        ("Paste", view.paste),
        ("Duplicate", view.duplicate_selection),
        None,
        ("Delete", view.delete_selection),
    ]
