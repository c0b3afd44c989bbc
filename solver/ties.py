"""Compensation: the currents of the ties that close rounds over the trees, found with every sweep."""

from dataclasses import replace

import numpy as np

from solver.forest import Forest
from solver.joints import Joints
from solver.network import Complex, Index, Real
from solver.placed import Placed
from solver.sweep import Sweep

NOISE = 1e-14  # of the volts at both ends, below which their difference is rounding


class Ties:
    """Currents x of all ties, from the open volts u that the trees alone would leave between their ends.

    The trees turn drawn currents into volts, V = E - T I. With the tie currents drawn as well, V falls by
    T C x, and the ties ask for Cᵀ V = z x, so that (z + Cᵀ T C) x = Cᵀ V_open = u. The columns of T C come
    from one sweep whose batch is the ties.

    placed : Placed, with joints
    forest : Forest
    Source : Shirmohammadi, Hong, Semlyen, Luo, A compensation-based power flow method for weakly meshed
        distribution and transmission networks, IEEE Trans. Power Systems 3 (1988) 753-762
    """

    def __init__(self, placed: Placed, forest: Forest, joints: Joints) -> None:
        self.joints, self.both = joints, replace(joints, weight=np.abs(joints.weight))
        self.drop = unit_drops(placed, forest, joints)
        matrix = np.moveaxis(gathered(joints, self.drop), -1, 0)
        diagonal = np.arange(matrix.shape[1])
        matrix = np.broadcast_to(matrix, (max(len(matrix), joints.z.shape[-1]), *matrix.shape[1:])).copy()
        matrix[:, diagonal, diagonal] += joints.z.T
        self.inverse = np.linalg.inv(matrix)  # (batch or 1, tie, tie)

    def correct(self, voltage: Complex) -> Complex:
        """Finds the tie currents and takes the drops they make off the volts of the open trees.

        voltage : (live, k, batch) complex [V] of the open trees, which is changed
        Returns : (tie current, batch) complex [A]
        """
        opened = gathered(self.joints, voltage)
        opened[np.abs(opened) < NOISE * gathered(self.both, np.abs(voltage)).real] = 0
        current = np.einsum("btu,ub->tb", np.broadcast_to(self.inverse, self._wide(opened)), opened)
        if self.drop.shape[-1] == 1:
            live, k, width = voltage.shape
            voltage -= (self.drop[..., 0].reshape(live * k, -1) @ current).reshape(live, k, width)
        else:
            voltage -= np.einsum("pktb,tb->pkb", self.drop, current)
        return current

    def _wide(self, opened: Complex) -> tuple[int, ...]:
        return opened.shape[-1], *self.inverse.shape[1:]

    def keep(self, points: Index) -> None:
        """Goes on with some operating points only."""
        if self.drop.shape[-1] > 1:
            self.drop = self.drop.take(points, axis=-1)
        if len(self.inverse) > 1:
            self.inverse = self.inverse.take(points, axis=0)


def unit_drops(placed: Placed, forest: Forest, joints: Joints) -> Complex:
    """How far each tie current of 1 A lowers the volts of every place.

    placed : Placed
    forest : Forest
    joints : Joints
    Returns : (live, k, tie current, batch) complex [ohm]; batch is 1 where impedances are alike
    """
    count = joints.z.shape[0]
    width = max(placed.z.shape[-1], placed.ratio.shape[-1], placed.series.shape[-1])

    def tiled(array: Complex) -> Complex:
        return array if array.shape[-1] == 1 else np.tile(array, count)

    bare = replace(
        placed,
        root=np.zeros((*placed.root.shape[:2], 1), dtype=np.complex128),
        z=tiled(placed.z),
        ratio=tiled(placed.ratio),
        series=tiled(placed.series),
    )
    sweep = Sweep(bare, forest, count * width)
    draw(joints, np.repeat(np.eye(count), width, axis=1), sweep.current)
    sweep.backward()
    volts = sweep.forward(np.empty_like(sweep.current))
    return -volts.reshape(*volts.shape[:2], count, width)


def draw(joints: Joints, current: Complex, out: Complex) -> None:
    """Puts tie currents at their places as drawn currents.

    joints : Joints
    current : (tie current, batch) complex [A]
    out : (live, k, batch) complex [A], is overwritten
    """
    out[...] = 0
    add(joints, current, out)


def add(joints: Joints, current: Complex, out: Complex) -> None:
    """Adds tie currents to drawn currents.

    joints : Joints
    current : (tie current, batch) complex [A]
    out : (live, k, batch) complex [A], is added to
    """
    np.add.at(out, (joints.place, joints.conductor), joints.weight[:, None] * current[joints.column])


def gathered(joints: Joints, values: Complex | Real) -> Complex:
    """Cᵀ applied to values of places.

    joints : Joints
    values : (live, k, ...) complex
    Returns : (tie current, ...) complex
    """
    found = np.zeros((joints.z.shape[0], *values.shape[2:]), dtype=np.complex128)
    weight = joints.weight.reshape(-1, *(1,) * (values.ndim - 2))
    np.add.at(found, joints.column, weight * values[joints.place, joints.conductor])
    return found
