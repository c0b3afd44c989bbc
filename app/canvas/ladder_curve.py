"""Painting what the taps would do: the loss against notch, the best one, the notches that hold."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

import numpy as np
from msgspec import Struct
from numpy.typing import NDArray
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen, QPolygonF

from app.canvas.ladder_scale import Scale
from app.canvas.palette import Palette
from app.model.drawing import Case
from app.study.words import among

if TYPE_CHECKING:
    from app.study import TapCurve

WIDTH = 24.0
MOST_DOTS = 9


class Prospect(Struct, frozen=True):
    """What each notch would yield in the case shown, by notch."""

    notches: NDArray[np.intp]
    loss_kw: NDArray[np.float64]  # nan where the layout does not solve
    holds: NDArray[np.bool_]

    def loss(self, notch: int) -> float | None:
        """Total loss at a notch, or None where there is none."""
        at = np.flatnonzero(self.notches == notch)
        return float(self.loss_kw[at[0]]) if at.size and np.isfinite(self.loss_kw[at[0]]) else None

    def holding(self, notch: int) -> bool:
        """True where every voltage limit holds at a notch."""
        at = np.flatnonzero(self.notches == notch)
        return bool(at.size and self.holds[at[0]])

    @property
    def best(self) -> int | None:
        """The notch of least loss among those that hold, or among all where none does."""
        fit = np.isfinite(self.loss_kw)
        fit = fit & self.holds if bool(np.any(fit & self.holds)) else fit
        if not fit.any():
            return None
        return int(self.notches[np.argmin(np.where(fit, self.loss_kw, np.inf))])

    def runs(self) -> Iterator[tuple[int, int]]:
        """Stretches of neighbouring notches that hold, lowest and highest of each."""
        held = [int(n) for n in self.notches[self.holds]]
        while held:
            last = next((k for k, n in enumerate(held) if n != held[0] + k), len(held)) - 1
            yield held[0], held[last]
            held = held[last + 1 :]


def left_out_words(curve: TapCurve | None, cases: Sequence[Case]) -> str:
    """Which cases the bands pass over, as no notch solves them."""
    names = [cases[c].name for c in (curve.left_out if curve is not None else ()) if c < len(cases)]
    return f"; notches are judged without {among(names)}, which none of them solves" if names else ""


def paint_safe(painter: QPainter, scale: Scale, prospect: Prospect, rail: QPointF, palette: Palette) -> None:
    """A band along the rail where every voltage limit holds."""
    wash = QColor(palette.good)
    wash.setAlpha(90)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(wash)
    half = min(scale.pitch / 2, 5.0)
    for low, high in prospect.runs():
        top, foot = rail.y() + scale.y(high) - half, rail.y() + scale.y(low) + half
        painter.drawRoundedRect(QRectF(rail.x() - 4, top, 8, foot - top), 3, 3)


def paint_losses(
    painter: QPainter, scale: Scale, prospect: Prospect, left: QPointF, palette: Palette
) -> None:
    """Total loss to the right, notch upward, beside the rail; a diamond marks the best notch."""
    found = [(n, prospect.loss(int(n))) for n in prospect.notches]
    known = [(int(n), kw) for n, kw in found if kw is not None]
    if len(known) < 2:
        return
    least, most = min(kw for _, kw in known), max(kw for _, kw in known)
    span = max(most - least, 1e-9 * max(most, 1.0))
    spots = {n: QPointF(left.x() + WIDTH * (kw - least) / span, left.y() + scale.y(n)) for n, kw in known}
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.setPen(QPen(palette.copper, 1.5))
    painter.drawPolyline(QPolygonF(list(spots.values())))
    if len(spots) <= MOST_DOTS:
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(palette.copper)
        for spot in spots.values():
            painter.drawEllipse(spot, 1.8, 1.8)
    if prospect.best is not None:
        _paint_diamond(painter, spots[prospect.best], prospect.holding(prospect.best), palette)


def _paint_diamond(painter: QPainter, at: QPointF, full: bool, palette: Palette) -> None:
    size = 4.5
    corners = (QPointF(0, -size), QPointF(size, 0), QPointF(0, size), QPointF(-size, 0))
    painter.setPen(QPen(palette.copper, 1.5))
    painter.setBrush(palette.copper if full else palette.paper)
    painter.drawPolygon(QPolygonF([at + c for c in corners]))
