"""THE kernel: one backward and one forward sweep over every tree, for many operating points at once."""

from dataclasses import dataclass

import numpy as np

from solver.forest import Forest
from solver.network import Complex, Index
from solver.placed import Placed

WIDE = 16  # values a place from which prefix sums go row by row


@dataclass(frozen=True, slots=True)
class Stage:
    """The zones of one depth: where they stand, and the part of a sweep's memory that is theirs."""

    fed: slice  # their transformers
    places: slice
    roots: Index  # (zone,) first place of each zone
    hung: Index  # (zone,) place each zone hangs on, none at depth 0
    end: Index  # (place,) one past what is fed through it, counted from the first place of the depth
    end_flat: Index  # (place · k · batch,) the same for every single value
    zone: Index | None  # (place,) zone in this depth, None where there is one zone only
    current: Complex
    inflow: Complex
    before: Complex  # prefix sums of the current up to each place, without it
    through: Complex  # and with it
    sums: Complex  # both, one longer
    drop: Complex
    fall: Complex  # prefix sums of the drops
    fall_flat: Complex  # one place longer
    drop_flat: Complex


class Sweep:
    """Sweeps over one forest at a set of operating points; all memory is taken once.

    Backward, the currents of the places are summed up and J[i] = c[end[i]] - c[i] enters place i.
    Forward, each drop is put at its place and taken off again at the end of what the place feeds, so that
    the prefix sum is the drop along the way from the root. Only the depth of transformers is a loop.

    placed : Placed
    forest : Forest
    width : number of operating points
    Source : Shirmohammadi, Hong, Semlyen, Luo, A compensation-based power flow method for weakly meshed
        distribution and transmission networks, IEEE Trans. Power Systems 3 (1988) 753-762
    """

    def __init__(self, placed: Placed, forest: Forest, width: int) -> None:
        shape = (forest.order.size, placed.z.shape[1], width)
        self.placed = placed
        self.current, self.inflow, self.drop, self.inverse = (
            np.zeros(shape, np.complex128) for _ in range(4)
        )
        self.squared, self.spare = np.empty(shape), np.empty(shape)
        self.stages = [self._stage(forest, depth) for depth in range(forest.depth_zone.size - 1)]

    def __call__(self, voltage: Complex, out: Complex) -> Complex:
        """One whole sweep: the currents at these voltages, and the voltages those currents give.

        voltage : (live, k, batch) complex [V]
        out : (live, k, batch) complex [V], another array, which is filled
        Returns : out
        """
        self.currents(voltage)
        self.backward()
        return self.forward(out)

    def currents(self, voltage: Complex) -> Complex:
        """Current that leaves every place: loads and admittances at the voltage they see.

        I = V · (conj(S) / |V|² + conj(S0) / (Vref · |V|) + Y), for constant power, current, impedance

        voltage : (live, k, batch) complex [V]
        Returns : (live, k, batch) complex [A]
        """
        placed, out, squared, inverse = self.placed, self.current, self.squared, self.inverse
        np.multiply(voltage.real, voltage.real, squared)
        np.multiply(voltage.imag, voltage.imag, self.spare)
        np.add(squared, self.spare, squared)
        np.reciprocal(squared, inverse.real)
        np.multiply(placed.power, inverse, out)
        if placed.current is not None:
            np.sqrt(inverse.real, inverse.real)
            out += placed.current * inverse
        if placed.y is not None and placed.y.shape[1] == 1:
            out += placed.y[:, 0]
        np.multiply(out, voltage, out)
        if placed.y is not None and placed.y.shape[1] > 1:
            out += times(placed.y, voltage)
        return out

    def backward(self) -> Complex:
        """Current into every place from its feeder; primary currents are added where transformers hang.

        Returns : (live, k, batch) complex [A]
        """
        for stage in reversed(self.stages):
            accumulate(stage.current, stage.through)
            stage.sums.take(stage.end, axis=0, out=stage.inflow, mode="clip")
            np.subtract(stage.inflow, stage.before, stage.inflow)
            if stage.hung.size:
                secondary = self.inflow[stage.roots]
                np.add.at(self.current, stage.hung, secondary / np.conj(self.placed.ratio[stage.fed]))
        return self.inflow

    def forward(self, out: Complex) -> Complex:
        """Voltage at every place from the currents into them.

        out : (live, k, batch) complex [V], which is filled
        Returns : out
        """
        times(self.placed.z, self.inflow, self.drop)
        for stage in self.stages:
            root = self._roots(stage, out)
            stage.fall[...] = stage.drop
            np.subtract.at(stage.fall_flat, stage.end_flat, stage.drop_flat)
            accumulate(stage.fall, stage.fall)
            np.subtract(root if stage.zone is None else root[stage.zone], stage.fall, out[stage.places])
        return out

    def _roots(self, stage: Stage, voltage: Complex) -> Complex:
        """(zone, k, batch) voltage at the roots of a depth: the supply's, or Vs = Vp / a - Z Is."""
        if not stage.hung.size:
            return self.placed.root
        through = self.placed.series[stage.fed] * self.inflow[stage.roots]
        return voltage[stage.hung] / self.placed.ratio[stage.fed] - through

    def _stage(self, forest: Forest, depth: int) -> Stage:
        first, last = int(forest.depth_zone[depth]), int(forest.depth_zone[depth + 1])
        supplied = int(forest.depth_zone[1])
        start, stop = int(forest.zone_start[first]), int(forest.zone_start[last])
        places = slice(start, stop)
        longer = (stop - start + 1, *self.current.shape[1:])
        sums, fall = np.zeros(longer, np.complex128), np.zeros(longer, np.complex128)
        values = self.current[0].size
        end = forest.end[places] - start if start else forest.end[places]
        return Stage(
            fed=slice(first - supplied, last - supplied),
            places=places,
            roots=forest.zone_start[first:last],
            hung=forest.zone_fed[first:last] if depth else forest.zone_fed[:0],
            end=end,
            end_flat=end if values == 1 else (end[:, None] * values + np.arange(values)).reshape(-1),
            zone=None if last - first == 1 else forest.zone[places] - first,
            current=self.current[places],
            inflow=self.inflow[places],
            before=sums[:-1],
            through=sums[1:],
            sums=sums,
            drop=self.drop[places],
            fall=fall[:-1],
            fall_flat=fall.reshape(-1),
            drop_flat=self.drop[places].reshape(-1),
        )


def times(matrix: Complex, vector: Complex, out: Complex | None = None) -> Complex:
    """Multiplies a small matrix into a vector at every place; k = 1 costs one product.

    matrix : (row, k, k, batch) complex
    vector : (row, k, batch) complex
    out : (row, k, batch) complex, filled where it is given
    Returns : (row, k, batch) complex
    """
    if matrix.shape[1] == 1:
        return np.multiply(matrix[:, 0], vector, out)
    return np.einsum("rijb,rjb->rib", matrix, vector, out=out)


def accumulate(values: Complex, out: Complex) -> None:
    """Prefix sum over the places; wide batches go row by row, which stays in cache.

    values : (place, k, batch) complex
    out : (place, k, batch) complex, may be the same array
    """
    if values.shape[1] * values.shape[2] < WIDE:
        np.add.accumulate(values, 0, None, out)
        return
    out[0] = values[0]
    for row in range(1, values.shape[0]):
        np.add(out[row - 1], values[row], out=out[row])
