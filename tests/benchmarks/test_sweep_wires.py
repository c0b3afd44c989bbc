"""How fast four wires are, in ratios taken in one run on CPU time. Printed, never asserted.

`FAREND_BENCHMARK=1 pytest -s tests/benchmarks/test_sweep_wires.py` measures at full size.
"""

import os
from dataclasses import replace
from time import process_time

import numpy as np
import pytest
from feeders import VOLTS, feeder
from scipy.sparse import csc_array
from scipy.sparse.linalg import splu

from solver import grow, solve
from solver.placed import put
from solver.settle import settle
from solver.solving import no_load
from solver.windings import none
from solver.wires import Wires

FULL = os.environ.get("FAREND_BENCHMARK") == "1"
SIZES = (1_000, 10_000) if FULL else (100,)
PHASES = np.exp(-2j * np.pi / 3 * np.arange(3))
DENSE = {"permc_spec": "MMD_AT_PLUS_A", "diag_pivot_thresh": 0.0, "options": {"SymmetricMode": True}}


def four_wire(count):
    """The feeder with a neutral of its own, coupled conductors, and loads of unlike size on each phase."""
    one, rng = feeder(count), np.random.default_rng(2)
    shape = 0.8 * np.eye(4) + 0.2
    split = rng.uniform(0.6, 1.4, (count, 4))
    split[:, 3] = 0
    source = np.append(VOLTS * PHASES, 0)[None, :, None]
    wires = Wires(
        line_has=np.ones((count - 1, 4), dtype=bool),
        source_has=np.ones((1, 4), dtype=bool),
        load_to=np.tile([3, 3, 3, -1], (count, 1)),
        earth_node=np.zeros(0, dtype=int),
        earth_conductor=np.zeros(0, dtype=int),
        earth_z=np.zeros((0, 1), dtype=complex),
        units=none(),
    )
    return replace(
        one,
        conductors=4,
        source_voltage=source,
        line_z=one.line_z * shape[..., None],
        line_y=np.zeros((count - 1, 4, 4, 1), dtype=complex),
        load_power=one.load_power * split[..., None],
        load_reference=np.repeat(one.load_reference, 4, axis=1),
        shunt_y=np.zeros((0, 4, 4, 1), dtype=complex),
        wires=wires,
    )


def fixed_point(network, **options):
    """(node, 4) volts by one LU of the nodal matrix, iterated to 1e-12; seconds of its three steps."""
    began = process_time()
    count, a, b = network.node_count, network.line_from, network.line_to
    y = np.linalg.inv(network.line_z[..., 0])
    rows = np.concatenate(
        [4 * ends[:, None, None] + np.arange(4)[:, None] + 0 * y.real for ends in (a, b, a, b)]
    )
    columns = np.concatenate([4 * ends[:, None, None] + np.arange(4) + 0 * y.real for ends in (a, b, b, a)])
    values = np.concatenate((y, y, -y, -y))
    size = 4 * count
    whole = csc_array(
        (values.ravel(), (rows.ravel().astype(int), columns.ravel().astype(int))), shape=(size, size)
    )
    held = 4 * network.source_node[0] + np.arange(4)
    free = np.flatnonzero(~np.isin(np.arange(size), held))
    below = whole[free]
    inner, fixed = below[:, free].tocsc(), below[:, held] @ network.source_voltage[0, :, 0]
    power = np.conj(network.load_power[..., 0])
    assembled = process_time()
    factors = splu(inner, **options)
    factored = process_time()
    volts = np.tile(network.source_voltage[0, :, 0], (count, 1))
    change = 1.0
    while change >= 1e-12:
        across = volts[network.load_node, :3] - volts[network.load_node, 3:]
        current = np.zeros((count, 4), dtype=complex)
        drawn = power[:, :3] / np.conj(across)
        np.add.at(current, network.load_node, np.column_stack((drawn, -drawn.sum(axis=1))))
        image = volts.copy()
        image.reshape(-1)[free] = factors.solve(-current.reshape(-1)[free] - fixed)
        change, volts = np.abs(image - volts).max() / VOLTS, image
    return volts, (assembled - began, factored - assembled, process_time() - factored)


@pytest.mark.parametrize("count", SIZES)
def test_one_four_wire_solve_against_sparse_lu(count):
    network = four_wire(count)
    ours, theirs = [], {"as it comes": [], "best ordering": []}
    for _ in range(7 if FULL else 1):
        clock = [process_time()]
        forest = grow(network)
        clock.append(process_time())
        placed = put(network, forest)
        clock.append(process_time())
        settle(placed, forest, no_load(placed, forest, 4, 1))
        clock.append(process_time())
        solution = solve(network, forest=forest)
        clock.append(process_time())
        ours.append(np.diff(clock))
        for name, options in (("as it comes", {}), ("best ordering", DENSE)):
            volts, seconds = fixed_point(network, **options)
            theirs[name].append(seconds)
    assert solution.solved
    assert np.abs(solution.voltage[..., 0] - volts).max() < 1e-7 * VOLTS
    trees, rows, sweeps, known = 1e3 * np.median(ours, axis=0)
    print(f"\n{count} nodes of four wires, {solution.iterations[0]} sweeps; ms: trees {trees:.2f}, ", end="")
    print(f"rows {rows:.2f}, sweeps {sweeps:.2f}, solve {known:.2f}")
    for name, runs in theirs.items():
        assembly, factors, iteration = 1e3 * np.median(runs, axis=0)
        total = assembly + factors + iteration
        print(f"  LU {name}: assembly {assembly:.2f}, factors {factors:.2f}, iteration {iteration:.2f}")
        print(
            f"    volts, trees known {total / (rows + sweeps):6.2f}, every branch {total / known:6.2f}, ",
            end="",
        )
        print(f"trees too {total / (trees + known):6.2f}")
