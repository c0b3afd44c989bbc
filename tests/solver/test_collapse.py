"""Far down and close to the end: heavy impedances, mixes, unbalance, and the share where nothing is left."""

from dataclasses import replace

import numpy as np
import pytest
from networks import IMPEDANCE, build
from nodal import nodal
from random_networks import random_network
from scipy.optimize import brentq
from test_wires import random_layout
from wired import Layout, balanced
from wired_nodal import solution as wired_nodal

from solver import Status, largest_share, solve
from solver.share import scaled


def mixed(network, power, impedance):
    """All demand, no generation, in one mix; the rest is constant current."""
    mix = np.tile([power, 1 - power - impedance, impedance], (network.load_node.size, 1))
    demand = np.abs(network.load_power.real) * (1 + 0.3j)
    return replace(network, load_mix=mix, load_power=demand)


@pytest.mark.parametrize("times", [10, 100, 1000])
@pytest.mark.parametrize("seed", [0, 1, 2])
def test_impedances_always_have_an_answer(seed, times):
    network = mixed(random_network(seed, nodes=40, sources=1, units=3, loading=5.0 * times), 0, 1)
    solution = solve(network)
    assert solution.status == (Status.SOLVED,)
    assert np.max(np.abs(solution.voltage[:, 0, 0] / nodal(network) - 1)) < 1e-7
    assert solution.closure[0] < 1e-10


@pytest.mark.parametrize("seed", [1, 2, 3, 5])
def test_impedances_between_four_wires_always_have_an_answer(seed):
    layout = random_layout(seed, nodes=10, rings=seed % 3)
    layout.loads = [(n, i, j, 60 * abs(s), v, IMPEDANCE) for n, i, j, s, v, _ in layout.loads]
    solution = solve(layout.network())
    assert solution.solved
    assert solution.closure.max() < 1e-10
    for point in range(2):
        known = wired_nodal(layout, point)
        for (kind, node, conductor), volts in ((n, v) for n, v in known.items() if n[0] == "v"):
            ours = solution.voltage[node, conductor, point]
            assert abs(ours - volts) < 1e-8 * (6351 if node == 0 else 231), (kind, node, conductor)


def followed(network):
    """The nodal answer with constant power and current raised from nothing, or None where that ends."""
    reached, step = 0.0, 1.0
    volts = nodal(replace(network, load_mix=network.load_mix * [0, 0, 1]))
    while step > 1e-3:
        part = reached + step
        further = nodal(
            replace(network, load_mix=network.load_mix * [part, part, 1]),
            start=volts,
            tolerance=1e-11,
            sweeps=15,
        )
        if further is not None and np.min(np.abs(further / volts)) > 0.6:
            volts, reached = further, part
            step = min(2 * step, 1 - reached)
            if reached == 1:
                return volts
        else:
            step /= 2
    return None


def test_heavy_mixes_are_solved_exactly_where_an_operating_point_exists():
    rng, found = np.random.default_rng(1), []
    for seed in range(14):
        power = 10 ** rng.uniform(-3, -0.2)
        network = random_network(seed, nodes=20, sources=1, units=3, loading=5.0 * 10 ** rng.uniform(0, 2.5))
        network = mixed(network, 0.7 * power, 1 - power)
        solution, truth = solve(network), followed(network)
        assert solution.status == ((Status.NO_OPERATING_POINT if truth is None else Status.SOLVED),), seed
        if truth is not None:
            assert np.max(np.abs(solution.voltage[:, 0, 0] / truth - 1)) < 1e-8
        found.append(truth is not None)
    assert 4 < sum(found) < 11


@pytest.mark.parametrize(("power", "impedance"), [(1.0, 0.0), (0.6, 0.4), (0.2, 0.8)])
@pytest.mark.parametrize("length", [1, 50])
def test_largest_share_at_the_end_of_a_chain_behind_a_transformer(length, power, impedance):
    """Impedance joins the supply: E' = E Zl / (z + Zl), z' = z Zl / (z + Zl), S = E'² / 2(|z'| + b).

    Source : maximum power transfer at a fixed power factor, common practice, no source
    """
    high, line, unit, drawn = 6350.0, 2 + 1.5j, 0.02 + 0.08j, 100e3 * (0.9 + 0.3j)
    ratio, level = 27.5, 6350 / 27.5
    lines = [(0, 1, line)] + [(2 + i, 3 + i, (0.05 + 0.03j) / length) for i in range(length)]
    mix = (power, 0.0, impedance)
    loads = [(2 + length, drawn, level, mix)]
    network = build(3 + length, [(0, high)], lines, [(1, 2, ratio, unit)], loads=loads)
    z = line / ratio**2 + unit + 0.05 + 0.03j

    def left(share):
        y = np.conj(drawn) * impedance * share / level**2
        behind, e = z / (1 + z * y), level / abs(1 + z * y)
        b = (behind * np.conj(drawn)).real / abs(drawn)
        return e**2 / (2 * (abs(behind) + b)) - power * share * abs(drawn)

    largest = brentq(left, 1e-3, 1e3)
    found = largest_share(network).share
    assert found == pytest.approx(largest, rel=1e-3)
    assert found <= largest
    assert solve(scaled(network, np.array([0.9999 * largest]))).solved
    assert solve(scaled(network, np.array([1.0001 * largest]))).status == (Status.NO_OPERATING_POINT,)


def heavier(seed, share=1.0):
    layout = random_layout(seed, nodes=8, rings=seed % 2)
    for unit in layout.units:
        unit.v1 = np.atleast_1d(unit.v1)[:1]
    rows = [
        (n, i, j, 6 * s, v, np.array(m) * [1, 0.2, 0.2] + [0.3, 0, 0]) for n, i, j, s, v, m in layout.loads
    ]
    layout.loads = [
        (n, i, j, s * (share if s.real > 0 else 1), v, tuple(m / m.sum())) for n, i, j, s, v, m in rows
    ]
    return layout


@pytest.mark.parametrize("seed", [1, 3])
def test_largest_share_of_four_wires_unbalanced(seed):
    """The nodal answer goes on to 99.9 % of the share, and to 100.1 % it does not."""
    network = heavier(seed).network()
    found = largest_share(network)
    assert (found.line is None) != (found.transformer is None)
    near = wired_nodal(heavier(seed, 0.99 * found.share))
    for share, there in ((0.999, True), (1.001, False)):
        further = wired_nodal(
            heavier(seed, share * found.share),
            start=lambda names: np.array([near[n] for n in names]),
            sweeps=15,
        )
        solution = solve(scaled(network, np.array([share * found.share])))
        if not there:
            assert further is None or max(abs(further[n] - near[n]) for n in near if n[0] == "v") > 60
            assert solution.status == (Status.NO_OPERATING_POINT,)
            continue
        assert solution.solved
        for (kind, node, conductor), volts in ((n, v) for n, v in further.items() if n[0] == "v"):
            assert abs(solution.voltage[node, conductor, 0] - volts) < 1e-5, (kind, node, conductor)


@pytest.mark.parametrize("seed", [4, 7])
def test_no_answer_of_another_branch(seed):
    """Beyond the end there are answers that no rising load leads to, as where loads stand in series."""
    shares = np.linspace(0.25, 7, 28)
    solution = solve(scaled(heavier(seed).network(), shares))
    solved = [s is Status.SOLVED for s in solution.status]
    assert 0 < sum(solved) < 28
    assert solved == sorted(solved, reverse=True)
    steps = np.abs(np.diff(solution.voltage[2:, :, : sum(solved)], axis=-1))
    assert np.nanmax(steps) < 30


def test_a_ring_and_its_switch_far_down():
    lines = [(0, 1, 0.4 + 0.3j), (0, 2, 0.7 + 0.2j), (1, 2, 0)]
    network = build(3, [(0, 230)], lines, loads=[(2, 60e3, 230, (0.02, 0.03, 0.95))])
    z = 1 / (1 / (0.4 + 0.3j) + 1 / (0.7 + 0.2j))
    alone = build(2, [(0, 230)], [(0, 1, z)], loads=[(1, 60e3, 230, (0.02, 0.03, 0.95))])
    assert solve(network).voltage[2, 0, 0] == pytest.approx(solve(alone).voltage[1, 0, 0], rel=1e-10)


def test_a_side_without_earth_far_down():
    layout = Layout(
        2,
        [(0, balanced(230))],
        [(0, 1, (0, 1, 2), 0.5 + 0.3j)],
        [],
        [(1, i, (i + 1) % 3, 40e3 * (i + 1), 400, IMPEDANCE) for i in range(3)],
    )
    solution, known = solve(layout.network()), wired_nodal(layout)
    for i in range(3):
        assert solution.voltage[1, i, 0] == pytest.approx(known[("v", 1, i)], rel=1e-8)
