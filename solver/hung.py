"""Loads between two conductors, or conductor and earth: what they draw, and how it moves with the volts."""

from dataclasses import dataclass, replace

import numpy as np

from solver.arrays import Complex, Index, Real
from solver.forest import Forest
from solver.network import Network
from solver.wires import EARTH


@dataclass(frozen=True, slots=True)
class Hung:
    """The parts of loads that hold their power or their current, gathered at their places and pairs.

    Conductors of places are counted through, place · k + conductor.

    place : (element,)
    near : (element,) conductor of its place
    far : (element,) the other one; any where it is earth
    between : (element,) float, 1 between conductors, 0 to earth
    power : (element, batch) complex [VA] conjugate
    current : (element, batch) complex [A] conjugate; None where there is none
    order : (end,) elements at their near, then at their far ends, sorted by conductor; empty where no
        conductor is near to two elements, so that each near end stands alone
    start : (target,) where the ends of each conductor begin in that order; runs of like far ends where it
        is empty
    length : of those runs of like far ends where all are as long, 0 elsewhere
    target : (target,) conductors
    slot : (live · k,) where each conductor finds its current: element, elements + target, or 2 · elements for
        none; empty where some conductor is near to one element and far from another
    """

    place: Index
    near: Index
    far: Index
    between: Real
    power: Complex
    current: Complex | None
    order: Index
    start: Index
    length: int
    target: Index
    slot: Index

    def take(self, points: Index) -> "Hung":
        """The same with some operating points only."""
        wide = {n: a for n in ("power", "current") if (a := getattr(self, n)) is not None and a.shape[-1] > 1}
        return replace(self, **{n: a.take(points, axis=-1) for n, a in wide.items()})

    def across(self, voltage: Complex) -> Complex:
        """(element, ...) volts from conductor to conductor, of (live, k, ...)."""
        flat = voltage.reshape(-1, *voltage.shape[2:])
        other = flat.take(self.far, axis=0)
        if not self.between.all():
            other *= self.between.reshape(-1, *(1,) * (other.ndim - 1))
        return np.subtract(flat.take(self.near, axis=0), other, other)

    def scratch(self, width: int) -> "Scratch":
        """Memory for `draw` at so many operating points."""
        count = self.place.size
        both, ends = (np.zeros((2 * count + rows, width), np.complex128) for rows in (1, 0))
        return Scratch(both, ends, np.empty((count, width)), np.empty((count, width)))

    def draw(self, voltage: Complex, out: Complex, scratch: "Scratch") -> None:
        """What is drawn at these volts, as currents that leave each place.

        voltage : (live, k, batch) complex [V]
        out : (live, k, batch) complex [A], is overwritten
        scratch : Scratch, of this batch
        """
        flat, count = voltage.reshape(-1, voltage.shape[-1]), self.place.size
        u, drawn, size = scratch.both[:count], scratch.both[count:-1], scratch.size
        flat.take(self.near, axis=0, out=u, mode="clip")
        flat.take(self.far, axis=0, out=drawn, mode="clip")
        if not self.between.all():
            drawn *= self.between[:, None]
        np.subtract(u, drawn, u)
        np.multiply(u.real, u.real, size)
        np.multiply(u.imag, u.imag, scratch.spare)
        np.add(size, scratch.spare, size)
        np.maximum(size, np.finfo(float).tiny, out=size)
        np.reciprocal(size, size)
        np.multiply(self.power, size, drawn)
        if self.current is not None:
            np.sqrt(size, size)
            drawn += self.current * size
        np.multiply(drawn, u, u)
        flat = out.reshape(-1, out.shape[-1])
        if self.slot.size:
            far = u if self.between.all() else np.multiply(u, self.between[:, None], drawn)
            np.negative(_summed(far, self.start, self.length), scratch.both[count : count + self.target.size])
            scratch.both.take(self.slot, axis=0, out=flat, mode="clip")
            return
        out[...] = 0
        if not self.order.size:
            flat[self.near] = u
            if not self.between.all():
                u *= self.between[:, None]
            flat[self.target] -= _summed(u, self.start)
            return
        np.multiply(u, -self.between[:, None], drawn)
        scratch.both.take(self.order, axis=0, out=scratch.flat, mode="clip")
        flat[self.target] = _summed(scratch.flat, self.start)

    def slopes(self, voltage: Complex) -> tuple[Complex, Complex]:
        """(element, batch) a and b of dI = a dU + b conj(dU) at these volts."""
        u = self.across(voltage)
        size = np.maximum(np.abs(u), np.finfo(float).tiny)
        a, b = np.zeros_like(u), -self.power * u**2 / size**4
        if self.current is not None:
            a = a + self.current / (2 * size)
            b = b - self.current * u**2 / (2 * size**3)
        return a, b


@dataclass(frozen=True, slots=True)
class Scratch:
    """Memory that is taken once.

    both : (2 · element + 1, batch) complex, the last 0
    flat : (2 · element, batch) complex
    size : (element, batch) float
    spare : (element, batch) float
    """

    both: Complex
    flat: Complex
    size: Real
    spare: Real


def hang(network: Network, forest: Forest) -> tuple[Hung | None, tuple[Index, Complex] | None]:
    """Sorts the loads of a network with several conductors.

    network : Network, with wires
    forest : Forest, of that network
    Returns : Hung of constant power and current, None where there is none; and of constant impedance the
        places and (row, k, k, batch) admittances, None where there is none
    """
    assert network.wires is not None
    slots, to, k = network.load_power, network.wires.load_to, network.conductors
    row, near = np.nonzero(slots.any(axis=-1) & (forest.place[network.load_node] >= 0)[:, None])
    if not row.size:
        return None, None
    place, far = forest.place[network.load_node[row]], to[row, near]
    stated, mix = np.conj(slots[row, near]), network.load_mix[row, :, None]
    reference = network.load_reference[row, near]
    keys = (place * k + near) * (k + 1) + far + 1
    order = _sorted(keys)
    begun = _runs(keys[order])

    def total(values: Complex | Real) -> Complex:
        ordered = np.asarray(values[order], dtype=np.complex128)
        return ordered if begun.size == order.size else _summed(ordered, begun)

    first = order[begun]
    place, near, far = place[first], near[first], far[first]
    pairs = place, near, far
    admittance = total(stated * mix[:, 2] / reference**2) if mix[:, 2].any() else None
    stamps = None if admittance is None else (place, _stamps(*pairs, admittance, k))
    if not mix[:, :2].any():
        return None, stamps
    current = total(stated * mix[:, 1] / reference) if mix[:, 1].any() else None
    between = far != EARTH
    power = total(stated * mix[:, 0])
    near, far = place * k + near, place * k + np.where(between, far, near)
    gathered = _gathered(near, far, forest.order.size * k)
    return Hung(place, near, far, 1.0 * between, power, current, *gathered), stamps


def _gathered(near: Index, far: Index, conductors: int) -> tuple[Index, Index, int, Index, Index]:
    """Order, start, length, target and slot of a Hung."""
    start, none = _runs(far), np.zeros(0, dtype=np.intp)
    if _repeats(near) or _repeats(far[start]):
        ends = np.concatenate((near, far))
        order = _sorted(ends)
        start = _runs(ends[order])
        return order, start, 0, ends[order][start], none
    length = int(np.diff(start, append=far.size).max())
    length = length if length * start.size == far.size else 0
    return none, start, length, far[start], _slots(conductors, near, far[start])


def _slots(size: int, near: Index, target: Index) -> Index:
    """Where each conductor finds its current, see Hung."""
    slot = np.full(size, 2 * near.size)
    slot[near] = np.arange(near.size)
    if (slot[target] < near.size).any():
        return slot[:0]
    slot[target] = near.size + np.arange(target.size)
    return slot


def _sorted(values: Index) -> Index:
    """The order that sorts values from 0 on, like ones as they stand; packed with it they sort quickest."""
    bits = values.size.bit_length()
    return np.sort((values << bits) | np.arange(values.size)) & ((1 << bits) - 1)


def _runs(values: Index) -> Index:
    """Where runs of like values begin."""
    return np.flatnonzero(np.append(True, values[1:] != values[:-1]))


def _repeats(values: Index) -> bool:
    return bool(np.bincount(values).max() > 1)


def _summed(values: Complex, start: Index, length: int = 0) -> Complex:
    """(target, batch) sums of runs; runs of one length quickest, one row of values quicker than a column."""
    if length:
        total = values[::length]
        for step in range(1, length):
            total = total + values[step::length]
        return total
    if values.shape[-1] == 1:
        return np.asarray(np.add.reduceat(values.reshape(-1), start)[:, None])
    return np.asarray(np.add.reduceat(values, start, axis=0))


def _stamps(place: Index, near: Index, far: Index, admittance: Complex, k: int) -> Complex:
    matrix = np.zeros((place.size, k, k, admittance.shape[-1]), dtype=np.complex128)
    row, between = np.arange(place.size), far != EARTH
    matrix[row, near, near] = admittance
    some, one, other, y = row[between], near[between], far[between], admittance[between]
    matrix[some, other, other] = y
    matrix[some, one, other] = matrix[some, other, one] = -y
    return matrix
