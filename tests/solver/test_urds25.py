"""The 25-node unbalanced feeder: the printed figures, and every voltage of an independent solution.

Source : Raju, Bijwe, Efficient reconfiguration of balanced and unbalanced distribution systems for loss
    minimisation, IET Gener. Transm. Distrib. 2 (2008) 7-12 (citation and tables from memory; solving them
    lands on the printed result)
"""

import numpy as np
import pytest
from networks import facts, table
from wired import ABC, EARTH, POWER, Layout, balanced

from solver import Status, solve

VOLTS = 4160 / 3**0.5


def feeder():
    z = {}
    for row in table("urds25_configs"):
        matrix = z.setdefault(row["config"], np.zeros((3, 3), dtype=complex))
        i, j = ("abc".index(c) for c in row["phases"])
        matrix[i, j] = matrix[j, i] = complex(float(row["R_ohm_per_mile"]), float(row["X_ohm_per_mile"]))
    segments = table("urds25_segments")
    lines = [
        (int(r["from"]) - 1, int(r["to"]) - 1, ABC, z[r["config"]] * float(r["length_ft"]) / 5280)
        for r in segments
    ]
    loads = [
        (
            int(r["node"]) - 1,
            i,
            EARTH,
            complex(float(r[f"P{p}_kW"]), float(r[f"Q{p}_kvar"])) * 1e3,
            VOLTS,
            POWER,
        )
        for r in table("urds25_loads")
        for i, p in enumerate("abc")
    ]
    return Layout(25, [(0, balanced(VOLTS))], lines, [], loads).network()


def test_printed_losses_and_lowest_voltages():
    solution = solve(feeder())
    assert solution.status == (Status.SOLVED,)
    published = facts("urds25")["published"]
    network = solution.network
    volts = solution.voltage[:, :3, 0]
    drop = volts[network.line_from] - volts[network.line_to]
    lost = (drop * np.conj(solution.line_in[:, :3, 0])).sum(axis=0).real / 1e3
    assert lost == pytest.approx(published["loss_kW_per_phase"], abs=0.0051)
    whole = solution.line_loss.sum() / 1e3
    assert whole.real == pytest.approx(published["loss_kW_total"], abs=0.0051)
    assert whole.imag == pytest.approx(published["loss_kvar_total"], abs=0.0051)
    lowest = np.abs(volts / VOLTS)
    assert lowest.min(axis=0) == pytest.approx(published["Vmin_pu_per_phase"], abs=5.1e-5)
    assert (lowest.argmin(axis=0) == int(published["Vmin_node"]) - 1).all()


def test_every_voltage_of_the_independent_solution():
    volts = solve(feeder()).voltage[:, :, 0]
    for row in table("urds25_solution"):
        value = volts[int(row["node"]) - 1, "abc".index(row["phase"])]
        assert abs(value) == pytest.approx(float(row["V_LN_volt"]), abs=2e-5)
        assert np.degrees(np.angle(value)) == pytest.approx(float(row["angle_deg"]), abs=2e-6)
