"""Against an independent nodal solution: admittance matrix, Newton, SciPy."""

import numpy as np
import pytest
from networks import feeder
from nodal import nodal
from random_networks import random_network

from solver import Status, solve


@pytest.mark.parametrize("seed", range(24))
def test_random_layouts(seed):
    network = random_network(
        seed, nodes=12 + 4 * seed, sources=1 + seed % 4, units=seed % 9, width=1 + seed % 3
    )
    solution = solve(network)
    assert solution.solved
    for point in range(network.batch):
        truth = nodal(network, point)
        assert np.max(np.abs(solution.voltage[:, 0, point] / truth - 1)) < 1e-9
        assert solution.closure[point] < 1e-11


@pytest.mark.parametrize("loading", [5.0, 10.0, 20.0])
def test_heavy_loading(loading):
    network = random_network(7, nodes=25, units=4, loading=loading)
    solution = solve(network)
    truth = nodal(network, tolerance=1e-12)
    assert truth is not None
    assert solution.status == (Status.SOLVED,)
    assert np.max(np.abs(solution.voltage[:, 0, 0] / truth - 1)) < 1e-9


def test_33_node_feeder():
    _, network = feeder("n33")
    voltage = solve(network).voltage[:, 0, 0]
    assert np.max(np.abs(voltage / nodal(network) - 1)) < 1e-12


@pytest.mark.parametrize("seed", [3, 11])
def test_branch_figures_follow_from_the_voltages(seed):
    """Currents at both ends, recomputed from node voltages through each branch's own admittance form."""
    network = random_network(seed, nodes=40, units=8)
    solution = solve(network)
    v = solution.voltage
    first, last = v[network.line_from, 0], v[network.line_to, 0]
    z, y = network.line_z[:, 0, 0], network.line_y[:, 0, 0]
    through = (first - last) / z
    scale = np.abs(through).max()
    assert np.allclose(solution.line_in[:, 0], through + y / 2 * first, atol=1e-6 * scale)
    assert np.allclose(solution.line_out[:, 0], through - y / 2 * last, atol=1e-6 * scale)
    entering = first * np.conj(solution.line_in[:, 0])
    leaving = last * np.conj(solution.line_out[:, 0])
    assert np.allclose(entering - leaving, solution.line_loss, atol=1e-6 * np.abs(entering).max())
    one, two = v[network.transformer_from], v[network.transformer_to]
    into, out = one * np.conj(solution.transformer_in), two * np.conj(solution.transformer_out)
    assert np.allclose((into - out)[:, 0], solution.transformer_loss, atol=1e-6 * np.abs(into).max())
