"""THE kernel: one backward and one forward sweep over every tree, for many operating points at once."""

from dataclasses import dataclass

import numpy as np

from solver.forest import Forest
from solver.hung import Scratch
from solver.network import Complex, Index
from solver.placed import Placed

WIDE = 48  # values a place from which prefix sums go row by row
CHUNK = 1 << 15  # complex values that are worked on while they stay in cache

# The allocator of glibc hands back to the system what is free beyond twice the largest block freed so far,
# and asks for it page by page again: a third of a four-wire solve. One large block, never touched, ends that.
np.empty(30 << 20, np.uint8)


@dataclass(frozen=True, slots=True)
class Stage:
    """The zones of one depth: where they stand, and the part of a sweep's memory that is theirs."""

    zones: slice
    fed: slice  # their transformers
    places: slice
    roots: Index  # (zone,) first place of each zone
    hung: Index  # (zone,) place each zone hangs on, none at depth 0
    end: Index  # (place,) one past what is fed through it, counted from the first place of the depth
    end_flat: Index  # (place · k · batch,) the same for every single value
    zone: Index | None  # (place,) zone in this depth, None where there is one zone only
    current: Complex
    inflow: Complex  # turned into drops on the way forward
    inflow_flat: Complex
    sums: Complex  # prefix sums, one longer than the places
    sums_flat: Complex
    before: Complex  # sums up to each place without it
    through: Complex  # and with it


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
        live, k = forest.order.size, placed.z.shape[1]
        self.placed = placed
        self.current, self.inflow = (np.empty((live, k, width), np.complex128) for _ in range(2))
        self.parts = parts(live, k * width)
        rows = min(live, self.parts[0].stop)
        self.squares, self.squared = np.empty((rows, k, 2 * width)), np.empty((rows, k, width))
        self.inverse = np.zeros((rows, k, width), np.complex128)
        self.stages = [self._stage(forest, depth) for depth in range(forest.depth_zone.size - 1)]
        self.scratch: Scratch | None = None
        self.flow: Complex | None = None  # that enters what nothing holds
        gain = placed.gain
        self.gain_back = None if gain is None else np.swapaxes(gain, 1, 2)
        self.secondary = np.empty((forest.zone_source.size, k, width), np.complex128)

    def __call__(self, voltage: Complex, out: Complex) -> Complex:
        """One whole sweep: the currents at these voltages, and the voltages those currents give.

        voltage : (live, k, batch) complex [V]
        out : (live, k, batch) complex [V], another array, which is filled
        Returns : out
        """
        self.currents(voltage)
        self.backward()
        if self.placed.loose is not None:
            self.flow = self.placed.loose.along(self.inflow)
        self.drops()
        return self.forward(out)

    def currents(self, voltage: Complex) -> Complex:
        """Current that leaves every place: loads and admittances at the voltage they see.

        I = V · (conj(S) / |V|² + conj(S0) / (Vref · |V|) + Y), for constant power, current, impedance

        voltage : (live, k, batch) complex [V]
        Returns : (live, k, batch) complex [A]
        """
        if self.placed.gain is not None:
            if self.placed.hung is None:
                self.current[...] = 0
            else:
                self.scratch = self.scratch or self.placed.hung.scratch(self.current.shape[-1])
                self.placed.hung.draw(voltage, self.current, self.scratch)
        else:
            voltage = np.ascontiguousarray(voltage)
            for part in self.parts:
                self._currents(part, voltage[part], self.current[part])
        if self.placed.y is not None and self.placed.y.shape[1] > 1:
            self.current += times(self.placed.y, voltage)
        return self.current

    def _currents(self, part: slice, voltage: Complex, out: Complex) -> None:
        placed, rows = self.placed, out.shape[0]
        squares, squared, inverse = self.squares[:rows], self.squared[:rows], self.inverse[:rows]
        real = voltage.view(np.float64)
        np.multiply(real, real, squares)
        np.add(squares[..., ::2], squares[..., 1::2], squared)
        np.reciprocal(squared, inverse.real)
        np.multiply(placed.power[part], inverse, out)
        if placed.current is not None:
            np.sqrt(inverse.real, inverse.real)
            out += placed.current[part] * inverse
        if placed.y is not None and placed.y.shape[1] == 1:
            out += placed.y[part, 0]
        np.multiply(out, voltage, out)

    def backward(self) -> Complex:
        """Current into every place from its feeder; primary currents are added where transformers hang.

        Returns : (live, k, batch) complex [A]
        """
        for stage in reversed(self.stages):
            stage.sums[0] = 0
            accumulate(stage.current, stage.through)
            stage.sums.take(stage.end, axis=0, out=stage.inflow, mode="clip")
            np.subtract(stage.inflow, stage.before, stage.inflow)
            if stage.hung.size:
                self.secondary[stage.zones] = secondary = self.inflow[stage.roots]
                np.add.at(self.current, stage.hung, self._primary(stage, secondary))
        return self.inflow

    def _primary(self, stage: Stage, secondary: Complex) -> Complex:
        if self.gain_back is None:
            return secondary / np.conj(self.placed.ratio[stage.fed])
        return times(self.gain_back[stage.fed], secondary)

    def drops(self) -> None:
        """Turns the currents into every place into the drops along their feeders."""
        times(self.placed.z, self.inflow, self.inflow)

    def forward(self, out: Complex) -> Complex:
        """Voltage at every place from the drops.

        out : (live, k, batch) complex [V], which is filled
        Returns : out
        """
        for stage in self.stages:
            stage.before[...] = stage.inflow
            np.subtract.at(stage.sums_flat, stage.end_flat, stage.inflow_flat)
            accumulate(stage.before, stage.before)
            root = self._roots(stage, out)
            np.subtract(root if stage.zone is None else root[stage.zone], stage.before, out[stage.places])
        return out

    def _roots(self, stage: Stage, voltage: Complex) -> Complex:
        """(zone, k, batch) voltage at the roots of a depth: the supply's, or Vs = Vp / a - Z Is."""
        if not stage.hung.size:
            return self.placed.root
        if self.placed.gain is not None:
            opened = times(self.placed.gain[stage.fed], voltage[stage.hung])
            return opened - times(self.placed.series[stage.fed], self.secondary[stage.zones])
        through = self.placed.series[stage.fed] * self.secondary[stage.zones]
        return voltage[stage.hung] / self.placed.ratio[stage.fed] - through

    def _stage(self, forest: Forest, depth: int) -> Stage:
        first, last = int(forest.depth_zone[depth]), int(forest.depth_zone[depth + 1])
        supplied = int(forest.depth_zone[1])
        start, stop = int(forest.zone_start[first]), int(forest.zone_start[last])
        places = slice(start, stop)
        longer = (stop - start + 1, *self.current.shape[1:])
        sums = np.empty(longer, np.complex128)
        values = self.current[0].size
        end = forest.end[places] - start if start else forest.end[places]
        return Stage(
            zones=slice(first, last),
            fed=slice(first - supplied, last - supplied),
            places=places,
            roots=forest.zone_start[first:last],
            hung=forest.zone_fed[first:last] if depth else forest.zone_fed[:0],
            end=end,
            end_flat=end if values == 1 else (end[:, None] * values + np.arange(values)).reshape(-1),
            zone=None if last - first == 1 else forest.zone[places] - first,
            current=self.current[places],
            inflow=self.inflow[places],
            inflow_flat=self.inflow[places].reshape(-1),
            sums=sums,
            sums_flat=sums.reshape(-1),
            before=sums[:-1],
            through=sums[1:],
        )


def parts(live: int, values: int) -> list[slice]:
    """Runs of places that stay in cache.

    live : number of places
    values : complex values a place
    Returns : slices, one after the other
    """
    rows = max(1, CHUNK // values)
    return [slice(start, min(start + rows, live)) for start in range(0, live, rows)]


def times(matrix: Complex, vector: Complex, out: Complex | None = None) -> Complex:
    """Multiplies a small matrix into a vector at every place; k = 1 costs one product.

    matrix : (row, k, k, batch) complex
    vector : (row, k, batch) complex
    out : (row, k, batch) complex, filled where it is given; may be the vector
    Returns : (row, k, batch) complex
    """
    if matrix.shape[1] == 1:
        return np.multiply(matrix[:, 0], vector, out)
    rows, k, width = vector.shape[0], vector.shape[1], max(matrix.shape[-1], vector.shape[-1])
    product = np.empty((rows, k, width), np.complex128) if out is None else out
    for part in parts(rows, k * k * width):
        _times(matrix[part], vector[part], product[part])
    return product


def _times(matrix: Complex, vector: Complex, out: Complex) -> None:
    """One conductor after the other, which is quicker than all at every place."""
    total = matrix[:, :, 0] * vector[:, :1]
    for slot in range(1, matrix.shape[1]):
        total += matrix[:, :, slot] * vector[:, slot : slot + 1]
    out[...] = total


def over_conductors(values: Complex) -> Complex:
    """Sum over the conductors, one after the other, so that its last bit does not hang on the batch.

    values : (row, k, batch) complex
    Returns : (row, batch) complex
    """
    total = values[:, 0]
    for slot in range(1, values.shape[1]):
        total = total + values[:, slot]
    return total


def accumulate(values: Complex, out: Complex) -> None:
    """Prefix sum over the places; wide batches go row by row, which stays in cache.

    values : (place, k, batch) complex
    out : (place, k, batch) complex, may be the same array
    """
    if values.shape[1] * values.shape[2] < WIDE:
        np.add.accumulate(values, 0, None, out)
        return
    out[0] = total = values[0]
    for value, place in zip(values[1:], out[1:], strict=True):
        total = np.add(total, value, place)
