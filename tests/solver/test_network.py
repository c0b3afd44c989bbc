"""A programmer's mistake in the arrays is a ValueError that names the array."""

from dataclasses import replace

import numpy as np
import pytest
from random_networks import random_network

from solver import solve


def broken(name, change):
    network = random_network(1, nodes=12, units=2)
    array = getattr(network, name).copy()
    return replace(network, **{name: change(array)})


def put(value, row=0):
    def change(array):
        array[row] = value
        return array

    return change


@pytest.mark.parametrize(
    ("name", "change"),
    [
        ("line_z", put(np.nan)),
        ("load_power", put(np.inf)),
        ("source_voltage", put(0)),
        ("transformer_ratio", put(0)),
        ("load_reference", put(0)),
        ("load_reference", put(-1)),
        ("load_mix", put(2)),
        ("load_mix", lambda a: a[:, :2]),
        ("line_from", put(-1)),
        ("line_to", put(99)),
        ("shunt_node", put(99)),
        ("load_node", lambda a: a.astype(float)),
        ("line_to", lambda a: a[1:]),
        ("line_y", lambda a: a[:, 0]),
        ("shunt_y", lambda a: a[1:]),
        ("transformer_z", lambda a: np.repeat(a, 3, axis=1)[:, :2][:, None]),
    ],
)
def test_a_broken_array_is_named(name, change):
    with pytest.raises(ValueError, match=name):
        solve(broken(name, change))


def test_batches_of_different_length_do_not_fit():
    network = random_network(1, nodes=12, units=2)
    wide = replace(
        network,
        line_z=np.repeat(network.line_z, 3, axis=-1),
        load_power=np.repeat(network.load_power, 2, axis=-1),
    )
    with pytest.raises(ValueError, match="load_power"):
        solve(wide)


def test_batch_is_the_longest_last_axis():
    assert random_network(1, nodes=12, units=2, width=5).batch == 5
