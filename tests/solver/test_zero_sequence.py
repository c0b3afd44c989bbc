"""Zero over positive sequence of a transformer's windings, against sequence networks worked out by hand."""

import numpy as np
import pytest
from wired import IMPEDANCE, TURN, A, Layout, N, Unit, balanced

from solver import solve
from solver.windings import Winding, three_phase

VOLTS, Z, LOAD = 230.0, 0.02 + 0.06j, 1.5 + 0.4j


class Unlike(Unit):
    """A unit whose zero sequence is not its positive one."""

    ratio0 = 1.0

    def port(self):
        return three_phase(self.one, self.two, self.clock, self.v1, self.v2, self.z, z0_over_z1=self.ratio0)


@pytest.mark.parametrize("ratio0", [0.1, 0.85, 1.0, 3.0])
@pytest.mark.parametrize(
    ("one", "two", "clock"),
    [
        (Winding("D"), Winding("Y", True, 0.0), 11),
        (Winding("D"), Winding("Z", True, 0.0), 0),
        (Winding("Y"), Winding("Z", True, 0.0), 11),
        (Winding("Y", True), Winding("Y", True, 0.0), 0),
    ],
)
def test_one_loaded_phase_sees_twice_z1_and_once_z0(one, two, clock, ratio0):
    high = 11e3 / 3**0.5
    unit = Unlike(0, 1, one, two, clock, 11e3, VOLTS * 3**0.5, Z)
    unit.ratio0 = ratio0
    power = VOLTS**2 / np.conj(LOAD)
    network = Layout(
        2, [(0, balanced(high))], units=[unit], loads=[(1, A, N, power, VOLTS, IMPEDANCE)]
    ).network()
    found = solve(network)
    want = 3 * VOLTS / ((2 + ratio0) * Z + 3 * LOAD)
    assert abs(found.load_current[0, A, 0]) == pytest.approx(abs(want), rel=1e-9)
    assert found.closure[0] < 1e-12


def test_an_earthed_star_beside_a_delta_draws_its_zero_sequence_against_z0():
    """Fed at the star with volts that have a zero sequence of their own."""
    apart = np.append(np.array([1, TURN, TURN**2]) * VOLTS + 10.0, 0)
    star, delta = Winding("Y", False, 0.0), Winding("D")
    for ratio0 in (0.5, 1.0, 2.0):
        unit = Unlike(0, 1, star, delta, 1, VOLTS * 3**0.5, VOLTS * 3**0.5, Z)
        unit.ratio0 = ratio0
        found = solve(Layout(2, [(0, apart)], units=[unit]).network())
        assert abs(found.source_current[0, :3, 0].sum()) == pytest.approx(
            abs(3 * 10 / (ratio0 * Z)), rel=1e-9
        )
