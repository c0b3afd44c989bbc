"""THE kernel: one backward and one forward sweep over every tree, for many operating points at once."""

import numpy as np

from solver.forest import Forest
from solver.network import Complex
from solver.placed import Placed


def times(matrix: Complex, vector: Complex) -> Complex:
    """Multiplies a small matrix into a vector at every place; k = 1 costs one product.

    matrix : (row, k, k, batch) complex
    vector : (row, k, batch) complex
    Returns : (row, k, batch) complex
    """
    if matrix.shape[1] == 1:
        return matrix[:, 0] * vector
    return np.einsum("rijb,rjb->rib", matrix, vector)


def currents(placed: Placed, voltage: Complex) -> Complex:
    """Current that leaves every place: loads and admittances at the voltage they see.

    I = conj(S / V) for constant power, conj(S0) / Vref · V / |V| for constant current, Y V for the rest.

    placed : Placed
    voltage : (live, k, batch) complex [V]
    Returns : (live, k, batch) complex [A]
    """
    total = None if placed.y is None else times(placed.y, voltage)
    if placed.power is None and placed.current is None:
        return np.zeros_like(voltage) if total is None else total
    squared = voltage.real**2
    squared += voltage.imag**2
    steep = None if placed.power is None else placed.power * (1 / squared)
    if placed.current is not None:
        flat = placed.current * (1 / np.sqrt(squared))
        steep = flat if steep is None else steep + flat
    current = steep * voltage
    if total is not None:
        current += total
    return current


def backward(placed: Placed, forest: Forest, current: Complex) -> Complex:
    """Current into every place from its feeder, by prefix sums: J[i] = c[end[i]] - c[i].

    placed : Placed
    forest : Forest
    current : (live, k, batch) complex [A] drawn at each place; primary currents of transformers are added
    Returns : (live, k, batch) complex [A]
    """
    inflow = np.empty_like(current)
    supplied = int(forest.depth_zone[1])
    for depth in range(forest.depth_zone.size - 2, -1, -1):
        first, last = int(forest.depth_zone[depth]), int(forest.depth_zone[depth + 1])
        start, stop = int(forest.zone_start[first]), int(forest.zone_start[last])
        sums = np.empty((stop - start + 1, *current.shape[1:]), dtype=np.complex128)
        sums[0] = 0
        accumulate(current[start:stop], sums[1:])
        np.subtract(sums.take(forest.end[start:stop] - start, axis=0), sums[:-1], out=inflow[start:stop])
        if depth:
            ratio = placed.ratio[first - supplied : last - supplied]
            secondary = inflow[forest.zone_start[first:last]]
            np.add.at(current, forest.zone_fed[first:last], secondary / np.conj(ratio))
    return inflow


def forward(placed: Placed, forest: Forest, inflow: Complex) -> Complex:
    """Voltage at every place: each drop is put at its place and taken off again at the end of what it feeds.

    placed : Placed
    forest : Forest
    inflow : (live, k, batch) complex [A] into every place
    Returns : (live, k, batch) complex [V]
    """
    drop = times(placed.z, inflow)
    voltage = np.empty_like(inflow)
    supplied = int(forest.depth_zone[1])
    for depth in range(forest.depth_zone.size - 1):
        first, last = int(forest.depth_zone[depth]), int(forest.depth_zone[depth + 1])
        start, stop = int(forest.zone_start[first]), int(forest.zone_start[last])
        if depth:
            rows = slice(first - supplied, last - supplied)
            feeding = voltage[forest.zone_fed[first:last]]
            root = feeding / placed.ratio[rows] - placed.series[rows] * inflow[forest.zone_start[first:last]]
        else:
            root = placed.root
        here = voltage[start:stop]
        part = drop[start:stop]
        sums = np.empty((stop - start + 1, *drop.shape[1:]), dtype=np.complex128)
        sums[0] = 0
        accumulate(part.take(forest.by_end[start:stop] - start, axis=0), sums[1:])
        np.take(sums, forest.ended[start:stop] - start, axis=0, out=here, mode="clip")
        accumulate(part, part)
        here -= part
        here += root if last - first == 1 else root[forest.zone[start:stop] - first]
    return voltage


def accumulate(values: Complex, out: Complex) -> None:
    """Prefix sum over the places; wide batches go row by row, which stays in cache.

    values : (place, ...) complex
    out : (place, ...) complex, may be the same array
    """
    if values[0].size < 16:
        np.add.accumulate(values, axis=0, out=out)
        return
    out[0] = values[0]
    for row in range(1, values.shape[0]):
        np.add(out[row - 1], values[row], out=out[row])


def sweep(placed: Placed, forest: Forest, voltage: Complex) -> Complex:
    """One whole sweep: the currents at these voltages, and the voltages those currents give.

    placed : Placed
    forest : Forest
    voltage : (live, k, batch) complex [V]
    Returns : (live, k, batch) complex [V]
    Source : Shirmohammadi, Hong, Semlyen, Luo, A compensation-based power flow method for weakly meshed
        distribution and transmission networks, IEEE Trans. Power Systems 3 (1988) 753-762
    """
    return forward(placed, forest, backward(placed, forest, currents(placed, voltage)))
