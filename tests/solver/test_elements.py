"""Element models: lines, transformers, loads, against closed forms and standards."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from networks import CURRENT, build

from solver import line, load, solve, transformer


def test_resistance_rises_with_temperature():
    # IEC 60287-1-1: 4 % per 10 K for copper, α = 0.00393
    assert line.resistance(0.193, line.ALPHA["Cu"], 20) == pytest.approx(0.193)
    assert line.resistance(0.193, line.ALPHA["Cu"], 70) == pytest.approx(0.193 * 1.1965)
    assert line.resistance(0.125, line.ALPHA["Al"], 90) == pytest.approx(0.125 * 1.2821)


def test_series_and_charging_of_parallel_and_two_wire_runs():
    one = line.series(0.125, 0.072, 900, 60, line.ALPHA["Al"])
    assert one == pytest.approx(0.9 * (0.14515 + 0.072j))
    assert line.series(0.125, 0.072, 900, 60, line.ALPHA["Al"], 3) == pytest.approx(one / 3)
    assert line.series(0.125, 0.072, 900, 60, line.ALPHA["Al"], 1, True) == pytest.approx(2 * one)
    y = line.charging(0.19, 1150, 50)
    assert y == pytest.approx(2j * math.pi * 50 * 0.19e-6 * 1.15)
    assert line.charging(0.19, 1150, 50, 2) == pytest.approx(2 * y)
    assert line.charging(0.19, 1150, 50, 1, True) == pytest.approx(y / 2)


def test_nameplate_to_impedance_and_magnetising_branch():
    z = transformer.short_circuit(4, 1750, 160e3, 400)
    assert abs(z) == pytest.approx(0.04)
    assert z.real == pytest.approx(1750 * 400**2 / 160e3**2)
    y = transformer.magnetising(189, 0.7, 160e3, 11e3)
    assert y.real * 11e3**2 == pytest.approx(189)
    assert abs(y) * 11e3**2 == pytest.approx(0.007 * 160e3)
    assert y.imag < 0
    with pytest.raises(ValueError, match="uk"):
        transformer.short_circuit(1, 1750, 160e3, 400)
    with pytest.raises(ValueError, match="no-load"):
        transformer.magnetising(189, 0.1, 160e3, 11e3)


GROUPS = (
    "Dyn11 Dyn1 Dyn5 Dyn7 YNd1 YNd5 YNd11 Yd11 Yyn0 YNyn0 YNyn6 Dd0 Dd6 Dd10 Yzn11 Yzn5 Dzn0 Dzn10 Ii0 Ii6"
)


@pytest.mark.parametrize("group", GROUPS.split())
def test_usual_groups(group):
    assert transformer.clock(group) == int("".join(c for c in group if c.isdigit()))


@pytest.mark.parametrize(
    "group", ["", "Dyn", "Dyn12", "Dyn0", "Yyn11", "Dd1", "Yzn0", "Ii1", "Iyn0", "dyn11", "Xy0"]
)
def test_groups_that_cannot_be(group):
    with pytest.raises(ValueError, match="vector group|clock number|mixes"):
        transformer.clock(group)


def test_low_voltage_of_dyn11_leads_by_thirty_degrees():
    ratio, z, y = transformer.equivalent(11e3, 400, 0.0, 0.0, transformer.clock("Dyn11"))
    network = build(2, [(0, 11e3 / 3**0.5)], transformers=[(0, 1, ratio, z, *y)])
    low = solve(network).voltage[1, 0, 0]
    assert abs(low) == pytest.approx(400 / 3**0.5)
    assert np.degrees(np.angle(low)) == pytest.approx(30)


def test_raising_the_high_voltage_tap_lowers_the_low_voltage():
    notches = np.arange(-2, 3)
    factor = transformer.tap_factor(notches, 2.5)
    assert factor == pytest.approx([0.95, 0.975, 1, 1.025, 1.05])
    ratio, z, y = transformer.equivalent(11e3, 400, 0.01j, 1e-6, tap_1=factor)
    network = build(2, [(0, 11e3)], transformers=[(0, 1, ratio, z, *y)])
    assert np.abs(solve(network).voltage[1, 0]) == pytest.approx(400 / factor)


def test_ohms_stay_constant_on_the_untapped_side():
    z, y = 0.004 + 0.04j, 1e-6 - 1e-5j
    on_1 = transformer.equivalent(11e3, 400, z, y, tap_1=1.05)
    assert on_1.z == pytest.approx(z)
    on_2 = transformer.equivalent(11e3, 400, z, y, tap_2=1.05)
    assert on_2.z * abs(on_2.ratio) ** 2 == pytest.approx(z * (11e3 / 400) ** 2)
    pair = transformer.equivalent(11e3, 400, z, y, parallel=2)
    assert pair.z == pytest.approx(z / 2)


def test_iron_stands_at_the_higher_voltage_and_its_tap():
    y = 1e-6 - 1e-5j
    at = transformer.equivalent(11e3, 400, 0.04j, y, tap_1=[1, 1.05], parallel=2).y
    assert at[0] == pytest.approx(2 * y / np.array([1, 1.05]) ** 2)
    assert at[1] == pytest.approx(0)
    at = transformer.equivalent(400, 11e3, 0.04j, y, tap_2=[1, 1.05]).y
    assert at[0] == pytest.approx(0)
    assert at[1] == pytest.approx(y * (400 / 11e3) ** 2 / np.array([1, 1.05]) ** 2)
    assert transformer.equivalent(400, 11e3, 0.04j, y, tap_1=1.05).y[1] == pytest.approx(at[1][0])


@given(st.floats(0.1, 1.5), st.floats(0.2, 3), st.floats(2, 6), st.floats(-1.2, 1.2))
def test_regulation_solved_exact_and_by_kapp(beta, ur, ux, phi):
    rating, low = 100e3, 400.0
    z = (ur + 1j * ux) / 100 * low**2 / rating
    exact = float(transformer.regulation(beta, ur, ux, phi))
    current = beta * rating / low
    sent = low + z * current * np.exp(-1j * phi)
    network = build(
        2,
        [(0, sent * 27.5)],
        transformers=[(0, 1, 27.5, z)],
        loads=[(1, current * low * np.exp(1j * phi), low, CURRENT)],
    )
    solution = solve(network)
    no_load = abs(network.source_voltage[0, 0, 0]) / 27.5
    assert 100 * (no_load / abs(solution.voltage[1, 0, 0]) - 1) == pytest.approx(exact, abs=1e-8)
    kapp = float(transformer.regulation_kapp(beta, ur, ux, phi))
    along = beta * math.hypot(ur, ux) / 100
    assert abs(kapp - exact) < 100 * along**3  # the terms that Kapp leaves out are of third order


def test_efficiency_solved_and_in_closed_form():
    rating, low, iron, copper = 100e3, 400.0, 130.0, 1250.0
    z = transformer.short_circuit(4, copper, rating, low)
    y = transformer.magnetising(iron, 0.8, rating, 11e3)
    best = float(transformer.best_loading(iron, copper))
    beta = np.array([0.1, 0.25, best, 0.5, 0.75, 1.0])
    phi = math.acos(0.9)
    closed = transformer.efficiency(beta, rating, 0.9, iron, copper)
    assert closed.argmax() == 2
    current = beta * rating / low * np.exp(-1j * phi)
    # primary held where the iron sees rated voltage, as the conventional efficiency has it
    sent = np.full(beta.size, 11e3) * np.exp(1j * np.angle(low + z * current))
    loads = [(1, np.abs(current) * low * np.exp(1j * phi), low, CURRENT)]
    solution = solve(build(2, [(0, sent)], transformers=[(0, 1, 27.5, z, y)], loads=loads))
    assert solution.transformer_magnetising_loss[0].real == pytest.approx(np.full(6, iron))
    assert solution.transformer_series_loss[0].real == pytest.approx(copper * beta**2)
    out = solution.load_power[0, 0].real
    at_rated = beta * rating * 0.9
    again = 100 * at_rated / (at_rated + iron + copper * beta**2)
    assert closed == pytest.approx(again)
    solved = 100 * out / solution.source_power[0, 0].real
    assert solved == pytest.approx(100 * out / (out + iron + copper * beta**2))
    assert closed - solved == pytest.approx(np.zeros(6), abs=0.1)  # volts sag by up to 3 % under load


def test_power_and_mix_of_loads():
    assert load.power(80e3, 0.95) == pytest.approx(80e3 * (0.95 + 1j * math.sin(math.acos(0.95))))
    assert load.power(80e3, 0.95, True) == pytest.approx(np.conj(load.power(80e3, 0.95)))
    assert load.mix(0.2, 0.3) == pytest.approx([0.5, 0.2, 0.3])
    assert load.mix([0, 1, 0.5], [1, 0, 0.5]).shape == (3, 3)
    for shares in ((-0.1, 0), (0, 1.1), (0.6, 0.6)):
        with pytest.raises(ValueError, match="shares"):
            load.mix(*shares)
    drawn = load.drawn(1000 + 500j, load.mix(0.2, 0.3), 0.9 * 230, 230)
    assert drawn == pytest.approx((1000 + 500j) * (0.5 + 0.2 * 0.9 + 0.3 * 0.81))
