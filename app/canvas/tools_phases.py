"""Moving the selection to other phases: by a key, or from the context menu."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtGui import QActionGroup, QKeyEvent
from PySide6.QtWidgets import QMenu

from app.canvas.tools import named
from app.model.phasing import CHOICES
from app.model.rephasing import has_phases, set_phases, turned

if TYPE_CHECKING:
    from app.canvas.view import BoardView

LETTERS = {Qt.Key.Key_A: "A", Qt.Key.Key_B: "B", Qt.Key.Key_C: "C"}


def movable(view: BoardView) -> list[str]:
    """Those of the selection whose phases can be chosen, in the order of drawing; while its far node is
    selected, the line that was drawn last."""
    chosen = view.attention.selection
    found = [i for i, one in view.drawing.elements.items() if i in chosen and has_phases(one)]
    return found or ([view.fresh] if view.fresh in view.drawing.elements else [])


def put_on(view: BoardView, phases: str) -> bool:
    """Put the selection on these phases, as one undo step."""
    ids = movable(view)
    if not ids:
        return False
    return view.edit(
        f"Phases of {named(view.drawing, ids)} to {phases}", lambda d: set_phases(d, ids, phases)
    )


def now(view: BoardView) -> str:
    """The phases that all of the selection state; nothing where they differ."""
    said = {getattr(view.drawing.elements[i], "phases") for i in movable(view)}  # noqa: B009
    return said.pop() if len(said) == 1 else ""


def press(view: BoardView, event: QKeyEvent) -> bool:
    """Shift with a letter puts the selection on that phase, P goes round all choices, Shift + P back."""
    shift = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
    key = Qt.Key(event.key())
    if not movable(view) or event.isAutoRepeat():
        return False
    if shift and key in LETTERS:
        put_on(view, LETTERS[key])
    elif key == Qt.Key.Key_P:
        put_on(view, turned(now(view) or "all", -1 if shift else 1))
    else:
        return False
    return True


def phases_menu(view: BoardView, menu: QMenu) -> None:
    """A line in the menu that unfolds into the choices, where the selection has any."""
    if not movable(view):
        return
    choices, group, stated = menu.addMenu("Phases"), QActionGroup(menu), now(view)
    for phases in CHOICES:
        action = choices.addAction("As many as reach it" if phases == "all" else phases)
        action.setCheckable(True)
        action.setChecked(phases == stated)
        action.triggered.connect(lambda _checked=False, p=phases: put_on(view, p))
        group.addAction(action)
