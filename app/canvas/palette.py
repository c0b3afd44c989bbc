"""Our colours, light and dark; every painted thing takes its colour from here."""

from msgspec import Struct
from PySide6.QtGui import QColor, QFont


class Palette(Struct, frozen=True):
    """Named by what they mean, not by what they look like."""

    paper: QColor
    ink: QColor
    soft: QColor  # quiet text
    faint: QColor  # dots, rules
    panel: QColor
    field: QColor
    raised: QColor
    flow: QColor
    good: QColor
    near: QColor
    failed: QColor
    tap: QColor
    copper: QColor
    iron: QColor

    @property
    def dark(self) -> bool:
        """True for light ink on dark paper."""
        return self.paper.lightnessF() < 0.5


LIGHT = Palette(*map(QColor, (
    "#FAF8F3", "#22303C", "#5F6B76", "#DAD6CB", "#F3F0E7", "#FFFFFF", "#FFFFFF", "#2B5C8A", "#2A7F78",
    "#B9770E", "#A32A54", "#C65D21", "#C98A4B", "#5B6B79",
)))  # fmt: skip
DARK = Palette(*map(QColor, (
    "#171C21", "#E6E3DB", "#9AA3AB", "#313A43", "#1E242A", "#232B33", "#262E36", "#79AEE0", "#5CC2B8",
    "#E2A93B", "#F0739B", "#F08A4B", "#C98A4B", "#5B6B79",
)))  # fmt: skip


def font(points: float, bold: bool = False) -> QFont:
    """The one family of the window, at a size in points."""
    made = QFont()
    made.setPointSizeF(points)
    made.setBold(bold)
    return made
