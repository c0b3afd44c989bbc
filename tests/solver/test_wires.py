"""Four wires against an independent nodal solution: every connection, both ways, rings, lost neutrals."""

from dataclasses import replace

import numpy as np
import pytest
from networks import build
from wired import (
    ABC,
    ABCN,
    CURRENT,
    EARTH,
    IMPEDANCE,
    POWER,
    A,
    B,
    Bank,
    C,
    CentreTapped,
    Layout,
    N,
    Unit,
    balanced,
)
from wired_nodal import solution as nodal

from solver import Status, Trouble, grow, solve
from solver.reached import unreferenced
from solver.windings import Winding

HIGH, LOW = 11e3 / 3**0.5, 400 / 3**0.5
Z = 0.02 * 400**2 / 100e3 * (1 + 2j)
EARTHED, STAR, DELTA, ZIGZAG = Winding("Y", True, 0.0), Winding("Y"), Winding("D"), Winding("Z", True, 0.0)
FOUR = 0.05 * np.eye(4) + 0.02j * np.ones((4, 4)) + 0.03j * np.eye(4)
TO_NEUTRAL = [
    (2, A, N, 5e3 + 1e3j, 230, POWER),
    (2, B, N, 8e3 + 3e3j, 230, CURRENT),
    (2, C, N, 2e3, 230, IMPEDANCE),
]
BETWEEN = [
    (2, A, B, 5e3 + 1e3j, 400, POWER),
    (2, B, C, 8e3 + 3e3j, 400, CURRENT),
    (2, C, A, 2e3, 400, IMPEDANCE),
]
TO_EARTH = [
    (2, A, EARTH, 5e3 + 1e3j, HIGH, IMPEDANCE),
    (2, B, EARTH, 8e3 + 3e3j, HIGH, IMPEDANCE),
    (2, C, EARTH, 4e3, HIGH, IMPEDANCE),
]
STEADY = [(n, i, j, s, v, IMPEDANCE) for n, i, j, s, v, _ in TO_NEUTRAL]


def differs(layout, floating=(), point=0, bound=1e-8):
    """Largest gap to the nodal solution, relative to each node's volts; floating nodes against their mean."""
    solution = solve(layout.network())
    assert solution.status[point] is Status.SOLVED
    known = nodal(layout, point)
    assert known is not None
    ours = solution.voltage[:, :, point].copy()
    theirs = np.array([[known.get(("v", n, c), np.nan) for c in range(4)] for n in range(layout.nodes)])
    theirs[np.isnan(ours)] = np.nan
    for node in floating:
        for volts in (ours, theirs):
            volts[node] -= np.nanmean(volts[node, :3])
    size = np.nanmax(np.abs(theirs), axis=1)
    gap = np.nanmax(np.abs(ours - theirs), axis=1) / size
    assert gap.max() < bound
    assert solution.closure[point] < 1e-10
    return solution, known


def down(one, two, clock, loads, floating=(), unbalance=1.0, zero=None):
    """High voltage in at 0, unit from 0 to 1, low-voltage line to 2."""
    volts = balanced(HIGH)
    volts[0] *= unbalance
    has = ABCN if two.neutral else ABC
    line = FOUR[np.ix_(has, has)]
    unit = Unit(0, 1, one, two, clock, 11e3, 400.0, Z, zero=zero)
    return differs(Layout(3, [(0, volts)], [(1, 2, has, line)], [unit], loads), floating)


STEP_DOWN = [
    *((DELTA, EARTHED, clock, TO_NEUTRAL, ()) for clock in (1, 3, 5, 7, 9, 11)),
    *((EARTHED, EARTHED, clock, TO_NEUTRAL, ()) for clock in (0, 2, 4, 6, 8, 10)),
    *((DELTA, ZIGZAG, clock, TO_NEUTRAL, ()) for clock in (0, 6, 10)),
    *((STAR, ZIGZAG, clock, TO_NEUTRAL, ()) for clock in (1, 5, 11)),
    *((one, DELTA, clock, BETWEEN, (1, 2)) for one in (STAR, EARTHED) for clock in (1, 5, 11)),
    *((DELTA, DELTA, clock, BETWEEN, (1, 2)) for clock in (0, 4, 6)),
    (STAR, STAR, 0, BETWEEN, (1, 2)),
    (EARTHED, STAR, 6, BETWEEN, (1, 2)),
    (STAR, EARTHED, 0, STEADY, ()),
    (DELTA, Winding("Y", True, 3.0), 11, TO_NEUTRAL, ()),
    (DELTA, Winding("Y", True), 11, TO_NEUTRAL, (1, 2)),
    (Winding("Y", False, 10.0), EARTHED, 0, TO_NEUTRAL, ()),
]


@pytest.mark.parametrize(("one", "two", "clock", "loads", "floating"), STEP_DOWN)
def test_every_connection_stepping_down(one, two, clock, loads, floating):
    down(one, two, clock, loads, floating, unbalance=0.95)


@pytest.mark.parametrize(
    ("one", "two", "clock", "loads"),
    [
        (EARTHED, EARTHED, 0, TO_EARTH),
        (Winding("Y", False, 0.0), DELTA, 1, TO_EARTH),
        (Winding("Y", True, 5.0), DELTA, 5, [(2, A, N, 5e3, HIGH, POWER)]),
        (Winding("Z", False, 2.0), DELTA, 2, TO_EARTH),
        (DELTA, EARTHED, 11, TO_EARTH),
        (DELTA, ZIGZAG, 0, TO_EARTH),
    ],
)
def test_every_connection_fed_from_the_low_side(one, two, clock, loads):
    """The delta side of a unit fed backwards has no earth: loads to earth hold it where they can."""
    has = ABCN if one.neutral else ABC
    unit = Unit(1, 0, one, two, clock, 11e3, 400.0, Z)
    line = 100 * FOUR[np.ix_(has, has)]
    layout = Layout(3, [(0, balanced(LOW))], [(1, 2, has, line)], [unit], loads)
    differs(layout)
    network = layout.network()
    assert unreferenced(network, grow(network)).tolist() == ([0] if one.letter == "D" else [])


@pytest.mark.parametrize(
    "earth", [Winding("Y", True, 0.0), Winding("Y", False, 10.0), Winding("Y", True, 10.0)]
)
def test_an_earthed_star_beside_a_delta_draws_a_zero_sequence(earth):
    volts = balanced(HIGH)
    volts[0] *= 1.1
    line = 0.5 * np.eye(4) + 0.4j * np.ones((4, 4)) + 0.5j * np.eye(4)
    unit = Unit(1, 2, earth, DELTA, 1, 11e3, 400.0, Z)
    loads = [(3, *row[1:]) for row in BETWEEN] + [(1, A, N, 1e4, HIGH, POWER)]
    layout = Layout(4, [(0, volts)], [(0, 1, ABCN, line), (2, 3, ABC, 0.05 + 0.05j)], [unit], loads)
    solution, known = differs(layout, floating=(2, 3))
    drawn = solution.transformer_in[0, :3, 0]
    assert abs(drawn.sum()) > 1
    assert drawn == pytest.approx(np.array([known[("coil", 0, 0, i)] for i in range(3)]), rel=1e-6)


@pytest.mark.parametrize(
    ("one", "two", "clock"), [(DELTA, EARTHED, 11), (STAR, ZIGZAG, 11), (STAR, DELTA, 1)]
)
def test_zero_sequence_does_not_pass(one, two, clock):
    loads = BETWEEN if two.letter == "D" else TO_NEUTRAL
    solution, _ = down(one, two, clock, loads, (1, 2) if two.letter == "D" else ())
    drawn = solution.transformer_in[0, :3, 0]
    assert abs(drawn.sum()) < 1e-9 * np.abs(drawn).max()


def test_the_core_carries_the_zero_sequence_of_a_star_without_balance():
    core = 0.5 * 400**2 / 100e3 * 1j
    solution, _ = down(STAR, EARTHED, 0, TO_NEUTRAL, zero=core)
    assert abs(solution.transformer_out[0, :3, 0].sum()) > 1
    assert abs(solution.transformer_in[0, :3, 0].sum()) < 1e-9


BANK_LOADS = [(3, *row[1:]) for row in BETWEEN]
PAIR = 240.0
ZB = 0.02 * 240**2 / 25e3 * (1 + 2j)
BANKS = [
    (Bank(1, 2, [((A, N), (A, B), HIGH, PAIR, ZB), ((B, N), (B, C), HIGH, PAIR, 1.3 * ZB)]), ABC, (2, 3)),
    (Bank(1, 2, [((A, B), (A, B), 11e3, PAIR, ZB), ((B, C), (B, C), 11e3, PAIR, 1.3 * ZB)]), ABC, (2, 3)),
    (
        Bank(
            1,
            2,
            [
                ((A, N), (A, B), HIGH, PAIR, ZB),
                ((B, N), (B, C), HIGH, PAIR, 1.3 * ZB),
                ((C, N), (C, A), 0.98 * HIGH, PAIR, (0.7 + 0.3j) * ZB),
            ],
            earth_1=(N, 2.0),
        ),
        ABC,
        (2, 3),
    ),
    (
        Bank(
            1,
            2,
            [((i, (i + 1) % 3), (i, (i + 1) % 3), 11e3, PAIR, ZB * (1 + 0.3 * i)) for i in range(3)],
            earth_2=(B, 0.0),
        ),
        ABC,
        (),
    ),
]


@pytest.mark.parametrize(("unit", "has", "floating"), BANKS)
def test_banks_and_open_deltas(unit, has, floating):
    line = 0.5 * np.eye(4) + 0.4j * np.ones((4, 4)) + 0.5j * np.eye(4)
    layout = Layout(
        4, [(0, balanced(HIGH))], [(0, 1, ABCN, line), (2, 3, has, 0.01 + 0.01j)], [unit], BANK_LOADS
    )
    differs(layout, floating)


@pytest.mark.parametrize("one", [(A, N), (B, C), (C, EARTH)])
def test_a_centre_tap_and_its_two_hots(one):
    volts = 11e3 if one == (B, C) else HIGH
    loads = [
        (3, A, N, 4e3, 120, POWER),
        (3, B, N, 1e3 + 1e3j, 120, CURRENT),
        (3, A, B, 3e3, 240, IMPEDANCE),
    ]
    lines = [(0, 1, ABCN, 0.5 + 0.9j), (2, 3, (A, B, N), 0.02 + 0.01j)]
    layout = Layout(4, [(0, balanced(HIGH))], lines, [CentreTapped(1, 2, one, volts, 240.0, ZB)], loads)
    solution, _ = differs(layout)
    assert np.isnan(solution.voltage[3, C, 0])
    assert 235 < abs(solution.voltage[2, A, 0] - solution.voltage[2, B, 0]) < 240


def test_a_centre_tap_fed_from_its_hots():
    volts = np.array([120, -119, 0, 0])
    loads = [(2, A, EARTH, 4e3, HIGH, POWER), (1, A, N, 1e3, 120, POWER)]
    lines = [(0, 1, (A, B, N), 0.02 + 0.01j)]
    differs(Layout(3, [(0, volts)], lines, [CentreTapped(2, 1, (A, EARTH), HIGH, 240.0, ZB)], loads))


def random_layout(seed, nodes=12, rings=0):
    """A Dyn unit, then a tree of laterals with the conductors of their choice, electrodes along the way."""
    rng = np.random.default_rng(seed)
    one, two = [(DELTA, EARTHED), (EARTHED, EARTHED), (DELTA, Winding("Y", True, 2.0)), (STAR, ZIGZAG)][
        seed % 4
    ]
    clock = {("D", "Y"): 11, ("Y", "Y"): 0, ("Y", "Z"): 5}[one.letter, two.letter]
    volts = balanced(HIGH) * np.append(rng.uniform(0.95, 1.05, 3), 1)
    lines, has, loads, earths = [], {1: ABCN}, [], []
    for node in range(2, nodes):
        above = int(rng.integers(max(1, node - 4), node))
        choice = [has[above], (*sorted(rng.choice(has[above][:-1], 1).tolist()), N)]
        has[node] = choice[int(node > 4 and rng.random() < 0.3)]
        size = len(has[node])
        half = rng.uniform(0.01, 0.04, (size, size))
        mutual = 0.01j + half @ half.T * 0.2j
        charge = 1e-6j * (2 * np.eye(size) - 0.2)
        lines.append((above, node, has[node], np.diag(rng.uniform(0.02, 0.06, size)) + mutual, charge))
        for phase in has[node][:-1]:
            far = rng.choice([N, N, EARTH])
            if len(has[node]) == 4 and rng.random() < 0.4:
                far = (phase + 1) % 3
            level = 400.0 if far < N and far != EARTH else 231.0
            power = rng.uniform(200, 1500) * np.exp(1j * rng.uniform(-0.3, 0.6)) * rng.choice((1, 1, 1, -0.3))
            loads.append((node, phase, int(far), power, level, rng.dirichlet((1, 1, 1))))
        if rng.random() < 0.4:
            earths.append((node, N, rng.uniform(1, 30)))
    wide = [n for n in has if len(has[n]) == 4 and n > 1]
    for _ in range(rings):
        a, b = rng.choice(wide, 2, replace=False)
        lines.append((int(a), int(b), ABCN, FOUR * rng.uniform(0.5, 2)))
    taps = 11e3 * np.array([1.0, 1.025])
    units = [Unit(0, 1, one, two, clock, taps, 400.0, Z, [[1e-8 - 1e-7j], [0]])]
    if seed % 3 == 0:
        units.append(Unit(0, 1, one, two, clock, taps[::-1], 400.0, 1.4 * Z))
    return Layout(nodes, [(0, volts)], lines, units, loads, earths)


@pytest.mark.parametrize("seed", range(12))
def test_random_unbalanced_layouts(seed):
    layout = random_layout(seed, rings=seed % 3)
    for point in range(2):
        differs(layout, point=point)


def test_balance_of_every_conductor():
    """What enters a node on a conductor leaves it again."""
    layout = random_layout(5, rings=2)
    network = layout.network()
    solution = solve(network)
    wires = network.wires
    total = np.zeros((network.node_count, 4, 2), dtype=complex)
    for ends, current, sign in (
        (network.line_from, solution.line_in, -1),
        (network.line_to, solution.line_out, 1),
        (network.transformer_from, solution.transformer_in, -1),
        (network.transformer_to, solution.transformer_out, 1),
        (network.source_node, solution.source_current, 1),
        (network.load_node, solution.load_current, -1),
    ):
        np.add.at(total, ends, sign * current)
    for row, to in enumerate(wires.load_to):
        for slot in np.flatnonzero(to != EARTH):
            total[network.load_node[row], to[slot]] += solution.load_current[row, slot]
    np.subtract.at(total, (wires.earth_node, wires.earth_conductor), solution.earth_current)
    inner = total[2:]  # at the unit's own terminals the star point takes what is left over
    assert np.abs(inner).max() < 1e-8 * np.abs(solution.line_in).max()


def test_turning_the_phases_turns_the_answer():
    layout = random_layout(4)
    turned = lambda c: (c + 1) % 3 if 0 <= c < 3 else c  # noqa: E731
    order = np.array([2, 0, 1, 3])

    def moved(row):
        has = tuple(sorted(turned(c) for c in row[2]))
        where = [row[2].index(next(c for c in row[2] if turned(c) == d)) for d in has]
        return (row[0], row[1], has, *(np.asarray(m)[np.ix_(where, where)] for m in row[3:]))

    other = replace(
        layout,
        sources=[(n, np.asarray(v)[order]) for n, v in layout.sources],
        lines=[moved(row) for row in layout.lines],
        loads=[(n, turned(i), turned(j), *rest) for n, i, j, *rest in layout.loads],
    )
    one, two = solve(layout.network()).voltage, solve(other.network()).voltage
    both = np.stack((one[:, order], two))
    assert np.nanmax(np.abs(both[0] - both[1])) < 1e-9 * HIGH
    assert (np.isnan(both[0]) == np.isnan(both[1])).all()


@pytest.mark.parametrize(
    ("one", "two", "clock"), [(DELTA, EARTHED, 11), (STAR, DELTA, 1), (EARTHED, EARTHED, 6)]
)
def test_a_balanced_layout_is_the_same_with_one_conductor(one, two, clock):
    z, power = 0.1 + 0.05j, 20e3 + 6e3j
    iron = 2e-8 - 2e-7j
    has = ABCN if two.neutral else ABC
    unit = Unit(0, 1, one, two, clock, 11e3, 400.0, Z, [[iron], [0]])
    mix = (0.4, 0.3, 0.3)
    far = N if two.neutral else None
    loads = [
        (2, i, far if far is not None else (i + 1) % 3, power, LOW if far else 400.0, mix) for i in range(3)
    ]
    layout = Layout(3, [(0, balanced(HIGH))], [(1, 2, has, z, 1e-5j)], [unit], loads)
    four = solve(layout.network())
    ratio = 27.5 * np.exp(1j * np.pi / 6 * clock)
    single = build(3, [(0, HIGH)], [(1, 2, z, 1e-5j)], [(0, 1, ratio, Z, iron)], loads=[(2, power, LOW, mix)])
    one_wire = solve(single)
    assert four.voltage[:, 0, 0] == pytest.approx(one_wire.voltage[:, 0, 0], rel=1e-11)
    assert four.line_in[:, 0, 0] == pytest.approx(one_wire.line_in[:, 0, 0], rel=1e-9)
    assert four.transformer_in[:, 0, 0] == pytest.approx(one_wire.transformer_in[:, 0, 0], rel=1e-9)
    assert four.line_loss.sum() == pytest.approx(3 * one_wire.line_loss.sum(), rel=1e-9)
    assert four.transformer_loss.sum() == pytest.approx(3 * one_wire.transformer_loss.sum(), rel=1e-9)


def test_a_neutral_lost_at_the_root_shifts_the_volts():
    """Two phases left in series across 240 V share it by their impedances."""
    lines = [(0, 1, (A, B), 0.01), (1, 2, (A, B, N), 0.01)]
    loads = [(2, A, N, 4e3, 120, IMPEDANCE), (2, B, N, 2e3, 120, IMPEDANCE)]
    held = [(0, np.array([120, -120, 0, 0]))]
    solution, _ = differs(Layout(3, held, lines, [], loads))
    across = np.abs(solution.voltage[2, :2, 0] - solution.voltage[2, N, 0])
    assert across[1] / across[0] == pytest.approx(2)
    assert across.sum() == pytest.approx(240, abs=1)
    assert np.isnan(solution.voltage[0, N, 0]) or solution.voltage[0, N, 0] == 0
    held_again, _ = differs(Layout(3, held, lines, [], loads, earths=[(2, N, 5.0)]))
    assert abs(held_again.voltage[2, N, 0]) < abs(solution.voltage[2, N, 0])


def test_loads_of_three_phases_without_their_neutral():
    lines = [(0, 1, ABC, 0.05), (1, 2, ABCN, FOUR)]
    differs(Layout(3, [(0, balanced(LOW))], lines, [], STEADY))
    mild = [(2, i, N, s, 230, (0.3, 0.3, 0.4)) for i, s in enumerate((3e3, 3.4e3 + 1e3j, 2.8e3))]
    differs(Layout(3, [(0, balanced(LOW))], lines, [], mild))


def test_capacitance_holds_a_side_without_earth():
    charge = np.diag([3e-6j, 3e-6j, 2e-6j])
    unit = Unit(1, 0, DELTA, EARTHED, 11, 11e3, 400.0, Z)
    loads = [(2, i, (i + 1) % 3, 4e3 * (i + 1), 11e3, POWER) for i in range(3)]
    layout = Layout(3, [(0, balanced(LOW))], [(1, 2, ABC, 5 + 3j, charge)], [unit], loads)
    solution, _ = differs(layout)
    assert abs(solution.voltage[2, :3, 0].sum()) > 100


def test_a_load_on_a_phase_that_is_not_there_is_named():
    lines = [(0, 1, (A, N), 0.1), (1, 2, (A, B, N), 0.1)]
    loads = [(2, A, N, 1e3, 230, POWER), (2, B, N, 1e3, 230, POWER), (1, C, N, 1e3, 230, POWER)]
    solution = solve(Layout(3, [(0, balanced(LOW))], lines, [], loads).network())
    assert solution.status == (Status.INVALID,)
    assert solution.forest == Trouble(unfed=(1, 2))


def test_too_much_on_one_phase_has_no_operating_point():
    lines = [(0, 1, ABCN, 0.3 + 0.2j)]
    loads = [(1, A, N, np.array([5e3, 200e3]), 230, POWER), (1, B, N, 1e3, 230, POWER)]
    solution = solve(Layout(2, [(0, balanced(LOW))], lines, [], loads).network())
    assert solution.status == (Status.SOLVED, Status.NO_OPERATING_POINT)


def test_arrays_that_do_not_fit_are_named():
    network = random_layout(1).network()
    wrong = replace(network, wires=replace(network.wires, line_has=network.wires.line_has[:, :3]))
    with pytest.raises(ValueError, match="line_has"):
        solve(wrong)
    with pytest.raises(ValueError, match="load_to"):
        solve(replace(network, wires=replace(network.wires, load_to=network.wires.load_to + 5)))
    with pytest.raises(ValueError, match="clock number"):
        Unit(0, 1, DELTA, EARTHED, 0, 11e3, 400.0, Z).port()


SETTLED = (5, 6, 7, 8, 9, 13, 14, 23, 27)


@pytest.mark.parametrize("seed", SETTLED)
def test_random_layouts_with_neutrals_lost_and_sides_loose(seed):
    rng = np.random.default_rng(seed)
    layout = random_layout(seed, nodes=10, rings=seed % 3)
    for place, (a, b, has, z, *y) in enumerate(layout.lines):
        if len(has) == 4 and rng.random() < 0.25 and y:
            layout.lines[place] = (a, b, ABC, z[:3, :3], y[0][:3, :3])
    layout.loads = [(n, i, j, s / 2, v, (0.2, 0.3, 0.5)) for n, i, j, s, v, _ in layout.loads]
    kind = seed % 5
    if kind == 1:
        layout.units = [Unit(0, 1, DELTA, Winding("Y", True), 11, 11e3, 400.0, Z)]
    elif kind == 2:
        layout.units = [Unit(0, 1, EARTHED, EARTHED, 0, 11e3 * t, 400.0, Z) for t in (1.0, 1.025)]
    elif kind == 3:
        layout.units = [Unit(0, 1, STAR, EARTHED, 0, 11e3, 400.0, Z, zero=10 * Z)]
    differs(layout)


def test_neutrals_of_transformers_side_by_side_share_as_their_phases_do():
    units = [Unit(0, 1, DELTA, EARTHED, 11, 11e3, 400.0, Z * share) for share in (1, 2)]
    layout = Layout(3, [(0, balanced(HIGH))], [(1, 2, ABCN, FOUR)], units, TO_NEUTRAL)
    solution, _ = differs(layout)
    out = solution.transformer_out[:, :, 0]
    assert np.abs(out.sum(axis=1)).max() < 1e-9 * np.abs(out).max()
    assert out[0] == pytest.approx(2 * out[1], rel=1e-8)
