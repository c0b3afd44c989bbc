"""Line constants against published matrices and constants; sequences; neutrals earthed and carried."""

import csv

import numpy as np
import pytest
from networks import REFERENCE

from solver import carson, line

MILE, FOOT = 1.609344, 0.3048
PHASE_X, PHASE_Y = (0.0, 2.5, 7.0), 29.0  # feet; neutral at 4, 25
NEUTRAL = (0.592, 0.00814)  # ohm a mile, feet
CONDUCTORS = {  # ohm a mile, GMR in feet, and the phases in the order they hang
    "Kersting example 4.1": ((0.306, 0.0244), "abc"),
    "IEEE 13-node configuration 601": ((0.1859, 0.0313), "bac"),
    "IEEE 13-node configuration 602": ((0.592, 0.00814), "cab"),
}


def rows(name):
    with open(REFERENCE / f"{name}.csv", newline="") as file:
        return list(csv.DictReader(file))


def matrix(conductor, order, frequency=60.0):
    r, gmr = conductor
    primitive = carson.primitive(
        np.array([r, r, r, NEUTRAL[0]]) / MILE,
        np.array([gmr, gmr, gmr, NEUTRAL[1]]) * FOOT,
        np.array([*PHASE_X, 4.0]) * FOOT,
        np.array([PHASE_Y, PHASE_Y, PHASE_Y, 25.0]) * FOOT,
        frequency,
    )
    hung = carson.kron(primitive, 3) * MILE
    where = [order.index(phase) for phase in "abc"]
    return hung[np.ix_(where, where)]


@pytest.mark.parametrize("name", CONDUCTORS)
def test_published_matrices(name):
    """Kersting, Distribution System Modeling and Analysis, example 4.1; IEEE 13 node feeder, ohm a mile."""
    ours = matrix(*CONDUCTORS[name])
    found = [row for row in rows("line_impedance_matrices") if row["example"] == name]
    assert len(found) == 6
    for row in found:
        value = ours["abc".index(row["row"]), "abc".index(row["col"])]
        assert value.real == pytest.approx(float(row["R_ohm_per_mile"]), abs=1.5e-4)
        assert value.imag == pytest.approx(float(row["X_ohm_per_mile"]), abs=1.5e-4)


def test_published_sequence_impedances():
    z = carson.sequence(matrix(*CONDUCTORS["Kersting example 4.1"]))
    name = "Kersting example 4.1 sequence"
    for row in (r for r in rows("line_impedance_matrices") if r["example"] == name):
        value = z[int(row["row"]), int(row["col"])]
        assert value.real == pytest.approx(float(row["R_ohm_per_mile"]), abs=1.5e-4)
        assert value.imag == pytest.approx(float(row["X_ohm_per_mile"]), abs=1.5e-4)


@pytest.mark.parametrize("frequency", [50, 60])
def test_constants_follow_the_frequency(frequency):
    """R, X and K of the equations in miles and feet, as the handbook table has them."""
    known = {r["name"]: float(r["value"]) for r in rows("line_impedance_constants") if r["value"]}
    z = carson.primitive([0.0, 0.0], [1.0, 1.0], [0.0, FOOT], [10.0, 10.0], frequency) * MILE
    r, x, k = (known[f"carson_{frequency}Hz_100ohmm_{c}"] for c in "RXK")
    assert z[0, 1].real == pytest.approx(r, abs=1e-5)
    assert z[0, 1].imag == pytest.approx(x * k, rel=1e-4)
    depth = known[f"equivalent_earth_return_depth_{frequency}Hz_100ohmm"]
    assert carson.earth_depth(frequency) == pytest.approx(depth, abs=1.1)
    assert z[0, 1].real / MILE == pytest.approx(known[f"carson_SI_{frequency}Hz_R"], abs=1e-5)


def test_charging_of_one_wire_is_that_of_a_wire_above_a_plane():
    c = 1 / carson.potential([0.01], [0.0], [10.0])[0, 0]
    assert c == pytest.approx(2e3 * np.pi * carson.EPSILON / np.log(20 / 0.01))
    p = carson.potential([0.01] * 2, [0, 1], [10, 10])
    assert p[0, 1] == p[1, 0]
    assert carson.kron(p, 1)[0, 0].real < p[0, 0]


def test_sequences_there_and_back():
    z1, z0 = 0.3 + 0.4j, 0.6 + 1.5j
    found = carson.sequence(line.symmetric(z1, z0))
    assert np.allclose(found, np.diag([z0, z1, z1]))
    assert line.symmetric([z1, z0], [z0, z1]).shape == (2, 3, 3)


def test_a_carried_neutral_comes_back_thrice_in_the_zero_sequence():
    phase, neutral = 0.2 + 0.08j, 0.4 + 0.09j
    z = line.four_wire(phase, neutral)
    out_and_back = z[:3, :3] - z[:3, 3:] - z[3:, :3] + z[3, 3]  # phase volts against the neutral
    assert carson.sequence(out_and_back)[0, 0] == pytest.approx(phase + 3 * neutral)
    assert carson.sequence(out_and_back)[1, 1] == pytest.approx(phase)
    assert line.four_wire(phase, neutral, 0.01j)[0, 3] == pytest.approx(0.01j)
