"""Trees, zones and order; loops, joined supplies and dead parts named by their rows."""

from dataclasses import replace

import networkx
import numpy as np
import pytest
from networks import build
from random_networks import random_network

from solver import Forest, Joined, Loop, Status, Trouble, grow, rounds, solve


def connected(nodes, lines=(), transformers=(), sources=(0,)):
    lines = [(a, b, 0.1) for a, b in lines]
    transformers = [(a, b, 1, 0.1) for a, b in transformers]
    return build(nodes, [(n, 230) for n in sources], lines, transformers)


@pytest.mark.parametrize("seed", range(12))
def test_zones_preorder_and_ends(seed):
    network = random_network(seed, nodes=40, sources=1 + seed % 3, units=seed % 7, dead=3)
    forest = grow(network)
    assert isinstance(forest, Forest)
    tree = networkx.DiGraph()
    tree.add_edges_from((p, n) for n, p in enumerate(forest.parent.tolist()) if p >= 0)
    tree.add_nodes_from(network.source_node.tolist())
    assert sorted(forest.order) == sorted(tree)
    units = {
        frozenset(pair)
        for pair in zip(network.transformer_from.tolist(), network.transformer_to.tolist(), strict=True)
    }
    inside = tree.copy()
    inside.remove_edges_from([e for e in tree.edges if frozenset(e) in units])
    for place, node in enumerate(forest.order.tolist()):
        below = {node} | networkx.descendants(inside, node)
        assert set(forest.order[place : forest.end[place]].tolist()) == below
        zone = forest.zone[place]
        assert forest.zone_start[zone] <= place < forest.zone_start[zone + 1]
        root = forest.order[forest.zone_start[zone]]
        path = networkx.shortest_path(tree, network.source_node[forest.zone_source[zone]], node)
        depth = sum(frozenset(e) in units for e in zip(path, path[1:], strict=False))
        assert forest.depth_zone[depth] <= zone < forest.depth_zone[depth + 1]
        assert (forest.feeder[place] == -1) == (node == root)
        if node != root:
            line = forest.feeder[place]
            ends = (network.line_from[line], network.line_to[line])
            assert ends[:: forest.line_way[line]] == (forest.parent[node], node)
    assert forest.dead.size == 3
    assert np.array_equal(forest.place[forest.order], np.arange(forest.order.size))


def ties(network):
    forest = grow(network)
    assert isinstance(forest, Forest)
    return rounds(network, forest)


def test_a_ring_is_named_in_the_order_of_the_round():
    (loop,) = ties(connected(6, [(0, 1), (1, 2), (2, 3), (3, 4), (4, 1), (4, 5)]))
    assert isinstance(loop, Loop)
    assert sorted(loop.lines) == [1, 2, 3, 4]
    turned = loop.lines[loop.lines.index(1) :] + loop.lines[: loop.lines.index(1)]
    assert turned in {(1, 2, 3, 4), (1, 4, 3, 2)}


def test_a_ring_through_transformers():
    (loop,) = ties(connected(4, [(0, 1), (2, 3)], [(0, 2), (1, 3)]))
    assert isinstance(loop, Loop)
    assert sorted(loop.lines) == [0, 1]
    assert sorted(loop.transformers) == [0, 1]


@pytest.mark.parametrize(
    ("lines", "transformers"),
    [([(0, 1), (1, 0)], []), ([], [(0, 1), (0, 1)]), ([(0, 1)], [(0, 1)]), ([(0, 1)], [(1, 0)])],
)
def test_two_branches_side_by_side(lines, transformers):
    (loop,) = ties(connected(2, lines, transformers))
    assert sorted(loop.lines) == list(range(len(lines)))
    assert sorted(loop.transformers) == list(range(len(transformers)))


def test_a_branch_onto_its_own_node():
    assert ties(connected(2, [(0, 1), (1, 1)])) == (Loop((1,), ()),)
    assert ties(connected(1, [], [(0, 0)])) == (Loop((), (0,)),)


def test_joined_supplies_with_what_lies_between():
    (joined,) = ties(connected(5, [(0, 1), (1, 2), (2, 3), (1, 4)], sources=(0, 3)))
    assert isinstance(joined, Joined)
    assert sorted(joined.sources) == [0, 1]
    assert sorted(joined.lines) == [0, 1, 2]
    (through,) = ties(connected(4, [(0, 1), (2, 3)], [(1, 2)], sources=(0, 3)))
    assert sorted(through.lines) == [0, 1]
    assert through.transformers == (0,)


def test_two_supplies_on_one_node():
    assert grow(connected(2, [(0, 1)], sources=(0, 0))) == Trouble(joined=(Joined((0, 1), (), ()),))


def test_loops_in_a_dead_part_are_no_trouble():
    forest = grow(connected(5, [(0, 1), (2, 3), (3, 4), (4, 2)]))
    assert isinstance(forest, Forest)
    assert forest.dead.tolist() == [2, 3, 4]
    assert forest.line_way.tolist()[1:] == [0, 0, 0]


def test_no_supply_is_all_dead():
    forest = grow(connected(3, [(0, 1)], sources=()))
    assert isinstance(forest, Forest)
    assert forest.dead.tolist() == [0, 1, 2]
    solution = solve(connected(3, [(0, 1)], sources=()))
    assert solution.status == (Status.INVALID,)
    assert np.isnan(solution.voltage).all()


def test_dead_parts_are_dead_not_noughts():
    network = build(4, [(0, 230)], [(0, 1, 0.1), (2, 3, 0.1)], loads=[(1, 1e3), (3, 1e3)], shunts=[(2, 0.1)])
    solution = solve(network)
    assert solution.status == (Status.SOLVED,)
    assert np.isnan(solution.voltage[2:]).all()
    assert np.isnan(solution.load_power[1]).all()
    assert np.isnan(solution.line_in[1]).all()
    assert np.isnan(solution.shunt_power).all()
    assert solution.closure[0] < 1e-14


def test_trouble_is_invalid_and_carries_no_figure():
    solution = solve(connected(2, [(0, 1)], sources=(0, 0)))
    assert solution.status == (Status.INVALID,)
    assert isinstance(solution.forest, Trouble)
    assert np.isnan(solution.voltage).all()


def test_which_winding_is_fed_follows_the_tree():
    forest = grow(connected(3, [], [(0, 1), (2, 1)]))
    assert isinstance(forest, Forest)
    assert forest.transformer_way.tolist() == [1, -1]


def chain(count, seed=0):
    """A line of nodes in shuffled numbering, drawn in both directions."""
    rng = np.random.default_rng(seed)
    name = rng.permutation(count)
    a, b = name[:-1], name[1:]
    flip = rng.random(count - 1) < 0.5
    return name, np.where(flip, b, a), np.where(flip, a, b)


def test_a_hundred_thousand_nodes_in_one_line():
    count = 100_000
    name, a, b = chain(count)
    network = build(count, [(int(name[0]), 10e3)], [(0, 1, 1e-6)], loads=[(int(name[-1]), 1e6)])
    network = _with_lines(network, a, b, 1e-5 + 1e-5j)
    solution = solve(network)
    whole = (1e-5 + 1e-5j) * (count - 1)
    two = solve(build(2, [(0, 10e3)], [(0, 1, whole)], loads=[(1, 1e6)]))
    assert abs(solution.voltage[name[-1], 0, 0] / two.voltage[1, 0, 0] - 1) < 1e-10
    assert solution.closure[0] < 1e-10


def test_a_star_of_a_hundred_thousand():
    count = 100_000
    network = build(count, [(0, 230)], [(0, 1, 1)], loads=[(99_999, 100)])
    network = _with_lines(network, np.zeros(count - 1, dtype=int), np.arange(1, count), 0.5 + 0j)
    solution = solve(network)
    alone = solve(build(2, [(0, 230)], [(0, 1, 0.5)], loads=[(1, 100)]))
    assert abs(solution.voltage[-1, 0, 0] / alone.voltage[1, 0, 0] - 1) < 1e-11
    assert solution.voltage[1, 0, 0] == pytest.approx(230, abs=1e-10)


def _with_lines(network, a, b, z):
    shape = (a.size, 1, 1, 1)
    return replace(
        network, line_from=a, line_to=b, line_z=np.full(shape, z), line_y=np.zeros(shape, dtype=complex)
    )


def test_twenty_transformers_in_a_row():
    units = [(n, n + 1, 2.0 if n % 2 else 0.5, 0.001, 1e-4 - 1e-3j) for n in range(20)]
    network = build(21, [(0, 400)], transformers=units, loads=[(20, 10e3)])
    solution = solve(network)
    forest = grow(network)
    assert isinstance(forest, Forest)
    assert forest.depth_zone.size == 22
    assert solution.solved
    assert solution.closure[0] < 1e-13
