"""Networks for the tests, written down as short lists of rows."""

import csv
import json
from pathlib import Path

import numpy as np

from solver import Network

REFERENCE = Path(__file__).parent.parent / "reference"
POWER, CURRENT, IMPEDANCE = (1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0)


def build(nodes, sources, lines=(), transformers=(), loads=(), shunts=()):
    """A network with one conductor from rows of plain numbers or arrays over the batch.

    sources: (node, V); lines: (from, to, Z[, Y])
    transformers: (from, to, ratio[, Z at 2[, Y at 1[, Y at 2]]]);
    loads: (node, S[, reference V, mix]); shunts: (node, Y)
    """
    lines = [(*row, 0)[:4] for row in lines]
    transformers = [(*row, 0, 0, 0)[:6] for row in transformers]
    loads = [(*row, 1.0, POWER)[:4] if len(row) == 2 else row for row in loads]
    return Network(
        node_count=nodes,
        conductors=1,
        source_node=rows(sources, 0),
        source_voltage=values(sources, 1)[:, None],
        line_from=rows(lines, 0),
        line_to=rows(lines, 1),
        line_z=values(lines, 2)[:, None, None],
        line_y=values(lines, 3)[:, None, None],
        transformer_from=rows(transformers, 0),
        transformer_to=rows(transformers, 1),
        transformer_ratio=values(transformers, 2),
        transformer_z=values(transformers, 3),
        transformer_y=pairs(transformers),
        load_node=rows(loads, 0),
        load_power=values(loads, 1)[:, None],
        load_reference=values(loads, 2)[:, None].real,
        load_mix=np.array([row[3] for row in loads], dtype=float).reshape(len(loads), 3),
        shunt_node=rows(shunts, 0),
        shunt_y=values(shunts, 1)[:, None, None],
    )


def rows(table, column):
    return np.array([row[column] for row in table], dtype=np.intp)


def pairs(transformers):
    """(row, 2, batch) complex"""
    both = np.broadcast_arrays(values(transformers, 4), values(transformers, 5))
    return np.stack(both, axis=1)


def values(table, column):
    """(row, batch) complex, as wide as the widest entry."""
    entries = [np.atleast_1d(np.asarray(row[column], dtype=complex)) for row in table]
    width = max((e.size for e in entries), default=1)
    return np.array([np.broadcast_to(e, width) for e in entries], dtype=complex).reshape(len(entries), width)


def table(name):
    with open(REFERENCE / "feeders" / f"{name}.csv", newline="") as file:
        return list(csv.DictReader(file))


def facts(name):
    return json.loads((REFERENCE / "feeders" / f"{name}.json").read_text())


def feeder(name, opened=(), closed=(), extra=()):
    """Node rows by name, and the network per phase; branches and ties are numbered from 1 in file order.

    extra: (node name, three-phase VA) further loads
    """
    about, nodes = facts(name), table(f"{name}_nodes")
    ids = {row["node"]: i for i, row in enumerate(nodes)}
    volts = about["base_kV"] * 1e3 / 3**0.5
    held = about["source_node"] if isinstance(about["source_node"], list) else [about["source_node"]]
    branches = table(f"{name}_branches") + (table(f"{name}_ties") if closed else [])
    count = len(table(f"{name}_branches"))
    kept = [
        row
        for number, row in enumerate(branches, 1)
        if number not in opened and (number <= count or number in closed)
    ]
    lines = [
        (ids[row["from"]], ids[row["to"]], complex(float(row["R_ohm"]), float(row["X_ohm"]))) for row in kept
    ]
    loads = [
        (ids[row["node"]], complex(float(row["P_kW"]), float(row["Q_kvar"])) * 1e3 / 3, volts, POWER)
        for row in nodes
    ]
    loads += [(ids[node], power / 3, volts, POWER) for node, power in extra]
    return ids, build(len(ids), [(ids[node], volts) for node in held], lines, (), loads)
