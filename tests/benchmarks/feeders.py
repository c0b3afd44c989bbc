"""Invented feeders of any size for benchmarks, and SciPy's sparse LU fixed point on the same rows."""

from time import process_time

import numpy as np
from scipy.sparse import csc_array
from scipy.sparse.linalg import splu

from solver import Network

VOLTS = 11e3 / 3**0.5
EMPTY = np.zeros((0, 1), dtype=complex)
NONE = np.zeros(0, dtype=np.intp)


def feeder(count, drop=0.06, near=20, seed=1):
    """A radial feeder: each node hangs on one of the last few and has a load; names and ends shuffled."""
    rng = np.random.default_rng(seed)
    above = np.maximum(0, np.arange(count) - 1 - rng.integers(0, near, count))
    z = (0.3 + 0.25j) * rng.uniform(0.5, 1.5, count)
    load = rng.uniform(0, 1, count) * 1000 * (0.9 + 0.4359j)
    load[0] = 0
    z *= drop * VOLTS / _largest_drop(above, z, load)
    name = rng.permutation(count)
    a, b = name[above[1:]], name[1:]
    flip = rng.random(count - 1) < 0.5
    power = np.empty(count, dtype=complex)
    power[name] = load
    return Network(
        node_count=count,
        conductors=1,
        source_node=name[:1],
        source_voltage=np.full((1, 1, 1), VOLTS + 0j),
        line_from=np.where(flip, b, a),
        line_to=np.where(flip, a, b),
        line_z=z[1:, None, None, None],
        line_y=np.zeros((count - 1, 1, 1, 1), dtype=complex),
        transformer_from=NONE,
        transformer_to=NONE,
        transformer_ratio=EMPTY,
        transformer_z=EMPTY,
        transformer_y=np.zeros((0, 2, 1), complex),
        load_node=np.arange(count),
        load_power=power[:, None, None],
        load_reference=np.full((count, 1, 1), VOLTS),
        load_mix=np.tile([1.0, 0.0, 0.0], (count, 1)),
        shunt_node=NONE,
        shunt_y=np.zeros((0, 1, 1, 1), dtype=complex),
    )


def _largest_drop(above, z, load):
    """Largest drop in volts, to first order."""
    carried, drop = load.copy(), np.zeros(above.size)
    for node in range(above.size - 1, 0, -1):
        carried[above[node]] += carried[node]
    for node in range(1, above.size):
        drop[node] = drop[above[node]] + (z[node] * np.conj(carried[node])).real / VOLTS
    return drop.max()


def fixed_point(network, **options):
    """Voltages by Y V = -I(V) with one LU factorisation, iterated to the solver's own bound of 1e-12.

    Returns (node,) voltages and the seconds of assembly, factorisation and iteration.
    """
    began = process_time()
    count, a, b = network.node_count, network.line_from, network.line_to
    y = 1 / network.line_z[:, 0, 0, 0]
    rows, columns = np.concatenate((a, b, a, b)), np.concatenate((a, b, b, a))
    whole = csc_array((np.concatenate((y, y, -y, -y)), (rows, columns)), shape=(count, count))
    free = np.flatnonzero(np.arange(count) != network.source_node[0])
    below = whole[free]
    inner, held = below[:, free].tocsc(), below[:, network.source_node] @ network.source_voltage[:, 0, 0]
    drawn = np.zeros(count, dtype=complex)
    np.add.at(drawn, network.load_node, np.conj(network.load_power[:, 0, 0]))
    drawn = drawn[free]
    assembled = process_time()
    factors = splu(inner, **options)
    factored = process_time()
    voltage, change = np.full(count - 1, network.source_voltage[0, 0, 0]), 1.0
    while change >= 1e-12:
        image = factors.solve(-drawn / np.conj(voltage) - held)
        change, voltage = np.abs(image - voltage).max() / VOLTS, image
    done = process_time()
    answer = np.full(count, network.source_voltage[0, 0, 0])
    answer[free] = voltage
    return answer, (assembled - began, factored - assembled, done - factored)
