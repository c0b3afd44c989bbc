"""Sweeps repeated until every operating point has settled, or is known not to."""

from dataclasses import dataclass

import numpy as np

from solver.anderson import Anderson
from solver.forest import Forest
from solver.network import Complex, Index, Real
from solver.placed import Placed
from solver.status import Status
from solver.sweep import sweep

CLOSE = 1e-12  # largest change of any voltage in one sweep, relative to the no-load voltage there
PLAIN = 12  # sweeps before acceleration
MOST = 150  # sweeps in all
BLOCK = 1 << 15  # complex values in one array that stay in cache


@dataclass(frozen=True, slots=True)
class Settled:
    """Where the operating points came to rest.

    voltage : (live, k, batch) complex [V], nan where there is no answer
    status : (batch,) each a Status
    iterations : (batch,) int, sweeps
    """

    voltage: Complex
    status: tuple[Status, ...]
    iterations: Index


def settle(placed: Placed, forest: Forest, start: Complex) -> Settled:
    """Repeats the sweep until nothing moves, block by block of operating points.

    placed : Placed
    forest : Forest
    start : (live, k, batch) complex [V] first guess
    Returns : Settled
    """
    live, k, width = start.shape
    block = max(1, BLOCK // max(1, live * k))
    if width <= block:
        return _Run(placed, forest, start).settled()
    parts = []
    for first in range(0, width, block):
        points = np.arange(first, min(first + block, width))
        parts.append(_Run(placed.take(points), forest, start[..., points]).settled())
    return Settled(
        np.concatenate([p.voltage for p in parts], axis=-1),
        sum((p.status for p in parts), ()),
        np.concatenate([p.iterations for p in parts]),
    )


class _Run:
    """One block on its way; `points` are the operating points that still move."""

    def __init__(self, placed: Placed, forest: Forest, start: Complex) -> None:
        width = start.shape[-1]
        self.placed, self.forest, self.voltage = placed, forest, start
        self.points = np.arange(width)
        self.answer = np.full_like(start, complex(np.nan, np.nan))
        self.status = np.full(width, Status.NOT_SETTLED, dtype=object)
        self.iterations = np.zeros(width, dtype=np.intp)
        self.anderson: Anderson | None = None
        self.best = np.full(width, np.inf)

    def settled(self) -> Settled:
        with np.errstate(all="ignore"):
            for count in range(1, MOST + 1):
                image = sweep(self.placed, self.forest, self.voltage)
                step = image - self.voltage
                change = self._change(step)
                self.iterations[self.points] = count
                done = change < CLOSE
                lost = ~np.isfinite(change)
                if done.any() or lost.any():
                    self._leave(image, done)
                    stay = ~(done | lost)
                    if not stay.any():
                        break
                    image, step, change = image[..., stay], step[..., stay], change[stay]
                    self._keep(stay)
                self.voltage = image if count < PLAIN else self._accelerated(image, step, change)
        self._judge()
        return Settled(self.answer, tuple(self.status), self.iterations)

    def _change(self, step: Complex) -> Real:
        """(batch,) largest change relative to the level of its zone."""
        live, k, width = step.shape
        size = np.abs(step)
        if self.forest.zone_source.size == 1:
            return size.max(axis=(0, 1)) / self.placed.level[0]
        zones = np.maximum.reduceat(size.max(axis=1), self.forest.zone_start[:-1], axis=0)
        return (zones / self.placed.level).max(axis=0)

    def _leave(self, image: Complex, done: np.ndarray) -> None:
        rows = self.points[done]
        self.answer[..., rows] = image[..., done]
        self.status[rows] = Status.SOLVED

    def _keep(self, stay: np.ndarray) -> None:
        rows = np.flatnonzero(stay)
        self.placed, self.points, self.best = self.placed.take(rows), self.points[rows], self.best[rows]
        if self.anderson is not None:
            self.anderson.keep(rows)

    def _accelerated(self, image: Complex, step: Complex, change: Real) -> Complex:
        if self.anderson is None:
            self.anderson = Anderson(1 / self.placed.level[self.forest.zone][:, None, :])
        guess = self.anderson.next(image, step)
        wild = (change > 4 * self.best) | ~np.isfinite(guess).all(axis=(0, 1))
        wild |= (np.abs(guess) * self.anderson.weight).min(axis=(0, 1)) < 0.02
        self.best = np.minimum(self.best, change)
        if wild.any():
            self.anderson.restart(wild)
            guess[..., wild] = image[..., wild]
        return guess

    def _judge(self) -> None:
        """What has not settled by now has no operating point, if its loads hold their power or current."""
        if self.placed.power is not None or self.placed.current is not None:
            lost = self.status == Status.NOT_SETTLED
            self.status[lost] = Status.NO_OPERATING_POINT
