"""Copy, cut, paste, duplicate: clips travel on the clipboard as bytes of our own kind."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QMimeData
from PySide6.QtGui import QGuiApplication

from app.canvas.geometry import scene, snap
from app.model import edits
from app.model.edits import Clip
from app.model.errors import FileError
from app.model.kinds import Node
from app.model.parts import decode_clip, encode_clip

if TYPE_CHECKING:
    from app.canvas.view import BoardView

CLIP_MIME = "application/x-farend-clip"
PART_MIME = "application/x-farend-part"
FARTHEST = 400.0
ASIDE = 2.0  # steps to the right and down of what was copied


def copy(view: BoardView) -> bool:
    """Put the selection on the clipboard; False where there is none."""
    if not view.attention.selection:
        return False
    clip = edits.copy(view.drawing, ordered(view))
    data = QMimeData()
    data.setData(CLIP_MIME, encode_clip(clip))
    QGuiApplication.clipboard().setMimeData(data)
    return True


def cut(view: BoardView) -> None:
    """Copy, then delete."""
    if copy(view):
        view.take_away("Cut", "Cut", view.attention.selection)


def paste(view: BoardView) -> None:
    """Put the clip on the paper where the hand is, or beside what was copied where the hand is away."""
    data = QGuiApplication.clipboard().mimeData()
    if data is None or not data.hasFormat(CLIP_MIME):
        return
    try:
        clip = decode_clip(bytes(data.data(CLIP_MIME).data()))
    except FileError as error:
        view.refused.emit(str(error), view.hand())
        return
    x, y = snap(view.hand()) if view.hand_is_here() else _beside(view, clip)
    put(view, clip, x, y, "Paste")


def duplicate(view: BoardView) -> None:
    """A second one of the selection, a little aside."""
    if view.attention.selection:
        clip = edits.copy(view.drawing, ordered(view))
        put(view, clip, clip.x + ASIDE, clip.y + ASIDE, "Duplicate")


def put(view: BoardView, clip: Clip, x: float, y: float, verb: str) -> None:
    """Paste a clip and select what came of it."""
    before = view.drawing
    nodes = [i for i in view.attention.selection if i in before.nodes()]
    node = nodes[0] if len(nodes) == 1 and verb == "Paste" else None
    text = f"{verb} {len(clip.elements)} elements" if len(clip.elements) > 1 else f"{verb} an element"
    if view.edit(text, lambda d: edits.paste(d, clip, x, y, node), at=scene(x, y)):
        view.attention.select(edits.added(before, view.drawing))


def ordered(view: BoardView) -> list[str]:
    """The selection in the order of drawing."""
    return [i for i in view.drawing.elements if i in view.attention.selection]


def _beside(view: BoardView, clip: Clip) -> tuple[float, float]:
    """Aside of the original, again and again until nothing lies there already."""
    taken = {(n.x, n.y) for n in view.drawing.nodes().values()}
    spots = [(e.x, e.y) for e in clip.elements.values() if isinstance(e, Node)]
    aside = ASIDE
    while spots and any((x + aside, y + aside) in taken for x, y in spots) and aside < FARTHEST:
        aside += ASIDE
    return clip.x + aside, clip.y + aside
