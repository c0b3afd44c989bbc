"""Where sweeps stall: Newton's method from the loads that hold their impedance alone up to all of them."""

from dataclasses import dataclass, replace

import numpy as np

from solver.arrays import Complex, Index, Real
from solver.forest import Forest
from solver.krylov import solve_by_products
from solver.placed import Placed
from solver.sweep import Sweep
from solver.ties import Ties

CLOSE = 1e-12  # largest change of any voltage in one sweep, relative to the no-load voltage there
NEAR = 1e-5  # the same on the way to the whole load
ROUNDING = 1e-10  # where no step brings it down any more
MOST = 250  # steps in all
STEPS = 12  # at one share of the load
DIRECTIONS = 40
FORCING = 1e-3  # how far a step closes the gap, to first order
NUDGE = 1.5e-8  # of the volts, by which the slope is felt
LEAST = 5e-5  # share of the load below which there is no way on
HOPELESS = 0.05  # the same of what lacks to the whole load
FALLING = 0.6  # to which each step must bring the gap down
DEEP = 0.3  # of the volts across a load, below which one step must not lead


@dataclass(frozen=True, slots=True)
class Followed:
    """Where the way ended.

    voltage : (live, k, batch) complex [V]
    tied : (tie current, batch) complex [A]; None where nothing is tied
    share : (batch,) float, of constant power and current, from which there is no way on; 1 is all, nan
        where nothing is known
    """

    voltage: Complex
    tied: Complex | None
    share: Real


def follow(placed: Placed, forest: Forest, start: Complex) -> Followed:
    """Raises the share of constant power and constant current from none to all of it.

    A sweep turns volts V into G(V). Each step solves (1 - G') s = G(V) - V by products with G' alone, which
    two sweeps give. At first impedances alone draw, which always have an answer, then all of the load; where
    that fails, a quarter of the way and so on. So the volts come down the upper branch and never step over
    its end: where the share cannot rise any more, there is no operating point beyond.

    placed : Placed
    forest : Forest
    start : (live, k, batch) complex [V] no-load volts
    Returns : Followed
    Source : Kelley, Solving Nonlinear Equations with Newton's Method, SIAM 2003, ch. 3; the way along the
        load: Ajjarapu, Christy, The continuation power flow, IEEE Trans. Power Systems 7 (1992) 416-423
    """
    way = _Way(placed, forest, start)
    with np.errstate(all="ignore"):
        for _ in range(MOST):
            way.judge()
            if not way.points.size:
                break
            way.step()
    way.reached[way.points] = np.nan  # still on the way: nothing is known
    return Followed(way.answer, way.tied, way.reached)


class _Way:
    """Operating points on their way; `points` are those that are not there yet."""

    def __init__(self, placed: Placed, forest: Forest, start: Complex) -> None:
        width = start.shape[-1]
        self.forest = forest
        self.points = np.arange(width)
        self.answer, self.reached = start.copy(), np.full(width, np.nan)
        self.ties = None if placed.joints is None and placed.loose is None else Ties(placed, forest)
        self.tied = None if self.ties is None else np.zeros((len(self.ties.joints.z), width), complex)
        self.voltage, self.firm = start.copy(), start.copy()
        self.steady = not placed.asks
        self.done, self.stride = np.full(width, np.nan), np.ones(width)
        self.aim = np.full(width, 1.0 if self.steady else 0.0)
        self.tries, self.before = np.zeros(width, int), np.full(width, np.inf)
        self._take(placed)

    def _take(self, placed: Placed) -> None:
        self.placed = placed
        self.level = placed.level[self.forest.zone][:, None, :]
        self.sweep = Sweep(placed, self.forest, self.points.size)
        self.image = np.empty_like(self.voltage)

    def _mapped(self, voltage: Complex, out: Complex) -> Complex | None:
        """G at the aimed share; the tie currents with it."""
        self.sweep(voltage, out)
        return None if self.ties is None else self.ties.correct(out, voltage, self.sweep.flow)

    def _aimed(self) -> None:
        """Scales what holds its power or its current to the share that is aimed at."""
        placed, hung = self.placed, self.placed.hung
        if hung is not None:
            current = None if hung.current is None else hung.current * self.aim
            hung = replace(hung, power=hung.power * self.aim, current=current)
        current = None if placed.current is None else placed.current * self.aim
        self.sweep.placed = replace(placed, power=placed.power * self.aim, current=current, hung=hung)
        if self.ties is not None:
            self.ties.placed = self.sweep.placed

    def judge(self) -> None:
        """Takes what has settled, goes on or back, and drops those that are done."""
        self._aimed()
        current = self._mapped(self.voltage, self.image)
        self.gap = (self.image - self.voltage) / self.level
        change = np.abs(self.gap.view(np.float64)).max(axis=(0, 1)).reshape(-1, 2).max(axis=1)
        whole = self.aim == 1
        good = change < np.where(whole, CLOSE, NEAR)
        stuck = ~((change < FALLING * self.before) & (self.tries < STEPS))
        good |= stuck & (change < ROUNDING)
        bad = stuck & ~good
        rows = self.points[good]
        self.answer[..., rows], self.reached[rows] = self.voltage[..., good], self.aim[good]
        if self.tied is not None and current is not None:
            self.tied[:, rows] = current[:, good]
        self.firm[..., good], self.done[good] = self.voltage[..., good], self.aim[good]
        self.stride[good] *= np.where(self.tries[good] > 5, 1, 2)
        self.voltage[..., bad] = self.firm[..., bad]
        self.stride[bad] /= 4
        moved = good | bad
        self.aim[moved] = np.minimum(1, self.done + self.stride)[moved]
        self.stride[moved] = (self.aim - self.done)[moved]
        self.tries[moved], self.before[moved] = -1, np.inf
        self.before[~moved] = change[~moved]
        self.tries += 1
        least = np.maximum(LEAST, HOPELESS * (1 - self.done))
        stay = ~(good & whole) & ~(bad & ~(self.stride >= least))
        self.fresh = moved
        if not stay.all():
            self._keep(np.flatnonzero(stay))

    def _keep(self, rows: Index) -> None:
        for name in ("points", "done", "aim", "stride", "tries", "before", "fresh"):
            setattr(self, name, getattr(self, name)[rows])
        if not rows.size:
            return
        image, placed = self.image.take(rows, axis=-1), self.placed.take(rows)
        self.voltage, self.firm, self.gap = (
            a.take(rows, axis=-1) for a in (self.voltage, self.firm, self.gap)
        )
        if self.ties is not None:
            self.ties.keep(rows, placed)
        self._take(placed)
        self.image = image

    def step(self) -> None:
        """One step of Newton's method for every point, none where the aim has just moved."""
        self._aimed()
        if self.fresh.any():
            self._mapped(self.voltage, self.image)
            self.gap = (self.image - self.voltage) / self.level
        base, size = self.image.copy(), NUDGE * np.sqrt(self.voltage.size / self.points.size)
        moved = np.empty_like(base)

        def product(direction: Real) -> Real:
            along = self._unflat(direction)
            self._mapped(self.voltage + size * along * self.level, moved)
            return direction - self._flat((moved - base) / self.level) / size

        found = self._unflat(solve_by_products(product, self._flat(self.gap), DIRECTIONS, FORCING))
        guess = self.voltage + found * self.level
        deep = (self.aim > 0) & (not self.steady) & ~(self._lowest(guess) > DEEP)
        self.before[deep] = 0  # turned back at the next judgement
        self.voltage = np.where(deep, self.voltage, guess)

    def _lowest(self, guess: Complex) -> Real:
        """(batch,) lowest volts after a step over those before, across any load."""
        hung = self.placed.hung
        if self.placed.gain is None:
            return np.asarray((np.abs(guess) / np.abs(self.voltage)).min(axis=(0, 1)))
        if hung is None:
            return np.ones(self.points.size)
        return np.asarray((np.abs(hung.across(guess)) / np.abs(hung.across(self.voltage))).min(axis=0))

    def _flat(self, values: Complex) -> Real:
        """(batch, unknown) real and imaginary parts of (live, k, batch)."""
        turned = np.ascontiguousarray(np.moveaxis(values, -1, 0))
        return turned.view(np.float64).reshape(values.shape[-1], -1)

    def _unflat(self, values: Real) -> Complex:
        turned = values.view(np.complex128).reshape(len(values), *self.voltage.shape[:-1])
        return np.moveaxis(turned, 0, -1)
