"""Up to the largest load and not beyond it: two nodes in closed form, feeders by continuation."""

from dataclasses import replace

import numpy as np
import pytest
from networks import CURRENT, IMPEDANCE, POWER, build, feeder
from nodal import nodal
from random_networks import random_network
from wired import Layout, balanced

from solver import Status, largest_share, solve
from solver.share import scaled


def two_nodes(count=400, seed=1):
    """Random lines with the largest power each carries at a random angle, and voltages at any share of it.

    U⁴ + (2(PR + QX) - Us²) U² + (P² + Q²)(R² + X²) = 0 has a real root up to S = Us² / (2 (|Z| + b)),
    with b = R cosφ + X sinφ
    """
    rng = np.random.default_rng(seed)
    us, r = rng.uniform(100, 12000, count), 10 ** rng.uniform(-2, 1, count)
    x, phi = r * 10 ** rng.uniform(-1.5, 1.5, count), rng.uniform(-1.0, 1.5, count)
    z, b = np.hypot(r, x), r * np.cos(phi) + x * np.sin(phi)
    largest = us**2 / (2 * (z + b))

    def network(share):
        load = share * largest * np.exp(1j * phi)
        return build(2, [(0, us)], [(0, 1, r + 1j * x)], loads=[(1, load)])

    def root(share):
        s = share * largest
        half = us**2 / 2 - s * b
        return np.sqrt(half + np.sqrt(half**2 - (s * z) ** 2))

    return network, root


@pytest.mark.parametrize(("share", "bound"), [(0.1, 1e-12), (0.9, 1e-11), (0.99, 1e-10), (0.999, 1e-10)])
def test_upper_root_is_found_right_up_to_the_limit(share, bound):
    network, root = two_nodes()
    solution = solve(network(share))
    assert solution.solved
    assert np.max(np.abs(np.abs(solution.voltage[1, 0]) / root(share) - 1)) < bound
    assert np.all(solution.closure < 1e-9)


@pytest.mark.parametrize("share", [1.001, 1.1, 2.0, 10.0])
def test_beyond_the_limit_there_is_no_answer(share):
    network, _ = two_nodes()
    solution = solve(network(share))
    assert set(solution.status) == {Status.NO_OPERATING_POINT}
    assert np.isnan(solution.voltage).all()
    assert np.isnan(solution.closure).all()


def continued(network, low=0.5, high=20.0):
    """Largest share by Newton from one solved share to the next, halving the step at every failure."""
    voltage, step = nodal(scaled(network, np.array([low]))), 0.25
    while step > 1e-5:
        found = nodal(scaled(network, np.array([low + step])), start=voltage, tolerance=1e-10)
        if found is None or low + step > high:
            step /= 2
        else:
            voltage, low = found, low + step
    return low


def test_largest_share_of_the_33_node_feeder():
    _, network = feeder("n33")
    share = largest_share(network)
    assert share.share == pytest.approx(continued(network), rel=1e-3)
    assert (share.line, share.transformer) == (4, None)


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_largest_share_of_random_layouts(seed):
    network = random_network(seed, nodes=20, sources=1, units=3, loading=5.0)
    mixed = network.load_mix * [0.0, 0.1, 0.1] + [0.8, 0.0, 0.0]
    network = replace(network, load_mix=mixed / mixed.sum(axis=1, keepdims=True))
    share = largest_share(network).share
    assert share == pytest.approx(continued(network, 0.2), rel=1.5e-3)
    assert solve(scaled(network, np.array([share]))).solved
    assert not solve(scaled(network, np.array([share * 1.002]))).solved


def test_a_transformer_can_be_to_blame():
    network = build(3, [(0, 230)], [(0, 1, 0.01)], [(1, 2, 1, 0.5j)], loads=[(2, 40e3)])
    share = largest_share(network)
    assert (share.line, share.transformer) == (None, 0)
    assert share.share == pytest.approx(230**2 / (2 * abs(0.01 + 0.5j) + 2 * 0.01) / 40e3, rel=1e-3)


def test_loads_of_constant_impedance_know_no_limit():
    network = build(2, [(0, 230)], [(0, 1, 1)], loads=[(1, 50e3, 230, IMPEDANCE)])
    assert largest_share(network).share == np.inf


def test_a_heavy_constant_impedance_load_is_solved():
    """The plain sweep diverges here: the load has a third of the impedance of the line."""
    network = build(2, [(0, 230)], [(0, 1, 3)], loads=[(1, 230**2, 230, IMPEDANCE)])
    assert solve(network).voltage[1, 0, 0] == pytest.approx(230 / 4, rel=1e-11)


def test_constant_current_up_to_nothing_left():
    network = build(2, [(0, 230)], [(0, 1, 1)], loads=[(1, 230 * np.array([100.0, 220, 240]), 230, CURRENT)])
    solution = solve(network)
    assert np.abs(solution.voltage[1, 0, :2]) == pytest.approx([130, 10])
    assert solution.status[2] is Status.NO_OPERATING_POINT


def test_generation_counts_as_no_demand():
    network = build(2, [(0, 230)], [(0, 1, 0.5)], loads=[(1, 10e3), (1, -5e3, 1.0, POWER)])
    share = largest_share(network)
    assert share.share == pytest.approx((230**2 / (4 * 0.5) + 5e3) / 10e3, rel=1e-3)


def test_an_open_balance_is_no_answer(monkeypatch):
    """With the bound on the closure drawn below rounding, nothing counts as solved and no figure stands."""
    monkeypatch.setattr("solver.solving.OPEN", 1e-30)
    _, network = feeder("n33")
    solution = solve(network)
    assert solution.status == (Status.NOT_SETTLED,)
    assert np.isnan(solution.voltage).all()
    assert np.isnan(solution.line_in).all()


def test_a_warm_start_lands_on_the_same_answer():
    _, network = feeder("n33")
    cold = solve(network)
    warm = solve(network, forest=cold.forest, warm=cold.voltage)
    assert np.max(np.abs(warm.voltage / cold.voltage - 1)) < 1e-12
    assert warm.iterations[0] < cold.iterations[0]


def test_a_ring_carries_as_much_as_its_two_ways_side_by_side():
    one, two, power = 0.4 + 0.3j, 0.7 + 0.2j, 1e3 * (0.9 + 0.4j)
    ring = build(3, [(0, 230)], [(0, 1, one), (0, 2, two), (1, 2, 0)], loads=[(2, power)])
    z = 1 / (1 / one + 1 / two)
    largest = 230**2 / (2 * (abs(z) + (z * np.conj(power)).real / abs(power)))
    share = largest_share(ring)
    assert share.share == pytest.approx(largest / abs(power), rel=1e-3)
    assert share.share <= largest / abs(power)
    near = replace(ring, load_power=ring.load_power * 0.9995 * largest / abs(power))
    assert solve(near).solved


def test_one_phase_of_four_wires_carries_what_its_loop_does():
    phase, neutral, power = 0.4 + 0.3j, 0.5 + 0.2j, 1e3 * (0.9 + 0.4j)
    lines = [(0, 1, (0, 3), np.diag([phase, neutral])), (0, 2, (0, 1, 2, 3), np.eye(4) * 0.01)]
    loads = [(1, 0, 3, power, 230, POWER), (2, 1, 3, 100, 230, POWER)]
    network = Layout(3, [(0, balanced(230))], lines, [], loads).network()
    z = phase + neutral
    largest = 230**2 / (2 * (abs(z) + (z * np.conj(power)).real / abs(power)))
    share = largest_share(network)
    assert share.share == pytest.approx(largest / abs(power), rel=1e-3)
    assert (share.line, share.transformer) == (0, None)
    near = replace(network, load_power=network.load_power * 0.9995 * largest / abs(power))
    assert solve(near).solved
