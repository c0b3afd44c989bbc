"""What must hold for any four-wire layout: conservation, turning, balance, switches, batches, supplies."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from networks import build
from test_wires import DELTA, EARTHED, FOUR, HIGH, STAR, ZIGZAG, Z, random_layout
from wired import ABC, ABCN, EARTH, POWER, A, B, Bank, C, CentreTapped, Layout, N, Unit, balanced

from solver import Status, solve
from solver.series import solve_series
from solver.share import pick
from solver.tapping import retapped
from solver.windings import stacked

few = settings(max_examples=10, deadline=None)
seeds = st.integers(0, 10**6)


def near(ours, theirs, bound=1e-9):
    """Volts of every node against the largest of that node; nan in the same places."""
    assert (np.isnan(ours) == np.isnan(theirs)).all()
    size = np.nanmax(np.abs(theirs), axis=1, keepdims=True)
    return np.nanmax(np.abs(ours - theirs) / size) < bound


def solved(layout):
    """A random layout may ask too much: its loads are halved until it solves."""
    for _ in range(8):
        if solve(layout.network()).solved:
            return layout
        layout = replace(layout, loads=[(n, i, j, s / 2, v, m) for n, i, j, s, v, m in layout.loads])
    raise AssertionError("a layout with hardly any load must solve")


@few
@given(seeds)
def test_power_and_current_balance_of_every_conductor(seed):
    network = solved(random_layout(seed, rings=seed % 3)).network()
    solution = solve(network)
    assert solution.closure.max() < 1e-10
    wires = network.wires
    total = np.zeros((network.node_count, 4, 2), dtype=complex)
    for ends, current, sign in (
        (network.line_from, solution.line_in, -1),
        (network.line_to, solution.line_out, 1),
        (network.load_node, solution.load_current, -1),
    ):
        np.add.at(total, ends, sign * current)
    for row, to in enumerate(wires.load_to):
        for slot in np.flatnonzero(to != EARTH):
            total[network.load_node[row], to[slot]] += solution.load_current[row, slot]
    np.subtract.at(total, (wires.earth_node, wires.earth_conductor), solution.earth_current)
    assert np.abs(total[2:]).max() < 1e-8 * np.abs(solution.line_in).max()
    volts = np.nan_to_num(solution.voltage)
    given_ = (volts[network.source_node] * np.conj(solution.source_current)).sum(axis=(0, 1))
    taken = solution.load_power.sum(axis=(0, 1)) + solution.line_loss.sum(axis=0)
    taken = taken + solution.transformer_loss.sum(axis=0)
    taken = taken + (np.abs(solution.earth_current) ** 2 * wires.earth_z).sum(axis=0)
    assert np.abs(given_ - taken).max() < 1e-9 * np.abs(given_).max()


@few
@given(seeds, st.sampled_from([1, 2]))
def test_turning_the_phases_turns_the_answer(seed, by):
    layout = solved(random_layout(seed))

    def turned(c):
        return (c + by) % 3 if 0 <= c < 3 else c

    def moved(row):
        has = tuple(sorted(turned(c) for c in row[2]))
        where = [row[2].index(next(c for c in row[2] if turned(c) == d)) for d in has]
        return (row[0], row[1], has, *(np.asarray(m)[np.ix_(where, where)] for m in row[3:]))

    order = np.array([(i - by) % 3 for i in range(3)] + [3])
    other = replace(
        layout,
        sources=[(n, np.asarray(v)[order]) for n, v in layout.sources],
        lines=[moved(row) for row in layout.lines],
        loads=[(n, turned(i), turned(j), *rest) for n, i, j, *rest in layout.loads],
    )
    assert near(solve(other.network()).voltage, solve(layout.network()).voltage[:, order])


@few
@given(seeds)
def test_a_balanced_layout_is_the_same_with_one_conductor(seed):
    """A tree with transformers of many clock numbers, fed from either side, loads star or delta."""
    rng = np.random.default_rng(seed)
    nodes = 14
    volts = [HIGH]
    one, four, units_1, units_4, loads_1, loads_4 = [], [], [], [], [], []
    for node in range(1, nodes):
        above = int(rng.integers(max(0, node - 5), node))
        high = volts[above]
        if rng.random() < 0.3:
            clock = int(rng.choice([0, 1, 5, 6, 7, 11]))
            low = 400 / 3**0.5 if high > 1000 else HIGH
            ends, sides = (above, node), (DELTA if clock % 2 else EARTHED, EARTHED)
            rated = np.array([high * (1 + 0.025 * rng.integers(-2, 3)), low])
            if clock % 2 == 0 and rng.random() < 0.5:  # fed from winding 2
                ends, rated = ends[::-1], rated[::-1]
            z = 0.02 * rated[1] ** 2 / 1e5 * complex(*rng.uniform(0.5, 2, 2))
            iron = complex(1e-3, -5e-3) * 1e5 / rated[0] ** 2
            units_1.append((*ends, rated[0] / rated[1] * np.exp(1j * np.pi / 6 * clock), z, iron, 0))
            units_4.append(Unit(*ends, *sides, clock, *(3**0.5 * rated), z, [[iron], [0]]))
            volts.append(low)
        else:
            z = 0.004 * high**2 / 1e5 * complex(*rng.uniform(0.5, 2, 2))
            one.append((above, node, z))
            four.append((above, node, ABCN, z * np.eye(4) + 0.3 * z * np.ones((4, 4))))
            volts.append(high)
        s = 3e3 * complex(*rng.uniform(0.2, 1, 2))
        mix = tuple(rng.dirichlet((1, 1, 1)))
        loads_1.append((node, s, volts[node], mix))
        delta = rng.random() < 0.4
        for i in range(3):
            far, level = ((i + 1) % 3, volts[node] * 3**0.5) if delta else (N, volts[node])
            loads_4.append((node, i, far, s, level, mix))
    single = solve(build(nodes, [(0, HIGH)], one, units_1, loads=loads_1))
    wired = solve(Layout(nodes, [(0, balanced(HIGH))], four, units_4, loads_4).network())
    assert single.status == wired.status == (Status.SOLVED,)
    assert near(wired.voltage[:, :1], single.voltage)
    assert np.nanmax(np.abs(wired.voltage[:, 3])) < 1e-6
    for name in ("line_loss", "transformer_loss"):
        assert getattr(wired, name) == pytest.approx(3 * getattr(single, name), rel=1e-7, abs=1e-9)


BLOCKS = [(DELTA, EARTHED, 11), (DELTA, ZIGZAG, 0), (STAR, ZIGZAG, 11)]


@few
@given(seeds, st.sampled_from(BLOCKS))
def test_zero_sequence_is_blocked(seed, unit):
    rng = np.random.default_rng(seed)
    one, two, clock = unit
    power = [rng.uniform(0, 9e3) * np.exp(1j * rng.uniform(-0.5, 0.8)) for _ in range(3)]
    loads = [(2, i, N, s, 230, tuple(rng.dirichlet((1, 1, 1)))) for i, s in enumerate(power)]
    units = [Unit(0, 1, one, two, clock, 11e3, 400.0, Z)]
    solution = solve(Layout(3, [(0, balanced(HIGH))], [(1, 2, ABCN, FOUR)], units, loads).network())
    drawn, out = solution.transformer_in[0, :3, 0], solution.transformer_out[0, :3, 0]
    assert abs(drawn.sum()) < 1e-9 * np.abs(drawn).max()
    assert abs(out.sum()) > 1e-3 * np.abs(out).max()


@few
@given(seeds)
def test_a_closed_switch_changes_nothing(seed):
    layout = solved(random_layout(seed, rings=seed % 2))
    rng = np.random.default_rng(seed)
    node, new = int(rng.integers(2, layout.nodes)), layout.nodes
    has = next(row[2] for row in layout.lines if row[1] == node)
    moved = [(new if r[0] == node and rng.random() < 0.5 else r[0], *r[1:]) for r in layout.loads]
    switched = replace(layout, nodes=new + 1, lines=[*layout.lines, (node, new, has, 0)], loads=moved)
    one, two = solve(layout.network()).voltage, solve(switched.network()).voltage
    assert near(two[:new], one)
    assert np.nanmax(np.abs(two[new] - two[node])) < 1e-12 * 400


@few
@given(seeds)
def test_batch_equals_single_solves(seed):
    network = solved(random_layout(seed, rings=1)).network()
    together = solve(network)
    for point in range(2):
        alone = solve(pick(network, np.array([point])))
        assert near(together.voltage[..., point], alone.voltage[..., 0], 1e-12)


@few
@given(seeds)
def test_a_supply_behind_its_impedance_is_a_line_behind_a_supply(seed):
    layout = solved(random_layout(seed))
    z = 2 * FOUR
    network = replace(layout.network(), source_z=z[None, ..., None])
    pushed = lambda n: n + 1  # noqa: E731
    ahead = Layout(
        layout.nodes + 1,
        layout.sources,
        [(0, 1, ABCN, z), *((pushed(a), pushed(b), *rest) for a, b, *rest in layout.lines)],
        [replace(u, start=u.start + 1, end=u.end + 1) for u in layout.units],
        [(pushed(n), *rest) for n, *rest in layout.loads],
        [(pushed(n), *rest) for n, *rest in layout.earths],
    )
    one, two = solve(network), solve(ahead.network())
    assert one.status == two.status
    assert near(one.voltage, two.voltage[1:])
    assert one.source_current == pytest.approx(two.source_current, rel=1e-7, abs=1e-9)


@few
@given(seeds)
def test_nothing_drawn_and_nothing_lost_but_iron(seed):
    layout = random_layout(seed, rings=seed % 2)
    network = layout.network()
    idle = solve(replace(network, load_power=0 * network.load_power))
    assert idle.solved
    assert np.nanmax(np.abs(idle.load_power)) == 0
    assert idle.closure.max() < 1e-6


@pytest.mark.parametrize("winding", [1, 2])
@pytest.mark.parametrize(
    "unit",
    [
        lambda a, b, z: Bank(0, 1, [((A, B), (A, N), 11e3 * a, 230.0 * b, z)]),
        lambda a, b, z: Bank(
            0,
            1,
            [((i, (i + 1) % 3), (i, N), 11e3 * a, 230.0 * b, z * (1 + i)) for i in range(3)],
            earth_2=(N, 2.0),
        ),
        lambda a, b, z: CentreTapped(0, 1, (C, N), HIGH * a, 240.0 * b, z),
    ],
)
def test_banks_and_centre_taps_move_as_another_nameplate(unit, winding):
    z, t = 0.02 + 0.05j, 1.05
    plain = Layout(2, [(0, balanced(HIGH))], [], [unit(1, 1, z)], [])
    moved = retapped(plain.network(), [0], [winding], np.array([[t]])).wires.units
    other = stacked([(unit(t, 1, z) if winding == 1 else unit(1, t, z * t**2)).port()])
    for name in ("gain", "series", "iron", "own_z"):
        assert np.allclose(getattr(moved, name), getattr(other, name), rtol=1e-12), name


def test_a_series_of_four_wires_is_the_sum_of_its_hours():
    layout = solved(random_layout(5, rings=1))
    shares = np.linspace(0.2, 1, 30)
    network = pick(layout.network(), np.array([0]))
    network = replace(network, load_power=network.load_power * shares)
    hours, whole = np.linspace(0.5, 1, 30), solve(network)
    found = solve_series(network, hours, block=7)
    assert (found.done, found.unsolved.size) == (30, 0)
    assert found.line_loss == pytest.approx(whole.line_series_loss.real @ hours)
    assert found.copper_loss == pytest.approx(whole.transformer_series_loss.real @ hours)
    assert found.drawn == pytest.approx(np.nansum(whole.load_power, axis=1).real @ hours)
    volts = np.abs(whole.voltage[:, :3])
    assert found.lowest.value == pytest.approx(np.nanmin(volts, axis=(1, 2)))
    assert found.lowest.point[-1] == np.nanmin(volts[-1], axis=0).argmin()


def test_the_same_load_on_three_wires_or_between_them():
    """A star of equal impedances is the delta of three times as much."""
    z = 0.1 + 0.08j
    star = [(1, i, N, 5e3 + 2e3j, 230, POWER) for i in range(3)]
    delta = [(1, i, (i + 1) % 3, 5e3 + 2e3j, 230 * 3**0.5, POWER) for i in range(3)]
    one, two = (
        solve(Layout(2, [(0, balanced(230))], [(0, 1, has, z)], [], loads).network()).voltage[1, :3]
        for has, loads in ((ABCN, star), (ABC, delta))
    )
    assert one == pytest.approx(two, rel=1e-11)
