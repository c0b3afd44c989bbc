"""Compensation: tie currents that close rounds over the trees, and volts of what nothing holds."""

from dataclasses import replace
from typing import Any

import numpy as np

from solver.arrays import Complex, Index, Real
from solver.forest import Forest
from solver.joints import Joints
from solver.loose import Loose
from solver.placed import Placed
from solver.sweep import Sweep

NOISE = 1e-14  # of the volts at both ends, below which their difference is rounding
BALANCED = 1e-13  # of all that is drawn either way, below which their sum is rounding
CUT = 1e-12  # of the largest singular value, below which a direction is not determined


class Ties:
    """Currents x of all ties, from the open volts u that the trees alone would leave between their ends.

    The trees turn drawn currents into volts, V = E - T I. With the tie currents drawn as well, V falls by
    T C x, and the ties ask for Cᵀ V = z x, so that (z + Cᵀ T C) x = Cᵀ V_open = u. The columns of T C come
    from one sweep whose batch is the ties. What nothing holds moves by W f, so that no current enters that
    way: F + Wᵀ C x + J f = 0, with J the slope of all loads and admittances, by Newton. It stands where it
    stood and moves by f alone: no current lowers it.

    placed : Placed, with joints or something loose
    forest : Forest
    Source : Shirmohammadi, Hong, Semlyen, Luo, A compensation-based power flow method for weakly meshed
        distribution and transmission networks, IEEE Trans. Power Systems 3 (1988) 753-762
    """

    def __init__(self, placed: Placed, forest: Forest) -> None:
        self.placed = placed
        self.joints = joints = placed.joints or empty(placed)
        self.both = replace(joints, weight=np.abs(joints.weight))
        self.drop, self.lift = responses(placed, forest, joints, placed.loose)
        matrix = np.moveaxis(gathered(joints, self.drop), -1, 0)
        diagonal = np.arange(matrix.shape[1])
        width = max(len(matrix), joints.z.shape[-1])
        self.matrix = np.broadcast_to(matrix, (width, *matrix.shape[1:])).copy()  # (batch or 1, tie, tie)
        self.matrix[:, diagonal, diagonal] += joints.z.T
        if placed.loose is not None:
            self.lift, self.drop, self.apart = held(placed.loose, self.lift, self.drop)
            self.matrix = self.matrix * 0 + np.moveaxis(gathered(joints, self.drop), -1, 0)
            self.matrix[:, diagonal, diagonal] += joints.z.T
        self.inverse = self._inverse()

    def _inverse(self) -> Complex:
        if self.drop.shape[1] == 1:
            return np.asarray(np.linalg.inv(self.matrix))
        scale = _scale(np.abs(np.einsum("btt->bt", self.matrix)))
        scaled = self.matrix * scale[:, :, None] * scale[:, None, :]
        inverse = np.asarray(np.linalg.pinv(scaled, CUT), dtype=np.complex128)
        return inverse * scale[:, :, None] * scale[:, None, :]

    def correct(self, voltage: Complex, before: Complex, flow: Complex | None) -> Complex:
        """Finds the tie currents and puts what they change on the volts of the open trees.

        voltage : (live, k, batch) complex [V] of the open trees, which is changed
        before : (live, k, batch) complex [V] whose currents the trees carried
        flow : (loose, batch) complex [A] that entered what nothing holds; None where everything is held
        Returns : (tie current, batch) complex [A]
        """
        loose = self.placed.loose
        if loose is not None:
            _apply(self.lift, loose.along(before) - loose.along(voltage), voltage)
        opened = gathered(self.joints, voltage)
        opened[np.abs(opened) < NOISE * gathered(self.both, np.abs(voltage)).real] = 0
        if loose is None or flow is None:
            inverse = np.broadcast_to(self.inverse, (opened.shape[-1], *self.inverse.shape[1:]))
            current = np.einsum("btu,ub->tb", inverse, opened)
        else:
            apart = np.broadcast_to(self.apart, (flow.shape[-1], *self.apart.shape[1:]))
            current, moved = self._newton(before, opened, np.einsum("bgf,gb->fb", apart, flow))
            _apply(self.lift, moved, voltage)
        _apply(self.drop, -current, voltage)
        return current

    def _newton(self, before: Complex, opened: Complex, flow: Complex) -> tuple[Complex, Complex]:
        """Tie currents and moves of what is loose together, real and imaginary parts apart."""
        width, ties, count = before.shape[-1], opened.shape[0], opened.shape[0] + flow.shape[0]
        joined = np.moveaxis(gathered(self.joints, self.lift), -1, 0)  # Cᵀ W
        straight, turned = np.zeros((2, width, count, count), dtype=np.complex128)
        straight[:, :ties, :ties] = self.matrix
        straight[:, :ties, ties:] = -joined
        straight[:, ties:, :ties] = np.swapaxes(joined, 1, 2)
        straight[:, ties:, ties:], turned[:, ties:, ties:] = self._slopes(before)
        diagonal = np.abs(np.einsum("btt->bt", straight)) + np.abs(np.einsum("btt->bt", turned))
        scale = _scale(diagonal)
        straight, turned = (a * scale[:, :, None] * scale[:, None, :] for a in (straight, turned))
        plus, minus = straight + turned, straight - turned
        real = np.block([[plus.real, -minus.imag], [plus.imag, minus.real]])
        asked = (np.concatenate((opened, -flow)).T * scale)[:, :, None]
        lost = ~np.isfinite(real).all(axis=(1, 2))  # volts that ran away have no slopes
        real[lost] = 0
        inverse = np.linalg.pinv(real, CUT)
        inverse[lost] = np.nan
        found = (inverse @ np.concatenate((asked.real, asked.imag), axis=1))[:, :, 0]
        solved = ((found[:, :count] + 1j * found[:, count:]) * scale).T
        return solved[:ties], solved[ties:]

    def _slopes(self, before: Complex) -> tuple[Complex, Complex]:
        """(batch, loose, loose) how the flow into what is loose follows its moves, and their conjugates."""
        width, lift = before.shape[-1], self.lift
        count = lift.shape[2]
        straight, turned = np.zeros((2, count, count, width), dtype=np.complex128)
        if self.placed.y is not None:
            straight += _drawn(self.placed.y, lift)
        if self.placed.hung is not None:
            a, b = self.placed.hung.slopes(before)
            across = self.placed.hung.across(lift)
            straight += np.einsum("egb,eb,efb->gfb", across, a, across)
            turned += np.einsum("egb,eb,efb->gfb", across, b, np.conj(across))
        return np.moveaxis(straight, -1, 0), np.moveaxis(turned, -1, 0)

    def keep(self, points: Index, placed: Placed) -> None:
        """Goes on with some operating points only."""
        self.placed = placed
        if self.drop.shape[-1] > 1:
            self.drop, self.lift = (a.take(points, axis=-1) for a in (self.drop, self.lift))
        if len(self.inverse) > 1:
            self.inverse, self.matrix = self.inverse[points], self.matrix[points]
        if self.placed.loose is not None and len(self.apart) > 1:
            self.apart = self.apart[points]


def _drawn(y: Complex, lift: Complex) -> Complex:
    """(loose, loose, batch) Wᵀ Y W; what hangs between conductors that move together draws nothing."""
    found = np.einsum("pigb,pijb,pjfb->gfb", lift, y, lift, optimize=True)
    size = np.einsum("pigb,pijb,pjfb->gfb", *(np.abs(a) for a in (lift, y, lift)), optimize=True)
    return np.asarray(np.where(np.abs(found) < BALANCED * size, 0, found))


def _scale(diagonal: Real) -> Real:
    """1 / √ of what is not nought."""
    return 1 / np.sqrt(np.where(diagonal > 0, diagonal, 1.0))


def _apply(response: Complex, causes: Complex, voltage: Complex) -> None:
    """Adds (live, k, cause, batch or 1) responses to (cause, batch) causes."""
    live, k, width = voltage.shape
    if response.shape[-1] == 1 and width > 1:  # one column is too little for threads to share
        voltage += (response[..., 0].reshape(live * k, -1) @ causes).reshape(live, k, width)
    else:
        voltage += np.einsum("pktb,tb->pkb", response, causes)


def empty(placed: Placed) -> Joints:
    """No tie at all.

    placed : Placed
    Returns : Joints without a tie current
    """
    none = np.zeros(0, dtype=np.intp)
    z, own = np.zeros((0, 1), dtype=np.complex128), np.zeros((placed.ratio.shape[0], 2), dtype=np.intp) - 1
    return Joints(none, none, none, np.zeros(0), z, none, own)


def responses(placed: Placed, forest: Forest, joints: Joints, loose: Loose | None) -> tuple[Complex, Complex]:
    """How far 1 A of each tie lowers the volts of every place, and what 1 V of each loose way raises.

    placed : Placed
    forest : Forest
    joints : Joints
    loose : Loose or None
    Returns : (live, k, tie current, batch) complex [ohm]; (live, k, loose, batch) complex; batch is 1 where
        impedances and ratios are alike
    """
    ties, ways = joints.z.shape[0], 0 if loose is None else loose.place.size
    width = max(placed.z.shape[-1], placed.ratio.shape[-1], placed.series.shape[-1])
    sweep = Sweep(_bare(placed, ties + ways), forest, (ties + ways) * width)
    shape = (*sweep.current.shape[:2], ties + ways, width)
    sweep.current[...] = 0
    drawn = sweep.current.reshape(shape)
    np.add.at(drawn, (joints.place, joints.conductor, joints.column), joints.weight[:, None])
    sweep.backward()
    sweep.drops()
    if loose is not None:
        sweep.inflow.reshape(shape)[loose.place, :, ties + np.arange(ways)] -= loose.way[..., None]
    volts = sweep.forward(np.empty_like(sweep.current)).reshape(shape)
    return -volts[:, :, :ties], volts[:, :, ties:]


def held(loose: Loose, lift: Complex, drop: Complex) -> tuple[Complex, Complex, Complex]:
    """Responses such that each loose way moves by its own lift alone, and no tie current lowers it.

    loose : Loose
    lift : (live, k, loose, batch) complex, W
    drop : (live, k, tie current, batch) complex [ohm], T C
    Returns : lift, drop and Q⁻¹ (batch, loose, loose) with Q = wᵀ W: W Q⁻¹ and T C - W Q⁻¹ wᵀ T C
    """
    own = np.einsum("fk,fkgb->bfg", loose.way, lift[loose.place])
    apart = np.asarray(np.linalg.inv(own), dtype=np.complex128)
    lift = np.einsum("pkfb,bfg->pkgb", lift, apart)
    along = np.einsum("fk,fktb->ftb", loose.way, drop[loose.place])
    return lift, drop - np.einsum("pkfb,ftb->pktb", lift, along), apart


def _bare(placed: Placed, count: int) -> Placed:
    """The same trees without sources, as many times side by side."""

    def tiled(array: Complex | None) -> Complex | None:
        return array if array is None or array.shape[-1] == 1 else np.tile(array, count)

    parts: dict[str, Any] = {name: tiled(getattr(placed, name)) for name in ("z", "ratio", "series", "gain")}
    return replace(placed, root=np.zeros((*placed.root.shape[:2], 1), dtype=np.complex128), **parts)


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
