"""What moves by itself among four wires: held volts, regulators of one phase, between phases, and ganged."""

from dataclasses import replace

import numpy as np
import pytest
from wired import ABCN, POWER, A, B, Bank, C, Layout, N, Unit, balanced
from wired_nodal import solution as nodal

from solver import solve
from solver.control import Regulator, Rest, Reverse, control
from solver.holding import Holding
from solver.windings import Winding, passing, stacked

VOLTS, LINE = 11e3 / 3**0.5, 11e3
STEP = 0.00625
Z = 0.1 + 0.5j
LOADS = [(2, i, N, s, VOLTS, POWER) for i, s in ((A, 300e3 + 90e3j), (B, 120e3), (C, 220e3 + 150e3j))]
MACHINE = [(3, i, N, -80e3, VOLTS, POWER) for i in (A, B, C)]
COUPLED = 0.5 * np.eye(4) + 0.2j * np.ones((4, 4)) + 0.7j * np.eye(4)


def network(loads, lines=None, units=()):
    lines = lines or [(0, 1, ABCN, COUPLED), (1, 2, ABCN, COUPLED), (1, 3, ABCN, COUPLED)]
    nodes = 1 + max(max(row[:2]) for row in lines)
    return Layout(nodes, [(0, balanced(VOLTS))], lines, list(units), loads).network()


def joined(net, rows):
    """The machine's phases as one load row with three slots, as a drawing has it."""
    power, to = net.load_power.copy(), net.wires.load_to.copy()
    for row in rows[1:]:
        slot = int(np.flatnonzero(power[row].any(axis=-1))[0])
        power[rows[0], slot], to[rows[0], slot] = power[row, slot], to[row, slot]
    keep = np.setdiff1d(np.arange(net.load_node.size), rows[1:])
    fewer = {n: getattr(net, n)[keep] for n in ("load_node", "load_reference", "load_mix")}
    return replace(net, load_power=power[keep], wires=replace(net.wires, load_to=to[keep]), **fewer)


def across(solution, node, far=N):
    return np.abs(solution.voltage[node, :3] - solution.voltage[node, far])


@pytest.mark.parametrize("ring", [True, False])
def test_a_machine_of_three_phases_holds_the_mean_of_its_volts(ring):
    lines = [(0, 1, ABCN, COUPLED), (1, 2, ABCN, COUPLED), (1, 3, ABCN, COUPLED)]
    lines += [(2, 3, ABCN, 2 * COUPLED)] if ring else []
    net = joined(network([*LOADS, *MACHINE], lines), [3, 4, 5])
    settings = VOLTS * np.array([0.98, 0.99, 1.0, 1.03])
    found = control(net, generators=[Holding(3, settings, -9e6, 9e6)])
    assert found.held.all()
    volts = across(found.solution, 3)
    assert volts.mean(axis=0) == pytest.approx(settings, rel=1e-9)
    assert np.ptp(volts, axis=0).min() > 1
    made = -found.solution.load_power[3, :3]
    assert made.real == pytest.approx(np.full((3, 4), 80e3))
    assert made.imag == pytest.approx(np.tile(found.reactive[0] / 3, (3, 1)))
    assert found.solution.closure.max() < 1e-11


def test_a_machine_between_phases_holds_the_mean_of_its_line_volts():
    machine = [(3, i, (i + 1) % 3, -80e3, LINE, POWER) for i in (A, B, C)]
    net = joined(network([*LOADS, *machine]), [3, 4, 5])
    found = control(net, generators=[Holding(3, 0.995 * LINE, -3e6, 3e6)])
    v = found.solution.voltage[3, :3, 0]
    assert np.abs(v - np.roll(v, -1)).mean() == pytest.approx(0.995 * LINE, rel=1e-9)
    assert found.held.all()


def test_machines_of_one_phase_hold_theirs_and_a_limit_is_a_limit():
    rows = [(3, B, N, -50e3, VOLTS, POWER), (2, C, N, -20e3, VOLTS, POWER)]
    wanted = [1.001 * VOLTS, 0.99 * VOLTS]
    holding = [Holding(3, wanted[0], -2e6, 2e6), Holding(4, wanted[1], -2e6, 2e6)]
    found = control(network([*LOADS, *rows]), generators=holding)
    volts = across(found.solution, 3)[B, 0], across(found.solution, 2)[C, 0]
    assert volts == pytest.approx(wanted, rel=1e-9)
    assert found.solution.load_power[3, B, 0].imag == pytest.approx(-found.reactive[0, 0])
    limited = control(network([*LOADS, *rows]), generators=[Holding(3, 1.1 * VOLTS, -1e4, 2e4), holding[1]])
    assert limited.held[:, 0].tolist() == [False, True]
    assert limited.reactive[0, 0] == pytest.approx(2e4)
    assert across(limited.solution, 3)[B, 0] < 1.1 * VOLTS


def test_a_machine_without_output_holds_with_the_slots_it_is_given():
    idle = (3, A, N, 0.0, VOLTS, POWER)
    found = control(network([*LOADS, idle]), generators=[Holding(3, VOLTS, -2e6, 2e6, slots=(A,))])
    assert across(found.solution, 3)[A, 0] == pytest.approx(VOLTS, rel=1e-9)
    assert found.reactive[0, 0] > 1e3


def regulator(**changes):
    plate = dict(
        transformer=0, tapped=2, step=STEP, lowest=-16, highest=16, setting=VOLTS, bandwidth=0.0125 * VOLTS
    )
    return Regulator(**{**plate, **changes})


def in_band(volts, setting=VOLTS):
    return bool((np.abs(volts / setting - 1) <= 0.00625 * (1 + 1e-9)).all())


def test_a_regulator_on_a_lateral_of_one_phase():
    unit = Bank(1, 2, [((B, N), (B, N), VOLTS, VOLTS, Z)])
    lines = [(0, 1, ABCN, COUPLED), (1, 2, (N,), 0), (2, 3, (B, N), 3 + 4j)]
    loads = [(3, B, N, 400e3 + 100e3j, VOLTS, POWER), (1, A, N, 200e3, VOLTS, POWER)]
    net = network(loads, lines, [unit])
    found = control(net, [regulator(conductor=B)])
    assert found.rest[0, 0] is Rest.IN_BAND
    assert found.notch[0, 0] > 0
    assert in_band(across(found.solution, 2)[B])
    held = control(
        net, [regulator(conductor=B, compensation=3 + 4j, step=STEP / 20, lowest=-320, highest=320)]
    )
    assert held.notch[0, 0] / 20 > found.notch[0, 0]


def test_two_regulators_in_open_delta_hold_two_line_volts():
    """Each between an outer phase and the middle one, which goes straight through."""
    units = [Bank(1, 2, [((i, B), (i, B), LINE, LINE, 3 * Z)]) for i in (A, C)]
    lines = [(0, 1, ABCN, 2 + 3j), (1, 2, (B,), 0), (2, 3, (A, B, C), 3 + 4j)]
    loads = [(3, i, (i + 1) % 3, s, LINE, POWER) for i, s in ((A, 700e3), (B, 400e3 + 300e3j), (C, 300e3))]
    layout = Layout(4, [(0, balanced(VOLTS))], lines, units, loads)
    net, known = layout.network(), nodal(layout)
    still = solve(net)
    for node in (2, 3):
        for i in range(3):
            assert still.voltage[node, i, 0] == pytest.approx(known[("v", node, i)], abs=1e-7 * VOLTS)
    band = 0.0125 * LINE
    both = [
        regulator(transformer=row, conductor=i, to=B, setting=LINE, bandwidth=band)
        for row, i in enumerate((A, C))
    ]
    found = control(net, both)
    assert (found.rest == Rest.IN_BAND).all()
    assert in_band(across(found.solution, 2, B)[[A, C], 0], LINE)
    assert found.notch[0, 0] != found.notch[1, 0]
    assert found.solution.closure[0] < 1e-10


@pytest.mark.parametrize("conductor", [A, B, C, None])
def test_a_ganged_one_holds_the_phase_it_measures_or_their_mean(conductor):
    star = Winding("Y", True, 0.0)
    unit = Unit(1, 2, star, star, 0, LINE, LINE, Z)
    lines = [(0, 1, ABCN, 2 + 3j), (2, 3, ABCN, 3 + 4j)]
    loads = [(3, i, N, (600e3 + 250e3j) * s, VOLTS, POWER) for i, s in ((A, 0.4), (B, 1.0), (C, 0.7))]
    found = control(network(loads, lines, [unit]), [regulator(conductor=conductor)])
    volts = across(found.solution, 2)[:, 0]
    assert in_band(volts.mean() if conductor is None else volts[conductor])
    assert not in_band(volts)
    assert found.solution.transformer_in.shape[0] == 1


def test_one_row_whose_phases_step_alone_is_three_single_phase_units():
    """Against three auto-transformers of next to no impedance, each a transformer of its own."""
    lines = [(0, 1, ABCN, COUPLED), (2, 3, ABCN, COUPLED)]
    loads = [(3, i, N, (700e3 + 250e3j) * s, VOLTS, POWER) for i, s in ((A, 0.2), (B, 1.0), (C, 2.0))]
    units = [Bank(1, 2, [((i, N), (i, N), VOLTS, VOLTS, 1e-3j)]) for i in (A, B, C)]
    apart = control(
        network(loads, [*lines, (1, 2, (N,), 1e-7)], units),
        [regulator(transformer=i, conductor=i) for i in range(3)],
    )
    star = Winding("Y", True, 0.0)
    net = network(loads, lines, [Unit(1, 2, star, star, 0, LINE, LINE, Z)])
    net = replace(net, wires=replace(net.wires, units=stacked([passing([True] * 4)])))
    net = replace(net, transformer_z=0 * net.transformer_z)
    together = control(net, [regulator(conductor=i, alone=True) for i in range(3)])
    assert together.notch.tolist() == apart.notch.tolist()
    assert len(set(together.notch[:, 0].tolist())) == 3
    assert in_band(across(together.solution, 2))
    assert together.solution.voltage[3] == pytest.approx(apart.solution.voltage[3], rel=1e-4)
    assert together.solution.closure.max() < 1e-11


def test_a_phase_that_steps_alone_goes_by_its_own_power():
    lines = [(0, 1, ABCN, COUPLED), (2, 3, ABCN, COUPLED)]
    loads = [(3, i, N, s, VOLTS, POWER) for i, s in ((A, 900e3), (B, -300e3), (C, 600e3))]
    star = Winding("Y", True, 0.0)
    net = network(loads, lines, [Unit(1, 2, star, star, 0, LINE, LINE, Z)])
    net = replace(net, wires=replace(net.wires, units=stacked([passing([True] * 4)])))
    idle = [regulator(conductor=i, alone=True, reverse=Reverse.IDLE) for i in range(3)]
    assert [r is Rest.IDLE for r in control(net, idle).rest[:, 0]] == [False, True, False]
