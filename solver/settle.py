"""Sweeps repeated until every operating point has settled, or is known not to."""

from dataclasses import dataclass

import numpy as np

from solver.anderson import Anderson
from solver.forest import Forest
from solver.network import Complex, Flag, Index, Real
from solver.newton import follow
from solver.placed import Placed
from solver.status import Status
from solver.sweep import Sweep
from solver.ties import Ties

CLOSE = 1e-12  # largest change of any voltage in one sweep, relative to the no-load voltage there
PLAIN = 8  # sweeps before acceleration
MOST = 30  # sweeps in all
WILD = 50.0  # growth of the change that makes the acceleration start afresh
FAR = 0.5  # |c|² from which a geometric series is not worth following
TELLING = 128  # places whose steps stand for all
LOW = 0.02  # share of the no-load voltage that no guess may fall below
NAN = complex(np.nan, np.nan)
TINY = np.finfo(float).tiny
BLOCK = 1 << 15  # complex values in one array that stay in cache


@dataclass(frozen=True, slots=True)
class Settled:
    """Where the operating points came to rest.

    voltage : (live, k, batch) complex [V], nan where there is no answer
    status : (batch,) each a Status
    iterations : (batch,) int, sweeps
    tied : (tie current, batch) complex [A]; None where nothing is tied
    """

    voltage: Complex
    status: tuple[Status, ...]
    iterations: Index
    tied: Complex | None


def settle(placed: Placed, forest: Forest, start: Complex) -> Settled:
    """Repeats the sweep until nothing moves, block by block of operating points.

    Plain sweeps first, then Anderson acceleration, and what has not settled after 30 by Newton's method.

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
        parts.append(_Run(placed.take(points), forest, start.take(points, axis=-1)).settled())
    return Settled(
        np.concatenate([p.voltage for p in parts], axis=-1),
        sum((p.status for p in parts), ()),
        np.concatenate([p.iterations for p in parts]),
        None if placed.joints is None else np.concatenate([p.tied for p in parts], axis=-1),
    )


class _Run:
    """One block on its way; `points` are the operating points that still move."""

    def __init__(self, placed: Placed, forest: Forest, start: Complex) -> None:
        width = start.shape[-1]
        self.placed, self.forest, self.whole, self.start = placed, forest, placed, start
        self.points = np.arange(width)
        self.answer = np.full_like(start, NAN)
        self.status = np.full(width, Status.NOT_SETTLED, dtype=object)
        self.iterations = np.full(width, MOST)
        self.anderson: Anderson | None = None
        self.ties = None if placed.joints is None and placed.loose is None else Ties(placed, forest)
        self.tied = None if self.ties is None else np.full((len(self.ties.joints.z), width), NAN)
        self.current = self.tied
        self.before: Complex | None = None  # the step before, at every other sweep
        self.best = np.full(width, np.inf)
        self._memory(start.copy())

    def _memory(self, voltage: Complex) -> None:
        """Takes the memory for as many operating points as still move."""
        self.voltage, (_, k, width) = voltage, voltage.shape
        self.image, self.step, self.other, self.spare = (np.empty_like(voltage) for _ in range(4))
        self.sweep = Sweep(self.placed, self.forest, width)
        self.size = np.empty((self.sweep.parts[0].stop, k, 2 * width))
        level = self.placed.level
        self.weight = None if level.shape[0] == 1 else 1 / level[self.forest.zone][:, None, :]

    def settled(self) -> Settled:
        """Sweeps until all has settled or the sweeps are used up."""
        with np.errstate(all="ignore"):
            for count in range(1, MOST + 1):
                self.sweep(self.voltage, self.image)
                if self.ties is not None:
                    self.current = self.ties.correct(self.image, self.voltage, self.sweep.flow)
                change = self._change()
                if not _all_move(change):
                    stay = (change >= CLOSE) & np.isfinite(change)
                    self._leave(change < CLOSE, ~stay, count)
                    if not stay.any():
                        break
                    change = change[stay]
                    self._keep(np.flatnonzero(stay))
                if count < PLAIN:
                    self._extrapolate()
                    self.voltage, self.image = self.image, self.voltage
                else:
                    self.voltage = self._accelerated(change)
        if self.points.size and (self.status == Status.NOT_SETTLED).any():
            self._follow()
        return Settled(self.answer, tuple(self.status), self.iterations, self.tied)

    def _change(self) -> Real:
        """(batch,) largest change of a real or imaginary part relative to the level of its zone."""
        tops = [self._largest(part) for part in self.sweep.parts]
        top = tops[0] if len(tops) == 1 else np.max(tops, axis=0)
        return np.asarray(top if self.weight is not None else top / self.placed.level[0])

    def _largest(self, part: slice) -> Real:
        """(batch,) the same in a run of places, by the level where there is more than one."""
        step = np.subtract(self.image[part], self.voltage[part], self.step[part])
        size = self.size[: step.shape[0]]
        np.abs(step.view(np.float64), size)
        if self.weight is not None:
            np.multiply(
                size.reshape(*step.shape, 2), self.weight[part, ..., None], size.reshape(*step.shape, 2)
            )
        if self.points.size == 1:
            return np.array([size.item(size.argmax())])
        return np.asarray(size.max(axis=(0, 1)).reshape(-1, 2).max(axis=1))

    def _leave(self, done: Flag, gone: Flag, count: int) -> None:
        rows = self.points[done]
        if rows.size == self.answer.shape[-1]:
            self.answer[...] = self.image
        else:
            self.answer[..., rows] = self.image[..., done]
        self.status[rows] = Status.SOLVED
        if self.tied is not None and self.current is not None:
            self.tied[:, rows] = self.current[:, done]
        self.iterations[self.points[gone]] = count

    def _keep(self, rows: Index) -> None:
        self.placed, self.points, self.best = self.placed.take(rows), self.points[rows], self.best[rows]
        image, step = self.image.take(rows, axis=-1), self.step.take(rows, axis=-1)
        self._memory(self.voltage.take(rows, axis=-1))
        self.image, self.step = image, step
        self.before = None if self.before is None else self.before.take(rows, axis=-1)
        if self.anderson is not None:
            self.anderson.keep(rows)
        if self.ties is not None:
            self.ties.keep(rows, self.placed)

    def _extrapolate(self) -> None:
        """Goes to the end of the geometric series that two sweeps in a row begin, each conductor to its own.

        Currents follow the conjugate of the voltage, so each step is c times the conjugate of the one
        before: d2 = c conj(d1), and all steps to come add up to (c conj(d2) + |c|² d2) / (1 - |c|²).
        """
        step, before = self.step, self.before
        if before is None:
            self.before, self.step = step, self.other
            return
        self.before, self.other = None, before
        spare = np.conj(before, self.spare)
        c = self._ratio(before, step, spare)
        size = c.real**2 + c.imag**2
        near = (size < FAR) / np.maximum(1 - size, 1 - FAR)
        np.conj(step, spare)
        spare *= c * near
        self.image += spare
        step *= size * near
        self.image += step

    def _ratio(self, before: Complex, step: Complex, turned: Complex) -> Complex:
        """(k, batch) c that fits step = c turned best, turned being conj(before); some of the places tell."""
        some = slice(None, None, 1 + before.shape[0] // TELLING)
        weighted, turned = before[some], turned[some]
        if self.weight is not None:
            weighted = weighted * self.weight[some] ** 2
        c = np.einsum("nkb,nkb->kb", weighted, step[some])
        c /= np.einsum("nkb,nkb->kb", weighted, turned).real + TINY  # what stands still has 0
        return c

    def _accelerated(self, change: Real) -> Complex:
        if self.anderson is None:
            self.anderson = Anderson(1 / self.placed.level[self.forest.zone][:, None, :])
        image = self.image.copy()
        guess = self.anderson.next(image, self.step)
        wild = (change > WILD * self.best) | ~np.isfinite(guess).all(axis=(0, 1))
        if self.placed.asks:
            wild |= self._lowest(guess) < LOW
        self.best = np.minimum(self.best, change)
        if wild.any():
            self.anderson.restart(np.flatnonzero(wild))
            guess[..., wild] = image[..., wild]
        return guess

    def _lowest(self, guess: Complex) -> Real:
        """(batch,) lowest voltage at any place, or across any load, over the no-load voltage there."""
        hung, level = self.placed.hung, self.placed.level[self.forest.zone]
        if hung is None:
            return np.asarray((np.abs(guess) / level[:, None, :]).min(axis=(0, 1)))
        return np.asarray((np.abs(hung.across(guess)) / level[hung.place]).min(axis=0))

    def _follow(self) -> None:
        """Where sweeps stall, Newton's method finds the answer, or how much of the load has one."""
        left = np.flatnonzero(self.status == Status.NOT_SETTLED)
        found = follow(self.whole.take(left), self.forest, self.start.take(left, axis=-1))
        solved, part = found.share == 1, found.share < 1
        self.answer[..., left[solved]] = found.voltage[..., solved]
        self.status[left[solved]], self.status[left[part]] = Status.SOLVED, Status.NO_OPERATING_POINT
        if self.tied is not None and found.tied is not None:
            self.tied[:, left[solved]] = found.tied[:, solved]


def _all_move(change: Real) -> bool:
    """Whether every operating point still moves, and none without bounds."""
    if change.size == 1:
        return CLOSE <= change.item() < np.inf
    return bool(change.min() >= CLOSE and change.max() < np.inf)
