"""How an element stands, and how that looks: colour, dash, shape and breadth, readable without colour."""

from collections.abc import Mapping
from enum import Enum

import numpy as np
from numpy.typing import NDArray
from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QColor, QPainter, QPainterPath, QPen, QPolygonF

from app.canvas.palette import Palette
from app.study.outcome import Outcome, Verdict


class Standing(Enum):
    """In order of alarm."""

    PLAIN = 0  # no figures yet
    GOOD = 1
    DEAD = 2
    NEAR = 3
    FAILED = 4


_STANDING = {
    Verdict.HOLDS: Standing.GOOD,
    Verdict.ADVICE: Standing.NEAR,
    Verdict.NEAR: Standing.NEAR,
    Verdict.FAILS: Standing.FAILED,
    Verdict.BLOCKS: Standing.FAILED,
}
_COLOUR = {
    Standing.PLAIN: "soft",
    Standing.GOOD: "flow",
    Standing.DEAD: "soft",
    Standing.NEAR: "near",
    Standing.FAILED: "failed",
}
STEP = 0.25  # px; a change of breadth below this is not repainted
_DASH = {Standing.NEAR: (18.0, 5.0), Standing.FAILED: (7.0, 4.0), Standing.DEAD: (1.0, 5.0)}


def standings(outcome: Outcome, case: int) -> dict[str, Standing]:
    """How each element stands in one case that a check names; a note says nothing of that. Of a case that is
    not solved only what fails whatever the load, or stands in the way."""
    if not outcome.solved(case):
        own = (f for f in outcome.findings if f.in_case(case) is f.verdict)
        barring = [f for f in own if _STANDING.get(f.verdict) is Standing.FAILED]
        return {id: Standing.FAILED for finding in barring for id in finding.ids}
    worst = outcome.verdicts(case).items()
    return {id: _STANDING[verdict] for id, verdict in worst if verdict in _STANDING}


def of_row(live: bool, id: str, worst: Mapping[str, Standing]) -> Standing:
    """A live element stands as its worst check."""
    return worst.get(id, Standing.GOOD) if live else Standing.DEAD


def unsolved(id: str, worst: Mapping[str, Standing]) -> Standing:
    """Where there is no answer, only what stands in its way is marked."""
    return Standing.FAILED if worst.get(id) is Standing.FAILED else Standing.PLAIN


def colour(standing: Standing, palette: Palette, stale: bool = False) -> QColor:
    """The colour of a line, bar or frame."""
    return palette.soft if stale else QColor(getattr(palette, _COLOUR[standing]))


def breadths(loaded_percent: NDArray[np.float64]) -> NDArray[np.float64]:
    """The breadth of lines, px: grows evenly with loading up to 150 %; thin where no rating is known. In
    steps that the eye can tell."""
    rated = np.where(np.isnan(loaded_percent), 0.0, loaded_percent)
    return STEP * np.round((2.0 + 0.05 * np.clip(rated, 0.0, 150.0)) / STEP)


def pen(standing: Standing, width: float, palette: Palette, stale: bool = False) -> QPen:
    """A line's pen: near the limit in long dashes, failed in short ones, dead in dots."""
    made = QPen(colour(standing, palette, stale), width)
    made.setCapStyle(Qt.PenCapStyle.FlatCap)
    made.setJoinStyle(Qt.PenJoinStyle.RoundJoin)
    dash = _DASH.get(standing)
    if dash:
        made.setDashPattern([d / width for d in dash])
    return made


def mark(painter: QPainter, standing: Standing, at: QPointF, palette: Palette, stale: bool = False) -> None:
    """The sign of a state, 12 px across: a triangle near the limit, a crossed diamond where it fails."""
    if standing not in (Standing.NEAR, Standing.FAILED):
        return
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(colour(standing, palette, stale))
    if standing is Standing.NEAR:
        painter.drawPolygon(QPolygonF([at + QPointF(0, -5.5), at + QPointF(6, 5), at + QPointF(-6, 5)]))
        cut = _strokes(((0, -1.6), (0, 1.2)), ((0, 3.2), (0, 3.4)))
    else:
        painter.drawPolygon(QPolygonF([at + QPointF(x, y) for x, y in ((0, -7), (7, 0), (0, 7), (-7, 0))]))
        cut = _strokes(((-2.2, -2.2), (2.2, 2.2)), ((-2.2, 2.2), (2.2, -2.2)))
    line = QPen(palette.raised, 1.5, Qt.PenStyle.SolidLine, Qt.PenCapStyle.RoundCap)
    painter.strokePath(cut.translated(at), line)


def _strokes(*lines: tuple[tuple[float, float], tuple[float, float]]) -> QPainterPath:
    path = QPainterPath()
    for a, b in lines:
        path.moveTo(*a)
        path.lineTo(*b)
    return path
