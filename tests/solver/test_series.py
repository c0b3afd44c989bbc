"""A series in blocks: the same as all at once, energies that balance, stopping, points without an answer."""

from dataclasses import replace

import numpy as np
import pytest
from networks import POWER, build
from random_networks import random_network
from test_wires import random_layout

from solver import solve
from solver.control import Regulator, control
from solver.series import solve_series
from solver.share import pick


def year(points=50, dead=1):
    network = random_network(3, nodes=25, units=4, sources=2, dead=dead)
    share = 0.4 + 0.6 * np.sin(np.linspace(0, 9, points)) ** 2
    return replace(network, load_power=network.load_power * share)


@pytest.mark.parametrize("block", [7, 16, 50, None])
def test_blocks_change_nothing(block):
    network = year()
    hours = np.linspace(0.5, 1.5, 50)
    whole, series = solve(network), solve_series(network, hours, block=block)
    volts = np.abs(whole.voltage[:, 0])
    live = ~np.isnan(volts[:, 0])
    assert series.done == 50
    assert series.unsolved.size == 0
    assert series.hours == pytest.approx(hours.sum())
    assert series.lowest.value[live] == pytest.approx(volts[live].min(axis=1), rel=1e-12)
    assert series.highest.value[live] == pytest.approx(volts[live].max(axis=1), rel=1e-12)
    low = series.lowest.point[live]
    assert volts[live][np.arange(live.sum()), low] == pytest.approx(volts[live].min(axis=1), rel=1e-12)
    assert np.isnan(series.lowest.value[~live]).all()
    assert (series.lowest.point[~live] == -1).all()
    assert series.line_loss == pytest.approx(whole.line_series_loss.real @ hours, rel=1e-10)
    assert series.copper_loss == pytest.approx(whole.transformer_series_loss.real @ hours, rel=1e-10)
    assert series.iron_loss == pytest.approx(whole.transformer_magnetising_loss.real @ hours, rel=1e-10)
    both = np.maximum(np.abs(whole.line_in), np.abs(whole.line_out))[:, 0].max(axis=1)
    assert series.line_current.value == pytest.approx(both, rel=1e-10)


def test_energy_balances():
    series = solve_series(year(), block=9)
    lost = (
        series.line_loss.sum()
        + series.charging_loss.sum()
        + series.copper_loss.sum()
        + series.iron_loss.sum()
    )
    taken = series.drawn.sum() + series.shunt_loss.sum()
    assert series.supplied.sum() == pytest.approx(taken + lost, rel=1e-9)
    assert series.closure < 1e-10


def test_progress_and_stopping():
    told = []

    def progress(done, whole):
        told.append((done, whole))
        return done < 20

    series = solve_series(year(), progress=progress, block=8)
    assert told == [(8, 50), (16, 50), (24, 50)]
    assert series.done == 24
    assert series.hours == 24


def test_points_without_an_answer_are_named_and_left_out():
    network = year(12, dead=0)
    factor = np.ones(12)
    factor[5] = 1e4
    network = replace(network, load_power=network.load_power * factor)
    series = solve_series(network, block=4)
    assert series.unsolved.tolist() == [5]
    assert series.hours == 11
    assert 5 not in series.lowest.point


def test_four_wires():
    layout = random_layout(3)
    network = layout.network()
    whole, series = solve(network), solve_series(network, block=1)
    assert series.line_loss == pytest.approx(whole.line_series_loss.real.sum(axis=1), rel=1e-9)
    assert series.lowest.value == pytest.approx(
        np.nanmin(np.abs(whole.voltage[:, :3]), axis=(1, 2)), rel=1e-10
    )
    taken = (
        series.drawn.sum() + series.line_loss.sum() + series.charging_loss.sum() + series.copper_loss.sum()
    )
    electrodes = (np.abs(whole.earth_current) ** 2 * network.wires.earth_z.real).sum()
    assert series.supplied.sum() == pytest.approx(taken + series.iron_loss.sum() + electrodes, rel=1e-9)


def test_what_steps_rests_in_each_point_anew_and_blocks_are_shown():
    volts, share = 11e3 / 3**0.5, np.linspace(0.1, 1.0, 20)
    network = build(
        4,
        [(0, volts)],
        [(0, 1, 2 + 3j), (2, 3, 3 + 4j)],
        [(1, 2, 1.0, 0.1 + 0.5j)],
        loads=[(3, 600e3 + 250e3j, volts, POWER)],
    )
    network = replace(network, load_power=network.load_power * share)
    step = Regulator(
        transformer=0, tapped=2, step=0.00625, lowest=-16, highest=16, setting=volts, bandwidth=0.0125 * volts
    )
    seen = {}

    def watch(points, solution, rested):
        seen.update(zip(points.tolist(), rested.notch[0].tolist(), strict=True))

    series = solve_series(network, block=6, regulators=[step], watch=watch)
    alone = [control(pick(network, np.array([i])), [step]) for i in range(20)]
    assert [seen[i] for i in range(20)] == [int(one.notch[0, 0]) for one in alone]
    assert len(set(seen.values())) > 3
    low = min(float(np.abs(one.solution.voltage[3, 0, 0])) for one in alone)
    assert series.lowest.value[3] == pytest.approx(low, rel=1e-9)
    lost = sum(one.solution.line_series_loss.real.sum() for one in alone)
    assert series.line_loss.sum() == pytest.approx(lost, rel=1e-9)
