"""Regulators, tap changers and generators that hold a voltage."""

import numpy as np
import pytest
from networks import POWER, build
from wired import ABCN, EARTH, IMPEDANCE, A, B, Bank, C, Layout, N, Unit, balanced
from wired_nodal import solution as nodal

from solver import Status, solve
from solver.control import Regulator, Rest, Reverse, control, dialled
from solver.holding import Holding
from solver.tapping import retapped
from solver.windings import Winding, stacked

VOLTS = 11e3 / 3**0.5
STEP = 0.00625


def line_with_regulator(loads, tapped=2, source=1.0, reverse_feed=()):
    """A supply, 2 ohm, a step regulator 1 : 1, 3 + 4j ohm to the load."""
    rows = [(0, 1, 2 + 3j), (2, 3, 3 + 4j), *reverse_feed]
    unit = (1, 2, 1.0, 0.1 + 0.5j)
    return build(
        4 + len(reverse_feed),
        [(0, VOLTS * source)],
        rows,
        [unit],
        loads=[(3, s, VOLTS, POWER) for s in loads],
    )


def regulator(**changes):
    plate = dict(
        transformer=0, tapped=2, step=STEP, lowest=-16, highest=16, setting=VOLTS, bandwidth=0.0125 * VOLTS
    )
    return Regulator(**{**plate, **changes})


LOAD = 600e3 + 250e3j


@pytest.mark.parametrize("tapped", [1, 2])
def test_it_raises_the_volts_into_its_band_and_no_further(tapped):
    network = line_with_regulator([LOAD])
    found = control(network, [regulator(tapped=tapped)])
    notch = int(found.notch[0, 0])
    assert notch != 0
    assert (notch > 0) == (tapped == 2)
    assert found.rest[0, 0] is Rest.IN_BAND
    volts = abs(found.solution.voltage[2, 0, 0])
    assert VOLTS * (1 - 0.00625) <= volts <= VOLTS * (1 + 0.00625)
    back = retapped(network, [0], [tapped], np.array([[1 + STEP * (notch - np.sign(notch))]]))
    assert abs(solve(back).voltage[2, 0, 0]) < VOLTS * (1 - 0.00625)
    assert found.solution.closure[0] < 1e-11


def test_retapping_is_the_same_as_another_nameplate():
    network = build(
        2, [(0, VOLTS)], transformers=[(0, 1, 27.5, 0.01 + 0.02j, 1e-6 - 1e-5j)], loads=[(1, 2e4, 230, POWER)]
    )
    for winding, ratio, z in ((1, 27.5 * 1.05, 1.0), (2, 27.5 / 1.05, 1.05**2)):
        y = (1e-6 - 1e-5j) / (1.05**2 if winding == 1 else 1)
        plain = build(
            2, [(0, VOLTS)], transformers=[(0, 1, ratio, (0.01 + 0.02j) * z, y)], loads=[(1, 2e4, 230, POWER)]
        )
        moved = retapped(network, [0], [winding], np.array([[1.05]]))
        assert solve(moved).voltage == pytest.approx(solve(plain).voltage, rel=1e-13)


@pytest.mark.parametrize(("one", "two", "clock"), [("D", "Y", 11), ("Y", "D", 1), ("Y", "Y", 0)])
@pytest.mark.parametrize("winding", [1, 2])
def test_retapping_two_ports(one, two, clock, winding):
    sides = [Winding(letter, letter == "Y", 0.0 if letter == "Y" else None) for letter in (one, two)]
    z, y = 0.02 + 0.05j, np.array([[1e-7 - 1e-6j], [0]])

    def unit(t1, t2, y):
        return Unit(0, 1, *sides, clock, 11e3 * t1, 400.0 * t2, z * t2**2, y)

    t = 1.05
    layout = Layout(2, [(0, balanced(VOLTS))], [], [unit(1, 1, y)])
    moved = retapped(layout.network(), [0], [winding], np.array([[t]])).wires.units
    plain = stacked([unit(*((t, 1) if winding == 1 else (1, t)), y / (t**2 if winding == 1 else 1)).port()])
    for name in ("gain", "series", "iron", "own_z"):
        assert np.allclose(getattr(moved, name), getattr(plain, name), rtol=1e-12)


BEHIND_OHMS = Winding("Y", False, 5.0)
LED_OUT = Winding("Y", True, 2.0)
SIDES = [
    (Winding("D"), BEHIND_OHMS, 11), (BEHIND_OHMS, Winding("D"), 1),
    (BEHIND_OHMS, Winding("Y", False, 3.0), 0),
    (BEHIND_OHMS, LED_OUT, 0), (LED_OUT, BEHIND_OHMS, 0), (Winding("Z", False, 5.0), Winding("Y"), 11),
    (Winding("Y"), Winding("Z", False, 5.0), 11), (Winding("Y"), BEHIND_OHMS, 0), (Winding("D"), LED_OUT, 11),
]  # fmt: skip


@pytest.mark.parametrize("winding", [1, 2])
@pytest.mark.parametrize(("one", "two", "clock"), SIDES)
def test_ohms_from_a_star_point_to_earth_know_no_tap(one, two, clock, winding):
    """Whichever winding is tapped, and though no neutral is led out."""
    z, t = 0.02 + 0.05j, np.array([0.95, 1.0, 1.075])

    def unit(t1, t2):
        return Unit(0, 1, one, two, clock, 11e3 * t1, 400.0 * t2, z * np.asarray(t2) ** 2)

    layout = Layout(2, [(0, balanced(VOLTS))], [], [unit(1, 1)])
    moved = retapped(layout.network(), [0], [winding], t[None]).wires.units
    plain = stacked([unit(*((t, 1) if winding == 1 else (1, t))).port()])
    for name in ("gain", "series", "own_z", "star"):
        assert np.allclose(getattr(moved, name), getattr(plain, name), rtol=1e-12, atol=1e-15), name


@pytest.mark.parametrize("t", [0.95, 1.05])
def test_an_earthed_star_at_its_tap_in_closed_form(t):
    """A phase to earth behind delta and star: I = t V / (t² z + R + Z of the load)."""
    z, ohms, load = 0.02 + 0.05j, 5.0, 10.0
    unit = Unit(0, 1, Winding("D"), BEHIND_OHMS, 11, 11e3, 400.0, z)
    phase = 400 / 3**0.5
    rows = [(1, A, EARTH, phase**2 / load, phase, IMPEDANCE)]
    network = Layout(2, [(0, balanced(VOLTS))], [], [unit], rows).network()
    found = solve(retapped(network, [0], [2], np.array([[t]])))
    assert abs(found.load_current[0, A, 0]) == pytest.approx(
        abs(t * phase / (t**2 * z + ohms + load)), rel=1e-9
    )


def test_it_stops_at_its_end_stop():
    found = control(line_with_regulator([1.4 * LOAD]), [regulator(highest=4)])
    assert found.notch[0, 0] == 4
    assert found.rest[0, 0] is Rest.AT_STOP
    assert found.solution.solved


def test_compensation_holds_the_far_end():
    """With the impedance of the line dialled in, the load sees the setting."""
    z = dialled(complex(3, 4) * 100 / 55, 100.0, 55.0)
    assert z == pytest.approx(3 + 4j)
    fine = regulator(step=STEP / 100, lowest=-3000, highest=3000, bandwidth=2e-4 * VOLTS, compensation=z)
    found = control(line_with_regulator([LOAD]), [fine])
    assert abs(found.solution.voltage[3, 0, 0]) == pytest.approx(VOLTS, rel=1.1e-4)
    assert abs(found.solution.voltage[2, 0, 0]) > 1.02 * VOLTS


def test_a_band_narrower_than_a_step_hunts_and_says_so():
    found = control(line_with_regulator([LOAD]), [regulator(bandwidth=0.0005 * VOLTS)])
    assert found.rest[0, 0] is Rest.HUNTING
    assert found.solution.status == (Status.NOT_SETTLED,)
    assert np.isnan(found.solution.voltage).all()


def test_two_in_a_row_come_to_rest_the_nearer_first():
    lines = [(0, 1, 2 + 3j), (2, 3, 3 + 4j), (4, 5, 3 + 4j)]
    units = [(1, 2, 1.0, 0.1 + 0.5j), (3, 4, 1.0, 0.1 + 0.5j)]
    network = build(6, [(0, VOLTS)], lines, units, loads=[(5, 500e3 + 200e3j, VOLTS, POWER)])
    found = control(network, [regulator(transformer=1), regulator()])
    assert (found.rest == Rest.IN_BAND).all()
    for node in (2, 4):
        assert abs(abs(found.solution.voltage[node, 0, 0]) / VOLTS - 1) <= 0.00625 * (1 + 1e-9)


def test_a_batch_is_the_same_as_one_by_one():
    loads = np.array([0.2, 0.6, 1.0, 1.4]) * LOAD
    settings = VOLTS * np.array([1.0, 1.0, 1.01, 1.02])
    together = control(line_with_regulator([loads]), [regulator(setting=settings)])
    for point in range(4):
        alone = control(line_with_regulator([loads[point]]), [regulator(setting=settings[point])])
        assert together.notch[0, point] == alone.notch[0, 0]
        assert together.solution.voltage[..., point] == pytest.approx(
            alone.solution.voltage[..., 0], rel=1e-10
        )
    assert len(set(together.notch[0].tolist())) > 1


@pytest.mark.parametrize("mode", Reverse)
def test_power_that_flows_back(mode):
    """A generator behind a regulator, the grid still where it was: holding the side of the grid,
    it runs away to its end stop."""
    network = line_with_regulator([-1.2e6])
    found = control(network, [regulator(reverse=mode, reverse_setting=0.98 * VOLTS)])
    high = abs(solve(network).voltage[2, 0, 0])
    assert high > 1.00625 * VOLTS
    if mode is Reverse.FORWARD:
        assert found.rest[0, 0] is Rest.IN_BAND
        assert found.notch[0, 0] < 0
    elif mode is Reverse.IDLE:
        assert (found.rest[0, 0], found.notch[0, 0]) == (Rest.IDLE, 0)
    else:
        assert found.rest[0, 0] is Rest.AT_STOP
        assert found.notch[0, 0] == 16
        assert abs(found.solution.voltage[2, 0, 0]) > 1.09 * VOLTS


def test_a_ganged_regulator_of_four_wires_measures_its_phase():
    star = Winding("Y", True, 0.0)
    unit = Unit(1, 2, star, star, 0, 11e3, 11e3, 0.1 + 0.5j)
    lines = [(0, 1, ABCN, 2 + 3j), (2, 3, ABCN, 3 + 4j)]
    loads = [(3, i, N, LOAD * share, VOLTS, POWER) for i, share in ((A, 0.5), (B, 0.9), (C, 0.7))]
    network = Layout(4, [(0, balanced(VOLTS))], lines, [unit], loads).network()
    found = control(network, [regulator(conductor=B)])
    volts = np.abs(found.solution.voltage[2, :3, 0] - found.solution.voltage[2, N, 0])
    assert abs(volts[B] / VOLTS - 1) <= 0.00625
    assert volts[A] > volts[B]
    assert found.solution.closure[0] < 1e-11


def with_generators(*outputs, ring=True):
    lines = [(0, 1, 0.5 + 0.8j), (1, 2, 0.4 + 0.7j), (2, 3, 0.6 + 0.5j)] + (
        [(3, 0, 0.8 + 0.9j)] if ring else []
    )
    rows = [(2, LOAD, VOLTS, POWER)] + [(node, -p, VOLTS, POWER) for node, p in outputs]
    return build(4, [(0, VOLTS)], lines, loads=rows)


@pytest.mark.parametrize("ring", [True, False])
def test_generators_hold_their_volts(ring):
    network = with_generators((1, 200e3), (3, 300e3), ring=ring)
    wanted = [1.002 * VOLTS, 0.995 * VOLTS]
    holding = [Holding(i, v, -5e6, 5e6) for i, v in zip((1, 2), wanted, strict=True)]
    found = control(network, generators=holding)
    assert np.abs(found.solution.voltage[[1, 3], 0, 0]) == pytest.approx(wanted, rel=1e-9)
    assert found.held.all()
    assert -found.solution.load_power[1:, 0, 0] == pytest.approx(
        np.array([200e3, 300e3]) + 1j * found.reactive[:, 0]
    )
    assert found.solution.closure[0] < 1e-11


def test_a_generator_at_its_limit_gives_what_it_has():
    settings = VOLTS * np.array([1.0, 1.05, 0.9])
    found = control(with_generators((3, 300e3)), generators=[Holding(1, settings, -1e5, 2e6)])
    assert found.held[0].tolist() == [True, False, False]
    assert found.reactive[0, 1:] == pytest.approx([2e6, -1e5])
    volts = np.abs(found.solution.voltage[3, 0])
    assert volts[0] == pytest.approx(VOLTS, rel=1e-9)
    assert volts[1] < settings[1]
    assert volts[2] > settings[2]


def test_controls_need_trees():
    with pytest.raises(ValueError, match="trouble"):
        control(build(2, [(0, 1), (0, 1)], [(0, 1, 1)]))


def test_three_single_phase_regulators_each_hold_their_phase():
    """One auto-transformer a phase between the same two nodes, each with its own taps."""
    z = 0.1 + 0.5j
    units = [Bank(1, 2, [((i, N), (i, N), 11e3 / 3**0.5, 11e3 / 3**0.5, z)]) for i in (A, B, C)]
    lines = [(0, 1, ABCN, 2 + 3j), (1, 2, (N,), 1e-6), (2, 3, ABCN, 3 + 4j)]
    loads = [(3, i, N, LOAD * share, VOLTS, POWER) for i, share in ((A, 0.2), (B, 0.7), (C, 0.45))]
    layout = Layout(4, [(0, balanced(VOLTS))], lines, units, loads)
    network = layout.network()
    still = solve(network)
    known = nodal(layout)
    for node in (2, 3):
        for i in range(4):
            assert still.voltage[node, i, 0] == pytest.approx(known[("v", node, i)], abs=1e-7 * VOLTS)
    found = control(network, [regulator(transformer=i, conductor=i) for i in range(3)])
    assert (found.rest == Rest.IN_BAND).all()
    volts = np.abs(found.solution.voltage[2, :3, 0] - found.solution.voltage[2, N, 0])
    assert (np.abs(volts / VOLTS - 1) <= 0.00625 * (1 + 1e-9)).all()
    assert len(set(found.notch[:, 0].tolist())) == 3
    assert found.solution.closure[0] < 1e-10


def test_without_volts_to_measure_it_does_not_say_in_band():
    found = control(line_with_regulator([np.array([1.0, 50.0]) * LOAD]), [regulator()])
    assert found.rest[0].tolist() == [Rest.IN_BAND, Rest.UNKNOWN]
    assert found.solution.status == (Status.SOLVED, Status.NO_OPERATING_POINT)
