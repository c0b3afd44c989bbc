"""Random radial layouts: several supplies, transformers fed from either side, taps, mixed loads, shunts."""

import numpy as np
from networks import build

LEVELS = (230.0, 400.0, 6350.0, 12700.0)


def random_network(seed, nodes=30, sources=2, units=5, width=1, loading=1.0, dead=0):
    """A network whose branches drop a few per cent each at most; rows and directions are shuffled."""
    rng = np.random.default_rng(seed)
    level = np.empty(nodes)
    branches = []
    level[:sources] = rng.choice(LEVELS, sources)
    is_unit = np.zeros(nodes, dtype=bool)
    is_unit[rng.choice(np.arange(sources, nodes), min(units, nodes - sources), replace=False)] = True
    power = np.zeros(nodes)
    for node in range(sources, nodes):
        above = int(rng.integers(max(0, node - 6), node))
        level[node] = rng.choice(LEVELS) if is_unit[node] else level[above]
        branches.append((above, node))
        power[node] = 2e4 * loading * rng.uniform(0.1, 1)
    names = rng.permutation(nodes + dead)
    tables = {"lines": [], "transformers": [], "loads": [], "shunts": []}
    for above, node in branches:
        base = level[node] ** 2 / 2e4
        z = base * complex(rng.uniform(0.001, 0.004), rng.uniform(0.001, 0.004)) / nodes**0.5
        z = z * (1 + 0.2 * rng.random(width))
        flip = rng.random() < 0.5
        if is_unit[node]:
            tables["transformers"].append(
                _unit(rng, names[above], names[node], level[above], level[node], z, width, flip)
            )
        else:
            y = 1j * rng.uniform(0, 0.002) / base
            ends = (names[node], names[above]) if flip else (names[above], names[node])
            tables["lines"].append((*ends, z, y))
    for node in range(sources, nodes):
        for _ in range(int(rng.integers(0, 3))):
            mix = rng.dirichlet((1, 1, 1))
            turn = np.exp(1j * rng.uniform(-0.5, 0.7)) * rng.choice((1, 1, 1, -0.5))
            stated = power[node] * turn * rng.uniform(0.5, 1.5, width)
            tables["loads"].append((names[node], stated, level[node] * rng.uniform(0.9, 1.1), mix))
        if rng.random() < 0.2:
            y = complex(rng.uniform(0, 0.05), rng.uniform(-0.1, 0.2)) * 2e4 / level[node] ** 2
            tables["shunts"].append((names[node], y))
    for rows in tables.values():
        rng.shuffle(rows)
    held = [(names[n], level[n] * rng.uniform(0.95, 1.05, width) * np.exp(1j * n)) for n in range(sources)]
    return build(nodes + dead, held, **tables)


def _unit(rng, above, node, high, low, z, width, flip):
    """A unit with taps and a clock number; fed from winding 2 where `flip`."""
    tap = 1 + 0.025 * rng.integers(-2, 3, width)
    turn = np.exp(1j * np.pi / 6 * rng.integers(0, 12))
    iron = [complex(0.0005, -0.003) * 2e4 / high**2, 0]
    if rng.random() < 0.3:
        iron = [0, complex(0.0005, -0.003) * 2e4 / low**2]
    if not flip:
        return above, node, high * tap / low * turn, z, *iron
    ratio = low / (high * tap) * turn
    return node, above, ratio, z / np.abs(ratio) ** 2, *iron[::-1]
