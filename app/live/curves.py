"""Tap curves by transformer, each kept for as long as it holds. Knows no Qt."""

from __future__ import annotations

from typing import TYPE_CHECKING

from msgspec.structs import replace

from app.model.drawing import Drawing
from app.model.edits import Change
from app.model.kinds import Transformer

if TYPE_CHECKING:
    from app.study import TapCurve


class Curves:
    """A curve spans all notches of its transformer, so moving that tap leaves it as it was."""

    def __init__(self, drawing: Drawing) -> None:
        self._drawing = drawing
        self._number = 0
        self._known: dict[str, tuple[int, TapCurve]] = {}
        self._wanted: dict[str, None] = {}

    def known(self, id: str) -> TapCurve | None:
        """The newest curve there is."""
        return self._known[id][1] if id in self._known else None

    def current(self, id: str) -> bool:
        """True where it belongs to the drawing as it stands."""
        return id in self._known and self._known[id][0] == self._number

    def want(self, id: str) -> bool:
        """Put a transformer on the list where its curve has aged; True where it is on it."""
        if isinstance(self._drawing.elements.get(id), Transformer) and not self.current(id):
            self._wanted.setdefault(id)
        return id in self._wanted

    def wanted(self) -> str | None:
        """The transformer whose curve is drawn next."""
        return next(iter(self._wanted), None)

    def begin(self, id: str) -> int:
        """Take a transformer off the list; the number says which drawing its curve will belong to."""
        self._wanted.pop(id, None)
        return self._number

    def put(self, id: str, number: int, curve: TapCurve) -> bool:
        """Keep a curve; False where its transformer is gone."""
        if id not in self._drawing.elements:
            return False
        self._known[id] = (number, curve)
        return True

    def follow(self, drawing: Drawing, change: Change) -> None:
        """Age the curves that a change touches."""
        before, self._drawing = self._drawing, drawing
        if not (change.topology or change.parameter or change.rest):
            return
        kept = self._only_tap(before, change)
        unharmed = kept if kept is not None and self.current(kept) else None
        self._number += 1
        self._known = {i: k for i, k in self._known.items() if i in drawing.elements}
        self._wanted = {i: None for i in self._wanted if i in drawing.elements}
        if unharmed is not None:
            self._known[unharmed] = (self._number, self._known[unharmed][1])

    def _only_tap(self, before: Drawing, change: Change) -> str | None:
        if change.topology or change.rest or len(change.parameter) != 1:
            return None
        (id,) = change.parameter
        old, new = before.elements.get(id), self._drawing.elements.get(id)
        if isinstance(old, Transformer) and isinstance(new, Transformer):
            return id if replace(new, tap=old.tap) == old else None
        return None
