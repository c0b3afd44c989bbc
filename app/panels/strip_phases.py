"""The curves of single phases on the voltage strip: told apart by dash and by the shape of their marks."""

import math

import numpy as np
from msgspec import Struct
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter, QPen, QPolygonF

from app.canvas.palette import Palette, font
from app.canvas.phase_words import SLOTS, named
from app.model.drawing import Drawing
from app.model.figures import level
from app.model.kinds import Transformer
from app.panels.strip_axes import Axes, Stretch, stretch
from app.panels.strip_routes import Routes, Stop
from app.panels.words import LEFT
from app.study.outcome import Outcome

DASHES: dict[str, list[float]] = {"A": [], "B": [5.0, 2.2], "C": [1.2, 1.6]}
COLOURS = {"A": "flow", "B": "good", "C": "ink"}
LETTER_PX = 12.0  # a letter at a curve's end needs this height


class PhaseCurve(Struct, frozen=True):
    """One phase in the case shown."""

    letter: str
    stretches: list[Stretch]
    nodes: dict[str, QPointF]


def phase_curves(
    drawing: Drawing, outcome: Outcome, case: int, routes: Routes, axes: Axes, lowest: dict[str, QPointF]
) -> list[PhaseCurve]:
    """A curve for each phase that reaches a node; none where all phases are alike."""
    if outcome.wires is None:
        return []
    spots = {letter: _spots(outcome, case, routes, axes, letter) for letter in SLOTS}
    return [
        PhaseCurve(letter, _joined(drawing, outcome, routes, letter, spots, lowest), nodes)
        for letter, nodes in spots.items()
        if nodes
    ]


def _spots(outcome: Outcome, case: int, routes: Routes, axes: Axes, letter: str) -> dict[str, QPointF]:
    assert outcome.wires is not None
    table = outcome.wires.nodes
    stops = [stop for stop in routes.stops.values() if stop.id in table]
    rows = [table.rows[stop.id] for stop in stops]
    level_v = table.column(f"{letter.lower()}_v")[rows, case]
    base = np.broadcast_to(table.column("base_v")[rows].reshape(len(rows), -1)[:, :1], (len(rows), 1))[:, 0]
    heights = axes.y(100 * level_v / base).tolist()
    return {s.id: QPointF(axes.x(s), y) for s, y in zip(stops, heights, strict=True) if math.isfinite(y)}


def _joined(
    drawing: Drawing,
    outcome: Outcome,
    routes: Routes,
    letter: str,
    spots: dict[str, dict[str, QPointF]],
    lowest: dict[str, QPointF],
) -> list[Stretch]:
    """The phase along every branch that leads it; across a transformer from the phase that feeds it."""
    own, made = spots[letter], []
    for stop in routes.stops.values():
        if stop.id not in own or not stop.parent:
            continue
        before = spots[_fed_by(drawing, outcome, stop, letter)].get(stop.parent, lowest.get(stop.parent))
        if before is not None:
            made.append(stretch(drawing, stop, before, own[stop.id]))
    return made


def _fed_by(drawing: Drawing, outcome: Outcome, stop: Stop, letter: str) -> str:
    """The phase before a branch that goes on as this one behind it."""
    unit = drawing.elements.get(stop.feeder)
    if not isinstance(unit, Transformer):
        return letter
    assert outcome.wires is not None
    systems = {outcome.wires.nodes.at(node).system for node in (stop.parent, stop.id)}
    if len(systems) == 1:
        return letter
    return "A" if unit.phases == "all" else unit.phases[0]


def base_of(outcome: Outcome, routes: Routes) -> float:
    """The volts that percent count from at the far end of the main route; nan where phases are alike."""
    far = routes.main[-1] if routes.main else ""
    if outcome.wires is None or far not in outcome.wires.nodes:
        return math.nan
    return float(outcome.wires.nodes.at(far).base_v)


def system_of(outcome: Outcome, routes: Routes) -> str:
    """The wires at the far end of the main route."""
    assert outcome.wires is not None
    return str(outcome.wires.nodes.at(routes.main[-1]).system)


def paint_phases(
    painter: QPainter, curves: list[PhaseCurve], main: set[str], lit: set[str], palette: Palette, stale: bool
) -> None:
    """Each phase along the main route, the other branches faint; what is chosen or under the hand broad."""
    for strong in (False, True):
        for curve in curves:
            ink = QColor(palette.soft if stale else getattr(palette, COLOURS[curve.letter]))
            if not strong:
                ink.setAlphaF(0.4)
            plain = _pen(curve.letter, ink, 2.0 if strong else 1.2)
            broad = _pen(curve.letter, ink, 3.6) if strong else plain
            for run in curve.stretches:
                if (run.node in main) is strong:
                    painter.setPen(broad if run.branch in lit else plain)
                    painter.drawPolyline(list(run.points))
    for curve in curves:
        ink = QColor(palette.soft if stale else getattr(palette, COLOURS[curve.letter]))
        led = {s.node for s in curve.stretches if s.node in main}  # not where it only starts to one side
        for id, at in curve.nodes.items():
            if id in main and led or id in lit:
                _mark(painter, curve.letter, at, ink, palette.field if id not in lit else ink)


def _pen(letter: str, ink: QColor, width: float) -> QPen:
    pen = QPen(ink, width, Qt.PenStyle.SolidLine, Qt.PenCapStyle.FlatCap, Qt.PenJoinStyle.RoundJoin)
    if DASHES[letter]:
        pen.setDashPattern([max(d * 2.0 / width, 0.5) for d in DASHES[letter]])
    return pen


def _mark(painter: QPainter, letter: str, at: QPointF, ink: QColor, fill: QColor) -> None:
    """A circle for A, a square for B, a triangle for C."""
    painter.setPen(QPen(ink, 1.4))
    painter.setBrush(fill)
    if letter == "A":
        painter.drawEllipse(at, 2.8, 2.8)
    elif letter == "B":
        painter.drawRect(QRectF(at.x() - 2.6, at.y() - 2.6, 5.2, 5.2))
    else:
        corners = (QPointF(0, -3.6), QPointF(3.4, 2.6), QPointF(-3.4, 2.6))
        painter.drawPolygon(QPolygonF([at + corner for corner in corners]))
    painter.setBrush(Qt.BrushStyle.NoBrush)


def name_phases(
    painter: QPainter, curves: list[PhaseCurve], main: tuple[str, ...], system: str, palette: Palette
) -> list[QRectF]:
    """A letter where each phase ends on the main route, over or under its neighbours; the boxes they take."""
    painter.setFont(font(8, bold=True))
    metrics, ends = QFontMetricsF(painter.font()), []
    for curve in curves:
        on = [id for id in main if id in curve.nodes]
        if len(on) > 1:
            ends.append((curve.nodes[on[-1]], curve.letter))
    boxes: list[QRectF] = []
    for at, letter in sorted(ends, key=lambda e: (e[0].y(), e[1])):
        text = named(letter, system)
        box = QRectF(at.x() + 6, at.y() - LETTER_PX / 2, metrics.horizontalAdvance(text) + 2, LETTER_PX)
        while any(box.intersects(other) for other in boxes):
            box.translate(0, 2)
        boxes.append(box)
        painter.setPen(QColor(getattr(palette, COLOURS[letter])))
        painter.drawText(box, int(LEFT), text)
    return boxes


def base_words(volts: float) -> str:
    """Volts that a limit comes to on a base: 126 V, 109.9 V, 7.56 kV."""
    return level(float(f"{volts:.4g}"))
