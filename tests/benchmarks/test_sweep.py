"""How fast the sweep is, in ratios taken in one run on CPU time. Printed, never asserted.

`FAREND_BENCHMARK=1 pytest -s tests/benchmarks/test_sweep.py` measures at full size; without it the same
code runs small. The LU fixed point yields node voltages alone, the solver's `solve` every branch as well.
"""

import os
from dataclasses import replace
from time import process_time

import numpy as np
import pytest
from feeders import VOLTS, feeder, fixed_point

from solver import grow, solve
from solver.placed import put
from solver.settle import settle
from solver.share import pick
from solver.solving import no_load

FULL = os.environ.get("FAREND_BENCHMARK") == "1"
SIZES = (1_000, 10_000, 100_000) if FULL else (200, 400)
REPEATS = {1_000: 41, 10_000: 21, 100_000: 9} if FULL else {}
OPTIONS = {  # SciPy as it comes, and with the ordering that suits a symmetric tree best
    "as it comes": {},
    "best ordering": {
        "permc_spec": "MMD_AT_PLUS_A",
        "diag_pivot_thresh": 0.0,
        "options": {"SymmetricMode": True},
    },
}


def stages(network):
    """Seconds of each step of ours, and the seconds of whole solves without and with known trees."""
    clock = [process_time()]

    def lap(result):
        clock.append(process_time())
        return result

    forest = lap(grow(network))
    placed = lap(put(network, forest))
    lap(settle(placed, forest, no_load(placed, forest, 1, 1)))
    known = lap(solve(network, forest=forest))
    lap(solve(network))
    return known, np.diff(clock)


@pytest.mark.parametrize("count", SIZES)
def test_one_solve_against_sparse_lu(count):
    network = feeder(count)
    ours, theirs = [], {name: [] for name in OPTIONS}
    for _ in range(REPEATS.get(count, 2)):
        solution, seconds = stages(network)
        ours.append(seconds)
        for name, options in OPTIONS.items():
            voltage, seconds = fixed_point(network, **options)
            theirs[name].append(seconds)
    assert solution.solved
    assert np.max(np.abs(solution.voltage[:, 0, 0] - voltage)) < 1e-7 * VOLTS
    trees, rows, sweeps, known, whole = 1e3 * np.median(ours, axis=0)
    print(f"\n{count} nodes, {solution.iterations[0]} sweeps, closure {solution.closure[0]:.0e}; ms:")
    print(f"  ours: trees {trees:.2f}, rows {rows:.2f}, sweeps {sweeps:.2f}, solve {known:.2f}, {whole:.2f}")
    for name, runs in theirs.items():
        assembly, factors, iteration = 1e3 * np.median(runs, axis=0)
        total = assembly + factors + iteration
        print(f"  LU {name}: assembly {assembly:.2f}, factors {factors:.2f}, iteration {iteration:.2f}")
        print(f"    iteration alone, LU over sweeps           {iteration / sweeps:6.2f}")
        print(f"    node voltages, trees known                {total / (rows + sweeps):6.2f}")
        print(f"    solve with every branch, trees known      {total / known:6.2f}")
        print(f"    whole, trees and every branch             {total / whole:6.2f}")


def test_growth():
    sizes = (2_000, 6_000, 20_000, 60_000, 200_000) if FULL else (200, 400, 800)
    solved, compiled = [], []
    for count in sizes:
        network = feeder(count)
        runs = []
        for _ in range(7 if FULL else 2):
            began = process_time()
            forest = grow(network)
            grown = process_time()
            solution = solve(network, forest=forest)
            runs.append((grown - began, process_time() - grown))
            assert solution.solved
        seconds = np.min(runs, axis=0)
        compiled.append(seconds[0])
        solved.append(seconds[1])
    tiny = 1e-9
    for name, seconds in (("solve", solved), ("trees", compiled)):
        slope = np.polyfit(np.log(sizes), np.log(np.maximum(seconds, tiny)), 1)[0]
        print(f"\n{name}: {[f'{1e3 * s:.2f} ms' for s in seconds]} at {sizes}, fitted exponent {slope:.3f}")


def test_a_year_in_one_batch():
    """8 760 hours on 100 nodes against single solves of the same kernel; the singles are a scaled sample."""
    hours, sample = (8_760, 200) if FULL else (60, 5)
    network = feeder(100)
    share = 0.5 + 0.5 * np.sin(np.arange(hours) / 24 * 2 * np.pi) ** 2
    year = replace(network, load_power=network.load_power * share)
    forest = grow(year)
    began = process_time()
    together = solve(year, forest=forest)
    batch = process_time() - began
    assert together.solved
    points = np.linspace(0, hours - 1, sample).astype(int)
    hour = [pick(year, points[i : i + 1]) for i in range(sample)]
    began = process_time()
    alone = [solve(one, forest=forest) for one in hour]
    single = (process_time() - began) / sample * hours
    for point, one in zip(points, alone, strict=True):
        assert np.max(np.abs(together.voltage[..., point] - one.voltage[..., 0])) < 1e-11 * VOLTS
    print(f"\n{hours} hours: batch {batch:.2f} s, singles {single:.2f} s, ratio {single / batch:.1f}")
