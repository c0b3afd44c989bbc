"""Closed rounds: rings, branches side by side, supplies joined, taps apart, and rounds without a solution."""

from dataclasses import replace

import numpy as np
import pytest
from networks import build, feeder
from nodal import nodal
from random_networks import random_network

from solver import Joined, Loop, Status, Trouble, grow, rounds, solve, transformer

VOLTS = 400 / 3**0.5


def meshed(seed, closings=4, **options):
    """A random layout with further lines between nodes of like volts, and transformers side by side."""
    rng = np.random.default_rng(1000 + seed)
    network = random_network(seed, **options)
    level = np.abs(solve(network).voltage[:, 0, 0])
    angle = np.angle(solve(network).voltage[:, 0, 0])
    live = np.flatnonzero(np.isfinite(level))
    pairs = []
    for _ in range(400):
        a, b = rng.choice(live, 2, replace=False)
        near = (
            abs(level[a] / level[b] - 1) < 0.06 and abs(np.angle(np.exp(1j * (angle[a] - angle[b])))) < 0.08
        )
        if near and len(pairs) < closings:
            pairs.append((a, b))
    assert len(pairs) == closings
    z = [0.004 * level[a] ** 2 / 2e4 * complex(*rng.uniform(0.5, 1.5, 2)) for a, b in pairs]
    width = network.line_z.shape[-1]
    more = np.array(z)[:, None, None, None] * np.ones((1, 1, 1, width))
    beside = rng.integers(0, network.transformer_from.size, 2 if network.transformer_from.size else 0)
    tap = 1 + 0.025 * rng.integers(-1, 2, (beside.size, 1))
    return replace(
        network,
        line_from=np.append(network.line_from, [a for a, _ in pairs]),
        line_to=np.append(network.line_to, [b for _, b in pairs]),
        line_z=np.concatenate((network.line_z, more)),
        line_y=np.concatenate(
            (network.line_y, 1j * np.ones((closings, 1, 1, network.line_y.shape[-1])) / 1e4 / level.max())
        ),
        transformer_from=np.append(network.transformer_from, network.transformer_from[beside]),
        transformer_to=np.append(network.transformer_to, network.transformer_to[beside]),
        transformer_ratio=np.concatenate(
            (network.transformer_ratio, network.transformer_ratio[beside] * tap)
        ),
        transformer_z=np.concatenate((network.transformer_z, network.transformer_z[beside] * 1.3)),
        transformer_y=np.concatenate((network.transformer_y, network.transformer_y[beside])),
    )


@pytest.mark.parametrize("seed", range(12))
def test_random_meshed_layouts(seed):
    network = meshed(seed, nodes=15 + 4 * seed, sources=1 + seed % 3, units=seed % 6, width=1 + seed % 3)
    solution = solve(network)
    assert solution.solved
    assert len(rounds(network, solution.forest)) == 4 + (2 if network.transformer_from.size else 0)
    for point in range(network.batch):
        truth = nodal(network, point)
        assert np.max(np.abs(solution.voltage[:, 0, point] / truth - 1)) < 1e-9
        assert solution.closure[point] < 1e-10


@pytest.mark.parametrize("seed", [2, 5])
def test_currents_of_closing_branches_follow_from_the_voltages(seed):
    network = meshed(seed, nodes=30, units=5, sources=2)
    solution = solve(network)
    v = solution.voltage[:, 0]
    first, last = v[network.line_from], v[network.line_to]
    z, y = network.line_z[:, 0, 0], network.line_y[:, 0, 0]
    through = (first - last) / z
    scale = np.abs(through).max()
    assert np.allclose(solution.line_in[:, 0], through + y / 2 * first, atol=1e-6 * scale)
    one, two = v[network.transformer_from], v[network.transformer_to]
    out = (one / network.transformer_ratio - two) / network.transformer_z - network.transformer_y[:, 1] * two
    assert np.allclose(solution.transformer_out[:, 0], out, atol=1e-6 * np.abs(out).max())


@pytest.mark.parametrize("seed", [1, 4])
def test_the_order_of_branches_and_supplies_changes_nothing(seed):
    network = meshed(seed, nodes=30, units=4, sources=3)
    rng = np.random.default_rng(seed)
    line, unit = rng.permutation(network.line_from.size), rng.permutation(network.transformer_from.size)
    source = rng.permutation(network.source_node.size)
    turned = replace(
        network,
        source_node=network.source_node[source],
        source_voltage=network.source_voltage[source],
        line_from=network.line_to[line],
        line_to=network.line_from[line],
        line_z=network.line_z[line],
        line_y=network.line_y[line],
        transformer_from=network.transformer_from[unit],
        transformer_to=network.transformer_to[unit],
        transformer_ratio=network.transformer_ratio[unit],
        transformer_z=network.transformer_z[unit],
        transformer_y=network.transformer_y[unit],
    )
    one, two = solve(network), solve(turned)
    assert np.allclose(two.voltage, one.voltage, rtol=1e-10, atol=0)
    assert np.allclose(two.line_in, -one.line_out[line], rtol=0, atol=1e-8 * np.abs(one.line_in).max())
    assert np.allclose(
        two.source_current, one.source_current[source], rtol=0, atol=1e-8 * np.abs(one.line_in).max()
    )


def pair(tap_1, tap_2, uk=(4, 4), rating=(500e3, 500e3), loads=()):
    rows = []
    for tap, percent, kva in zip((tap_1, tap_2), uk, rating, strict=True):
        z = transformer.short_circuit(percent, 0, kva, 400)
        rows.append((0, 1, 27.5 * np.asarray(tap), z))
    return build(2, [(0, 11e3 / 3**0.5)], transformers=rows, loads=loads)


def test_unequal_taps_circulate_with_nothing_connected():
    """Ic = ΔE / (Z1 + Z2), at 5 % apart and uk 4 % each 62 % of rated current.

    Source : common practice, no source
    """
    network = pair(1.0, 1.05)
    solution = solve(network)
    e = 11e3 / 3**0.5 / 27.5 / np.array([1.0, 1.05])
    circulating = (e[0] - e[1]) / network.transformer_z[:, 0].sum()
    assert solution.transformer_out[:, 0, 0] == pytest.approx([circulating, -circulating])
    rated = 500e3 / 3**0.5 / 400
    assert abs(circulating) / rated == pytest.approx(0.05 / 1.05 / 0.08)
    assert abs(solution.source_current[0, 0, 0]) > 0
    assert solution.closure[0] < 1e-12


def test_like_units_share_and_unlike_impedances_share_inversely():
    load = [(1, 300e3 / 3 * (0.9 + 0.3j), VOLTS, (1, 0, 0))]
    out = solve(pair(1.0, 1.0, loads=load)).transformer_out[:, 0, 0]
    assert out[0] == pytest.approx(out[1])
    out = solve(pair(1.0, 1.0, uk=(4, 6), loads=load)).transformer_out[:, 0, 0]
    assert out[0] / out[1] == pytest.approx(6 / 4)


def test_taps_of_a_ring_in_one_batch():
    taps = 1 + 0.025 * np.arange(-2, 3)
    load = [(1, 100e3 * (0.9 + 0.3j), VOLTS, (0.3, 0.3, 0.4))]
    together = solve(pair(1.0, taps, loads=load))
    assert together.solved
    for point, tap in enumerate(taps):
        alone = solve(pair(1.0, tap, loads=load))
        assert together.voltage[..., point] == pytest.approx(alone.voltage[..., 0], rel=1e-12)
        assert together.transformer_out[..., point] == pytest.approx(alone.transformer_out[..., 0], rel=1e-9)


def test_a_switch_closes_a_ring_without_impedance_of_its_own():
    lines = [(0, 1, 0.1 + 0.1j), (0, 2, 0.2 + 0.1j), (1, 2, 0)]
    solution = solve(build(3, [(0, VOLTS)], lines, loads=[(2, 10e3)]))
    assert solution.solved
    assert solution.voltage[1, 0, 0] == pytest.approx(solution.voltage[2, 0, 0], rel=1e-14)
    truth = solve(
        build(2, [(0, VOLTS)], [(0, 1, 1 / (1 / (0.1 + 0.1j) + 1 / (0.2 + 0.1j)))], loads=[(1, 10e3)])
    )
    assert solution.voltage[2, 0, 0] == pytest.approx(truth.voltage[1, 0, 0], rel=1e-12)
    assert solution.line_in[2, 0, 0] == pytest.approx(solution.line_in[0, 0, 0], rel=1e-9)


def test_a_loop_without_impedance_is_named():
    lines = [(0, 1, 0.1), (1, 2, 0), (2, 3, 0), (3, 1, 0), (0, 3, 0.2)]
    trouble = solve(build(4, [(0, VOLTS)], lines)).forest
    assert isinstance(trouble, Trouble)
    (loop,) = trouble.loops
    assert sorted(loop.lines) == [1, 2, 3]
    assert (trouble.joined, trouble.groups) == ((), ())


def test_supplies_joined_through_a_switch_are_named():
    lines = [(0, 1, 0.1), (0, 2, 0), (2, 3, 0)]
    solution = solve(build(4, [(0, VOLTS), (3, 1.01 * VOLTS)], lines))
    assert solution.status == (Status.INVALID,)
    assert solution.forest == Trouble(joined=(Joined((0, 1), (1, 2), ()),))


def test_vector_groups_that_do_not_meet_are_named():
    ratio = [27.5 * np.exp(1j * np.pi / 6 * transformer.clock(group)) for group in ("Dyn11", "Yyn0", "Dyn11")]
    z = transformer.short_circuit(4, 5e3, 500e3, 400)
    high = [(0, 11e3 / 3**0.5)]
    solution = solve(build(2, high, transformers=[(0, 1, ratio[0], z), (0, 1, ratio[1], z)]))
    assert solution.forest == Trouble(groups=(Loop((), (0, 1)),)) or solution.forest == Trouble(
        groups=(Loop((), (1, 0)),)
    )
    assert solve(build(2, high, transformers=[(0, 1, ratio[0], z), (0, 1, ratio[2], z)])).solved
    apart = [(0, 11e3 / 3**0.5), (2, VOLTS)]
    across = solve(build(3, apart, [(1, 2, 0.1)], [(0, 1, ratio[0], z)]))
    assert isinstance(across.forest, Trouble)
    assert across.forest.groups[0].transformers == (0,)
    led = [(0, 11e3 / 3**0.5), (2, VOLTS * np.exp(1j * np.pi / 6))]
    assert solve(build(3, led, [(1, 2, 0.1)], [(0, 1, ratio[0], z)])).solved


def test_a_branch_onto_its_own_node_carries_nothing():
    solution = solve(build(2, [(0, VOLTS)], [(0, 1, 0.1), (1, 1, 0.2)], loads=[(1, 5e3)]))
    assert solution.solved
    assert abs(solution.line_in[1, 0, 0]) < 1e-12


def test_ring_of_33_nodes_equals_the_nodal_solution():
    _, network = feeder("n33", closed=(33, 34, 35, 36, 37))
    assert np.max(np.abs(solve(network).voltage[:, 0, 0] / nodal(network) - 1)) < 1e-11
    assert len(rounds(network, grow(network))) == 5


def test_too_much_load_in_a_ring_has_no_operating_point():
    lines = [(0, 1, 0.1 + 0.1j), (0, 2, 0.2 + 0.1j), (1, 2, 0.1)]
    solution = solve(build(3, [(0, VOLTS)], lines, loads=[(2, np.array([10e3, 1e6]))]))
    assert solution.status == (Status.SOLVED, Status.NO_OPERATING_POINT)
