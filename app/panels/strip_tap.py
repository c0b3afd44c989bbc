"""Dragging a tap by its step in the voltage strip: the voltage goes where the hand goes."""

from app.canvas.tools_tap import TapHold
from app.live.attention import Attention
from app.live.session import Session
from app.live.solving import Solving
from app.model import taps
from app.model.kinds import Transformer

LEAST_PX = 7.0  # the hand moves at least this far for a notch


class TapDrag:
    """From pressing the dot to letting go is one undo step, as on the ladder."""

    def __init__(self, session: Session, solving: Solving, attention: Attention) -> None:
        self._session, self._solving, self._attention = session, solving, attention
        self._hold = TapHold(session, solving, "")
        self.dragged = ""  # the transformer in the hand
        self.reach: tuple[float, float] | None = None  # the range of the strip must not jump under the hand
        self._from = 0
        self._y = self._px = 0.0

    @property
    def id(self) -> str:
        """The transformer that is held, by hand or keys."""
        return self._hold.id if self._hold.held else ""

    def take(self, id: str, y: float, px_per_percent: float) -> None:
        """The hand takes hold of a step."""
        transformer = self._turn_to(id)
        if transformer is None:
            return
        self.dragged, self._y, self._from = id, y, transformer.tap
        self._px = max(transformer.notch_percent * px_per_percent, LEAST_PX)
        self._hold.take()

    def drag(self, y: float) -> None:
        """The hand moves; the tap follows by whole notches inside its range."""
        self._hold.to(self._from + round((self._y - y) / self._px) * self._way(self.dragged))

    def let_go(self) -> None:
        """The gesture ends."""
        self.dragged = ""
        self._hold.let_go()

    def put_back(self) -> None:
        """Back to the notch it came from; the gesture leaves no trace."""
        self.dragged = ""
        self._hold.put_back()

    def nudge(self, id: str, up: int) -> None:
        """Volts up or down by one notch."""
        if self._turn_to(id) is not None:
            self._hold.nudge(up * self._way(id))

    def _turn_to(self, id: str) -> Transformer | None:
        if self._hold.id != id:
            self._hold.let_go()
            self._hold = TapHold(self._session, self._solving, id)
        return self._hold.transformer

    def _way(self, id: str) -> int:
        """+1 where a higher notch raises the voltage of the side that is fed through the transformer."""
        transformer, outcome = self._hold.transformer, self._solving.outcome
        fed = outcome.supply_winding(id, self._attention.case) if outcome is not None else 1
        return 1 if transformer is not None and taps.effect(transformer, 1, fed) == "raises" else -1
