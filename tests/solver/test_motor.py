"""Motors in closed form."""

import math

import numpy as np
import pytest

from solver import motor


def test_running_power_is_the_shaft_over_efficiency():
    drawn = motor.running(200e3, 0.95, 0.86)
    assert drawn.real == pytest.approx(200e3 / 0.95, rel=1e-15)
    assert abs(drawn) == pytest.approx(200e3 / 0.95 / 0.86, rel=1e-15)
    assert drawn.imag > 0


def test_starting_power_is_a_multiple_of_the_rated_at_its_own_factor():
    rated = motor.running([7.5e3, 200e3], 0.9, 0.85)
    drawn = motor.starting(rated, [6.0, 7.0], 0.25)
    np.testing.assert_allclose(np.abs(drawn), np.abs(rated) * [6.0, 7.0], rtol=1e-15)
    np.testing.assert_allclose(drawn.real / np.abs(drawn), 0.25, rtol=1e-15)


def test_torques():
    assert motor.direct_torque(300.0, 400.0) == pytest.approx(0.5625)
    assert motor.limited_torque(3.0, 6.5) == pytest.approx(9 / 42.25)
    assert motor.limited_torque(8.0, 6.5) == 1.0
    assert math.isclose(motor.limited_torque(6.5, 6.5), 1.0)
