"""A year, or any long series of operating points: solved block by block, kept as energies and extremes."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from solver.arrays import Complex, Flag, Index, Real
from solver.control import Controlled, Regulator, control
from solver.forest import grow
from solver.holding import Holding
from solver.network import Network
from solver.share import pick
from solver.solution import Solution
from solver.solving import solve
from solver.status import Status

VALUES = 1 << 19  # complex values of node volts in one block
Watch = Callable[[Index, Solution, Controlled | None], None]


@dataclass(frozen=True, slots=True)
class Extreme:
    """Lowest or highest of a figure over the series, and where it stands; nan and -1 where it never was.

    value : (row,) float
    point : (row,) int
    """

    value: Real
    point: Index


@dataclass(frozen=True, slots=True)
class Series:
    """What a series of operating points comes to, over those that solved.

    done : points that were reached, less than all where it was stopped
    unsolved : (n,) int, points without an answer
    hours : float [h] of the points that solved
    lowest : Extreme [V] of each node, over its conductors that carry loads, the neutral left out
    highest : Extreme [V] of each node
    line_current : Extreme [A] of each line, its worst conductor and end
    transformer_current : Extreme [A] of each transformer, as it enters winding 1
    line_loss : (line,) float [Wh] series loss
    charging_loss : (line,) float [Wh] in the admittance of each line
    copper_loss : (transformer,) float [Wh]
    iron_loss : (transformer,) float [Wh]
    supplied : (source,) float [Wh]
    drawn : (load,) float [Wh], generators negative
    shunt_loss : (shunt,) float [Wh]
    closure : float, worst of all points
    """

    done: int
    unsolved: Index
    hours: float
    lowest: Extreme
    highest: Extreme
    line_current: Extreme
    transformer_current: Extreme
    line_loss: Real
    charging_loss: Real
    copper_loss: Real
    iron_loss: Real
    supplied: Real
    drawn: Real
    shunt_loss: Real
    closure: float


def solve_series(
    network: Network,
    hours: ArrayLike = 1.0,
    progress: Callable[[int, int], bool] | None = None,
    block: int | None = None,
    *,
    regulators: Sequence[Regulator] = (),
    generators: Sequence[Holding] = (),
    watch: Watch | None = None,
) -> Series:
    """Solves every operating point of a long batch and keeps energies and extremes alone.

    W = Σ P · h

    Where something moves by itself it comes to rest in each point anew, from where it stands before: no
    point hangs on the one before it.

    network : Network, whose batch is the series
    hours : (batch,) or one float [h] that each point lasts
    progress : called after each block with points done and points in all; stops where it says False
    block : points in a block; as many as stay quick where it is None
    regulators : each a Regulator with one setting for all points
    generators : each a Holding with one setting for all points; on (batch or 1,)
    watch : called after each block with its points, its Solution, and where its controls came to rest, or
        None where there are none
    Returns : Series
    Raises : ValueError where there are controls and the network has no forest
    Source : common practice, no source
    """
    width = network.batch
    lasts = np.broadcast_to(np.asarray(hours, dtype=float), width)
    size = block or max(16, VALUES // max(1, network.node_count * network.conductors))
    forest, tally, done = grow(network), _Tally(network), 0
    for start in range(0, width, size):
        points = np.arange(start, min(start + size, width))
        part = network if points.size == width else pick(network, points)
        running = [replace(g, on=np.broadcast_to(g.on, width)[points]) for g in generators]
        rested = control(part, regulators, running) if regulators or generators else None
        solution = solve(part, forest=forest) if rested is None else rested.solution
        tally.add(solution, points, lasts[points])
        if watch is not None:
            watch(points, solution, rested)
        done = start + points.size
        if progress is not None and not progress(done, width):
            break
    return tally.series(done)


class _Tally:
    """Sums and extremes so far."""

    def __init__(self, network: Network) -> None:
        lines, units = network.line_from.size, network.transformer_from.size
        counts = {"lowest": network.node_count, "highest": network.node_count}
        counts |= {"line_current": lines, "transformer_current": units}
        self.value = {name: np.full(count, np.nan) for name, count in counts.items()}
        self.point = {name: np.full(count, -1) for name, count in counts.items()}
        energies = {"line_loss": lines, "charging_loss": lines, "copper_loss": units, "iron_loss": units}
        energies |= {"supplied": network.source_node.size, "drawn": network.load_node.size}
        energies["shunt_loss"] = network.shunt_node.size
        self.energy = {name: np.zeros(count) for name, count in energies.items()}
        self.unsolved: list[Index] = []
        self.hours, self.closure = 0.0, 0.0

    def add(self, solution: Solution, points: Index, lasts: Real) -> None:
        good = np.array([s is Status.SOLVED for s in solution.status])
        self.unsolved.append(points[~good])
        self.hours += float(lasts[good].sum())
        if not good.any():
            return
        self.closure = max(self.closure, float(np.max(solution.closure[good])))
        volts = np.abs(solution.voltage[:, : 3 if solution.network.conductors > 1 else 1])
        self._extreme("lowest", -volts, good, points)
        self._extreme("highest", volts, good, points)
        both = np.maximum(np.abs(solution.line_in), np.abs(solution.line_out))
        self._extreme("line_current", both, good, points)
        self._extreme("transformer_current", np.abs(solution.transformer_in), good, points)
        for name, power in _powers(solution).items():
            self.energy[name] += np.nan_to_num(power.real[:, good]) @ lasts[good]

    def _extreme(self, name: str, size: Real, good: Flag, points: Index) -> None:
        """Takes over what is larger than before; the lowest comes negative."""
        rows = np.where(np.isnan(size), -np.inf, size).max(axis=1, initial=-np.inf)[:, good]
        best = rows.argmax(axis=1)
        value = rows[np.arange(len(rows)), best]
        more = (value > self.value[name]) | (np.isnan(self.value[name]) & np.isfinite(value))
        self.value[name][more] = value[more]
        self.point[name][more] = points[good][best[more]]

    def series(self, done: int) -> Series:
        self.value["lowest"] = -self.value["lowest"]
        found: dict[str, Any] = {name: Extreme(v, self.point[name]) for name, v in self.value.items()}
        unsolved = np.concatenate(self.unsolved) if self.unsolved else np.zeros(0, dtype=np.intp)
        found |= self.energy
        return Series(done=done, unsolved=unsolved, hours=self.hours, closure=self.closure, **found)


def _powers(solution: Solution) -> dict[str, Complex]:
    """(row, batch) VA of everything that is summed up."""
    return {
        "line_loss": solution.line_series_loss,
        "charging_loss": solution.line_charging,
        "copper_loss": solution.transformer_series_loss,
        "iron_loss": solution.transformer_magnetising_loss,
        "supplied": np.nansum(solution.source_power, axis=1),
        "drawn": np.nansum(solution.load_power, axis=1),
        "shunt_loss": np.nansum(solution.shunt_power, axis=1),
    }
