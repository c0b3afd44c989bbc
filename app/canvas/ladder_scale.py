"""Where the notches of a tap ladder lie. Up is the higher nameplate voltage of the tapped winding, the order
in which a rating plate lists its taps; what that does to the far side is always written beside the rung."""

from msgspec import Struct

from app.model import taps
from app.model.kinds import Transformer

TALLEST = 84.0
ROOMY = 17.0  # px a notch where there are few
TIGHT = 3.0  # below this not every notch gets its tick


class Scale(Struct, frozen=True):
    """Notches of one transformer on a rail of some height, y down from its top."""

    lowest: int
    highest: int

    @staticmethod
    def of(t: Transformer) -> "Scale":
        """The scale of a transformer's taps."""
        notches = taps.notches(t)
        return Scale(notches[0], notches[-1])

    @property
    def steps(self) -> int:
        """Gaps between notches."""
        return self.highest - self.lowest

    @property
    def pitch(self) -> float:
        """Px between two notches."""
        return min(ROOMY, TALLEST / self.steps) if self.steps else ROOMY

    @property
    def height(self) -> float:
        """Px from the highest notch to the lowest."""
        return self.pitch * self.steps

    def y(self, notch: int) -> float:
        """Px below the top of the rail."""
        return (self.highest - notch) * self.pitch

    def notch(self, y: float) -> int:
        """The notch nearest to a height, no farther than the end stops."""
        return min(max(self.highest - round(y / self.pitch), self.lowest), self.highest)

    def ticks(self) -> list[int]:
        """Notches that get a tick: all, or every so many round the middle where they stand close."""
        every = 1
        while self.pitch * every < TIGHT:
            every += 1
        return [n for n in range(self.lowest, self.highest + 1) if n % every == 0]
