"""What must hold for any layout: conservation, renumbering, equivalence, scaling."""

from dataclasses import replace

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from networks import POWER, build
from random_networks import random_network

from solver import Status, solve
from solver.network import PHYSICAL
from solver.share import pick

few = settings(max_examples=12, deadline=None)
seeds = st.integers(0, 10**6)


def near(a, b, bound=1e-10):
    return np.max(np.abs(a / b - 1)) < bound


@few
@given(seeds)
def test_power_balance(seed):
    solution = solve(random_network(seed, nodes=25, width=2))
    given_ = solution.source_power.sum(axis=(0, 1))
    taken = solution.load_power.sum(axis=(0, 1)) + solution.shunt_power.sum(axis=(0, 1))
    lost = solution.line_loss.sum(axis=0) + solution.transformer_loss.sum(axis=0)
    assert np.all(np.abs(given_ - taken - lost) < 1e-10 * np.abs(given_).max())
    assert np.all(solution.closure < 1e-10)


@few
@given(seeds)
def test_current_balance_at_every_node(seed):
    network = random_network(seed, nodes=25)
    solution = solve(network)
    net = np.zeros(network.node_count, dtype=complex)
    np.add.at(net, network.source_node, solution.source_current[:, 0, 0])
    np.add.at(net, network.line_from, -solution.line_in[:, 0, 0])
    np.add.at(net, network.line_to, solution.line_out[:, 0, 0])
    np.add.at(net, network.transformer_from, -solution.transformer_in[:, 0, 0])
    np.add.at(net, network.transformer_to, solution.transformer_out[:, 0, 0])
    np.add.at(net, network.load_node, -solution.load_current[:, 0, 0])
    shunt = np.conj(solution.shunt_power[:, 0, 0] / solution.voltage[network.shunt_node, 0, 0])
    np.add.at(net, network.shunt_node, -shunt)
    size = np.zeros(network.node_count)
    np.add.at(size, network.line_to, np.abs(solution.line_out[:, 0, 0]))
    np.add.at(size, network.transformer_to, np.abs(solution.transformer_out[:, 0, 0]))
    assert np.all(np.abs(net) < 1e-9 * size.max())


@few
@given(seeds)
def test_renumbering_changes_nothing(seed):
    network = random_network(seed, nodes=25)
    rng = np.random.default_rng(seed)
    name = rng.permutation(network.node_count)
    changes = {
        f: name[getattr(network, f)]
        for f in ("source_node", "line_from", "line_to", "transformer_from", "transformer_to", "load_node")
    }
    turned = replace(network, **changes, shunt_node=name[network.shunt_node])
    rows = rng.permutation(network.line_from.size)
    turned = replace(
        turned,
        **{f: getattr(turned, f)[rows] for f in ("line_from", "line_to", "line_z", "line_y")},
    )
    one, two = solve(network), solve(turned)
    assert near(two.voltage[name], one.voltage)
    assert np.allclose(two.line_in, one.line_in[rows], rtol=1e-9, atol=1e-9 * np.abs(one.line_in).max())


@few
@given(seeds)
def test_reversing_ends_changes_nothing(seed):
    network = random_network(seed, nodes=25)
    ratio = network.transformer_ratio
    turned = replace(
        network,
        line_from=network.line_to,
        line_to=network.line_from,
        transformer_from=network.transformer_to,
        transformer_to=network.transformer_from,
        transformer_ratio=1 / ratio,
        transformer_z=network.transformer_z * np.abs(ratio) ** 2,
        transformer_y=network.transformer_y[:, ::-1],
    )
    one, two = solve(network), solve(turned)
    assert near(two.voltage, one.voltage)
    scale = np.abs(one.transformer_in).max()
    assert np.allclose(two.line_in, -one.line_out, atol=1e-9 * np.abs(one.line_in).max())
    assert np.allclose(two.transformer_in, -one.transformer_out, atol=1e-9 * scale)
    assert np.allclose(two.transformer_loss, one.transformer_loss, rtol=1e-8)


@few
@given(seeds, st.floats(1e-2, 1e2), st.floats(1e-2, 1e2))
def test_scaling(seed, volts, power):
    """Volts times s and powers times p: impedances follow as s² / p, currents as p / s."""
    network = random_network(seed, nodes=20)
    ohm = volts**2 / power
    scaled = replace(
        network,
        source_voltage=network.source_voltage * volts,
        load_reference=network.load_reference * volts,
        load_power=network.load_power * power,
        line_z=network.line_z * ohm,
        line_y=network.line_y / ohm,
        shunt_y=network.shunt_y / ohm,
        transformer_z=network.transformer_z * ohm,
        transformer_y=network.transformer_y / ohm,
    )
    one, two = solve(network), solve(scaled)
    assert near(two.voltage, one.voltage * volts)
    scale = np.abs(one.source_power).max() * power
    assert np.allclose(two.source_power, one.source_power * power, rtol=0, atol=1e-9 * scale)


@few
@given(seeds)
def test_batch_equals_single_solves(seed):
    network = random_network(seed, nodes=25, width=4)
    together = solve(network)
    for point in range(4):
        alone = solve(pick(network, np.array([point])))
        assert near(together.voltage[..., point], alone.voltage[..., 0], 1e-13)
        assert together.iterations[point] == alone.iterations[0]


@few
@given(seeds, st.complex_numbers(min_magnitude=0.01, max_magnitude=1))
def test_unity_transformer_equals_its_impedance(seed, z):
    z = abs(z.real) + 1j * abs(z.imag)
    loads = [(2, 3000 + 1000j, 230, POWER)]
    line = solve(build(3, [(0, 230)], [(0, 1, 0.1), (1, 2, z)], loads=loads))
    unit = solve(build(3, [(0, 230)], [(0, 1, 0.1)], [(1, 2, 1, z)], loads=loads))
    assert line.status == unit.status
    if line.solved:
        assert near(unit.voltage, line.voltage, 1e-12)
        assert np.allclose(unit.transformer_loss, line.line_loss[1])


@few
@given(seeds, st.integers(0, 24))
def test_a_closed_switch_changes_nothing(seed, node):
    """Half of a node's branches and loads moved across a line of zero impedance."""
    network = random_network(seed, nodes=25)
    rng = np.random.default_rng(seed)
    new = network.node_count

    def moved(rows):
        return np.where((rows == node) & (rng.random(rows.size) < 0.5), new, rows)

    zero = np.zeros((1, 1, 1, 1), dtype=complex)
    switched = replace(
        network,
        node_count=new + 1,
        line_from=np.append(moved(network.line_from), node),
        line_to=np.append(moved(network.line_to), new),
        line_z=np.concatenate((network.line_z, zero)),
        line_y=np.concatenate((network.line_y, zero)),
        load_node=moved(network.load_node),
        shunt_node=moved(network.shunt_node),
        transformer_to=moved(network.transformer_to),
    )
    one, two = solve(network), solve(switched)
    assert near(two.voltage[:new], one.voltage)
    assert abs(two.voltage[new, 0, 0] / two.voltage[node, 0, 0] - 1) < 1e-14


def test_a_zero_impedance_transformer_is_ideal():
    network = build(2, [(0, 230)], transformers=[(0, 1, 0.5)], loads=[(1, 1000 + 500j)])
    solution = solve(network)
    assert solution.voltage[1, 0, 0] == 460
    assert solution.transformer_in[0, 0, 0] == 2 * solution.transformer_out[0, 0, 0]


def test_step_up_and_down_cuts_the_line_loss_towards_one_over_n_squared():
    """Law: the same load over the same line, stepped up and down again n times, I²R falls as 1/n²."""
    z, load = 0.2 + 0.1j, (3, 20e3, 400, POWER)
    steps = np.array([1, 2, 5, 10, 20, 50, 100.0])
    network = build(4, [(0, 400)], [(1, 2, z)], [(0, 1, 1 / steps), (2, 3, steps)], loads=[load])
    share = solve(network).line_loss[0].real * steps**2
    limit = z.real * (20e3 / 400) ** 2  # current of the load at full voltage
    assert np.all(np.diff(share) < 0)
    assert abs(share[-1] / limit - 1) < 1e-5


def test_wide_batches_equal_single_solves():
    """More operating points than one block holds, some of which collapse."""
    shares = np.linspace(0, 5, 4000)
    network = random_network(5, nodes=20, units=3)
    wide = replace(network, load_power=network.load_power * shares)
    solution = solve(wide)
    assert len(solution.status) == 4000
    for point in range(0, 4000, 517):
        alone = solve(pick(wide, np.array([point])))
        assert alone.status[0] is solution.status[point]
        if alone.solved:
            assert near(solution.voltage[..., point], alone.voltage[..., 0], 1e-13)


def test_conductors_side_by_side_are_solved_as_three_networks():
    """k = 3 without coupling is three layouts of k = 1; coupling by a full matrix is checked by hand."""
    network = random_network(9, nodes=15, units=3, width=2)
    eye = np.eye(3)[None, :, :, None]
    triple = replace(
        network,
        conductors=3,
        source_voltage=np.repeat(network.source_voltage, 3, axis=1) * np.array([1, 0.98, 1.02])[:, None],
        line_z=network.line_z * eye,
        line_y=network.line_y * eye,
        shunt_y=network.shunt_y * eye,
        load_power=np.repeat(network.load_power, 3, axis=1),
        load_reference=np.repeat(network.load_reference, 3, axis=1),
    )
    three = solve(triple)
    for conductor, factor in enumerate((1, 0.98, 1.02)):
        one = solve(replace(network, source_voltage=network.source_voltage * factor))
        assert near(three.voltage[:, conductor], one.voltage[:, 0], 1e-11)
    assert np.all(three.closure < 1e-11)


def test_every_physical_array_may_be_one_wide_or_all():
    network = random_network(2, nodes=15, units=3, width=3)
    full = {
        name: np.ascontiguousarray(np.broadcast_to(a := getattr(network, name), (*a.shape[:-1], 3)))
        for name in PHYSICAL
    }
    assert near(solve(replace(network, **full)).voltage, solve(network).voltage, 1e-13)


def test_nothing_connected_is_solved():
    solution = solve(build(3, [(0, 230)], [(0, 1, 0.1)], [(1, 2, 10)]))
    assert solution.status == (Status.SOLVED,)
    assert solution.closure[0] == 0
    assert solution.voltage[2, 0, 0] == 23


def test_a_supply_alone_is_solved():
    solution = solve(build(1, [(0, 230)], loads=[(0, 1e3)]))
    assert solution.status == (Status.SOLVED,)
    assert abs(solution.source_power[0, 0, 0] - 1e3) < 1e-9
