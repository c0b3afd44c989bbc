"""The axes of the voltage strip, and the polylines on it."""

import math
from typing import Any

import numpy as np
from msgspec import Struct
from PySide6.QtCore import QPointF, QRectF

from app.model.drawing import Drawing, Limits
from app.model.kinds import Transformer
from app.panels.strip_routes import Routes, Stop
from app.study.outcome import Outcome

STEP_PX = 46.0  # the breadth given to a transformer, which has no length
LEAST_SPAN = 6.0  # percent


class Axes(Struct, frozen=True):
    """Percent up, route across; transformers get a little breadth of their own."""

    room: QRectF
    low: float
    high: float
    px_per_m: float
    step_px: float

    def y(self, percent: Any) -> Any:
        """Where a percent of nominal lies, or an array of them."""
        share = (percent - self.low) / (self.high - self.low)
        return self.room.bottom() - share * self.room.height()

    def x(self, stop: Stop) -> float:
        """Where a node lies."""
        return self.room.left() + stop.route_m * self.px_per_m + stop.steps * self.step_px

    @property
    def px_per_percent(self) -> float:
        """How much a percent is worth."""
        return self.room.height() / (self.high - self.low)


def axes(room: QRectF, routes: Routes, span: tuple[float, float]) -> Axes:
    """Axes that hold every node of a routes."""
    stops = list(routes.stops.values())
    most = max((s.steps for s in stops), default=0)
    step = min(STEP_PX, room.width() / (3 * most)) if most else 0.0
    scales = [(room.width() - s.steps * step) / s.route_m for s in stops if s.route_m > 0]
    if not scales and most:
        step = room.width() / most
    return Axes(room, *span, min(scales, default=0.0), step)


def span(limits: Limits, routes: Routes, outcomes: list[Outcome]) -> tuple[float, float]:
    """Percent range: the limits and every voltage, with a little air."""
    low, high = limits.low_percent, limits.high_percent
    for outcome in outcomes:
        rows = outcome.nodes.rows
        stops = [rows[i] for i in routes.stops if i in rows]
        for name in ("percent", "high_percent"):
            percent = outcome.nodes.column(name)[stops]
            known = percent[np.isfinite(percent)]
            low, high = float(known.min(initial=low)), float(known.max(initial=high))
    air = max(high - low, LEAST_SPAN) * 0.07
    return low - air, high + air


BESIDE = (0.78, 0.22)  # where across a step those of transformers side by side stand


class Stretch(Struct, frozen=True):
    """One branch on the strip: from the node before it to the node it feeds; a tie feeds none."""

    branch: str
    node: str
    points: tuple[QPointF, ...]


def stretches(drawing: Drawing, routes: Routes, spots: dict[str, QPointF]) -> list[Stretch]:
    """Every branch as a polyline between the spots, those that feed a node first; a transformer is a step."""
    made = []
    for stop in routes.stops.values():
        if stop.parent in spots and stop.id in spots:
            made.append(stretch(drawing, stop, spots[stop.parent], spots[stop.id]))
    for k, tie in enumerate(routes.ties):
        if tie.near in spots and tie.far in spots:
            ends = spots[tie.near], spots[tie.far]
            made.append(Stretch(tie.branch, "", _points(drawing, tie.branch, *ends, BESIDE[k % 2])))
    return made


def stretch(drawing: Drawing, stop: Stop, before: QPointF, at: QPointF) -> Stretch:
    """The branch that feeds a node, from the spot of the node before it."""
    return Stretch(stop.feeder, stop.id, _points(drawing, stop.feeder, before, at, 0.5))


def _points(drawing: Drawing, branch: str, a: QPointF, b: QPointF, share: float) -> tuple[QPointF, ...]:
    """From one spot to the other, or a step that share of the way across."""
    if not isinstance(drawing.elements.get(branch), Transformer):
        return a, b
    across = a.x() + share * (b.x() - a.x())
    return a, QPointF(across, a.y()), QPointF(across, b.y()), b


def node_points(outcome: Outcome, case: int, routes: Routes, axes: Axes) -> dict[str, QPointF]:
    """Where each node lies."""
    rows = outcome.nodes.rows
    stops = [s for s in routes.stops.values() if s.id in rows]
    heights = axes.y(outcome.nodes.column("percent")[[rows[s.id] for s in stops], case]).tolist()
    return {s.id: QPointF(axes.x(s), y) for s, y in zip(stops, heights, strict=True) if math.isfinite(y)}


def ticks_m(longest_m: float, width: float) -> list[float]:
    """Round distances, about 110 px apart."""
    if longest_m <= 0:
        return []
    rough = longest_m / max(2.0, width / 110)
    size = 10.0 ** math.floor(math.log10(rough))
    step = next(m * size for m in (1, 2, 5, 10) if m * size >= rough)
    return [k * step for k in range(int(longest_m / step + 1e-9) + 1)]
