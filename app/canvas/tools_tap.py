"""One hold on a tap, whatever holds it: rung, wheel or key. From taking it to letting go is one undo step."""

from __future__ import annotations

from PySide6.QtCore import QTimer

from app.live.session import Session
from app.live.solving import Solving
from app.model import edits, taps
from app.model.drawing import label
from app.model.figures import nameplate
from app.model.kinds import Transformer

LINGER_MS = 700  # clicks of the wheel nearer together than this are one hold


class TapHold:
    """Takes the tap of one transformer, moves it notch by notch, lets it go."""

    def __init__(self, session: Session, solving: Solving, id: str) -> None:
        self._session, self._solving, self.id = session, solving, id
        self._gesture = 0
        self._first = 0
        self._pause = QTimer(singleShot=True, interval=LINGER_MS)
        self._pause.timeout.connect(self.let_go)

    @property
    def held(self) -> bool:
        """True from taking to letting go."""
        return self._gesture != 0

    @property
    def transformer(self) -> Transformer | None:
        """The transformer as it stands, or None where it is gone."""
        one = self._session.drawing.elements.get(self.id)
        return one if isinstance(one, Transformer) else None

    def take(self) -> None:
        """Begin one undo step; from here the change is shown on every label."""
        t = self.transformer
        if not self.held and t is not None:
            self._gesture, self._first = self._session.new_gesture(), t.tap
            self._solving.begin_drag()

    def to(self, notch: int) -> None:
        """Move to a notch, no farther than the end stops."""
        t = self.transformer
        if t is None or not self.held:
            return
        notch = min(max(notch, -t.taps_down), t.taps_up)
        if notch != t.tap:
            self._session.edit(
                f"Tap of {label(self._session.drawing, self.id)} to {taps.percent_words(t, notch)}",
                lambda d: edits.set_tap(d, self.id, notch),
                self._gesture,
            )

    def by(self, notches: int) -> None:
        """Move by notches from where it stands."""
        t = self.transformer
        if t is not None:
            self.to(t.tap + notches)

    def let_go(self) -> None:
        """End the undo step."""
        self._pause.stop()
        if self.held:
            self._gesture = 0
            self._solving.end_drag()

    def put_back(self) -> None:
        """Let go, with the tap where it was when it was taken: nothing happened."""
        self.to(self._first)
        self.let_go()

    def nudge(self, notches: int) -> None:
        """Take, move, and let go after a pause without another nudge."""
        self.take()
        self.by(notches)
        self._pause.start()


def nameplate_words(t: Transformer, notch: int) -> str:
    """`10 725 V −2.5 %`."""
    return f"{nameplate(round(taps.nameplate_v(t, notch), 1))} {taps.percent_words(t, notch)}"
