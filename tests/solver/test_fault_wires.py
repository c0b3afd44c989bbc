"""Faults in the conductors themselves: against electrodes put there, closed forms and sequences."""

import numpy as np
import pytest
from test_wires import BETWEEN, DELTA, EARTHED, FOUR, HIGH, LOW, Z, random_layout
from wired import ABC, ABCN, A, B, C, Layout, N, Unit, balanced

from solver import fault, line, solve
from solver.fault_wires import _driven, _quiet, impedance_blocks, wire_faults
from solver.forest import grow
from solver.placed import put
from solver.share import pick
from solver.ties import Ties


def idle(layout):
    """Volts with nothing connected."""
    return solve(
        Layout(layout.nodes, layout.sources, layout.lines, layout.units, [], layout.earths).network()
    )


def bare(layout):
    """The layout without charging and iron, which faults leave out."""
    lines = [row[:4] for row in layout.lines]
    units = [Unit(u.start, u.end, u.one, u.two, u.clock, u.v1, u.v2, u.z) for u in layout.units]
    return Layout(layout.nodes, layout.sources, lines, units, [], layout.earths)


@pytest.mark.parametrize("seed", [0, 1, 2, 7])
def test_a_fault_is_an_electrode_of_no_impedance(seed):
    layout = bare(random_layout(seed, rings=seed % 3))
    volts = idle(layout).voltage[:, :, 0]
    nodes = np.arange(2, layout.nodes)
    found = wire_faults(impedance_blocks(layout.network(), nodes), volts[nodes])
    for node in nodes[::3]:
        for phase in np.flatnonzero(np.isfinite(volts[node, :3])):
            again = Layout(
                layout.nodes,
                layout.sources,
                layout.lines,
                layout.units,
                [],
                [*layout.earths, (node, phase, 1e-9)],
            )
            current = solve(again.network()).earth_current[-1, 0]
            assert found.phase_earth[node - 2, phase] == pytest.approx(abs(current), rel=1e-7)


def test_out_on_a_phase_and_back_on_the_neutral():
    phase, neutral = 0.2 + 0.04j, 0.4 + 0.05j
    layout = Layout(2, [(0, balanced(230.0))], [(0, 1, ABCN, line.four_wire(phase, neutral))])
    blocks = impedance_blocks(layout.network(), [1])
    found = wire_faults(blocks, balanced(230.0)[None])
    assert found.phase_neutral[0] == pytest.approx(230 / abs(phase + neutral))
    assert found.phase_earth[0] == pytest.approx(230 / abs(phase))
    assert found.three_phase[0] == pytest.approx(230 / abs(phase))
    assert found.phase_phase[0] == pytest.approx(3**0.5 * 230 / abs(2 * phase))


def test_balanced_faults_are_those_of_sequences():
    z1, z0 = 0.05 + 0.03j, 0.2 + 0.1j
    unit = Unit(0, 1, DELTA, EARTHED, 11, 11e3, 400.0, Z)
    layout = Layout(3, [(0, balanced(HIGH))], [(1, 2, ABC, line.symmetric(z1, z0))], [unit])
    volts = idle(layout).voltage[:, :, 0]
    found = wire_faults(impedance_blocks(layout.network(), [2]), volts[[2]])
    assert found.phase_earth[0] == pytest.approx(3 * LOW / abs(2 * (Z + z1) + Z + z0))
    assert found.three_phase[0] == pytest.approx(LOW / abs(Z + z1))
    assert found.phase_phase[0] == pytest.approx(3**0.5 / 2 * LOW / abs(Z + z1))
    assert fault.peak_factor(0) == pytest.approx(2)


def test_a_side_without_earth_has_no_earth_fault_current_but_faults_between_phases():
    unit = Unit(1, 0, DELTA, EARTHED, 11, 11e3, 400.0, Z)
    layout = Layout(3, [(0, balanced(LOW))], [(1, 2, ABC, 5 + 3j)], [unit], BETWEEN[:0])
    volts = idle(layout).voltage[:, :, 0]
    blocks = impedance_blocks(layout.network(), [2, 0])
    found = wire_faults(blocks, volts[[2, 0]])
    assert not blocks.earthed[0, :3].any()
    assert (found.phase_earth[0] == 0).all()
    assert np.isinf(found.three_phase[1]).all()
    high = Z * 27.5**2 + 5 + 3j
    assert found.three_phase[0] == pytest.approx(HIGH / abs(high))
    assert found.phase_phase[0] == pytest.approx(3**0.5 / 2 * HIGH / abs(high))


def test_a_lateral_has_what_it_has():
    lines = [(0, 1, ABCN, FOUR), (1, 2, (B, N), FOUR[np.ix_((B, N), (B, N))])]
    layout = Layout(4, [(0, balanced(LOW))], lines)
    volts = idle(layout).voltage[:, :, 0]
    found = wire_faults(impedance_blocks(layout.network(), [2, 3]), volts[[2, 3]])
    assert np.isfinite(found.phase_neutral[0]).tolist() == [False, True, False]
    assert np.isnan(found.phase_earth[0, [A, C]]).all()
    loop = 2 * (FOUR[B, B] + FOUR[N, N] - 2 * FOUR[B, N])
    assert found.phase_neutral[0, B] == pytest.approx(LOW / abs(loop))
    assert np.isnan(found.phase_phase[0]).all()
    assert np.isnan(found.three_phase).all()
    assert np.isnan(found.phase_earth[1]).all()


@pytest.mark.parametrize("seed", range(8))
def test_sums_along_the_trees_are_what_unit_currents_find(seed):
    """Rings, electrodes, earthed stars beside deltas: what is summed against what is driven, node by node."""
    layout = bare(random_layout(seed, rings=seed % 4))
    network, nodes = layout.network(), np.arange(layout.nodes)
    summed = impedance_blocks(network, nodes)
    quiet = _quiet(pick(network, np.array([0])))
    forest = grow(quiet)
    placed = put(quiet, forest)
    if placed.loose is not None:
        pytest.skip("something is loose, so that nothing is summed")
    ties = None if placed.joints is None else Ties(placed, forest)
    live = nodes[forest.place >= 0]
    driven, earthed = _driven(placed, forest, ties, forest.place[live])
    assert earthed.all()
    size = np.abs(driven).max(axis=(1, 2), keepdims=True)
    assert (np.abs(summed.z[live] - driven) <= 1e-9 * size).all()
