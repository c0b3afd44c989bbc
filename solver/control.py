"""What moves by itself: tap changers and regulators, and generators that hold a voltage."""

from collections.abc import Sequence
from dataclasses import dataclass, fields, replace
from enum import Enum
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from solver.arrays import Complex, Flag, Index, Real
from solver.forest import Forest, grow
from solver.holding import Held, Holding, hold
from solver.network import Network
from solver.rounds import Trouble
from solver.share import pick
from solver.solution import Solution
from solver.status import Status
from solver.tapping import retapped
from solver.windings import NEUTRAL

PASSES = 200  # moves of taps before it counts as hunting


class Reverse(Enum):
    """What a regulator does when power flows back through it."""

    FORWARD = "goes on regulating the same side"
    OTHER_SIDE = "regulates the side the power now flows to"
    IDLE = "stays where it is"


class Rest(Enum):
    """How a regulator came to rest."""

    IN_BAND = "in band"
    AT_STOP = "at its end stop"
    IDLE = "idle: power flows back"
    HUNTING = "hunting"
    UNKNOWN = "unknown: there are no volts to measure"


@dataclass(frozen=True, slots=True)
class Regulator:
    """A tap changer or step regulator that holds the volts of one side.

    transformer : row, in the network at its nameplate
    tapped : winding with the taps, 1 or 2
    step : change of the tapped winding's rated volts by a notch, as a share
    lowest : notch of one end stop
    highest : notch of the other
    setting : (batch or 1,) float [V] that it holds, in the volts of the network
    bandwidth : (batch or 1,) float [V] in all; within half of it either way it does not move
    regulated : winding whose side it holds when power flows forward, towards it
    compensation : [ohm] of the line to the place that it holds; see `dialled`
    reverse : what it does when power flows back
    reverse_setting : (batch or 1,) float [V] at the other side, for OTHER_SIDE; the same where None
    start : notch at which it stands before
    conductor : whose volts it measures; None for the mean of its three phases
    to : conductor against which it measures; the neutral where None, earth where there is none
    alone : it moves that conductor and no other, as single-phase regulators side by side do
    """

    transformer: int
    tapped: int
    step: float
    lowest: int
    highest: int
    setting: ArrayLike
    bandwidth: ArrayLike
    regulated: int = 2
    compensation: complex = 0.0
    reverse: Reverse = Reverse.FORWARD
    reverse_setting: ArrayLike | None = None
    start: int = 0
    conductor: int | None = 0
    to: int | None = None
    alone: bool = False


@dataclass(frozen=True, slots=True)
class Controlled:
    """Where the controls came to rest.

    solution : Solution; NOT_SETTLED and without figures where controls hunt
    notch : (regulator, batch) int
    rest : (regulator, batch) each a Rest
    reactive : (generator, batch) float [VA] made
    held : (generator, batch) bool, the generator holds its setting; else it is at a limit, or stands still
    """

    solution: Solution
    notch: Index
    rest: np.ndarray[Any, np.dtype[np.object_]]
    reactive: Real
    held: Flag


def control(
    network: Network, regulators: Sequence[Regulator] = (), generators: Sequence[Holding] = ()
) -> Controlled:
    """Solves a network whose regulators and generators have come to rest.

    Regulators nearest a supply move first, notch by notch, as their delays make them. A position that comes
    back means hunting. A ganged one moves all phases alike; single-phase units are a transformer and a
    Regulator each, and step on their own. Generators are corrected by the reactance that their nodes see of
    the network.

    network : Network
    regulators : each a Regulator
    generators : each a Holding
    Returns : Controlled
    Raises : ValueError where the network has no forest
    Source : common practice, no source
    """
    forest = grow(network)
    if isinstance(forest, Trouble):
        raise ValueError("a layout in trouble has no controls")
    return _Rounds(network, forest, regulators, generators).rested()


def dialled(volts: complex, current: float, ratio: float) -> complex:
    """Compensation in ohm of the line out of the dials of a regulator.

    Z = (R + jX) dialled · turns of the voltage transformer / rated current of the current transformer

    volts : [V] R + jX as dialled, at the secondary
    current : [A] rated primary current of the current transformer
    ratio : turns ratio of the voltage transformer
    Returns : [ohm]
    Source : Kersting, Distribution System Modeling and Analysis, section 7.4 (from memory)
    """
    return volts * ratio / current


class _Rounds:
    """Moves and solves until every operating point rests."""

    def __init__(
        self, network: Network, forest: Forest, regulators: Sequence[Regulator], generators: Sequence[Holding]
    ) -> None:
        settings = [r.setting for r in regulators] + [v for g in generators for v in (g.setting, g.on)]
        self.width = max(network.batch, *(np.size(values) for values in settings), 1)
        self.network, self.forest = network, forest
        self.regulators, self.generators = regulators, generators
        self.notch = np.array([[r.start] * self.width for r in regulators], dtype=np.intp)
        self.notch = self.notch.reshape(len(regulators), self.width)
        self.rest = np.full(self.notch.shape, Rest.IN_BAND, dtype=object)
        depth = np.repeat(np.arange(forest.depth_zone.size - 1), np.diff(forest.depth_zone))
        at = {int(unit): int(d) for unit, d in zip(forest.zone_transformer, depth, strict=True)}
        self.rank = np.array([[at.get(r.transformer, 0)] for r in regulators]).reshape(-1, 1)

    def rested(self) -> Controlled:
        points, warm = np.arange(self.width), None
        visited: list[set[tuple[int, ...]]] = [set() for _ in points]
        for _ in range(PASSES):
            solution = self._solved(points, warm).solution
            move = self._moves(solution, points)
            going = move.any(axis=0)
            for point, moving in zip(points, move.T, strict=True):
                state = tuple(self.notch[:, point].tolist())
                if state in visited[point]:
                    self.rest[moving != 0, point] = Rest.HUNTING
                visited[point].add(state)
            self.notch[:, points] += move
            going &= (self.rest[:, points] != Rest.HUNTING).all(axis=0)
            points, warm = points[going], solution.voltage[..., going]
            if not points.size:
                break
        self.rest[:, points] = Rest.HUNTING
        held = self._solved(np.arange(self.width), None)
        hunting = (self.rest == Rest.HUNTING).any(axis=0)
        return Controlled(_without(held.solution, hunting), self.notch, self.rest, held.reactive, held.holds)

    def _solved(self, points: Index, warm: Complex | None) -> Held:
        factor = 1 + self.notch[:, points] * np.array([[r.step] for r in self.regulators]).reshape(-1, 1)
        rows, windings = [r.transformer for r in self.regulators], [r.tapped for r in self.regulators]
        network = pick(self.network, points) if self.network.batch > 1 else self.network
        if self.regulators:
            alone = [r.conductor if r.alone else None for r in self.regulators]
            network = retapped(network, rows, windings, factor, alone)
        generators = [
            replace(g, setting=_at(g.setting, points), on=_at(g.on, points) > 0) for g in self.generators
        ]
        return hold(network, self.forest, generators, warm)

    def _moves(self, solution: Solution, points: Index) -> Index:
        """(regulator, point) notches by which those nearest the supply move."""
        move = np.zeros((len(self.regulators), points.size), dtype=np.intp)
        for row, regulator in enumerate(self.regulators):
            move[row] = self._wanted(regulator, row, solution, points)
        first = np.where(move != 0, self.rank, np.iinfo(np.intp).max).min(
            axis=0, initial=np.iinfo(np.intp).max
        )
        move[self.rank > first] = 0
        return move

    def _wanted(self, regulator: Regulator, row: int, solution: Solution, points: Index) -> Index:
        forward, back = (_at_side(regulator, side, solution) for side in (True, False))
        reversed_ = forward.power < 0
        other = reversed_ & (regulator.reverse is Reverse.OTHER_SIDE)
        size = np.where(other, back.size, forward.size)
        second = regulator.setting if regulator.reverse_setting is None else regulator.reverse_setting
        setting = np.where(other, _at(second, points), _at(regulator.setting, points))
        off, half = size - setting, _at(regulator.bandwidth, points) / 2
        same = np.where(other, 3 - regulator.regulated, regulator.regulated) == regulator.tapped
        idle = reversed_ & (regulator.reverse is Reverse.IDLE)
        out = (np.abs(off) > half * (1 + 1e-9) + 1e-9 * setting) & np.isfinite(size) & ~idle
        with np.errstate(invalid="ignore"):
            steps = np.maximum(1, np.floor((np.abs(off) - half) / (setting * abs(regulator.step))))
        sign = -np.sign(off) * np.where(same, 1, -1) * np.sign(regulator.step)
        now = self.notch[row, points]
        wanted = np.clip(now + np.where(out, steps * sign, 0), regulator.lowest, regulator.highest) - now
        stopped = out & (wanted == 0)
        rest = np.full(points.size, Rest.IN_BAND, dtype=object)
        rest[stopped], rest[idle], rest[~np.isfinite(size)] = Rest.AT_STOP, Rest.IDLE, Rest.UNKNOWN
        self.rest[row, points] = rest
        return np.asarray(wanted.astype(np.intp))


@dataclass(frozen=True, slots=True)
class _Side:
    size: Real  # (point,) volts that the regulator takes itself to see
    power: Real  # (point,) active power that leaves this winding


def _at_side(regulator: Regulator, own: bool, solution: Solution) -> _Side:
    network, row = solution.network, regulator.transformer
    winding = regulator.regulated if own else 3 - regulator.regulated
    node = (network.transformer_from if winding == 1 else network.transformer_to)[row]
    current = -solution.transformer_in[row] if winding == 1 else solution.transformer_out[row]
    volts = solution.voltage[node]
    far = volts[-1 if regulator.to is None else regulator.to] if network.wires is not None else 0 * volts[0]
    measured = slice(0, 3) if regulator.conductor is None else [regulator.conductor]
    across = volts[measured] - np.where(np.isnan(far), 0, far)
    between = regulator.to is not None and regulator.to != NEUTRAL
    through = current[measured] - (current[regulator.to] if between else 0)
    size = np.abs(across - regulator.compensation * through).mean(axis=0)
    given = across * np.conj(through) if regulator.alone else volts * np.conj(current)
    return _Side(size, np.nansum(given.real, axis=0))


def _at(values: ArrayLike, points: Index) -> Real:
    found = np.asarray(values, dtype=float).reshape(-1)
    return np.asarray(found[points] if found.size > 1 else np.repeat(found, points.size))


def _without(solution: Solution, hunting: Flag) -> Solution:
    """The solution without figures where controls hunt."""
    if not hunting.any():
        return solution
    status = tuple(Status.NOT_SETTLED if h else s for s, h in zip(solution.status, hunting, strict=True))
    blank: dict[str, Any] = {"status": status}
    for field in fields(solution):
        array = getattr(solution, field.name)
        if isinstance(array, np.ndarray) and array.dtype.kind in "fc":
            blank[field.name] = np.where(hunting, np.nan, array)
    return replace(solution, **blank)
