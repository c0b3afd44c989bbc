"""Closed switches, rings and supplies of which only some conductors are there, against the nodal solution."""

from dataclasses import replace

import numpy as np
import pytest
from test_wires import DELTA, EARTHED, FOUR, Z
from wired import ABC, ABCN, CURRENT, IMPEDANCE, POWER, A, B, C, Layout, N, Unit, balanced
from wired_nodal import solution as nodal

from solver import Status, Trouble, solve

VOLTS, HIGH = 231.0, 11e3 / 3**0.5
STAR_LOADS = [(3, A, N, 3e3, 230, POWER), (2, B, N, 1e3, 230, POWER), (3, C, N, 1e3, 230, POWER)]
LOADS = [
    (1, A, N, 5e3, 230, POWER),
    (2, B, N, 3e3 + 1e3j, 230, CURRENT),
    (2, A, B, 2e3, 400, POWER),
    (3, C, N, 2e3, 230, IMPEDANCE),
]
THROUGH = [(0, 1, ABCN, FOUR), (1, 2, ABCN, 0.7 * FOUR)]
HALVES = [(2, A, N, 2e3, 120, POWER), (2, B, N, 1e3, 120, POWER), (1, A, B, 4e3, 240, CURRENT)]
SPLIT, ONE_PHASE = np.array([120, -120, 0, 0]), np.array([230, 0, 0, 0])


def fed(lines, loads=(), volts=None, nodes=4, units=(), earths=()):
    volts = balanced(VOLTS) if volts is None else volts
    return Layout(nodes, [(0, volts)], list(lines), list(units), list(loads), list(earths))


def boards(*switches):
    """Two transformers, their boards joined."""
    units = [Unit(0, i, DELTA, EARTHED, 11, 11e3, 400.0, i * Z) for i in (1, 2)]
    loads = [(3, *row[1:]) for row in LOADS]
    return fed([*switches, (2, 3, ABCN, FOUR)], loads, balanced(HIGH), 5, units)


CASES = {
    "a switch": fed([*THROUGH, (2, 3, ABCN, 0)], LOADS),
    "a switch in a ring": fed([*THROUGH, (0, 3, ABCN, 2 * FOUR), (2, 3, ABCN, 0)], LOADS),
    "a switch beside a line": fed([*THROUGH, (2, 3, ABCN, 0), (2, 3, ABCN, FOUR)], LOADS),
    "a ring with two conductors": fed([*THROUGH, (2, 3, ABCN, 0), (1, 3, (A, N), 0.3)], LOADS),
    "a ring of unlike phases": fed(
        [(0, 1, ABCN, FOUR), (0, 2, ABCN, FOUR), (1, 3, (A, B, N), 0.1), (2, 3, (B, C, N), 0.2)],
        [*LOADS, (3, A, B, 2e3, 400, POWER), (3, B, C, 2e3, 400, POWER), (3, A, N, 1e3, 230, POWER)],
    ),
    "no phase in common": fed(
        [(0, 1, ABCN, FOUR), (0, 2, ABCN, FOUR), (1, 3, (A, N), 0.1), (2, 3, (B, N), 0.2)],
        [(3, A, N, 5e3, 230, POWER), (3, B, N, 2e3, 230, IMPEDANCE), (3, A, B, 2e3, 400, POWER)],
    ),
    "a neutral lost on the way, found again": fed(
        [(0, 1, ABCN, FOUR), (1, 2, ABC, 0.1), (2, 3, ABCN, FOUR)], STAR_LOADS, earths=[(3, N, 2.0)]
    ),
    "a neutral lost on one way of a ring": fed(
        [(0, 1, ABCN, FOUR), (1, 2, ABC, 0.1), (2, 3, ABCN, FOUR), (0, 3, ABCN, FOUR)], STAR_LOADS
    ),
    "a neutral lost with nothing to hold it": fed(
        [(0, 1, ABCN, FOUR), (1, 2, ABC, 0.1), (2, 3, ABCN, FOUR)],
        [(*row[:5], IMPEDANCE) for row in STAR_LOADS],
    ),
    "a supply of one phase": fed(
        [(0, 1, (A, N), 0.1), (1, 2, (A, N), 0)], [(2, A, N, 5e3, 230, POWER)], ONE_PHASE, 3
    ),
    "one phase on a line with four": fed(
        [(0, 1, (A, N), 0.1), (1, 2, ABCN, 0.1)], [(2, A, N, 5e3, 230, POWER)], ONE_PHASE, 3
    ),
    "two hots and the neutral": fed(
        [(0, 1, (A, B, N), 0.1), (1, 2, (A, B, N), 0)], HALVES, SPLIT, 3, earths=[(1, N, 5.0)]
    ),
    "two hots in a ring": fed(
        [(0, 1, (A, B, N), 0.1), (0, 2, (A, B, N), 0.2), (1, 2, (A, B, N), 0)], HALVES, SPLIT, 3
    ),
    "two hots alone": fed([(0, 1, (A, B), 0.1), (1, 2, (A, B), 0.1)], [(2, A, B, 2e3, 240, POWER)], SPLIT, 3),
    "three phases without a neutral": fed(
        [(0, 1, ABC, 0.1), (1, 2, ABC, 0)], [(2, A, B, 2e3, 400, POWER), (2, B, C, 4e3, 400, POWER)], nodes=3
    ),
    "boards joined by a switch": boards((1, 2, ABCN, 0)),
    "boards joined by two switches": boards((1, 4, ABCN, 0), (4, 2, ABCN, 0)),
}


@pytest.mark.parametrize("name", CASES)
def test_volts_and_currents_are_those_of_the_nodes(name):
    layout = CASES[name]
    network, known = layout.network(), nodal(layout)
    first = [row[2] for row in layout.lines if 0 in row[:2]] or [ABC]
    has = np.zeros((1, 4), dtype=bool)
    has[0, sorted(set().union(*first))] = True
    solution = solve(replace(network, wires=replace(network.wires, source_has=has)))
    assert solution.solved
    assert solution.closure[0] < 1e-12
    gaps = [
        abs(solution.voltage[key[1], key[2], 0] - volts)
        for key, volts in known.items()
        if key[0] == "v" and has[0, key[2]] | (key[1] > 0)
    ]
    assert np.nanmax(gaps) < 1e-8
    assert np.isfinite(gaps).sum() >= 4
    shared = 3 if name.startswith("boards") else 4  # how earthed star points share is not for volts to say
    currents = [
        abs(solution.line_in[key[1], key[2], 0] - current)
        for key, current in known.items()
        if key[0] == "line" and key[2] < shared
    ]
    assert max(currents) < 1e-6


def test_switches_in_a_circle_are_named():
    circle = [(1, 2, ABCN, 0), (2, 3, ABCN, 0), (3, 1, (A, N), 0)]
    solution = solve(fed([(0, 1, ABCN, FOUR), *circle], LOADS).network())
    assert solution.status == (Status.INVALID,)
    assert isinstance(solution.forest, Trouble)
    (loop,) = solution.forest.loops
    assert (sorted(loop.lines), loop.transformers) == ([1, 2, 3], ())


def test_a_load_on_a_phase_that_the_supply_does_not_have_is_named():
    layout = fed([(0, 1, (A, N), 0.1), (1, 2, ABCN, 0.1)], [(2, B, N, 5e3, 230, POWER)], ONE_PHASE, 3)
    network = layout.network()
    has = np.array([[True, False, False, True]])
    solution = solve(replace(network, wires=replace(network.wires, source_has=has)))
    assert solution.forest == Trouble(unfed=(0,))
