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

    place : (element,)
    near : (element,) conductor
    far : (element,) conductor, -1 earth
    power : (element, batch) complex [VA] conjugate
    current : (element, batch) complex [A] conjugate; None where there is none
    """

    place: Index
    near: Index
    far: Index
    power: Complex
    current: Complex | None

    def take(self, points: Index) -> "Hung":
        """The same with some operating points only."""
        wide = {n: a for n in ("power", "current") if (a := getattr(self, n)) is not None and a.shape[-1] > 1}
        return replace(self, **{n: a.take(points, axis=-1) for n, a in wide.items()})

    def across(self, voltage: Complex) -> Complex:
        """(element, ...) volts from conductor to conductor, of (live, k, ...)."""
        u = voltage[self.place, self.near]
        between = self.far != EARTH
        u[between] -= voltage[self.place[between], self.far[between]]
        return u

    def add(self, voltage: Complex, out: Complex) -> None:
        """Adds what is drawn at these volts to the currents that leave each place.

        voltage : (live, k, batch) complex [V]
        out : (live, k, batch) complex [A], is added to
        """
        u = self.across(voltage)
        size = np.maximum(u.real**2 + u.imag**2, np.finfo(float).tiny)
        drawn = self.power / size
        if self.current is not None:
            drawn = drawn + self.current / np.sqrt(size)
        self.put(drawn * u, out)

    def put(self, drawn: Complex, out: Complex) -> None:
        """Adds currents of elements where they leave and takes them off where they come back."""
        np.add.at(out, (self.place, self.near), drawn)
        between = self.far != EARTH
        np.subtract.at(out, (self.place[between], self.far[between]), drawn[between])

    def slopes(self, voltage: Complex) -> tuple[Complex, Complex]:
        """(element, batch) a and b of dI = a dU + b conj(dU) at these volts."""
        u = self.across(voltage)
        size = np.maximum(np.abs(u), np.finfo(float).tiny)
        a, b = np.zeros_like(u), -self.power * u**2 / size**4
        if self.current is not None:
            a = a + self.current / (2 * size)
            b = b - self.current * u**2 / (2 * size**3)
        return a, b


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
    key, first, member = np.unique(
        (place * k + near) * (k + 1) + far + 1, return_index=True, return_inverse=True
    )

    def total(values: Complex | Real) -> Complex:
        found = np.zeros((key.size, values.shape[-1]), dtype=np.complex128)
        np.add.at(found, member, values)
        return found

    current = total(stated * mix[:, 1] / reference) if mix[:, 1].any() else None
    hung = Hung(place[first], near[first], far[first], total(stated * mix[:, 0]), current)
    steady = hung if mix[:, :2].any() else None
    if not mix[:, 2].any():
        return steady, None
    admittance = total(stated * mix[:, 2] / reference**2)
    return steady, (hung.place, _stamps(hung, admittance, k))


def _stamps(hung: Hung, admittance: Complex, k: int) -> Complex:
    matrix = np.zeros((hung.place.size, k, k, admittance.shape[-1]), dtype=np.complex128)
    row, between = np.arange(hung.place.size), hung.far != EARTH
    matrix[row, hung.near, hung.near] = admittance
    near, far, some, y = hung.near[between], hung.far[between], row[between], admittance[between]
    matrix[some, far, far] = y
    matrix[some, near, far] = matrix[some, far, near] = -y
    return matrix
