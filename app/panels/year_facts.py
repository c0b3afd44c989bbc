"""The year in a few figures: where its energy goes, how it is spread, what the losses cost."""

import math

from PySide6.QtCore import QRectF, QSize, Qt
from PySide6.QtGui import QPainter, QPaintEvent
from PySide6.QtWidgets import QGridLayout, QSizePolicy, QWidget

from app.canvas.palette import DARK, LIGHT
from app.canvas.theme import Theme
from app.model.figures import plain
from app.panels.style import mixed
from app.panels.tape_paint import colours
from app.panels.words import RIGHT, Words
from app.study.year_outcome import YearOutcome
from app.study.year_points import when


def cost_words(year: YearOutcome) -> str:
    """What the losses cost, such as `5 648 EUR a year`."""
    return f"{plain(year.balance.cost, 0, year.money or '(unit?)')} a year"


class LossBar(QWidget):
    """Losses in lines, copper and iron, to scale; each is named where it has room, else in the tooltip."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme = theme
        self.parts: tuple[tuple[str, float], ...] = ()
        self.faded = False
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setAccessibleName("Losses by kind")
        theme.changed.connect(self.update)

    def sizeHint(self) -> QSize:
        return QSize(260, 22)

    def show_parts(self, parts: tuple[tuple[str, float], ...], faded: bool) -> None:
        """Show these kWh."""
        self.parts, self.faded = parts, faded
        told = ", ".join(f"{name} {plain(value, 0, 'kWh')}" for name, value in parts)
        self.setToolTip(told)
        self.setAccessibleDescription(told)
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        look = self._theme.palette
        whole = math.fsum(value for _, value in self.parts)
        if not whole > 0:
            return
        grounds = colours(look, self.faded)
        left = 0.0
        for name, value in self.parts:
            wide = self.width() * value / whole
            ground = grounds[name]
            room = QRectF(left, 0, max(wide - 1.5, 0), self.height())
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(ground)
            painter.drawRoundedRect(room, min(4, room.width() / 2), 4)
            words = f"{name} {plain(100 * value / whole, 0, '%')}"
            if painter.fontMetrics().horizontalAdvance(words) + 10 < wide:
                painter.setPen(DARK.paper if ground.lightnessF() > 0.52 else LIGHT.field)
                painter.drawText(room, int(Qt.AlignmentFlag.AlignCenter), words)
            left += wide


class YearFacts(QWidget):
    """Labels and figures in two columns; they go grey while the drawing has moved on."""

    LABELS = (
        "Supplies", "Generators", "Loads", "Losses", "Highest supply", "Load factor", "Loss load factor",
        "Utilisation", "Cost of losses",
    )  # fmt: skip

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme = theme
        grid = QGridLayout(self)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setHorizontalSpacing(14)
        grid.setVerticalSpacing(3)
        grid.setColumnStretch(1, 1)
        self.figures: dict[str, Words] = {}
        self._names: dict[str, Words] = {}
        for row, name in enumerate(self.LABELS):
            self._names[name], self.figures[name] = Words(name, "quiet"), Words("", "strong")
            self.figures[name].setAlignment(RIGHT)
            grid.addWidget(self._names[name], row, 0)
            grid.addWidget(self.figures[name], row, 1)
        self.bar = LossBar(theme)
        grid.addWidget(self.bar, len(self.LABELS), 0, 1, 2)
        theme.changed.connect(lambda: self._fade(self.bar.faded))

    def show_year(self, year: YearOutcome) -> None:
        """The figures of a year."""
        b = year.balance
        said = {
            "Supplies": plain(b.supply_kwh, 0, "kWh"),
            "Generators": plain(b.generation_kwh, 0, "kWh") if b.generation_kwh else "",
            "Loads": plain(b.load_kwh, 0, "kWh"),
            "Losses": f"{plain(b.loss_kwh, 0, 'kWh')}, {plain(b.loss_percent, 2, '%')}",
            "Highest supply": plain(b.peak_kw, 1, "kW"),
            "Load factor": plain(b.load_factor, 3),
            "Loss load factor": plain(b.loss_factor, 3),
            "Utilisation": plain(b.utilisation_h, 0, "h"),
            "Cost of losses": "" if math.isnan(b.cost) else cost_words(year),
        }
        tips = {
            "Highest supply": when(b.peak_at_h, year.points.year_h),
            "Load factor": "Mean over highest of all supplies",
            "Loss load factor": "Mean over highest of what lines and windings lose",
            "Utilisation": "Hours at the highest supply that would take as much energy",
        }
        for name, words in said.items():
            self.figures[name].say(words, tips.get(name, ""))
            self.figures[name].setVisible(bool(words))
            self._names[name].setVisible(bool(words))
        self.bar.show_parts(
            (("lines", b.line_kwh), ("copper", b.copper_kwh), ("iron", b.iron_kwh)), self.bar.faded
        )

    def fade(self, faded: bool) -> None:
        """Grey where the year is of an older drawing."""
        self._fade(faded)
        self.bar.show_parts(self.bar.parts, faded)

    def _fade(self, faded: bool) -> None:
        look = self._theme.palette
        for words in self.figures.values():
            words.colour(mixed(look.soft, look.panel, 0.7) if faded else look.ink)
